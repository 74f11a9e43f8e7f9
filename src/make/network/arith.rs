//! Integer operations that are not linear: choices, products, division by constants, absolute values, extremes,
//! elements.
//!
//! Each takes linear forms and gives one; what can stay linear does, so the columns of a product are added only where
//! its value is compared.

use super::Lit;
use super::builder::Builder;
use super::linear::{Binary, Linear, Range, width};

/// Up to this many digits a division is also tried as a table of its values.
const MAX_TABLE_DIGITS: usize = 6;

impl Builder {
    /// `yes` where the condition holds, else `no`: the digits are chosen one by one, the bases by one weighted bit.
    pub(super) fn choose_number(&mut self, condition: Lit, yes: &Linear, no: &Linear) -> Linear {
        if condition.is_constant() {
            return if condition == Lit::YES { yes.clone() } else { no.clone() };
        }
        let (a, b) = (yes.to_binary(self), no.to_binary(self));
        let mut terms = vec![(condition, a.base - b.base)];
        for at in 0..a.digits.len().max(b.digits.len()) {
            let digit = |number: &Binary| number.digits.get(at).copied().unwrap_or(Lit::NO);
            terms.push((self.choose(condition, digit(&a), digit(&b)), 1 << at));
        }
        Linear::of(b.base, terms, yes.range().join(no.range())).trimmed(self)
    }

    /// The product: `(c + A)(d + B) = cd + cB + dA + AB`, with one AND for each pair of digits.
    pub(super) fn product(&mut self, x: &Linear, y: &Linear) -> Linear {
        if let Some(by) = x.value() {
            return y.scale(by);
        }
        if let Some(by) = y.value() {
            return x.scale(by);
        }
        let (a, b) = (x.to_binary(self), y.to_binary(self));
        let mut terms = Vec::new();
        terms.extend(b.digits.iter().enumerate().map(|(at, &digit)| (digit, a.base << at)));
        terms.extend(a.digits.iter().enumerate().map(|(at, &digit)| (digit, b.base << at)));
        for (i, &p) in a.digits.iter().enumerate() {
            for (j, &q) in b.digits.iter().enumerate() {
                terms.push((self.and(p, q), 1 << (i + j)));
            }
        }
        let (p, q) = (x.range(), y.range());
        let (low, high) = (Range::new(p.lo * q.lo, p.lo * q.hi), Range::new(p.hi * q.lo, p.hi * q.hi));
        Linear::of(a.base * b.base, terms, low.join(high))
    }

    /// The quotient, rounded down, and the remainder, by a positive constant.
    pub(super) fn divide(&mut self, x: &Linear, by: i128) -> (Linear, Linear) {
        let range = x.range();
        let (low, high) = (range.lo.div_euclid(by), range.hi.div_euclid(by));
        if low == high {
            let quotient = Linear::constant(low);
            return (quotient, x.minus(&Linear::constant(low * by)));
        }
        // The dividend, as a multiple of the divisor plus a number that is not negative.
        let above = x.minus(&Linear::constant(low * by)).within(Range::new(0, range.hi - low * by));
        let long = |b: &mut Builder| b.long_division(&above, by);
        let table = |b: &mut Builder| b.table_division(&above, by);
        let small = above.as_binary().is_some_and(|binary| binary.digits.len() <= MAX_TABLE_DIGITS);
        let (quotient, remainder) =
            if small && by.count_ones() != 1 { self.cheapest(&[&long, &table]) } else { long(self) };
        (Linear::sum([&quotient, &Linear::constant(low)]).within(Range::new(low, high)), remainder)
    }

    fn table_division(&mut self, x: &Linear, by: i128) -> (Linear, Linear) {
        let number = x.as_binary().expect("the caller looked");
        let values = |of: &dyn Fn(i128) -> i128| -> Vec<Option<i128>> {
            let inside = |value: &i128| (x.range().lo..=x.range().hi).contains(value);
            (0..1 << number.digits.len()).map(|code| Some(number.base + code).filter(inside).map(of)).collect()
        };
        let quotient = self.lookup(&number.digits, &values(&|value| value.div_euclid(by)));
        (quotient, self.lookup(&number.digits, &values(&|value| value.rem_euclid(by))))
    }

