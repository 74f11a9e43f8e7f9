//! The obligations by refutation: each claim is asked of a solver as its negation.
//!
//! Computed bits are taken in their order. If no solution has another value than the formula gives, the bit is *unique*, and
//! *sure* if all bits of its formula are. Else, where it need not be unique, it must be *replaceable*: in no solution does
//! setting it to its formula break a clause. Then bit after bit can be replaced in any solution, and in the end it is the
//! one that the formulas give, with the searched part it had; so that part is marked. Where a bit is not replaceable, the
//! searched parts of solutions are asked about at once.

use crate::budget::Budget;
use crate::id::Id;
use crate::judge::clauses::{Cnf, encode};
use crate::places::{Claim, Computed, Formula, Places};
use crate::problem::{BitId, BitLit, Bits, Problem};
use crate::sat::{Answer, Batsat, Engine, Lit};

use super::{Obligations, search_of, shown};

/// Settles the obligations; see the module above.
pub(super) fn obligations(problem: &Problem, places: &Places, budget: &Budget) -> Obligations {
    let cnf = encode(problem);
    let shown = shown(problem);
    let mut solver = Solver::new(&cnf);
    let mut sure = vec![false; problem.bit_count()];
    places.searched.iter().for_each(|bit| sure[bit.index()] = true);
    let mut replaced = 0;
    let mut is_replaceable = true;
    let uses = Uses::of(problem);
    for computed in &places.computed {
        let own = computed.bit as usize;
        let must_be_sure = places.claim != Claim::OneForMany && shown[own];
        let formula = solver.formula(&computed.formula, &|bit| Lit::new(bit.index(), true));
        let differs = solver.odd(formula, Lit::new(own, true));
        match solver.solve(&[differs], budget) {
            Answer::Stopped => return stopped(own),
            Answer::Unsat => {
                solver.engine.add_clause(&[!differs]);
                let mut all_sure = true;
                computed.formula.for_each_bit(&mut |bit| all_sure &= sure[bit.index()]);
                sure[own] = all_sure;
                if must_be_sure && !all_sure {
                    let why = format!("bit {own} is shown, and computed from bits that solutions do not share");
                    return Obligations::Open(why);
                }
            }
            Answer::Sat => {
                let solution = solver.model(problem.bit_count());
                if must_be_sure {
                    let got = format!(
                        "bit {own} is {} here, and its formula gives the other value",
                        u8::from(solution.at(own))
                    );
                    return Obligations::Broken(solution, got);
                }
                replaced += 1;
                match solver.is_replaceable(problem, &uses, computed, differs, budget) {
                    None => return stopped(own),
                    Some(yes) => is_replaceable &= yes,
                }
            }
        }
    }
    if !is_replaceable {
        match marked_at_once(problem, places, &cnf, budget) {
            Ok(()) => {}
            Err(other) => return other,
        }
    }
    let hidden = places.searched.iter().filter(|bit| !shown[bit.index()]).count();
    if places.claim == Claim::OneForOne && hidden > 0 {
        match different_states(problem, places, &cnf, &shown, budget) {
            Ok(()) => {}
            Err(other) => return other,
        }
    }
    let unique = places.computed.len() - replaced;
    let claims = [
        (unique, format!("that any of {unique} computed bits could be otherwise")),
        (replaced, format!("that computing {replaced} bits could break a solution")),
    ];
    let claims: Vec<String> = claims.into_iter().filter(|&(bits, _)| bits > 0).map(|(_, claim)| claim).collect();
    Obligations::Hold(format!("a solver refuted {}", claims.join(", and ")))
}

fn stopped(own: usize) -> Obligations {
    Obligations::Open(format!("the budget ran out at bit {own}"))
}

/// The clauses of each bit, and whether an expression speaks of it.
struct Uses {
    clauses: Vec<Vec<u32>>,
    has_expressions: bool,
}

impl Uses {
    fn of(problem: &Problem) -> Self {
        let mut clauses = vec![Vec::new(); problem.bit_count()];
        for (at, clause) in problem.clauses.iter().enumerate() {
            clause.iter().for_each(|lit| clauses[lit.bit().index()].push(at as u32));
        }
        // Domains are expressions of the judge's too; a yes/no variable has none.
        let is_plain = |var: &crate::problem::Var| var.domain == crate::problem::Domain::YesNo;
        Self { clauses, has_expressions: !problem.constraints.is_empty() || !problem.vars().values().all(is_plain) }
    }
}

/// An engine with the clauses of a problem, in which formulas become literals.
struct Solver {
    engine: Batsat,
    next: usize,
}

impl Solver {
    fn new(cnf: &Cnf) -> Self {
        let mut solver = Self { engine: Batsat::new(), next: cnf.var_count };
        solver.add(cnf, &|var| var);
        solver
    }

    /// Adds the clauses with other variables.
    fn add(&mut self, cnf: &Cnf, var: &impl Fn(usize) -> usize) {
        for clause in cnf.clauses.iter() {
            let lits: Vec<Lit> = clause.iter().map(|&lit| moved(lit, var)).collect();
            self.engine.add_clause(&lits);
        }
    }

    fn new_lit(&mut self) -> Lit {
        self.next += 1;
        Lit::new(self.next - 1, true)
    }

    fn solve(&mut self, assumptions: &[Lit], budget: &Budget) -> Answer {
        self.engine.solve(assumptions, budget)
    }

    fn model(&self, bits: usize) -> Bits {
        (0..bits).map(|bit| self.engine.value(bit)).collect()
    }

