//! The problem over what is searched: computed bits replaced by what they are of the others.
//!
//! Input: a [`Problem`] and [`Places`] that passed their check. Output: a [`Restated`] problem whose solutions are the
//! marked states: a string of the search register is a solution of it exactly where the bits that the string stands for
//! ([`Places::assignment`]) are a solution of the problem. So what counts and audits problems counts and audits narrowed ones.

use crate::id::Id;
use crate::places::{Claim, Digit, Formula, Places};
use crate::problem::{BitId, BitLit, Bits, Compare, Domain, Expr, ExprId, ExprList, Origin, Problem, VarId};

/// A problem over the searched bits alone, and where these are in the search register.
#[derive(Clone, Debug)]
pub struct Restated {
    /// The problem.
    pub problem: Problem,
    /// Its places, with every bit searched.
    pub places: Places,
}

impl Restated {
    /// The bits of the first problem for bits of this one.
    pub fn assignment(&self, first: &Places, bits: &Bits) -> Bits {
        first.assignment(&self.places.searched.iter().map(|&bit| bits.get(bit)).collect())
    }

    /// The bits of this problem where those of the first are given: its searched ones.
    pub fn restrict(&self, first: &Places, bits: &Bits) -> Bits {
        let mut own = Bits::zeros(self.places.search_len());
        self.places.searched.iter().zip(&first.searched).for_each(|(&to, &from)| own.set(to, bits.get(from)));
        own
    }
}

/// Restates a problem over its searched bits.
pub fn restate(problem: &Problem, places: &Places) -> Restated {
    let mut writer = Writer::new(problem, places);
    writer.formulas();
    writer.clauses();
    writer.expressions();
    let searched = places.searched.iter().map(|bit| writer.moved[bit.index()].expect("searched")).collect();
    let places = Places { start: places.start.clone(), searched, computed: Vec::new(), claim: Claim::OneForOne };
    Restated { problem: writer.to, places }
}

struct Writer<'a> {
    from: &'a Problem,
    places: &'a Places,
    to: Problem,
    /// The new bit of a searched bit.
    moved: Vec<Option<BitId>>,
    /// The new variable of one whose bits are all searched.
    kept: Vec<Option<VarId>>,
    /// The expression of each bit, once there is one.
    bits: Vec<Option<ExprId>>,
    /// The number whose digit was asked for last: the next digit is often one of it.
    number: Option<(Digit, ExprId)>,
}

impl<'a> Writer<'a> {
    fn new(from: &'a Problem, places: &'a Places) -> Self {
        let mut is_computed = vec![false; from.bit_count()];
        places.computed.iter().for_each(|computed| is_computed[computed.bit as usize] = true);
        let mut to = Problem::new();
        to.kinds = from.kinds.clone();
        let (mut moved, mut kept) = (vec![None; from.bit_count()], Vec::new());
        let mut bits = vec![None; from.bit_count()];
        for var in from.vars().values() {
            let own = var.first_bit.index()..var.first_bit.index() + usize::from(var.width);
            let first = to.bit_count();
            if own.clone().any(|bit| is_computed[bit]) {
                kept.push(None);
                for bit in own.filter(|&bit| !is_computed[bit]) {
                    moved[bit] = Some(BitId::new(to.bit_count()));
                    let var = to.add_var("", Domain::YesNo, None);
                    bits[bit] = Some(to.exprs.node(Expr::Var(var)));
                }
                continue;
            }
            let id = to.add_var(var.name.clone(), var.domain, None);
            kept.push(Some(id));
            own.enumerate().for_each(|(at, bit)| moved[bit] = Some(BitId::new(first + at)));
            if var.domain == Domain::YesNo {
                bits[var.first_bit.index()] = Some(to.exprs.node(Expr::Var(id)));
            }
        }
        Self { from, places, to, moved, kept, bits, number: None }
    }

    fn node(&mut self, expr: Expr) -> ExprId {
        self.to.exprs.node(expr)
    }

    fn must(&mut self, expr: ExprId) {
        self.to.must(expr, Origin::default());
    }

