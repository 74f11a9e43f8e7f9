//! Whole searches, gate by gate. The circuits are written here by hand, from the definition of the search.

use tallymark::budget::Budget;
use tallymark::circuit::qasm::read::read;
use tallymark::circuit::{Circuit, Condition, Control, Op, QubitId};
use tallymark::judge::audit::Outcome;
use tallymark::judge::audit::search::{SearchVerdict, audit_search, audit_search_against};
use tallymark::places::Places;
use tallymark::problem::{BitLit, Problem};
use tallymark::random::SplitMix64;
use tallymark::span::Sources;

fn places(bits: usize) -> Places {
    let mut problem = Problem::new();
    problem.add_numbered_vars(bits);
    Places::as_given(&problem)
}

/// A phase oracle that flips the listed strings one by one.
fn mark_each(circuit: &mut Circuit, search: &[QubitId], truth: &[u64]) {
    let (target, rest) = search.split_last().expect("at least one bit");
    for value in 0..1usize << search.len() {
        if truth[value / 64] >> (value % 64) & 1 == 0 {
            continue;
        }
        let is_one = |at: usize| value >> at & 1 == 1;
        let controls: Vec<Control> =
            rest.iter().enumerate().map(|(at, &qubit)| Control::new(qubit, is_one(at))).collect();
        if !is_one(rest.len()) {
            circuit.push(Op::X, &[], *target);
        }
        circuit.push(Op::Z, &controls, *target);
        if !is_one(rest.len()) {
            circuit.push(Op::X, &[], *target);
        }
    }
}

fn each(circuit: &mut Circuit, op: Op, qubits: &[QubitId]) {
    qubits.iter().for_each(|&qubit| circuit.push(op, &[], qubit));
}

/// Reflects about the uniform superposition.
fn reflect(circuit: &mut Circuit, search: &[QubitId]) {
    each(circuit, Op::H, search);
    each(circuit, Op::X, search);
    let (target, rest) = search.split_last().expect("at least one bit");
    circuit.push(Op::Z, &rest.iter().map(|&qubit| Control::on(qubit)).collect::<Vec<_>>(), *target);
    each(circuit, Op::X, search);
    each(circuit, Op::H, search);
}

/// A whole search with `work` ancillas around an oracle.
fn whole(bits: usize, work: usize, turns: u64, oracle: impl FnOnce(&mut Circuit, &[QubitId], &[QubitId])) -> Circuit {
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits("search", bits);
    let work = if work > 0 { circuit.add_qubits("work", work) } else { Vec::new() };
    let found = circuit.add_measured("found", bits);
    each(&mut circuit, Op::Reset, &search);
    each(&mut circuit, Op::Reset, &work);
    each(&mut circuit, Op::H, &search);
    if turns > 0 {
        let from = circuit.gates().len();
        oracle(&mut circuit, &search, &work);
        reflect(&mut circuit, &search);
        if turns > 1 {
            circuit.repeat_from(from, turns);
        }
    }
    search.iter().zip(&found).for_each(|(&qubit, &bit)| circuit.push_measure(None, qubit, bit));
    circuit
}

fn by_table(bits: usize, turns: u64, truth: &[u64]) -> Circuit {
    whole(bits, 0, turns, |circuit, search, _| mark_each(circuit, search, truth))
}

fn judge(bits: usize, truth: &[u64], circuit: &Circuit, work_limit: u64) -> SearchVerdict {
    audit_search_against(truth, &places(bits), circuit, work_limit, &Budget::unlimited()).expect("it fits")
}

