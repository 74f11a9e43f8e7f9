//! Boolean functions of inputs and symbols, in a form in which equal ones are mostly equal as data.
//!
//! A *symbol* is a bit that is no input: a path variable, over which a sum runs, or the outcome of a measurement. Every
//! function is a [`Form`], an exclusive or of terms. A term is a conjunction, and symbols stand in it only as direct
//! factors: each term is a set of symbols times a node without any. So a form is a polynomial in the symbols, which is
//! unique, with functions of the inputs as its coefficients; putting a value for a symbol needs no look below the top.
//!
//! A conjunction of exclusive ors of terms is the set of solutions of linear equations modulo 2. It is brought to the
//! reduced echelon form of the equations, which is unique: `a (a xor b)` and `a (not b)` are one node.

use std::collections::BTreeMap;

use rustc_hash::{FxHashMap, FxHashSet};

use super::rules::Rules;
use crate::judge::audit::basis::form::Form;
use crate::judge::reading::graph::{Graph, Node, Signal};

/// Conjunctions of conjunctions become one up to this many operands.
const MAX_WIDTH: usize = 64;
/// A product is multiplied out over its symbols into at most this many terms.
const MAX_PARTS: usize = 1 << 10;
/// The most operands of the graph: some hundreds of megabytes.
const MAX_OPERANDS: usize = 1 << 25;

/// A term with symbols in it.
#[derive(Clone, Debug)]
struct Mixed {
    /// In increasing order, at least one.
    symbols: Box<[Signal]>,
    /// What they are multiplied by: a term without symbols, or "always".
    rest: Signal,
}

/// The functions.
#[derive(Debug)]
pub(super) struct Space {
    /// The graph of all of them.
    pub(super) graph: Graph,
    /// How two factors and their product depend on each other.
    pub(super) rules: Rules,
    mixed: FxHashMap<Signal, Mixed>,
    outcomes: FxHashSet<Signal>,
    /// The nodes before this one have no symbols.
    first_symbol: usize,
    /// Whether something grew beyond its limit; what was returned then is nothing.
    is_too_large: bool,
}

impl Space {
    /// The functions of so many inputs.
    pub(super) fn over(inputs: usize) -> Self {
        Self {
            graph: Graph::over(inputs),
            rules: Rules::default(),
            mixed: FxHashMap::default(),
            outcomes: FxHashSet::default(),
            first_symbol: usize::MAX,
            is_too_large: false,
        }
    }

    /// Whether something grew beyond its limit: what was computed since is of no use.
    pub(super) fn is_too_large(&self) -> bool {
        self.is_too_large || self.graph.operand_count() > MAX_OPERANDS
    }

    /// A new path variable.
    pub(super) fn new_path(&mut self) -> Signal {
        let symbol = self.graph.new_bit();
        self.first_symbol = self.first_symbol.min(symbol.node());
        self.mixed.insert(symbol, Mixed { symbols: [symbol].into(), rest: Signal::YES });
        symbol
    }

    /// A new outcome of a measurement.
    pub(super) fn new_outcome(&mut self) -> Signal {
        let symbol = self.new_path();
        self.outcomes.insert(symbol);
        symbol
    }

    /// The symbols of a term.
    pub(super) fn symbols(&self, term: Signal) -> &[Signal] {
        match term.node() < self.first_symbol {
            true => &[],
            false => self.mixed.get(&term).map_or(&[], |mixed| &mixed.symbols),
        }
    }

    /// The path variables of terms, each perhaps several times.
    pub(super) fn paths<'s>(&'s self, terms: &'s [Signal]) -> impl Iterator<Item = Signal> + 's {
        let of_term = terms.iter().flat_map(|&term| self.symbols(term));
        of_term.copied().filter(|symbol| !self.outcomes.contains(symbol))
    }

    /// Whether no symbol stands in a form.
    pub(super) fn is_pure(&self, form: &Form) -> bool {
        form.terms.iter().all(|&term| self.symbols(term).is_empty())
    }