    /// Restoring division: from the highest digit down, double the remainder, add the digit, and take the divisor away
    /// where it fits. For a power of two nothing is to be decided: the digits are split.
    fn long_division(&mut self, x: &Linear, by: i128) -> (Linear, Linear) {
        let count = width(x.range().hi as u128);
        let mut digits = match x.as_binary() {
            Some(Binary { base: 0, digits }) => digits,
            _ => self.digits(x, 0, count).digits,
        };
        digits.truncate(count);
        let (quotient_range, remainder_range) = (Range::new(0, x.range().hi / by), Range::new(0, by - 1));
        if by.count_ones() == 1 {
            let (low, high) = digits.split_at((by.trailing_zeros() as usize).min(digits.len()));
            return (Linear::binary(0, high, quotient_range), Linear::binary(0, low, remainder_range));
        }
        let mut remainder = Linear::constant(0);
        let mut quotient = vec![Lit::NO; digits.len()];
        for (at, &digit) in digits.iter().enumerate().rev() {
            let doubled = Linear::sum([&remainder.scale(2), &Linear::truth(digit)]);
            let fits = self.at_least(&doubled, by);
            quotient[at] = fits;
            let rest = doubled.minus(&Linear::truth(fits).scale(by));
            let hi = (by - 1).min(doubled.range().hi);
            remainder = rest.within(Range::new(0, hi)).to_compact(self);
        }
        (Linear::binary(0, &quotient, quotient_range), remainder)
    }

    /// The value without its sign: with 2^w added, the top digit says "not negative", and the others, complemented
    /// where it is not set, plus one there, are the size.
    pub(super) fn absolute(&mut self, x: &Linear) -> Linear {
        let range = x.range();
        if range.lo >= 0 {
            return x.clone();
        }
        if range.hi <= 0 {
            return x.scale(-1);
        }
        let count = width(range.hi as u128).max(width(range.lo.unsigned_abs() - 1));
        let base = -(1i128 << count);
        let number = match x.as_binary() {
            Some(binary) if binary.base == base && binary.digits.len() == count + 1 => binary,
            _ => self.digits(x, base, count + 1),
        };
        let negative = !number.digits[count];
        let mut terms = vec![(negative, 1)];
        terms.extend((0..count).map(|at| (self.xor(number.digits[at], negative), 1 << at)));
        Linear::of(0, terms, Range::new(0, range.hi.max(-range.lo)))
    }

    /// The least of the values, or the largest: a balanced tree of comparisons.
    pub(super) fn extreme(&mut self, items: &[Linear], largest: bool) -> Linear {
        if let [item] = items {
            return item.clone();
        }
        let (left, right) = items.split_at(items.len() / 2);
        let (a, b) = (self.extreme(left, largest), self.extreme(right, largest));
        let (a, b) = (a.to_compact(self), b.to_compact(self));
        let (p, q) = (a.range(), b.range());
        let left = self.at_least(&a.minus(&b), 0).complement_if(!largest);
        let range = if largest {
            Range::new(p.lo.max(q.lo), p.hi.max(q.hi))
        } else {
            Range::new(p.lo.min(q.lo), p.hi.min(q.hi))
        };
        self.choose_number(left, &a, &b).within(range).trimmed(self)
    }

    /// The index of an element in binary, and which part of a row of `len` elements it can reach.
    pub(super) fn index(&mut self, index: &Linear, len: usize) -> (Vec<Lit>, std::ops::Range<usize>) {
        let Binary { base, digits } = index.to_binary(self);
        let (first, last) = (base.max(0) as usize, index.range().hi.min(len as i128 - 1) as usize);
        if base < 0 {
            // Codes below 0 are never asked for, but they hold places in the row.
            let rebased = self.digits(index, 0, width(index.range().hi as u128));
            return (rebased.digits, 0..last + 1);
        }
        (digits, first..last + 1)
    }

    /// The number at an index: the bases by a table of constants, the digits by a tree of choices.
    pub(super) fn element(&mut self, index: &Linear, items: &[Linear]) -> Linear {
        let (digits, reach) = self.index(index, items.len());
        let items = &items[reach];
        let numbers: Vec<Binary> = items.iter().map(|item| item.to_binary(self)).collect();
        let longest = numbers.iter().map(|number| number.digits.len()).max().unwrap_or(0);
        let bases: Vec<Option<i128>> = numbers.iter().map(|number| Some(number.base)).collect();
        let base = self.lookup(&digits, &bases);
        let digit_at = |at: usize| -> Vec<Lit> {
            numbers.iter().map(|number| number.digits.get(at).copied().unwrap_or(Lit::NO)).collect()
        };
        let chosen: Vec<Lit> = (0..longest).map(|at| self.select(&digits, &digit_at(at))).collect();
        let reach = Range::new(0, (1i128 << longest) - 1);
        let range = items.iter().map(Linear::range).reduce(Range::join).expect("a row has an element");
        Linear::sum([&base, &Linear::binary(0, &chosen, reach)]).within(range).trimmed(self)
    }
}