#[test]
fn success_is_that_of_the_published_fractions() {
    // Boyer, Brassard, Hoyer, Tapp, "Tight bounds on quantum searching", 1998, section 3: p_k = a s_k^2 as exact fractions.
    let table = [
        (2, 1, 0, 1.0 / 4.0),
        (2, 1, 1, 1.0),
        (2, 1, 2, 1.0 / 4.0),
        (3, 1, 0, 1.0 / 8.0),
        (3, 1, 1, 25.0 / 32.0),
        (3, 1, 2, 121.0 / 128.0),
        (3, 1, 3, 169.0 / 512.0),
        (3, 1, 4, 25.0 / 2048.0),
        (3, 1, 6, 32761.0 / 32768.0),
        (3, 2, 1, 1.0),
        (3, 3, 1, 27.0 / 32.0),
        (3, 6, 0, 3.0 / 4.0),
        (3, 6, 1, 0.0),
        (4, 1, 3, 63001.0 / 65536.0),
        (4, 3, 2, 2523.0 / 4096.0),
        (10, 1, 1, 588_289.0 / 67_108_864.0),
        (10, 1, 2, 106_537_612_801.0 / 4_398_046_511_104.0),
    ];
    for (bits, marked, turns, expected) in table {
        // Spread the marked strings over the table.
        let mut truth = vec![0u64; (1usize << bits).div_ceil(64)];
        (0..marked).for_each(|at| {
            let value = (at * 5 + 3) % (1usize << bits);
            truth[value / 64] |= 1 << (value % 64);
        });
        let verdict = judge(bits, &truth, &by_table(bits, turns, &truth), u64::MAX);
        assert_eq!(verdict.outcome, Outcome::Equal, "{bits} {marked} {turns}: {verdict:?}");
        assert!((verdict.success - expected).abs() < 1e-12, "{bits} {marked} {turns}: {verdict:?}");
        assert_eq!(verdict.iterations_checked, verdict.iterations);
        // A search that repeats itself after fewer iterations is not told apart where there is no loop.
        assert!(verdict.iterations == turns || turns < 2, "{verdict:?}");
    }
}

#[test]
fn random_searches_reach_the_probability_of_theory() {
    let mut random = SplitMix64::new(11);
    for bits in [1, 3, 5, 6, 7, 8] {
        for turns in [1, 2, 3] {
            let len = 1u64 << bits;
            let mut truth = vec![0u64; (len as usize).div_ceil(64)];
            for _ in 0..1 + random.below(1 + len / 4) {
                let value = random.below(len) as usize;
                truth[value / 64] |= 1 << (value % 64);
            }
            let marked: u32 = truth.iter().map(|word| word.count_ones()).sum();
            let verdict = judge(bits, &truth, &by_table(bits, turns, &truth), u64::MAX);
            let theta = (f64::from(marked) / len as f64).sqrt().asin();
            let expected = ((2 * turns + 1) as f64 * theta).sin().powi(2);
            assert_eq!(verdict.outcome, Outcome::Equal, "{bits} {turns} {marked}: {verdict:?}");
            assert!((verdict.success - expected).abs() < 1e-9, "{bits} {turns} {marked}: {verdict:?}");
            assert!(verdict.deviation < 1e-9);
        }
    }
}

#[test]
fn nothing_marked_everything_marked_and_half_marked() {
    for (truth, success) in [(0u64, 0.0), (0xff, 1.0), (0x0f, 0.5)] {
        let verdict = judge(3, &[truth], &by_table(3, 5, &[truth]), u64::MAX);
        assert_eq!((verdict.outcome, verdict.iterations), (Outcome::Equal, 5), "{verdict:?}");
        assert!((verdict.success - success).abs() < 1e-12);
    }
}

#[test]
fn a_long_loop_is_followed_as_far_as_the_limit_allows() {
    // N = 2^8, M = 1, first peak at k = 12 (table of the same paper): p = 0.999947042103274.
    let truth = [0, 1 << 7, 0, 0];
    let whole = judge(8, &truth, &by_table(8, 12, &truth), u64::MAX);
    assert_eq!((whole.outcome, whole.iterations, whole.iterations_checked), (Outcome::Equal, 12, 12));
    assert!((whole.success - 0.999_947_042_103_274).abs() < 1e-12, "{whole:?}");
    let part = judge(8, &truth, &by_table(8, 1_000_000, &truth), 20_000);
    assert_eq!((part.outcome, part.iterations), (Outcome::Equal, 1_000_000), "{part:?}");
    assert!((2..100).contains(&part.iterations_checked), "{part:?}");
    assert!(part.notes.iter().any(|note| note.contains("of 1000000 turns")), "{part:?}");
    let one = judge(8, &truth, &by_table(8, 12, &truth), 0);
    assert_eq!((one.outcome, one.iterations_checked), (Outcome::Undecided, 1), "{one:?}");
}

