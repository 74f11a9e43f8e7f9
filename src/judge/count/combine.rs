//! What two ways say together: bounds narrow each other, numbers confirm each other, and a contradiction is a fault.
//!
//! Only proven numbers and bounds come here; an interval with a confidence does not.

use num_bigint::BigUint;

use super::{Fault, Method, Tally};

/// Narrows bounds by those of another way; bounds that exclude each other are a fault.
pub(super) fn within(tally: &mut Tally, other: &Tally) -> Result<(), Fault> {
    if other.high < tally.low || tally.high < other.low {
        let (mine, theirs) = if other.high < tally.low { (&tally.low, &other.high) } else { (&tally.high, &other.low) };
        return Err(disagree(tally.method, mine, other.method, theirs));
    }
    if tally.exact().is_none() {
        tally.low = tally.low.clone().max(other.low.clone());
        tally.high = tally.high.clone().min(other.high.clone());
    }
    Ok(())
}

/// Notes that another way confirms the exact tally, where it does; bounds must hold it between them.
pub(super) fn agree(tally: &mut Tally, other: &Tally) -> Result<(), Fault> {
    if other.low > tally.low || other.high < tally.low {
        let second_count = if other.low > tally.low { &other.low } else { &other.high };
        return Err(disagree(tally.method, &tally.low, other.method, second_count));
    }
    if other.exact().is_some() {
        tally.checked_by.push(other.method);
        tally.checked_by.extend(other.checked_by.iter().copied());
    }
    Ok(())
}

pub(super) fn disagree(first: Method, first_count: &BigUint, second: Method, second_count: &BigUint) -> Fault {
    Fault::Disagree { first, first_count: first_count.clone(), second, second_count: second_count.clone() }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn tally(low: u32, high: u32, method: Method) -> Tally {
        Tally::between(low.into(), high.into(), method)
    }

    #[test]
    fn ways_that_disagree_are_a_fault() {
        let swept = || tally(5, 5, Method::Sweep);
        let mut first = swept();
        assert_eq!(agree(&mut first, &tally(5, 5, Method::Listing)), Ok(()));
        assert_eq!(first.checked_by, [Method::Listing]);
        // Bounds confirm nothing, but they must hold.
        assert_eq!(agree(&mut first, &tally(2, 9, Method::Listing)), Ok(()));
        assert_eq!(first.checked_by, [Method::Listing]);
        for (low, high) in [(6, 6), (4, 4), (6, 9), (0, 4)] {
            let fault = agree(&mut swept(), &tally(low, high, Method::Listing)).unwrap_err();
            assert!(matches!(fault, Fault::Disagree { .. }), "{fault}");
        }
    }
}
