//! The counting engine against brute force, against laws that need no reference, and against published counts.

mod families;
mod hashing;

use std::collections::BTreeSet;
use std::path::Path;
use std::time::Duration;

use families::Formula;
use num_bigint::BigUint;
use tallymark::budget::Budget;
use tallymark::id::Id;
use tallymark::judge::count::engine::{Count, Effort, Options, OrderKind, Trace, count, count_traced};
use tallymark::problem::{BitId, BitLit};
use tallymark::random::SplitMix64;

const ORDERS: [Option<OrderKind>; 4] =
    [None, Some(OrderKind::Dynamic), Some(OrderKind::Guided), Some(OrderKind::Inputs)];

fn run(formula: &Formula, options: &Options) -> Count {
    count(&formula.clauses, formula.vars, formula.shown.as_deref(), options, &Budget::unlimited())
}

fn exact(formula: &Formula) -> BigUint {
    let answer = run(formula, &Options::default());
    assert!(answer.decided && answer.low == answer.high);
    answer.low
}

fn number(text: &str) -> BigUint {
    text.parse().unwrap()
}

/// Tries every row; the shown variables must be below 32.
fn brute(formula: &Formula) -> BigUint {
    let mask = match &formula.shown {
        None => u32::MAX,
        Some(shown) => shown.iter().fold(0, |mask, bit| mask | 1 << bit.index()),
    };
    let holds = |row: u32, lit: &BitLit| (row >> lit.bit().index() & 1 == 1) != lit.is_negated();
    let models = (0..1u32 << formula.vars)
        .filter(|&row| formula.clauses.iter().all(|clause| clause.iter().any(|lit| holds(row, lit))));
    let found: BTreeSet<u32> = models.map(|row| row & mask).collect();
    BigUint::from(found.len())
}

/// A formula of mixed clauses; small enough for brute force, too large for a single leaf table.
fn small(random: &mut SplitMix64) -> Formula {
    let vars = 8 + random.below(7) as usize;
    let ratio = 1 + random.below(4);
    let mut formula = Formula { vars, ..Formula::default() };
    for _ in 0..vars as u64 * ratio {
        let width = 2 + random.below(3);
        let clause: Vec<i64> = (0..width)
            .map(|_| {
                let var = random.below(vars as u64) as i64 + 1;
                if random.coin() { var } else { -var }
            })
            .collect();
        formula.add(&clause);
    }
    if random.coin() {
        formula.shown = Some((0..vars).filter(|_| random.coin()).map(BitId::new).collect());
    }
    formula
}

#[test]
fn equals_brute_force_with_every_order_and_effort() {
    let mut random = SplitMix64::new(1);
    for round in 0..300 {
        let formula = small(&mut random);
        let want = brute(&formula);
        for order in ORDERS {
            for effort in [Effort::Count, Effort::Models] {
                let answer = run(&formula, &Options { order, effort, ..Options::default() });
                assert!(answer.decided);
                assert_eq!(answer.low, want, "round {round} {order:?} {effort:?} {:?}", formula.clauses);
            }
        }
    }
}

/// Formulas with many components, some of them without models, so that conclusions of learnt clauses reach across them.
#[test]
fn parts_without_models_do_not_spoil_the_cache() {
    let mut random = SplitMix64::new(2);
    for round in 0..60 {
        let mut formula = Formula { vars: 18, ..Formula::default() };
        // Three groups of six variables at a hard ratio, joined by clauses through two variables.
        for group in 0..3i64 {
            for _ in 0..20 {
                let clause: Vec<i64> = (0..3)
                    .map(|_| {
                        let var = if random.below(6) == 0 {
                            1 + random.below(2) as i64
                        } else {
                            group * 6 + 1 + random.below(6) as i64
                        };
                        if random.coin() { var } else { -var }
                    })
                    .collect();
                formula.add(&clause);
            }
        }
        if random.coin() {
            formula.shown = Some((0..18).filter(|_| random.below(3) == 0).map(BitId::new).collect());
        }
        let want = brute(&formula);
        for order in ORDERS {
            let answer = run(&formula, &Options { order, ..Options::default() });
            assert_eq!(answer.low, want, "round {round} {order:?} {:?}", formula.clauses);
            let (answer, _) = traced(&formula, &Options { order, effort: Effort::Models, ..Options::default() });
            assert_eq!(answer.low, want, "round {round} {order:?} traced {:?}", formula.clauses);
        }
    }
}

