//! The planner against whole tables of published formulas, evaluated outside this program with forty digits.

use num_bigint::BigUint;
use tallymark::search::plan::certainty::certainty_with;
use tallymark::search::plan::schedule::Schedule;
use tallymark::search::plan::success::{success, theta};
use tallymark::search::plan::{plan, plan_within};

/// A row: N, M, theta, pi/(4 theta), k*, p(k*), 1 - p(k*), and the success one iteration before and after.
type Row = (u64, u64, f64, f64, u64, f64, f64, Option<f64>, Option<f64>);

/// M. Boyer, G. Brassard, P. Hoyer, A. Tapp, "Tight bounds on quantum searching", Fortschritte der Physik 46:493, 1998,
/// section 3: `sin^2 theta = M/N`, `p_k = sin^2((2k + 1) theta)`, `k* = floor(pi / (4 theta))`.
#[rustfmt::skip]
const FIRST_PEAKS: &[Row] = &[
    (4, 1, 0.523598775598299, 1.5, 1, 1.0, 0.0, Some(0.25), Some(0.25)),
    (8, 1, 0.361367123906708, 2.17340790414628, 2, 0.9453125, 0.0546875, Some(0.78125), Some(0.330078125)),
    (8, 2, 0.523598775598299, 1.5, 1, 1.0, 0.0, Some(0.25), Some(0.25)),
    (8, 3, 0.659058035826409, 1.19169803067892, 1, 0.84375, 0.15625, Some(0.375), Some(0.0234375)),
    (8, 5, 0.911738290968488, 0.861429393914305, 0, 0.625, 0.375, None, Some(0.15625)),
    (8, 7, 1.20942920288819, 0.649395732732326, 0, 0.875, 0.125, None, Some(0.21875)),
    (16, 1, 0.252680255142079, 3.10826883943041, 3, 0.961318969726563, 0.0386810302734375, Some(0.908447265625), Some(0.581704139709473)),
    (16, 2, 0.361367123906708, 2.17340790414628, 2, 0.9453125, 0.0546875, Some(0.78125), Some(0.330078125)),
    (16, 3, 0.447832396928932, 1.75377701297051, 1, 0.94921875, 0.05078125, Some(0.1875), Some(0.615966796875)),
    (64, 1, 0.125327831168065, 6.26674981987221, 6, 0.996585680786799, 0.00341431921320096, Some(0.963515481619211), Some(0.907449247573261)),
    (64, 5, 0.283282165310539, 2.77249421098035, 2, 0.976353883743286, 0.0236461162567139, Some(0.56427001953125), Some(0.839514327235520)),
    (256, 1, 0.0625407617964914, 12.5581803105173, 12, 0.999947042103274, 5.29578967263105e-5, Some(0.982583211354746), Some(0.986186240103673)),
    (1024, 1, 0.0312550884994952, 25.1286494808720, 25, 0.999461244744408, 5.38755255592072e-4, Some(0.998456541294402), Some(0.992669487419061)),
    (1024, 2, 0.0442085726072247, 17.7657435442531, 17, 0.999448026154011, 5.51973845989152e-4, Some(0.987527585443502), Some(0.995791199935522)),
    (1024, 3, 0.0541530516382455, 14.5033038700032, 14, 0.999999871958208, 1.28041792295834e-7, Some(0.988238551761395), Some(0.988392362690177)),
    (1024, 10, 0.0989827295998270, 7.93469897802072, 7, 0.992612733670239, 7.38726632976095e-3, Some(0.921478065109888), Some(0.987528329973872)),
    (1 << 16, 1, 0.00390625993417568, 201.061418500607, 201, 0.999988259646167, 1.17403538334380e-5, Some(0.999980762309889), Some(0.999873691398843)),
    (1 << 20, 1, 9.76562655220496e-4, 804.247591487220, 804, 0.999999756965361, 2.43034639035600e-7, Some(0.999997867993117), Some(0.999994016554058)),
    (1 << 20, 4, 1.95312624176556e-3, 402.123603995753, 402, 0.999997838225859, 2.16177414050828e-6, Some(0.999994066136645), Some(0.999971092985308)),
    (1 << 20, 10, 3.08816668603020e-3, 254.325055363857, 254, 0.999998832484776, 1.16751522436718e-6, Some(0.999974032874098), Some(0.999947339055884)),
    (1 << 20, 1000, 0.0308865283837320, 25.4285024733022, 25, 0.999980493587761, 1.95064122393143e-5, Some(0.996713845176882), Some(0.995625320785377)),
    (1 << 20, 1 << 18, 0.523598775598299, 1.5, 1, 1.0, 0.0, Some(0.25), Some(0.25)),
    (1 << 30, 1, 3.05175781297370e-5, 25735.9270142128, 25735, 0.999999999320726, 6.79273672351950e-10, Some(0.999999992413932), Some(0.999999998776940)),
];