/// The circuit with gate `change` left out or made another one.
fn changed(right: &Circuit, change: usize, other: Option<Op>) -> Circuit {
    let mut circuit = Circuit::new();
    for register in &right.qubits {
        circuit.add_qubits(&register.name, register.len as usize);
    }
    for register in &right.measured {
        circuit.add_measured(&register.name, register.len as usize);
    }
    for block in right.blocks() {
        let from = circuit.gates().len();
        for at in block.gates.start as usize..block.gates.end as usize {
            let gate = &right.gates()[at];
            let controls = right.controls(gate);
            match (gate.measured(), other) {
                (None, Some(op)) if at == change => circuit.push(op, controls, gate.target()),
                _ if at == change => {}
                (Some(bit), _) => circuit.push_measure(gate.condition(), gate.target(), bit),
                _ => circuit.push_if(gate.condition(), gate.op(), controls, gate.target()),
            }
        }
        if block.repeat != 1 {
            circuit.repeat_from(from, block.repeat);
        }
    }
    circuit
}

/// A plain state vector, for the gates of [`by_table`] and S: `amplitudes[v]` is that of the basis state v.
fn simulate(circuit: &Circuit, amplitudes: &mut [(f64, f64)], gates: std::ops::Range<usize>) {
    for gate in &circuit.gates()[gates] {
        let bit = |value: usize, qubit: QubitId| value >> tallymark::id::Id::index(qubit) & 1 == 1;
        let holds = |value: usize| circuit.controls(gate).iter().all(|c| bit(value, c.qubit()) != c.is_negated());
        let flip = 1 << tallymark::id::Id::index(gate.target());
        for value in 0..amplitudes.len() {
            let partner = value ^ flip;
            let (a, b) = (amplitudes[value], amplitudes[partner]);
            match gate.op() {
                _ if !holds(value) => {}
                Op::X if value < partner => (amplitudes[value], amplitudes[partner]) = (b, a),
                Op::Z if bit(value, gate.target()) => amplitudes[value] = (-a.0, -a.1),
                Op::S if bit(value, gate.target()) => amplitudes[value] = (-a.1, a.0),
                Op::H if value < partner => {
                    let root = std::f64::consts::FRAC_1_SQRT_2;
                    amplitudes[value] = ((a.0 + b.0) * root, (a.1 + b.1) * root);
                    amplitudes[partner] = ((a.0 - b.0) * root, (a.1 - b.1) * root);
                }
                _ => {}
            }
        }
    }
}

/// Whether the vector is that of the search after `turns` iterations, up to a phase.
fn is_search_state(amplitudes: &[(f64, f64)], truth: u64, turns: u64) -> bool {
    let all = amplitudes.len() as f64;
    let marked = f64::from(truth.count_ones());
    let (sin, cos) = ((2 * turns + 1) as f64 * (marked / all).sqrt().asin()).sin_cos();
    let wanted = |v: usize| if truth >> v & 1 == 1 { sin / marked.sqrt() } else { cos / (all - marked).sqrt() };
    let overlap = amplitudes.iter().enumerate().fold((0.0, 0.0), |sum, (value, amplitude)| {
        (sum.0 + wanted(value) * amplitude.0, sum.1 + wanted(value) * amplitude.1)
    });
    (overlap.0 * overlap.0 + overlap.1 * overlap.1 - 1.0).abs() < 1e-9
}

/// Whether a circuit of [`by_table`] with a changed gate is still the search, by the plain state vector.
fn is_search(circuit: &Circuit, truth: u64, turns: u64) -> bool {
    let mut amplitudes = vec![(0.0, 0.0); 8];
    amplitudes[0] = (1.0, 0.0);
    let blocks = circuit.blocks();
    let range = |at: usize| blocks[at].gates.start as usize..blocks[at].gates.end as usize;
    simulate(circuit, &mut amplitudes, range(0));
    if turns == 1 {
        return is_search_state(&amplitudes, truth, 1);
    }
    let is_right = |turn: u64, amplitudes: &mut Vec<(f64, f64)>| {
        simulate(circuit, amplitudes, range(1));
        is_search_state(amplitudes, truth, turn)
    };
    is_search_state(&amplitudes, truth, 0) && (1..=turns).all(|turn| is_right(turn, &mut amplitudes))
}

