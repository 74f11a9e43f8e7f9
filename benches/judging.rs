//! The judge's sweeps: inputs a second for counting, for truth tables and for the exhaustive audit.
//!
//! The audited circuit is a plain one: random 3-SAT over 30 bits with 120 clauses, every clause into
//! an ancilla, the conjunction in a chain, one sign, and everything undone; 2^24 of its inputs are tried (a problem of 24
//! bits has all of them).
//!
//! Before the table, [`rates`] prints what the audit of the full 30 bits reaches by each way, beside what the machine does
//! in the same run: AND/XOR of 256 bits, and one distinct node.

mod machine;

use divan::Bencher;
use divan::counter::ItemsCount;
use tallymark::budget::Budget;
use tallymark::circuit::{Circuit, Control, Op, SEARCH, WORK};
use tallymark::id::Id;
use tallymark::judge::audit::{How, Options, Outcome, Way, audit, distinct_nodes};
use tallymark::judge::clauses::encode;
use tallymark::judge::rows;
use tallymark::places::Places;
use tallymark::problem::{BitId, BitLit, Compare, Domain, Expr, ExprId, Origin, Problem};
use tallymark::random::SplitMix64;

fn main() {
    if std::env::args().any(|arg| arg == "--bench") {
        rates();
    }
    divan::main();
}

/// Random 3-SAT; a clause has three different variables.
fn random_3_sat(bits: usize, clauses: usize, seed: u64) -> Problem {
    let mut random = SplitMix64::new(seed);
    let mut problem = Problem::new();
    problem.add_numbered_vars(bits);
    for _ in 0..clauses {
        let mut vars: Vec<usize> = Vec::new();
        while vars.len() < 3 {
            let var = random.below(bits as u64) as usize;
            if !vars.contains(&var) {
                vars.push(var);
            }
        }
        vars.into_iter().for_each(|var| problem.clauses.push_lit(BitLit::new(BitId::new(var), random.coin())));
        problem.clauses.end_clause();
    }
    problem
}

/// The oracle of a clause problem in X, CCX and Z: two ANDs a clause, a chain of ANDs, and the mirror.
fn oracle(problem: &Problem) -> Circuit {
    let mut circuit = Circuit::new();
    let clauses = problem.clauses.len();
    let search = circuit.add_qubits(SEARCH, problem.bit_count());
    let work = circuit.add_qubits(WORK, 2 * clauses + 1);
    let (scratch, ends) = work.split_at(1);
    let (values, chain) = ends.split_at(clauses);
    let mut forward = Vec::new();
    for (clause, &value) in problem.clauses.iter().zip(values) {
        let turns: Vec<_> =
            clause.iter().filter(|lit| !lit.is_negated()).map(|lit| search[lit.bit().index()]).collect();
        let [a, b, c] = [0, 1, 2].map(|at| Control::on(search[clause[at].bit().index()]));
        turns.iter().for_each(|&qubit| forward.push((vec![], qubit)));
        forward.push((vec![a, b], scratch[0]));
        forward.push((vec![Control::on(scratch[0]), c], value));
        forward.push((vec![a, b], scratch[0]));
        forward.push((vec![], value));
        turns.iter().for_each(|&qubit| forward.push((vec![], qubit)));
    }
    forward.push((vec![Control::on(values[0]), Control::on(values[1])], chain[1]));
    for at in 2..clauses {
        forward.push((vec![Control::on(chain[at - 1]), Control::on(values[at])], chain[at]));
    }
    forward.iter().for_each(|(controls, target)| circuit.push(Op::X, controls, *target));
    circuit.push(Op::Z, &[], chain[clauses - 1]);
    forward.iter().rev().for_each(|(controls, target)| circuit.push(Op::X, controls, *target));
    circuit
}

/// A subset sum: weights on the bits reach exactly half of their sum, or one less.
fn subset_sum(bits: usize) -> Problem {
    let mut random = SplitMix64::new(7);
    let mut problem = Problem::new();
    let mut parts: Vec<ExprId> = Vec::new();
    let mut total = 0;
    for at in 0..bits {
        let var = problem.add_var(format!("take{at}"), Domain::YesNo, None);
        let weight = 1 + random.below(255) as i64;
        total += weight;
        let taken = problem.exprs.node(Expr::Var(var));
        let taken = problem.exprs.node(Expr::AsNumber(taken));
        let weight = problem.exprs.node(Expr::Number(weight));
        parts.push(problem.exprs.node(Expr::Product(taken, weight)));
    }
    let sum = problem.exprs.over(Expr::Sum, &parts);
    let half = problem.exprs.node(Expr::Number(total / 2));
    let equal = problem.exprs.node(Expr::Compare(Compare::Eq, sum, half));
    problem.must(equal, Origin::default());
    problem
}

/// Counting random 3-SAT at ratio 4, over all bit strings; most blocks are skipped together.
#[divan::bench(args = [24, 28, 30, 36], sample_count = 5)]
fn count_3_sat(bencher: Bencher, bits: usize) {
    let problem = random_3_sat(bits, 4 * bits, 1);
    let budget = Budget::unlimited();
    bencher.counter(ItemsCount::new(1u64 << bits)).bench(|| rows::count(&problem, 2, 1000, &budget));
}

/// Counting a subset sum of 8-bit weights: nothing can be skipped.
#[divan::bench(args = [20, 24], sample_count = 5)]
fn count_subset_sum(bencher: Bencher, bits: usize) {
    let problem = subset_sum(bits);
    let budget = Budget::unlimited();
    bencher.counter(ItemsCount::new(1u64 << bits)).bench(|| rows::count(&problem, 1, 1000, &budget));
}

