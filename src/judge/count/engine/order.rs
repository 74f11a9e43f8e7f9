//! Decision orders: which variable of a part is branched on.
//!
//! - `Dynamic`: the variable with the most open clauses, short ones first, those of late conflicts preferred: T. Sang,
//!   P. Beame, H. Kautz, "Heuristics for fast exact model counting", SAT 2005 (VSADS: occurrences plus conflict activity).
//! - `Guided`: along a tree decomposition, variables of the bags near its middle first; ties as `Dynamic`: T. Korhonen,
//!   M. Järvisalo, "Integrating tree decompositions into decision heuristics of propositional model counters", CP 2021.
//! - `Inputs`: the variables that nothing defines, in the order of the formula: J.-M. Lagniez, E. Lonca, P. Marquis,
//!   "Improving model counting by leveraging definability", IJCAI 2016 gives the reason (the others follow).
//!
//! A rank comes first, the lowest wins; the score decides between equal ranks.

use super::prepare::Class;

/// Which order.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum OrderKind {
    /// By open clauses and conflicts.
    Dynamic,
    /// Along a tree decomposition.
    Guided,
    /// Inputs first, in the order of the formula.
    Inputs,
}

/// What the choice of a variable looks at.
pub(crate) struct Guide<'a> {
    /// Which variables count, and which may not be branched on.
    pub(crate) class: &'a [Class],
    /// For a variable, the group it belongs to: lower ones first. Empty where all are equal.
    pub(crate) ranks: &'a [u32],
    /// For a variable, its part in conflicts, to be multiplied by `scale`.
    pub(crate) activity: &'a [f32],
    /// The worth of one unit of activity.
    pub(crate) scale: f32,
}

impl Guide<'_> {
    /// The rank and the score of a variable whose literals have open clauses of these weights.
    pub(crate) fn score(&self, var: usize, yes: f32, no: f32) -> (u32, f32) {
        let rank = self.ranks.get(var).copied().unwrap_or(0);
        // Both values will be tried: a variable that shortens clauses on both sides is worth more than one that
        // shortens many on one side.
        (rank, yes * no + yes + no + self.scale * self.activity[var])
    }
}
