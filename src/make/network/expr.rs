//! From expressions to the network: each yes/no expression becomes a literal, each number a linear form.

use rustc_hash::FxHashMap;

use super::Lit;
use super::builder::Builder;
use super::linear::{Linear, Range};
use crate::id::{Id, IdVec};
use crate::problem::{Compare, Domain, Expr, ExprId, ExprList, Problem, VarId};

/// What an expression became.
#[derive(Clone, Debug)]
enum Value {
    Truth(Lit),
    Number(Linear),
}

/// The values of the expressions that the constraints need.
pub(super) struct Values<'a> {
    problem: &'a Problem,
    /// The literal of each bit of the problem.
    bits: &'a [Lit],
    values: IdVec<ExprId, Option<Value>>,
    /// How many expressions use this one.
    uses: IdVec<ExprId, u32>,
    /// Constraints of which only this is left to check.
    left: FxHashMap<ExprId, Lit>,
}

impl<'a> Values<'a> {
    /// Nothing built yet but what is left of some constraints.
    pub(super) fn new(problem: &'a Problem, bits: &'a [Lit], left: FxHashMap<ExprId, Lit>) -> Self {
        let mut uses: IdVec<ExprId, u32> = vec![0; problem.exprs.len()].into();
        problem.constraints.iter().for_each(|constraint| uses[constraint.expr] += 1);
        for (id, &expr) in problem.exprs.iter().rev() {
            if uses[id] > 0 {
                problem.exprs.operands(expr).into_iter().for_each(|operand| uses[operand] += 1);
            }
        }
        Self { problem, bits, values: vec![None; problem.exprs.len()].into(), uses, left }
    }

    /// The conjuncts of a constraint, in order: what stands under *all of*, and the pairs of *different*.
    pub(super) fn conjuncts(&mut self, builder: &mut Builder, constraint: ExprId) -> Vec<Lit> {
        let mut conjuncts = Vec::new();
        let mut open = vec![constraint];
        while let Some(id) = open.pop() {
            if let Some(&left) = self.left.get(&id) {
                conjuncts.push(left);
                continue;
            }
            match self.problem.exprs.get(id) {
                Expr::All(list) => open.extend(self.problem.exprs.items(list).iter().rev()),
                Expr::Different(list) => {
                    self.need(builder, self.problem.exprs.items(list));
                    conjuncts.extend(self.different(builder, list));
                }
                _ => {
                    self.need(builder, &[id]);
                    conjuncts.push(self.truth(id));
                }
            }
        }
        conjuncts
    }

    /// Builds these expressions and what they need, operands first.
    fn need(&mut self, builder: &mut Builder, ids: &[ExprId]) {
        let mut open: Vec<(ExprId, bool)> = ids.iter().rev().map(|&id| (id, false)).collect();
        while let Some((id, ready)) = open.pop() {
            if self.values[id].is_some() {
                continue;
            }
            let expr = self.problem.exprs.get(id);
            if !ready {
                open.push((id, true));
                open.extend(self.problem.exprs.operands(expr).iter().rev().map(|&operand| (operand, false)));
                continue;
            }
            let value = match self.build(builder, expr) {
                Value::Number(form) => Value::Number(self.shared(builder, id, form)),
                truth => truth,
            };
            self.values[id] = Some(value);
        }
    }

    /// A sum that several expressions use is added up once where that is cheaper than each of them doing so.
    fn shared(&self, builder: &mut Builder, id: ExprId, form: Linear) -> Linear {
        let uses = self.uses[id] as usize;
        if uses < 2 || form.as_binary().is_some() {
            return form;
        }
        // Adding all columns costs about a full adder for each bit beyond the digits that stay.
        let (_, terms) = form.positive();
        let bits: usize = terms.iter().map(|&(_, weight)| weight.count_ones() as usize).sum();
        let digits = super::linear::width(form.range().span());
        if bits.saturating_sub(digits) * (uses - 1) > uses * digits { form.to_compact(builder) } else { form }
    }

    fn truth(&self, id: ExprId) -> Lit {
        match &self.values[id] {
            Some(Value::Truth(lit)) => *lit,
            _ => unreachable!("a yes/no expression, built before its users"),
        }
    }

    fn number(&self, id: ExprId) -> &Linear {
        match &self.values[id] {
            Some(Value::Number(form)) => form,
            _ => unreachable!("a number, built before its users"),
        }
    }

    fn truths(&self, list: ExprList) -> Vec<Lit> {
        self.problem.exprs.items(list).iter().map(|&id| self.truth(id)).collect()
    }

    fn numbers(&self, list: ExprList) -> Vec<Linear> {
        self.problem.exprs.items(list).iter().map(|&id| self.number(id).clone()).collect()
    }