    /// A bit as a yes/no expression. A single bit of an integer that is kept is read off its code.
    fn bit(&mut self, bit: BitId) -> ExprId {
        if let Some(known) = self.bits[bit.index()] {
            return known;
        }
        let (var, at) = self.from.var_of(bit);
        let kept = self.kept[var.index()].expect("bits of variables that are taken apart have expressions");
        let base = match self.from.vars()[var].domain {
            Domain::Range { lo, .. } => lo,
            Domain::YesNo | Domain::Kind(_) => 0,
        };
        let (value, base) = (self.node(Expr::Var(kept)), self.node(Expr::Number(base)));
        let base = self.node(Expr::Negate(base));
        let mut code = self.to.exprs.over(Expr::Sum, &[value, base]);
        // Halved once a bit, since the power of two of a high bit is no constant of the language.
        for _ in 0..at {
            code = self.node(Expr::Quotient(code, 2));
        }
        let (low, one) = (self.node(Expr::Remainder(code, 2)), self.node(Expr::Number(1)));
        let expr = self.node(Expr::Compare(Compare::Eq, low, one));
        self.bits[bit.index()] = Some(expr);
        expr
    }

    fn formulas(&mut self) {
        let places = self.places;
        for computed in &places.computed {
            let expr = self.formula(&computed.formula);
            self.bits[computed.bit as usize] = Some(expr);
        }
    }

    fn formula(&mut self, formula: &Formula) -> ExprId {
        match formula {
            Formula::Constant(value) => self.node(Expr::Truth(*value)),
            Formula::Bit(bit) => self.bit(*bit),
            Formula::Not(inner) => {
                let inner = self.formula(inner);
                self.node(Expr::Not(inner))
            }
            Formula::And(list) => self.formulas_of(Expr::All, list),
            Formula::Or(list) => self.formulas_of(Expr::Some, list),
            Formula::Xor(list) => self.formulas_of(Expr::Odd, list),
            Formula::Digit(digit) => self.digit(digit),
        }
    }

    /// The number, divided and rounded down, is odd. A number that may be negative has the digits of the same number plus a
    /// power of two that is beyond its size and the digit.
    fn digit(&mut self, digit: &Digit) -> ExprId {
        let below = digit.terms.iter().map(|&(weight, _)| weight.min(0)).sum::<i64>() + digit.constant.min(0);
        let beyond = (i64::BITS - below.unsigned_abs().leading_zeros()).max(u32::from(digit.at) + 1);
        let lift = if below < 0 { 1i64 << beyond } else { 0 };
        let whole = Digit { at: 0, constant: digit.constant + lift, terms: digit.terms.clone() };
        let number = match &self.number {
            Some((last, number)) if *last == whole => *number,
            _ => self.number(&whole),
        };
        self.number = Some((whole, number));
        let moved = self.node(Expr::Quotient(number, 1 << digit.at));
        let (low, one) = (self.node(Expr::Remainder(moved, 2)), self.node(Expr::Number(1)));
        self.node(Expr::Compare(Compare::Eq, low, one))
    }

    fn number(&mut self, digit: &Digit) -> ExprId {
        let zero = self.node(Expr::Number(0));
        let mut items = vec![self.node(Expr::Number(digit.constant))];
        for (weight, term) in &digit.terms {
            let (term, weight) = (self.formula(term), self.node(Expr::Number(*weight)));
            items.push(self.node(Expr::Choose(term, weight, zero)));
        }
        self.to.exprs.over(Expr::Sum, &items)
    }

    fn formulas_of(&mut self, make: fn(ExprList) -> Expr, list: &[Formula]) -> ExprId {
        let items: Vec<ExprId> = list.iter().map(|part| self.formula(part)).collect();
        self.to.exprs.over(make, &items)
    }

    fn clauses(&mut self) {
        let from = self.from;
        for clause in from.clauses.iter() {
            let moved: Option<Vec<BitLit>> = clause
                .iter()
                .map(|lit| self.moved[lit.bit().index()].map(|bit| BitLit::new(bit, !lit.is_negated())))
                .collect();
            match moved {
                Some(lits) => self.to.clauses.push(&lits),
                None => {
                    let items: Vec<ExprId> = clause.iter().map(|&lit| self.literal(lit)).collect();
                    let some = self.to.exprs.over(Expr::Some, &items);
                    self.must(some);
                }
            }
        }
    }

