//! Adding columns of bits: the digits of a linear form, and comparing it with a constant.
//!
//! Each column is reduced by full adders, one AND each: `carry = ((x + z)(y + z)) + z` (J. Boyar, R. Peralta, "Tight
//! bounds for the multiplicative complexity of symmetric functions", Theoretical Computer Science 396, 2008). A constant
//! that is added takes the free third input of the column's last adder, so it costs nothing.
//!
//! - *At least*: with 2^t - k added, the bit of weight 2^t says "at least k". For numbers of yes/no this costs n - 1 ANDs
//!   where n is a power of two, for an n-bit number against a constant n - tz - 1, for two n-bit numbers n.
//! - *Equal*: the digits up to 2^t are compared one by one, and each digit may assume that the lower ones agree. So the
//!   last two bits of a column need no adder: their sum is known, and with it their carry.
//!
//! Both are also tried with all literals complemented, and with the weights in signed digits, in which 15 is 16 - 1 and
//! so two bits instead of four (G. W. Reitwiesner, "Binary arithmetic", Advances in Computers 1, 1960, from memory); the
//! cheapest is built.

use std::collections::VecDeque;

use super::Lit;
use super::builder::Builder;
use super::linear::{Binary, Linear, width};

/// Bits by weight: column *j* holds bits of weight 2^j.
struct Columns(Vec<VecDeque<Lit>>);

impl Columns {
    /// The bits below weight 2^count.
    fn new(terms: &[(Lit, u128)], count: usize) -> Self {
        let mut columns = vec![VecDeque::new(); count];
        for &(lit, weight) in terms {
            for (at, column) in columns.iter_mut().enumerate() {
                if bit(weight, at) {
                    column.push_back(lit);
                }
            }
        }
        Self(columns)
    }

    fn take(&mut self, at: usize) -> VecDeque<Lit> {
        std::mem::take(&mut self.0[at])
    }

    fn carry(&mut self, at: usize, lit: Lit) {
        if let Some(column) = self.0.get_mut(at + 1) {
            column.push_back(lit);
        }
    }
}

fn bit(number: u128, at: usize) -> bool {
    at < 128 && number >> at & 1 == 1
}

/// The non-adjacent form of a weight below 2^126: what is added and what is taken away.
fn signed_digits(weight: u128) -> (u128, u128) {
    let triple = 3 * weight;
    ((triple & !weight) >> 1, (weight & !triple) >> 1)
}

/// A comparison with a constant: whether `sum >= least` or `sum = least`, for a sum of positive terms that is known to
/// lie in `low..=high`; the signed numbers are relative to the sum's base.
#[derive(Clone)]
struct Question {
    terms: Vec<(Lit, u128)>,
    low: i128,
    high: i128,
    number: i128,
}

impl Question {
    fn new(form: &Linear, number: i128) -> Self {
        let (base, terms) = form.positive();
        Self { terms, low: form.range().lo - base, high: form.range().hi - base, number: number - base }
    }

    /// The question about the sum of the complements that has the same answer, up to one added to `number`.
    fn mirrored(&self) -> Self {
        let total: u128 = self.terms.iter().map(|&(_, weight)| weight).sum();
        let total = total as i128;
        Self {
            terms: self.terms.iter().map(|&(lit, weight)| (!lit, weight)).collect(),
            low: total - self.high,
            high: total - self.low,
            number: total - self.number,
        }
    }

    /// The question about the same sum with the weights in signed digits where these are fewer: `-w x = w (not x) - w`.
    fn signed(&self) -> Self {
        let mut shift = 0;
        let mut terms = Vec::with_capacity(self.terms.len());
        for &(lit, weight) in &self.terms {
            let (plus, minus) = signed_digits(weight);
            if plus.count_ones() + minus.count_ones() < weight.count_ones() {
                terms.extend([(lit, plus), (!lit, minus)]);
                shift += minus as i128;
            } else {
                terms.push((lit, weight));
            }
        }
        Self { terms, low: self.low + shift, high: self.high + shift, number: self.number + shift }
    }

    /// The cheapest of the ways to ask it.
    fn cheapest(ways: [Self; 2], cost: impl Fn(&Self) -> usize) -> (Self, bool) {
        let [plain, mirrored] = ways;
        let all = [(plain.signed(), false), (mirrored.signed(), true)];
        let all = [(plain, false), (mirrored, true)].into_iter().chain(all);
        all.min_by_key(|(question, _)| cost(question)).expect("four ways")
    }

    /// How many columns tell the number from every other value in reach.
    fn columns(&self) -> usize {
        let above = (self.high - self.number).max(0) as u128;
        let below = (self.number - self.low).max(1) as u128;
        width(above).max(width(below - 1))
    }

    /// How many columns tell equality: the distance to every value in reach is below 2^t.
    fn equal_columns(&self) -> usize {
        width((self.high - self.number).max(self.number - self.low).max(0) as u128)
    }

    fn counts(&self, columns: usize) -> Vec<usize> {
        (0..columns).map(|at| self.terms.iter().filter(|term| bit(term.1, at)).count()).collect()
    }

    /// ANDs of [`Builder::at_least_of`].
    fn at_least_cost(&self) -> usize {
        let columns = self.columns();
        let offset = (1u128 << columns).wrapping_sub(self.number as u128);
        let (mut ands, mut carries) = (0, 0);
        for (at, count) in self.counts(columns).into_iter().enumerate() {
            let bits = count + carries;
            ands += bits / 2;
            carries = (bits + usize::from(bit(offset, at))) / 2;
        }
        ands
    }

