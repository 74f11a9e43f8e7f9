//! Every gate of the language and its libraries against its matrix, global phase included: plain, and with modifiers;
//! definitions, loops and subroutines against what they stand for.
//!
//! The matrices are those of the OpenQASM 3 specification ("Gates", and the definitions in `stdgates.inc`); those of
//! version 2 follow from A. Cross, L. Bishop, J. Smolin, J. Gambetta: _Open quantum assembly language_,
//! arXiv:1707.03429, whose definitions are written out below. The simulator here is dense and knows nothing of the crate's.

use std::f64::consts::{FRAC_1_SQRT_2, FRAC_PI_2, FRAC_PI_4, PI};

use tallymark::circuit::qasm::read::read;
use tallymark::circuit::{Circuit, Op};
use tallymark::id::Id;
use tallymark::span::Sources;

type Complex = (f64, f64);
/// Rows of a square matrix; operand `j` of a gate is bit `j` of an index.
type Matrix = Vec<Vec<Complex>>;

fn cis(angle: f64) -> Complex {
    (angle.cos(), angle.sin())
}

fn times(a: Complex, b: Complex) -> Complex {
    (a.0 * b.0 - a.1 * b.1, a.0 * b.1 + a.1 * b.0)
}

fn plus(a: Complex, b: Complex) -> Complex {
    (a.0 + b.0, a.1 + b.1)
}

fn product(a: &Matrix, b: &Matrix) -> Matrix {
    let entry = |row: usize, column: usize| {
        (0..a.len()).fold((0.0, 0.0), |sum, at| plus(sum, times(a[row][at], b[at][column])))
    };
    (0..a.len()).map(|row| (0..a.len()).map(|column| entry(row, column)).collect()).collect()
}

fn adjoint(a: &Matrix) -> Matrix {
    (0..a.len()).map(|row| (0..a.len()).map(|column| (a[column][row].0, -a[column][row].1)).collect()).collect()
}

fn identity(size: usize) -> Matrix {
    (0..size).map(|row| (0..size).map(|column| (f64::from(row == column), 0.0)).collect()).collect()
}

fn power(a: &Matrix, exponent: i64) -> Matrix {
    let base = if exponent < 0 { adjoint(a) } else { a.clone() };
    (0..exponent.abs()).fold(identity(a.len()), |result, _| product(&base, &result))
}

fn scaled(factor: Complex, a: &Matrix) -> Matrix {
    a.iter().map(|row| row.iter().map(|&entry| times(factor, entry)).collect()).collect()
}

/// With controls in front, `true` for those that hold at 1.
fn controlled(polarity: &[bool], a: &Matrix) -> Matrix {
    let mask = polarity.iter().enumerate().map(|(at, &value)| usize::from(value) << at).sum::<usize>();
    let (count, size) = (polarity.len(), a.len() << polarity.len());
    let mut matrix = identity(size);
    for row in 0..a.len() {
        for column in 0..a.len() {
            matrix[row << count | mask][column << count | mask] = a[row][column];
        }
    }
    matrix
}

fn two(a: Complex, b: Complex, c: Complex, d: Complex) -> Matrix {
    vec![vec![a, b], vec![c, d]]
}

/// The built-in gate, as the specification prints it.
fn u(theta: f64, phi: f64, lambda: f64) -> Matrix {
    let (sum, difference) = (plus((1.0, 0.0), cis(theta)), plus((1.0, 0.0), times((-1.0, 0.0), cis(theta))));
    let matrix = two(
        sum,
        times(times((0.0, -1.0), cis(lambda)), difference),
        times(times((0.0, 1.0), cis(phi)), difference),
        times(cis(phi + lambda), sum),
    );
    scaled((0.5, 0.0), &matrix)
}

fn diagonal(angle: f64) -> Matrix {
    two((1.0, 0.0), (0.0, 0.0), (0.0, 0.0), cis(angle))
}