    fn literal(&mut self, lit: BitLit) -> ExprId {
        let bit = self.bit(lit.bit());
        if lit.is_negated() { self.node(Expr::Not(bit)) } else { bit }
    }

    /// The constraints that are expressions, and the domains of variables that were taken apart.
    fn expressions(&mut self) {
        let from = self.from;
        let vars: Vec<ExprId> = from.vars().ids().map(|var| self.var(var)).collect();
        let tables: Vec<_> = from.exprs.tables().values().map(|table| self.to.exprs.add_table(table.clone())).collect();
        let mut moved: Vec<ExprId> = Vec::with_capacity(from.exprs.len());
        for (_, &expr) in from.exprs.iter() {
            let new = match expr {
                Expr::Var(var) => vars[var.index()],
                _ => {
                    let of = |id: ExprId| moved[id.index()];
                    let mut list = |list: ExprList| {
                        let items: Vec<ExprId> = from.exprs.items(list).iter().map(|&id| of(id)).collect();
                        self.to.exprs.list(&items)
                    };
                    let expr = match expr {
                        Expr::Truth(_) | Expr::Number(_) | Expr::Var(_) => expr,
                        Expr::Not(a) => Expr::Not(of(a)),
                        Expr::All(items) => Expr::All(list(items)),
                        Expr::Some(items) => Expr::Some(list(items)),
                        Expr::Odd(items) => Expr::Odd(list(items)),
                        Expr::Compare(compare, a, b) => Expr::Compare(compare, of(a), of(b)),
                        Expr::Different(items) => Expr::Different(list(items)),
                        Expr::OneOf(items, table) => Expr::OneOf(list(items), tables[table.index()]),
                        Expr::AsNumber(a) => Expr::AsNumber(of(a)),
                        Expr::Count(items) => Expr::Count(list(items)),
                        Expr::Sum(items) => Expr::Sum(list(items)),
                        Expr::Product(a, b) => Expr::Product(of(a), of(b)),
                        Expr::Negate(a) => Expr::Negate(of(a)),
                        Expr::Abs(a) => Expr::Abs(of(a)),
                        Expr::Quotient(a, by) => Expr::Quotient(of(a), by),
                        Expr::Remainder(a, by) => Expr::Remainder(of(a), by),
                        Expr::Smallest(items) => Expr::Smallest(list(items)),
                        Expr::Largest(items) => Expr::Largest(list(items)),
                        Expr::Choose(a, b, c) => Expr::Choose(of(a), of(b), of(c)),
                        Expr::Element(index, items) => Expr::Element(of(index), list(items)),
                    };
                    self.node(expr)
                }
            };
            moved.push(new);
        }
        from.constraints.iter().for_each(|constraint| self.must(moved[constraint.expr.index()]));
    }

    /// A variable of the first problem as an expression.
    fn var(&mut self, id: VarId) -> ExprId {
        if let Some(kept) = self.kept[id.index()] {
            return self.node(Expr::Var(kept));
        }
        let var = &self.from.vars()[id];
        let (first, width) = (var.first_bit.index(), usize::from(var.width));
        if var.domain == Domain::YesNo {
            return self.bit(var.first_bit);
        }
        let (base, last) = match var.domain {
            Domain::Range { lo, hi } => (lo, hi),
            _ => (0, self.from.size(var.domain) as i64),
        };
        let zero = self.node(Expr::Number(0));
        let mut items = vec![self.node(Expr::Number(base))];
        for at in 0..width {
            let bit = self.bit(BitId::new(first + at));
            // 2^63 is minus the least number.
            let power = self.node(Expr::Number(if at == 63 { i64::MIN } else { 1 << at }));
            let power = if at == 63 { self.node(Expr::Negate(power)) } else { power };
            items.push(self.node(Expr::Choose(bit, power, zero)));
        }
        let value = self.to.exprs.over(Expr::Sum, &items);
        if i128::from(self.from.size(var.domain)) + 1 < 1i128 << width {
            let last = self.node(Expr::Number(last));
            let inside = self.node(Expr::Compare(Compare::Le, value, last));
            self.must(inside);
        }
        value
    }
}
