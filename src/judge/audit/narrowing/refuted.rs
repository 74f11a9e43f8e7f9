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
use crate::places::{Claim, Computed, Places};
use crate::problem::{BitLit, Bits, Problem};
use crate::sat::{Answer, Formula, Lit};

use super::solver::{Solver, moved};
use super::{Obligations, search_of, shown};

/// Settles the obligations; see the module above.
pub(super) fn obligations(problem: &Problem, places: &Places, budget: &Budget) -> Obligations {
    settle(problem, places, budget, &mut None)
}

/// The same; clauses without a model are left in `all` where the obligations hold and one formula says so at once: a solution
/// in which a computed bit has another value than its formula gives and need not, or cannot, be replaced.
pub(super) fn settle(problem: &Problem, places: &Places, budget: &Budget, all: &mut Option<Formula>) -> Obligations {
    let cnf = encode(problem);
    let shown = shown(problem);
    let mut solver = Solver::new(&cnf);
    let mut broken: Vec<Lit> = Vec::new();
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
                solver.learn(&[!differs]);
                broken.push(differs);
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
                match self::is_replaceable(&mut solver, problem, &uses, computed, differs, budget) {
                    None => return stopped(own),
                    Some((yes, breaks)) => {
                        is_replaceable &= yes;
                        broken.push(solver.all(&[differs, breaks]));
                    }
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
    if is_replaceable && hidden == 0 {
        *all = Some(solver.into_formula(&broken));
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

/// Whether in no solution that `differs` setting the bit to the other value breaks a clause. `None` where the budget ran
/// out; else also the literal that is asked about with `differs`.
fn is_replaceable(
    solver: &mut Solver,
    problem: &Problem,
    uses: &Uses,
    computed: &Computed,
    differs: Lit,
    budget: &Budget,
) -> Option<(bool, Lit)> {
    if uses.has_expressions {
        return Some((false, differs));
    }
    let own = computed.bit as usize;
    let flipped = |lit: BitLit| {
        let as_is = moved(lit, &|var| var);
        if lit.bit().index() == own { !as_is } else { as_is }
    };
    let clauses = uses.clauses[own].iter().map(|&at| problem.clauses.get(at as usize));
    let broken = solver.some_fails(clauses, &flipped);
    match solver.solve(&[differs, broken], budget) {
        Answer::Unsat => Some((true, broken)),
        Answer::Sat => Some((false, broken)),
        Answer::Stopped => None,
    }
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
    let offset = solver.add_vars(cnf.var_count);
    let second = |var: usize| if shown.get(var) == Some(&true) { var } else { var + offset };
    solver.add(cnf, &second);
    let hidden = places.searched.iter().map(|bit| bit.index()).filter(|&bit| !shown[bit]);
    let differ: Vec<Lit> = hidden.map(|bit| solver.odd(Lit::new(bit, true), Lit::new(second(bit), true))).collect();
    solver.add_clause(&differ);
    match solver.solve(&[], budget) {
        Answer::Unsat => Ok(()),
        Answer::Stopped => Err(Obligations::Open("the budget ran out".to_owned())),
        Answer::Sat => {
            let solution = solver.model(problem.bit_count());
            let other: Bits = (0..problem.bit_count()).map(|bit| solver.value(second(bit))).collect();
            let other = search_of(places, &other);
            Err(Obligations::Broken(solution, format!("the search string {other} shows the same bits")))
        }
    }
}
