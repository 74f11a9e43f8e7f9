//! Lists, loops and the words over them.

use super::logic::{Gather, Join};
use super::{Lowered, Lowering, Stop, Turn};
use crate::problem::{Compare, Expr};
use crate::source::tally::ast::{Generator, Kind, List, NodeId, Source, Word};
use crate::source::tally::check::Meaning;
use crate::source::tally::mistakes::values;
use crate::source::tally::scope::{Ty, Val, What};
use crate::span::Span;

/// What an element of a list is expanded with.
type Visit<'v, 'a, 't> = &'v mut dyn FnMut(&mut Lowering<'a, 't>, NodeId) -> Lowered<()>;

/// The values that an index runs over.
pub(crate) enum Run {
    /// From the first to the last; none where the last is smaller.
    Range(i64, i64),
    /// These.
    Values(Vec<i64>),
}

impl<'a, 't> Lowering<'a, 't> {
    /// Visits every element of a list, in order, with the indices in force.
    pub(crate) fn elements(&mut self, list: NodeId, visit: Visit<'_, 'a, 't>) -> Lowered<()> {
        let ast = self.ast;
        match &ast.get(list).kind {
            Kind::List(List::Items(items)) => items.iter().try_for_each(|&item| visit(self, item)),
            Kind::List(List::Each { body, generators, filter }) => self.turns(generators, *filter, *body, visit),
            _ => unreachable!("the grammar puts a list here"),
        }
    }

