//! Integers in two's complement: the words of the judge.
//!
//! A [`Number`] knows its least and largest value (derived here, from the domains up) and has just the bits that these
//! need, the last one being the sign. Sums ripple a carry through majorities, comparisons read the sign of a
//! difference, products shift and add, quotients come from restoring long division (all of them textbook methods; D.
//! Knuth, "The Art of Computer Programming", volume 2, section 4.3.1, from memory). A number that counts truths also
//! keeps its [`unary`](super::unary) form, and comparisons use that where they can.
//!
//! Bits whose code lies outside a domain may give any value here: the reading refuses such codes by another conjunct.

use crate::judge::reading::graph::{Graph, Signal};
use crate::judge::reading::unary;

/// An integer over the bits of a problem.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct Number {
    bits: Vec<Signal>,
    lo: i128,
    hi: i128,
    /// Entry `k` says "greater than `k`"; only for a number from 0 to its length.
    unary: Option<Vec<Signal>>,
}

/// The bits of two's complement that hold everything from `lo` to `hi`.
fn width(lo: i128, hi: i128) -> usize {
    let one = |value: i128| 129 - (if value < 0 { !value } else { value }).leading_zeros() as usize;
    one(lo).max(one(hi))
}

impl Number {
    /// A constant.
    pub(crate) fn constant(value: i128) -> Self {
        let bits = (0..width(value, value)).map(|at| Signal::constant(value >> at & 1 == 1)).collect();
        Self { bits, lo: value, hi: value, unary: None }
    }

    /// The number in these bits, which is known to lie between `lo` and `hi`; bits that this makes needless are cut.
    fn within(mut bits: Vec<Signal>, lo: i128, hi: i128) -> Self {
        if lo == hi {
            return Self::constant(lo);
        }
        let width = width(lo, hi);
        let sign = *bits.last().expect("a word has a sign");
        bits.resize(bits.len().max(width), sign);
        bits.truncate(width);
        Self { bits, lo, hi, unary: None }
    }

    /// `base` plus the code in these bits, low bit first; the code is at most `last`.
    pub(crate) fn from_code(graph: &mut Graph, code: &[Signal], base: i128, last: u64) -> Self {
        let mut bits = code.to_vec();
        bits.push(Signal::NO);
        let code = Self::within(bits, 0, last.into());
        code.plus(graph, &Self::constant(base))
    }

    /// How many of these hold.
    pub(crate) fn count(graph: &mut Graph, truths: &[Signal]) -> Self {
        let sorted = unary::sort(graph, truths);
        let mut bits = unary::to_binary(graph, &sorted);
        bits.push(Signal::NO);
        let hi = sorted.len() as i128;
        Self { unary: Some(sorted), ..Self::within(bits, 0, hi) }
    }

    /// The unary form, where the number has one: entry `k` says "greater than `k`".
    pub(crate) fn unary(&self) -> Option<&[Signal]> {
        self.unary.as_deref()
    }

    /// The least value.
    pub(crate) fn lo(&self) -> i128 {
        self.lo
    }

    /// The largest value.
    pub(crate) fn hi(&self) -> i128 {
        self.hi
    }

    fn is_constant(&self) -> bool {
        self.lo == self.hi
    }

    /// The bit at this place, the sign repeated beyond the last one.
    fn bit(&self, at: usize) -> Signal {
        self.bits[at.min(self.bits.len() - 1)]
    }

    fn sign(&self) -> Signal {
        self.bits[self.bits.len() - 1]
    }

    fn extended(&self, width: usize) -> Vec<Signal> {
        (0..width).map(|at| self.bit(at)).collect()
    }

    /// The sum.
    pub(crate) fn plus(&self, graph: &mut Graph, other: &Self) -> Self {
        let (lo, hi) = (self.lo + other.lo, self.hi + other.hi);
        let width = width(lo, hi);
        let bits = add(graph, &self.extended(width), &other.extended(width), Signal::NO);
        Self::within(bits, lo, hi)
    }

    /// Minus this.
    pub(crate) fn negated(&self, graph: &mut Graph) -> Self {
        let (lo, hi) = (-self.hi, -self.lo);
        let inverted: Vec<Signal> = self.extended(width(lo, hi)).iter().map(|&bit| !bit).collect();
        let zero = vec![Signal::NO; inverted.len()];
        let bits = add(graph, &inverted, &zero, Signal::YES);
        Self::within(bits, lo, hi)
    }

    /// The size without the sign.
    pub(crate) fn abs(&self, graph: &mut Graph) -> Self {
        if self.lo >= 0 {
            return self.clone();
        }
        let hi = self.lo.abs().max(self.hi.abs());
        let lo = if self.hi < 0 { -self.hi } else { 0 };
        let sign = self.sign();
        let flipped: Vec<Signal> = self.extended(width(lo, hi)).iter().map(|&bit| graph.odd(bit, sign)).collect();
        let zero = vec![Signal::NO; flipped.len()];
        let bits = add(graph, &flipped, &zero, sign);
        Self::within(bits, lo, hi)
    }