/// Laws that need no reference count, on formulas beyond brute force.
#[test]
fn laws_hold_beyond_brute_force() {
    let mut random = SplitMix64::new(3);
    for round in 0..12 {
        let vars = 24 + random.below(10) as usize;
        let mut formula = families::random(vars, vars * 5 / 2, 3, 100 + round);
        if round % 2 == 1 {
            formula.shown = Some((0..vars).filter(|_| random.coin()).map(BitId::new).collect());
        }
        let base = exact(&formula);
        // A shown variable splits the count.
        let split = formula.shown.as_ref().map_or(1, |shown| shown[0].index() as i64 + 1);
        let (mut yes, mut no) = (formula.clone(), formula.clone());
        yes.add(&[split]);
        no.add(&[-split]);
        assert_eq!(exact(&yes) + exact(&no), base);
        // An unused variable doubles a plain count, and a shown one a projected count.
        let mut wider = formula.clone();
        let unused = wider.var();
        if let Some(shown) = &mut wider.shown {
            assert_eq!(
                count(&wider.clauses, wider.vars, Some(shown), &Options::default(), &Budget::unlimited()).low,
                base
            );
            shown.push(BitId::new(unused as usize - 1));
        }
        assert_eq!(exact(&wider), &base * 2u32);
        // Tautologies, repeated literals, repeated clauses and resolvents change nothing.
        let mut same = formula.clone();
        same.add(&[5, -5, 7]);
        let repeated: Vec<i64> = formula.clauses.get(0).iter().map(|lit| lit.to_dimacs()).collect();
        same.add(&[repeated.clone(), repeated.clone()].concat());
        same.add(&[repeated, vec![9]].concat());
        assert_eq!(exact(&same), base);
        // Renaming and flipping variables change nothing.
        let rename = |number: i64| {
            let var = vars as i64 + 1 - number.abs();
            if (number > 0) == (var % 3 == 0) { var } else { -var }
        };
        let mut renamed = Formula { vars, ..Formula::default() };
        for clause in formula.clauses.iter() {
            renamed.add(&clause.iter().map(|lit| rename(lit.to_dimacs())).collect::<Vec<_>>());
        }
        renamed.shown =
            formula.shown.as_ref().map(|shown| shown.iter().map(|bit| BitId::new(vars - 1 - bit.index())).collect());
        assert_eq!(exact(&renamed), base);
        // Two formulas on different variables multiply.
        let mut both = formula.clone();
        let other = families::random(13, 20, 3, 200 + round);
        for clause in other.clauses.iter() {
            let shift = |lit: &BitLit| lit.to_dimacs() + lit.to_dimacs().signum() * vars as i64;
            both.add(&clause.iter().map(shift).collect::<Vec<_>>());
        }
        both.vars += other.vars;
        if let Some(shown) = &mut both.shown {
            shown.extend((0..other.vars).map(|var| BitId::new(vars + var)));
        }
        assert_eq!(exact(&both), &base * exact(&other));
        // A defined helper variable changes nothing; a one-sided one can only raise the full count, and not the projected.
        let mut defined = formula.clone();
        let helper = defined.var();
        for clause in [[-helper, 1, 1], [-helper, 2, 2], [helper, -1, -2]] {
            defined.add(&clause);
        }
        assert_eq!(exact(&defined), base);
        let mut loose = formula.clone();
        let helper = loose.var();
        loose.add(&[-helper, 1, 2]);
        if formula.shown.is_none() {
            assert!(exact(&loose) >= base);
            loose.shown = Some((0..vars).map(BitId::new).collect());
        }
        assert_eq!(exact(&loose), base);
        // Projecting can only lower the count; on nothing it gives 1 or 0.
        let mut narrow = formula.clone();
        narrow.shown = Some(formula.shown.clone().unwrap_or_else(|| (0..vars).map(BitId::new).collect()));
        assert_eq!(exact(&narrow), base);
        narrow.shown.as_mut().unwrap().truncate(7);
        assert!(exact(&narrow) <= base);
        narrow.shown = Some(Vec::new());
        assert_eq!(exact(&narrow), BigUint::from(u32::from(base != BigUint::ZERO)));
    }
}

