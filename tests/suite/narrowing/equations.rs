//! Variables that equations determine: which are computed, that the judge agrees, and that the oracle still checks the rest.

use tallymark::budget::Budget;
use tallymark::judge::audit::narrowing::{Obligations, Way, obligations, prove};
use tallymark::make::narrow::{Options, narrow};
use tallymark::make::network::build;
use tallymark::make::network::pass::simplify;
use tallymark::places::{Claim, Computed, Digit, Formula, Places};
use tallymark::problem::Problem;
use tallymark::sat::check::check as check_proof;
use tallymark::span::Sources;

use super::claims::settle;
use super::obligations::check;
use crate::suite::command::Desk;
use crate::suite::random_problem::random_problem;

fn read(text: &str) -> Problem {
    let read = tallymark::source::tally::read(text, "case.tally", &[], &mut Sources::new());
    read.unwrap_or_else(|faults| panic!("{faults:#?}")).0
}

fn ands(problem: &Problem, places: &Places) -> usize {
    let network = simplify(build(problem, places), &Budget::unlimited(), |_| Ok::<(), ()>(()));
    network.expect("no fault is told").and_count()
}

/// Problems with the number of bits that are left to search, everything checked by brute force and by the judge.
#[test]
fn a_variable_of_an_equation_is_computed() {
    let cases = [
        // A sum, a difference with a domain that is narrower than its bits, and coefficients.
        ("pick x in 0 to 10\npick y in 0 to 5\npick z in 0 to 5\nmust x = y + z", 6),
        ("pick x in 0 to 4\npick y in 0 to 7\npick z in 0 to 7\nmust y - z = x", 6),
        ("pick x in -3 to 9\npick y in 0 to 7\nmust 2 * y = x + 4", 3),
        // An even coefficient: the digits of y begin at the second of what is left for it.
        (
            "pick y in 0 to 3\npick a\npick b\npick c\nmust 4 * y = (if a then 4 else 0) + 2 * b + (if c then 6 else 0)",
            3,
        ),
        // A product, and a choice.
        ("pick x in 0 to 40\npick y in 1 to 5\npick z in 0 to 7\nmust y * z = x", 6),
        ("pick x in 1 to 8\npick lamp\npick y in 1 to 4\nmust x = (if lamp then y else 2 * y)", 3),
        // Equations in a row, the second about what the first computes; and a circle, of which one is left.
        ("pick x in 0 to 7\npick y in 0 to 7\npick z in 0 to 15\nmust x = y + 1\nmust z = x + y", 3),
        ("pick x in 0 to 7\npick y in 0 to 7\nmust x = y + 1\nmust y = 6 - x", 3),
        // A kind, yes/no equalities and parities.
        ("kind Port = bow | stern | keel\npick a in Port\npick b in Port\nmust a = b", 2),
        ("pick a\npick b\npick c\nmust a = (b and c)", 2),
        ("pick a\npick b\npick c\nmust odd [a, b, not c]\nmust b = c", 1),
        // The last of those that are counted is a parity of the others.
        ("pick on[i in 1 to 7]\nmust exactly 3 of [on[i] for i in 1 to 7]", 6),
        (
            "pick m[i in 1 to 3, j in 1 to 3]\nmust all of [exactly 1 of [m[i, j] for j in 1 to 3] for i in 1 to 3]\n\
             must all of [exactly 1 of [m[i, j] for i in 1 to 3] for j in 1 to 3]",
            4,
        ),
        // Of no use: the same variable twice, or only compared.
        ("pick x in 0 to 7\npick y in 0 to 7\nmust x * x = y + x * y", 6),
        ("pick x in 0 to 7\npick y in 0 to 7\nmust x < y\nmust x != 3", 6),
    ];
    for (text, searched) in cases {
        let problem = read(text);
        for one_for_many in [false, true] {
            let narrowed = check(&problem, one_for_many, 1);
            assert_eq!(narrowed.places.search_len(), searched, "{text}\n{:?}", narrowed.places);
            assert_eq!(narrowed.places.claim, Claim::OneForOne, "{text}");
            assert!(matches!(settle(&problem, &narrowed.places), Obligations::Hold(_)), "{text}");
        }
    }
}

/// What the sum of two n-bit numbers is costs n ANDs and nothing has to be checked; compared with a searched number it took
/// twice as many (derived: n - 1 for the digits but the last, n + 1 equalities, and their conjunction).
#[test]
fn an_equation_that_is_solved_costs_no_comparison() {
    for n in 2..=5 {
        let last = (1 << n) - 1;
        let text = format!(
            "pick s in 0 to {}\npick a in 0 to {last}\npick b in 0 to {last}\nmust s = a + b\nmust s != 1\n",
            2 * last + 1
        );
        let problem = read(&text);
        let narrowed = narrow(&problem, &Options::default(), &Budget::unlimited()).places;
        let (before, after) = (ands(&problem, &Places::as_given(&problem)), ands(&problem, &narrowed));
        assert_eq!(narrowed.search_len(), 2 * n, "{text}");
        // The sum, and that it is not 1: n + 1 digits.
        assert!(after <= 2 * n && after < before, "{text}: {before} ANDs before, {after} after");
    }
}

