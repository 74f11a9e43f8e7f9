//! The line: an order of the variables in which few clauses cross any cut.
//!
//! Greedy: the next variable is the one after which the fewest clauses are open, those that are nearly done counting as
//! less; among equals, one whose clauses were touched last. This is tried from several starts, and the line with the
//! least sum over its cuts of `2^(SHARE * open clauses)` is taken.

use crate::judge::count::engine::Prepared;

/// Variables above which no line is looked for.
const MAX_VARS: usize = 4000;
/// Clauses looked at, in all tries together.
const WORK: usize = 4_000_000;
/// The starts that are tried, at most.
const STARTS: usize = 24;
/// The share of the open clauses that tell states apart, measured on grids and sparse formulas as about a half.
const SHARE: f64 = 0.6;
/// What a clause with one variable left counts less than any other open one.
const NEARLY: f64 = 0.3;

/// The line; nothing for formulas that are too large.
pub(super) fn line(formula: &Prepared) -> Option<Vec<u32>> {
    let vars = formula.class.len();
    if vars > MAX_VARS {
        return None;
    }
    let mut finder = Finder::new(formula);
    let mut best: Option<(f64, Vec<u32>)> = None;
    let starts = STARTS.min(vars);
    for at in 0..starts {
        let found = finder.line(at * vars / starts);
        if best.as_ref().is_none_or(|(cost, _)| found.0 < *cost) {
            best = Some(found);
        }
        if finder.work > WORK {
            break;
        }
    }
    Some(best.map_or_else(Vec::new, |(_, line)| line))
}

struct Finder<'a> {
    formula: &'a Prepared,
    lists: Vec<Vec<u32>>,
    work: usize,
}

/// Where a line under way stands.
struct Way {
    placed: Vec<bool>,
    /// For a clause, how many of its variables are to come.
    left: Vec<u32>,
    /// For a variable, when one of its clauses was last touched.
    touched: Vec<usize>,
    /// Variables with an open clause that are not placed.
    near: Vec<u32>,
}

impl<'a> Finder<'a> {
    fn new(formula: &'a Prepared) -> Self {
        let mut lists = vec![Vec::new(); formula.class.len()];
        for (at, clause) in formula.clauses.iter().enumerate() {
            clause.iter().for_each(|lit| lists[lit.var()].push(at as u32));
        }
        Self { formula, lists, work: 0 }
    }

    fn line(&mut self, start: usize) -> (f64, Vec<u32>) {
        let vars = self.lists.len();
        let clauses = &self.formula.clauses;
        let mut way = Way {
            placed: vec![false; vars],
            left: clauses.iter().map(|clause| clause.len() as u32).collect(),
            touched: vec![0; vars],
            near: Vec::new(),
        };
        let (mut line, mut open, mut cost) = (Vec::with_capacity(vars), 0u32, 0.0);
        let mut next = Some(start);
        let mut fresh = 0;
        while line.len() < vars {
            let var = next.take().or_else(|| self.nearest(&way)).unwrap_or_else(|| {
                // A component is done: the next one begins at its first variable.
                while way.placed[fresh] {
                    fresh += 1;
                }
                fresh
            });
            way.placed[var] = true;
            line.push(var as u32);
            way.near.retain(|&other| other as usize != var);
            for &at in &self.lists[var] {
                let clause = &clauses[at as usize];
                let left = &mut way.left[at as usize];
                open += u32::from(*left as usize == clause.len());
                *left -= 1;
                open -= u32::from(*left == 0);
                for lit in clause.iter().filter(|lit| !way.placed[lit.var()]) {
                    if way.touched[lit.var()] == 0 {
                        way.near.push(lit.var() as u32);
                    }
                    way.touched[lit.var()] = line.len();
                }
                self.work += clause.len();
            }
            cost += (SHARE * f64::from(open)).exp2();
        }
        (cost, line)
    }

    /// The variable beside the line that leaves the fewest clauses open.
    fn nearest(&mut self, way: &Way) -> Option<usize> {
        let mut best: Option<(f64, usize, u32)> = None;
        for &var in &way.near {
            let list = &self.lists[var as usize];
            self.work += list.len();
            let gain = |&at: &u32| match (way.left[at as usize], self.formula.clauses[at as usize].len()) {
                (1, _) => -1.0,
                (left, len) if left as usize == len => 1.0,
                (left, _) => -NEARLY / f64::from(left - 1),
            };
            let opened: f64 = list.iter().map(gain).sum();
            let better = |&(least, touched, first): &(f64, usize, u32)| {
                let own = way.touched[var as usize];
                opened < least || (opened == least && (own > touched || (own == touched && var < first)))
            };
            if best.as_ref().is_none_or(better) {
                best = Some((opened, way.touched[var as usize], var));
            }
        }
        best.map(|(_, _, var)| var as usize)
    }
}