#[test]
fn the_complement_has_the_other_rows() {
    let mut random = SplitMix64::new(4);
    for _ in 0..40 {
        let vars = 12 + random.below(8) as usize;
        let formula = families::random(vars, vars, 3, random.next_u64());
        // not F, with one helper a clause that says "this clause is false", projected on the own variables.
        let mut other = Formula { vars, ..Formula::default() };
        let mut any = Vec::new();
        for clause in formula.clauses.iter() {
            let helper = other.var();
            any.push(helper);
            for lit in clause {
                other.add(&[-helper, -lit.to_dimacs()]);
            }
        }
        other.add(&any);
        other.shown = Some((0..vars).map(BitId::new).collect());
        assert_eq!(exact(&formula) + exact(&other), BigUint::from(1u32) << vars);
    }
}

/// Families with closed forms.
#[test]
fn closed_forms() {
    // Implication chain: n + 1.
    let chain: Vec<Vec<i64>> = (1..60).map(|var| vec![-var, var + 1]).collect();
    assert_eq!(exact(&Formula::of(60, &chain)), number("61"));
    // n disjoint clauses of two literals: 3^n.
    let disjoint: Vec<Vec<i64>> = (0..100).map(|at| vec![2 * at + 1, -(2 * at + 2)]).collect();
    assert_eq!(exact(&Formula::of(200, &disjoint)), BigUint::from(3u32).pow(100));
    // One clause of n literals: 2^n - 1.
    assert_eq!(exact(&Formula::of(40, &[(1..=40).collect()])), number("1099511627775"));
    // No clauses, no variables, an empty clause.
    assert_eq!(exact(&Formula::of(300, &[])), BigUint::from(1u32) << 300);
    assert_eq!(exact(&Formula::of(0, &[])), number("1"));
    assert_eq!(exact(&Formula::of(0, &[vec![]])), number("0"));
    assert_eq!(exact(&Formula::of(5, &[vec![]])), number("0"));
    // A fixed parity of n bits: 2^(n-1).
    assert_eq!(exact(&families::parity(64)), BigUint::from(1u32) << 63);
    // Pigeons: each in exactly one hole, n! / (n - m)!; one too many, 0.
    assert_eq!(exact(&pigeons(5, 5)), number("120"));
    assert_eq!(exact(&pigeons(4, 6)), number("360"));
    assert_eq!(exact(&pigeons(7, 6)), number("0"));
}

fn pigeons(pigeons: usize, holes: usize) -> Formula {
    let at = |pigeon: usize, hole: usize| (pigeon * holes + hole) as i64 + 1;
    let mut formula = Formula { vars: pigeons * holes, ..Formula::default() };
    for pigeon in 0..pigeons {
        formula.add(&(0..holes).map(|hole| at(pigeon, hole)).collect::<Vec<_>>());
        for hole in 0..holes {
            for other in 0..hole {
                formula.add(&[-at(pigeon, hole), -at(pigeon, other)]);
            }
            for other in 0..pigeon {
                formula.add(&[-at(pigeon, hole), -at(other, hole)]);
            }
        }
    }
    formula
}

/// Thousands of nested decisions: the recursion has the stack it needs.
#[test]
fn deep_searches() {
    let chain: Vec<Vec<i64>> = (1..6000).map(|var| vec![-var, var + 1]).collect();
    let formula = Formula::of(6000, &chain);
    let options = Options { order: Some(OrderKind::Inputs), ..Options::default() };
    let answer = run(&formula, &options);
    assert_eq!(answer.low, number("6001"));
    assert!(answer.stats.decisions > 5900, "{:?}", answer.stats);
}

/// OEIS A000170, "Number of ways of placing n nonattacking queens on an n X n board".
#[test]
fn queens() {
    for (n, want) in [(4, 2u32), (5, 10), (6, 4), (7, 40), (8, 92)] {
        assert_eq!(exact(&families::queens(n)), BigUint::from(want), "{n}");
    }
}

