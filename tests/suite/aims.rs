//! The plans of every aim against a simulation that knows only two amplitudes, and the reading of shots.
//!
//! A search never leaves the plane of two states: all marked states alike, all others alike. The simulation here has an
//! amplitude for each class and applies the oracle and the reflection to them; it uses no formula of the planner.

use std::f64::consts::PI;
use std::path::Path;

use num_bigint::BigUint;
use tallymark::places::Places;
use tallymark::problem::{BitLit, Bits, Problem};
use tallymark::search::number::Wide;
use tallymark::search::plan::{
    self, certainty::certainty, certainty::certainty_with, estimate, fixed_point::fixed_point, interval::interval,
    noise::Noisy, schedule::Schedule,
};
use tallymark::search::shots::{self, Options, Order, Predicted};
use tallymark::span::Sources;

/// A complex number.
#[derive(Clone, Copy, PartialEq, Debug)]
struct Amplitude {
    re: f64,
    im: f64,
}

impl Amplitude {
    fn real(re: f64) -> Self {
        Self { re, im: 0.0 }
    }

    fn turn(angle: f64) -> Self {
        Self { re: angle.cos(), im: angle.sin() }
    }

    fn plus(self, other: Self) -> Self {
        Self { re: self.re + other.re, im: self.im + other.im }
    }

    fn times(self, other: Self) -> Self {
        Self { re: self.re * other.re - self.im * other.im, im: self.re * other.im + self.im * other.re }
    }

    fn scaled(self, by: f64) -> Self {
        Self { re: self.re * by, im: self.im * by }
    }

    fn square(self) -> f64 {
        self.re * self.re + self.im * self.im
    }
}

/// The amplitude of each unmarked and each marked state, and how many there are of either.
#[derive(Clone, Copy)]
struct Classes {
    unmarked: (f64, Amplitude),
    marked: (f64, Amplitude),
}

impl Classes {
    /// The even superposition of `space` states.
    fn start(space: u64, marked: u64) -> Self {
        let each = Amplitude::real(1.0 / (space as f64).sqrt());
        Self { unmarked: ((space - marked) as f64, each), marked: (marked as f64, each) }
    }

    /// One iteration: marked states turn by `oracle`, then `-(1 - (1 - e^{i start}) |s><s|)` is applied.
    fn iterate(&mut self, oracle: f64, start: f64) {
        self.marked.1 = self.marked.1.times(Amplitude::turn(oracle));
        let space = self.unmarked.0 + self.marked.0;
        let sum = self.unmarked.1.scaled(self.unmarked.0).plus(self.marked.1.scaled(self.marked.0));
        let part = sum.scaled(1.0 / space).times(Amplitude::real(1.0).plus(Amplitude::turn(start).scaled(-1.0)));
        self.unmarked.1 = part.plus(self.unmarked.1.scaled(-1.0));
        self.marked.1 = part.plus(self.marked.1.scaled(-1.0));
    }

    fn success(&self) -> f64 {
        self.marked.0 * self.marked.1.square()
    }
}

/// The success of plain iterations, by simulation.
fn simulated(space: u64, marked: u64, iterations: u64) -> f64 {
    let mut classes = Classes::start(space, marked);
    for _ in 0..iterations {
        classes.iterate(PI, PI);
    }
    classes.success()
}

fn big(number: u64) -> BigUint {
    BigUint::from(number)
}

fn small(number: &BigUint) -> u64 {
    u64::try_from(number).unwrap()
}

#[track_caller]
fn near(found: f64, wanted: f64) {
    assert!((found - wanted).abs() < 1e-12, "{found} not {wanted}");
}

const CASES: &[(u64, u64)] = &[
    (4, 1),
    (5, 1),
    (8, 1),
    (8, 3),
    (16, 1),
    (16, 3),
    (60, 7),
    (64, 5),
    (1000, 1),
    (1024, 3),
    (1024, 300),
    (1 << 20, 1),
];

