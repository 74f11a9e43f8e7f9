//! Problems made from others by asking for more: some variables fixed, an objective at least as good as a value, some
//! answers left out.
//!
//! After: the solutions are those of the first problem that meet the further demand; for [`fixed`](Problem::fixed) each
//! without the bits of the fixed variables, whose domains shrink to one value.

use crate::id::{Id, IdVec};
use crate::problem::{
    BitId, BitLit, Bits, Clauses, Compare, Domain, Expr, ExprId, Objective, Origin, Problem, Sense, VarId,
};

impl Problem {
    /// The variable of this name, as [`Problem::var_name`] prints it.
    pub fn var_named(&self, name: &str) -> Option<VarId> {
        self.vars().ids().find(|&var| self.var_name(var) == name)
    }

    /// The value of a domain that is printed so.
    pub fn value_named(&self, domain: Domain, name: &str) -> Option<i64> {
        let number = || name.parse::<i64>().ok();
        match domain {
            Domain::YesNo => match name {
                "yes" | "1" => Some(1),
                "no" | "0" => Some(0),
                _ => None,
            },
            Domain::Range { lo, hi } => number().filter(|value| (lo..=hi).contains(value)),
            Domain::Kind(kind) => {
                let place = self.kinds[kind].values.iter().position(|value| &**value == name);
                place.map(|place| place as i64)
            }
        }
    }

    /// The problem that is left where these variables have these values, each within its domain.
    pub fn fixed(&self, values: &[(VarId, i64)]) -> Problem {
        let mut fixed: IdVec<VarId, Option<i64>> = vec![None; self.vars().len()].into();
        values.iter().for_each(|&(var, value)| fixed[var] = Some(value));
        let mut rest = Problem {
            title: self.title.clone(),
            kinds: self.kinds.clone(),
            exprs: self.exprs.clone(),
            constraints: self.constraints.clone(),
            objective: self.objective.clone(),
            ..Problem::new()
        };
        // What became of a bit: a bit of the rest, or a constant.
        let mut bits: Vec<Result<BitId, bool>> = Vec::with_capacity(self.bit_count());
        for (id, var) in self.vars().iter() {
            let domain = fixed[id].map_or(var.domain, |value| Domain::Range { lo: value, hi: value });
            let made = rest.add_var(var.name.clone(), domain, var.span);
            let first = rest.vars()[made].first_bit.index();
            bits.extend((0..usize::from(var.width)).map(|at| match fixed[id] {
                None => Ok(BitId::new(first + at)),
                Some(value) => Err(self.code(var.domain, value) >> at & 1 == 1),
            }));
        }
        for (id, &expr) in self.exprs.iter() {
            if let Expr::Var(var) = expr
                && let Some(value) = fixed[var]
            {
                let is_truth = self.vars()[var].domain == Domain::YesNo;
                rest.exprs.replace(id, if is_truth { Expr::Truth(value != 0) } else { Expr::Number(value) });
            }
        }
        rest.clauses = self.clauses_over(&bits);
        rest.shown = self.shown.as_ref().map(|shown| shown.iter().filter_map(|bit| bits[bit.index()].ok()).collect());
        rest
    }

    fn code(&self, domain: Domain, value: i64) -> u64 {
        match domain {
            Domain::Range { lo, .. } => value.wrapping_sub(lo) as u64,
            Domain::YesNo | Domain::Kind(_) => value as u64,
        }
    }

    /// The clauses without those that a constant fulfils; literals that a constant breaks are left out.
    fn clauses_over(&self, bits: &[Result<BitId, bool>]) -> Clauses {
        let mut clauses = Clauses::new();
        let mut kept: Vec<BitLit> = Vec::new();
        for clause in self.clauses.iter() {
            kept.clear();
            let mut is_met = false;
            for lit in clause {
                match bits[lit.bit().index()] {
                    Ok(bit) => kept.push(BitLit::new(bit, !lit.is_negated())),
                    Err(value) => is_met |= value != lit.is_negated(),
                }
            }
            if !is_met {
                clauses.push(&kept);
            }
        }
        clauses
    }

    /// The problem with the further demand that its objective is at least as good as this value; `None` without objective.
    pub fn at_least_as_good(&self, value: i64) -> Option<Problem> {
        let Objective { sense, expr, .. } = self.objective.clone()?;
        let mut problem = self.clone();
        let bound: ExprId = problem.exprs.node(Expr::Number(value));
        let (low, high) = match sense {
            Sense::Least => (expr, bound),
            Sense::Most => (bound, expr),
        };
        let demand = problem.exprs.node(Expr::Compare(Compare::Le, low, high));
        problem.must(demand, Origin::default());
        Some(problem)
    }

    /// The problem without these answers. Of a problem that shows some bits only, all solutions with the same shown bits
    /// are one answer.
    pub fn without(&self, answers: &[Bits]) -> Problem {
        let mut problem = self.clone();
        let shown: Vec<BitId> = self.shown.clone().unwrap_or_else(|| self.bits().collect());
        for answer in answers {
            let other: Vec<BitLit> = shown.iter().map(|&bit| BitLit::new(bit, !answer.get(bit))).collect();
            problem.clauses.push(&other);
        }
        problem
    }
}
