//! Polynomials that are a constant and a sign.
//!
//! Input: a sum of forms with coefficients modulo 8. Output: the form on which the sign is -1, and the constant; or what is
//! left, taken apart as far as it goes. Forms that are linearly dependent modulo 2 are written by as few of them as there
//! must be, and exclusive ors of these as `a xor b xor c = a + b + c - 2 ab - 2 ac - 2 bc + 4 abc`. Nothing else is
//! expanded, so the forms themselves may have many terms. Where the sign of a few forms is that of one conjunction with
//! some of them negated, it is read as that.

use std::collections::BTreeMap;

use rustc_hash::FxHashMap;

use super::polynomial::Polynomial;
use super::space::Space;
use crate::judge::audit::basis::form::Form;
use crate::judge::reading::graph::Signal;

/// A polynomial that is a constant and a sign.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Sign {
    /// The constant, in multiples of pi/4.
    pub(super) constant: u8,
    /// Where the sign is -1; not negated.
    pub(super) form: Form,
}

/// How often products are put into a polynomial and taken apart again.
const MAX_ROUNDS: usize = 4;
/// The most independent forms that are taken apart together.
const MAX_ATOMS: usize = 64;
/// The most of these in one form.
const MAX_SUM: u32 = 24;

/// A sum of forms as a sign, where that shows before any rule is applied: products are then those of the forms as they
/// stand.
pub(super) fn sign_of_sum(space: &mut Space, parts: &[(Form, u8)]) -> Result<Sign, Polynomial> {
    let (mut constant, mut sums) = (0, BTreeMap::new());
    for (form, coefficient) in parts {
        let coefficient = if form.flip { (8 - coefficient) % 8 } else { *coefficient };
        constant = (constant + if form.flip { 8 - coefficient } else { 0 }) % 8;
        let sum = sums.entry((form.terms.len(), &form.terms)).or_insert(0);
        *sum = (*sum + coefficient) % 8;
    }
    let mut sign = Sign { constant, form: Form::default() };
    let mut others = Vec::new();
    for ((_, terms), coefficient) in sums {
        let form = Form { terms: terms.clone(), flip: false };
        match coefficient {
            0 => {}
            4 => sign.form.add(&form),
            _ => others.push((form, coefficient)),
        }
    }
    let apart = take_apart(space, &others);
    match apart.filter(|apart| apart.iter().all(|(_, coefficient)| coefficient % 4 == 0)) {
        Some(apart) => {
            apart.iter().filter(|(_, coefficient)| *coefficient == 4).for_each(|(form, _)| sign.form.add(form));
            sign.constant = (sign.constant + 4 * u8::from(std::mem::take(&mut sign.form.flip))) % 8;
            Ok(sign)
        }
        None => {
            let mut polynomial = Polynomial::default();
            parts.iter().for_each(|(form, coefficient)| polynomial.add(space, form, *coefficient));
            sign_of(space, polynomial)
        }
    }
}

/// A polynomial as a sign, where it is one; otherwise what is left, taken apart as far as it goes.
pub(super) fn sign_of(space: &mut Space, mut polynomial: Polynomial) -> Result<Sign, Polynomial> {
    for _ in 0..MAX_ROUNDS {
        let parts = polynomial.take_all();
        let (signs, others): (Vec<_>, Vec<_>) = parts.into_iter().partition(|&(_, coefficient)| coefficient == 4);
        for (form, coefficient) in &signs {
            polynomial.add(space, form, *coefficient);
        }
        if others.is_empty() {
            let mut form = Form::default();
            for (term, _) in polynomial.take_all() {
                form.add(&term);
            }
            return Ok(Sign { constant: polynomial.constant, form });
        }
        let is_single = others.iter().all(|(form, _)| form.terms.len() == 1);
        match (!is_single).then(|| take_apart(space, &others)).flatten() {
            Some(parts) => parts.iter().for_each(|(form, coefficient)| polynomial.add(space, form, *coefficient)),
            None => {
                others.iter().for_each(|(form, coefficient)| polynomial.add(space, form, *coefficient));
                break;
            }
        }
        polynomial.settle(space);
    }
    Err(polynomial)
}

/// A sum of forms as a sum over products of independent ones; `None` where that is too large.
fn take_apart(space: &mut Space, parts: &[(Form, u8)]) -> Option<Vec<(Form, u8)>> {
    let mut basis = Basis::default();
    let mut products: FxHashMap<u64, u8> = FxHashMap::default();
    let mut add = |mask: u64, coefficient: u8| {
        let sum = products.entry(mask).or_insert(0);
        *sum = (*sum + coefficient) % 8;
    };
    for (form, coefficient) in parts {
        let mask = basis.mask(&form.terms)?;
        if mask.count_ones() > MAX_SUM {
            return None;
        }
        let atoms: Vec<u64> = (0..64).map(|at| 1 << at).filter(|bit| mask & bit != 0).collect();
        for (at, &a) in atoms.iter().enumerate() {
            add(a, *coefficient);
            for (more, &b) in atoms.iter().enumerate().skip(at + 1) {
                add(a | b, 6 * coefficient % 8);
                if coefficient % 2 == 1 {
                    atoms[more + 1..].iter().for_each(|&c| add(a | b | c, 4));
                }
            }
        }
    }
    let mut products: Vec<(u64, u8)> = products.into_iter().filter(|&(_, coefficient)| coefficient != 0).collect();
    products.sort_unstable_by_key(|&(mask, _)| (mask.count_ones(), mask));
    let mut sum = Vec::new();
    for group in groups(products) {
        match cube(&group, &basis.atoms) {
            Some((literals, is_negated)) => sum.push((space.product(&literals).negated_if(is_negated), 4)),
            None => {
                for (mask, coefficient) in group {
                    let factors: Vec<Form> = basis.chosen(mask).cloned().collect();
                    sum.push((space.product(&factors), coefficient));
                }
            }
        }
    }
    Some(sum)
}