#[test]
fn plain_plans_reach_their_success() {
    for &(n, m) in CASES {
        let first = plan::plan(&big(n), &big(m));
        let later = plan::plan_within(&big(n), &big(m), &big(200));
        let restarted = plan::plan_for_least_work(&big(n), &big(m), 0.5);
        for plan in [&first, &later, &restarted] {
            let k = small(&plan.iterations);
            near(plan.success, simulated(n, m, k));
            near(plan.expected_oracle_calls.unwrap().to_f64() * plan.success / (k as f64).max(1.0), f64::from(k > 0));
        }
        // No k of up to 200 beats the second, none up to the first peak works less than the third.
        let work = |k: u64| (k as f64 + 0.5) / simulated(n, m, k);
        if n <= 1024 {
            assert!((0..=200).all(|k| simulated(n, m, k) <= later.success + 1e-12), "{m} in {n}");
            let least = (0..=small(&first.iterations)).map(work).fold(f64::INFINITY, f64::min);
            assert!((restarted.expected_work(0.5).unwrap().to_f64() / least - 1.0).abs() < 1e-12, "{m} in {n}");
        }
    }
}

#[test]
fn matched_phases_and_the_weakened_start_are_certain() {
    for &(n, m) in CASES {
        let fewest = certainty(&big(n), &big(m)).unwrap();
        let more = certainty_with(&big(n), &big(m), &(&fewest.iterations + 3u32)).unwrap();
        for tuned in [fewest, more] {
            let iterations = small(&tuned.iterations);
            let mut classes = Classes::start(n, m);
            (0..iterations).for_each(|_| classes.iterate(tuned.phase, tuned.phase));
            near(classes.success(), 1.0);
            // The weakened start has amplitudes of its own: three classes, since the extra qubit is 0 or 1.
            near(weakened(n, m, tuned.rotation_sine, iterations), 1.0);
            near((tuned.phase / 2.0).sin(), tuned.rotation_sine);
        }
    }
    // Opposite signs are not certain: 0.00203896... for one in eight (Long 2001; computed outside this program).
    let eight = certainty(&big(8), &big(1)).unwrap();
    let mut classes = Classes::start(8, 1);
    (0..2).for_each(|_| classes.iterate(eight.phase, -eight.phase));
    assert!((classes.success() - 0.00203896).abs() < 1e-8, "{}", classes.success());
}

/// Plain iterations where one more qubit is 1 with amplitude `sine`, and only what is marked there is marked.
fn weakened(space: u64, marked: u64, sine: f64, iterations: u64) -> f64 {
    let good_start = sine * (marked as f64 / space as f64).sqrt();
    let bad_start = (1.0 - good_start * good_start).sqrt();
    let (mut bad, mut good) = (bad_start, good_start);
    for _ in 0..iterations {
        good = -good;
        let overlap = bad * bad_start + good * good_start;
        (bad, good) = (2.0 * overlap * bad_start - bad, 2.0 * overlap * good_start - good);
    }
    good * good
}

#[test]
fn fixed_point_phases_reach_their_success_for_every_count() {
    for (n, least, failure) in [(8u64, 1u64, 0.1), (16, 1, 0.1), (64, 2, 0.01), (1024, 1, 0.1), (1000, 17, 0.3)] {
        let sequence = fixed_point(&big(n), &big(least), failure).unwrap();
        let phases = sequence.phases().unwrap();
        let counts = if n <= 64 { (1..=n).collect() } else { vec![1, 2, 3, 17, 18, 100, n / 2, n - 1, n] };
        for m in counts {
            let mut classes = Classes::start(n, m);
            // The reflection's phase is -alpha in the source.
            phases.iter().for_each(|&(alpha, beta)| classes.iterate(beta, -alpha));
            near(classes.success(), sequence.success(&big(n), &big(m)));
            assert!(m < least || classes.success() >= 1.0 - failure - 1e-12, "{m} in {n}: {}", classes.success());
        }
    }
}

#[test]
fn the_schedule_succeeds_as_often_as_it_says() {
    for (n, m) in [(16u64, 1u64), (64, 5), (1024, 7)] {
        let schedule = Schedule::new(&big(n));
        let (mut missed, mut iterations) = (1.0, 0.0);
        for stage in 0..200 {
            let width = schedule.width(stage).to_f64() as u64;
            let success = (0..width).map(|k| simulated(n, m, k)).sum::<f64>() / width as f64;
            near(schedule.stage_success(stage, &big(m)), success);
            iterations += missed * (width - 1) as f64 / 2.0;
            missed *= 1.0 - success;
        }
        // 200 stages leave less than 1e-15 of the expectation.
        near(schedule.expected(&big(m)).unwrap().iterations.to_f64(), iterations);
    }
}