    /// The literal that holds where the formula does, bits being these literals.
    fn formula(&mut self, formula: &Formula, bit: &impl Fn(BitId) -> Lit) -> Lit {
        match formula {
            Formula::Constant(value) => {
                let lit = self.new_lit();
                self.engine.add_clause(&[if *value { lit } else { !lit }]);
                lit
            }
            Formula::Bit(of) => bit(*of),
            Formula::Not(inner) => !self.formula(inner, bit),
            Formula::And(list) => {
                let lits: Vec<Lit> = list.iter().map(|part| self.formula(part, bit)).collect();
                self.all(&lits)
            }
            Formula::Or(list) => {
                let lits: Vec<Lit> = list.iter().map(|part| !self.formula(part, bit)).collect();
                !self.all(&lits)
            }
            Formula::Xor(list) => {
                let lits: Vec<Lit> = list.iter().map(|part| self.formula(part, bit)).collect();
                let sum = lits.into_iter().reduce(|a, b| self.odd(a, b));
                sum.unwrap_or_else(|| !self.all(&[]))
            }
        }
    }

    fn all(&mut self, lits: &[Lit]) -> Lit {
        let all = self.new_lit();
        lits.iter().for_each(|&lit| self.engine.add_clause(&[!all, lit]));
        let back: Vec<Lit> = lits.iter().map(|&lit| !lit).chain([all]).collect();
        self.engine.add_clause(&back);
        all
    }

    fn odd(&mut self, a: Lit, b: Lit) -> Lit {
        let odd = self.new_lit();
        for clause in [[!odd, a, b], [!odd, !a, !b], [odd, a, !b], [odd, !a, b]] {
            self.engine.add_clause(&clause);
        }
        odd
    }

    /// A literal that implies that one of the clauses at these places fails, each literal being what `lit` says.
    fn some_fails<'c>(&mut self, clauses: impl Iterator<Item = &'c [BitLit]>, lit: &impl Fn(BitLit) -> Lit) -> Lit {
        let mut some = vec![];
        for clause in clauses {
            let fails = self.new_lit();
            clause.iter().for_each(|&of| self.engine.add_clause(&[!fails, !lit(of)]));
            some.push(fails);
        }
        let any = self.new_lit();
        some.push(!any);
        self.engine.add_clause(&some);
        any
    }

    /// Whether in no solution that `differs` setting the bit to the other value breaks a clause. `None` where the budget ran
    /// out.
    fn is_replaceable(
        &mut self,
        problem: &Problem,
        uses: &Uses,
        computed: &Computed,
        differs: Lit,
        budget: &Budget,
    ) -> Option<bool> {
        if uses.has_expressions {
            return Some(false);
        }
        let own = computed.bit as usize;
        let flipped = |lit: BitLit| {
            let as_is = moved(lit, &|var| var);
            if lit.bit().index() == own { !as_is } else { as_is }
        };
        let clauses = uses.clauses[own].iter().map(|&at| problem.clauses.get(at as usize));
        let broken = self.some_fails(clauses, &flipped);
        match self.solve(&[differs, broken], budget) {
            Answer::Unsat => Some(true),
            Answer::Sat => Some(false),
            Answer::Stopped => None,
        }
    }
}

fn moved(lit: BitLit, var: &impl Fn(usize) -> usize) -> Lit {
    Lit::new(var(lit.bit().index()), !lit.is_negated())
}

/// Whether some solution has a searched part for which the formulas give no solution.
fn marked_at_once(problem: &Problem, places: &Places, cnf: &Cnf, budget: &Budget) -> Result<(), Obligations> {
    if Uses::of(problem).has_expressions {
        let why = "a computed bit stands in an expression, and solutions do not share its value";
        return Err(Obligations::Open(why.to_owned()));
    }
    let mut solver = Solver::new(cnf);
    let mut given: Vec<Lit> = (0..problem.bit_count()).map(|bit| Lit::new(bit, true)).collect();
    for computed in &places.computed {
        let lit = solver.formula(&computed.formula, &|bit| given[bit.index()]);
        given[computed.bit as usize] = lit;
    }
    let of_given = |lit: BitLit| if lit.is_negated() { !given[lit.bit().index()] } else { given[lit.bit().index()] };
    let unmarked = solver.some_fails(problem.clauses.iter(), &of_given);
    match solver.solve(&[unmarked], budget) {
        Answer::Unsat => Ok(()),
        Answer::Stopped => Err(Obligations::Open("the budget ran out".to_owned())),
        Answer::Sat => {
            let solution = solver.model(problem.bit_count());
            Err(Obligations::Broken(solution, "its searched part is not marked".to_owned()))
        }
    }
}

/// Whether no two solutions with different searched parts show the same bits.
fn different_states(
    problem: &Problem,
    places: &Places,
    cnf: &Cnf,
    shown: &[bool],
    budget: &Budget,
) -> Result<(), Obligations> {
    let mut solver = Solver::new(cnf);
    let offset = solver.next;
    let second = |var: usize| if shown.get(var) == Some(&true) { var } else { var + offset };
    solver.next += cnf.var_count;
    solver.add(cnf, &second);
    let hidden = places.searched.iter().map(|bit| bit.index()).filter(|&bit| !shown[bit]);
    let differ: Vec<Lit> = hidden.map(|bit| solver.odd(Lit::new(bit, true), Lit::new(second(bit), true))).collect();
    solver.engine.add_clause(&differ);
    match solver.solve(&[], budget) {
        Answer::Unsat => Ok(()),
        Answer::Stopped => Err(Obligations::Open("the budget ran out".to_owned())),
        Answer::Sat => {
            let solution = solver.model(problem.bit_count());
            let other: Bits = (0..problem.bit_count()).map(|bit| solver.engine.value(second(bit))).collect();
            let other = search_of(places, &other);
            Err(Obligations::Broken(solution, format!("the search string {other} shows the same bits")))
        }
    }
}