    fn build(&self, builder: &mut Builder, expr: Expr) -> Value {
        let number = |id: ExprId| self.number(id);
        match expr {
            Expr::Truth(truth) => Value::Truth(Lit::constant(truth)),
            Expr::Number(value) => Value::Number(Linear::constant(value.into())),
            Expr::Var(var) => self.variable(var),
            Expr::Not(a) => Value::Truth(!self.truth(a)),
            Expr::All(list) => Value::Truth(builder.all(&self.truths(list))),
            Expr::Some(list) => {
                let none: Vec<Lit> = self.truths(list).into_iter().map(|lit| !lit).collect();
                Value::Truth(!builder.all(&none))
            }
            Expr::Odd(list) => Value::Truth(builder.odd(&self.truths(list))),
            Expr::Compare(compare, a, b) => Value::Truth(compare_numbers(builder, compare, number(a), number(b))),
            Expr::Different(list) => {
                let pairs = self.different(builder, list);
                Value::Truth(builder.all(&pairs))
            }
            Expr::OneOf(list, table) => {
                let rows = self.problem.exprs.table(table).rows();
                Value::Truth(tuple_in_table(builder, &self.numbers(list), rows))
            }
            Expr::AsNumber(a) => Value::Number(Linear::truth(self.truth(a))),
            Expr::Count(list) => {
                let ones: Vec<Linear> = self.truths(list).into_iter().map(Linear::truth).collect();
                Value::Number(Linear::sum(&ones))
            }
            Expr::Sum(list) => {
                let items = self.problem.exprs.items(list);
                Value::Number(Linear::sum(items.iter().map(|&id| self.number(id))))
            }
            Expr::Product(a, b) => Value::Number(builder.product(number(a), number(b))),
            Expr::Negate(a) => Value::Number(number(a).scale(-1)),
            Expr::Abs(a) => Value::Number(builder.absolute(number(a))),
            Expr::Quotient(a, by) => Value::Number(builder.divide(number(a), by.into()).0),
            Expr::Remainder(a, by) => Value::Number(builder.divide(number(a), by.into()).1),
            Expr::Smallest(list) => Value::Number(builder.extreme(&self.numbers(list), false)),
            Expr::Largest(list) => Value::Number(builder.extreme(&self.numbers(list), true)),
            Expr::Choose(condition, yes, no) => self.choose(builder, self.truth(condition), yes, no),
            Expr::Element(index, list) => self.element(builder, index, list),
        }
    }

    fn variable(&self, var: VarId) -> Value {
        let declared = &self.problem.vars()[var];
        let first = declared.first_bit.index();
        let digits = &self.bits[first..first + usize::from(declared.width)];
        if declared.domain == Domain::YesNo {
            return Value::Truth(digits[0]);
        }
        let base = if let Domain::Range { lo, .. } = declared.domain { i128::from(lo) } else { 0 };
        let range = Range::new(base, base + i128::from(self.problem.size(declared.domain)));
        Value::Number(Linear::binary(base, digits, range))
    }

    fn choose(&self, builder: &mut Builder, condition: Lit, yes: ExprId, no: ExprId) -> Value {
        match (&self.values[yes], &self.values[no]) {
            (Some(Value::Truth(yes)), Some(Value::Truth(no))) => Value::Truth(builder.choose(condition, *yes, *no)),
            _ => Value::Number(builder.choose_number(condition, self.number(yes), self.number(no))),
        }
    }

    fn element(&self, builder: &mut Builder, index: ExprId, list: ExprList) -> Value {
        let first = self.problem.exprs.items(list)[0];
        if matches!(self.values[first], Some(Value::Number(_))) {
            return Value::Number(builder.element(self.number(index), &self.numbers(list)));
        }
        let items = self.truths(list);
        let (digits, reach) = builder.index(self.number(index), items.len());
        let items = &items[reach];
        if items.iter().all(|lit| lit.is_constant()) {
            let values: Vec<Option<i128>> = items.iter().map(|&lit| Some(i128::from(lit == Lit::YES))).collect();
            let found = builder.lookup(&digits, &values);
            return Value::Truth(builder.at_least(&found, 1));
        }
        Value::Truth(builder.select(&digits, items))
    }

    /// "These two differ", for every two.
    fn different(&self, builder: &mut Builder, list: ExprList) -> Vec<Lit> {
        let numbers = self.numbers(list);
        let mut pairs = Vec::new();
        for (at, a) in numbers.iter().enumerate() {
            pairs.extend(numbers[at + 1..].iter().map(|b| compare_numbers(builder, Compare::Ne, a, b)));
        }
        pairs
    }
}

fn compare_numbers(builder: &mut Builder, compare: Compare, a: &Linear, b: &Linear) -> Lit {
    let difference = a.minus(b);
    match compare {
        Compare::Eq => builder.equal(&difference, 0),
        Compare::Ne => !builder.equal(&difference, 0),
        Compare::Lt => !builder.at_least(&difference, 0),
        Compare::Le => !builder.at_least(&difference, 1),
    }
}

/// Whether the tuple is a row: rows become strings of digits, rows with a value out of reach are left out.
fn tuple_in_table<'a>(builder: &mut Builder, tuple: &[Linear], rows: impl Iterator<Item = &'a [i64]>) -> Lit {
    let numbers: Vec<_> = tuple.iter().map(|number| number.to_binary(builder)).collect();
    // Highest digit first, so that a trie over the rows meets a whole value before the next.
    let bits: Vec<Lit> = numbers.iter().flat_map(|number| number.digits.iter().rev().copied()).collect();
    let code = |row: &[i64]| -> Option<Vec<bool>> {
        let mut string = Vec::with_capacity(bits.len());
        for ((&cell, number), form) in row.iter().zip(&numbers).zip(tuple) {
            let (cell, range) = (i128::from(cell), form.range());
            if cell < range.lo || cell > range.hi {
                return None;
            }
            let code = (cell - number.base) as u128;
            if number.digits.len() < 128 && code >> number.digits.len() != 0 {
                return None;
            }
            // A digit that is the constant *no* cannot be asked to be 1.
            let digit = |at: usize| code >> at & 1 == 1;
            if (0..number.digits.len()).any(|at| number.digits[at] == Lit::NO && digit(at)) {
                return None;
            }
            string.extend((0..number.digits.len()).rev().map(digit));
        }
        Some(string)
    };
    let strings: Vec<Vec<bool>> = rows.filter_map(code).collect();
    builder.one_of(&bits, &strings)
}