/// Every draw of the random schedule, seeded: the mean over many searches is near the exact expectation.
#[test]
fn drawn_schedules_cost_what_is_expected() {
    let (n, m) = (64u64, 1u64);
    let schedule = Schedule::new(&big(n));
    let expected = schedule.expected(&big(m)).unwrap();
    let curve: Vec<f64> = (0..8).map(|k| simulated(n, m, k)).collect();
    let mut random = tallymark::random::SplitMix64::new(7);
    let (searches, mut iterations, mut measurements) = (20_000, 0u64, 0u64);
    for _ in 0..searches {
        for stage in 0.. {
            let k = schedule.draw(stage, &mut random).unwrap();
            iterations += k;
            measurements += 1;
            if random.unit() < curve[k as usize] {
                break;
            }
        }
    }
    // The deviation of one search is below 8 iterations, so that of the mean below 0.06; five of these are allowed.
    assert!((iterations as f64 / f64::from(searches) - expected.iterations.to_f64()).abs() < 0.3);
    assert!((measurements as f64 / f64::from(searches) - expected.measurements).abs() < 0.3);
}

/// The exact distribution of an estimate against a Fourier transform of the simulated amplitudes.
#[test]
fn estimates_are_distributed_as_simulated() {
    for (n, m, points) in [(4u64, 1u64, 16u64), (8, 3, 8), (60, 7, 24), (1024, 1, 64), (8, 0, 8), (8, 8, 8)] {
        let mut classes = Classes::start(n, m);
        let states: Vec<Classes> = (0..points)
            .map(|at| {
                if at > 0 {
                    classes.iterate(PI, PI);
                }
                classes
            })
            .collect();
        let chance = |y: u64| {
            let transform = |pick: fn(&Classes) -> (f64, Amplitude)| {
                let terms = states.iter().enumerate().map(|(at, state)| {
                    let angle = -2.0 * PI * ((at as u64 * y) % points) as f64 / points as f64;
                    pick(state).1.times(Amplitude::turn(angle)).scaled(1.0 / points as f64)
                });
                terms.fold(Amplitude::real(0.0), Amplitude::plus).square() * pick(&states[0]).0
            };
            transform(|state| state.unmarked) + transform(|state| state.marked)
        };
        let found = estimate::distribution(&big(n), &big(m), points);
        (0..points).for_each(|y| near(found[y as usize], chance(y)));
    }
}

#[test]
fn the_worst_case_of_an_interval_is_kept() {
    for (n, low, high) in [(64u64, 2u64, 6u64), (1024, 10, 40), (1000, 1, 9), (16, 5, 5)] {
        let found = interval(&big(n), &big(low), &big(high));
        let k = small(&found.iterations);
        near(found.success_at_low, simulated(n, low, k));
        near(found.success_at_high, simulated(n, high, k));
        assert!((low..=high).all(|m| simulated(n, m, k) >= found.worst - 1e-12));
    }
}

/// The noise of the model, applied to a mixture: with chance q the state is the even mixture for good.
#[test]
fn noise_is_what_a_mixture_gives() {
    for (n, m, error) in [(16u64, 1u64, 0.05), (1024, 3, 0.01), (60, 7, 0.2)] {
        let noisy = Noisy::new(&big(n), &big(m), &big(n), error);
        let mut classes = Classes::start(n, m);
        let (mut pure, mut mixed) = (1.0, 0.0);
        for k in 0..30 {
            near(noisy.success(k).to_f64(), pure * classes.success() + mixed * m as f64 / n as f64);
            classes.iterate(PI, PI);
            (pure, mixed) = (pure * (1.0 - error), mixed + pure * error);
        }
    }
    let best = Noisy::new(&big(1024), &big(1), &big(1024), 0.05).best();
    near(best.success.to_f64(), 0.333419029859045);
    assert!(plan::noise::runs_for(Wide::new(0.333419029859045), 0.99).unwrap().to_f64() == 12.0);
}

/// `x1 or x2`, and `not x1 or x3`: four solutions of eight.
fn problem() -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(3);
    let bits: Vec<_> = problem.bits().collect();
    problem.clauses.push(&[BitLit::new(bits[0], true), BitLit::new(bits[1], true)]);
    problem.clauses.push(&[BitLit::new(bits[0], false), BitLit::new(bits[2], true)]);
    problem
}