/// A gate of the standard: its spelling, its own controls, and what it does to its targets.
fn standard(theta: f64, phi: f64, lambda: f64, gamma: f64) -> Vec<(String, usize, Matrix)> {
    let (o, l, i) = ((0.0, 0.0), (1.0, 0.0), (0.0, 1.0));
    let x = two(o, l, l, o);
    let y = two(o, (0.0, -1.0), i, o);
    let h = scaled((FRAC_1_SQRT_2, 0.0), &two(l, l, l, (-1.0, 0.0)));
    let sx = scaled((0.5, 0.0), &two((1.0, 1.0), (1.0, -1.0), (1.0, -1.0), (1.0, 1.0)));
    let (cos, sin) = ((theta / 2.0).cos(), (theta / 2.0).sin());
    let rx = two((cos, 0.0), (0.0, -sin), (0.0, -sin), (cos, 0.0));
    let ry = two((cos, 0.0), (-sin, 0.0), (sin, 0.0), (cos, 0.0));
    let rz = two(cis(-theta / 2.0), o, o, cis(theta / 2.0));
    let swap = vec![vec![l, o, o, o], vec![o, o, l, o], vec![o, l, o, o], vec![o, o, o, l]];
    let u2 = scaled(cis(-(phi + lambda + FRAC_PI_2) / 2.0), &u(FRAC_PI_2, phi, lambda));
    let u3 = scaled(cis(-(phi + lambda + theta) / 2.0), &u(theta, phi, lambda));
    let cu = scaled(cis(gamma - theta / 2.0), &u(theta, phi, lambda));
    let mut list = Vec::new();
    let mut add = |name: &str, angles: &[f64], controls: usize, matrix: &Matrix| {
        let angles: Vec<String> = angles.iter().map(|angle| format!("{angle:?}")).collect();
        let angles = if angles.is_empty() { String::new() } else { format!("({})", angles.join(", ")) };
        list.push((format!("{name}{angles}"), controls, matrix.clone()));
    };
    for (name, controls, matrix) in [
        ("x", 0, &x),
        ("y", 0, &y),
        ("z", 0, &diagonal(PI)),
        ("h", 0, &h),
        ("s", 0, &diagonal(FRAC_PI_2)),
        ("sdg", 0, &diagonal(-FRAC_PI_2)),
        ("t", 0, &diagonal(FRAC_PI_4)),
        ("tdg", 0, &diagonal(-FRAC_PI_4)),
        ("sx", 0, &sx),
        ("id", 0, &identity(2)),
        ("cx", 1, &x),
        ("CX", 1, &x),
        ("cy", 1, &y),
        ("cz", 1, &diagonal(PI)),
        ("ch", 1, &h),
        ("ccx", 2, &x),
        ("swap", 0, &swap),
        ("cswap", 1, &swap),
    ] {
        add(name, &[], controls, matrix);
    }
    for (name, controls, matrix) in [
        ("p", 0, &diagonal(theta)),
        ("phase", 0, &diagonal(theta)),
        ("u1", 0, &diagonal(theta)),
        ("rx", 0, &rx),
        ("ry", 0, &ry),
        ("rz", 0, &rz),
        ("cp", 1, &diagonal(theta)),
        ("cphase", 1, &diagonal(theta)),
        ("crx", 1, &rx),
        ("cry", 1, &ry),
        ("crz", 1, &rz),
    ] {
        add(name, &[theta], controls, matrix);
    }
    add("U", &[theta, phi, lambda], 0, &u(theta, phi, lambda));
    add("u2", &[phi, lambda], 0, &u2);
    add("u3", &[theta, phi, lambda], 0, &u3);
    add("cu", &[theta, phi, lambda, gamma], 1, &cu);
    list
}

fn circuit(text: &str) -> Circuit {
    read(text, "a.qasm", &mut Sources::new()).unwrap_or_else(|faults| panic!("{faults:#?}\n{text}"))
}

