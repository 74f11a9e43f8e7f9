//! `one of`: a table where its rows are constant, else an equality for each row.

use super::logic::{Gather, Join};
use super::{Lowered, Lowering, Stop};
use crate::problem::{Compare, Expr, ExprId, Table};
use crate::source::tally::ast::{Kind, NodeId};
use crate::source::tally::scope::Val;
use crate::span::Span;

impl<'a, 't> Lowering<'a, 't> {
    pub(super) fn one_of(&mut self, left: NodeId, list: NodeId, span: Span) -> Lowered {
        let tuple = self.tuple(left);
        if tuple == Err(Stop::Limit) {
            return Err(Stop::Limit);
        }
        let mut rows = Vec::new();
        self.elements(list, &mut |lowering, entry| {
            rows.push(lowering.tuple(entry)?);
            Ok(())
        })?;
        let tuple = tuple?;
        let constant = |val: &Val| matches!(val, Val::Const(_));
        if rows.iter().all(|row| row.iter().all(constant)) {
            self.table(&tuple, &rows, span)
        } else {
            self.alternatives(&tuple, &rows, span)
        }
    }

    /// The parts of a tuple as integers; a single value is its own only part.
    fn tuple(&mut self, id: NodeId) -> Lowered<Vec<Val>> {
        match &self.ast.get(id).kind {
            Kind::Tuple(parts) => {
                let all: Vec<Lowered> = parts.iter().map(|&part| self.number(part)).collect();
                if all.contains(&Err(Stop::Limit)) {
                    return Err(Stop::Limit);
                }
                all.into_iter().collect()
            }
            _ => Ok(vec![self.number(id)?]),
        }
    }

    /// Rows that disagree with a constant part of the tuple cannot match; constant parts need no column.
    fn table(&mut self, tuple: &[Val], rows: &[Vec<Val>], span: Span) -> Lowered {
        let agrees =
            |row: &&Vec<Val>| tuple.iter().zip(*row).all(|(part, cell)| matches!(part, Val::Node(_)) || part == cell);
        let open: Vec<(usize, ExprId)> = tuple
            .iter()
            .enumerate()
            .filter_map(|(at, part)| if let Val::Node(id) = part { Some((at, *id)) } else { None })
            .collect();
        let cell = |val: Val| if let Val::Const(value) = val { value } else { unreachable!("rows are constant") };
        let rows: Vec<Vec<i64>> =
            rows.iter().filter(agrees).map(|row| open.iter().map(|&(at, _)| cell(row[at])).collect()).collect();
        if rows.is_empty() || open.is_empty() {
            return Ok(Val::Const(i64::from(!rows.is_empty())));
        }
        self.step(rows.len() * open.len(), span)?;
        let exprs = &mut self.build.problem.exprs;
        let table = exprs.add_table(Table::new(open.len(), rows));
        let list = exprs.list(&open.iter().map(|&(_, id)| id).collect::<Vec<_>>());
        self.add(Expr::OneOf(list, table), span)
    }

    fn alternatives(&mut self, tuple: &[Val], rows: &[Vec<Val>], span: Span) -> Lowered {
        let mut some = Gather::new(Join::Some, self.out.len());
        for row in rows {
            let mut all = Gather::new(Join::All, self.out.len());
            for (&part, &cell) in tuple.iter().zip(row) {
                let equal = self.compare_numbers(Compare::Eq, part, cell, span);
                self.gather(&mut all, equal)?;
            }
            let row = self.gathered(all, span);
            self.gather(&mut some, row)?;
        }
        self.gathered(some, span)
    }
}
