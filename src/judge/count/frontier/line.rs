//! The line: an order of the variables in which few clauses cross any cut.
//!
//! Clauses over the same variables form a *bundle*. A bundle of which some variables are placed and some are not is
//! open; what it remembers of the placed ones is at most a bit for each of its clauses, and at most a bit for each of
//! those variables. The sum over the open bundles is the *width* of the cut.
//!
//! Greedy: the next variable is the one after which the fewest bundles are open, those that are nearly done counting as
//! less; among equals, one whose bundles were touched last. This is tried from several starts, and the line with the
//! least sum over its cuts of `2^(SHARE * width)` is taken, unless that says that it would be too much work.

use std::collections::BTreeMap;

use crate::judge::count::engine::Prepared;

/// Variables above which no line is looked for.
const MAX_VARS: usize = 4000;
/// Bundles looked at, in all tries together.
const WORK: usize = 2_000_000;
/// The starts that are tried, at most.
const STARTS: usize = 16;
/// The share of the width that tells states apart at the widest cut: measured 0.33 on colourings of grids, 0.5 on a
/// formula of bundled clauses and 0.75 on a sparse one of the model counting competition.
const SHARE: f64 = 0.45;
/// What a bundle with one variable left counts less than any other open one.
const NEARLY: f64 = 0.3;

/// The line; nothing for formulas that are too large, or that would probably take more states than these.
pub(super) fn line(formula: &Prepared, states: u64) -> Option<Vec<u32>> {
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
    let Some((cost, line)) = best else { return Some(Vec::new()) };
    (cost <= states as f64).then_some(line)
}

/// Clauses over the same variables.
struct Bundle {
    vars: Vec<u32>,
    clauses: u32,
}

impl Bundle {
    /// What it adds to the width while so many of its variables are to come.
    fn width(&self, left: u32) -> u32 {
        if left == 0 { 0 } else { self.clauses.min(self.vars.len() as u32 - left) }
    }
}

struct Finder {
    bundles: Vec<Bundle>,
    /// For a variable, its bundles.
    lists: Vec<Vec<u32>>,
    work: usize,
}

/// Where a line under way stands.
struct Way {
    placed: Vec<bool>,
    /// For a bundle, how many of its variables are to come.
    left: Vec<u32>,
    /// For a variable, when one of its bundles was last touched.
    touched: Vec<usize>,
    /// Variables with an open bundle that are not placed.
    near: Vec<u32>,
}

impl Finder {
    fn new(formula: &Prepared) -> Self {
        let mut counts: BTreeMap<Vec<u32>, u32> = BTreeMap::new();
        for clause in &formula.clauses {
            let mut vars: Vec<u32> = clause.iter().map(|lit| lit.var() as u32).collect();
            vars.sort_unstable();
            *counts.entry(vars).or_default() += 1;
        }
        let bundles: Vec<Bundle> = counts.into_iter().map(|(vars, clauses)| Bundle { vars, clauses }).collect();
        let mut lists = vec![Vec::new(); formula.class.len()];
        for (at, bundle) in bundles.iter().enumerate() {
            bundle.vars.iter().for_each(|&var| lists[var as usize].push(at as u32));
        }
        Self { bundles, lists, work: 0 }
    }

    fn line(&mut self, start: usize) -> (f64, Vec<u32>) {
        let vars = self.lists.len();
        let mut way = Way {
            placed: vec![false; vars],
            left: self.bundles.iter().map(|bundle| bundle.vars.len() as u32).collect(),
            touched: vec![0; vars],
            near: Vec::new(),
        };
        let (mut line, mut width, mut cost) = (Vec::with_capacity(vars), 0, 0.0);
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
                let (bundle, left) = (&self.bundles[at as usize], &mut way.left[at as usize]);
                width -= bundle.width(*left);
                *left -= 1;
                width += bundle.width(*left);
                for &other in bundle.vars.iter().filter(|&&other| !way.placed[other as usize]) {
                    if way.touched[other as usize] == 0 {
                        way.near.push(other);
                    }
                    way.touched[other as usize] = line.len();
                }
                self.work += bundle.vars.len();
            }
            cost += (SHARE * f64::from(width)).exp2();
        }
        (cost, line)
    }

    /// The variable beside the line that leaves the fewest bundles open.
    fn nearest(&mut self, way: &Way) -> Option<usize> {
        let mut best: Option<(f64, usize, u32)> = None;
        for &var in &way.near {
            let list = &self.lists[var as usize];
            self.work += list.len();
            let change = |&at: &u32| match (way.left[at as usize], self.bundles[at as usize].vars.len()) {
                (1, _) => -1.0,
                (left, len) if left as usize == len => 1.0,
                (left, _) => -NEARLY / f64::from(left - 1),
            };
            let opened: f64 = list.iter().map(change).sum();
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
