//! The self-test of the audit, held against a simulator that shares nothing with it: every fault that the audit caught
//! does harm, every fault that was called harmless does none, and none was missed.

mod machine;

use std::collections::BTreeMap;

use tallymark::budget::Budget;
use tallymark::circuit::qasm::{read::read, write::write};
use tallymark::circuit::{Circuit, Level, Mark};
use tallymark::judge::audit::faults::{Fault, Found, Kind, SelfTest, apply, self_test};
use tallymark::judge::audit::{Options, Outcome, audit, audit_search};
use tallymark::make::lower::Limits;
use tallymark::pipeline::{self, Settings};
use tallymark::places::{Places, Start};
use tallymark::problem::{Bits, Problem};
use tallymark::source;
use tallymark::span::Sources;

/// Small problems of several kinds: with codes outside their domains, sums, parities, clauses.
const PROBLEMS: [(&str, &str); 6] = [
    ("switches.tally", "pick a\npick b\npick n in 0 to 2\nmust a != b\nmust n = 2 or (n = 1 and a)\n"),
    ("clauses.cnf", "p cnf 4 4\n1 2 -3 0\n-1 3 0\n2 4 0\n-2 -4 1 0\n"),
    ("two.tally", "pick on[i in 1 to 4]\nmust exactly 2 of [on[i] for i in 1 to 4]\n"),
    (
        "hues.tally",
        "kind Hue = red | green | blue\npick p in Hue\npick q in Hue\nmust p != q\nmust p = red or q = blue\n",
    ),
    ("odd.tally", "pick a[i in 1 to 5]\nmust odd [a[i] for i in 1 to 5]\nmust a[1] or a[2]\n"),
    ("sum.tally", "pick n in 1 to 3\npick m in 0 to 3\nmust n + m <= 4\n"),
];

/// Four bits, one solution: three iterations, as a loop.
const RARE: (&str, &str) = ("rare.tally", "pick a\npick b\npick n in 0 to 3\nmust a != b\nmust n = 3 and a\n");

fn load((name, text): (&str, &str)) -> Problem {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join(name);
    std::fs::write(&path, text).unwrap();
    source::load(&path.display().to_string(), &[], &mut Sources::new()).expect("a problem").problem
}

fn settings(level: Level, mark: Mark) -> Settings {
    Settings { level, mark, seed: 1, threads: 1 }
}

fn oracle(problem: &Problem, level: Level, mark: Mark) -> Circuit {
    let places = Places::as_given(problem);
    pipeline::oracle(problem, &places, settings(level, mark), &Budget::unlimited()).expect("an oracle").circuit
}

/// Whether the values of the search register are solutions.
fn meaning<'p>(problem: &'p Problem, places: &'p Places) -> impl Fn(u64) -> bool + 'p {
    |value| {
        let mut bits = Bits::zeros(problem.bit_count());
        places.searched.iter().enumerate().for_each(|(at, &bit)| bits.set(bit, value >> at & 1 == 1));
        problem.holds(&bits)
    }
}

/// Whether a fault does harm, by the simulator of this test or, of a problem or a register map, by trying all values.
fn does_harm(problem: &Problem, circuit: &Circuit, fault: &Fault, iterations: Option<u64>) -> bool {
    let places = Places::as_given(problem);
    let marked = meaning(problem, &places);
    if let Some(spoilt) = apply::to_circuit(fault, circuit) {
        return match iterations {
            Some(iterations) => !machine::is_search(&spoilt, &marked, iterations),
            None => !machine::is_oracle(&spoilt, &marked),
        };
    }
    let (changed, moved) = (apply::to_problem(fault, problem), apply::to_places(fault, &places));
    let (changed, moved) = (changed.as_ref().unwrap_or(problem), moved.as_ref().unwrap_or(&places));
    let other = meaning(changed, moved);
    (0..1u64 << problem.bit_count()).any(|value| marked(value) != other(value))
}

/// What all trials together gave.
#[derive(Default)]
struct Sums {
    faults: usize,
    harmful: usize,
    kinds: BTreeMap<Kind, usize>,
}

impl Sums {
    fn add(&mut self, name: &str, problem: &Problem, circuit: &Circuit, test: &SelfTest, iterations: Option<u64>) {
        assert!(test.is_complete && test.passed(), "{name}: {test:#?}");
        for trial in &test.trials {
            let harm = does_harm(problem, circuit, &trial.fault, iterations);
            match trial.found {
                Found::Caught | Found::Refused(_) => assert!(harm, "{name}: {} is caught, and harmless", trial.fault),
                _ => assert!(!harm, "{name}: {} does harm: {:?}", trial.fault, trial.found),
            }
            self.faults += 1;
            self.harmful += usize::from(harm);
            *self.kinds.entry(trial.kind).or_default() += 1;
        }
    }
}