#[track_caller]
fn near(found: f64, wanted: f64) {
    assert!((found - wanted).abs() < 1e-13 * wanted.abs().max(1e-2), "{found} not {wanted}");
}

#[test]
fn the_table_of_first_peaks() {
    for &(n, m, angle, peak, k, at, failure, before, after) in FIRST_PEAKS {
        let (space, marked) = (BigUint::from(n), BigUint::from(m));
        near(theta(&space, &marked), angle);
        near(std::f64::consts::FRAC_PI_4 / theta(&space, &marked), peak);
        let found = plan(&space, &marked);
        assert_eq!(found.iterations, k.into(), "{m} in {n}");
        near(found.success, at);
        near(1.0 - found.success, failure);
        // The same paper: the failure at the first peak is at most M/N, where the first peak is not the start itself.
        assert!(k == 0 || 1.0 - found.success <= m as f64 / n as f64 + 1e-15, "{m} in {n}");
        let at = |k: u64| success(&space, &marked, &k.into());
        before.into_iter().for_each(|wanted| near(at(k - 1), wanted));
        after.into_iter().for_each(|wanted| near(at(k + 1), wanted));
    }
}

/// The same formula as an exact fraction: the best k is not the first peak. Computed outside this program.
#[test]
fn a_later_peak_may_be_higher() {
    for (n, m, first, bound, later, wanted) in
        [(8u32, 1u32, 2u32, 6u32, 6u32, 0.999786376953125), (8, 3, 1, 3, 3, 0.990234375)]
    {
        assert_eq!(plan(&n.into(), &m.into()).iterations, first.into());
        let found = plan_within(&n.into(), &m.into(), &bound.into());
        assert_eq!(found.iterations, later.into());
        near(found.success, wanted);
    }
    // A wrong count: 804 iterations are right for one in 2^20, and nearly useless for four.
    // The sine is near its zero there, which costs a floating point number three of its digits.
    let wrong = success(&(1u32 << 20).into(), &4u32.into(), &804u32.into());
    assert!((wrong / 9.75095520723366e-7 - 1.0).abs() < 1e-12, "{wrong}");
}

/// The same paper, theorem 7: no search with nothing known expects fewer than `floor(sin(pi/8) sqrt(N))` queries.
#[test]
fn the_schedule_keeps_to_the_lower_bound() {
    near((std::f64::consts::PI / 8.0).sin(), 0.382683432365090);
    for bits in [4u32, 6, 8, 10, 16] {
        let space = BigUint::from(1u32) << bits;
        let expected = Schedule::new(&space).expected(&1u32.into()).unwrap();
        let bound = (0.382683432365090 * f64::from(1u32 << bits).sqrt()).floor();
        assert!(expected.iterations.to_f64() + expected.measurements >= bound, "{bits}");
    }
}

/// An odd number L of states out of the next power of two, in one round: with `a = L / 2^n` the extra qubit is turned by
/// `2 asin(sqrt(1 / (4 a)))`, so that a quarter is marked (R. Babbush and others, "Encoding electronic spectra in quantum
/// circuits with linear T complexity", Physical Review X 8:041015, 2018, from memory; digits evaluated outside).
#[test]
fn one_round_is_exact_for_an_odd_number_of_states() {
    for (odd, strings, angle) in
        [(3u32, 4u32, 1.23095941734077), (5, 8, 1.36943840600457), (7, 8, 1.12788528272126), (25, 32, 1.20252843336)]
    {
        let found = certainty_with(&strings.into(), &odd.into(), &1u32.into()).unwrap();
        assert!((2.0 * found.rotation_sine.asin() - angle).abs() < 1e-11, "{odd}: {found:?}");
    }
}
