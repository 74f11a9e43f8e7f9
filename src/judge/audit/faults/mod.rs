//! Faults: single changes of a correct circuit, of its places or of its problem, and the self-test that makes them.
//!
//! Input: a correct circuit with its problem and places. Output: how many random faults the audit caught, and for those
//! it did not, whether they do no harm ([`self_test`]). A [`Fault`] is plain data with a text form that reads back; it
//! says which gate and what change, and [`apply`] makes the changed circuit. Which faults a circuit can have, and which
//! one is next, is said by [`draw`]; [`proof`] shows that a fault does no harm, by another way than the audit's.

pub mod apply;
pub mod draw;
mod local;
pub mod proof;
pub mod trial;

pub use draw::{Drawer, Kind};
pub use trial::{Found, SelfTest, Trial, self_test};

use std::fmt;
use std::str::FromStr;

use crate::problem::Bits;

/// A single change. Gates, constraints and expressions are named by their places, all from 0.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub enum Fault {
    /// The gate is left out.
    Drop(u32),
    /// The gate is applied twice.
    Double(u32),
    /// A control of the gate is moved to another qubit: gate, place of the control, qubit.
    MoveControl(u32, u32, u32),
    /// A control of the gate holds on the other value: gate, place of the control.
    FlipControl(u32, u32),
    /// A control of the gate is lost: gate, place of the control.
    LoseControl(u32, u32),
    /// The gate and the next one change places.
    Swap(u32),
    /// The gate, a `T` or an `S` or an inverse of these, becomes its inverse.
    Adjoint(u32),
    /// The gate is applied on the other value of its measured bit.
    FlipCondition(u32),
    /// The gate no longer depends on its measured bit.
    LoseCondition(u32),
    /// The gate becomes a `reset` of its target.
    Reset(u32),
    /// A block of gates is applied this many times: block, times.
    Repeat(u32, u64),
    /// After the last gate one more value of the search register is marked.
    Mark(Bits),
    /// Two qubits of the search register are read as each other's bits.
    SwapPlaces(u32, u32),
    /// A constraint of the problem is left out.
    DropConstraint(u32),
    /// A literal of a clause is negated: clause, place of the literal.
    FlipLiteral(u32, u32),
    /// A constant of the problem has another value: expression, value.
    Constant(u32, i64),
}

impl Fault {
    /// The gate that is changed, where it is one.
    pub fn gate(&self) -> Option<u32> {
        match *self {
            Self::Drop(gate) | Self::Double(gate) | Self::Swap(gate) | Self::Adjoint(gate) | Self::Reset(gate) => {
                Some(gate)
            }
            Self::MoveControl(gate, ..) | Self::FlipControl(gate, _) | Self::LoseControl(gate, _) => Some(gate),
            Self::FlipCondition(gate) | Self::LoseCondition(gate) => Some(gate),
            _ => None,
        }
    }

    /// Whether the problem is changed, and not the circuit.
    pub fn is_of_problem(&self) -> bool {
        matches!(self, Self::DropConstraint(_) | Self::FlipLiteral(..) | Self::Constant(..))
    }
}

impl fmt::Display for Fault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Drop(gate) => write!(f, "drop {gate}"),
            Self::Double(gate) => write!(f, "double {gate}"),
            Self::MoveControl(gate, place, to) => write!(f, "move-control {gate} {place} {to}"),
            Self::FlipControl(gate, place) => write!(f, "flip-control {gate} {place}"),
            Self::LoseControl(gate, place) => write!(f, "lose-control {gate} {place}"),
            Self::Swap(gate) => write!(f, "swap {gate}"),
            Self::Adjoint(gate) => write!(f, "adjoint {gate}"),
            Self::FlipCondition(gate) => write!(f, "flip-condition {gate}"),
            Self::LoseCondition(gate) => write!(f, "lose-condition {gate}"),
            Self::Reset(gate) => write!(f, "reset {gate}"),
            Self::Repeat(block, times) => write!(f, "repeat {block} {times}"),
            Self::Mark(value) => write!(f, "mark {value}"),
            Self::SwapPlaces(a, b) => write!(f, "swap-places {a} {b}"),
            Self::DropConstraint(at) => write!(f, "drop-constraint {at}"),
            Self::FlipLiteral(clause, place) => write!(f, "flip-literal {clause} {place}"),
            Self::Constant(expr, value) => write!(f, "constant {expr} {value}"),
        }
    }
}

/// A text that is no fault.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[error("not a fault: `{0}`")]
pub struct NotAFault(String);

impl FromStr for Fault {
    type Err = NotAFault;

    fn from_str(text: &str) -> Result<Self, NotAFault> {
        let wrong = || NotAFault(text.to_owned());
        let words: Vec<&str> = text.split_whitespace().collect();
        let number = |word: &str| word.parse::<u32>().map_err(|_| wrong());
        Ok(match words[..] {
            ["drop", gate] => Self::Drop(number(gate)?),
            ["double", gate] => Self::Double(number(gate)?),
            ["move-control", gate, place, to] => Self::MoveControl(number(gate)?, number(place)?, number(to)?),
            ["flip-control", gate, place] => Self::FlipControl(number(gate)?, number(place)?),
            ["lose-control", gate, place] => Self::LoseControl(number(gate)?, number(place)?),
            ["swap", gate] => Self::Swap(number(gate)?),
            ["adjoint", gate] => Self::Adjoint(number(gate)?),
            ["flip-condition", gate] => Self::FlipCondition(number(gate)?),
            ["lose-condition", gate] => Self::LoseCondition(number(gate)?),
            ["reset", gate] => Self::Reset(number(gate)?),
            ["repeat", block, times] => Self::Repeat(number(block)?, times.parse().map_err(|_| wrong())?),
            ["mark", value] => Self::Mark(Bits::parse(value).ok_or_else(wrong)?),
            ["swap-places", a, b] => Self::SwapPlaces(number(a)?, number(b)?),
            ["drop-constraint", at] => Self::DropConstraint(number(at)?),
            ["flip-literal", clause, place] => Self::FlipLiteral(number(clause)?, number(place)?),
            ["constant", expr, value] => Self::Constant(number(expr)?, value.parse().map_err(|_| wrong())?),
            _ => return Err(wrong()),
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn faults_read_back_from_what_they_print() {
        let faults = [
            Fault::Drop(1),
            Fault::Double(2),
            Fault::MoveControl(3, 0, 7),
            Fault::FlipControl(4, 1),
            Fault::LoseControl(5, 2),
            Fault::Swap(6),
            Fault::Adjoint(7),
            Fault::FlipCondition(8),
            Fault::LoseCondition(9),
            Fault::Reset(10),
            Fault::Repeat(1, u64::MAX),
            Fault::Mark(Bits::from_number(5, 4)),
            Fault::SwapPlaces(0, 3),
            Fault::DropConstraint(2),
            Fault::FlipLiteral(3, 1),
            Fault::Constant(12, i64::MIN),
        ];
        for fault in faults {
            assert_eq!(fault.to_string().parse(), Ok(fault));
        }
        for text in ["", "drop", "drop x", "drop 1 2", "mark 012", "lose 3"] {
            assert_eq!(text.parse::<Fault>(), Err(NotAFault(text.to_owned())));
        }
    }
}
