//! The formula under preparation: clauses as sorted lists, and what has become of each variable.

use super::Class;
use crate::id::Id;
use crate::judge::count::engine::lit::Lit;
use crate::problem::{BitId, Clauses};

/// What has become of a variable.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum State {
    /// It is still there.
    Open,
    /// It has this value in every model.
    Fixed(bool),
    /// It equals this literal.
    Same(Lit),
    /// It was resolved away.
    Gone,
}

/// Clauses and variables under preparation.
#[derive(Clone, Debug)]
pub(super) struct Form {
    /// The clauses; after [`Form::tidy`] each is sorted, has at least two literals of open variables, and is there once.
    pub(super) clauses: Vec<Vec<Lit>>,
    /// For a variable, what it is for the count.
    pub(super) class: Vec<Class>,
    /// For a variable, what has become of it.
    pub(super) state: Vec<State>,
    /// Whether there is certainly no model.
    pub(super) contradiction: bool,
}

impl Form {
    /// The formula as given.
    pub(super) fn new(clauses: &Clauses, var_count: usize, shown: Option<&[BitId]>) -> Self {
        let mut class = vec![if shown.is_some() { Class::Hidden } else { Class::Counted }; var_count];
        for bit in shown.unwrap_or_default() {
            class[bit.index()] = Class::Counted;
        }
        let own = |clause: &[crate::problem::BitLit]| clause.iter().map(|lit| Lit::from_index(lit.index())).collect();
        Self {
            clauses: clauses.iter().map(own).collect(),
            class,
            state: vec![State::Open; var_count],
            contradiction: false,
        }
    }

    /// What a literal has become: a literal of an open variable, or a truth value.
    pub(super) fn resolve(&self, mut lit: Lit) -> Result<Lit, bool> {
        loop {
            match self.state[lit.var()] {
                State::Open | State::Gone => return Ok(lit),
                State::Fixed(value) => return Err(value != lit.is_negated()),
                State::Same(other) => lit = other.flipped(lit.is_negated()),
            }
        }
    }

    /// Makes a literal true.
    pub(super) fn fix(&mut self, lit: Lit) {
        match self.resolve(lit) {
            Ok(lit) => self.state[lit.var()] = State::Fixed(!lit.is_negated()),
            Err(true) => {}
            Err(false) => self.contradiction = true,
        }
    }

    /// Makes two literals one. The variable that counts stays, so that the other one's value follows from it.
    pub(super) fn merge(&mut self, a: Lit, b: Lit) {
        match (self.resolve(a), self.resolve(b)) {
            (Ok(a), Ok(b)) if a == b => {}
            (Ok(a), Ok(b)) if a == !b => self.contradiction = true,
            (Ok(a), Ok(b)) => {
                let key = |lit: Lit| (self.class[lit.var()], lit.var());
                let (stays, goes) = if key(a) <= key(b) { (a, b) } else { (b, a) };
                self.state[goes.var()] = State::Same(stays.flipped(goes.is_negated()));
            }
            (Ok(a), Err(value)) => self.fix(a.flipped(!value)),
            (Err(value), Ok(b)) => self.fix(b.flipped(!value)),
            (Err(a), Err(b)) => self.contradiction |= a != b,
        }
    }

    /// Rewrites all clauses by what has become of their variables, until no unit is left.
    pub(super) fn tidy(&mut self) {
        loop {
            let mut units = false;
            let clauses = std::mem::take(&mut self.clauses);
            for clause in clauses {
                if let Some(clause) = self.rewritten(clause) {
                    match clause[..] {
                        [] => self.contradiction = true,
                        [lit] => {
                            self.fix(lit);
                            units = true;
                        }
                        _ => self.clauses.push(clause),
                    }
                }
            }
            if self.contradiction {
                self.clauses.clear();
                return;
            }
            if !units {
                break;
            }
        }
        self.clauses.sort_unstable();
        self.clauses.dedup();
    }

    /// The clause sorted and without false and repeated literals; `None` if it always holds.
    fn rewritten(&self, mut clause: Vec<Lit>) -> Option<Vec<Lit>> {
        let mut holds = false;
        clause.retain_mut(|lit| match self.resolve(*lit) {
            Ok(other) => {
                *lit = other;
                true
            }
            Err(value) => {
                holds |= value;
                false
            }
        });
        clause.sort_unstable();
        clause.dedup();
        holds |= clause.windows(2).any(|pair| pair[0] == !pair[1]);
        (!holds).then_some(clause)
    }

    /// For a literal, the places of its clauses.
    pub(super) fn occurrences(&self) -> Vec<Vec<u32>> {
        let mut lists = vec![Vec::new(); 2 * self.class.len()];
        for (at, clause) in self.clauses.iter().enumerate() {
            for lit in clause {
                lists[lit.index()].push(at as u32);
            }
        }
        lists
    }
}
