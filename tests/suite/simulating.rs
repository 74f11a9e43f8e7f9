//! Simulations of written search files, against the published curve, against a plain state vector, and against changes.

use std::f64::consts::FRAC_1_SQRT_2;

use tallymark::budget::Budget;
use tallymark::circuit::qasm::{read, write};
use tallymark::circuit::{Circuit, Level, Mark, Op};
use tallymark::id::Id;
use tallymark::make::lower::{self, LowerError};
use tallymark::make::network;
use tallymark::places::Places;
use tallymark::problem::{BitLit, Problem};
use tallymark::random::SplitMix64;
use tallymark::search::simulate::{Options, SimulateError, Simulation, Way, simulate};
use tallymark::search::whole::whole_search;
use tallymark::span::Sources;

/// A random formula with clauses of two and three literals.
fn clauses(bits: usize, number: usize, seed: u64) -> Problem {
    let mut random = SplitMix64::new(seed);
    let mut problem = Problem::new();
    problem.add_numbered_vars(bits);
    for _ in 0..number {
        let mut vars: Vec<usize> = (0..bits).collect();
        let width = (2 + random.below(2) as usize).min(bits);
        let clause: Vec<BitLit> = (0..width)
            .map(|_| {
                let at = random.below(vars.len() as u64) as usize;
                BitLit::new(tallymark::problem::BitId::new(vars.swap_remove(at)), random.coin())
            })
            .collect();
        problem.clauses.push(&clause);
    }
    problem
}

fn oracle(problem: &Problem, level: Level, mark: Mark) -> Result<Circuit, LowerError> {
    let network = network::build(problem, &Places::as_given(problem));
    lower::lower(&network, &lower::Options { level, mark }, &Budget::unlimited())
}

/// Writes a circuit and reads it back: what is simulated is the file.
fn through_text(circuit: &Circuit, change: impl Fn(String) -> String) -> Circuit {
    let mut text = Vec::new();
    write::write(circuit, &[], &mut text).unwrap();
    let text = change(String::from_utf8(text).unwrap());
    read::read(&text, "search.qasm", &mut Sources::new()).unwrap_or_else(|errors| panic!("{errors:?}\n{text}"))
}

fn run(circuit: &Circuit, way: Option<Way>) -> Simulation {
    simulate(circuit, &Options { way, draw: 0, seed: 7, threads: 2 }, &Budget::unlimited()).unwrap()
}

fn solutions(problem: &Problem) -> u64 {
    let bits = problem.bit_count();
    let value = |number: u64| tallymark::problem::Bits::from_number(number.into(), bits);
    (0..1u64 << bits).filter(|&number| problem.holds(&value(number))).count() as u64
}

/// sin^2((2k + 1) theta): M. Boyer, G. Brassard, P. Hoyer, A. Tapp, "Tight bounds on quantum searching", Fortschritte der
/// Physik 46:493, 1998, section 3.
fn published(bits: usize, marked: u64, k: usize) -> f64 {
    let theta = (marked as f64 / (1u64 << bits) as f64).sqrt().asin();
    ((2 * k + 1) as f64 * theta).sin().powi(2)
}

#[test]
fn every_level_and_every_way_gives_the_published_curve() {
    let mut tried = 0;
    for seed in 0..12 {
        let bits = 2 + seed as usize % 5;
        let problem = clauses(bits, 2 + seed as usize % 4, seed);
        let marked = solutions(&problem);
        for level in Level::ALL {
            let Ok(oracle) = oracle(&problem, level, Mark::Phase) else { continue };
            for iterations in [0u64, 1, 2, 5] {
                let circuit = through_text(&whole_search(&oracle, iterations, level), |text| text);
                let ways: &[Option<Way>] = match iterations {
                    5 => &[None, Some(Way::Steps), Some(Way::Gates)],
                    _ => &[None],
                };
                for &way in ways {
                    let found = run(&circuit, way);
                    if way != Some(Way::Gates) {
                        assert_ne!(found.way, Way::Gates, "seed {seed} {level} {iterations}: {:?}", found.notes);
                        assert_eq!(found.marked, (iterations > 0).then_some(marked), "seed {seed} {level}");
                        assert_eq!(found.iterations, iterations);
                        if iterations > 0 {
                            assert_eq!(found.curve.len() as u64, iterations + 1);
                            for (k, p) in found.curve.iter().enumerate() {
                                let wanted = published(bits, marked, k);
                                assert!((p - wanted).abs() < 1e-12, "seed {seed} {level} {k}: {p} not {wanted}");
                            }
                        }
                    } else {
                        // The results gate by gate: the solutions together have the published probability.
                        let hit: f64 = found.likeliest.iter().filter(|(b, _)| problem.holds(b)).map(|(_, p)| p).sum();
                        assert!((hit - published(bits, marked, 5)).abs() < 1e-9, "seed {seed} {level}: {hit}");
                    }
                    tried += 1;
                }
            }
        }
    }
    assert!(tried > 100, "{tried}");
}

