//! Which variables define which: an order in which every variable is an input or follows from those before it.
//!
//! Input:  prepared clauses. Output: [`Definitions`]: inputs, and the other variables in an order in which each is
//!         defined by clauses over itself and earlier ones; or nothing, where there are too many inputs, or a variable
//!         that does not count is defined by none.
//!
//! Variables become inputs in the order of the formula, each only if nothing before it defines it; whatever follows
//! from a new variable is found before the next one becomes an input. Encodings number inputs before gates and gates
//! before their users, so the inputs found are mostly those that the encoding was made from.
//!
//! A definition may leave open what other clauses between the same earlier variables forbid. That is safe: such a clause
//! is required where no definition contains it, and where one does, that definition is an earlier one, so its value
//! cannot violate the clause unless a required clause was violated before.

use crate::columns;
use crate::judge::count::engine::{Class, Lit, Prepared};

/// Variables besides the defined one that the defining clauses may speak of: the table of its values has a word or so.
const MAX_WIDTH: usize = 8;
const WORDS: usize = 1 << (MAX_WIDTH - 6);
/// Clauses over known variables that are looked at for a definition.
const MAX_CLAUSES: usize = 64;

/// A table of one bit for each assignment of up to eight variables; rows beyond their number repeat.
pub(super) type Table = [u64; WORDS];

/// How a variable follows from earlier ones.
#[derive(Clone, Debug)]
pub(super) enum Rule {
    /// Its value for each assignment of these variables; and whether its clauses also forbid some of these assignments.
    Table { vars: Vec<u32>, values: Table, forbids: bool },
    /// The literal (of the variable) holds exactly if all these do.
    All { lit: Lit, of: Vec<Lit> },
}

/// A variable that follows from earlier ones, and the clauses that say so.
#[derive(Clone, Debug)]
pub(super) struct Definition {
    pub(super) var: u32,
    pub(super) rule: Rule,
    pub(super) clauses: Vec<u32>,
}

/// Inputs and what follows from them.
#[derive(Clone, Debug, Default)]
pub(super) struct Definitions {
    pub(super) inputs: Vec<u32>,
    pub(super) defined: Vec<Definition>,
}

/// Finds inputs, at most so many, and the definitions of all other variables.
pub(super) fn definitions(formula: &Prepared, most: usize) -> Option<Definitions> {
    let vars = formula.class.len();
    let mut finder = Finder {
        formula,
        lists: vec![Vec::new(); vars],
        open: formula.clauses.iter().map(|clause| clause.len() as u32).collect(),
        known: vec![false; vars],
        found: Definitions::default(),
    };
    for (at, clause) in formula.clauses.iter().enumerate() {
        clause.iter().for_each(|lit| finder.lists[lit.var()].push(at as u32));
    }
    for var in (0..vars).filter(|&var| formula.class[var] == Class::Counted) {
        if !finder.known[var] {
            if finder.found.inputs.len() == most {
                return None;
            }
            finder.found.inputs.push(var as u32);
            finder.close(var);
        }
    }
    finder.known.iter().all(|&known| known).then_some(finder.found)
}

struct Finder<'a> {
    formula: &'a Prepared,
    /// For a variable, its clauses.
    lists: Vec<Vec<u32>>,
    /// For a clause, how many of its variables are not known.
    open: Vec<u32>,
    known: Vec<bool>,
    found: Definitions,
}