#[test]
fn every_fault_is_caught_or_harmless() {
    let (mut sums, mut circuits, mut seed) = (Sums::default(), 0, 1);
    let budget = Budget::unlimited();
    for (at, case) in PROBLEMS.into_iter().enumerate() {
        let problem = load(case);
        let places = Places::as_given(&problem);
        for level in Level::ALL {
            let mark = if (at + level as usize).is_multiple_of(2) { Mark::Phase } else { Mark::Bit };
            let circuit = oracle(&problem, level, mark);
            let name = format!("{} {level} {mark:?}", case.0);
            assert!(machine::is_oracle(&circuit, &meaning(&problem, &places)), "{name}");
            let options = Options { seed, threads: 1, ..Options::default() };
            let verdict = audit(&problem, &places, &circuit, &options, &budget).expect("an oracle");
            assert_eq!(verdict.outcome, Outcome::Equal, "{name}");
            let test = self_test(&problem, &places, &circuit, 100, &options, &budget).expect("an oracle");
            sums.add(&name, &problem, &circuit, &test, None);
            (circuits, seed) = (circuits + 1, seed + 1);
        }
    }
    let problem = load(RARE);
    let places = Places::as_given(&problem);
    for level in [Level::Wide, Level::Toffoli, Level::CliffordT] {
        let phase = pipeline::oracle(&problem, &places, settings(level, Mark::Phase), &budget).expect("an oracle");
        let circuit = pipeline::search_from(&Start::AllStrings, &phase, &3u32.into(), &Limits::default())
            .expect("a search")
            .circuit;
        assert!(machine::is_search(&circuit, &meaning(&problem, &places), 3), "search {level}");
        let options = Options { seed, threads: 1, ..Options::default() };
        let test = self_test(&problem, &places, &circuit, 40, &options, &budget).expect("a search");
        sums.add(&format!("search {level}"), &problem, &circuit, &test, Some(3));
        (circuits, seed) = (circuits + 1, seed + 1);
    }
    assert!(circuits >= 12 && sums.faults >= 2000 && sums.harmful >= 1500, "{} {}", sums.faults, sums.harmful);
    for kind in Kind::ALL {
        assert!(sums.kinds.get(&kind).is_some_and(|&drawn| drawn >= 15), "{kind:?}: {:?}", sums.kinds);
    }
}

/// A fault changes one thing: the file of the changed circuit reads back, and its regions still cover what they did.
#[test]
fn changed_circuits_are_circuits() {
    let problem = load(PROBLEMS[0]);
    let places = Places::as_given(&problem);
    for level in Level::ALL {
        let circuit = oracle(&problem, level, Mark::Phase);
        let options = Options { seed: 9, threads: 1, ..Options::default() };
        let test = self_test(&problem, &places, &circuit, 60, &options, &Budget::unlimited()).expect("an oracle");
        for trial in &test.trials {
            assert_eq!(trial.fault.to_string().parse(), Ok(trial.fault.clone()));
            let Some(changed) = apply::to_circuit(&trial.fault, &circuit) else { continue };
            let mut text = Vec::new();
            write(&changed, &[], &mut text).unwrap();
            let back =
                read(std::str::from_utf8(&text).unwrap(), "changed", &mut Sources::new()).expect("it reads back");
            assert_eq!(back.gates().len(), changed.gates().len(), "{}", trial.fault);
            let gates = changed.gates().len() as u32;
            assert!(changed.regions.iter().all(|region| region.gates.start < region.gates.end));
            assert!(changed.regions.iter().all(|region| region.gates.end <= gates), "{}", trial.fault);
            assert!(changed.regions.len() + 1 >= circuit.regions.len(), "{}", trial.fault);
        }
    }
    let circuit = oracle(&problem, Level::Toffoli, Mark::Phase);
    let beyond = circuit.gates().len() as u32;
    for fault in [Fault::Drop(beyond), Fault::Adjoint(0), Fault::Swap(beyond - 1), Fault::SwapPlaces(0, 1)] {
        assert_eq!(apply::to_circuit(&fault, &circuit), None, "{fault}");
    }
}

/// A search with another number of iterations is still a search; the verdict says what the plan would be.
#[test]
fn a_search_says_how_many_iterations_are_planned() {
    let problem = load(RARE);
    let places = Places::as_given(&problem);
    let phase = oracle_product(&problem);
    for iterations in [0u32, 1, 2, 3, 4, 5] {
        let circuit = pipeline::search_from(&Start::AllStrings, &phase, &iterations.into(), &Limits::default())
            .expect("a search")
            .circuit;
        let verdict = audit_search(&problem, &places, &circuit, 1 << 24, &Budget::unlimited()).expect("a search");
        assert_eq!((verdict.outcome, verdict.planned), (Outcome::Equal, Some(3)));
        assert_eq!(verdict.iterations, u64::from(iterations));
        let warned = verdict.notes.iter().any(|note| note.contains("have the highest success"));
        assert_eq!(warned, iterations != 3, "{:?}", verdict.notes);
    }
}

fn oracle_product(problem: &Problem) -> tallymark::circuit::Product {
    let places = Places::as_given(problem);
    pipeline::oracle(problem, &places, settings(Level::Toffoli, Mark::Phase), &Budget::unlimited()).expect("an oracle")
}