/// The truth table of a subset sum.
#[divan::bench(args = [24], sample_count = 5)]
fn truth_of_subset_sum(bencher: Bencher, bits: usize) {
    let problem = subset_sum(bits);
    let searched: Vec<BitId> = problem.bits().collect();
    bencher.counter(ItemsCount::new(1u64 << bits)).bench(|| rows::truth(&problem, &searched));
}

/// The parity of the clauses instead of their conjunction: every node counts on every input, and nothing can be cut off.
fn parity(clauses: &Problem) -> (Problem, Circuit) {
    let mut problem = Problem::new();
    let bits = clauses.bit_count();
    let vars: Vec<ExprId> = (0..bits)
        .map(|at| {
            let var = problem.add_var(format!("x{at}"), Domain::YesNo, None);
            problem.exprs.node(Expr::Var(var))
        })
        .collect();
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits(SEARCH, bits);
    let mut parts = Vec::new();
    for clause in clauses.clauses.iter() {
        let mut lits = Vec::new();
        for lit in clause {
            let var = vars[lit.bit().index()];
            lits.push(if lit.is_negated() { problem.exprs.node(Expr::Not(var)) } else { var });
        }
        parts.push(problem.exprs.over(Expr::Some, &lits));
        // The parity of the clauses that fail is that of those that hold: their number is even.
        let [a, b, c] = [0, 1, 2].map(|at| Control::new(search[clause[at].bit().index()], clause[at].is_negated()));
        let flips = c.is_negated();
        (0..u8::from(flips)).for_each(|_| circuit.push(Op::X, &[], c.qubit()));
        circuit.push(Op::Z, &[a, b], c.qubit());
        (0..u8::from(flips)).for_each(|_| circuit.push(Op::X, &[], c.qubit()));
    }
    let odd = problem.exprs.over(Expr::Odd, &parts);
    problem.must(odd, Origin::default());
    (problem, circuit)
}

/// Prints inputs a second of the audit by each way, beside the machine's own rates of the same run.
#[expect(clippy::print_stdout, reason = "a bench prints what it measured")]
fn rates() {
    let bits = 30;
    let machine = machine::measure();
    println!(
        "machine, one core: {:.2} G AND/XOR of 256 bits a second, on rows in the first cache",
        machine.and_xor / 1e9
    );
    println!("one distinct node, one core: {:.0} G inputs a second", machine.node / 1e9);
    let clauses = random_3_sat(bits, 4 * bits, 3);
    let (parity, of_parity) = parity(&clauses);
    for (name, problem, circuit) in [("3-SAT", &clauses, oracle(&clauses)), ("parity of clauses", &parity, of_parity)] {
        let places = Places::as_given(problem);
        let nodes = distinct_nodes(problem, &places, &circuit).expect("an oracle").expect("it is read symbolically");
        println!("{name}, {bits} bits, {} gates, {nodes} distinct nodes:", circuit.gates().len());
        for (label, way, threads) in [
            ("every gate", Way::Gates, 1),
            ("distinct nodes", Way::Nodes, 1),
            ("distinct nodes", Way::Nodes, 2),
            ("by structure", Way::Best, 1),
        ] {
            let options = Options { threads, way, exhaustive_bits: 30, ..Options::default() };
            let mut how = None;
            let runs = if way == Way::Gates { 1 } else { 5 };
            let seconds = machine::seconds(threads, runs, || {
                let verdict = audit(problem, &places, &circuit, &options, &Budget::unlimited()).expect("an oracle");
                assert_eq!(verdict.outcome, Outcome::Equal);
                how = Some(verdict.how);
            });
            if how == Some(How::Symbolic) {
                println!("  {label}: {:.2} ms for all of them", seconds * 1e3);
                continue;
            }
            let rate = 2f64.powi(bits as i32) / seconds;
            // The problem's own reading has as many nodes, and is evaluated beside the circuit's.
            let share = rate * 2.0 * nodes as f64 / (machine.node * threads as f64);
            print!("  {label}, {threads} threads: {:.2} G inputs a second", rate / 1e9);
            match way {
                Way::Nodes => println!("; that is {share:.2} of the rate of one node, for {} nodes", 2 * nodes),
                _ => println!(),
            }
        }
    }
}

/// Every input of the plain oracle (24 bits, 120 clauses, about 1900 gates), on 1 and 2 threads.
#[divan::bench(args = [(1, Way::Gates), (2, Way::Gates), (1, Way::Nodes), (2, Way::Nodes), (1, Way::Best)], sample_count = 5)]
fn audit_oracle(bencher: Bencher, (threads, way): (usize, Way)) {
    let problem = random_3_sat(24, 120, 3);
    let (places, circuit) = (Places::as_given(&problem), oracle(&problem));
    let options = Options { threads, way, ..Options::default() };
    let budget = Budget::unlimited();
    bencher.counter(ItemsCount::new(1u64 << 24)).bench(|| {
        let verdict = audit(&problem, &places, &circuit, &options, &budget).expect("an oracle");
        assert_eq!(verdict.outcome, Outcome::Equal);
    });
}

/// The clause form of a million clauses.
#[divan::bench(sample_count = 5)]
fn encode_a_million_clauses(bencher: Bencher) {
    let problem = random_3_sat(250_000, 1_000_000, 5);
    bencher.counter(ItemsCount::new(1_000_000u64)).bench(|| encode(&problem));
}
