//! Certificates: right ones hold, damaged ones are refused; tallies by value and drawn solutions against brute force.

use std::collections::BTreeMap;
use std::path::Path;

use num_bigint::BigUint;
use tallymark::budget::Budget;
use tallymark::id::Id;
use tallymark::judge::count::Over;
use tallymark::judge::count::certificate::{Certificate, Drawer, Formula, certify, check, text, values};
use tallymark::problem::{BitId, BitLit, Bits, Problem};
use tallymark::random::SplitMix64;
use tallymark::source::load;
use tallymark::span::Sources;

use super::random_problem::random_problem;

fn certified(formula: &Formula) -> Certificate {
    certify(formula, &Budget::unlimited()).expect("no budget ran out")
}

fn holds(formula: &Formula, certificate: &Certificate) -> Option<BigUint> {
    check(formula, certificate, &Budget::unlimited()).ok()
}

fn written(certificate: &Certificate) -> String {
    let mut bytes = Vec::new();
    text::write(certificate, &mut bytes).unwrap();
    String::from_utf8(bytes).unwrap()
}

/// A random formula; every other one shows only some variables.
fn random_cnf(seed: u64) -> Problem {
    let mut random = SplitMix64::new(seed);
    let vars = 3 + random.below(9);
    let mut problem = Problem::new();
    problem.add_numbered_vars(vars as usize);
    for _ in 0..random.below(3 * vars) {
        let length = 2 + random.below(3);
        let lits: Vec<BitLit> =
            (0..length).map(|_| BitLit::new(BitId::new(random.below(vars) as usize), random.coin())).collect();
        problem.clauses.push(&lits);
    }
    problem.shown = (seed % 2 == 1).then(|| problem.bits().filter(|_| random.coin()).collect());
    problem
}

/// The solutions that differ in shown bits, by these.
fn brute(problem: &Problem) -> BTreeMap<Vec<bool>, Bits> {
    let all = (0..1_u128 << problem.bit_count()).map(|number| Bits::from_number(number, problem.bit_count()));
    all.filter(|bits| problem.holds(bits)).map(|bits| (shown_of(problem, &bits), bits)).collect()
}

fn shown_of(problem: &Problem, bits: &Bits) -> Vec<bool> {
    let shown = problem.shown.clone().unwrap_or_else(|| problem.bits().collect());
    shown.iter().map(|&bit| bits.get(bit)).collect()
}

fn cases() -> impl Iterator<Item = (u64, Problem)> {
    (0..160).map(|seed| (seed, if seed % 4 < 2 { random_cnf(seed) } else { random_problem(seed) }))
}

#[test]
fn certificates_prove_the_number_of_solutions() {
    let mut zeros = 0;
    for (seed, problem) in cases() {
        let formula = Formula::of(&problem, Over::Shown);
        let certificate = certified(&formula);
        let expected = BigUint::from(brute(&problem).len());
        assert_eq!(check(&formula, &certificate, &Budget::unlimited()), Ok(expected.clone()), "seed {seed}");
        let text = written(&certificate);
        assert_eq!(text::read(&text, formula.var_count).as_ref(), Ok(&certificate), "seed {seed}\n{text}");
        zeros += usize::from(expected == BigUint::ZERO);
    }
    assert!(zeros >= 5, "{zeros} refutations");
}

#[test]
fn tallies_by_value_and_ranks_are_those_of_brute_force() {
    let mut tallied = 0;
    for (seed, problem) in cases() {
        let formula = Formula::of(&problem, Over::Shown);
        let certificate = certified(&formula);
        let solutions = brute(&problem);
        for pick in values(&problem, &formula, &certificate, &Budget::unlimited()).unwrap() {
            let counts = pick.counts.expect("few values");
            let mut expected = vec![BigUint::ZERO; counts.len()];
            solutions.values().for_each(|bits| expected[problem.code_of(pick.var, bits) as usize] += 1u32);
            assert_eq!(counts, expected, "seed {seed}, {}", problem.var_name(pick.var));
            tallied += 1;
        }
        let Some(graph) = certificate.graph() else { continue };
        let drawer = Drawer::new(&formula, graph).unwrap();
        assert_eq!(drawer.total(), &solutions.len().into());
        let mut ranked: Vec<Vec<bool>> = (0..solutions.len())
            .map(|rank| drawer.solution(rank.into()))
            .inspect(|bits| assert!(problem.holds(bits), "seed {seed}: {bits}"))
            .map(|bits| shown_of(&problem, &bits))
            .collect();
        ranked.sort_unstable();
        assert!(ranked.iter().eq(solutions.keys()), "seed {seed}: each solution has one rank");
    }
    assert!(tallied > 500, "{tallied} picks");
}

