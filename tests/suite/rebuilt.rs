//! Circuits that compute the right function in another way than the problem says it: the proof has to find that out.
//!
//! Each is judged by proof alone, and once more with something wrong in it. Larger ones are tests that are ignored every
//! day; they run in `.ci/deep`.

mod net;

use net::{Lit, NO, Net};
use tallymark::budget::Budget;
use tallymark::circuit::Circuit;
use tallymark::judge::audit::{How, Options, Outcome, Way, audit};
use tallymark::places::Places;
use tallymark::problem::{BitLit, Problem};
use tallymark::random::SplitMix64;
use tallymark::sat::check::check;

type Clauses = Vec<Vec<i64>>;

fn problem_of(vars: usize, clauses: &Clauses) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(vars);
    for clause in clauses {
        clause.iter().for_each(|&lit| problem.clauses.push_lit(BitLit::from_dimacs(lit).expect("not 0")));
        problem.clauses.end_clause();
    }
    problem
}

/// The right circuit is proven equal with a proof that is accepted; the wrong one is shown to differ.
#[track_caller]
fn judge(problem: &Problem, right: &Circuit, wrong: &Circuit) {
    let options = Options { exhaustive_bits: 0, exhaustive_work: 0, sample: 0, way: Way::Gates, ..Options::default() };
    let places = Places::as_given(problem);
    let judge = |circuit| audit(problem, &places, circuit, &options, &Budget::unlimited()).expect("an oracle");
    let verdict = judge(right);
    assert_eq!((verdict.outcome, verdict.how), (Outcome::Equal, How::Proof), "{:?}", verdict.notes);
    let certificate = verdict.certificate.expect("a proof");
    assert!(check(&certificate.formula, &certificate.proof, &Budget::unlimited()).is_ok());
    assert_eq!(judge(wrong).outcome, Outcome::Differs);
}

/// No two of these bits: a clause for each pair.
fn pairs(bits: &[usize]) -> Clauses {
    let pair = |at: usize| bits[..at].iter().map(move |&other| vec![-(bits[at] as i64 + 1), -(other as i64 + 1)]);
    (0..bits.len()).flat_map(pair).collect()
}

fn literals(clause: &[i64], net: &Net) -> Vec<Lit> {
    clause.iter().map(|&lit| net.input(lit.unsigned_abs() as usize - 1) ^ usize::from(lit < 0)).collect()
}

/// Clauses for pairs, a circuit that counts.
fn at_most_one(bits: usize) {
    let problem = problem_of(bits, &pairs(&(0..bits).collect::<Vec<_>>()));
    let oracle = |most| {
        let mut net = Net::over(bits);
        let weight = net.weight(&net.inputs(0..bits));
        let root = net.at_most(&weight, most);
        net.oracle(root)
    };
    judge(&problem, &oracle(1), &oracle(2));
}

/// One in each row and each column: clauses, and counts that are 1.
fn permutations(size: usize) {
    let rows = (0..size).map(|row| (0..size).map(|column| row * size + column).collect::<Vec<_>>());
    let columns = (0..size).map(|column| (0..size).map(|row| row * size + column).collect::<Vec<_>>());
    let lines: Vec<Vec<usize>> = rows.chain(columns).collect();
    let some = |line: &Vec<usize>| line.iter().map(|&at| at as i64 + 1).collect::<Vec<_>>();
    let clauses = lines.iter().flat_map(|line| pairs(line).into_iter().chain([some(line)])).collect();
    let oracle = |lines: &[Vec<usize>]| {
        let mut net = Net::over(size * size);
        let mut counts = Vec::new();
        for line in lines {
            let weight = net.weight(&net.inputs(line.iter().copied()));
            counts.push(net.is(&weight, 1));
        }
        let root = net.all(&counts);
        net.oracle(root)
    };
    judge(&problem_of(size * size, &clauses), &oracle(&lines), &oracle(&lines[..2 * size - 2]));
}

/// All clauses that forbid the other parity of some bits.
fn parity(bits: &[usize], odd: bool) -> Clauses {
    let forbidden = (0..1_u32 << bits.len()).filter(|values| (values.count_ones() % 2 == 1) != odd);
    let clause = |values: u32| {
        let lit = |(at, &bit): (usize, &usize)| (bit as i64 + 1) * if values >> at & 1 == 1 { -1 } else { 1 };
        bits.iter().enumerate().map(lit).collect()
    };
    forbidden.map(clause).collect()
}

