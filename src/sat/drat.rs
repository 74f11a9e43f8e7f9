//! DRAT proofs: clauses added and deleted, in text and in bytes.
//!
//! The format: N. Wetzler, M. Heule, W. Hunt, "DRAT-trim: efficient checking and trimming using expressive clausal
//! proofs", SAT 2014. A text line is a clause that is added, or `d` and a clause that is deleted, each ended by 0. In
//! bytes a step is `a` or `d`, then its literals, then a zero; the literal of variable `v` (from 1) is the number `2 v`
//! or, negated, `2 v + 1`, in groups of seven bits, lowest first, the high bit set in all but the last.

use std::io::{self, Write};

use thiserror::Error;

use super::Lit;

/// One step of a proof.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Step<'a> {
    /// The clause follows from those before it.
    Add(&'a [Lit]),
    /// The clause is no longer needed.
    Delete(&'a [Lit]),
}

/// A proof: steps in order.
#[derive(Clone, PartialEq, Eq, Default, Debug)]
pub struct Proof {
    lits: Vec<Lit>,
    /// Where each step ends in the pool, and whether it deletes.
    ends: Vec<(u32, bool)>,
    /// Hints, and for the steps that have some: the step, and where its hints end. Not a part of the format.
    hints: Vec<u32>,
    hinted: Vec<(u32, u32)>,
}

/// Why bytes or text are no proof.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
#[error("step {step} of the proof: {what}")]
pub struct NotAProof {
    /// The step, from 1.
    pub step: usize,
    /// What is wrong.
    pub what: &'static str,
}

/// The most variables a proof may speak of.
const MAX_VAR: u64 = 1 << 30;

impl Proof {
    /// A proof without steps.
    pub fn new() -> Self {
        Self::default()
    }

    /// How many steps.
    pub fn len(&self) -> usize {
        self.ends.len()
    }

    /// Whether there is no step.
    pub fn is_empty(&self) -> bool {
        self.ends.is_empty()
    }

    /// Appends a clause that is added.
    pub fn add(&mut self, clause: impl IntoIterator<Item = Lit>) {
        self.push(clause, false);
    }

    /// Appends a clause that is added, with hints: earlier steps whose clauses, taken in this order, are enough for it to
    /// follow. They are advice for a checker in this program, and are not written out.
    pub fn add_with(&mut self, clause: impl IntoIterator<Item = Lit>, hints: &[u32]) {
        if !hints.is_empty() {
            self.hints.extend_from_slice(hints);
            let end = u32::try_from(self.hints.len()).expect("fewer than 2^32 hints");
            self.hinted.push((self.ends.len() as u32, end));
        }
        self.add(clause);
    }

    /// The hints of each step that has some, in the order of the steps.
    pub fn hints(&self) -> impl Iterator<Item = (usize, &[u32])> {
        self.hinted.iter().enumerate().map(|(at, &(step, end))| {
            let start = if at == 0 { 0 } else { self.hinted[at - 1].1 };
            (step as usize, &self.hints[start as usize..end as usize])
        })
    }

    /// Appends the steps of another proof, with their hints.
    pub fn append(&mut self, other: &Proof) {
        let base = self.len() as u32;
        let mut hints = other.hints().peekable();
        for (at, step) in other.steps().enumerate() {
            match step {
                Step::Add(clause) => {
                    let hints = hints.next_if(|&(step, _)| step == at).map_or(&[][..], |(_, hints)| hints);
                    let hints: Vec<u32> = hints.iter().map(|hint| base + hint).collect();
                    self.add_with(clause.iter().copied(), &hints);
                }
                Step::Delete(clause) => self.delete(clause.iter().copied()),
            }
        }
    }

    /// Appends a clause that is deleted.
    pub fn delete(&mut self, clause: impl IntoIterator<Item = Lit>) {
        self.push(clause, true);
    }

    fn push(&mut self, clause: impl IntoIterator<Item = Lit>, deletes: bool) {
        self.lits.extend(clause);
        self.ends.push((u32::try_from(self.lits.len()).expect("fewer than 2^32 literals"), deletes));
    }

    /// A step by its place.
    pub fn step(&self, at: usize) -> Step<'_> {
        let start = if at == 0 { 0 } else { self.ends[at - 1].0 };
        let (end, deletes) = self.ends[at];
        let clause = &self.lits[start as usize..end as usize];
        if deletes { Step::Delete(clause) } else { Step::Add(clause) }
    }

    /// The steps in order.
    pub fn steps(&self) -> impl ExactSizeIterator<Item = Step<'_>> {
        (0..self.len()).map(|at| self.step(at))
    }

    /// Writes the proof as text, a step a line.
    pub fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        for step in self.steps() {
            let clause = match step {
                Step::Add(clause) => clause,
                Step::Delete(clause) => {
                    write!(out, "d ")?;
                    clause
                }
            };
            for lit in clause {
                write!(out, "{} ", lit.to_dimacs())?;
            }
            writeln!(out, "0")?;
        }
        Ok(())
    }

    /// The proof in bytes.
    pub fn to_bytes(&self) -> Vec<u8> {
        let mut bytes = Vec::new();
        for step in self.steps() {
            let (kind, clause) = match step {
                Step::Add(clause) => (b'a', clause),
                Step::Delete(clause) => (b'd', clause),
            };
            bytes.push(kind);
            for lit in clause {
                let mut number = (lit.var() as u64 + 1) << 1 | u64::from(lit.is_negated());
                while number >= 0x80 {
                    bytes.push(number as u8 | 0x80);
                    number >>= 7;
                }
                bytes.push(number as u8);
            }
            bytes.push(0);
        }
        bytes
    }

    /// Reads a proof in bytes.
    pub fn from_bytes(bytes: &[u8]) -> Result<Self, NotAProof> {
        let mut proof = Self::new();
        let mut rest = bytes.iter().copied();
        while let Some(kind) = rest.next() {
            let fault = |what| NotAProof { step: proof.len() + 1, what };
            let deletes = match kind {
                b'a' => false,
                b'd' => true,
                _ => return Err(fault("neither an addition nor a deletion")),
            };
            let mut clause = Vec::new();
            loop {
                match number(&mut rest).ok_or_else(|| fault("a literal is cut short or too large"))? {
                    0 => break,
                    1 => return Err(fault("a literal of variable 0")),
                    number => clause.push(Lit::new((number >> 1) as usize - 1, number & 1 == 0)),
                }
            }
            proof.push(clause, deletes);
        }
        Ok(proof)
    }

    /// Reads a proof as text.
    pub fn from_text(text: &str) -> Result<Self, NotAProof> {
        let mut proof = Self::new();
        let mut clause = Vec::new();
        let mut deletes = false;
        for word in text.split_ascii_whitespace() {
            let fault = |what| NotAProof { step: proof.len() + 1, what };
            if word == "d" {
                if deletes || !clause.is_empty() {
                    return Err(fault("a `d` inside a clause"));
                }
                deletes = true;
                continue;
            }
            let number: i64 = word.parse().map_err(|_| fault("neither a number nor a `d`"))?;
            match number.unsigned_abs() {
                0 => {
                    proof.push(clause.drain(..), deletes);
                    deletes = false;
                }
                var if var >= MAX_VAR => return Err(fault("a variable is too large")),
                var => clause.push(Lit::new(var as usize - 1, number > 0)),
            }
        }
        match deletes || !clause.is_empty() {
            true => Err(NotAProof { step: proof.len() + 1, what: "the last clause is not ended by 0" }),
            false => Ok(proof),
        }
    }
}

