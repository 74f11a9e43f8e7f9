//! The code between values and bits.
//!
//! yes/no is one bit; an integer in `lo to hi` is `value - lo` in binary, low bit first, in `ceil(log2(hi - lo + 1))`
//! bits; a kind's value is its place in the declaration, likewise. Variables follow each other in source order.

use crate::id::Id;
use crate::problem::{BitId, Bits, Domain, Problem, VarId};

/// The number of bits for a domain whose largest code is `last`: the least `w` with `last < 2^w`.
pub fn width(last: u64) -> u8 {
    (u64::BITS - last.leading_zeros()) as u8
}

impl Problem {
    /// The value that code 0 stands for.
    fn base(domain: Domain) -> i64 {
        match domain {
            Domain::Range { lo, .. } => lo,
            Domain::YesNo | Domain::Kind(_) => 0,
        }
    }

    /// The code in a variable's bits, which may lie outside its domain.
    pub fn code_of(&self, var: VarId, bits: &Bits) -> u64 {
        let var = &self.vars()[var];
        (0..usize::from(var.width)).fold(0, |code, at| code | u64::from(bits.at(var.first_bit.index() + at)) << at)
    }

    /// The values in a bit string, one for each variable; `None` where a code lies outside its domain.
    pub fn decode(&self, bits: &Bits) -> Option<Vec<i64>> {
        assert_eq!(bits.len(), self.bit_count(), "one value for each bit of the problem");
        self.vars()
            .iter()
            .map(|(id, var)| {
                let code = self.code_of(id, bits);
                (code <= self.size(var.domain)).then(|| Self::base(var.domain).wrapping_add(code as i64))
            })
            .collect()
    }

    /// The bit string of these values, one for each variable; `None` where a value lies outside its domain.
    pub fn encode(&self, values: &[i64]) -> Option<Bits> {
        assert_eq!(values.len(), self.vars().len(), "one value for each variable");
        let mut bits = Bits::zeros(self.bit_count());
        for (var, &value) in self.vars().values().zip(values) {
            let base = Self::base(var.domain);
            let code = value.wrapping_sub(base) as u64;
            if value < base || code > self.size(var.domain) {
                return None;
            }
            for at in 0..usize::from(var.width) {
                bits.set(BitId::new(var.first_bit.index() + at), code >> at & 1 == 1);
            }
        }
        Some(bits)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn widths_are_the_ceiling_of_the_logarithm() {
        let of_size = |size: u64| width(size - 1);
        assert_eq!([1, 2, 3, 4, 5, 8, 9].map(of_size), [0, 1, 2, 2, 3, 3, 4]);
        assert_eq!(width(u64::MAX), 64);
    }

    #[test]
    fn values_go_to_bits_and_back_and_codes_outside_the_domain_are_none() {
        let mut problem = Problem::new();
        problem.add_var("a", Domain::Range { lo: -2, hi: 2 }, None);
        problem.add_var("one", Domain::Range { lo: 7, hi: 7 }, None);
        problem.add_var("lamp", Domain::YesNo, None);
        assert_eq!(problem.bit_count(), 4);
        let bits = problem.encode(&[1, 7, 1]).unwrap();
        assert_eq!(bits.to_string(), "1011");
        assert_eq!(problem.decode(&bits), Some(vec![1, 7, 1]));
        assert_eq!(problem.decode(&Bits::parse("0101").unwrap()), None);
        assert_eq!(problem.encode(&[3, 7, 0]), None);
        assert_eq!(problem.var_of(BitId::new(3)), (VarId::new(2), 0));
        assert_eq!(problem.var_of(BitId::new(2)), (VarId::new(0), 2));
    }

    #[test]
    fn the_widest_domain_fits() {
        let mut problem = Problem::new();
        problem.add_var("wide", Domain::Range { lo: i64::MIN, hi: i64::MAX }, None);
        for value in [i64::MIN, -1, 0, i64::MAX] {
            let bits = problem.encode(&[value]).unwrap();
            assert_eq!(problem.decode(&bits), Some(vec![value]));
        }
    }
}