#[test]
fn one_gate_changed_is_noticed() {
    let truth = [0b0010_0100];
    let (mut noticed, mut harmless) = (0, 0);
    for turns in [1, 2, 3] {
        let right = by_table(3, turns, &truth);
        assert_eq!(judge(3, &truth, &right, u64::MAX).outcome, Outcome::Equal);
        for (at, gate) in right.gates().iter().enumerate() {
            let others = match gate.op() {
                Op::X => vec![None, Some(Op::Z)],
                Op::Z => vec![None, Some(Op::S), Some(Op::X)],
                Op::H => vec![None, Some(Op::X)],
                Op::Measure => vec![None],
                _ => vec![],
            };
            for other in others {
                let circuit = changed(&right, at, other);
                let verdict = judge(3, &truth, &circuit, u64::MAX);
                let measured = gate.op() != Op::Measure;
                // One iteration that is wrong elsewhere may be right on the uniform state, and then the file is right.
                let is_right = measured && is_search(&circuit, truth[0], turns);
                // With M = N/4 the state of two iterations is that of the oracle alone: then the number tells.
                let got = verdict.outcome == Outcome::Equal && verdict.iterations == turns;
                assert_eq!(got, is_right, "gate {at} of {turns} turns as {other:?}: {gate:?} {verdict:?}");
                noticed += usize::from(!is_right);
                harmless += usize::from(is_right);
            }
        }
    }
    assert!(noticed > 120 && harmless < 15, "{noticed} noticed, {harmless} harmless");
}

#[test]
fn the_result_must_be_measured_in_order() {
    let head = "include \"stdgates.inc\"; qubit[2] search; bit[2] found; reset search; h search;
        for int i in [1:4] { cz search[0], search[1]; h search; x search; cz search[0], search[1]; x search; h search; }";
    let truth = [0b1000];
    let outcome = |head: &str, tail: &str| {
        let circuit = read(&format!("{head}\n{tail}"), "a.qasm", &mut Sources::new()).unwrap();
        let verdict = judge(2, &truth, &circuit, u64::MAX);
        (verdict.outcome, verdict.notes.join(" "))
    };
    assert_eq!(outcome(head, "found = measure search;").0, Outcome::Equal);
    let swapped = outcome(head, "found[0] = measure search[1]; found[1] = measure search[0];");
    assert!(swapped.0 == Outcome::Differs && swapped.1.contains("found[0]"), "{swapped:?}");
    assert_eq!(outcome(head, "found[0] = measure search[0];").0, Outcome::Differs);
    assert_eq!(outcome(head, "").0, Outcome::Differs);
    assert_eq!(outcome(head, "x search[0]; found = measure search;").0, Outcome::Differs);
    assert_eq!(outcome(&head.replace("found", "result"), "result = measure search;").0, Outcome::Differs);
    assert_eq!(outcome(&head.replace("h search;\n", "\n"), "found = measure search;").0, Outcome::Differs);
}

/// All three bits by two ANDs into `work`, in one of three ways of undoing them.
enum Undo {
    Measured,
    MeasuredSwapped,
    Toffoli,
    Never,
}

fn and(circuit: &mut Circuit, a: QubitId, b: QubitId, c: QubitId) {
    let cx = |circuit: &mut Circuit, control, target| circuit.push(Op::X, &[Control::on(control)], target);
    circuit.push(Op::H, &[], c);
    circuit.push(Op::T, &[], c);
    cx(circuit, a, c);
    cx(circuit, b, c);
    cx(circuit, c, a);
    cx(circuit, c, b);
    circuit.push(Op::Tdg, &[], a);
    circuit.push(Op::Tdg, &[], b);
    circuit.push(Op::T, &[], c);
    cx(circuit, c, a);
    cx(circuit, c, b);
    circuit.push(Op::H, &[], c);
    circuit.push(Op::S, &[], c);
}

