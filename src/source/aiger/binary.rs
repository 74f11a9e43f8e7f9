//! The binary form: the output in a line, then two differences for each AND.

use super::fault::{Fault, Kind};
use super::lines::Lines;
use super::{And, Graph, Header};

const DIFFERENCES: &str = "two differences for each AND";

pub(super) fn graph(lines: &mut Lines<'_>, header: Header) -> Result<Graph, Fault> {
    let line = lines.line("the output literal")?;
    let [output] = line.numbers("the output literal")?;
    if output / 2 > header.largest {
        return Err(line.fault(Kind::OutOfRange(header.largest)));
    }
    let mut graph = Graph { output, inputs: (1..=header.inputs).map(|var| 2 * var).collect(), ..Graph::default() };
    for var in header.inputs + 1..=header.largest {
        let (start, out) = (lines.at, 2 * var);
        let first = difference(lines)?;
        let second = difference(lines)?;
        let order = || Fault { at: start..lines.at, kind: Kind::Order };
        let left = out.checked_sub(first).filter(|_| first > 0).ok_or_else(order)?;
        let right = left.checked_sub(second).ok_or_else(order)?;
        graph.ands.push(And { out, left, right });
    }
    Ok(graph)
}

/// A number in groups of seven bits, the lowest first; the high bit of a byte says that another follows.
pub(super) fn difference(lines: &mut Lines<'_>) -> Result<u64, Fault> {
    let start = lines.at;
    let mut value = 0u64;
    for shift in (0..63).step_by(7) {
        let end = lines.bytes.len();
        let byte = *lines.bytes.get(lines.at).ok_or(Fault { at: end..end, kind: Kind::Cut(DIFFERENCES) })?;
        lines.at += 1;
        value |= u64::from(byte & 0x7f) << shift;
        if byte < 0x80 {
            return Ok(value);
        }
    }
    Err(Fault { at: start..lines.at, kind: Kind::Order })
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The byte examples of the format's text.
    #[test]
    fn the_published_examples_of_the_code() {
        let examples: [(u64, &[u8]); 8] = [
            (0, &[0x00]),
            (127, &[0x7f]),
            (128, &[0x80, 0x01]),
            (258, &[0x82, 0x02]),
            (16383, &[0xff, 0x7f]),
            (16387, &[0x83, 0x80, 0x01]),
            ((1 << 28) - 1, &[0xff, 0xff, 0xff, 0x7f]),
            ((1 << 28) + 7, &[0x87, 0x80, 0x80, 0x80, 0x01]),
        ];
        for (value, bytes) in examples {
            let mut lines = Lines::new(bytes);
            assert_eq!((difference(&mut lines), lines.at), (Ok(value), bytes.len()));
        }
        assert!(difference(&mut Lines::new(&[0x80])).is_err());
        assert!(difference(&mut Lines::new(&[0xff; 20])).is_err());
    }
}