/// The matrix of a gate of the circuit on its target.
fn on_target(circuit: &Circuit, gate: &tallymark::circuit::Gate) -> Matrix {
    let angle = circuit.angle(gate).unwrap_or(0.0);
    let (o, l) = ((0.0, 0.0), (1.0, 0.0));
    let (cos, sin) = ((angle / 2.0).cos(), (angle / 2.0).sin());
    match gate.op() {
        Op::X => two(o, l, l, o),
        Op::Z => diagonal(PI),
        Op::S => diagonal(FRAC_PI_2),
        Op::Sdg => diagonal(-FRAC_PI_2),
        Op::T => diagonal(FRAC_PI_4),
        Op::Tdg => diagonal(-FRAC_PI_4),
        Op::H => scaled((FRAC_1_SQRT_2, 0.0), &two(l, l, l, (-1.0, 0.0))),
        Op::P => diagonal(angle),
        Op::Rz => two(cis(-angle / 2.0), o, o, cis(angle / 2.0)),
        Op::Ry => two((cos, 0.0), (-sin, 0.0), (sin, 0.0), (cos, 0.0)),
        Op::Measure | Op::Reset => panic!("not unitary"),
    }
}

/// The matrix of a circuit without measurements; qubit `j` is bit `j` of an index.
fn matrix(circuit: &Circuit) -> Matrix {
    let size = 1 << circuit.qubit_count();
    let mut columns = identity(size);
    let gates = circuit.blocks().iter().flat_map(|block| {
        (0..block.repeat).flat_map(|_| &circuit.gates()[block.gates.start as usize..block.gates.end as usize])
    });
    for gate in gates {
        let (inner, bit) = (on_target(circuit, gate), 1 << gate.target().index());
        let holds = |at: usize| {
            circuit
                .controls(gate)
                .iter()
                .all(|control| (at >> control.qubit().index() & 1 == 1) != control.is_negated())
        };
        for column in &mut columns {
            for zero in (0..size).filter(|at| at & bit == 0 && holds(*at)) {
                let (a, b) = (column[zero], column[zero | bit]);
                column[zero] = plus(times(inner[0][0], a), times(inner[0][1], b));
                column[zero | bit] = plus(times(inner[1][0], a), times(inner[1][1], b));
            }
        }
    }
    (0..size).map(|row| (0..size).map(|column| columns[column][row]).collect()).collect()
}

fn distance(a: &Matrix, b: &Matrix) -> f64 {
    let pairs = a.iter().flatten().zip(b.iter().flatten());
    pairs.map(|(a, b)| (a.0 - b.0).hypot(a.1 - b.1)).fold(0.0, f64::max)
}

/// The distance where a global phase is free.
fn distance_up_to_phase(a: &Matrix, b: &Matrix) -> f64 {
    let largest = |m: &Matrix| {
        let entries = m.iter().flatten().copied().enumerate();
        entries.fold((0, (0.0, 0.0)), |best: (usize, Complex), entry| {
            if entry.1.0.hypot(entry.1.1) > best.1.0.hypot(best.1.1) + 1e-9 { entry } else { best }
        })
    };
    let (at, of_a) = largest(a);
    let of_b = b[at / b.len()][at % b.len()];
    distance(&scaled(cis(of_b.1.atan2(of_b.0) - of_a.1.atan2(of_a.0)), a), b)
}

/// Modifiers, the polarities of the controls they add, and the exponent they mean.
const MODIFIERS: &[(&str, &[bool], i64)] = &[
    ("", &[], 1),
    ("inv @ ", &[], -1),
    ("inv @ inv @ ", &[], 1),
    ("pow(0) @ ", &[], 0),
    ("pow(2) @ ", &[], 2),
    ("pow(3) @ ", &[], 3),
    ("pow(-3) @ ", &[], -3),
    ("pow(2) @ inv @ pow(5) @ ", &[], -10),
    ("ctrl @ ", &[true], 1),
    ("negctrl @ ", &[false], 1),
    ("inv @ ctrl @ ", &[true], -1),
    ("ctrl @ inv @ ", &[true], -1),
    ("pow(2) @ negctrl @ ", &[false], 2),
    ("ctrl @ pow(-2) @ ", &[true], -2),
    ("ctrl(2) @ ", &[true, true], 1),
    ("negctrl @ inv @ negctrl @ ", &[false, false], -1),
    ("ctrl @ negctrl @ pow(3) @ ", &[true, false], 3),
    ("negctrl @ ctrl @ ", &[false, true], 1),
];

