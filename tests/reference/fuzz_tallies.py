"""Random problems: the command against the reference.

    python3 fuzz_tallies.py NUMBER [--seed FIRST] [--circuits M]

For `NUMBER` texts of `tally_generator`, from seed `FIRST` on, the tally and the number of bits must agree. For the first
`M` of them the oracle of one level and mark (they take turns) is written too, read with the standard's reference
parser, and run on every input in superposition, as `check_qasm` does. Texts that nothing or everything satisfies are
kept once in four times. A difference is printed with its text; `--seed` then brings it back.
"""

import pathlib
import sys
import tempfile
from collections import Counter

import check_qasm
import tally_generator
import tally_meaning
import tally_reference
from command import CommandFailed, options, run, run_json


def worth_it(seed, problem, number):
    """Whether a text is kept: all that are neither impossible nor free, and a quarter of the others."""
    space = tally_meaning.count_of([variable.size for variable in problem.variables])
    return number not in (0, space) or seed % 4 == 0


def check_oracle(command, path, problem, settings, turn):
    """Writes and runs one oracle; raises what `check_qasm` raises."""
    level = check_qasm.LEVELS[turn % 4]
    mark = check_qasm.MARKS[turn // 4 % 2]
    out = path.with_name(f"{path.stem}-{level}-{mark}.qasm")
    run(command, "compile", path, "--level", level, "--mark", mark, "-o", out, *settings)
    subject = check_qasm.Subject.of_problem(path, problem)
    return check_qasm.examine(out, subject, mark, False)


def main():
    given = options(
        __doc__.splitlines()[0],
        ("number", {"type": int}),
        ("--seed", {"type": int, "default": 0}),
        ("--circuits", {"type": int, "default": 0}),
    )
    done, failed, seed = Counter(), 0, given.seed - 1
    with tempfile.TemporaryDirectory() as folder:
        while done["compared"] < given.number:
            seed += 1
            text, values = tally_generator.problem(seed)
            problem = tally_meaning.read(text, values)
            number = tally_reference.count(problem)
            if not worth_it(seed, problem, number):
                continue
            path = pathlib.Path(folder) / f"made-{seed}.tally"
            path.write_text(text)
            settings = [word for name, value in values.items() for word in ("--set", f"{name}={value}")]
            try:
                found = run_json(given.command, "count", path, *settings)
                said = (int(found["tally"]["count"]), found["problem"]["bits"])
                if said != (number, problem.bits):
                    raise check_qasm.Differs(f"{number} solutions over {problem.bits} bits, the command says {said}")
                if done["compared"] < given.circuits and 0 < number < 1 << problem.bits:
                    done += check_oracle(given.command, path, problem, settings, done["compared"])
            except (CommandFailed, check_qasm.Differs, check_qasm.QasmError) as error:
                failed += 1
                print(f"FAIL seed {seed} {' '.join(settings)}: {error}\n{text}")
            done["compared"] += 1
            done["without solution"] += number == 0
    print(f"random problems, seeds {given.seed} to {seed}: {failed} failed; " + check_qasm.in_words(done))
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(main())