/// OEIS A020698 (3-colourings of the n X n grid graph): 6, 18, 246, 7812, 580986, 101596896 (from memory; 4 x 4, 6 x 6
/// and 8 x 8 were also counted by independent programs).
#[test]
fn grid_colourings() {
    let want = [(2, "18"), (3, "246"), (4, "7812"), (5, "580986"), (6, "101596896")];
    for (side, want) in want {
        assert_eq!(exact(&families::grid(side, side, 3)), number(want), "{side}");
    }
    // A path of n cells: k (k - 1)^(n - 1); a tree in general.
    assert_eq!(exact(&families::grid(40, 1, 4)), BigUint::from(4u32) * BigUint::from(3u32).pow(39));
}

/// Sums counted by dynamic programming, products by the divisors.
#[test]
fn encoded_arithmetic() {
    for seed in 1..4 {
        let (formula, weights, target) = families::subset_sum(12, 6, seed);
        let mut ways = vec![0u64; target as usize + 1];
        ways[0] = 1;
        for weight in weights {
            for sum in (weight as usize..ways.len()).rev() {
                ways[sum] += ways[sum - weight as usize];
            }
        }
        assert_eq!(exact(&formula), BigUint::from(ways[target as usize]));
    }
    for (bits, value) in [(5, 360u64), (6, 2520), (5, 961), (6, 3599)] {
        let pairs = (1..1u64 << bits).filter(|a| value % a == 0 && value / a < 1 << bits).count();
        assert_eq!(exact(&families::product(bits, value)), BigUint::from(pairs), "{value}");
    }
}

/// The instances in the repository: made for it, each counted by two or more independent programs or by a closed form.
#[test]
fn own_instances() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests");
    let counted = count_folder(&root.join("instances"), &root.join("cases/engine/counts.json"));
    assert!(counted >= 25, "only {counted} files were counted");
}

/// Every well-formed file of the shared collection, where there is one.
#[test]
#[allow(clippy::print_stdout, reason = "a test says what it skipped")]
fn shared_instances() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("../shared/instances");
    if !folder.join("index.json").exists() {
        println!("skipped: there is no folder of shared instances");
        return;
    }
    let counted = count_folder(&folder, &folder.join("index.json"));
    assert!(counted >= 60, "only {counted} files were counted");
}

/// Counts every file of a list, plain and projected; says how many there were.
fn count_folder(folder: &Path, index: &Path) -> usize {
    let index: serde_json::Value = serde_json::from_str(&std::fs::read_to_string(index).unwrap()).unwrap();
    let mut counted = 0;
    for entry in index.as_array().unwrap().iter().filter(|entry| entry["expect"] == "ok") {
        let file = entry["file"].as_str().unwrap();
        let formula = read(&String::from_utf8_lossy(&std::fs::read(folder.join(file)).unwrap()));
        let plain = Formula { shown: None, ..formula.clone() };
        for (formula, want) in [(&plain, &entry["count"]), (&formula, &entry["projected_count"])] {
            if let Some(want) = want.as_str() {
                check(file, formula, &number(want));
                counted += 1;
            }
        }
    }
    counted
}

/// The count, or, where it would take long on a slow build, bounds that hold.
#[allow(clippy::print_stdout, reason = "a test says what it left undecided")]
fn check(name: &str, formula: &Formula, want: &BigUint) {
    let budget = Budget::unlimited().within(Duration::from_secs(10));
    let answer = count(&formula.clauses, formula.vars, formula.shown.as_deref(), &Options::default(), &budget);
    assert!(answer.low <= *want && *want <= answer.high, "{name}: {want} is not in {answer:?}");
    if !answer.decided {
        println!("undecided within the time of this test: {name}, {} to {}", answer.low, answer.high);
    }
    assert!(!answer.decided || answer.low == answer.high, "{name}");
}

