//! Parities: linear algebra over the two elements, with a proof.
//!
//! Conjuncts that say a parity are equations, and so are clauses that together forbid every even (or every odd) number
//! of the same bits. An equation of one side that is a sum of equations of the other follows from it, however a circuit
//! chose its own by elimination. A sum of two equations is derived along their decision diagrams, whose size is the number
//! of terms (T. Philipp, A. Rebola-Pardo, "DRAT proofs for XOR reasoning", JELIA 2016; R. Bryant, A. Biere, M. Heule,
//! "Clausal proofs for pseudo-Boolean reasoning", TACAS 2022; both from memory).

use std::collections::BTreeMap;

use rustc_hash::{FxHashMap, FxHashSet};

use super::diagram::{Edge, TooLarge};
use super::drawn::Drawn;
use super::graph::{Graph, Node, Signal};
use super::miter::Sides;
use super::prover::Prover;
use crate::sat::drat::Proof;

/// Clauses of more literals are not looked at: a parity of so many bits has twice as many clauses for each bit more.
const MAX_LITS: usize = 8;
/// The most equations of a side: elimination takes their square.
const MAX_EQUATIONS: usize = 1 << 12;

/// A sum of nodes that is `odd` or even, and the conjuncts of its side that say so.
#[derive(Clone, Debug)]
struct Equation {
    terms: Vec<usize>,
    odd: bool,
    said_by: Vec<Signal>,
}

/// Adds the conjuncts that follow from equations of the other side to `done`; diagrams may take so many steps.
pub(super) fn follow(prover: &mut Prover, sides: &Sides, done: &mut FxHashSet<(bool, Signal)>, steps: usize) {
    let graph = prover.graph();
    let equations = [&sides.circuit, &sides.problem].map(|side| equations_of(graph, side));
    for is_problem in [false, true] {
        let (wanted, given) = (&equations[usize::from(is_problem)], &equations[usize::from(!is_problem)]);
        let is_open = |signal: &Signal| !done.contains(&(is_problem, *signal));
        let wanted: Vec<&Equation> = wanted.iter().filter(|equation| equation.said_by.iter().any(is_open)).collect();
        if wanted.is_empty() || given.is_empty() || given.len() > MAX_EQUATIONS {
            continue;
        }
        if let Ok((shown, proof, next_var)) = show(prover, given, &wanted, !is_problem, steps) {
            prover.absorb(&proof, next_var);
            done.extend(shown.into_iter().map(|signal| (is_problem, signal)));
        }
    }
}

/// The equations that conjuncts are or that clauses among them make up.
fn equations_of(graph: &Graph, conjuncts: &[Signal]) -> Vec<Equation> {
    let mut found = Vec::new();
    // Clauses by their bits; for each, by the number of bits that it wants to be false, modulo 2.
    let mut clauses: BTreeMap<Vec<usize>, [Vec<Signal>; 2]> = BTreeMap::new();
    for &conjunct in conjuncts {
        let operands = graph.operands(conjunct.node());
        match graph.node(conjunct.node()) {
            Node::Odd => {
                let terms = operands.iter().map(|operand| operand.node()).collect();
                found.push(Equation { terms, odd: !conjunct.is_negated(), said_by: vec![conjunct] });
            }
            Node::All if conjunct.is_negated() && operands.len() <= MAX_LITS => {
                let nodes: Vec<usize> = operands.iter().map(|operand| operand.node()).collect();
                // The clause forbids that all operands hold: so many of the nodes hold there.
                let forbidden = operands.iter().filter(|operand| !operand.is_negated()).count() % 2;
                clauses.entry(nodes).or_default()[forbidden].push(conjunct);
            }
            _ => {}
        }
    }
    for (terms, by_forbidden) in clauses {
        for (forbidden, said_by) in by_forbidden.into_iter().enumerate() {
            if said_by.len() == 1 << (terms.len() - 1) {
                found.push(Equation { terms: terms.clone(), odd: forbidden == 0, said_by });
            }
        }
    }
    found
}

/// An equation as a row: which terms it has, then whether the sum is odd; and its diagram, which says the same.
#[derive(Clone)]
struct Row {
    bits: Vec<u64>,
    edge: Edge,
}

impl Row {
    fn first(&self) -> Option<usize> {
        let word = self.bits.iter().position(|&word| word != 0)?;
        Some(64 * word + self.bits[word].trailing_zeros() as usize)
    }
}

/// Equations of one side, of which each has a first bit that no other one has.
struct System<'a> {
    drawn: Drawn<'a>,
    from_problem: bool,
    /// The level of each term.
    levels: FxHashMap<usize, usize>,
    rows: BTreeMap<usize, Row>,
}

