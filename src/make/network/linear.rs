//! Linear forms: an integer as a constant plus weighted bits.
//!
//! Sums, negations, products with constants and numbers of yes/no all stay linear forms and cost nothing; columns of
//! bits are added only where a form is compared or its binary digits are needed (see [`columns`](super::columns)).
//!
//! A form also carries the range of its values over all assignments within the domains, found here and not shared with
//! the problem's checker or the judge.

use super::Lit;
use super::builder::Builder;

/// An integer range.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Range {
    pub(super) lo: i128,
    pub(super) hi: i128,
}

impl Range {
    /// Both ends, in either order.
    pub(super) fn new(a: i128, b: i128) -> Self {
        Self { lo: a.min(b), hi: a.max(b) }
    }

    /// The largest value less the least.
    pub(super) fn span(self) -> u128 {
        self.hi.abs_diff(self.lo)
    }

    /// The values in both; they always have one in common, the value itself.
    fn meet(self, other: Range) -> Range {
        Range { lo: self.lo.max(other.lo), hi: self.hi.min(other.hi) }
    }

    /// The least range that holds both.
    pub(super) fn join(self, other: Range) -> Range {
        Range { lo: self.lo.min(other.lo), hi: self.hi.max(other.hi) }
    }
}

/// How many binary digits the numbers from 0 to `last` need.
pub(super) fn width(last: u128) -> usize {
    (u128::BITS - last.leading_zeros()) as usize
}

/// `constant` plus the weights of the literals that hold.
#[derive(Clone, Debug)]
pub(super) struct Linear {
    constant: i128,
    /// Literals that are not complemented, by node, each once; weights are not zero.
    terms: Vec<(Lit, i128)>,
    range: Range,
}

/// A number in binary: `base` plus the digits, the lowest first. A digit may be constant.
#[derive(Clone, Debug)]
pub(super) struct Binary {
    pub(super) base: i128,
    pub(super) digits: Vec<Lit>,
}

impl Linear {
    /// A constant.
    pub(super) fn constant(value: i128) -> Self {
        Self { constant: value, terms: Vec::new(), range: Range::new(value, value) }
    }

    /// 1 where the literal holds, else 0.
    pub(super) fn truth(lit: Lit) -> Self {
        Self::of(0, [(lit, 1)], Range::new(0, 1))
    }

    /// Base plus digits, known to lie in the range.
    pub(super) fn binary(base: i128, digits: &[Lit], range: Range) -> Self {
        Self::of(base, digits.iter().enumerate().map(|(at, &digit)| (digit, 1 << at)), range)
    }

    /// Constant plus weighted literals, known to lie in the range: literals of one node become one term.
    pub(super) fn of(mut constant: i128, terms: impl IntoIterator<Item = (Lit, i128)>, range: Range) -> Self {
        let mut plain: Vec<(Lit, i128)> = Vec::new();
        for (lit, weight) in terms {
            if lit.is_complemented() {
                constant += weight;
                plain.push((!lit, -weight));
            } else {
                plain.push((lit, weight));
            }
        }
        plain.sort_unstable_by_key(|&(lit, _)| lit);
        plain.dedup_by(|next, kept| {
            let same = next.0 == kept.0;
            kept.1 += if same { next.1 } else { 0 };
            same
        });
        plain.retain(|&(lit, weight)| weight != 0 && lit != Lit::NO);
        let mut form = Self { constant, terms: plain, range };
        form.range = form.reach().meet(range);
        form
    }

    /// What the terms alone can reach.
    fn reach(&self) -> Range {
        let part = |sign: i128| self.terms.iter().map(|&(_, weight)| (weight * sign).max(0) * sign).sum::<i128>();
        Range { lo: self.constant + part(-1), hi: self.constant + part(1) }
    }

    /// The values it can have within the domains.
    pub(super) fn range(&self) -> Range {
        self.range
    }

    /// The value, where it is the same for all assignments.
    pub(super) fn value(&self) -> Option<i128> {
        (self.range.lo == self.range.hi).then_some(self.range.lo)
    }

    /// The sum.
    pub(super) fn sum<'a>(parts: impl IntoIterator<Item = &'a Linear>) -> Self {
        let (mut constant, mut terms, mut range) = (0, Vec::new(), Range::new(0, 0));
        for part in parts {
            constant += part.constant;
            terms.extend_from_slice(&part.terms);
            range = Range { lo: range.lo + part.range.lo, hi: range.hi + part.range.hi };
        }
        Self::of(constant, terms, range)
    }

    /// The product with a constant.
    pub(super) fn scale(&self, by: i128) -> Self {
        let range = Range::new(self.range.lo * by, self.range.hi * by);
        Self::of(self.constant * by, self.terms.iter().map(|&(lit, weight)| (lit, weight * by)), range)
    }

    /// The difference.
    pub(super) fn minus(&self, other: &Linear) -> Self {
        Self::sum([self, &other.scale(-1)])
    }

    /// The same form, whose values are also known to lie in `range`.
    pub(super) fn within(mut self, range: Range) -> Self {
        self.range = self.range.meet(range);
        self
    }

    /// The constant and the literals with positive weights whose sum it is: `w x = w + (-w)(not x)`.
    pub(super) fn positive(&self) -> (i128, Vec<(Lit, u128)>) {
        let base = self.constant + self.terms.iter().map(|&(_, weight)| weight.min(0)).sum::<i128>();
        let terms = self.terms.iter().map(|&(lit, weight)| (lit.complement_if(weight < 0), weight.unsigned_abs()));
        (base, terms.collect())
    }

    /// The binary form, where the weights are different powers of two and so nothing has to be added.
    pub(super) fn as_binary(&self) -> Option<Binary> {
        let (base, terms) = self.positive();
        let mut digits = Vec::new();
        for (lit, weight) in terms {
            let at = weight.trailing_zeros() as usize;
            if !weight.is_power_of_two() || digits.get(at).is_some_and(|&digit| digit != Lit::NO) {
                return None;
            }
            digits.resize(digits.len().max(at + 1), Lit::NO);
            digits[at] = lit;
        }
        Some(Binary { base, digits })
    }

    /// The binary form: columns are added where they must be, and where the digits would be many more than the range
    /// needs.
    pub(super) fn to_binary(&self, builder: &mut Builder) -> Binary {
        if let Some(value) = self.value() {
            return Binary { base: value, digits: Vec::new() };
        }
        let needed = width(self.range.span());
        match self.as_binary() {
            Some(mut binary) if binary.base == self.range.lo => {
                // Higher digits are set for no assignment within the domains.
                binary.digits.truncate(needed);
                binary
            }
            Some(binary) if binary.digits.len() <= needed + 1 => binary,
            _ => builder.digits(self, self.range.lo, needed),
        }
    }

    /// The same number, in binary where its terms reach far beyond its range: so weights stay below some 2^70 whatever
    /// is built on top.
    pub(super) fn trimmed(self, builder: &mut Builder) -> Self {
        if width(self.reach().span()) > width(self.range.span()) + 2 { self.to_compact(builder) } else { self }
    }

    /// The same number as a form with one literal a digit.
    pub(super) fn to_compact(&self, builder: &mut Builder) -> Self {
        let binary = self.to_binary(builder);
        Self::binary(binary.base, &binary.digits, self.range)
    }
}