/// Compares a call with its matrix; operands go to qubits in reverse.
fn compare(call: &str, polarity: &[bool], inner: &Matrix, wrong: &mut Vec<String>) {
    let expected = controlled(polarity, inner);
    let count = expected.len().trailing_zeros() as usize;
    let operands: Vec<String> = (0..count).rev().map(|at| format!("q[{at}]")).collect();
    let text = format!(
        "OPENQASM 3.0;\ninclude \"stdgates.inc\";\nqubit[{}] q;\n{call} {};",
        count.max(1),
        operands.join(", ")
    );
    let got = matrix(&circuit(&text));
    let reversed = |at: usize| (0..count).map(|bit| (at >> bit & 1) << (count - 1 - bit)).sum::<usize>();
    let expected: Matrix = match count {
        0 => scaled(expected[0][0], &identity(2)),
        _ => (0..1 << count)
            .map(|row| (0..1 << count).map(|column| expected[reversed(row)][reversed(column)]).collect())
            .collect(),
    };
    let distance = distance(&got, &expected);
    if distance > 1e-12 {
        wrong.push(format!("{text}\n  differs by {distance}"));
    }
}

#[test]
fn every_gate_of_the_standard_has_its_matrix_under_every_modifier() {
    let angles = [
        (0.7, -1.9, 2.3, 0.4),
        (PI, 0.0, PI, 0.0),
        (FRAC_PI_2, 0.0, PI, -FRAC_PI_4),
        (0.0, 0.3, 0.4, 1.0),
        (-PI, FRAC_PI_2, 0.1, PI),
        (3.0 * PI, -FRAC_PI_4, FRAC_PI_4, 0.2),
    ];
    let (mut wrong, mut compared) = (Vec::new(), 0);
    for (theta, phi, lambda, gamma) in angles {
        for (call, controls, inner) in standard(theta, phi, lambda, gamma) {
            for &(modifiers, polarity, exponent) in MODIFIERS {
                let all: Vec<bool> = polarity.iter().copied().chain(std::iter::repeat_n(true, controls)).collect();
                compare(&format!("{modifiers}{call}"), &all, &power(&inner, exponent), &mut wrong);
                compared += 1;
            }
        }
        for &(modifiers, polarity, exponent) in MODIFIERS {
            let inner = vec![vec![cis(gamma * exponent as f64)]];
            compare(&format!("{modifiers}gphase({gamma:?})"), polarity, &inner, &mut wrong);
        }
    }
    assert!(wrong.is_empty(), "{} wrong:\n{}", wrong.len(), wrong[..wrong.len().min(5)].join("\n"));
    assert!(compared > 3000, "{compared} compared");
}

/// `stdgates.inc` in the built-in gates, as the standard defines it, under other names.
const DEFINITIONS: &str = "
gate my_p(λ) a { ctrl @ gphase(λ) a; }
gate my_x a { U(π, 0, π) a; gphase(-π/2); }
gate my_y a { U(π, π/2, π/2) a; gphase(-π/2); }
gate my_h a { U(π/2, 0, π) a; gphase(-π/4); }
gate my_rx(θ) a { U(θ, -π/2, π/2) a; gphase(-θ/2); }
gate my_ry(θ) a { U(θ, 0, 0) a; gphase(-θ/2); }
gate my_rz(λ) a { gphase(-λ/2); U(0, 0, λ) a; }
gate my_cx c, t { ctrl @ my_x c, t; }
gate my_cy a, b { ctrl @ my_y a, b; }
gate my_ch a, b { ctrl @ my_h a, b; }
gate my_swap a, b { my_cx a, b; my_cx b, a; my_cx a, b; }
gate my_cswap c, a, b { ctrl @ my_swap c, a, b; }
gate my_cu(θ, φ, λ, γ) c, t { my_p(γ - θ/2) c; ctrl @ U(θ, φ, λ) c, t; }
gate my_u2(φ, λ) q { gphase(-(φ + λ + π/2)/2); U(π/2, φ, λ) q; }
gate my_u3(θ, φ, λ) q { gphase(-(φ + λ + θ)/2); U(θ, φ, λ) q; }
";