/// Equations as clauses; a circuit that checks the equations that elimination leaves.
fn eliminated(bits: usize, count: usize, width: usize) {
    let mut random = SplitMix64::new(11);
    let (mut clauses, mut rows) = (Vec::new(), Vec::<(u128, bool)>::new());
    while rows.len() < count {
        let mut terms: Vec<usize> = Vec::new();
        while terms.len() < width {
            let bit = random.below(bits as u64) as usize;
            if !terms.contains(&bit) {
                terms.push(bit);
            }
        }
        let odd = random.coin();
        clauses.extend(parity(&terms, odd));
        rows.push((terms.iter().map(|&bit| 1 << bit).sum(), odd));
    }
    for at in 0..rows.len() {
        let (row, odd) = rows[at];
        for other in (0..rows.len()).filter(|&other| row != 0 && other != at) {
            if rows[other].0 >> row.trailing_zeros() & 1 == 1 {
                rows[other] = (rows[other].0 ^ row, rows[other].1 != odd);
            }
        }
    }
    let oracle = |rows: &[(u128, bool)]| {
        let mut net = Net::over(bits);
        let mut sums = Vec::new();
        for &(row, odd) in rows.iter().filter(|row| **row != (0, false)) {
            let sum = net.odd(&net.inputs((0..bits).filter(|bit| row >> bit & 1 == 1)));
            sums.push(sum ^ usize::from(!odd));
        }
        let root = net.all(&sums);
        net.oracle(root)
    };
    let last = rows.iter().rposition(|row| row.0 != 0).expect("an equation");
    judge(&problem_of(bits, &clauses), &oracle(&rows), &oracle(&rows[..last]));
}

/// Clauses with a bit as a selection between those with and those without its negation: `B xor a (B xor C)`.
fn selections(bits: usize, count: usize) {
    let mut random = SplitMix64::new(5);
    let hidden: Vec<bool> = (0..bits).map(|_| random.coin()).collect();
    let mut clauses: Clauses = Vec::new();
    while clauses.len() < count {
        let lit = |random: &mut SplitMix64| (random.below(bits as u64) as i64 + 1) * if random.coin() { 1 } else { -1 };
        let clause: Vec<i64> = (0..3).map(|_| lit(&mut random)).collect();
        let repeats = clause.iter().enumerate().any(|(at, a)| clause[..at].iter().any(|b| a.abs() == b.abs()));
        if !repeats && clause.iter().any(|lit| hidden[lit.unsigned_abs() as usize - 1] == (*lit > 0)) {
            clauses.push(clause);
        }
    }
    let oracle = |mut rest: Clauses| {
        let mut net = Net::over(bits);
        let mut parts = Vec::new();
        for bit in 1..=bits as i64 {
            let sides = [bit, -bit].map(|lit| {
                let (with, others) = rest.iter().cloned().partition::<Clauses, _>(|clause| clause.contains(&lit));
                rest = others;
                let shorter = with.iter().map(|clause| clause.iter().copied().filter(|&other| other != lit).collect());
                shorter.collect::<Clauses>()
            });
            let [without, with] = sides.map(|side: Clauses| {
                let clauses: Vec<Lit> = side.iter().map(|clause| net.any(&literals(clause, &net))).collect();
                net.all(&clauses)
            });
            let change = net.xor(without, with);
            let change = net.and(net.input(bit as usize - 1), change);
            parts.push(net.xor(without, change));
        }
        let root = net.all(&parts);
        net.oracle(root)
    };
    let fewer = clauses[1..].to_vec();
    judge(&problem_of(bits, &clauses), &oracle(clauses), &oracle(fewer));
}

/// Two numbers and their sum, with every carry a bit: the clauses of full adders; the circuit adds and compares.
fn addition(width: usize) {
    let [a, b, sum, carry] = [0, 1, 2, 3].map(|part| move |at: usize| part * width + at);
    let mut clauses = Clauses::new();
    for at in 0..width {
        let before: Vec<usize> = if at == 0 { vec![] } else { vec![carry(at - 1)] };
        clauses.extend(parity(&[&[a(at), b(at), sum(at)][..], &before].concat(), false));
        let three: Vec<i64> = [a(at), b(at)].iter().chain(&before).map(|&bit| bit as i64 + 1).collect();
        let out = carry(at) as i64 + 1;
        for left_out in 0..3 {
            let two: Vec<i64> =
                three.iter().enumerate().filter(|&(at, _)| at != left_out).map(|(_, &lit)| lit).collect();
            // Without a carry before, that one is "no": one of the two is enough for "no" and both for "yes".
            if three.len() == 3 || left_out == 2 {
                clauses.push(two.iter().map(|lit| -lit).chain([out]).collect());
            }
            if three.len() == 3 || left_out < 2 {
                clauses.push(two.into_iter().chain([-out]).collect());
            }
        }
    }
    let oracle = |checked: usize| {
        let mut net = Net::over(4 * width);
        let (mut out, mut equal) = (NO, Vec::new());
        for at in 0..width {
            let [a, b] = [a(at), b(at)].map(|bit| net.input(bit));
            let (found, next) = net.add_three([a, b, out]);
            out = next;
            let pairs = [(found, sum(at)), (out, carry(at))];
            equal.extend(pairs.map(|(lit, bit)| net.xor(lit, net.input(bit)) ^ 1));
        }
        let root = net.all(&equal[..checked]);
        net.oracle(root)
    };
    judge(&problem_of(4 * width, &clauses), &oracle(2 * width), &oracle(2 * width - 1));
}

#[test]
fn small_ones_are_decided() {
    at_most_one(9);
    permutations(3);
    eliminated(16, 9, 3);
    selections(18, 40);
    addition(4);
}

#[test]
#[ignore = "seconds each in a release build: see .ci/deep"]
fn large_ones_are_decided() {
    at_most_one(40);
    permutations(8);
    eliminated(100, 60, 4);
    selections(300, 1000);
    addition(32);
}
