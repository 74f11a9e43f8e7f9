//! The generator of the table of classes.
//!
//! Up to an affine change the first AND is that of the first two inputs. From there every product of two sums of what
//! is there is tried, AND by AND, and a function that is in no class yet begins a new one, so each class is met with the
//! fewest ANDs. Up to three ANDs nothing is left out but what is the same up to adding an affine function; the classes
//! that are left then need four by the published maximum, and a circuit for each is met among the products of a fourth.

use std::fmt::Write as _;

use rustc_hash::FxHashMap;

use super::matching::{Key, Spectrum};
use super::{INPUT_TABLES, INPUTS, Small, classes};

/// The published number of classes.
const CLASS_COUNT: usize = 48;

#[derive(Clone)]
struct Circuit {
    ands: Vec<(u16, u16)>,
    values: Vec<u32>,
}

#[derive(Default)]
struct Found {
    classes: Vec<(Circuit, u16)>,
    by_key: FxHashMap<Key, Vec<Spectrum>>,
}

impl Found {
    /// Takes the functions of a circuit that need its last AND; says whether one begins a class.
    fn take(&mut self, circuit: &Circuit, seen: &mut [u64]) -> bool {
        let count = circuit.values.len() - INPUTS;
        let before = self.classes.len();
        let last = if count == 0 { 0 } else { 1u16 << (count - 1) };
        for lower in 0..1u16 << count.saturating_sub(1) {
            let sum = (lower | last) << INPUTS;
            let table = super::added(&circuit.values, sum);
            let place = without_affine_part(table) as usize;
            if seen[place / 64] >> (place % 64) & 1 == 1 {
                continue;
            }
            seen[place / 64] |= 1 << (place % 64);
            let spectrum = Spectrum::of(table);
            let same = self.by_key.entry(spectrum.key()).or_default();
            if same.iter().all(|other| spectrum.change_from(other).is_none()) {
                same.push(spectrum);
                self.classes.push((circuit.clone(), sum));
            }
        }
        self.classes.len() > before
    }
}

/// The 26 coefficients of degree two and more of the algebraic normal form.
fn without_affine_part(table: u32) -> u32 {
    let mut form = table;
    for (at, input) in INPUT_TABLES.iter().enumerate() {
        form ^= form << (1 << at) & input;
    }
    let mut packed = 0;
    for (place, set) in (0..32u32).filter(|set| set.count_ones() > 1).enumerate() {
        packed |= (form >> set & 1) << place;
    }
    packed
}

/// The circuits with one AND more, one for each sum of the new AND and what can be added for nothing.
fn next(circuit: &Circuit, mut each: impl FnMut(Circuit)) {
    let mut known = rustc_hash::FxHashSet::default();
    let count = circuit.values.len();
    let sums: Vec<u32> = (0..1u16 << count).map(|set| super::added(&circuit.values, set)).collect();
    let old: Vec<u32> = (0..1usize << (count - INPUTS)).map(|set| without_affine_part(sums[set << INPUTS])).collect();
    for a in 1..sums.len() {
        for b in 1..a {
            let table = sums[a] & sums[b];
            // The least of what the old ANDs make of it: leaving out the affine part commutes with adding.
            let part = without_affine_part(table);
            let least = old.iter().map(|old| old ^ part).min().expect("the empty set");
            if least != 0 && known.insert(least) {
                let mut circuit = circuit.clone();
                circuit.ands.push((a as u16, b as u16));
                circuit.values.push(table);
                each(circuit);
            }
        }
    }
}

fn generate() -> String {
    let mut found = Found::default();
    let mut seen = vec![0u64; 1 << 20];
    let mut level = vec![Circuit { ands: Vec::new(), values: INPUT_TABLES.to_vec() }];
    found.take(&level[0], &mut seen);
    for count in 1..=4 {
        let mut deeper = Vec::new();
        for circuit in &level {
            next(circuit, |next| {
                let begins = found.take(&next, &mut seen);
                // The first AND is the same up to an affine change; the fourth needs not follow all circuits of three.
                if if count == 1 { deeper.is_empty() } else { count == 2 || begins } {
                    deeper.push(next);
                }
            });
            if found.classes.len() == CLASS_COUNT {
                break;
            }
        }
        level = deeper;
    }
    let mut text = String::new();
    for (circuit, sum) in &found.classes {
        let ands: Vec<String> = circuit.ands.iter().map(|(a, b)| format!("({a:#x}, {b:#x})")).collect();
        writeln!(text, "    Class {{ ands: &[{}], sum: {sum:#x} }},", ands.join(", ")).unwrap();
    }
    text
}

/// Prints what stands in `classes.rs` where it is not that.
#[test]
#[ignore = "tries all circuits of up to three ANDs: some seconds in a release build"]
fn the_table_is_what_the_generator_makes() {
    let text = generate();
    let file = include_str!("classes.rs");
    let from = file.find("    Class").unwrap_or(file.len());
    let end = file.find("];").unwrap_or(file.len());
    assert_eq!(file[from.min(end)..end].trim_end(), text.trim_end(), "\n{text}");
    assert_eq!(Small::new().classes.len(), classes::CLASSES.len());
}