impl Finder<'_> {
    /// Makes a variable known, and all that follows.
    fn close(&mut self, var: usize) {
        let mut queue = vec![var];
        self.known[var] = true;
        while let Some(var) = queue.pop() {
            for at in 0..self.lists[var].len() {
                let clause = self.lists[var][at] as usize;
                self.open[clause] -= 1;
                if self.open[clause] != 1 {
                    continue;
                }
                let last = self.formula.clauses[clause].iter().map(|lit| lit.var()).find(|&var| !self.known[var]);
                // A variable that became known but was not worked on yet still counts as open in the clause.
                if let Some(last) = last
                    && let Some(definition) = self.definition(last)
                {
                    self.known[last] = true;
                    self.found.defined.push(definition);
                    queue.push(last);
                }
            }
        }
    }

    /// How known variables define this one, if they do.
    fn definition(&self, var: usize) -> Option<Definition> {
        let of_known = |clause: &&u32| {
            let clause = &self.formula.clauses[**clause as usize];
            clause.iter().all(|lit| lit.var() == var || self.known[lit.var()])
        };
        let clauses: Vec<u32> = self.lists[var].iter().filter(of_known).take(MAX_CLAUSES).copied().collect();
        let by_table = self.table(var, &clauses).map(|rule| (rule, clauses.clone()));
        let (rule, clauses) = by_table.or_else(|| conjunction(self.formula, var, &clauses))?;
        Some(Definition { var: var as u32, rule, clauses })
    }

    /// The values of a variable that its clauses leave no choice for, where they speak of few others. A row that the other
    /// clauses between these forbid needs no value: such a clause may have taken the place of one of the variable's own
    /// that it subsumes.
    fn table(&self, var: usize, clauses: &[u32]) -> Option<Rule> {
        let clause = |at: &u32| &self.formula.clauses[*at as usize];
        let literals = clauses.iter().flat_map(clause);
        let mut vars: Vec<u32> = literals.map(|lit| lit.var() as u32).filter(|&other| other as usize != var).collect();
        vars.sort_unstable();
        vars.dedup();
        if vars.len() > MAX_WIDTH {
            return None;
        }
        // Rows in which a clause forces the variable to be true, and false.
        let mut forced = [[0u64; WORDS]; 2];
        for clause in clauses.iter().map(clause) {
            let own = clause.iter().find(|lit| lit.var() == var)?;
            let side = &mut forced[usize::from(own.is_negated())];
            add(side, falsified(clause.iter().filter(|lit| lit.var() != var), &vars)?);
        }
        let forbids = (0..WORDS).any(|word| forced[0][word] & forced[1][word] != 0);
        let mut decided: Table = std::array::from_fn(|word| forced[0][word] | forced[1][word]);
        if decided != [u64::MAX; WORDS] {
            let between = vars.iter().flat_map(|&other| self.lists[other as usize].iter().take(MAX_CLAUSES));
            between.filter_map(|at| falsified(clause(at).iter(), &vars)).for_each(|rows| add(&mut decided, rows));
        }
        (decided == [u64::MAX; WORDS]).then_some(Rule::Table { vars, values: forced[0], forbids })
    }
}

fn add(rows: &mut Table, more: Table) {
    rows.iter_mut().zip(more).for_each(|(word, more)| *word |= more);
}

/// The rows in which all these literals are false; nothing where one is of another variable.
fn falsified<'a>(lits: impl Iterator<Item = &'a Lit>, vars: &[u32]) -> Option<Table> {
    let mut rows = [u64::MAX; WORDS];
    for lit in lits {
        let column = column(vars.binary_search(&(lit.var() as u32)).ok()?);
        for word in 0..WORDS {
            rows[word] &= if lit.is_negated() { column[word] } else { !column[word] };
        }
    }
    Some(rows)
}

/// The rows in which the variable at this place is true.
pub(super) fn column(at: usize) -> Table {
    std::array::from_fn(|word| columns::column(at, word))
}

/// A conjunction (or, by negation, a disjunction) of any width: one long clause, and clauses of two that exclude its
/// literal with each of the others.
fn conjunction(formula: &Prepared, var: usize, clauses: &[u32]) -> Option<(Rule, Vec<u32>)> {
    clauses.iter().find_map(|&long| {
        let literals = &formula.clauses[long as usize];
        let lit = *literals.iter().find(|lit| lit.var() == var)?;
        let mut used = vec![long];
        let mut of = Vec::new();
        for &other in literals.iter().filter(|other| other.var() != var) {
            let pair = clauses.iter().find(|&&pair| {
                let pair = &formula.clauses[pair as usize];
                pair.len() == 2 && pair.contains(&!lit) && pair.contains(&!other)
            })?;
            used.push(*pair);
            of.push(!other);
        }
        Some((Rule::All { lit, of }, used))
    })
}
