//! From expressions to signals and numbers, one operator at a time.

use crate::id::Id;
use crate::judge::reading::graph::{Graph, Signal};
use crate::judge::reading::number::Number;
use crate::problem::{Compare, Domain, Expr, ExprId, ExprList, Problem, TableId, VarId};

/// "All different" goes value by value up to this many values, and pair by pair beyond: a value costs three nodes an
/// operand, a pair one comparison.
const MAX_VALUES: i128 = 256;

/// What an expression is over the bits.
#[derive(Clone, Debug)]
pub(crate) enum Meaning {
    /// A yes/no expression.
    Truth(Signal),
    /// An integer expression.
    Number(Number),
}

/// Reads expressions in the order of their arena.
pub(crate) struct Reader<'a> {
    problem: &'a Problem,
    graph: &'a mut Graph,
    meanings: Vec<Option<Meaning>>,
}

impl<'a> Reader<'a> {
    /// A reader of the expressions of a problem; the graph is over its bits.
    pub(crate) fn new(problem: &'a Problem, graph: &'a mut Graph) -> Self {
        Self { problem, graph, meanings: Vec::new() }
    }

    /// The signals of the constraints that are expressions, in order.
    pub(crate) fn constraints(&mut self) -> Vec<Signal> {
        let needed = self.needed();
        for (id, &expr) in self.problem.exprs.iter() {
            let meaning = needed[id.index()].then(|| self.meaning(expr));
            self.meanings.push(meaning);
        }
        self.problem.constraints.iter().map(|constraint| self.truth(constraint.expr)).collect()
    }

    /// Whether the code of a variable lies in its domain.
    pub(crate) fn in_domain(&mut self, var: VarId) -> Signal {
        let last = self.problem.size(self.problem.vars()[var].domain);
        let code = self.code(var);
        let all_ones = u64::MAX.checked_shr(64 - code.len() as u32).unwrap_or(0);
        if last == all_ones {
            return Signal::YES;
        }
        let code = Number::from_code(self.graph, &code, 0, all_ones);
        !Number::constant(last.into()).less(self.graph, &code)
    }

    fn needed(&self) -> Vec<bool> {
        let mut needed = vec![false; self.problem.exprs.len()];
        self.problem.constraints.iter().for_each(|constraint| needed[constraint.expr.index()] = true);
        // Operands have smaller ids, so one backward pass over the arena reaches all of them.
        for at in (0..needed.len()).rev() {
            if needed[at] {
                self.mark(at, &mut needed);
            }
        }
        needed
    }

    fn mark(&self, at: usize, needed: &mut [bool]) {
        let expr = self.problem.exprs.get(ExprId::new(at));
        self.problem.exprs.operands(expr).iter().for_each(|operand| needed[operand.index()] = true);
    }

    fn code(&self, var: VarId) -> Vec<Signal> {
        let var = &self.problem.vars()[var];
        (0..usize::from(var.width)).map(|at| self.graph.bit(var.first_bit.index() + at)).collect()
    }

    fn truth(&self, id: ExprId) -> Signal {
        match &self.meanings[id.index()] {
            Some(Meaning::Truth(signal)) => *signal,
            _ => unreachable!("checked: a yes/no operand"),
        }
    }

    fn number(&self, id: ExprId) -> Number {
        match &self.meanings[id.index()] {
            Some(Meaning::Number(number)) => number.clone(),
            _ => unreachable!("checked: an integer operand"),
        }
    }

    fn truths(&self, list: ExprList) -> Vec<Signal> {
        self.problem.exprs.items(list).iter().map(|&id| self.truth(id)).collect()
    }

    fn numbers(&self, list: ExprList) -> Vec<Number> {
        self.problem.exprs.items(list).iter().map(|&id| self.number(id)).collect()
    }

    fn meaning(&mut self, expr: Expr) -> Meaning {
        match expr {
            Expr::Var(var) => self.var(var),
            Expr::Choose(condition, yes, no) => self.choose(condition, yes, no),
            Expr::Element(index, list) => self.element(index, list),
            Expr::Truth(_) | Expr::Not(_) | Expr::All(_) | Expr::Some(_) | Expr::Odd(_) => {
                Meaning::Truth(self.connective(expr))
            }
            Expr::Compare(..) | Expr::Different(_) | Expr::OneOf(..) => Meaning::Truth(self.relation(expr)),
            _ => Meaning::Number(self.arithmetic(expr)),
        }
    }

    fn var(&mut self, id: VarId) -> Meaning {
        let code = self.code(id);
        let domain = self.problem.vars()[id].domain;
        let base = match domain {
            Domain::YesNo => return Meaning::Truth(code[0]),
            Domain::Range { lo, .. } => lo.into(),
            Domain::Kind(_) => 0,
        };
        Meaning::Number(Number::from_code(self.graph, &code, base, self.problem.size(domain)))
    }

    fn connective(&mut self, expr: Expr) -> Signal {
        match expr {
            Expr::Truth(value) => Signal::constant(value),
            Expr::Not(a) => !self.truth(a),
            Expr::All(list) => self.graph.all(self.truths(list)),
            Expr::Some(list) => self.graph.any(self.truths(list)),
            Expr::Odd(list) => {
                let truths = self.truths(list);
                truths.into_iter().rev().fold(Signal::NO, |odd, truth| self.graph.odd(odd, truth))
            }
            _ => unreachable!("a connective"),
        }
    }