#[test]
fn a_bit_oracle_on_a_mark_in_superposition_is_read_too() {
    let problem = clauses(4, 5, 3);
    let oracle = oracle(&problem, Level::Toffoli, Mark::Bit).unwrap();
    let found = run(&through_text(&whole_search(&oracle, 3, Level::Toffoli), |text| text), Some(Way::Classes));
    let marked = solutions(&problem);
    assert!((found.success.unwrap() - published(4, marked, 3)).abs() < 1e-12);
}

/// A state vector of all qubits, gate by gate and with no thought: the reference for changed files.
fn brute_force(circuit: &Circuit, value_of: impl Fn(usize) -> bool) -> f64 {
    let mut state = vec![0.0f64; 1 << circuit.qubit_count()];
    state[0] = 1.0;
    for block in circuit.blocks() {
        for _ in 0..block.repeat {
            for gate in &circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
                let bit = 1usize << gate.target().index();
                let holds = |at: usize| {
                    circuit.controls(gate).iter().all(|c| (at >> c.qubit().index() & 1 == 1) != c.is_negated())
                };
                for at in (0..state.len()).filter(|at| at & bit == 0 && holds(*at)) {
                    let (a, b) = (state[at], state[at | bit]);
                    (state[at], state[at | bit]) = match gate.op() {
                        Op::X => (b, a),
                        Op::Z => (a, -b),
                        Op::H => ((a + b) * FRAC_1_SQRT_2, (a - b) * FRAC_1_SQRT_2),
                        Op::Reset | Op::Measure => (a, b),
                        op => panic!("{op:?}"),
                    };
                }
            }
        }
    }
    state.iter().enumerate().filter(|(at, _)| value_of(*at)).map(|(_, a)| a * a).sum()
}

/// The text without one of its lines.
fn without(lines: &[&str], at: usize) -> String {
    lines.iter().enumerate().filter(|(other, _)| *other != at).map(|(_, line)| format!("{line}\n")).collect()
}

/// One gate of the file is changed, at every place in turn: what comes out is what the changed gates do, and for nearly all
/// of them it is no longer the published curve. Nothing but the file could have told.
#[test]
fn a_change_of_one_gate_changes_what_comes_out() {
    let problem = clauses(4, 6, 5);
    let marked = solutions(&problem);
    assert!((1..16).contains(&marked), "{marked}");
    let oracle = oracle(&problem, Level::Toffoli, Mark::Phase).unwrap();
    let circuit = whole_search(&oracle, 2, Level::Toffoli);
    let mut text = Vec::new();
    write::write(&circuit, &[], &mut text).unwrap();
    let text = String::from_utf8(text).unwrap();
    let body = text.find("for int").unwrap();
    let lines: Vec<&str> = text[body..].lines().collect();
    let (mut changed, mut tried) = (0, 0);
    for (at, line) in lines.iter().enumerate() {
        if !line.trim_start().starts_with(['x', 'h', 'c']) || !line.ends_with(';') {
            continue;
        }
        let without = without(&lines, at);
        let edited = through_text(&circuit, |_| format!("{}{without}", &text[..body]));
        let is_solution = |state: usize| {
            let bits = tallymark::problem::Bits::from_number(state as u128 & 15, 4);
            problem.holds(&bits)
        };
        let wanted = brute_force(&edited, is_solution);
        let found = run(&edited, Some(Way::Gates));
        let hit: f64 = found.likeliest.iter().filter(|(bits, _)| problem.holds(bits)).map(|(_, p)| p).sum();
        assert!((hit - wanted).abs() < 1e-9, "without `{line}`: {hit} not {wanted}");
        // The usual way may read it as another search, or follow it gate by gate: the success is that of what the file
        // marks, so it is compared where that is the problem still.
        let usual = run(&edited, None);
        let same = usual.curve.iter().enumerate().all(|(k, p)| (p - published(4, marked, k)).abs() < 1e-9);
        changed += u32::from(!same || usual.curve.len() != 3);
        tried += 1;
    }
    assert!(tried >= 10 && changed * 10 >= tried * 9, "{changed} of {tried}");
}

