//! Certificates: a count that anybody can check.
//!
//! Input:  a [`Formula`], the judge's clause form of a problem with the bits that are counted over.
//! Output: a [`Certificate`]: the way of the counting engine as a decision-DNNF, or a refutation where there is no
//!         solution; its text; and the verdict of [`check`] on any certificate, wherever it came from.
//!
//! What is checked, by code that shares nothing with the engine:
//!
//! | rule | what | where |
//! |---|---|---|
//! | K1 | children come before parents; decisions state their two literals (deterministic) | [`text`] |
//! | K2 | the parts of a conjunction share no variable (decomposable) | `sets` |
//! | K3 | projected: no hidden decision above shown variables | `number` |
//! | K4 | every model of the graph satisfies every clause | `entailed` |
//! | K5 | every solution of the formula is in the graph | `covered` |
//! | K6 | the count, recomputed from the graph, is the one that the file states | [`check`] |
//!
//! K4 and K5 make the graph equivalent to the formula (projected: with the same shown assignments), K1 to K3 make its
//! count right. K5 is shown from the clauses that a node shares with no node beside it: a graph for which that is not enough is
//! refused although it may be right. Graphs of the engine are never such graphs.

mod covered;
mod draw;
mod entailed;
mod graph;
mod number;
mod refutation;
mod sets;
mod subsumed;
pub mod text;
mod unit;
mod values;

use num_bigint::BigUint;
use num_traits::Zero;
use thiserror::Error;

pub use draw::Drawer;
pub use graph::{Graph, Node};
pub use values::{PickValues, values};

use super::engine::{Effort, Options, count_traced};
use super::{Over, counted_over};
use crate::budget::Budget;
use crate::judge::clauses;
use crate::problem::{BitId, BitLit, Clauses, Problem};
use graph::Recorder;
use number::Counted;
use sets::VarSets;

/// What a certificate speaks of.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Formula {
    /// The judge's clauses; the problem's own come first.
    pub clauses: Clauses,
    /// Its variables; the problem's bits come first.
    pub var_count: usize,
    /// The bits that are counted over; `None` where all variables are (those that are no bits follow from the bits).
    pub shown: Option<Vec<BitId>>,
    /// How many variables are bits of the problem.
    pub bit_count: usize,
}

impl Formula {
    /// The formula of a problem.
    pub fn of(problem: &Problem, over: Over) -> Self {
        let cnf = clauses::encode(problem);
        let counted = counted_over(problem, over);
        let shown = (counted.len() < problem.bit_count()).then_some(counted);
        Self { clauses: cnf.clauses, var_count: cnf.var_count, shown, bit_count: problem.bit_count() }
    }
}

/// What proves a count.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Proof {
    /// A decision-DNNF, with the count that it is said to have.
    Graph {
        /// The graph.
        graph: Graph,
        /// The count, where the file states one.
        count: Option<BigUint>,
    },
    /// Clauses that lead to a contradiction.
    Refutation(Vec<Vec<BitLit>>),
}

/// A certificate over a number of variables.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Certificate {
    /// The variables of its formula.
    pub var_count: usize,
    /// The proof.
    pub proof: Proof,
}

/// Why a certificate is refused. Nodes count from 0, as in the file; variables, clauses and steps from 1.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub enum Refusal {
    /// K2.
    #[error("not decomposable: two parts of node {node} share variable {var}")]
    Shared {
        /// The conjunction.
        node: usize,
        /// A variable.
        var: usize,
    },
    /// K3.
    #[error("node {node} decides the hidden variable {var} above shown ones, so it may count one solution twice")]
    HiddenDecision {
        /// The decision.
        node: usize,
        /// Its variable.
        var: usize,
    },
    /// K4.
    #[error("a model of the graph breaks clause {clause}")]
    Clause {
        /// The clause.
        clause: usize,
    },
    /// K5: a literal that does not follow.
    #[error("node {node} states {literal}, which does not follow from the clauses there")]
    NotImplied {
        /// The conjunction.
        node: usize,
        /// The literal.
        literal: i64,
    },
    /// K5: a node without models where there may be some.
    #[error("node {node} has no model, but the clauses there are no contradiction")]
    Lost {
        /// The node.
        node: usize,
    },
    /// K6.
    #[error("the file states a count of {stated}, the graph has {found}")]
    Count {
        /// What the file states.
        stated: BigUint,
        /// What the graph has.
        found: BigUint,
    },
    /// A step of a refutation that does not follow.
    #[error("step {step} of the refutation does not follow")]
    Step {
        /// The step, deletions not counted.
        step: usize,
    },
    /// A refutation that ends without a contradiction.
    #[error("the refutation ends without a contradiction")]
    NoContradiction,
    /// The formula has other variables.
    #[error("the certificate is for {found} variables, the formula has {expected}")]
    VarCount {
        /// Of the certificate.
        found: usize,
        /// Of the formula.
        expected: usize,
    },
    /// Too large for the tables of the check: undecided.
    #[error("{nodes} nodes over {vars} variables are too many for the tables of this check")]
    TooLarge {
        /// Nodes.
        nodes: usize,
        /// Variables.
        vars: usize,
    },
    /// The budget ran out: undecided.
    #[error("the budget ran out before the certificate was made and checked")]
    OutOfTime,
}

