//! Start states that hold fewer strings than the register has.
//!
//! Input: a problem. Output: candidates of [`Start`], the plainest first, and which requirements such a start already
//! guarantees ([`Guaranteed`]), so that the oracle need not check them. After: every solution is in the start.
//!
//! - [`Choice::Strings`]: all strings.
//! - [`Choice::Domains`]: an integer or a value of a kind takes the codes of its values only.
//! - [`Choice::Groups`]: besides, of some yes/no variables exactly so many hold; found as `exactly K of` in constraints
//!   and as a clause with all its pairs forbidden in clauses ([`groups`]).

mod groups;
mod guaranteed;

use crate::id::Id;
use crate::places::{Part, Places, Start};
use crate::problem::Problem;

pub use guaranteed::Guaranteed;

/// Which start state.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Choice {
    /// All strings.
    Strings,
    /// The domains of the variables.
    Domains,
    /// The domains, and groups of which exactly so many hold.
    Groups,
}

impl Choice {
    /// All choices, the plainest first.
    pub const ALL: [Choice; 3] = [Choice::Strings, Choice::Domains, Choice::Groups];

    /// The name on the command line and in reports.
    pub fn name(self) -> &'static str {
        match self {
            Choice::Strings => "strings",
            Choice::Domains => "domains",
            Choice::Groups => "groups",
        }
    }
}

/// The start of this choice, for the bits that these places search. A choice that finds nothing gives that of the plainer
/// one.
pub fn start(problem: &Problem, places: &Places, choice: Choice) -> Start {
    let mut parts = Vec::new();
    if choice == Choice::Strings {
        return Start::AllStrings;
    }
    let mut place = vec![None; problem.bit_count()];
    places.searched.iter().enumerate().for_each(|(at, bit)| place[bit.index()] = Some(at as u32));
    if choice == Choice::Groups {
        parts = groups::groups(problem, &place);
    }
    for var in problem.vars().values() {
        let bits = var.first_bit.index()..var.first_bit.index() + usize::from(var.width);
        let qubits: Option<Vec<u32>> = bits.map(|bit| place[bit]).collect();
        let Some(qubits) = qubits.filter(|_| var.width > 0 && var.width < 63) else { continue };
        let size = problem.size(var.domain) + 1;
        if size < 1 << var.width {
            parts.push(Part::Below { qubits, size });
        }
    }
    if parts.is_empty() { Start::AllStrings } else { Start::Parts(parts) }
}