#[test]
fn definitions_of_the_standard_agree_with_its_library() {
    let calls = [
        ("p(0.3)", 1),
        ("x", 1),
        ("y", 1),
        ("h", 1),
        ("rx(1.1)", 1),
        ("ry(1.2)", 1),
        ("rz(1.3)", 1),
        ("cx", 2),
        ("cy", 2),
        ("ch", 2),
        ("swap", 2),
        ("cswap", 3),
        ("cu(0.1, 0.2, 0.3, 0.4)", 2),
        ("u2(0.5, 0.6)", 1),
        ("u3(0.7, 0.8, 0.9)", 1),
    ];
    for (call, operands) in calls {
        for (modifiers, polarity, _) in MODIFIERS {
            let count = operands + polarity.len();
            let qubits: Vec<String> = (0..count).map(|at| format!("q[{at}]")).collect();
            let text = |prefix: &str| {
                let head = format!("OPENQASM 3.0;\ninclude \"stdgates.inc\";{DEFINITIONS}qubit[{count}] q;\n");
                circuit(&format!("{head}{modifiers}{prefix}{call} {};", qubits.join(", ")))
            };
            let distance = distance(&matrix(&text("")), &matrix(&text("my_")));
            assert!(distance < 1e-12, "{modifiers}{call} differs by {distance}");
        }
    }
}

#[test]
fn other_spellings_mean_the_same() {
    let pairs = [
        ("let a = q[1:2] ++ q[0]; cx a[0], a[2]; x a;", "cx q[1], q[0]; x q;"),
        ("let a = q[{2, 0}]; t a[0]; h a[-1];", "t q[2]; h q[0];"),
        ("let a = q[0:2:2]; let b = a[1:-1:0]; cx b[0], b[1];", "cx q[2], q[0];"),
        ("const int[8] n = 2; const float f = pi / 4; p(n * f) q[n];", "s q[2];"),
        ("const uint k = 3; for uint i in [0:k - 2] { p(pi / 2 ** i) q[i]; }", "z q[0]; p(pi / 2) q[1];"),
        ("for int i in {2, 0} cx q[i], q[1];", "cx q[2], q[1]; cx q[0], q[1];"),
        (
            "for int i in [0:1] { for int j in [i + 1:2] { cp(pi / 2 ** (j - i)) q[i], q[j]; } }",
            "cp(pi/2) q[0], q[1]; cp(pi/4) q[0], q[2]; cp(pi/2) q[1], q[2];",
        ),
        ("gate g(a) x, y { rz(a / 2) x; cx x, y; } inv @ g(3) q[0], q[1];", "cx q[0], q[1]; rz(-1.5) q[0];"),
        ("gate g a { s a; h a; } pow(2) @ g q[0]; pow(-1) @ g q[0];", "s q[0]; h q[0];"),
        (
            "gate g a, b { for int i in [1:3] { p(0.1 * i) a; h b; } } inv @ g q[0], q[1];",
            "h q[1]; p(-0.3) q[0]; h q[1]; p(-0.2) q[0]; h q[1]; p(-0.1) q[0];",
        ),
        ("gate none a { } none q; ctrl @ none q[0], q[1];", ""),
        ("gate g a, b { cx a, b; } g q[0:1], q[2];", "cx q[0], q[2]; cx q[1], q[2];"),
        (
            "def f(qubit[2] a, qubit b, angle t) { cx a[0], b; p(t) a[1]; } f(q[1:2], q[0], pi / 3);",
            "cx q[1], q[0]; p(pi / 3) q[2];",
        ),
        ("def g(qubit a) { h a; } def f(qubit[3] a, int n) { for int i in [0:n] { g(a[i]); } } f(q, 1);", "h q[0:1];"),
        ("if_is_a_gate q[0];", "x q[0];"),
        ("p(sin(pi / 6) * 4 - sqrt(4) + arccos(1) + 2 ** -1 - pow(2.0, -1) + 7 % 4 - mod(11, 8)) q[0];", ""),
        ("p(cos(0) + exp(0) + log(1) - tan(0) - arctan(0) - arcsin(0) - 2) q[0]; p(-2 ** 2 + 4) q[1];", ""),
        ("@ns.word anything at all\nx q[0];\n#pragma some words\nbarrier q; barrier;", "x q[0];"),
    ];
    for (text, plain) in pairs {
        let of = |body: &str| {
            let head = "OPENQASM 3;\ninclude \"stdgates.inc\";\ngate if_is_a_gate a { x a; }\nqubit[3] q;\n";
            matrix(&circuit(&format!("{head}{body}")))
        };
        let distance = distance(&of(text), &of(plain));
        assert!(distance < 1e-12, "{text}\ndiffers from {plain} by {distance}");
    }
}