    /// ANDs of [`Builder::equal_of`].
    fn equal_cost(&self) -> usize {
        let columns = self.equal_columns();
        let (mut ands, mut carries, mut parts) = (0, 0, 0usize);
        for (at, count) in self.counts(columns).into_iter().enumerate() {
            let bits = count + carries;
            let adders = bits.saturating_sub(1) / 2;
            ands += adders;
            carries = adders + usize::from(bits > 0 && bits % 2 == 0 && !bit(self.number as u128, at));
            parts += usize::from(bits > 0);
        }
        ands + parts.saturating_sub(1)
    }
}

impl Builder {
    /// The digits of `form - base`, of which `count` are needed to tell its values apart.
    pub(super) fn digits(&mut self, form: &Linear, base: i128, count: usize) -> Binary {
        let (constant, terms) = form.positive();
        let offset = (constant - base) as u128;
        let mut columns = Columns::new(&terms, count);
        let digits = (0..count).map(|at| self.add_column(&mut columns, at, bit(offset, at), at + 1 < count)).collect();
        Binary { base, digits }
    }

    /// Whether `form >= number`.
    pub(super) fn at_least(&mut self, form: &Linear, number: i128) -> Lit {
        let question = Question::new(form, number);
        if question.number <= question.low {
            return Lit::YES;
        }
        if question.number > question.high {
            return Lit::NO;
        }
        // Not at least the number means: of the complements at least the number's complement plus one.
        let mut mirrored = question.mirrored();
        mirrored.number += 1;
        let (question, is_mirrored) = Question::cheapest([question, mirrored], Question::at_least_cost);
        self.at_least_of(&question).complement_if(is_mirrored)
    }

    fn at_least_of(&mut self, question: &Question) -> Lit {
        let count = question.columns();
        let offset = (1u128 << count).wrapping_sub(question.number as u128);
        let mut columns = Columns::new(&question.terms, count + 1);
        for at in 0..count {
            self.add_column(&mut columns, at, bit(offset, at), true);
        }
        let top: Vec<Lit> = columns.take(count).into();
        self.odd(&top).complement_if(bit(offset, count))
    }

    /// Reduces a column, with a constant bit, to one bit; the carries go to the next column where they are wanted.
    fn add_column(&mut self, columns: &mut Columns, at: usize, constant: bool, wanted: bool) -> Lit {
        let mut column = columns.take(at);
        if !wanted {
            let bits: Vec<Lit> = column.into();
            return self.odd(&bits).complement_if(constant);
        }
        while column.len() > 2 {
            let sum = self.full_adder(columns, at, &mut column);
            column.push_back(sum);
        }
        match *column.make_contiguous() {
            [] => Lit::constant(constant),
            [x] => {
                if constant {
                    columns.carry(at, x);
                }
                x.complement_if(constant)
            }
            [x, y, ..] => {
                let carry = if constant { self.or(x, y) } else { self.and(x, y) };
                columns.carry(at, carry);
                self.xor(x, y).complement_if(constant)
            }
        }
    }

    /// Takes three bits off a column and returns their sum; the carry goes to the next column.
    fn full_adder(&mut self, columns: &mut Columns, at: usize, column: &mut VecDeque<Lit>) -> Lit {
        let mut next = || column.pop_front().expect("three bits");
        let (x, y, z) = (next(), next(), next());
        let (p, q) = (self.xor(x, z), self.xor(y, z));
        let both = self.and(p, q);
        let carry = self.xor(both, z);
        columns.carry(at, carry);
        self.xor(x, q)
    }

    /// Whether `form = number`.
    pub(super) fn equal(&mut self, form: &Linear, number: i128) -> Lit {
        let question = Question::new(form, number);
        if question.number < question.low || question.number > question.high {
            return Lit::NO;
        }
        if question.low == question.high {
            return Lit::YES;
        }
        let (digit_wise, _) = Question::cheapest([question.clone(), question.mirrored()], Question::equal_cost);
        // At an end of the range, equality is a comparison with one side only.
        let (least, most) = (question.number == question.low, question.number == question.high);
        let compare = |b: &mut Builder| if most { b.at_least(form, number) } else { !b.at_least(form, number + 1) };
        let equal = |b: &mut Builder| b.equal_of(&digit_wise);
        if least || most { self.cheapest(&[&equal, &compare]) } else { equal(self) }
    }

    /// Whether `form` and `number` have the same remainder modulo 2^columns.
    pub(super) fn equal_modulo(&mut self, form: &Linear, number: i128, columns: usize) -> Lit {
        self.equal_digits(&Question::new(form, number), columns)
    }

    fn equal_of(&mut self, question: &Question) -> Lit {
        self.equal_digits(question, question.equal_columns())
    }

    fn equal_digits(&mut self, question: &Question, count: usize) -> Lit {
        let number = question.number as u128;
        let mut columns = Columns::new(&question.terms, count);
        let mut parts = Vec::new();
        for at in 0..columns.0.len() {
            let wanted = bit(number, at);
            let mut column = columns.take(at);
            while column.len() > 2 {
                let sum = self.full_adder(&mut columns, at, &mut column);
                column.push_back(sum);
            }
            let bits: Vec<Lit> = column.into();
            // Two bits with an even sum are equal, so either is the carry; with an odd sum there is none.
            if let ([x, _], false) = (bits.as_slice(), wanted) {
                columns.carry(at, *x);
            }
            parts.push(!self.odd(&bits).complement_if(wanted));
        }
        parts.retain(|&part| part != Lit::YES);
        self.all(&parts)
    }
}
