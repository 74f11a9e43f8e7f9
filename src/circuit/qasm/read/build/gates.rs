//! The gates of the language and of its library by name.
//!
//! In version 3 the library is `stdgates.inc`. Its gates are unitary matrices, their global phase included, because a
//! control makes it visible: `u2` and `u3` have determinant 1, and `U(a, b, c)` is e^(i a/2) times the matrix with
//! cos(a/2) at its first place, as the standard's text has it from version 3.0 on.
//!
//! In version 2 the library is `qelib1.inc`. Nothing there can be controlled, gates are meant up to a global phase, and
//! each is written in the form with the fewest gates. Names that were added to the file later are known where they mean
//! what they mean in version 3.

use crate::circuit::Op;

/// What a gate does to its targets.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Action {
    /// One gate of the circuit.
    Plain(Op),
    /// Nothing.
    Identity,
    /// Y = S X Sdg.
    Y,
    /// The root of X: H S H.
    RootX,
    /// H Rz H.
    Rx,
    /// Exchanges two targets.
    Swap,
    /// A general gate on one qubit.
    General(General),
    /// Multiplies by e^(i angle), without any target.
    GlobalPhase,
}

/// How the angles of a general gate are meant: e^(i a) P(phi) Ry(theta) P(lambda).
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum General {
    /// theta, phi, lambda, with a = theta / 2.
    Standard,
    /// theta, phi, lambda, with determinant 1.
    Special,
    /// phi, lambda, with theta = pi / 2 and determinant 1.
    SpecialHalf,
    /// theta, phi, lambda, with a = 0.
    Plain,
    /// phi, lambda, with theta = pi / 2 and a = 0.
    PlainHalf,
    /// theta, phi, lambda, a.
    WithPhase,
    /// theta, phi, lambda, where a = 0 and determinant 1 must be the same.
    Either,
}

/// A gate of the library.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct LibraryGate {
    pub(super) action: Action,
    /// Controls in front of the targets.
    pub(super) controls: usize,
}

impl LibraryGate {
    /// How many targets.
    pub(super) fn targets(self) -> usize {
        match self.action {
            Action::Swap => 2,
            Action::GlobalPhase => 0,
            _ => 1,
        }
    }

    /// How many angles.
    pub(super) fn angles(self) -> usize {
        match self.action {
            Action::Rx | Action::GlobalPhase => 1,
            Action::Plain(op) => usize::from(op.has_angle()),
            Action::General(General::SpecialHalf | General::PlainHalf) => 2,
            Action::General(General::WithPhase) => 4,
            Action::General(_) => 3,
            _ => 0,
        }
    }
}

/// The gate that the language itself has by this name.
pub(super) fn built_in(name: &str, is_old: bool) -> Option<LibraryGate> {
    let (action, controls) = match (name, is_old) {
        ("U", false) => (Action::General(General::Standard), 0),
        ("U", true) => (Action::General(General::Plain), 0),
        ("CX", true) => (Action::Plain(Op::X), 1),
        ("gphase", false) => (Action::GlobalPhase, 0),
        _ => return None,
    };
    Some(LibraryGate { action, controls })
}

/// The gate that the library of the version has by this name.
pub(super) fn library(name: &str, is_old: bool) -> Option<LibraryGate> {
    let own = if is_old { library_2(name) } else { library_3(name) };
    let (action, controls) = own.or_else(|| both(name))?;
    Some(LibraryGate { action, controls })
}

fn both(name: &str) -> Option<(Action, usize)> {
    use Action::{Identity, Plain, RootX, Rx, Swap, Y};
    Some(match name {
        "x" => (Plain(Op::X), 0),
        "y" => (Y, 0),
        "z" => (Plain(Op::Z), 0),
        "h" => (Plain(Op::H), 0),
        "s" => (Plain(Op::S), 0),
        "sdg" => (Plain(Op::Sdg), 0),
        "t" => (Plain(Op::T), 0),
        "tdg" => (Plain(Op::Tdg), 0),
        "sx" => (RootX, 0),
        "id" => (Identity, 0),
        "p" | "u1" => (Plain(Op::P), 0),
        "rx" => (Rx, 0),
        "ry" => (Plain(Op::Ry), 0),
        "rz" => (Plain(Op::Rz), 0),
        "cx" => (Plain(Op::X), 1),
        "cy" => (Y, 1),
        "cz" => (Plain(Op::Z), 1),
        "ch" => (Plain(Op::H), 1),
        "cp" => (Plain(Op::P), 1),
        "crx" => (Rx, 1),
        "cry" => (Plain(Op::Ry), 1),
        "crz" => (Plain(Op::Rz), 1),
        "swap" => (Swap, 0),
        "ccx" => (Plain(Op::X), 2),
        "cswap" => (Swap, 1),
        _ => return None,
    })
}

fn library_3(name: &str) -> Option<(Action, usize)> {
    Some(match name {
        "phase" => (Action::Plain(Op::P), 0),
        "cphase" => (Action::Plain(Op::P), 1),
        "CX" => (Action::Plain(Op::X), 1),
        "cu" => (Action::General(General::WithPhase), 1),
        "u2" => (Action::General(General::SpecialHalf), 0),
        "u3" => (Action::General(General::Special), 0),
        _ => return None,
    })
}

fn library_2(name: &str) -> Option<(Action, usize)> {
    Some(match name {
        "cu1" => (Action::Plain(Op::P), 1),
        "u2" => (Action::General(General::PlainHalf), 0),
        "u3" => (Action::General(General::Plain), 0),
        "cu3" => (Action::General(General::Either), 1),
        _ => return None,
    })
}

/// Whether some copies of `qelib1.inc` have a gate of this name that this reader does not know.
pub(super) fn is_unsupported(name: &str, is_old: bool) -> bool {
    let later = ["u0", "u", "cu", "rzz", "rxx", "ryy", "sxdg", "csx", "c3x", "c4x", "c3sqrtx", "rccx", "rc3x"];
    is_old && later.contains(&name)
}
