//! From the step by which a bit became known to the formula that computes it.
//!
//! The clauses of the bit over bits that were known before give the function: the conjunction of the rests of the clauses
//! with its negation, or the negated conjunction of the rests of the others. Where both sides count they differ only where
//! no solution is, and the cheaper one is taken. A function of few bits that needs no AND or one is written so.

use super::closure::{How, Step};
use super::ground::{Ground, bit};
use super::synthesis::{self, Shapes};
use super::table::{self, Rows, Window};
use crate::id::Id;
use crate::places::Formula;
use crate::problem::{BitId, BitLit};

/// The clauses of a bit over bits that were known before it, with it and with its negation.
pub(super) struct Rests {
    pub(super) own: BitId,
    pub(super) with: Vec<u32>,
    pub(super) without: Vec<u32>,
}

/// When each bit became known, and which are sure.
pub(super) struct Ranks {
    rank: Vec<u32>,
    sure: Vec<bool>,
}

impl Ranks {
    pub(super) fn new(steps: &[Step]) -> Self {
        let (mut rank, mut sure) = (vec![0; steps.len()], vec![false; steps.len()]);
        for (at, step) in steps.iter().enumerate() {
            rank[step.bit as usize] = at as u32;
            sure[step.bit as usize] = step.is_sure;
        }
        Self { rank, sure }
    }

    /// The clauses that a step's formula is made of.
    pub(super) fn rests_of(&self, ground: &Ground, step: &Step) -> Rests {
        self.rests(ground, step.bit, step.how == How::Forced && step.is_sure)
    }

    /// The clauses of a bit over bits known before it.
    pub(super) fn rests(&self, ground: &Ground, own: u32, sure_only: bool) -> Rests {
        let is_rest = |&at: &u32| {
            ground.tidy.get(at as usize).iter().all(|lit| {
                let other = lit.bit().index();
                other == own as usize || self.rank[other] < self.rank[own as usize] && (!sure_only || self.sure[other])
            })
        };
        let lit = BitLit::new(bit(own), true);
        let side = |lit: BitLit| ground.tidy.with(lit).iter().copied().filter(is_rest).collect();
        Rests { own: bit(own), with: side(lit), without: side(!lit) }
    }
}

/// The formulas of the computed bits, in the order in which they became known.
pub(super) fn formulas(ground: &Ground, steps: &[Step], ranks: &Ranks) -> Vec<Formula> {
    let mut shapes = Shapes::default();
    let mut made = Vec::new();
    for step in steps {
        made.push(match step.how {
            How::Searched => continue,
            How::Row(row) => {
                let row = &ground.rows[row as usize];
                let others = row.bits.iter().filter(|&&other| other != bit(step.bit)).map(|&other| Formula::Bit(other));
                negated_if(row.odd, simple(others.collect(), Formula::Xor))
            }
            How::Forced => forced(ground, &ranks.rests_of(ground, step), &mut shapes),
            How::OneSided(is_conjunction) => {
                cheapest(ground, &ranks.rests_of(ground, step), is_conjunction, &mut shapes).1
            }
        });
    }
    made
}

/// A bit whose clauses leave no choice: either side gives it.
fn forced(ground: &Ground, rests: &Rests, shapes: &mut Shapes) -> Formula {
    let is_unit = |clauses: &[u32]| clauses.iter().any(|&at| ground.tidy.get(at as usize).len() == 1);
    if is_unit(&rests.with) || is_unit(&rests.without) {
        return Formula::Constant(is_unit(&rests.with));
    }
    let conjunction = cheapest(ground, rests, true, shapes);
    let disjunction = cheapest(ground, rests, false, shapes);
    if conjunction.0 <= disjunction.0 { conjunction.1 } else { disjunction.1 }
}

/// One side of a bit's clauses as a formula, with its number of ANDs.
fn cheapest(ground: &Ground, rests: &Rests, is_conjunction: bool, shapes: &mut Shapes) -> (usize, Formula) {
    let side = if is_conjunction { &rests.without } else { &rests.with };
    let clauses = || side.iter().map(|&at| ground.tidy.get(at as usize));
    let ands = clauses().map(|clause| clause.len().saturating_sub(2)).sum::<usize>() + side.len().saturating_sub(1);
    let plain = || {
        let of = |clause: &[BitLit]| {
            let rest = clause.iter().filter(|lit| lit.bit() != rests.own);
            // A rest as it stands, or its negation: a conjunction of the negated literals.
            let literals = rest.map(|lit| Formula::literal(lit.bit(), lit.is_negated() == is_conjunction)).collect();
            simple(literals, if is_conjunction { Formula::Or } else { Formula::And })
        };
        simple(clauses().map(of).collect(), if is_conjunction { Formula::And } else { Formula::Or })
    };
    if ands > 0
        && let Some((shape, bits)) = shaped(ground, rests, is_conjunction, shapes)
        && shape.ands() < ands
    {
        return (shape.ands(), shape.formula(&bits));
    }
    (ands, plain())
}

/// A shape with at most one AND, where the function has one. Where clauses of both sides fail at once no solution is, and
/// either value will do.
fn shaped(
    ground: &Ground,
    rests: &Rests,
    is_conjunction: bool,
    shapes: &mut Shapes,
) -> Option<(synthesis::Shape, Vec<BitId>)> {
    let side = if is_conjunction { &rests.without } else { &rests.with };
    let others = side.iter().flat_map(|&at| ground.tidy.get(at as usize)).map(|lit| lit.bit());
    let window = Window::of(others.filter(|&other| other != rests.own))?;
    if window.bits().len() > synthesis::MAX_BITS {
        return None;
    }
    let rows = value(ground, rests, &window, is_conjunction);
    let shape = shapes.of(window.bits().len(), rows[0] as u32)?;
    Some((shape, window.bits().to_vec()))
}

/// Where one side of the clauses makes the bit 1.
pub(super) fn value(ground: &Ground, rests: &Rests, window: &Window, is_conjunction: bool) -> Rows {
    let side = if is_conjunction { &rests.without } else { &rests.with };
    let mut all_hold = window.all();
    for &at in side {
        let rest = ground.tidy.get(at as usize).iter().copied().filter(|lit| lit.bit() != rests.own);
        table::and(&mut all_hold, &window.clause(rest));
    }
    if !is_conjunction {
        all_hold.iter_mut().zip(window.all()).for_each(|(word, all)| *word ^= all);
    }
    all_hold
}

fn simple(mut parts: Vec<Formula>, join: fn(Vec<Formula>) -> Formula) -> Formula {
    if parts.len() == 1 { parts.remove(0) } else { join(parts) }
}

fn negated_if(flip: bool, formula: Formula) -> Formula {
    match formula {
        formula if !flip => formula,
        Formula::Not(inner) => *inner,
        Formula::Constant(value) => Formula::Constant(!value),
        formula => Formula::Not(Box::new(formula)),
    }
}
