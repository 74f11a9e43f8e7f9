//! Amplitudes of basis states: exact ones in Z[w], w = e^(i pi/4), and ones in floating point.
//!
//! Exact amplitudes are sums a + b w + c w^2 + d w^3 with integers; the common factor of a state, a power of
//! 1/sqrt(2), is left out, since an audit compares amplitudes with each other only. A gate that mixes two values of a
//! qubit therefore multiplies by sqrt(2) what it does not touch. Arithmetic is checked: what does not fit is refused.
//!
//! # References
//! - B. Giles and P. Selinger: _Exact synthesis of multiqubit Clifford+T circuits_, Physical Review A 87:032332, 2013,
//!   section 2 (the ring; from memory).

use std::f64::consts::{FRAC_1_SQRT_2, FRAC_PI_2, FRAC_PI_4};

/// An angle counts as a multiple of pi/4 where it is this close to one.
pub(in crate::judge::audit) const ANGLE_TOLERANCE: f64 = 1e-12;

/// A gate that mixes the two values of a qubit.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(in crate::judge::audit) enum Mix {
    /// The Hadamard gate.
    H,
    /// exp(-i angle Y / 2).
    Ry(f64),
}

/// An amplitude. `None` is an amplitude or a gate that the representation does not hold.
pub(in crate::judge::audit) trait Amplitude: Copy + std::fmt::Debug {
    /// The amplitude of a basis state at the start.
    const ONE: Self;
    /// The amplitude of what is not there.
    const ZERO: Self;
    /// Whether it is nothing, or too small to tell from nothing.
    fn is_zero(self) -> bool;
    /// Times w to the power `eighths`.
    fn turned(self, eighths: u8) -> Self;
    /// Times e^(i angle).
    fn rotated(self, angle: f64) -> Option<Self>;
    /// The two amplitudes of a qubit after a gate, from those for 0 and for 1.
    fn mixed(mix: Mix, zero: Self, one: Self) -> Option<(Self, Self)>;
    /// The size of both amplitudes that a Hadamard gate makes of one.
    fn halved(self) -> Self;
    /// The amplitude of a state that a mixing gate does not touch.
    fn untouched(self) -> Option<Self>;
    /// Takes out a common factor of all.
    fn reduce(all: &mut [Self]);
}

/// Coefficients of exact amplitudes are from minus this up to this, the upper end excluded.
const BOUND: i64 = 1 << 61;

/// a + b w + c w^2 + d w^3.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(in crate::judge::audit) struct Exact(pub(in crate::judge::audit) [i64; 4]);

impl Exact {
    /// Coefficients within [`BOUND`], so that sums and negatives of two of them never overflow.
    fn checked(coefficients: [i64; 4]) -> Option<Self> {
        let beyond = coefficients.iter().fold(0, |beyond, &x| beyond | x.wrapping_add(BOUND) as u64 >> 62);
        (beyond == 0).then_some(Self(coefficients))
    }

    fn plus(self, other: Self) -> Option<Self> {
        Self::checked(std::array::from_fn(|at| self.0[at].wrapping_add(other.0[at])))
    }

    fn minus(self, other: Self) -> Option<Self> {
        Self::checked(std::array::from_fn(|at| self.0[at].wrapping_sub(other.0[at])))
    }

    /// Times sqrt(2) = w - w^3.
    fn times_root(self) -> Option<Self> {
        self.turned(1).minus(self.turned(3))
    }

    /// Whether sqrt(2) divides it.
    fn is_divisible(self) -> bool {
        let [a, b, c, d] = self.0;
        (a ^ c) & 1 == 0 && (b ^ d) & 1 == 0
    }

    /// Divided by sqrt(2), where that divides it.
    fn divided(self) -> Self {
        let [a, b, c, d] = self.0;
        Self([(b - d) / 2, (a + c) / 2, (b + d) / 2, (c - a) / 2])
    }

    /// The squared absolute value: x + y sqrt(2).
    pub(in crate::judge::audit) fn norm(self) -> Option<(i128, i128)> {
        let [a, b, c, d] = self.0.map(i128::from);
        let sum = |terms: [i128; 3], first: i128| terms.iter().try_fold(first, |sum, &term| sum.checked_add(term));
        Some((sum([b * b, c * c, d * d], a * a)?, sum([b * c, c * d, -d * a], a * b)?))
    }