    fn relation(&mut self, expr: Expr) -> Signal {
        match expr {
            Expr::Compare(compare, a, b) => {
                let (a, b) = (self.number(a), self.number(b));
                match compare {
                    Compare::Eq => a.equals(self.graph, &b),
                    Compare::Ne => !a.equals(self.graph, &b),
                    Compare::Lt => a.less(self.graph, &b),
                    Compare::Le => !b.less(self.graph, &a),
                }
            }
            Expr::Different(list) => self.different(&self.numbers(list)),
            Expr::OneOf(list, table) => self.one_of(&self.numbers(list), table),
            _ => unreachable!("a relation"),
        }
    }

    fn arithmetic(&mut self, expr: Expr) -> Number {
        match expr {
            Expr::Number(value) => Number::constant(value.into()),
            Expr::AsNumber(a) => Number::count(self.graph, &[self.truth(a)]),
            Expr::Count(list) => Number::count(self.graph, &self.truths(list)),
            Expr::Sum(list) => self.sum(&self.numbers(list)),
            Expr::Product(a, b) => self.number(a).times(self.graph, &self.number(b)),
            Expr::Negate(a) => self.number(a).negated(self.graph),
            Expr::Abs(a) => self.number(a).abs(self.graph),
            Expr::Quotient(a, by) => self.number(a).divided(self.graph, by).0,
            Expr::Remainder(a, by) => self.number(a).divided(self.graph, by).1,
            Expr::Smallest(list) => self.fold(list, Number::lesser),
            Expr::Largest(list) => self.fold(list, Number::larger),
            _ => unreachable!("an integer"),
        }
    }

    fn fold(&mut self, list: ExprList, pick: fn(&Number, &mut Graph, &Number) -> Number) -> Number {
        let numbers = self.numbers(list);
        numbers.into_iter().rev().reduce(|a, b| pick(&a, self.graph, &b)).expect("checked: not empty")
    }

    /// A sum of counting numbers is a count of all their truths; any other sum is added up, the last operand first:
    /// late variables change slowly in a sweep.
    fn sum(&mut self, numbers: &[Number]) -> Number {
        if !numbers.is_empty() && numbers.iter().all(|number| number.unary().is_some()) {
            let truths: Vec<Signal> =
                numbers.iter().flat_map(|number| number.unary().unwrap_or(&[])).copied().collect();
            return Number::count(self.graph, &truths);
        }
        numbers.iter().rev().fold(Number::constant(0), |sum, number| sum.plus(self.graph, number))
    }

    fn choose(&mut self, condition: ExprId, yes: ExprId, no: ExprId) -> Meaning {
        let condition = self.truth(condition);
        match &self.meanings[yes.index()] {
            Some(Meaning::Truth(_)) => Meaning::Truth(self.graph.choose(condition, self.truth(yes), self.truth(no))),
            _ => Meaning::Number(Number::choose(self.graph, condition, &self.number(yes), &self.number(no))),
        }
    }

    fn element(&mut self, index: ExprId, list: ExprList) -> Meaning {
        let index = self.number(index);
        let on: Vec<Signal> = (0..list.len()).map(|at| index.is(self.graph, at as i128)).collect();
        let items = self.problem.exprs.items(list);
        if let Some(Meaning::Truth(_)) = self.meanings[items[0].index()] {
            let chosen: Vec<Signal> =
                on.iter().zip(self.truths(list)).map(|(&on, truth)| self.graph.and(on, truth)).collect();
            return Meaning::Truth(self.graph.any(chosen));
        }
        let numbers = self.numbers(list);
        let choices: Vec<(Signal, &Number)> = on.into_iter().zip(&numbers).collect();
        Meaning::Number(Number::select(self.graph, &choices))
    }

    fn different(&mut self, numbers: &[Number]) -> Signal {
        let lo = numbers.iter().map(Number::lo).min().unwrap_or(0);
        let hi = numbers.iter().map(Number::hi).max().unwrap_or(0);
        if hi - lo >= MAX_VALUES {
            return self.different_by_pairs(numbers);
        }
        // No value is met again once it was met.
        let mut clashes = Vec::new();
        for value in lo..=hi {
            let mut met = Signal::NO;
            for number in numbers.iter().rev() {
                let here = number.is(self.graph, value);
                clashes.push(self.graph.and(met, here));
                met = self.graph.or(met, here);
            }
        }
        !self.graph.any(clashes)
    }

    fn different_by_pairs(&mut self, numbers: &[Number]) -> Signal {
        let mut clashes = Vec::new();
        for (at, a) in numbers.iter().enumerate() {
            for b in &numbers[..at] {
                clashes.push(a.equals(self.graph, b));
            }
        }
        !self.graph.any(clashes)
    }

    fn one_of(&mut self, tuple: &[Number], table: TableId) -> Signal {
        let mut met = Vec::new();
        for row in self.problem.exprs.table(table).rows() {
            let cells: Vec<Signal> =
                tuple.iter().zip(row).map(|(number, &cell)| number.is(self.graph, cell.into())).collect();
            met.push(self.graph.all(cells));
        }
        self.graph.any(met)
    }
}