#[test]
fn random_problems_keep_every_obligation() {
    let mut computed = 0;
    for seed in 0..400 {
        let problem = random_problem(seed);
        let narrowed = check(&problem, false, seed);
        let settled = settle(&problem, &narrowed.places);
        assert!(matches!(settled, Obligations::Hold(_)), "seed {seed}: {settled:?}\n{problem}");
        computed += usize::from(!narrowed.places.computed.is_empty());
    }
    assert!(computed > 40, "{computed} of 400 problems have computed bits");
}

/// Other numbers than those of the equation are found, by trying everything and by the solver.
#[test]
fn a_wrong_number_is_found() {
    let problem = read("pick x in 0 to 10\npick y in 0 to 5\npick z in 0 to 5\nmust x = y + z\n");
    let right = narrow(&problem, &Options::default(), &Budget::unlimited()).places;
    let mut spoilt = 0;
    for at in 0..right.computed.len() {
        let mut places = right.clone();
        let Formula::Digit(digit) = &mut places.computed[at].formula else { continue };
        digit.terms[0].0 += 1;
        assert!(matches!(settle(&problem, &places), Obligations::Broken(..)), "{places:?}");
        spoilt += 1;
    }
    assert_eq!(spoilt, 3, "all digits but the lowest, which is a parity: {right:?}");
    // Too large for those who work with it.
    let mut places = right;
    let large = Digit { at: 0, constant: i64::MAX, terms: Vec::new() };
    places.computed[0] = Computed { formula: Formula::Digit(large), ..places.computed[0].clone() };
    assert!(places.check(&problem).is_err());
}

/// Larger than brute force: the solver proves the digits, and all of it is one formula with a proof.
#[test]
fn the_obligations_are_one_proof() {
    let budget = Budget::unlimited();
    let sum = read("pick x in 0 to 60\npick y in 0 to 30\npick z in 0 to 30\nmust x = y + z\n");
    let counted = read("pick on[i in 1 to 15]\nmust exactly 5 of [on[i] for i in 1 to 15]\n");
    let clauses = super::families::product(5, 31 * 29).finish();
    for (problem, searched) in [(sum, 10), (counted, 14), (clauses, 9)] {
        let places = narrow(&problem, &Options::default(), &budget).places;
        assert_eq!(places.search_len(), searched);
        assert!(matches!(obligations(&problem, &places, Way::Solver, &budget), Obligations::Hold(_)));
        let proven = prove(&problem, &places, &budget).expect("it holds").expect("one formula");
        assert!(check_proof(&proven.formula, &proven.proof, &budget).is_ok());
        // Without its last clause, which says that something is broken, the formula has models: nothing was given away.
        let mut weaker = tallymark::sat::Formula::new(proven.formula.var_count());
        (0..proven.formula.len() - 1).for_each(|at| weaker.push(proven.formula.clause(at).iter().copied()));
        assert!(check_proof(&weaker, &proven.proof, &budget).is_err());
        let mut wrong = places.clone();
        let last = wrong.computed.len() - 1;
        wrong.computed[last].formula = Formula::Not(Box::new(wrong.computed[last].formula.clone()));
        assert!(prove(&problem, &wrong, &budget).is_err());
    }
    // Too many to be proven by the judge: searched as they are.
    let many = read("pick on[i in 1 to 40]\nmust exactly 7 of [on[i] for i in 1 to 40]\n");
    assert_eq!(narrow(&many, &Options::default(), &budget).places.search_len(), 40);
    // Nothing computed, nothing to prove.
    let free = read("pick a\npick b\nmust a or b\n");
    assert_eq!(prove(&free, &Places::as_given(&free), &budget), Ok(None));
}

#[test]
fn a_dossier_computes_what_an_equation_determines() {
    let desk = Desk::new();
    desk.file(
        "sum.tally",
        "title \"Sum\"\npick total in 0 to 14\npick left in 1 to 7\npick right in 1 to 7\nmust total = left + right\nmust left < right\n\
         must total mod 3 = 1\n",
    );
    let (exit, object) = desk.json(&["dossier", "sum.tally", "-o", "d"]);
    assert_eq!(exit, 0, "{object}");
    let of = |path: &str| object.pointer(path).unwrap_or_else(|| panic!("{path} in {object}"));
    assert_eq!((of("/narrowing/bits_before"), of("/narrowing/bits_after")), (&10.into(), &6.into()));
    assert_eq!((of("/audit/verdict"), of("/tally/space")), (&"equal".into(), &"64".into()));
    let (_, given) = desk.json(&["count", "sum.tally", "--no-narrowing"]);
    assert_eq!(given.pointer("/tally/count"), Some(of("/tally/count")));
    assert_eq!(of("/tally/marked"), of("/tally/count"));
    let (exit, audit) = desk.json(&["audit", "sum.tally", "d/oracle.qasm", "--proof", "p"]);
    assert_eq!((exit, audit.pointer("/audit/verdict")), (0, Some(&"equal".into())), "{audit}");
    let file = |name: &str| std::fs::read_to_string(desk.path(name)).unwrap_or_default();
    assert!(file("p/obligations.cnf").contains("p cnf ") && file("p/obligations.drat").ends_with("0\n"), "{audit}");
    assert_eq!(desk.exit(&["audit", "sum.tally", "d/search.qasm"]), 0);
}