    /// A form as a polynomial in the symbols: for each product of symbols the function that it is multiplied by.
    pub(super) fn coefficients(&self, form: &Form) -> BTreeMap<Vec<Signal>, Form> {
        let mut parts: BTreeMap<Vec<Signal>, Form> = BTreeMap::new();
        if form.flip {
            parts.entry(Vec::new()).or_default().flip = true;
        }
        for &term in &form.terms {
            match self.symbols(term) {
                [] => parts.entry(Vec::new()).or_default().add(&Form::term(term)),
                symbols => parts.entry(symbols.to_vec()).or_default().add(&Form::term(self.mixed[&term].rest)),
            }
        }
        parts
    }

    /// What a form is with this symbol at 0, and by what it is multiplied: `form = first xor symbol * second`.
    pub(super) fn cofactors(&mut self, form: &Form, symbol: Signal) -> (Form, Form) {
        let (mut without, mut factor) = (Form::constant(form.flip), Form::default());
        for &term in &form.terms {
            if !self.symbols(term).contains(&symbol) {
                without.add(&Form::term(term));
                continue;
            }
            let Mixed { symbols, rest } = self.mixed[&term].clone();
            let symbols: Vec<Signal> = symbols.iter().copied().filter(|&other| other != symbol).collect();
            factor.add(&Form::term(self.term(&symbols, rest)));
        }
        (without, factor)
    }

    /// A form with another form put for a symbol.
    pub(super) fn substitute(&mut self, form: &Form, symbol: Signal, value: &Form) -> Form {
        let (mut sum, factor) = self.cofactors(form, symbol);
        let rest = self.product(&[factor, value.clone()]);
        sum.add(&rest);
        sum
    }

    /// The conjunction of forms.
    pub(super) fn product(&mut self, factors: &[Form]) -> Form {
        match factors {
            [one] => return one.clone(),
            _ if factors.iter().all(|factor| self.is_pure(factor)) => return self.pure(factors.to_vec()),
            _ => {}
        }
        let mut parts: Vec<(Vec<Signal>, Vec<Form>)> = vec![(Vec::new(), Vec::new())];
        for factor in factors {
            let by_symbols = self.coefficients(factor);
            if parts.len() * by_symbols.len() > MAX_PARTS {
                self.is_too_large = true;
                return Form::default();
            }
            let times = |(symbols, rows): &(Vec<Signal>, Vec<Form>)| -> Vec<(Vec<Signal>, Vec<Form>)> {
                let extended = by_symbols.iter().map(|(more, coefficient)| {
                    let mut symbols: Vec<Signal> = symbols.iter().chain(more).copied().collect();
                    symbols.sort_unstable();
                    symbols.dedup();
                    (symbols, rows.iter().cloned().chain([coefficient.clone()]).collect())
                });
                extended.collect()
            };
            parts = parts.iter().flat_map(times).collect();
        }
        let mut sum = Form::default();
        for (symbols, rows) in parts {
            let coefficient = self.pure(rows);
            for term in coefficient.terms.iter().copied().chain(coefficient.flip.then_some(Signal::YES)) {
                let term = self.term(&symbols, term);
                sum.add(&Form::term(term));
            }
        }
        sum
    }

    /// The term of these symbols times a term without symbols, or "always".
    fn term(&mut self, symbols: &[Signal], rest: Signal) -> Signal {
        match (symbols, rest) {
            ([], rest) => return rest,
            (&[one], Signal::YES) => return one,
            _ => {}
        }
        let factors = self.graph.factors(rest.node());
        let rests = if (2..=MAX_WIDTH).contains(&factors.len()) { factors.to_vec() } else { vec![rest] };
        let term = self.graph.all(symbols.iter().copied().chain(rests));
        self.mixed.entry(term).or_insert_with(|| Mixed { symbols: symbols.into(), rest });
        term
    }