/// `qelib1.inc` in `U` and `CX`, from the paper on version 2.
const OLD_DEFINITIONS: &str = "
gate my_u3(theta,phi,lambda) q { U(theta,phi,lambda) q; }
gate my_u2(phi,lambda) q { U(pi/2,phi,lambda) q; }
gate my_u1(lambda) q { U(0,0,lambda) q; }
gate my_cx c,t { CX c,t; }
gate my_id a { U(0,0,0) a; }
gate my_x a { my_u3(pi,0,pi) a; }
gate my_y a { my_u3(pi,pi/2,pi/2) a; }
gate my_z a { my_u1(pi) a; }
gate my_h a { my_u2(0,pi) a; }
gate my_s a { my_u1(pi/2) a; }
gate my_sdg a { my_u1(-pi/2) a; }
gate my_t a { my_u1(pi/4) a; }
gate my_tdg a { my_u1(-pi/4) a; }
gate my_rx(theta) a { my_u3(theta,-pi/2,pi/2) a; }
gate my_ry(theta) a { my_u3(theta,0,0) a; }
gate my_rz(phi) a { my_u1(phi) a; }
gate my_cz a,b { my_h b; my_cx a,b; my_h b; }
gate my_cy a,b { my_sdg b; my_cx a,b; my_s b; }
gate my_ch a,b { my_h b; my_sdg b; my_cx a,b; my_h b; my_t b; my_cx a,b; my_t b; my_h b; my_s b; my_x b; my_s a; }
gate my_ccx a,b,c
{
  my_h c; my_cx b,c; my_tdg c; my_cx a,c; my_t c; my_cx b,c; my_tdg c; my_cx a,c;
  my_t b; my_t c; my_h c; my_cx a,b; my_t a; my_tdg b; my_cx a,b;
}
gate my_crz(lambda) a,b { my_u1(lambda/2) b; my_cx a,b; my_u1(-lambda/2) b; my_cx a,b; }
gate my_cu1(lambda) a,b { my_u1(lambda/2) a; my_cx a,b; my_u1(-lambda/2) b; my_cx a,b; my_u1(lambda/2) b; }
gate my_cu3(theta,phi,lambda) c,t
{
  my_u1((lambda-phi)/2) t; my_cx c,t; my_u3(-theta/2,0,-(phi+lambda)/2) t; my_cx c,t; my_u3(theta/2,phi,0) t;
}
";

