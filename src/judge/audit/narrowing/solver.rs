//! An engine with the clauses of a problem, in which formulas of places become literals.
//!
//! What is asked is kept beside the engine as clauses, so that the answer can be proven again as a whole.

use crate::budget::Budget;
use crate::id::Id;
use crate::judge::clauses::Cnf;
use crate::places::{self, Digit};
use crate::problem::{BitId, BitLit, Bits};
use crate::sat::{Answer, Batsat, Engine, Formula, Lit};

/// An engine with the clauses of a problem, in which formulas become literals.
pub(super) struct Solver {
    engine: Batsat,
    /// The clauses of the problem and what formulas are, without anything learnt.
    formula: Formula,
    next: usize,
    /// The number whose digit was asked for last: the next digit is often one of it.
    sum: Option<Sum>,
}

/// A number being added up, column by column.
struct Sum {
    of: Digit,
    /// Column *j* has the literals of weight 2^j.
    columns: Vec<Vec<Lit>>,
    /// How many columns are down to one literal.
    added: usize,
}

impl Solver {
    pub(super) fn new(cnf: &Cnf) -> Self {
        let mut solver =
            Self { engine: Batsat::new(), formula: Formula::new(cnf.var_count), next: cnf.var_count, sum: None };
        solver.add(cnf, &|var| var);
        solver
    }

    /// Adds the clauses with other variables.
    pub(super) fn add(&mut self, cnf: &Cnf, var: &impl Fn(usize) -> usize) {
        for clause in cnf.clauses.iter() {
            let lits: Vec<Lit> = clause.iter().map(|&lit| moved(lit, var)).collect();
            self.add_clause(&lits);
        }
    }

    /// Adds a clause that is part of the question.
    pub(super) fn add_clause(&mut self, clause: &[Lit]) {
        self.engine.add_clause(clause);
        self.formula.push(clause.iter().copied());
    }

    /// Adds a clause that follows from the others.
    pub(super) fn learn(&mut self, clause: &[Lit]) {
        self.engine.add_clause(clause);
    }

    /// The question without what was learnt, and that one of these literals holds.
    pub(super) fn into_formula(mut self, some: &[Lit]) -> Formula {
        self.formula.push(some.iter().copied());
        self.formula
    }

    /// Makes room for so many variables; gives the first.
    pub(super) fn add_vars(&mut self, count: usize) -> usize {
        self.next += count;
        self.next - count
    }

    pub(super) fn value(&self, var: usize) -> bool {
        self.engine.value(var)
    }

    fn new_lit(&mut self) -> Lit {
        self.next += 1;
        Lit::new(self.next - 1, true)
    }

    pub(super) fn solve(&mut self, assumptions: &[Lit], budget: &Budget) -> Answer {
        self.engine.solve(assumptions, budget)
    }

    pub(super) fn model(&self, bits: usize) -> Bits {
        (0..bits).map(|bit| self.engine.value(bit)).collect()
    }

    /// The literal that holds where the formula does, bits being these literals.
    pub(super) fn formula(&mut self, formula: &places::Formula, bit: &impl Fn(BitId) -> Lit) -> Lit {
        match formula {
            places::Formula::Constant(value) => {
                let lit = self.new_lit();
                self.add_clause(&[if *value { lit } else { !lit }]);
                lit
            }
            places::Formula::Bit(of) => bit(*of),
            places::Formula::Not(inner) => !self.formula(inner, bit),
            places::Formula::And(list) => {
                let lits: Vec<Lit> = list.iter().map(|part| self.formula(part, bit)).collect();
                self.all(&lits)
            }
            places::Formula::Or(list) => {
                let lits: Vec<Lit> = list.iter().map(|part| !self.formula(part, bit)).collect();
                !self.all(&lits)
            }
            places::Formula::Xor(list) => {
                let lits: Vec<Lit> = list.iter().map(|part| self.formula(part, bit)).collect();
                let sum = lits.into_iter().reduce(|a, b| self.odd(a, b));
                sum.unwrap_or_else(|| !self.all(&[]))
            }
            places::Formula::Digit(digit) => self.digit(digit, bit),
        }
    }

    /// The digit of a sum of weighted literals, by full adders from the lowest column up.
    fn digit(&mut self, digit: &Digit, bit: &impl Fn(BitId) -> Lit) -> Lit {
        let whole = Digit { at: 0, ..digit.clone() };
        let mut sum = match self.sum.take() {
            Some(sum) if sum.of == whole => sum,
            _ => self.columns(whole, bit),
        };
        while sum.added <= usize::from(digit.at) {
            let mut column = std::mem::take(&mut sum.columns[sum.added]);
            while let [.., a, b] = column[..] {
                column.truncate(column.len() - 2);
                let c = column.pop();
                let half = self.odd(a, b);
                let (low, carry) = match c {
                    Some(c) => (self.odd(half, c), self.majority([a, b, c])),
                    None => (half, self.all(&[a, b])),
                };
                column.push(low);
                sum.columns[sum.added + 1].push(carry);
            }
            sum.columns[sum.added] = column;
            sum.added += 1;
        }
        let found = sum.columns[usize::from(digit.at)].first().copied();
        self.sum = Some(sum);
        found.unwrap_or_else(|| !self.all(&[]))
    }

    fn columns(&mut self, of: Digit, bit: &impl Fn(BitId) -> Lit) -> Sum {
        let mut columns = vec![Vec::new(); i64::BITS as usize];
        let mut put = |number: i64, lit: Lit| {
            let set = columns.iter_mut().enumerate().filter(|(at, _)| number >> at & 1 == 1);
            set.for_each(|(_, column)| column.push(lit));
        };
        put(of.constant, self.all(&[]));
        for (weight, term) in &of.terms {
            put(*weight, self.formula(term, bit));
        }
        Sum { of, columns, added: 0 }
    }

    fn majority(&mut self, lits: [Lit; 3]) -> Lit {
        let most = self.new_lit();
        let [a, b, c] = lits;
        for (p, q) in [(a, b), (a, c), (b, c)] {
            self.add_clause(&[!most, p, q]);
            self.add_clause(&[most, !p, !q]);
        }
        most
    }

    pub(super) fn all(&mut self, lits: &[Lit]) -> Lit {
        let all = self.new_lit();
        lits.iter().for_each(|&lit| self.add_clause(&[!all, lit]));
        let back: Vec<Lit> = lits.iter().map(|&lit| !lit).chain([all]).collect();
        self.add_clause(&back);
        all
    }

    pub(super) fn odd(&mut self, a: Lit, b: Lit) -> Lit {
        let odd = self.new_lit();
        for clause in [[!odd, a, b], [!odd, !a, !b], [odd, a, !b], [odd, !a, b]] {
            self.add_clause(&clause);
        }
        odd
    }

    /// A literal that implies that one of the clauses at these places fails, each literal being what `lit` says.
    pub(super) fn some_fails<'c>(
        &mut self,
        clauses: impl Iterator<Item = &'c [BitLit]>,
        lit: &impl Fn(BitLit) -> Lit,
    ) -> Lit {
        let mut some = vec![];
        for clause in clauses {
            let fails = self.new_lit();
            clause.iter().for_each(|&of| self.add_clause(&[!fails, !lit(of)]));
            some.push(fails);
        }
        let any = self.new_lit();
        some.push(!any);
        self.add_clause(&some);
        any
    }
}

pub(super) fn moved(lit: BitLit, var: &impl Fn(usize) -> usize) -> Lit {
    Lit::new(var(lit.bit().index()), !lit.is_negated())
}
