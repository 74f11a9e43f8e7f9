//! Each step of the preparation against brute force, alone, and all of them together.

use super::*;
use crate::random::SplitMix64;

fn lit(number: i32) -> Lit {
    Lit::new(number.unsigned_abs() - 1, number < 0)
}

fn random_clauses(random: &mut SplitMix64, vars: u64, count: u64) -> Clauses {
    let mut clauses = Clauses::new();
    for _ in 0..count {
        for _ in 0..1 + random.below(4).max(1) {
            clauses.push_lit(BitLit::new(BitId::new(random.below(vars) as usize), random.coin()));
        }
        clauses.end_clause();
    }
    clauses
}

/// The models of the clauses that agree with what has become of the variables, projected on the variables that count.
fn projected(form: &Form, given: usize) -> std::collections::BTreeSet<u32> {
    let mut found = std::collections::BTreeSet::new();
    let mask = (0..given).filter(|&var| form.class[var] == Class::Counted).fold(0u32, |mask, var| mask | 1 << var);
    for row in 0..1u32 << given {
        let holds = |lit: &Lit| (row >> lit.var() & 1 == 1) != lit.is_negated();
        let fits = (0..given).all(|var| match form.state[var] {
            State::Fixed(value) => (row >> var & 1 == 1) == value,
            State::Same(lit) => (row >> var & 1 == 1) == holds(&lit),
            State::Open | State::Gone => true,
        });
        if !form.contradiction && fits && form.clauses.iter().all(|clause| clause.iter().any(holds)) {
            found.insert(row & mask);
        }
    }
    found
}

fn check_step(name: &str, step: impl Fn(&mut Form)) {
    let mut random = SplitMix64::new(0x5eed + name.len() as u64);
    let mut effects = 0;
    for _ in 0..400 {
        let vars = 3 + random.below(6);
        let count = 1 + random.below(3 * vars);
        let clauses = random_clauses(&mut random, vars, count);
        let shown: Vec<BitId> = (0..vars as usize).filter(|_| random.coin()).map(BitId::new).collect();
        let shown = random.coin().then_some(&shown[..]);
        let mut form = Form::new(&clauses, vars as usize, shown);
        let before = projected(&form, vars as usize);
        form.tidy();
        assert_eq!(projected(&form, vars as usize).len(), before.len(), "tidy: {clauses:?} showing {shown:?}");
        let tidied = form.clone();
        if !form.contradiction {
            step(&mut form);
        }
        effects += usize::from(form.clauses != tidied.clauses || form.class != tidied.class);
        let after = projected(&form, vars as usize);
        assert_eq!(after.len(), before.len(), "{name}: {clauses:?} showing {shown:?} became {form:?}");
    }
    assert!(effects > 20, "{name} did something in {effects} cases only");
}

#[test]
fn subsumption_keeps_the_count() {
    check_step("subsume", |form| {
        subsume::subsume(form, Effort::Count);
    });
}

#[test]
fn failed_literals_keep_the_count() {
    check_step("probe", |form| {
        probe::probe(form, Effort::Count);
    });
}

#[test]
fn merging_equal_literals_keeps_the_count() {
    check_step("equal", |form| {
        equal::merge_equal(form);
    });
}

#[test]
fn definitions_keep_the_count() {
    check_step("define", define::find_definitions);
}

#[test]
fn elimination_keeps_the_count() {
    check_step("define and eliminate", |form| {
        define::find_definitions(form);
        eliminate::eliminate(form);
    });
}

#[test]
fn with_effort_models_the_models_stay() {
    let mut random = SplitMix64::new(17);
    for _ in 0..300 {
        let vars = 3 + random.below(6) as usize;
        let count = 1 + random.below(3 * vars as u64);
        let clauses = random_clauses(&mut random, vars as u64, count);
        let prepared = prepare(&clauses, vars, None, Effort::Models, &Budget::unlimited());
        let all = 0..1u32 << vars;
        let value = |row: u32, lit: BitLit| (row >> lit.bit().index() & 1 == 1) != lit.is_negated();
        for row in all {
            let given = clauses.iter().all(|clause| clause.iter().any(|&lit| value(row, lit)));
            let own = |lit: &Lit| {
                let name = prepared.names[lit.var()];
                value(row, name) != lit.is_negated()
            };
            let left = !prepared.contradiction
                && prepared.fixed.iter().all(|&lit| value(row, lit))
                && prepared.clauses.iter().all(|clause| clause.iter().any(own));
            assert_eq!(given, left, "{clauses:?} at {row:b} became {prepared:?}");
        }
    }
}

#[test]
fn gates_of_every_kind_are_found() {
    let xor = [[1, 2, -3], [-1, -2, -3], [-1, 2, 3], [1, -2, 3]];
    let majority = [[-1, -2, 4], [-1, -3, 4], [-2, -3, 4], [1, 2, -4], [1, 3, -4], [2, 3, -4]];
    let choice = [[-1, -2, 4], [-1, 2, -4], [1, -3, 4], [1, 3, -4]];
    let of = |clauses: &[&[i32]]| {
        let mut form = Form::new(&Clauses::new(), 20, None);
        form.clauses = clauses.iter().map(|clause| clause.iter().map(|&number| lit(number)).collect()).collect();
        form.tidy();
        define::find_definitions(&mut form);
        (0..20).filter(|&var| form.class[var] == Class::Determined).map(|var| var + 1).collect::<Vec<_>>()
    };
    assert_eq!(of(&xor.each_ref().map(|clause| &clause[..])), [3]);
    assert_eq!(of(&majority.each_ref().map(|clause| &clause[..])), [4]);
    assert_eq!(of(&choice.each_ref().map(|clause| &clause[..])), [4]);
    // A wide OR: more inputs than a table holds.
    let mut wide: Vec<Vec<i32>> = (1..16).map(|input| vec![-input, 16]).collect();
    wide.push((1..16).chain([-16]).collect());
    assert_eq!(of(&wide.iter().map(Vec::as_slice).collect::<Vec<_>>()), [16]);
    // One-sided gates define nothing.
    assert_eq!(of(&[&[1, 2, -3], &[-1, -2, -3]]), [0usize; 0]);
}