impl<'a> System<'a> {
    /// No equation yet; the terms are those of the given and the wanted ones.
    fn new(
        prover: &'a Prover,
        equations: impl Iterator<Item = &'a Equation>,
        from_problem: bool,
        steps: usize,
    ) -> Result<Self, TooLarge> {
        let mut terms: Vec<usize> = equations.flat_map(|equation| &equation.terms).copied().collect();
        terms.sort_unstable();
        terms.dedup();
        let drawn = prover.drawn(&terms, steps)?;
        let levels = terms.iter().enumerate().map(|(level, &term)| (term, level)).collect();
        Ok(Self { drawn, from_problem, levels, rows: BTreeMap::new() })
    }

    /// An equation as a row. Its diagram is tied to the conjunct where that is one.
    fn row(&mut self, equation: &Equation) -> Result<Row, TooLarge> {
        let mut bits = vec![0; self.levels.len() / 64 + 1];
        let mut set = |at: usize| bits[at / 64] |= 1 << (at % 64);
        let mut edges = Vec::with_capacity(equation.terms.len());
        for term in &equation.terms {
            set(self.levels[term]);
            edges.push(self.drawn.edge(Signal::of(*term))?);
        }
        if equation.odd {
            set(self.levels.len());
        }
        let edge = match equation.said_by[..] {
            [conjunct] => self.drawn.edge(conjunct)?,
            _ => {
                edges.sort_unstable_by_key(|&edge| std::cmp::Reverse(self.drawn.diagrams.level(edge)));
                let sum = edges.into_iter().try_fold(Edge::NO, |sum, edge| self.drawn.diagrams.odd(sum, edge))?;
                sum ^ !equation.odd
            }
        };
        Ok(Row { bits, edge })
    }

    /// Takes an equation that its side says.
    fn give(&mut self, equation: &Equation) -> Result<(), TooLarge> {
        let mut row = self.row(equation)?;
        if equation.said_by.len() > 1 {
            let clauses =
                equation.said_by.iter().map(|&clause| self.drawn.edge(clause)).collect::<Result<Vec<_>, _>>()?;
            let all = clauses.into_iter().try_fold(Edge::YES, |all, clause| self.drawn.diagrams.all(all, clause))?;
            let is_said = self.drawn.diagrams.never([all, !row.edge, Edge::YES])?;
            debug_assert!(is_said, "the clauses forbid every other parity");
        }
        self.drawn.holds(self.from_problem, row.edge);
        while let Some(first) = row.first() {
            match self.rows.get(&first).cloned() {
                Some(other) => row = self.sum(&row, &other)?,
                None => {
                    self.rows.insert(first, row);
                    break;
                }
            }
        }
        Ok(())
    }

    /// The sum of two equations that hold on the side.
    fn sum(&mut self, a: &Row, b: &Row) -> Result<Row, TooLarge> {
        let bits = a.bits.iter().zip(&b.bits).map(|(a, b)| a ^ b).collect();
        let edge = !self.drawn.diagrams.odd(a.edge, b.edge)?;
        self.drawn.holds(self.from_problem, edge);
        Ok(Row { bits, edge })
    }

    /// Whether an equation is a sum of those given; if so, it holds on the side.
    fn has(&mut self, equation: &Equation) -> Result<bool, TooLarge> {
        let wanted = self.row(equation)?;
        let mut rest = wanted.clone();
        let mut parts = Vec::new();
        while let Some(first) = rest.first() {
            let Some(row) = self.rows.get(&first) else { return Ok(false) };
            rest.bits.iter_mut().zip(&row.bits).for_each(|(rest, bits)| *rest ^= bits);
            parts.push(row.clone());
        }
        // From the last terms up: the sums on the way stay short.
        let mut parts = parts.into_iter().rev();
        let Some(mut sum) = parts.next() else { return Ok(false) };
        for part in parts {
            sum = self.sum(&sum, &part)?;
        }
        Ok(sum.edge == wanted.edge)
    }
}

/// What was shown: the conjuncts, and the proof with its first free variable.
type Shown = (Vec<Signal>, Proof, usize);

/// Shows equations of one side from those of the other.
fn show(
    prover: &Prover,
    given: &[Equation],
    wanted: &[&Equation],
    from_problem: bool,
    steps: usize,
) -> Result<Shown, TooLarge> {
    let equations = given.iter().chain(wanted.iter().copied());
    let mut system = System::new(prover, equations, from_problem, steps)?;
    given.iter().try_for_each(|equation| system.give(equation))?;
    let mut shown = Vec::new();
    for equation in wanted {
        match system.has(equation) {
            Ok(true) => shown.extend(&equation.said_by),
            Ok(false) => {}
            // What was shown before stays shown.
            Err(TooLarge) => break,
        }
    }
    for &signal in &shown {
        system.drawn.follows(from_problem, signal);
    }
    let (proof, next_var) = system.drawn.diagrams.finish();
    Ok((shown, proof, next_var))
}