/// The same at the levels whose oracles open sums over paths and measure: what comes out is what gate by gate gives.
#[test]
fn a_change_of_one_gate_changes_what_comes_out_at_every_level() {
    let problem = clauses(4, 6, 5);
    let marked = solutions(&problem);
    for level in [Level::Wide, Level::CliffordT, Level::Feedback] {
        let circuit = whole_search(&oracle(&problem, level, Mark::Phase).unwrap(), 2, level);
        let mut text = Vec::new();
        write::write(&circuit, &[], &mut text).unwrap();
        let text = String::from_utf8(text).unwrap();
        let body = text.find("for int").unwrap();
        let lines: Vec<&str> = text[body..].lines().collect();
        let (mut changed, mut tried) = (0, 0);
        for (at, line) in lines.iter().enumerate() {
            let is_gate = line.ends_with(';') && !line.trim_start().starts_with("found");
            // Long circuits: every third gate.
            if !is_gate || (lines.len() > 100 && at % 3 > 0) {
                continue;
            }
            let without = without(&lines, at);
            tried += 1;
            let Ok(edited) = read::read(&format!("{}{without}", &text[..body]), "edited", &mut Sources::new()) else {
                // A bit that is tested and no longer measured.
                changed += 1;
                continue;
            };
            let usual =
                simulate(&edited, &Options { way: None, draw: 4000, seed: 7, threads: 2 }, &Budget::unlimited());
            let usual = usual.unwrap();
            if level != Level::Feedback {
                let gates = run(&edited, Some(Way::Gates));
                let hit: f64 = gates.likeliest.iter().filter(|(bits, _)| problem.holds(bits)).map(|(_, p)| p).sum();
                let drawn = usual.drawn.iter().filter(|(bits, _)| problem.holds(bits)).map(|one| one.1).sum::<u64>();
                // Five standard deviations of a binomial count, and the rounding of a sure one.
                let spread = 5.0 * (4000.0 * hit * (1.0 - hit)).max(0.0).sqrt() + 1e-6;
                assert!((drawn as f64 - 4000.0 * hit).abs() <= spread, "{level} `{line}`: {drawn} of 4000 at {hit}");
            }
            let same = usual.curve.iter().enumerate().all(|(k, p)| (p - published(4, marked, k)).abs() < 1e-9);
            changed += u32::from(!same || usual.curve.len() != 3);
        }
        // Of a measurement that is not corrected, a run may have drawn the outcome that needs no correction.
        let least = if level == Level::Feedback { 8 } else { 9 };
        assert!(tried >= 10 && changed * 10 >= tried * least, "{level}: {changed} of {tried}");
    }
}

/// Oracles that are read as sums over paths are read for all values at once, as many as there are.
#[test]
fn large_searches_are_read_at_every_level() {
    let problem = clauses(18, 40, 2);
    let marked = solutions(&problem);
    assert!(marked > 0);
    for level in Level::ALL {
        let circuit = whole_search(&oracle(&problem, level, Mark::Phase).unwrap(), 3, level);
        let found = run(&through_text(&circuit, |text| text), None);
        assert_eq!((found.way, found.marked, found.curve.len()), (Way::Classes, Some(marked), 4), "{level}");
        assert!((found.success.unwrap() - published(18, marked, 3)).abs() < 1e-12, "{level}");
    }
}

#[test]
fn results_are_drawn_with_their_probabilities() {
    let problem = clauses(10, 30, 11);
    let marked = solutions(&problem);
    assert!(marked > 0);
    let oracle = oracle(&problem, Level::Wide, Mark::Phase).unwrap();
    let circuit = through_text(&whole_search(&oracle, 3, Level::Wide), |text| text);
    let mut seen = Vec::new();
    for way in [Way::Classes, Way::Steps] {
        let options = Options { way: Some(way), draw: 20_000, seed: 9, threads: 2 };
        let found = simulate(&circuit, &options, &Budget::unlimited()).unwrap();
        assert_eq!(found.drawn.iter().map(|one| one.1).sum::<u64>(), 20_000);
        let hits: u64 = found.drawn.iter().filter(|(bits, _)| problem.holds(bits)).map(|one| one.1).sum();
        let p = published(10, marked, 3);
        // Five standard deviations of a binomial count.
        let spread = 5.0 * (20_000.0 * p * (1.0 - p)).sqrt();
        assert!((hits as f64 - 20_000.0 * p).abs() < spread, "{way:?}: {hits} of 20000 at {p}");
        let again = simulate(&circuit, &options, &Budget::unlimited()).unwrap();
        assert_eq!(found, again, "the seed decides");
        seen.push(found.drawn);
    }
    // Both ways know the same probabilities up to rounding, so the same points fall into the same strings.
    assert_eq!(seen[0], seen[1]);
}

#[test]
fn what_does_not_fit_is_refused_in_numbers() {
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits("search", 31);
    let found = circuit.add_measured("found", 31);
    search.iter().for_each(|&qubit| circuit.push(Op::H, &[], qubit));
    search.iter().zip(&found).for_each(|(&qubit, &bit)| circuit.push_measure(None, qubit, bit));
    let refused = |circuit: &Circuit, budget: &Budget, way| {
        simulate(circuit, &Options { way, ..Options::default() }, budget).unwrap_err()
    };
    assert!(matches!(refused(&circuit, &Budget::unlimited(), None), SimulateError::TooLarge { .. }));
    let small = through_text(
        &whole_search(&oracle(&clauses(8, 6, 1), Level::Wide, Mark::Phase).unwrap(), 2, Level::Wide),
        |t| t,
    );
    let error = refused(&small, &Budget::unlimited().with_memory(1000), Some(Way::Steps));
    assert!(matches!(&error, SimulateError::TooLarge { .. }), "{error}");
    assert_eq!(
        refused(&oracle(&clauses(8, 6, 1), Level::Wide, Mark::Phase).unwrap(), &Budget::unlimited(), None),
        SimulateError::NoResult
    );
}