/// Each of k solutions is drawn n/k times, within five standard deviations: (k f - n)^2 <= 25 n (k - 1).
#[test]
fn solutions_are_drawn_evenly() {
    let problem = load_instance("domino-4x4.cnf");
    let formula = Formula::of(&problem, Over::Shown);
    let certificate = certified(&formula);
    let drawer = Drawer::new(&formula, certificate.graph().unwrap()).unwrap();
    let mut random = SplitMix64::new(11);
    let (solutions, draws) = (36_i64, 36_000_i64);
    let mut frequency: BTreeMap<Bits, i64> = BTreeMap::new();
    (0..draws).for_each(|_| *frequency.entry(drawer.draw(&mut random).unwrap()).or_default() += 1);
    assert_eq!(frequency.len() as i64, solutions);
    for (bits, times) in frequency {
        let off = solutions * times - draws;
        assert!(off * off <= 25 * draws * (solutions - 1), "{bits} was drawn {times} times");
    }
}

fn load_instance(name: &str) -> Problem {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/instances").join(name);
    load(path.to_str().unwrap(), &[], &mut Sources::new()).unwrap().problem
}

/// The numbers are those of the index beside the instances, which names where they come from; published are those of
/// queens (N. J. A. Sloane, OEIS A000170, from memory), sudokus of order 4 and domino tilings (OEIS A004003, from memory).
#[test]
fn certificates_prove_published_numbers() {
    for (name, expected) in [
        ("sudoku4-blank.cnf", 288_u64),
        ("domino-4x4.cnf", 36),
        ("langford-7.cnf", 52),
        ("ramsey34-k8.cnf", 17_640),
        ("schur-3-13.cnf", 18),
        ("rand3-n40-m160.cnf", 363),
        ("xor4-n40-m20.cnf", 1 << 20),
        ("mul4-143.cnf", 2),
        ("card-atmost3of12-seq-show.cnf", 299),
        ("onesided-or-3of5.cnf", 918),
        ("less5-onesided.cnf", 496),
        ("php-5-4-unsat.cnf", 0),
        ("ramsey33-k6-unsat.cnf", 0),
        ("xor3-n12-m18-unsat.cnf", 0),
        ("quirk-show-empty-unsat.cnf", 0),
    ] {
        let formula = Formula::of(&load_instance(name), Over::Shown);
        let certificate = certified(&formula);
        assert_eq!(check(&formula, &certificate, &Budget::unlimited()), Ok(expected.into()), "{name}");
        assert_eq!(certificate.graph().is_none(), expected == 0, "{name}");
    }
}

/// What a graph says of each assignment, by a reading of its text that knows nothing of the crate's.
fn models(text: &str, vars: usize) -> Option<Vec<bool>> {
    let evaluate = |code: usize| -> Option<bool> {
        let mut nodes: Vec<bool> = Vec::new();
        for line in text.lines().filter(|line| !line.starts_with(['n', 'c'])) {
            let words: Vec<i64> = line.split(' ').skip(1).map(|word| word.parse().unwrap()).collect();
            let child = |at: &i64| nodes.get(*at as usize).copied();
            let value = match line.as_bytes()[0] {
                b'L' => (code >> (words[0].abs() - 1) & 1 == 1) == (words[0] > 0),
                b'A' => words[1..].iter().map(child).collect::<Option<Vec<bool>>>()?.iter().all(|&holds| holds),
                _ => words[2..].iter().map(child).collect::<Option<Vec<bool>>>()?.iter().any(|&holds| holds),
            };
            nodes.push(value);
        }
        nodes.last().copied()
    };
    (0..1 << vars).map(evaluate).collect()
}

/// Every damage of one line, with the header set right again where the damage changes it.
fn damages(text: &str, random: &mut SplitMix64) -> Vec<String> {
    let lines: Vec<&str> = text.lines().collect();
    let join = |lines: Vec<String>| lines.join("\n") + "\n";
    let with = |at: usize, new: Option<String>, edges: i64| {
        let mut lines: Vec<String> = lines.iter().map(|&line| line.to_owned()).collect();
        let header: Vec<i64> = lines[0].split(' ').skip(1).map(|word| word.parse().unwrap()).collect();
        let dropped = i64::from(new.is_none());
        match new {
            Some(line) => lines[at] = line,
            None => _ = lines.remove(at),
        }
        lines[0] = format!("nnf {} {} {}", header[0] - dropped, header[1] + edges, header[2]);
        join(lines)
    };
    let mut all = Vec::new();
    for (at, line) in lines.iter().enumerate().skip(1) {
        let words: Vec<&str> = line.split(' ').collect();
        match words[0] {
            "L" => {
                let number: i64 = words[1].parse().unwrap();
                all.push(with(at, Some(format!("L {}", -number)), 0));
            }
            "c" => {
                let count: BigUint = words[2].parse().unwrap();
                all.push(with(at, Some(format!("c count {}", count + 1u32)), 0));
            }
            kind => {
                let first = if kind == "A" { 2 } else { 3 };
                for child in first..words.len() {
                    let mut changed: Vec<String> = words.iter().map(|&word| word.to_owned()).collect();
                    changed[child] = random.below(at as u64 - 1).to_string();
                    all.push(with(at, Some(changed.join(" ")), 0));
                    let mut fewer = words.clone();
                    fewer.remove(child);
                    let count = (fewer.len() - first).to_string();
                    fewer[first - 1] = &count;
                    all.push(with(at, Some(fewer.join(" ")), -1));
                }
            }
        }
        if !line.starts_with('c') {
            let edges =
                words.len() as i64 - [3, 2, 2][["O", "A", "L"].iter().position(|&kind| kind == words[0]).unwrap()];
            all.push(with(at, None, -edges));
        }
    }
    all
}