    /// The product.
    pub(crate) fn times(&self, graph: &mut Graph, other: &Self) -> Self {
        // A truth as a factor keeps the other or drops it.
        for (factor, of) in [(self, other), (other, self)] {
            if (factor.lo, factor.hi) == (0, 1) {
                return Self::choose(graph, factor.bits[0], of, &Self::constant(0));
            }
        }
        let by_width = |number: &Self| (!number.is_constant(), number.bits.len());
        let (by, of) = if by_width(self) <= by_width(other) { (self, other) } else { (other, self) };
        let ends = [by.lo * of.lo, by.lo * of.hi, by.hi * of.lo, by.hi * of.hi];
        let lo = ends.into_iter().fold(i128::MAX, i128::min);
        let hi = ends.into_iter().fold(i128::MIN, i128::max);
        // Everything is done modulo 2^width, so the sign of `by` weighs -2^(its place).
        let width = width(lo, hi);
        let mut sum = vec![Signal::NO; width];
        for (place, &bit) in by.bits.iter().enumerate().take(width) {
            let is_sign = place + 1 == by.bits.len();
            let shifted = (0..width).map(|at| if at < place { Signal::NO } else { of.bit(at - place) });
            let part: Vec<Signal> = shifted.map(|of| graph.and(of, bit) ^ is_sign).collect();
            // A part under a bit that is never set adds nothing, the negated one included.
            if bit != Signal::NO {
                sum = add(graph, &sum, &part, Signal::constant(is_sign));
            }
        }
        Self::within(sum, lo, hi)
    }

    /// The quotient by a positive constant, rounded down, and the remainder.
    ///
    /// For a negative number `a`, `~a = -a - 1` is not negative, and `a = by * ~q + (by - 1 - r)` where `q` and `r` are
    /// the quotient and the remainder of `~a`; both cases share one division.
    pub(crate) fn divided(&self, graph: &mut Graph, by: i64) -> (Self, Self) {
        let by = i128::from(by);
        let (q_lo, q_hi) = (self.lo.div_euclid(by), self.hi.div_euclid(by));
        if q_lo == 0 && q_hi == 0 {
            return (Self::constant(0), self.clone());
        }
        let (r_lo, r_hi) = if q_lo == q_hi { (self.lo.rem_euclid(by), self.hi.rem_euclid(by)) } else { (0, by - 1) };
        let sign = self.sign();
        let size: Vec<Signal> = self.bits[..self.bits.len() - 1].iter().map(|&bit| graph.odd(bit, sign)).collect();
        let (quotient, rest) = divide(graph, &size, by);
        let mut quotient: Vec<Signal> = quotient.iter().map(|&bit| graph.odd(bit, sign)).collect();
        quotient.push(sign);
        // by - 1 - r = by + ~r, modulo 2^width.
        let inverted: Vec<Signal> = rest.iter().map(|&bit| !bit).collect();
        let mirrored = add(graph, &inverted, &Self::constant(by).extended(rest.len()), Signal::NO);
        let mut remainder: Vec<Signal> =
            rest.iter().zip(mirrored).map(|(&plain, mirrored)| graph.choose(sign, mirrored, plain)).collect();
        remainder.push(Signal::NO);
        (Self::within(quotient, q_lo, q_hi), Self::within(remainder, r_lo, r_hi))
    }

    /// `yes` where the condition holds, else `no`.
    pub(crate) fn choose(graph: &mut Graph, condition: Signal, yes: &Self, no: &Self) -> Self {
        match condition.as_constant() {
            Some(true) => return yes.clone(),
            Some(false) => return no.clone(),
            None => {}
        }
        let (lo, hi) = (yes.lo.min(no.lo), yes.hi.max(no.hi));
        let bits = (0..width(lo, hi)).map(|at| graph.choose(condition, yes.bit(at), no.bit(at))).collect();
        Self::within(bits, lo, hi)
    }

    /// The number whose selector holds; exactly one of them does.
    pub(crate) fn select(graph: &mut Graph, choices: &[(Signal, &Self)]) -> Self {
        let lo = choices.iter().map(|(_, number)| number.lo).min().expect("there is a choice");
        let hi = choices.iter().map(|(_, number)| number.hi).max().expect("there is a choice");
        let bit = |graph: &mut Graph, at| {
            let chosen: Vec<Signal> = choices.iter().map(|(on, number)| graph.and(*on, number.bit(at))).collect();
            graph.any(chosen)
        };
        let bits = (0..width(lo, hi)).map(|at| bit(graph, at)).collect();
        Self::within(bits, lo, hi)
    }