    /// The conjunction of forms without symbols.
    fn pure(&mut self, mut rows: Vec<Form>) -> Form {
        rows.retain(|row| row.as_constant() != Some(true));
        rows.sort_unstable();
        rows.dedup();
        if rows.len() == 1 {
            return rows.swap_remove(0);
        }
        let pair = if let [a, b] = &rows[..] { Some((a.clone(), b.clone())) } else { None };
        let product = self.pure_of(rows);
        if let Some((a, b)) = pair {
            self.rules.note(&a, &b, &product);
        }
        product
    }

    /// The same for several forms: each is a linear equation, and what these say is found before and after conjunctions
    /// among them are taken apart.
    fn pure_of(&mut self, mut rows: Vec<Form>) -> Form {
        if !reduce(&mut rows) || !self.absorb(&mut rows) {
            return Form::constant(false);
        }
        self.flatten(&mut rows);
        if !reduce(&mut rows) {
            return Form::constant(false);
        }
        if let [row] = &rows[..] {
            return row.clone();
        }
        let signals: Vec<Signal> = rows.iter().map(|row| row.signal(&mut self.graph)).collect();
        Form::term(self.graph.all(signals))
    }

    /// Leaves out what another factor implies; `false` where it implies the opposite.
    fn absorb(&mut self, rows: &mut Vec<Form>) -> bool {
        let signals: Vec<Signal> = rows.iter().map(|row| row.signal(&mut self.graph)).collect();
        let implies = |by: Signal, what: Signal| {
            let factors = if by.is_negated() { &[] } else { self.graph.factors(by.node()) };
            let has = |factor: &Signal| factors.binary_search(factor).is_ok();
            let of_what = if what.is_negated() { &[] } else { self.graph.factors(what.node()) };
            has(&what) || !of_what.is_empty() && of_what.len() <= factors.len() && of_what.iter().all(has)
        };
        let by_other = |what: Signal| signals.iter().any(|&other| other != what && implies(other, what));
        let is_left: Vec<bool> = signals.iter().map(|&signal| !by_other(signal)).collect();
        if signals.iter().any(|&signal| by_other(!signal)) {
            return false;
        }
        let mut is_left = is_left.into_iter();
        rows.retain(|_| is_left.next() == Some(true));
        true
    }

    /// Takes conjunctions apart into their factors, as far as the whole stays narrow.
    fn flatten(&self, rows: &mut Vec<Form>) {
        loop {
            let width = |row: &Form| self.factors(row).map_or(1, <[Signal]>::len);
            let total: usize = rows.iter().map(width).sum();
            if total == rows.len() || total > MAX_WIDTH {
                return;
            }
            let apart = |row: Form| -> Vec<Form> {
                match self.factors(&row) {
                    Some(factors) => factors.iter().map(|&factor| self.form_of(factor)).collect(),
                    None => vec![row],
                }
            };
            *rows = std::mem::take(rows).into_iter().flat_map(apart).collect();
        }
    }

    /// The factors of a form that is one conjunction.
    fn factors(&self, row: &Form) -> Option<&[Signal]> {
        match row.terms[..] {
            [term] if !row.flip => Some(self.graph.factors(term.node())).filter(|factors| !factors.is_empty()),
            _ => None,
        }
    }

    /// A signal as an exclusive or of terms.
    fn form_of(&self, signal: Signal) -> Form {
        let mut form = Form::constant(false);
        let mut open = vec![signal];
        while let Some(signal) = open.pop() {
            match self.graph.nodes()[signal.node()] {
                Node::Odd { .. } => {
                    form.flip ^= signal.is_negated();
                    open.extend_from_slice(self.graph.operands(signal.node()));
                }
                _ => form.add(&Form::term(signal)),
            }
        }
        form
    }

    /// The value of a form without symbols where all inputs are 0.
    pub(super) fn at_zero(&self, form: &Form) -> bool {
        let mut values: FxHashMap<usize, bool> = FxHashMap::default();
        form.terms.iter().fold(form.flip, |sum, term| sum ^ self.value_at_zero(term.node(), &mut values))
    }

