"""A quantum state held as a list of basis states with their amplitudes.

Basis states are rows of 64-bit words, one bit for each qubit; amplitudes stand beside them. An oracle on a
superposition of all inputs keeps few basis states for each input, so tens of ancillas cost nothing by themselves.

A state may carry *labels*: extra bits that no gate touches, entangled with the input, so that one run shows what the
circuit does to every input at once, relative phases included. Measuring a qubit then also gives the probability of its
outcome for each label: `spread` is how far these are apart, which must be nothing if outcomes tell nothing of the input.

Linear algebra only; no gate sequence is recognised. Matrices: Nielsen and Chuang, "Quantum Computation and Quantum
Information", Cambridge 2000, section 4.2 (from memory).
"""

import numpy as np

NEGLIGIBLE = 1e-12  # amplitudes below this are dropped when basis states are merged
CERTAIN = 1e-9  # a probability this close to 0 or 1 is one


class SparseState:
    """Basis states `words[w][row]` with amplitudes `amplitudes[row]`; qubit q is bit q % 64 of word q // 64."""

    def __init__(self, qubits, rows=1):
        self.words = [np.zeros(rows, dtype=np.uint64) for _ in range(max(1, (qubits + 63) // 64))]
        self.amplitudes = np.ones(rows, dtype=np.complex128)
        self.labels = np.zeros(rows, dtype=np.int64)

    def __len__(self):
        return len(self.amplitudes)

    def fill(self, qubits, codes):
        """Sets qubits (all 0 so far) to the bits of one code for each row, lowest bit in the first qubit."""
        for place, qubit in enumerate(qubits):
            bits = np.array([(int(code) >> place) & 1 for code in codes], dtype=np.uint64)
            self.words[qubit // 64] |= bits << np.uint64(qubit % 64)

    def bit(self, qubit):
        """The value of a qubit in each row, as Booleans."""
        return (self.words[qubit // 64] >> np.uint64(qubit % 64)) & np.uint64(1) != 0

    def value(self, qubits):
        """The value of a register in each row, lowest bit in the first qubit."""
        found = np.zeros(len(self), dtype=np.int64)
        for place, qubit in enumerate(qubits):
            found |= self.bit(qubit).astype(np.int64) << place
        return found

    def where(self, controls):
        """The rows in which every (qubit, wanted value) holds, as indices; `slice(None)` without controls."""
        if not controls:
            return slice(None)
        masks, wants = {}, {}
        for qubit, wanted in controls:
            word, bit = divmod(qubit, 64)
            masks[word] = masks.get(word, 0) | (1 << bit)
            wants[word] = wants.get(word, 0) | (int(wanted) << bit)
        holds = None
        for word, mask in masks.items():
            part = (self.words[word] & np.uint64(mask)) == np.uint64(wants[word])
            holds = part if holds is None else holds & part
        return np.flatnonzero(holds)

    def phase(self, factor, controls):
        """Multiplies the amplitudes of the rows in which the controls hold."""
        self.amplitudes[self.where(controls)] *= factor

    def apply(self, matrix, target, controls):
        """A 2 x 2 matrix on one qubit, under controls."""
        (a, b), (c, d) = matrix
        if b == 0 and c == 0:
            if a != 1:
                self.phase(a, [*controls, (target, 0)])
            if d != 1:
                self.phase(d, [*controls, (target, 1)])
            return
        word, mask = target // 64, np.uint64(1 << (target % 64))
        if a == 0 and d == 0:
            chosen = self.where(controls)
            if b != 1 or c != 1:
                ones = self.bit(target)[chosen]
                self.amplitudes[chosen] *= np.where(ones, b, c)
            self.words[word][chosen] ^= mask
            return
        self.mix(matrix, target, controls)

    def mix(self, matrix, target, controls):
        """A matrix that makes two basis states out of one."""
        chosen = self.where(controls)
        if not controls:
            chosen = np.arange(len(self))
        rest = np.ones(len(self), dtype=bool)
        rest[chosen] = False
        ones = self.bit(target)[chosen]
        word, mask = target // 64, np.uint64(1 << (target % 64))
        parts_words, parts_amplitudes, parts_labels = [[w[rest] for w in self.words]], [self.amplitudes[rest]], [self.labels[rest]]
        for result in (0, 1):
            factors = np.where(ones, matrix[result][1], matrix[result][0])
            words = [w[chosen] for w in self.words]
            words[word] = words[word] | mask if result else words[word] & ~mask
            parts_words.append(words)
            parts_amplitudes.append(self.amplitudes[chosen] * factors)
            parts_labels.append(self.labels[chosen])
        self.words = [np.concatenate([part[w] for part in parts_words]) for w in range(len(self.words))]
        self.amplitudes = np.concatenate(parts_amplitudes)
        self.labels = np.concatenate(parts_labels)
        self.merge()

    def merge(self):
        """Adds up equal basis states and drops those that cancel."""
        order = np.lexsort([*self.words, self.labels])
        words, labels = [w[order] for w in self.words], self.labels[order]
        new = np.ones(len(order), dtype=bool)
        new[1:] = labels[1:] != labels[:-1]
        for w in words:
            new[1:] |= w[1:] != w[:-1]
        starts = np.flatnonzero(new)
        amplitudes = np.add.reduceat(self.amplitudes[order], starts)
        kept = np.abs(amplitudes) > NEGLIGIBLE
        self.words = [w[starts][kept] for w in words]
        self.labels = labels[starts][kept]
        self.amplitudes = amplitudes[kept]

    def measure(self, qubit, random):
        """Measures one qubit: gives the outcome, its probability, and the spread of that over the labels."""
        weights = np.abs(self.amplitudes) ** 2
        ones = self.bit(qubit)
        whole = np.bincount(self.labels, weights=weights)
        part = np.bincount(self.labels, weights=weights * ones, minlength=len(whole))
        each = part[whole > 0] / whole[whole > 0]
        chance = float(part.sum() / whole.sum())
        spread = float(each.max() - each.min())
        if chance < CERTAIN or chance > 1 - CERTAIN:
            outcome = int(chance > 0.5)
        else:
            outcome = int(random.random() < chance)
        kept = ones if outcome else ~ones
        probability = chance if outcome else 1 - chance
        self.words = [w[kept] for w in self.words]
        self.labels = self.labels[kept]
        self.amplitudes = self.amplitudes[kept] / np.sqrt(probability)
        return outcome, probability, spread

    def distribution(self, qubits):
        """The probability of each value of a register, as an array."""
        weights = np.abs(self.amplitudes) ** 2
        return np.bincount(self.value(qubits), weights=weights, minlength=1 << len(qubits)) / weights.sum()
