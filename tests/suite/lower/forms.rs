//! The forms of an oracle: angles, controls, inverses, each judged where it adds up to a sign.

use std::f64::consts::{FRAC_PI_2, FRAC_PI_4, PI};

use tallymark::budget::Budget;
use tallymark::circuit::registers::{Roles, assign};
use tallymark::circuit::{Circuit, Level, Op, SEARCH};
use tallymark::id::Id;
use tallymark::make::lower::{Limits, LowerError, Lowered, Turn, lower_turn};
use tallymark::make::network::Network;
use tallymark::problem::{BitId, BitLit, Problem};

use super::super::making::problems::random_problem;
use super::{check, check_level, network_of, within};

/// The gates of one circuit after those of another over the same registers; measured bits are used again.
fn after(mut first: Circuit, second: &Circuit) -> Circuit {
    for gate in second.gates() {
        let controls = second.controls(gate);
        match (gate.measured(), second.angle(gate)) {
            (Some(bit), _) => first.push_measure(gate.condition(), gate.target(), bit),
            (None, Some(angle)) => first.push_angle(gate.condition(), gate.op(), angle, controls, gate.target()),
            (None, None) => first.push_if(gate.condition(), gate.op(), controls, gate.target()),
        }
    }
    first
}

fn turned(
    network: &Network,
    level: Level,
    angle: f64,
    controlled: bool,
    limits: &Limits,
) -> Result<Lowered, LowerError> {
    lower_turn(network, level, Turn { angle, controlled }, limits, &Budget::unlimited())
}

/// Problems with at least two bits and an oracle.
fn problems(count: u64) -> impl Iterator<Item = (Problem, Network)> {
    (0..count).filter_map(|seed| {
        let problem = random_problem(seed, 6);
        let network = network_of(&problem);
        let fits = network.and_count() <= 24;
        let found = turned(&network, Level::Toffoli, PI, false, &Limits::default()).is_ok();
        (found && fits).then_some((problem, network))
    })
}

/// The problem with one more bit, which must be 1: the control.
fn with_control(problem: &Problem) -> Problem {
    let mut problem = problem.clone();
    let bit = problem.bit_count();
    problem.add_var("control", tallymark::problem::Domain::YesNo, None);
    problem.clauses.push(&[BitLit::new(BitId::new(bit), true)]);
    problem
}

fn control_searched(circuit: &Circuit) -> Circuit {
    let roles = Roles { search: Some(format!("{SEARCH}, control")), ..Roles::default() };
    assign(circuit, &roles).unwrap()
}

#[test]
fn angles_add_up_to_the_sign_and_inverses_cancel() {
    for (problem, network) in problems(25) {
        for level in Level::ALL {
            let turn = |angle| turned(&network, level, angle, false, &Limits::default()).unwrap().circuit;
            check_level(&turn(FRAC_PI_4), level);
            let quarter = after(turn(FRAC_PI_4), &turn(FRAC_PI_4));
            check(&problem, &after(quarter, &turn(FRAC_PI_2)), "a quarter, a quarter and a half");
            let there = Turn { angle: FRAC_PI_4, controlled: false };
            let back = lower_turn(&network, level, there.inverse(), &Limits::default(), &Budget::unlimited()).unwrap();
            let nothing = after(turn(FRAC_PI_4), &back.circuit);
            check(&problem, &after(nothing, &turn(PI)), "a turn and its inverse leave the sign alone");
        }
    }
}

#[test]
fn controlled_oracles_act_where_the_control_is_1() {
    for (problem, network) in problems(25) {
        let problem = with_control(&problem);
        for level in Level::ALL {
            let sign = turned(&network, level, PI, true, &Limits::default()).unwrap();
            let plain = turned(&network, level, PI, false, &Limits::default()).unwrap();
            // Only the last phase is controlled: a CZ in place of a Z.
            assert_eq!(sign.figures.t_count, plain.figures.t_count);
            assert_eq!(sign.figures.gates, plain.figures.gates);
            check(&problem, &control_searched(&sign.circuit), "the sign under a control");
            let half = turned(&network, level, FRAC_PI_2, true, &Limits::default()).unwrap().circuit;
            check(&problem, &control_searched(&after(half.clone(), &half)), "two halves under a control");
        }
    }
}

#[test]
fn forms_keep_to_their_qubits() {
    for (problem, network) in problems(12) {
        for level in [Level::CliffordT, Level::Feedback] {
            let most = turned(&network, level, PI, false, &Limits::default()).unwrap().figures.qubits;
            for qubits in (1..most).rev() {
                match turned(&network, level, PI, false, &within(qubits)) {
                    Ok(found) => {
                        assert!(found.figures.qubits <= qubits);
                        check(&problem, &found.circuit, "with fewer qubits");
                    }
                    Err(error) => {
                        assert_eq!(error, LowerError::TooFewQubits { asked: qubits, least: qubits + 1 });
                        break;
                    }
                }
            }
        }
    }
}

#[test]
fn the_phase_gate_has_the_angle_asked_for() {
    let (_, network) = problems(25).next().unwrap();
    let circuit = turned(&network, Level::Feedback, 0.3, true, &Limits::default()).unwrap().circuit;
    let angles: Vec<f64> =
        circuit.gates().iter().filter(|gate| gate.op() == Op::P).map(|g| circuit.angle(g).unwrap()).collect();
    assert_eq!(angles, [0.3]);
}
