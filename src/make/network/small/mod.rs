//! Functions of up to five inputs at their least number of ANDs.
//!
//! Takes: a truth table of 32 bits (bit *i* is the value where input *j* is bit *j* of *i*) and literals for the inputs.
//! Gives: how few ANDs it needs, and nodes that compute it with so many.
//! Holds: no circuit of ANDs, XORs and complements has fewer ANDs.
//!
//! The number of ANDs does not change under affine changes of the inputs and when an affine function is added, and up to
//! those there are only 48 functions of five inputs, none of which needs more than four ANDs (M. Sonmez Turan, R.
//! Peralta, "The multiplicative complexity of Boolean functions on four and five variables", LightSec 2014).
//! [`classes`] holds one circuit for each of them, [`matching`] finds the affine change that leads from a function to
//! the one of its class. The generator of the table is the ignored test in `generate.rs`.

mod classes;
#[cfg(test)]
mod generate;
mod matching;

use rustc_hash::FxHashMap;

use super::Lit;
use super::builder::Builder;
use matching::{Change, Spectrum};

/// Inputs of a function of the table.
pub(super) const INPUTS: usize = 5;

/// The truth tables of the five inputs.
pub(super) const INPUT_TABLES: [u32; INPUTS] = [0xaaaa_aaaa, 0xcccc_cccc, 0xf0f0_f0f0, 0xff00_ff00, 0xffff_0000];

/// One class: a circuit for one function of it.
///
/// An operand is a set of what is added up: bits 0 to 4 are the inputs, bit 5 + *j* is the AND at place *j*.
struct Class {
    ands: &'static [(u16, u16)],
    /// The function is the sum of these.
    sum: u16,
}

impl Class {
    fn table(&self) -> u32 {
        let mut values = INPUT_TABLES.to_vec();
        for &(a, b) in self.ands {
            values.push(added(&values, a) & added(&values, b));
        }
        added(&values, self.sum)
    }
}

fn added(values: &[u32], set: u16) -> u32 {
    values.iter().enumerate().filter(|&(at, _)| set >> at & 1 == 1).fold(0, |sum, (_, value)| sum ^ value)
}

/// The table of classes, made ready for looking up.
pub(super) struct Small {
    classes: Vec<(&'static Class, Spectrum)>,
    /// The places of the classes with the same invariants.
    by_key: FxHashMap<matching::Key, Vec<usize>>,
    found: FxHashMap<u32, (usize, Change)>,
    counted: FxHashMap<u32, u8>,
}

impl Small {
    /// The table.
    pub(super) fn new() -> Self {
        let classes: Vec<_> = classes::CLASSES.iter().map(|class| (class, Spectrum::of(class.table()))).collect();
        let mut by_key: FxHashMap<_, Vec<usize>> = FxHashMap::default();
        for (at, (_, spectrum)) in classes.iter().enumerate() {
            by_key.entry(spectrum.key()).or_default().push(at);
        }
        Self { classes, by_key, found: FxHashMap::default(), counted: FxHashMap::default() }
    }

    /// The least number of ANDs.
    pub(super) fn ands(&mut self, table: u32) -> usize {
        if let Some(&count) = self.counted.get(&table) {
            return usize::from(count);
        }
        let same = &self.by_key[&Spectrum::of(table).key()];
        let counts = |at: usize| self.classes[at].0.ands.len();
        let count = match same.iter().all(|&at| counts(at) == counts(same[0])) {
            true => counts(same[0]),
            false => self.class(table).0.ands.len(),
        };
        self.counted.insert(table, count as u8);
        count
    }

    /// Nodes for the function of these literals; inputs beyond the last literal do not matter to it.
    pub(super) fn build(&mut self, builder: &mut Builder, table: u32, inputs: &[Lit]) -> Lit {
        let (class, change) = self.class(table);
        let input = |at: usize| inputs.get(at).copied().unwrap_or(Lit::NO);
        let sum = |builder: &mut Builder, set: u32| {
            (0..INPUTS).filter(|at| set >> at & 1 == 1).fold(Lit::NO, |sum, at| builder.xor(sum, input(at)))
        };
        let mut values: Vec<Lit> = Vec::with_capacity(INPUTS + class.ands.len());
        for at in 0..INPUTS {
            values.push(sum(builder, change.rows[at]).complement_if(change.offset >> at & 1 == 1));
        }
        let added = sum(builder, change.added).complement_if(change.complemented);
        let of = |builder: &mut Builder, values: &[Lit], set: u16| {
            (0..values.len()).filter(|at| set >> at & 1 == 1).fold(Lit::NO, |sum, at| builder.xor(sum, values[at]))
        };
        for &(a, b) in class.ands {
            let (a, b) = (of(builder, &values, a), of(builder, &values, b));
            values.push(builder.and(a, b));
        }
        let value = of(builder, &values, class.sum);
        builder.xor(value, added)
    }

    fn class(&mut self, table: u32) -> (&'static Class, Change) {
        if let Some(&(at, change)) = self.found.get(&table) {
            return (self.classes[at].0, change);
        }
        let spectrum = Spectrum::of(table);
        let same = &self.by_key[&spectrum.key()];
        let found = same.iter().find_map(|&at| Some((at, spectrum.change_from(&self.classes[at].1)?)));
        let (at, change) = found.expect("every function of five inputs is in one of the 48 classes");
        self.found.insert(table, (at, change));
        (self.classes[at].0, change)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::id::Id;
    use crate::make::network::NodeId;
    use crate::problem::{BitId, Bits};
    use crate::random::SplitMix64;

    /// The table has the published number of classes, all different, none above the published four ANDs.
    #[test]
    fn there_are_48_different_classes_of_at_most_four_ands() {
        let small = Small::new();
        assert_eq!(small.classes.len(), 48);
        for (at, (class, spectrum)) in small.classes.iter().enumerate() {
            assert!(class.ands.len() <= 4);
            for (other, _) in &small.classes[..at] {
                assert_eq!(spectrum.change_from(&Spectrum::of(other.table())), None, "classes of {at} differ");
            }
        }
    }

    #[test]
    fn a_function_is_built_as_it_is_with_the_ands_it_needs() {
        let searched: Vec<BitId> = (0..5).map(BitId::new).collect();
        let inputs: Vec<Lit> = (1..6).map(|at| Lit::new(NodeId::new(at), false)).collect();
        let mut small = Small::new();
        let mut random = SplitMix64::new(3);
        let mut most = [0; 6];
        for round in 0..600 {
            let used = round % 6;
            let mut table = random.next_u64() as u32 & random.next_u64() as u32;
            for (at, of_input) in INPUT_TABLES.iter().enumerate().skip(used) {
                let low = table & !of_input;
                table = low | low << (1 << at);
            }
            let mut builder = Builder::new(&searched);
            let lit = small.build(&mut builder, table, &inputs[..used]);
            let network = builder.finish(searched.clone(), Vec::new(), lit).0;
            for input in 0..32 {
                let holds = network.holds(&Bits::from_number(input, 5));
                assert_eq!(holds, table >> input & 1 == 1, "{table:08x} at {input:05b}");
            }
            assert!(network.and_count() <= small.ands(table), "{table:08x}");
            most[used] = most[used].max(small.ands(table));
        }
        // The published maxima for up to five inputs: n - 1.
        assert_eq!(most, [0, 0, 1, 2, 3, 4]);
    }
}