/// A bare reader of well-formed files, so that nothing but the engine is tested.
fn read(text: &str) -> Formula {
    let mut formula = Formula::default();
    let mut clause = Vec::new();
    for line in text.lines() {
        let words: Vec<&str> = line.split_whitespace().collect();
        match words[..] {
            ["p", "cnf", vars, _] => formula.vars = vars.parse().unwrap(),
            ["c", "p", "show", ref shown @ ..] => {
                let bits = shown.iter().filter_map(|word| word.parse::<usize>().ok()).filter(|&var| var > 0);
                formula.shown.get_or_insert_default().extend(bits.map(|var| BitId::new(var - 1)));
            }
            ["%"] => break,
            ["c", ..] | [] => {}
            _ => {
                for number in words.iter().map(|word| word.parse::<i64>().unwrap()) {
                    if number == 0 {
                        formula.add(&std::mem::take(&mut clause));
                    } else {
                        clause.push(number);
                    }
                }
            }
        }
    }
    formula
}

#[test]
fn a_small_cache_evicts_and_stays_right() {
    let formula = families::random(40, 80, 3, 5);
    let want = run(&formula, &Options::default());
    let tight = run(&formula, &Options { memory: 20_000, ..Options::default() });
    assert!(tight.stats.evicted > 100, "{:?}", tight.stats);
    assert_eq!(tight.low, want.low);
    let none = run(&formula, &Options { memory: 0, ..Options::default() });
    assert_eq!((none.low, none.stats.hits), (want.low, 0));
}

#[test]
fn running_out_of_time_gives_bounds_that_hold() {
    let formula = families::grid(7, 7, 3);
    let want = exact(&formula);
    // Stopped by a listener after so many reports: the same place on every machine.
    for stop in [1, 3, 6, 10] {
        let reports = std::sync::atomic::AtomicUsize::new(0);
        let base = Budget::unlimited();
        let flag = base.cancel_flag();
        let budget = base.with_listener(move |_| {
            if reports.fetch_add(1, std::sync::atomic::Ordering::Relaxed) + 1 >= stop {
                flag.store(true, std::sync::atomic::Ordering::Relaxed);
            }
        });
        let answer = count(&formula.clauses, formula.vars, None, &Options::default(), &budget);
        assert!(!answer.decided && answer.low <= want && want <= answer.high, "{answer:?}");
        assert!(answer.high <= BigUint::from(1u32) << 98, "colours that others determine are not free");
    }
    let budget = Budget::unlimited();
    budget.cancel();
    let answer = count(&formula.clauses, formula.vars, None, &Options::default(), &budget);
    assert!(answer.low <= want && want <= answer.high);
}

/// A listener that keeps the circuit.
#[derive(Default)]
struct Recorder {
    nodes: Vec<Node>,
}

#[derive(Debug)]
enum Node {
    Nothing,
    All(Vec<BitLit>, Vec<usize>),
    Either(BitId, usize, usize),
    Witness(Vec<BitLit>),
}

impl Recorder {
    fn push(&mut self, node: Node) -> usize {
        self.nodes.push(node);
        self.nodes.len() - 1
    }
}

impl Trace for Recorder {
    type Node = usize;
    const LISTENS: bool = true;

    fn nothing(&mut self) -> usize {
        self.push(Node::Nothing)
    }
    fn all(&mut self, implied: &[BitLit], parts: &[usize]) -> usize {
        self.push(Node::All(implied.to_vec(), parts.to_vec()))
    }
    fn either(&mut self, bit: BitId, when_true: usize, when_false: usize) -> usize {
        self.push(Node::Either(bit, when_true, when_false))
    }
    fn witness(&mut self, values: &[BitLit]) -> usize {
        self.push(Node::Witness(values.to_vec()))
    }
}

fn traced(formula: &Formula, options: &Options) -> (Count, (Recorder, Option<usize>)) {
    let mut recorder = Recorder::default();
    let shown = formula.shown.as_deref();
    let (answer, root) =
        count_traced(&formula.clauses, formula.vars, shown, options, &Budget::unlimited(), &mut recorder);
    (answer, (recorder, root))
}