    /// Whether it is a real number above 0.
    pub(in crate::judge::audit) fn is_positive(self) -> bool {
        let [a, b, c, d] = self.0;
        c == 0 && i128::from(b) == -i128::from(d) && a as f64 + b as f64 * std::f64::consts::SQRT_2 > 0.0
    }

    /// Times -1.
    pub(in crate::judge::audit) fn negated(self) -> Self {
        self.turned(4)
    }
}

/// How often the unit goes into the angle, reduced to eight, where it goes evenly.
pub(in crate::judge::audit) fn multiples(angle: f64, unit: f64) -> Option<u8> {
    let times = angle / unit;
    let near = (times - times.round()).abs() * unit < ANGLE_TOLERANCE && times.abs() < 1e9;
    near.then(|| (times.round() as i64).rem_euclid(8) as u8)
}

impl Amplitude for Exact {
    const ONE: Self = Self([1, 0, 0, 0]);
    const ZERO: Self = Self([0; 4]);

    fn is_zero(self) -> bool {
        self.0 == [0; 4]
    }

    fn turned(self, eighths: u8) -> Self {
        // Coefficients move up by one place a turn and come back negated; looking them up in both signs needs no branch.
        let [a, b, c, d] = self.0;
        let both = [a, b, c, d, -a, -b, -c, -d];
        Self(std::array::from_fn(|at| both[(at + 8 - usize::from(eighths & 7)) & 7]))
    }

    fn rotated(self, angle: f64) -> Option<Self> {
        multiples(angle, FRAC_PI_4).map(|eighths| self.turned(eighths))
    }

    fn mixed(mix: Mix, zero: Self, one: Self) -> Option<(Self, Self)> {
        let quarters = match mix {
            Mix::H => return Some((zero.plus(one)?, zero.minus(one)?)),
            Mix::Ry(angle) => multiples(angle, FRAC_PI_2)?,
        };
        // sqrt(2) times the rotation by a quarter turn is ((1, -1), (1, 1)); by none it is sqrt(2).
        let mut pair = (zero, one);
        if quarters % 2 == 1 {
            pair = (zero.minus(one)?, zero.plus(one)?);
        } else {
            pair = (pair.0.times_root()?, pair.1.times_root()?);
        }
        for _ in 0..quarters / 2 {
            pair = (pair.1.negated(), pair.0);
        }
        Some(pair)
    }

    fn halved(self) -> Self {
        self
    }

    fn untouched(self) -> Option<Self> {
        self.times_root()
    }

    fn reduce(all: &mut [Self]) {
        while !all.is_empty() && all.iter().all(|amplitude| amplitude.is_divisible()) {
            if all.iter().all(|amplitude| amplitude.is_zero()) {
                return;
            }
            all.iter_mut().for_each(|amplitude| *amplitude = amplitude.divided());
        }
    }
}

/// A complex number in floating point.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(in crate::judge::audit) struct Complex {
    pub(in crate::judge::audit) re: f64,
    pub(in crate::judge::audit) im: f64,
}

/// Amplitudes below this are taken for nothing; comparisons allow for a thousand times more and above.
const NOTHING: f64 = 1e-14;

impl Complex {
    pub(in crate::judge::audit) fn times(self, other: Self) -> Self {
        Self { re: self.re * other.re - self.im * other.im, im: self.re * other.im + self.im * other.re }
    }

    pub(in crate::judge::audit) fn plus(self, other: Self) -> Self {
        Self { re: self.re + other.re, im: self.im + other.im }
    }

    pub(in crate::judge::audit) fn minus(self, other: Self) -> Self {
        Self { re: self.re - other.re, im: self.im - other.im }
    }

    /// The angle, above -pi and at most pi.
    pub(in crate::judge::audit) fn angle(self) -> f64 {
        self.im.atan2(self.re)
    }

    pub(in crate::judge::audit) fn scaled(self, factor: f64) -> Self {
        Self { re: self.re * factor, im: self.im * factor }
    }

    pub(in crate::judge::audit) fn norm(self) -> f64 {
        self.re * self.re + self.im * self.im
    }
}

impl Amplitude for Complex {
    const ONE: Self = Self { re: 1.0, im: 0.0 };
    const ZERO: Self = Self { re: 0.0, im: 0.0 };

    fn is_zero(self) -> bool {
        self.re.abs() < NOTHING && self.im.abs() < NOTHING
    }