impl Certificate {
    /// `decision-dnnf` or `refutation`.
    pub fn kind(&self) -> &'static str {
        match self.proof {
            Proof::Graph { .. } => "decision-dnnf",
            Proof::Refutation(_) => "refutation",
        }
    }

    /// The graph, where it is one.
    pub fn graph(&self) -> Option<&Graph> {
        match &self.proof {
            Proof::Graph { graph, .. } => Some(graph),
            Proof::Refutation(_) => None,
        }
    }

    /// Its size: nodes, or steps.
    pub fn size(&self) -> usize {
        match &self.proof {
            Proof::Graph { graph, .. } => graph.nodes().len(),
            Proof::Refutation(steps) => steps.len(),
        }
    }
}

impl Refusal {
    /// Whether the check was not finished, rather than the certificate being bad.
    pub fn is_undecided(&self) -> bool {
        matches!(self, Refusal::OutOfTime | Refusal::TooLarge { .. })
    }
}

/// Work after which no certificate is made where no deadline is set: it bounds the memory that the graph takes.
pub const CERTIFIED_WORK: u64 = 1 << 30;

/// Counts once more and keeps the way. `None` where the budget or [`CERTIFIED_WORK`] ran out.
pub fn certify(formula: &Formula, budget: &Budget) -> Option<Certificate> {
    certify_within(formula, CERTIFIED_WORK, budget)
}

/// The same within so much work.
pub(super) fn certify_within(formula: &Formula, work: u64, budget: &Budget) -> Option<Certificate> {
    let mut recorder = Recorder::new(formula.var_count);
    let options = Options { effort: Effort::Models, work, ..Options::default() };
    let shown = formula.shown.as_deref();
    let (count, root) = count_traced(&formula.clauses, formula.var_count, shown, &options, budget, &mut recorder);
    let proof = match root {
        _ if count.decided && count.low.is_zero() => {
            let proof = refutation::find(formula, budget)?;
            text::read(&proof, formula.var_count).ok()?.proof
        }
        Some(root) => Proof::Graph { graph: recorder.graph.pruned(root), count: Some(count.low) },
        None => return None,
    };
    Some(Certificate { var_count: formula.var_count, proof })
}

/// Checks a certificate; gives the count that it proves.
pub fn check(formula: &Formula, certificate: &Certificate, budget: &Budget) -> Result<BigUint, Refusal> {
    if certificate.var_count != formula.var_count {
        return Err(Refusal::VarCount { found: certificate.var_count, expected: formula.var_count });
    }
    let (graph, stated) = match &certificate.proof {
        Proof::Refutation(steps) => {
            return refutation::check(formula, steps, budget).map(|()| BigUint::zero());
        }
        Proof::Graph { graph, count } => (graph, count),
    };
    let sets = VarSets::of(graph, formula.var_count, formula.shown.as_deref())?;
    number::check_decisions(graph, &sets)?;
    let counted = Counted::new(graph, &sets);
    let found = counted.total();
    if let Some(stated) = stated.as_ref().filter(|&stated| stated != &found) {
        return Err(Refusal::Count { stated: stated.clone(), found });
    }
    entailed::check(formula, graph, budget)?;
    covered::check(formula, &counted, budget)?;
    Ok(found)
}

/// The clause sorted and without repeated literals; `None` for a tautology.
fn plain(clause: &[BitLit]) -> Option<Vec<BitLit>> {
    let mut clause = clause.to_vec();
    clause.sort_unstable();
    clause.dedup();
    (!clause.windows(2).any(|pair| pair[0] == !pair[1])).then_some(clause)
}