    /// The lesser of the two.
    pub(crate) fn lesser(&self, graph: &mut Graph, other: &Self) -> Self {
        let other_is_less = other.less(graph, self);
        let chosen = Self::choose(graph, other_is_less, other, self);
        Self::within(chosen.bits, self.lo.min(other.lo), self.hi.min(other.hi))
    }

    /// The larger of the two.
    pub(crate) fn larger(&self, graph: &mut Graph, other: &Self) -> Self {
        let self_is_less = self.less(graph, other);
        let chosen = Self::choose(graph, self_is_less, other, self);
        Self::within(chosen.bits, self.lo.max(other.lo), self.hi.max(other.hi))
    }

    /// Whether this is less than the other.
    pub(crate) fn less(&self, graph: &mut Graph, other: &Self) -> Signal {
        if self.hi < other.lo {
            return Signal::YES;
        }
        if self.lo >= other.hi {
            return Signal::NO;
        }
        match (&self.unary, &other.unary) {
            (Some(a), Some(b)) => {
                let beyond = |k: usize| a.get(k).copied().unwrap_or(Signal::NO);
                let steps: Vec<Signal> =
                    b.iter().enumerate().map(|(k, &reached)| graph.and(reached, !beyond(k))).collect();
                graph.any(steps)
            }
            (Some(_), None) if other.is_constant() => !self.at_least(other.lo),
            (None, Some(_)) if self.is_constant() => other.at_least(self.lo + 1),
            _ => {
                let width = self.bits.len().max(other.bits.len()) + 1;
                let inverted: Vec<Signal> = other.extended(width).iter().map(|&bit| !bit).collect();
                let difference = add(graph, &self.extended(width), &inverted, Signal::YES);
                difference[width - 1]
            }
        }
    }

    /// Whether this counting number is at least `bound`.
    fn at_least(&self, bound: i128) -> Signal {
        if bound <= self.lo {
            return Signal::YES;
        }
        if bound > self.hi {
            return Signal::NO;
        }
        self.unary.as_ref().expect("a counting number")[bound as usize - 1]
    }

    /// Whether the two are equal.
    pub(crate) fn equals(&self, graph: &mut Graph, other: &Self) -> Signal {
        if self.is_constant() {
            return other.is(graph, self.lo);
        }
        if other.is_constant() {
            return self.is(graph, other.lo);
        }
        if self.hi < other.lo || other.hi < self.lo {
            return Signal::NO;
        }
        let width = self.bits.len().max(other.bits.len());
        let same: Vec<Signal> = (0..width).map(|at| !graph.odd(self.bit(at), other.bit(at))).collect();
        graph.all(same)
    }

    /// Whether this is the constant.
    pub(crate) fn is(&self, graph: &mut Graph, value: i128) -> Signal {
        if value < self.lo || value > self.hi {
            return Signal::NO;
        }
        if self.unary.is_some() {
            return graph.and(self.at_least(value), !self.at_least(value + 1));
        }
        graph.all(self.bits.iter().enumerate().map(|(at, &bit)| bit ^ (value >> at & 1 == 0)).collect::<Vec<_>>())
    }
}

/// The sum of two words and a carry, modulo 2^width; both words have the same width.
fn add(graph: &mut Graph, a: &[Signal], b: &[Signal], mut carry: Signal) -> Vec<Signal> {
    let mut sum = Vec::with_capacity(a.len());
    for (&a, &b) in a.iter().zip(b) {
        let half = graph.odd(a, b);
        sum.push(graph.odd(half, carry));
        carry = graph.most(a, b, carry);
    }
    sum
}

/// Restoring long division of a number that is not negative, low bit first, by a positive constant.
fn divide(graph: &mut Graph, size: &[Signal], by: i128) -> (Vec<Signal>, Vec<Signal>) {
    // The rest is below `by`; shifted by one bit it is below `2 by`, and one bit more holds the sign of a difference.
    let rest_width = 128 - (by - 1).leading_zeros() as usize;
    let minus: Vec<Signal> = Number::constant(by).extended(rest_width + 2).iter().map(|&bit| !bit).collect();
    let mut rest = vec![Signal::NO; rest_width];
    let mut quotient = vec![Signal::NO; size.len()];
    for at in (0..size.len()).rev() {
        let mut shifted = vec![size[at]];
        shifted.extend_from_slice(&rest);
        shifted.push(Signal::NO);
        let difference = add(graph, &shifted, &minus, Signal::YES);
        let fits = !difference[rest_width + 1];
        quotient[at] = fits;
        rest = (0..rest_width).map(|at| graph.choose(fits, difference[at], shifted[at])).collect();
    }
    (quotient, rest)
}
