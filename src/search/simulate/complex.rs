//! Complex numbers: the few operations that following a search takes.

use std::ops::{Add, Mul, Neg, Sub};

/// A complex number.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Complex {
    /// The real part.
    pub(super) re: f64,
    /// The imaginary part.
    pub(super) im: f64,
}

impl Complex {
    pub(super) const ZERO: Self = Self { re: 0.0, im: 0.0 };
    pub(super) const ONE: Self = Self { re: 1.0, im: 0.0 };

    /// A real number.
    pub(super) fn real(re: f64) -> Self {
        Self { re, im: 0.0 }
    }

    /// `e^(i angle)`, with whole quarter turns exact.
    pub(super) fn turn(angle: f64) -> Self {
        let quarters = angle / std::f64::consts::FRAC_PI_2;
        if (quarters - quarters.round()).abs() < 1e-15 && quarters.abs() < 1e6 {
            return [Self::ONE, Self { re: 0.0, im: 1.0 }, Self::real(-1.0), Self { re: 0.0, im: -1.0 }]
                [(quarters.round() as i64).rem_euclid(4) as usize];
        }
        let (im, re) = angle.sin_cos();
        Self { re, im }
    }

    pub(super) fn conj(self) -> Self {
        Self { re: self.re, im: -self.im }
    }

    /// The square of the absolute value.
    pub(super) fn norm(self) -> f64 {
        self.re * self.re + self.im * self.im
    }

    pub(super) fn scaled(self, by: f64) -> Self {
        Self { re: self.re * by, im: self.im * by }
    }

    /// Whether two numbers are the same up to rounding.
    pub(super) fn is_near(self, other: Self) -> bool {
        (self - other).norm() < 1e-18
    }
}

impl Add for Complex {
    type Output = Self;
    fn add(self, other: Self) -> Self {
        Self { re: self.re + other.re, im: self.im + other.im }
    }
}

impl Sub for Complex {
    type Output = Self;
    fn sub(self, other: Self) -> Self {
        Self { re: self.re - other.re, im: self.im - other.im }
    }
}

impl Neg for Complex {
    type Output = Self;
    fn neg(self) -> Self {
        Self { re: -self.re, im: -self.im }
    }
}

impl Mul for Complex {
    type Output = Self;
    fn mul(self, other: Self) -> Self {
        Self { re: self.re * other.re - self.im * other.im, im: self.re * other.im + self.im * other.re }
    }
}