#[test]
fn damaged_certificates_are_refused() {
    let mut random = SplitMix64::new(5);
    let (mut refused, mut same) = (0, 0);
    for seed in (0..120).filter(|seed| seed % 4 < 2) {
        let problem = random_cnf(seed);
        let formula = Formula::of(&problem, Over::Shown);
        let certificate = certified(&formula);
        if certificate.graph().is_none() {
            continue;
        }
        let right = written(&certificate);
        let count = BigUint::from(brute(&problem).len());
        for damaged in damages(&right, &mut random) {
            let verdict = text::read(&damaged, formula.var_count).ok().and_then(|read| holds(&formula, &read));
            let Some(proved) = verdict else {
                refused += 1;
                continue;
            };
            // What is accepted is right all the same: the same count, and the same solutions.
            same += 1;
            assert_eq!(proved, count, "seed {seed}\n{right}\n{damaged}");
            let found = models(&damaged, formula.var_count).expect("it was read");
            let mut shown: Vec<Vec<bool>> = (0..found.len())
                .filter(|&code| found[code])
                .map(|code| Bits::from_number(code as u128, formula.var_count))
                .inspect(|bits| assert!(problem.holds(bits), "seed {seed}\n{damaged}"))
                .map(|bits| shown_of(&problem, &bits))
                .collect();
            shown.sort_unstable();
            shown.dedup();
            assert_eq!(BigUint::from(shown.len()), count, "seed {seed}\n{right}\n{damaged}");
        }
    }
    // Projected, one witness may take the place of another; few other changes change nothing.
    assert!(refused > 2000 && same * 20 < refused, "{refused} refused, {same} the same");
}

#[test]
fn damaged_refutations_are_refused() {
    let formula = Formula::of(&load_instance("php-5-4-unsat.cnf"), Over::Shown);
    let right = written(&certified(&formula));
    let verdict = |text: &str| {
        let read = text::read(text, formula.var_count).expect("it reads");
        check(&formula, &read, &Budget::unlimited()).map_err(|refusal| refusal.to_string())
    };
    assert_eq!(verdict(&right), Ok(BigUint::ZERO));
    assert_eq!(verdict("").unwrap_err(), "the refutation ends without a contradiction");
    assert_eq!(verdict("0\n").unwrap_err(), "step 1 of the refutation does not follow");
    assert_eq!(verdict(&format!("1 0\n{right}")).unwrap_err(), "step 1 of the refutation does not follow");
    // A satisfiable formula has no refutation, whatever the file says.
    let fewer = Formula::of(&load_instance("php-5-5.cnf"), Over::Shown);
    let foreign = text::read(&right, fewer.var_count).unwrap();
    assert!(check(&fewer, &foreign, &Budget::unlimited()).is_err());
    // A graph without models says the same as a refutation, where it is true.
    let never = |vars: usize| text::read(&format!("nnf 1 0 {vars}\nO 0 0\n"), vars).unwrap();
    assert_eq!(check(&formula, &never(formula.var_count), &Budget::unlimited()), Ok(BigUint::ZERO));
    assert!(check(&fewer, &never(fewer.var_count), &Budget::unlimited()).is_err());
}

#[test]
fn broken_texts_name_the_line() {
    for (text, message) in [
        ("", ""),
        ("nnf 1 0\nL 1\n", "line 1: expected `nnf NODES EDGES VARIABLES`"),
        ("nnf 1 0 3\nL 1\n", "line 1: the header says 3 variables, the formula has 2"),
        ("nnf 1 0 2\nL 3\n", "line 2: 3 is no literal of the formula"),
        ("nnf 1 0 2\nL 0\n", "line 2: 0 is no literal of the formula"),
        ("nnf 2 1 2\nL 1\nA 1 1\n", "line 3: the child 1 is not a node before this one"),
        ("nnf 2 2 2\nL 1\nA 2 0\n", "line 3: expected the place of a child"),
        (
            "nnf 2 2 2\nL 1\nO 1 2 0 0\n",
            "line 3: not a decision: its two sides must state the two literals of its variable",
        ),
        ("nnf 2 0 2\nL 1\n", "line 2: the header says 2 nodes, there are 1"),
        ("nnf 0 0 2\n", "line 1: there is no node"),
        ("nnf 1 0 2\nL 1 2\n", "line 2: unexpected `2` behind a complete line"),
        ("nnf 1 0 2\nM 1\n", "line 2: expected a node (`L`, `A` or `O`) or a comment (`c`)"),
        ("nnf 1 0 2\nL 1\nc count many\n", "line 3: expected the count"),
        ("nnf 99999999999 0 2\n", "line 1: 99999999999 nodes are too many to be read"),
        ("1 2\n", "line 1: expected a literal"),
    ] {
        let found = text::read(text, 2).map_or_else(|mistake| mistake.to_string(), |_| String::new());
        assert_eq!(found, message, "{text:?}");
    }
}
