//! The affine change that leads from one function of five inputs to another.
//!
//! `f(x) = g(Ax + b) + l x + c` says for the spectra `W(u) = sum of (-1)^(f(x) + u x)` that
//! `W_f(u) = (-1)^(c + (u + l) d) W_g(M(u + l))` where `M` is the inverse transpose of `A` and `b = A d`. So an affine
//! map of the 32 places and an affine sign are looked for, point by point of an affine frame, and each choice is checked
//! at once on all sums of the points chosen so far (the spectral method: S. L. Hurst, D. M. Miller, J. C. Muzio,
//! "Spectral techniques in digital logic", 1985, from memory).

use super::INPUTS;

const SIZE: usize = 1 << INPUTS;

/// `f(x) = g(Ax + b) + l x + c`.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Change {
    /// The rows of *A*, bit *j* for input *j*.
    pub(super) rows: [u32; INPUTS],
    /// *b*.
    pub(super) offset: u32,
    /// *l*.
    pub(super) added: u32,
    /// *c*.
    pub(super) complemented: bool,
}

/// What an affine change leaves as it is: how often each size occurs in the spectrum and in the autocorrelation.
pub(super) type Key = [[u8; SIZE / 2 + 1]; 2];

/// The Walsh spectrum of a function.
#[derive(Clone, Debug)]
pub(super) struct Spectrum([i32; SIZE]);

impl Spectrum {
    /// The spectrum of a truth table.
    pub(super) fn of(table: u32) -> Self {
        let mut values = std::array::from_fn(|at| 1 - 2 * (table >> at & 1) as i32);
        transform(&mut values);
        Self(values)
    }

    /// The invariants.
    pub(super) fn key(&self) -> Key {
        let mut correlation = self.0.map(|value| value * value);
        transform(&mut correlation);
        let mut key = [[0; SIZE / 2 + 1]; 2];
        for at in 0..SIZE {
            // Both are even numbers, the correlation after division by the size.
            key[0][self.0[at].unsigned_abs() as usize / 2] += 1;
            key[1][correlation[at].unsigned_abs() as usize / SIZE / 2] += 1;
        }
        key
    }

    /// The change that makes this function, `f`, of another, `g`; none where they are of different classes.
    pub(super) fn change_from(&self, other: &Spectrum) -> Option<Change> {
        let mut search = Search { f: &self.0, g: &other.0, frame: self.frame(), images: [0; 6], signs: [false; 6] };
        search.extend(0).then(|| search.change())
    }

    /// An affine frame of places, large values first: they have the fewest counterparts.
    fn frame(&self) -> [usize; INPUTS + 1] {
        let mut places: Vec<usize> = (0..SIZE).collect();
        places.sort_by_key(|&at| std::cmp::Reverse(self.0[at].unsigned_abs()));
        let mut frame = [places[0]; INPUTS + 1];
        let mut count = 1;
        let mut spanned = vec![0];
        for &place in &places[1..] {
            let step = place ^ places[0];
            if !spanned.contains(&step) {
                spanned.extend(spanned.clone().iter().map(|other| other ^ step));
                frame[count] = place;
                count += 1;
            }
        }
        frame
    }
}

/// The fast Walsh-Hadamard transform.
fn transform(values: &mut [i32; SIZE]) {
    for step in (0..INPUTS).map(|at| 1 << at) {
        for at in (0..SIZE).filter(|at| at & step == 0) {
            (values[at], values[at | step]) = (values[at] + values[at | step], values[at] - values[at | step]);
        }
    }
}

struct Search<'a> {
    f: &'a [i32; SIZE],
    g: &'a [i32; SIZE],
    /// Places of `f`: a first one, and five more that are affinely independent of those before.
    frame: [usize; INPUTS + 1],
    /// Where each goes in `g`.
    images: [usize; INPUTS + 1],
    /// The sign at the first place, and how it changes towards each of the others.
    signs: [bool; INPUTS + 1],
}

impl Search<'_> {
    fn extend(&mut self, count: usize) -> bool {
        if count > INPUTS {
            return true;
        }
        for image in 0..SIZE {
            for sign in [false, true] {
                (self.images[count], self.signs[count]) = (image, sign);
                if self.fits(count) && self.extend(count + 1) {
                    return true;
                }
            }
        }
        false
    }

    /// Whether the values agree wherever the newest point of the frame takes part, and the map stays one to one.
    fn fits(&self, newest: usize) -> bool {
        for subset in 0..1usize << newest.saturating_sub(1) {
            let (mut from, mut to, mut sign) = (self.frame[0], self.images[0], self.signs[0]);
            let mut add = |at: usize| {
                from ^= self.frame[at] ^ self.frame[0];
                to ^= self.images[at] ^ self.images[0];
                sign ^= self.signs[at];
            };
            (1..newest).filter(|at| subset >> (at - 1) & 1 == 1).for_each(&mut add);
            if newest > 0 {
                add(newest);
                if to == self.images[0] {
                    return false;
                }
            }
            if self.f[from] != if sign { -self.g[to] } else { self.g[to] } {
                return false;
            }
        }
        true
    }

    /// From the map of places to the change of the inputs.
    fn change(&self) -> Change {
        // Columns of M, its sign vector d, and the constants, first in the basis of the frame, then of the units.
        let steps: [usize; INPUTS] = std::array::from_fn(|at| self.frame[at + 1] ^ self.frame[0]);
        let in_frame = |place: usize| -> usize {
            (0..SIZE).find(|&set| sum(&steps, set) == place).expect("the frame spans all places")
        };
        let images: [usize; INPUTS] = std::array::from_fn(|at| self.images[at + 1] ^ self.images[0]);
        let linear = |place: usize| sum(&images, in_frame(place));
        let odd = |place: usize| {
            let set = in_frame(place);
            (0..INPUTS).fold(false, |odd, at| odd ^ (set >> at & 1 == 1 && self.signs[at + 1]))
        };
        let columns: [usize; INPUTS] = std::array::from_fn(|at| linear(1 << at));
        let d = (0..INPUTS).filter(|&at| odd(1 << at)).fold(0usize, |d, at| d | 1 << at);
        // W_f(u) = (-1)^(sign + u d) W_g(M u + start).
        let start = self.images[0] ^ linear(self.frame[0]);
        let sign = self.signs[0] ^ odd(self.frame[0]);
        let added = (0..SIZE).find(|&u| sum(&columns, u) == start).expect("M is one to one");
        // A is the inverse transpose of M: its rows are the columns of the inverse.
        let rows: [u32; INPUTS] = std::array::from_fn(|at| {
            (0..SIZE as u32).find(|&u| sum(&columns, u as usize) == 1 << at).expect("M is one to one")
        });
        let offset = (0..INPUTS).filter(|&at| parity(rows[at] as usize & d)).fold(0, |b, at| b | 1 << at);
        Change { rows, offset, added: added as u32, complemented: sign ^ parity(added & d) }
    }
}

/// The sum of the vectors in a set.
fn sum(vectors: &[usize; INPUTS], set: usize) -> usize {
    (0..INPUTS).filter(|at| set >> at & 1 == 1).fold(0, |sum, at| sum ^ vectors[at])
}

fn parity(bits: usize) -> bool {
    bits.count_ones() % 2 == 1
}