    fn turns(
        &mut self,
        generators: &[Generator<'t>],
        filter: Option<NodeId>,
        body: NodeId,
        visit: Visit<'_, 'a, 't>,
    ) -> Lowered<()> {
        let Some((generator, inner)) = generators.split_first() else {
            let goes = match filter {
                Some(filter) => self.constant(filter, "the condition after `with`")? != 0,
                None => true,
            };
            return if goes { visit(self, body) } else { Ok(()) };
        };
        let (run, ty) = self.run(generator.source)?;
        let mut turn = |lowering: &mut Self, value: i64| {
            lowering.step(1, generator.name.span)?;
            lowering.turns.push(Turn { name: generator.name.text, ty, value });
            let done = lowering.turns(inner, filter, body, visit);
            lowering.turns.pop();
            done
        };
        match run {
            Run::Range(lo, hi) => (lo..=hi).try_for_each(|value| turn(self, value)),
            Run::Values(values) => values.into_iter().try_for_each(|value| turn(self, value)),
        }
    }

    /// What an index runs over, with the type of the index.
    pub(crate) fn run(&mut self, source: Source) -> Lowered<(Run, Ty)> {
        match source {
            Source::Range(lo, hi) => {
                let ends = (self.constant(lo, "the end of a range"), self.constant(hi, "the end of a range"));
                Ok((Run::Range(ends.0?, ends.1?), Ty::Int))
            }
            Source::Of(node) => match (&self.ast.get(node).kind, self.facts.meaning(node)) {
                (_, Meaning::Entity(entity)) => match &self.scope.get(entity).what {
                    What::Kind(kind) => {
                        let last = self.build.problem.kinds[*kind].values.len() as i64 - 1;
                        Ok((Run::Range(0, last), Ty::Kind(*kind)))
                    }
                    What::Row(row) => {
                        let cells = row.cells.iter().filter_map(|cell| match cell {
                            Val::Const(value) => Some(*value),
                            Val::Node(_) => None,
                        });
                        Ok((Run::Values(cells.collect()), row.ty))
                    }
                    _ => unreachable!("the checker refused it"),
                },
                _ => {
                    let mut items = Vec::new();
                    let mut ty = Ty::Int;
                    self.elements(node, &mut |lowering, item| {
                        items.push(lowering.constant(item, "an element of a list to run over")?);
                        ty = lowering.facts.ty(item);
                        Ok(())
                    })?;
                    Ok((Run::Values(items), ty))
                }
            },
        }
    }

    /// The values of all elements. Items of a plain list are all looked at, loops stop at their first mistake.
    fn collect(&mut self, list: NodeId, lower: fn(&mut Self, NodeId) -> Lowered) -> Lowered<Vec<Val>> {
        let plain = matches!(self.ast.get(list).kind, Kind::List(List::Items(_)));
        let mut all = Vec::new();
        let mut failed = false;
        self.elements(list, &mut |lowering, element| {
            match lower(lowering, element) {
                Ok(val) => all.push(val),
                Err(Stop::Mistake) if plain => failed = true,
                Err(stop) => return Err(stop),
            }
            Ok(())
        })?;
        if failed { Err(Stop::Mistake) } else { Ok(all) }
    }

    /// All or some of the elements.
    fn joined(&mut self, join: Join, list: NodeId, span: Span) -> Lowered {
        let looped = matches!(self.ast.get(list).kind, Kind::List(List::Each { .. }));
        let mut all = Gather::new(join, self.out.len());
        let mut failed = false;
        let walked = self.elements(list, &mut |lowering, element| {
            let before = lowering.out.len();
            let condition = lowering.lower(element);
            // One turn's message stands for the loop; the turns after it may still decide.
            if failed && looped {
                lowering.out.truncate(before);
            }
            failed |= condition == Err(Stop::Mistake);
            lowering.gather(&mut all, condition)
        });
        walked?;
        self.gathered(all, span)
    }

    pub(super) fn over(&mut self, word: Word, list: NodeId, span: Span) -> Lowered {
        match word {
            Word::All => self.joined(Join::All, list, span),
            Word::Some => self.joined(Join::Some, list, span),
            Word::None => {
                let some = self.joined(Join::Some, list, span)?;
                self.not(some, span)
            }
            Word::Exactly(bound) => self.cardinality(Compare::Eq, bound, list, span),
            Word::AtMost(bound) => self.cardinality(Compare::Le, bound, list, span),
            Word::AtLeast(bound) => {
                let (bound, count) = self.bound_and_count(bound, list, span)?;
                self.compare_numbers(Compare::Le, bound, count, span)
            }
            Word::Number => {
                let conditions = self.collect(list, Self::lower)?;
                self.count(&conditions, span)
            }
            Word::Odd | Word::Even => {
                let conditions = self.collect(list, Self::lower)?;
                let odd = self.parity(&conditions, span)?;
                if word == Word::Odd { Ok(odd) } else { self.not(odd, span) }
            }
            Word::Sum => self.sum_over(list, span),
            Word::Smallest => self.extreme(list, "smallest", Expr::Smallest, i64::min, span),
            Word::Largest => self.extreme(list, "largest", Expr::Largest, i64::max, span),
            Word::Different => self.different(list, span),
        }
    }

    fn cardinality(&mut self, compare: Compare, bound: NodeId, list: NodeId, span: Span) -> Lowered {
        let (bound, count) = self.bound_and_count(bound, list, span)?;
        self.compare_numbers(compare, count, bound, span)
    }

    fn bound_and_count(&mut self, bound: NodeId, list: NodeId, span: Span) -> Lowered<(Val, Val)> {
        let bound = self.number(bound);
        let conditions = self.collect(list, Self::lower);
        let (bound, conditions) = (bound?, conditions?);
        Ok((bound, self.count(&conditions, span)?))
    }

    fn sum_over(&mut self, list: NodeId, span: Span) -> Lowered {
        let mut conditions = Vec::new();
        let mut numbers = Vec::new();
        let mut failed = false;
        self.elements(list, &mut |lowering, element| {
            let yes_no = lowering.facts.ty(element) == Ty::YesNo;
            match lowering.lower(element) {
                Ok(val) if yes_no => conditions.push(val),
                Ok(val) => numbers.push(val),
                Err(Stop::Mistake) if !failed => failed = true,
                Err(stop) => return Err(stop),
            }
            Ok(())
        })?;
        if failed {
            return Err(Stop::Mistake);
        }
        // Conditions are counted: that is one node, and the rooms after know how to count.
        if !conditions.is_empty() {
            numbers.push(self.count(&conditions, span)?);
        }
        self.total(&numbers, span)
    }

    fn extreme(
        &mut self,
        list: NodeId,
        word: &str,
        make: fn(crate::problem::ExprList) -> Expr,
        pick: fn(i64, i64) -> i64,
        span: Span,
    ) -> Lowered {
        let all = self.collect(list, Self::number)?;
        if all.is_empty() {
            let mistake = values::of_nothing(self.ast.get(list).span, word, &self.turn());
            return self.mistake(mistake);
        }
        let known =
            all.iter().filter_map(|val| if let Val::Const(value) = val { Some(*value) } else { None }).reduce(pick);
        let mut open: Vec<_> =
            all.iter().filter_map(|val| if let Val::Node(id) = val { Some(*id) } else { None }).collect();
        if let Some(known) = known {
            if open.is_empty() {
                return Ok(Val::Const(known));
            }
            open.push(self.build.number(known, span));
        }
        if let [only] = open[..] { Ok(Val::Node(only)) } else { self.add_over(make, &open, span) }
    }

    fn different(&mut self, list: NodeId, span: Span) -> Lowered {
        let all = self.collect(list, Self::number)?;
        let mut known: Vec<i64> =
            all.iter().filter_map(|val| if let Val::Const(v) = val { Some(*v) } else { None }).collect();
        known.sort_unstable();
        if known.windows(2).any(|pair| pair[0] == pair[1]) {
            return Ok(Val::Const(0));
        }
        if known.len() == all.len() || all.len() == 1 {
            return Ok(Val::Const(1));
        }
        let all: Vec<_> = all.into_iter().map(|val| self.expr(val, span)).collect();
        self.add_over(Expr::Different, &all, span)
    }
}