    fn value_at_zero(&self, root: usize, values: &mut FxHashMap<usize, bool>) -> bool {
        let mut open = vec![root];
        while let Some(&node) = open.last() {
            let operands = self.graph.operands(node);
            let before = open.len();
            open.extend(operands.iter().map(|operand| operand.node()).filter(|operand| !values.contains_key(operand)));
            if open.len() > before {
                continue;
            }
            let mut of = operands.iter().map(|operand| values[&operand.node()] ^ operand.is_negated());
            let value = match self.graph.nodes()[node] {
                Node::No | Node::Bit(_) => false,
                Node::All { .. } => of.all(|value| value),
                Node::Odd { .. } => of.fold(false, |sum, value| sum ^ value),
                Node::Most { .. } => of.filter(|&value| value).count() >= 2,
            };
            values.insert(node, value);
            open.pop();
        }
        values[&root]
    }
}

/// Brings equations "this form is 1" into reduced echelon form, sorted; `false` where they contradict each other.
fn reduce(rows: &mut Vec<Form>) -> bool {
    rows.sort_unstable();
    rows.dedup();
    if rows.iter().all(|row| row.terms.len() == 1) {
        return !rows.windows(2).any(|pair| pair[0].terms == pair[1].terms);
    }
    let mut reduced: Vec<Form> = Vec::with_capacity(rows.len());
    for mut row in rows.drain(..) {
        for pivot in &reduced {
            if row.terms.binary_search(&pivot.terms[0]).is_ok() {
                // Both hold, so their difference is an equation too: `row xor pivot` is 0.
                row.add(pivot);
                row.flip ^= true;
            }
        }
        match row.as_constant() {
            Some(true) => continue,
            Some(false) => return false,
            None => {}
        }
        for earlier in &mut reduced {
            if earlier.terms.binary_search(&row.terms[0]).is_ok() {
                earlier.add(&row);
                earlier.flip ^= true;
            }
        }
        reduced.push(row);
    }
    reduced.sort_unstable();
    *rows = reduced;
    true
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn products_with_the_same_solutions_are_one_node() {
        let mut space = Space::over(4);
        let [a, b, c, _] = [0, 1, 2, 3].map(|bit| Form::term(space.graph.bit(bit)));
        let odd = |one: &Form, other: &Form| {
            let mut sum = one.clone();
            sum.add(other);
            sum
        };
        let (ab, bc) = (odd(&a, &b), odd(&b, &c));
        let not = |form: &Form| form.clone().negated_if(true);
        let direct = space.product(&[a.clone(), not(&b)]);
        assert_eq!(space.product(&[a.clone(), ab.clone()]), direct);
        assert_eq!(space.product(&[ab.clone(), not(&b)]), direct);
        assert_eq!(space.product(&[a.clone(), b.clone(), ab.clone()]), Form::constant(false));
        let one = space.product(&[ab.clone(), bc.clone()]);
        assert_eq!(space.product(&[ab.clone(), not(&odd(&a, &c))]), one);
        // (a xor b) (b xor c) c is (not b) a c.
        let nested = space.product(&[one, c.clone()]);
        assert_eq!(space.product(&[not(&b), a, c]), nested);
    }

    #[test]
    fn forms_are_polynomials_in_the_symbols() {
        let mut space = Space::over(3);
        let [a, b, c] = [0, 1, 2].map(|bit| Form::term(space.graph.bit(bit)));
        let (r, s) = (Form::term(space.new_outcome()), Form::term(space.new_outcome()));
        let ab = space.product(&[a.clone(), b.clone()]);
        let mut sum = r.clone();
        sum.add(&c);
        // (r xor c) s a b = r s a b xor s a b c
        let product = space.product(&[sum, s.clone(), ab.clone()]);
        let rsab = space.product(&[b.clone(), r.clone(), a.clone(), s.clone()]);
        let mut other = space.product(&[c.clone(), b.clone(), a.clone(), s.clone()]);
        other.add(&rsab);
        assert_eq!(product, other);
        // ... which is 0 with c put for r, and with 0 it is s a b c.
        assert_eq!(space.substitute(&product, r.terms[0], &c), Form::default());
        let put = space.substitute(&product, r.terms[0], &Form::default());
        assert_eq!(put, space.product(&[s, ab, c]));
    }
}