/// Independent forms, and how others are exclusive ors of them.
#[derive(Default)]
struct Basis {
    atoms: Vec<Form>,
    /// In echelon form: terms, and of which atoms they are the exclusive or.
    rows: Vec<(Form, u64)>,
}

impl Basis {
    /// Of which atoms a form is the exclusive or; it becomes one where it is independent of them.
    fn mask(&mut self, terms: &[Signal]) -> Option<u64> {
        let mut rest = Form { terms: terms.to_vec(), flip: false };
        let mut mask = 0;
        for (row, atoms) in &self.rows {
            if rest.terms.binary_search(&row.terms[0]).is_ok() {
                rest.add(row);
                mask ^= atoms;
            }
        }
        if rest.terms.is_empty() {
            return Some(mask);
        }
        let bit = 1 << self.atoms.len();
        self.atoms.push(Form { terms: terms.to_vec(), flip: false });
        self.rows.push((rest, mask ^ bit));
        (self.atoms.len() < MAX_ATOMS).then_some(bit)
    }

    fn chosen(&self, mask: u64) -> impl Iterator<Item = &Form> {
        self.atoms.iter().enumerate().filter(move |(at, _)| mask >> at & 1 == 1).map(|(_, atom)| atom)
    }
}

/// Products grouped so that those with a common atom are together.
fn groups(products: Vec<(u64, u8)>) -> Vec<Vec<(u64, u8)>> {
    let mut groups: Vec<(u64, Vec<(u64, u8)>)> = Vec::new();
    for product in products {
        let (mut together, apart): (Vec<_>, Vec<_>) = groups.into_iter().partition(|(mask, _)| mask & product.0 != 0);
        let mask = together.iter().fold(product.0, |mask, (other, _)| mask | other);
        let mut all: Vec<(u64, u8)> = together.iter_mut().flat_map(|(_, group)| std::mem::take(group)).collect();
        all.push(product);
        groups = apart;
        groups.push((mask, all));
    }
    groups.into_iter().map(|(_, group)| group).collect()
}

/// The most atoms of a group whose values are all tried.
const MAX_CUBE: u32 = 8;

/// The literals whose conjunction has the sign of a group, or its opposite.
fn cube(group: &[(u64, u8)], atoms: &[Form]) -> Option<(Vec<Form>, bool)> {
    let all = group.iter().fold(0, |all, (mask, _)| all | mask);
    if all.count_ones() < 2 || all.count_ones() > MAX_CUBE || group.iter().any(|&(_, coefficient)| coefficient != 4) {
        return None;
    }
    let places: Vec<usize> = (0..64).filter(|at| all >> at & 1 == 1).collect();
    let spread =
        |value: u32| places.iter().enumerate().fold(0u64, |sum, (at, p)| sum | u64::from(value >> at & 1) << p);
    let sign = |value: u32| group.iter().filter(|(mask, _)| mask & spread(value) == *mask).count() % 2 == 1;
    let values = 1u32 << places.len();
    let holding: Vec<u32> = (0..values).filter(|&value| sign(value)).collect();
    let (value, is_negated) = match holding.len() as u32 {
        1 => (holding[0], false),
        count if count == values - 1 => ((0..values).find(|&value| !sign(value)).expect("one is left"), true),
        _ => return None,
    };
    let literal = |(at, &place): (usize, &usize)| atoms[place].clone().negated_if(value >> at & 1 == 0);
    Some((places.iter().enumerate().map(literal).collect(), is_negated))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn odd(forms: &[&Form]) -> Form {
        let mut sum = Form::default();
        forms.iter().for_each(|form| sum.add(form));
        sum
    }

    /// The seven phases of the textbook construction of a doubly controlled sign, with exclusive ors as inputs and
    /// every choice of negations: `4abc = a + b + c - (a xor b) - ...`.
    #[test]
    fn seven_phases_are_one_conjunction() {
        for signs in 0..8 {
            let mut space = Space::over(6);
            let bits: Vec<Form> = (0..6).map(|bit| Form::term(space.graph.bit(bit))).collect();
            let literal = |at: usize| odd(&[&bits[at], &bits[at + 3]]).negated_if(signs >> at & 1 == 1);
            let [a, b, c] = [0, 1, 2].map(literal);
            let mut sum = Polynomial::default();
            for (forms, eighths) in [
                (&[&a][..], 1),
                (&[&b], 1),
                (&[&c], 1),
                (&[&a, &b], 7),
                (&[&a, &c], 7),
                (&[&b, &c], 7),
                (&[&a, &b, &c], 1),
            ] {
                sum.add(&space, &odd(forms), eighths);
            }
            let abc = space.product(&[a.clone(), b.clone(), c]);
            let sign = sign_of(&mut space, sum.clone()).expect("a sign");
            assert_eq!((sign.form, sign.constant), (abc, 0), "{signs}");
            sum.add(&space, &odd(&[&a, &b]), 2);
            assert!(sign_of(&mut space, sum).is_err(), "a quarter turn is left");
        }
    }
}