#[test]
fn the_library_of_version_2_agrees_with_its_definitions_up_to_a_global_phase() {
    let calls = [
        ("u3(0.3,0.4,0.5) q[0]", 1),
        ("u3(pi,0.4,0.5) q[0]", 1),
        ("u2(1.5,-0.5) q[1]", 1),
        ("u1(1/3) q[0]", 1),
        ("id q[0]", 1),
        ("x q[0]", 1),
        ("y q[0]", 1),
        ("z q[0]", 1),
        ("h q[0]", 1),
        ("s q[0]", 1),
        ("sdg q[0]", 1),
        ("t q[0]", 1),
        ("tdg q[0]", 1),
        ("rx(2^3/10) q[0]", 1),
        ("ry(sin(1)+ln(2)) q[0]", 1),
        ("rz(3*pi/8) q[0]", 1),
        ("cx q[1],q[0]", 2),
        ("cz q[1],q[0]", 2),
        ("cy q[1],q[0]", 2),
        ("ch q[1],q[0]", 2),
        ("ccx q[2],q[0],q[1]", 3),
        ("crz(0.9) q[0],q[1]", 2),
        ("cu1(0.9) q[0],q[1]", 2),
        ("cu3(0.9,0.2,-0.2) q[0],q[1]", 2),
        ("h q", 3),
        ("cx q[0],r", 3),
    ];
    for (call, _) in calls {
        let of = |prefix: &str| {
            let head = "OPENQASM 2.0;\ninclude \"qelib1.inc\";";
            matrix(&circuit(&format!("{head}{OLD_DEFINITIONS}qreg q[3]; qreg r[1];\n{prefix}{call};")))
        };
        let distance = distance_up_to_phase(&of(""), &of("my_"));
        assert!(distance < 1e-12, "{call} differs by {distance}");
    }
}

#[test]
fn words_of_version_3_are_names_in_version_2() {
    let text = "OPENQASM 2.0;\nqreg ctrl[2]; qreg bit[1]; creg input[1];\nCX ctrl[0],ctrl[1]; measure bit -> input;";
    let circuit = circuit(text);
    assert_eq!(circuit.qubits.iter().map(|register| register.name.as_str()).collect::<Vec<_>>(), ["ctrl", "bit"]);
    assert_eq!(circuit.gates().len(), 2);
}

/// Each gate calls the one before twice: 2^60 gates, or 2^60 calls of nothing.
#[test]
fn definitions_that_grow_without_bound_are_refused() {
    for inner in ["x a;", ""] {
        let mut text = format!("include \"stdgates.inc\";\nqubit q;\ngate g0 a {{ {inner} }}\n");
        (1..60).for_each(|at| text += &format!("gate g{at} a {{ g{0} a; g{0} a; }}\n", at - 1));
        let faults = read(&format!("{text}g59 q;"), "a.qasm", &mut Sources::new()).unwrap_err();
        assert_eq!(faults[0].code.0, "Q018");
    }
    let powers = "include \"stdgates.inc\";\nqubit q;\npow(9223372036854775807) @ U(1, 2, 3) q;";
    assert_eq!(read(powers, "a.qasm", &mut Sources::new()).unwrap_err()[0].code.0, "Q018");
    let mut deep = "include \"stdgates.inc\";\nqubit q;\ngate g0 a { }\n".to_owned();
    (1..1000).for_each(|at| deep += &format!("gate g{at} a {{ g{} a; }}\n", at - 1));
    let faults = read(&deep, "a.qasm", &mut Sources::new()).unwrap_err();
    assert_eq!(faults.iter().map(|fault| fault.code.0).collect::<Vec<_>>(), ["Q026"]);
}

/// A definition with a mistake is not called by anything, so that a later one of its name cannot close a circle.
#[test]
fn definitions_never_call_themselves() {
    let texts = [
        "gate a q { a q; }\na q;",
        "gate a q { nowhere q; }\ngate b q { a q; }\ngate a q { b q; }\na q; b q;",
        "def a(qubit q) { a(q); }\na(q);",
        "def a(qubit q) { nowhere q; }\ndef b(qubit q) { a(q); }\ndef a(qubit q) { b(q); }\na(q); b(q);",
    ];
    for text in texts {
        let faults = read(&format!("qubit q;\n{text}"), "a.qasm", &mut Sources::new()).unwrap_err();
        assert_eq!(faults.iter().map(|fault| fault.code.0).collect::<Vec<_>>(), ["Q008"], "{text}");
    }
}

#[test]
fn names_are_not_known_in_their_own_declaration() {
    for text in ["let a = a;", "const int a = a;", "qubit[a] a;", "bit[a] a;", "const int a = b; const int b = a;"] {
        let faults = read(text, "a.qasm", &mut Sources::new()).unwrap_err();
        assert_eq!(faults.iter().map(|fault| fault.code.0).collect::<Vec<_>>(), ["Q006"], "{text}");
    }
}