/// What the trace says of one node: its count over the shown variables it mentions, and all variables it mentions.
fn recount(nodes: &[Node], shown: &dyn Fn(usize) -> bool) -> Vec<(BigUint, BTreeSet<usize>)> {
    let mut known: Vec<(BigUint, BTreeSet<usize>)> = Vec::new();
    let widened = |(count, vars): &(BigUint, BTreeSet<usize>), to: &BTreeSet<usize>| {
        count << to.difference(vars).filter(|&&var| shown(var)).count()
    };
    for node in nodes {
        let entry = match node {
            Node::Nothing => (BigUint::ZERO, BTreeSet::new()),
            Node::All(lits, parts) => {
                let mut vars: BTreeSet<usize> = lits.iter().map(|lit| lit.bit().index()).collect();
                assert_eq!(vars.len(), lits.len(), "a literal comes once");
                let mut count = BigUint::from(1u32);
                for &part in parts {
                    count *= &known[part].0;
                    assert!(vars.is_disjoint(&known[part].1), "parts share no variable");
                    vars.extend(&known[part].1);
                }
                (count, vars)
            }
            Node::Either(bit, yes, no) => {
                let mut vars: BTreeSet<usize> = known[*yes].1.union(&known[*no].1).copied().collect();
                vars.insert(bit.index());
                for (side, value) in [(*yes, true), (*no, false)] {
                    let states = |node: &Node| match node {
                        Node::Nothing => true,
                        Node::All(lits, _) => lits.contains(&BitLit::new(*bit, value)),
                        _ => false,
                    };
                    assert!(states(&nodes[side]), "each side states its value");
                }
                (widened(&known[*yes], &vars) + widened(&known[*no], &vars), vars)
            }
            Node::Witness(values) => (BigUint::from(1u32), values.iter().map(|lit| lit.bit().index()).collect()),
        };
        known.push(entry);
    }
    known
}

/// The trace is a decomposable circuit with deterministic decisions, and its count is the count.
#[test]
fn the_trace_counts_by_itself() {
    let mut random = SplitMix64::new(6);
    let mut decisions = 0;
    for round in 0..120 {
        let formula = small(&mut random);
        let want = brute(&formula);
        let options = Options { order: ORDERS[round % 4], effort: Effort::Models, ..Options::default() };
        let (answer, (recorder, root)) = traced(&formula, &options);
        assert_eq!(answer.low, want);
        let shown = |var: usize| formula.shown.as_ref().is_none_or(|shown| shown.contains(&BitId::new(var)));
        let known = recount(&recorder.nodes, &shown);
        let (count, vars) = &known[root.unwrap()];
        let free = (0..formula.vars).filter(|var| shown(*var) && !vars.contains(var)).count();
        assert_eq!(count << free, want, "round {round}: {:?}", formula.clauses);
        decisions += recorder.nodes.iter().filter(|node| matches!(node, Node::Either(..))).count();
    }
    assert!(decisions > 500);
}

/// The cache changes no count: groups of variables at a hard ratio, joined through a few others, so that parts without
/// models and learnt clauses over several parts come up. Traced, so that no truth table cuts the search short.
#[test]
fn the_cache_changes_no_count() {
    for seed in 0..150 {
        let mut random = SplitMix64::new(seed);
        let groups = 2 + random.below(3) as i64;
        let size = 5 + random.below(6) as i64;
        let bridge = 2 + random.below(4) as i64;
        let mut formula = Formula { vars: (bridge + groups * size) as usize, ..Formula::default() };
        for group in 0..groups {
            for _ in 0..size * (30 + random.below(20) as i64) / 10 {
                let mut lit = || {
                    let near = 1 + random.below(bridge as u64) as i64;
                    let own = bridge + group * size + 1 + random.below(size as u64) as i64;
                    let var = if random.below(5) == 0 { near } else { own };
                    if random.coin() { var } else { -var }
                };
                let clause = [lit(), lit(), lit()];
                formula.add(&clause);
            }
        }
        for order in [Some(OrderKind::Dynamic), Some(OrderKind::Inputs)] {
            let options = Options { order, effort: Effort::Models, ..Options::default() };
            let (with, _) = traced(&formula, &options);
            let (without, _) = traced(&formula, &Options { memory: 0, ..options });
            assert_eq!(with.low, without.low, "seed {seed} {order:?}");
        }
    }
}