    fn turned(self, eighths: u8) -> Self {
        let quarter = match eighths & 6 {
            0 => self,
            2 => Self { re: -self.im, im: self.re },
            4 => Self { re: -self.re, im: -self.im },
            _ => Self { re: self.im, im: -self.re },
        };
        if eighths & 1 == 0 {
            return quarter;
        }
        quarter.times(Self { re: FRAC_1_SQRT_2, im: FRAC_1_SQRT_2 })
    }

    fn rotated(self, angle: f64) -> Option<Self> {
        Some(self.times(Self { re: angle.cos(), im: angle.sin() }))
    }

    fn mixed(mix: Mix, zero: Self, one: Self) -> Option<(Self, Self)> {
        let combine = |a: f64, b: f64| Self { re: zero.re * a + one.re * b, im: zero.im * a + one.im * b };
        Some(match mix {
            Mix::H => (combine(FRAC_1_SQRT_2, FRAC_1_SQRT_2), combine(FRAC_1_SQRT_2, -FRAC_1_SQRT_2)),
            Mix::Ry(angle) => {
                let (sin, cos) = (angle / 2.0).sin_cos();
                (combine(cos, -sin), combine(sin, cos))
            }
        })
    }

    fn halved(self) -> Self {
        self.scaled(FRAC_1_SQRT_2)
    }

    fn untouched(self) -> Option<Self> {
        Some(self)
    }

    fn reduce(_: &mut [Self]) {}
}

#[cfg(test)]
mod tests {
    use super::*;

    fn value(exact: Exact) -> Complex {
        let mut sum = Complex::ZERO;
        for (power, &part) in exact.0.iter().enumerate() {
            let turned = Complex::ONE.turned(power as u8).scaled(part as f64);
            sum = Complex { re: sum.re + turned.re, im: sum.im + turned.im };
        }
        sum
    }

    fn close(a: Complex, b: Complex) -> bool {
        (a.re - b.re).abs() < 1e-9 && (a.im - b.im).abs() < 1e-9
    }

    #[test]
    fn the_ring_agrees_with_complex_numbers() {
        let x = Exact([3, -2, 5, 7]);
        let y = Exact([-1, 4, 0, 2]);
        for eighths in 0..8 {
            assert!(close(value(x.turned(eighths)), value(x).turned(eighths)), "{eighths}");
            let angle = f64::from(eighths) * FRAC_PI_4;
            assert!(close(value(x.rotated(angle).unwrap()), value(x).rotated(angle).unwrap()), "{eighths}");
        }
        let root = std::f64::consts::SQRT_2;
        let mixes = (-4..9).map(|quarters| Mix::Ry(f64::from(quarters) * FRAC_PI_2)).chain([Mix::H]);
        for mix in mixes {
            let (a, b) = Exact::mixed(mix, x, y).unwrap();
            let (c, d) = Complex::mixed(mix, value(x), value(y)).unwrap();
            assert!(close(value(a), c.scaled(root)) && close(value(b), d.scaled(root)), "{mix:?}");
        }
        assert!(close(value(x.untouched().unwrap()), value(x).scaled(root)));
        let (whole, rooted) = x.norm().unwrap();
        assert!((value(x).norm() - (whole as f64 + rooted as f64 * root)).abs() < 1e-9);
    }

    #[test]
    fn the_root_of_two_divides_what_it_multiplied_and_nothing_odd() {
        let x = Exact([3, -2, 5, 6]);
        assert!(x.times_root().unwrap().is_divisible());
        assert_eq!(x.times_root().unwrap().divided(), x);
        assert!(!Exact([1, 0, 0, 0]).is_divisible());
        let mut all = [Exact([4, 0, 0, 0]), Exact([0, 0, -2, 0])];
        Exact::reduce(&mut all);
        assert_eq!(all, [Exact([2, 0, 0, 0]), Exact([0, 0, -1, 0])]);
        assert!(Exact([0, 1, 0, -1]).is_positive() && !Exact([-2, 1, 0, -1]).is_positive());
    }

    #[test]
    fn what_does_not_fit_is_refused() {
        let large = Exact([BOUND - 1, 0, 0, 0]);
        assert_eq!(Exact::mixed(Mix::H, large, large), None);
        assert_eq!(Exact::ONE.rotated(0.3), None);
    }
}
