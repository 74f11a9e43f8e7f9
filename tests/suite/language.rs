//! The tally language: case files, the demo puzzles, random expressions, the text form of problems, damaged texts.

mod cases;
mod count;
mod damage;
mod demos;
mod random;

use std::collections::BTreeSet;

use cases::cases;
use tallymark::problem::{Bits, Problem};
use tallymark::source::tally::{self, mistakes::CODES};
use tallymark::span::{Sources, Span};

const GOOD: &str = "tests/cases/language/good";
const BAD: &str = "tests/cases/language/bad";

/// Up to this many bits every string is tried with the library's evaluator too.
const TRIED: usize = 14;

fn tried(problem: &Problem) -> Option<u64> {
    let bits = problem.bit_count();
    let all = (bits <= TRIED).then_some(0..1u128 << bits)?;
    Some(all.filter(|&code| problem.holds(&Bits::from_number(code, bits))).count() as u64)
}

#[test]
fn good_texts_have_their_bits_and_solutions() {
    let all = cases(GOOD);
    assert!(all.len() >= 25, "only {} good cases", all.len());
    for case in all {
        let name = case.path.display();
        let outcome = case.run();
        let problem = outcome.problem.unwrap_or_else(|| panic!("{name}: {:#?}", outcome.diagnostics));
        case.expect_messages(&outcome.messages);
        assert_eq!(Some(problem.bit_count() as u64), case.number("bits"), "{name}: bits");
        let solutions = count::solutions(&problem);
        assert_eq!(Some(solutions), case.number("solutions"), "{name}: solutions");
        if let Some(tried) = tried(&problem) {
            assert_eq!(tried, solutions, "{name}: all strings tried, and a search");
        }
        if let Some(constraints) = case.number("constraints") {
            assert_eq!(problem.constraint_count() as u64, constraints, "{name}: constraints");
        }
    }
}

#[test]
fn bad_texts_have_their_mistakes_at_their_places() {
    let all = cases(BAD);
    assert!(all.len() >= 40, "only {} bad cases", all.len());
    for case in all {
        let name = case.path.display();
        let outcome = case.run();
        assert!(outcome.problem.is_none(), "{name} was accepted");
        case.expect_messages(&outcome.messages);
        for diagnostic in &outcome.diagnostics {
            let told = diagnostic.found.is_some() || diagnostic.expected.is_some();
            assert!(told && diagnostic.help.is_some(), "{name}: {diagnostic:?} says too little");
            assert!(diagnostic.span().is_some() || diagnostic.file.is_some(), "{name}: {diagnostic:?} has no place");
        }
    }
}

#[test]
fn every_code_has_a_case() {
    let messages = cases(GOOD).into_iter().chain(cases(BAD)).flat_map(|case| case.messages());
    let seen: BTreeSet<String> = messages.filter_map(|m| m.split(' ').nth(1).map(str::to_owned)).collect();
    // It needs a text too large for a file; `limits_of_size_have_their_errors` has it.
    let elsewhere = ["T034"];
    for (code, meaning) in CODES {
        assert!(seen.contains(code) || elsewhere.contains(&code), "no case for {code}: {meaning}");
    }
    for code in seen {
        assert!(CODES.iter().any(|(known, _)| *known == code), "{code} is not in the list of codes");
    }
}

#[test]
fn problems_print_and_read_back() {
    let folders = [GOOD, "problems"];
    let mut seen = 0;
    for case in folders.iter().flat_map(|folder| cases(folder)) {
        let Some(problem) = case.run().problem else { panic!("{} is refused", case.path.display()) };
        let text = problem.to_string();
        let back = Problem::parse_text(&text).unwrap_or_else(|error| panic!("{}: {error}", case.path.display()));
        assert_eq!(back.to_string(), text, "{}", case.path.display());
        // Once without spans, the arenas themselves are equal.
        assert_eq!(Problem::parse_text(&back.to_string()).as_ref(), Ok(&back), "{}", case.path.display());
        assert_eq!(back.bit_count(), problem.bit_count());
        if problem.bit_count() <= TRIED {
            assert_eq!(tried(&back), tried(&problem), "{}", case.path.display());
        }
        seen += 1;
    }
    assert!(seen >= 34);
}

#[test]
fn what_is_built_knows_its_place_in_the_text() {
    let text = "known n = 2\npick on[i in 1 to n]\nmust all of [on[i] or\n  on[n] for i in 1 to n]\nmost on[1] + 1\n";
    let mut sources = Sources::new();
    let (problem, warnings) = tally::read(text, "case", &[], &mut sources).expect("no mistake");
    assert!(warnings.is_empty());
    let statement = |span: Option<Span>| sources.text(span.expect("a place"));
    assert_eq!(statement(problem.vars().as_slice()[1].span), "on");
    let constraint = &problem.constraints[1];
    assert_eq!(statement(constraint.origin.span), "must all of [on[i] or\n  on[n] for i in 1 to n]");
    assert_eq!(constraint.origin.bindings, [("i".into(), "2".into())]);
    assert_eq!(statement(problem.exprs.span(constraint.expr)), "on[i] or\n  on[n]");
    let objective = problem.objective.as_ref().expect("an objective");
    assert_eq!(statement(objective.span), "most on[1] + 1");
    assert_eq!(statement(problem.exprs.span(objective.expr)), "on[1] + 1");
}