/// A number in groups of seven bits, below twice [`MAX_VAR`].
fn number(bytes: &mut impl Iterator<Item = u8>) -> Option<u64> {
    let mut number = 0;
    for shift in (0..35).step_by(7) {
        let byte = bytes.next()?;
        number |= u64::from(byte & 0x7f) << shift;
        if byte & 0x80 == 0 {
            return (number < 2 * MAX_VAR).then_some(number);
        }
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The example of the format's documentation, quoted with the SAT 2014 paper.
    #[test]
    fn the_documented_bytes_are_written_and_read() {
        let bytes = [0x64, 0x7f, 0x83, 0x80, 0x01, 0x00, 0x61, 0x82, 0x02, 0xff, 0x7f, 0x00];
        let text = "d -63 -8193 0\n129 -8191 0\n";
        let proof = Proof::from_text(text).unwrap();
        assert_eq!(proof.to_bytes(), bytes);
        assert_eq!(Proof::from_bytes(&bytes).unwrap(), proof);
        let mut written = Vec::new();
        proof.write_text(&mut written).unwrap();
        assert_eq!(String::from_utf8(written).unwrap(), text);
    }

    #[test]
    fn damaged_proofs_are_refused() {
        for bytes in
            [&[0x61, 0x82][..], &[0x61, 0x01, 0x00], &[0x62, 0x00], &[0x61], &[0x61, 255, 255, 255, 255, 255, 0]]
        {
            assert_eq!(Proof::from_bytes(bytes).unwrap_err().step, 1, "{bytes:?}");
        }
        for text in ["1 2", "d", "1 d 2 0", "x 0", "d d 1 0", "9999999999 0"] {
            assert_eq!(Proof::from_text(text).unwrap_err().step, 1, "{text}");
        }
    }
}