fn three_ones(turns: u64, undo: &Undo) -> Circuit {
    let outcomes: Vec<_> = (3..5).map(<tallymark::circuit::MeasuredId as tallymark::id::Id>::new).collect();
    let mut circuit = whole(3, 2, turns, |circuit, search, work| {
        circuit.add_measured("outcome", 2);
        match undo {
            Undo::Toffoli | Undo::Never => {
                circuit.push(Op::X, &[Control::on(search[0]), Control::on(search[1])], work[0]);
            }
            _ => and(circuit, search[0], search[1], work[0]),
        }
        and(circuit, work[0], search[2], work[1]);
        circuit.push(Op::Z, &[], work[1]);
        let erase = |circuit: &mut Circuit, at: usize, a: QubitId, b: QubitId, told: usize| {
            circuit.push(Op::H, &[], work[at]);
            circuit.push_measure(None, work[at], outcomes[at]);
            circuit.push_if(Some(Condition::new(outcomes[told], true)), Op::Z, &[Control::on(a)], b);
            circuit.push(Op::Reset, &[], work[at]);
        };
        erase(circuit, 1, work[0], search[2], 1);
        match undo {
            Undo::Measured => erase(circuit, 0, search[0], search[1], 0),
            Undo::MeasuredSwapped => erase(circuit, 0, search[0], search[1], 1),
            Undo::Toffoli => circuit.push(Op::X, &[Control::on(search[0]), Control::on(search[1])], work[0]),
            Undo::Never => {}
        }
    });
    circuit.regions.clear();
    circuit
}

#[test]
fn searches_with_t_gates_and_measurements_are_followed() {
    let truth = [1 << 7];
    for undo in [Undo::Measured, Undo::Toffoli] {
        let verdict = judge(3, &truth, &three_ones(6, &undo), u64::MAX);
        assert_eq!((verdict.outcome, verdict.iterations), (Outcome::Equal, 6), "{verdict:?}");
        assert!((verdict.success - 32761.0 / 32768.0).abs() < 1e-9);
        assert!(verdict.notes.iter().any(|note| note.contains("measurement outcomes")), "{verdict:?}");
    }
    // Wrong corrections show as soon as an outcome is drawn for which they differ.
    assert_eq!(judge(3, &truth, &three_ones(6, &Undo::MeasuredSwapped), u64::MAX).outcome, Outcome::Differs);
    let dirty = judge(3, &truth, &three_ones(2, &Undo::Never), u64::MAX);
    assert_eq!(dirty.outcome, Outcome::Differs, "{dirty:?}");
}

#[test]
fn an_ancilla_that_is_left_dirty_is_named() {
    let truth = [1 << 7];
    let circuit = whole(3, 1, 2, |circuit, search, work| {
        circuit.push(Op::X, &[Control::on(search[0]), Control::on(search[1])], work[0]);
        circuit.push(Op::Z, &[Control::on(work[0])], search[2]);
    });
    let verdict = judge(3, &truth, &circuit, u64::MAX);
    assert_eq!(verdict.outcome, Outcome::Differs);
    assert!(verdict.notes[0].starts_with("work[0] is 1"), "{verdict:?}");
}

#[test]
fn the_problem_gives_the_solutions_and_places_say_where_bits_are() {
    // Bit 0 and not bit 1, bits searched in reverse order.
    let mut problem = Problem::new();
    problem.add_numbered_vars(2);
    problem.clauses.push(&[BitLit::from_dimacs(1).unwrap()]);
    problem.clauses.push(&[BitLit::from_dimacs(-2).unwrap()]);
    let mut places = Places::as_given(&problem);
    places.searched.reverse();
    let outcome = |truth: u64| {
        let circuit = by_table(2, 1, &[truth]);
        audit_search(&problem, &places, &circuit, u64::MAX, &Budget::unlimited()).unwrap().outcome
    };
    assert_eq!(outcome(0b0100), Outcome::Equal);
    assert_eq!(outcome(0b0010), Outcome::Differs);
}

#[test]
fn budgets_leave_the_verdict_open() {
    let truth = [1];
    let circuit = by_table(5, 3, &truth);
    let stopped = Budget::unlimited();
    stopped.cancel();
    for budget in [stopped, Budget::unlimited().with_memory(100)] {
        let verdict = audit_search_against(&truth, &places(5), &circuit, u64::MAX, &budget).unwrap();
        assert_eq!((verdict.outcome, verdict.iterations_checked), (Outcome::Undecided, 0));
        assert_eq!(verdict.notes.len(), 1);
    }
}