#[test]
fn shots_become_checked_answers() {
    let problem = problem();
    let mut places = Places::as_given(&problem);
    // search[0] carries the last bit, search[2] the first.
    places.searched.reverse();
    let text = "001 5\n100 7\n011 5\n\r\n101 1\r\n";
    let shots = shots::read(text, "shots.txt", &mut Sources::new(), &Options::new(3)).unwrap();
    let checked = shots::check(&problem, &places, &shots).unwrap();
    let rows: Vec<(String, String, u64, bool)> = checked
        .answers
        .iter()
        .map(|answer| (answer.measured.to_string(), answer.bits.to_string(), answer.count, answer.holds))
        .collect();
    // Measured 100 is search[2] = 1: x1 alone, which breaks the second clause.
    let wanted = [("100", "001", 7, false), ("001", "100", 5, false), ("011", "110", 5, true), ("101", "101", 1, true)];
    assert_eq!(rows, wanted.map(|(a, b, count, holds)| (a.to_owned(), b.to_owned(), count, holds)));
    assert_eq!((checked.hits, checked.total, checked.solutions), (6, 18, 2));
    let plan = plan::plan(&big(8), &big(4));
    let found = shots::compare(checked.hits, checked.total, &Predicted::by(&plan), 0.95);
    assert!(!found.contradicts && found.rate == 6.0 / 18.0);
}

/// Every case file: what is read, or which mistake is found where.
#[test]
fn files_of_shots() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/cases/shots");
    let mut files: Vec<_> = std::fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.sort();
    assert!(files.len() >= 30, "the cases are there");
    let mut differences = Vec::new();
    for path in files {
        let case = std::fs::read_to_string(&path).unwrap();
        let (head, rest) = case.split_once("\n---- text\n").expect("a text");
        let (text, wanted) = rest.split_once("---- expect\n").expect("an expectation");
        let mut compare = |text: &str| {
            let found = outcome(text, &options(head));
            if found != wanted.trim_end() {
                differences.push(format!("{}:\n{found}\nbut expected\n{wanted}", path.display()));
            }
        };
        compare(text);
        // Windows line ends and a byte order mark change nothing but columns of the first line.
        if !wanted.starts_with('S') {
            compare(&format!("\u{feff}{}", text.replace('\n', "\r\n")));
        }
    }
    assert!(differences.is_empty(), "{}", differences.join("\n"));
}

/// Torn and mixed files are refused or read, and never end the program.
#[test]
fn any_text_is_read_or_refused() {
    const PIECES: &[&str] = &[
        "01", "10", "0", "1", "{", "}", "[", "\"", ":", ",", " ", "\n", "\r\n", "\t", "#", "17", "-", "é", "\u{feff}",
        "9e9",
    ];
    let mut random = tallymark::random::SplitMix64::new(11);
    let (mut read, mut refused) = (0, 0);
    for _ in 0..20_000 {
        let length = random.below(12);
        let text: String = (0..length).map(|_| PIECES[random.below(PIECES.len() as u64) as usize]).collect();
        let mut options = Options::new(2);
        options.register = random.coin().then(|| random.below(4) as usize);
        let said = outcome(&text, &options);
        if said.starts_with('S') { refused += 1 } else { read += 1 }
    }
    assert!(read > 100 && refused > 100, "{read} read, {refused} refused");
}

fn options(head: &str) -> Options {
    let mut options = Options::new(0);
    let mut words = head.split_whitespace();
    while let Some(word) = words.next() {
        let mut number = || words.next().unwrap().parse().unwrap();
        match word {
            "width" => options.width = number(),
            "register" => options.register = Some(number()),
            "zero-first" => options.order = Order::ZeroFirst,
            _ => panic!("{word}"),
        }
    }
    options
}

/// The counts, or the codes of the mistakes with line, column and what was found.
fn outcome(text: &str, options: &Options) -> String {
    let mut sources = Sources::new();
    let lines: Vec<String> = match shots::read(text, "shots", &mut sources, options) {
        Ok(shots) => {
            assert_eq!(shots.total, shots.counts.iter().map(|(_, count)| count).sum::<u64>());
            shots.counts.iter().map(|(bits, count): &(Bits, u64)| format!("{bits} {count}")).collect()
        }
        Err(diagnostics) => diagnostics
            .iter()
            .map(|diagnostic| {
                let at = sources.position(diagnostic.span().expect("a place"));
                assert!(diagnostic.expected.is_some(), "{diagnostic:?}");
                let found = diagnostic.found.as_ref().map_or_else(String::new, |found| format!(" `{found}`"));
                format!("{} {}:{}{found}", diagnostic.code, at.line, at.column)
            })
            .collect(),
    };
    lines.join("\n")
}
