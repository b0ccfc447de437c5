//! Growth that persists and growth in states: what they reduce to, what a seeded simulation gives, what is refused.

use hence_core::{
    Band, Compounding, Curve, ErrorKind, GrowthState, Persistence, Schedule, Spec, Tail, Where,
};
use proptest::prelude::*;

fn made(spec: &Spec) -> Curve {
    spec.curve(&Where::default()).expect("a valid curve")
}

fn uncertain(mean: f64, sd: f64, persistence: Option<Persistence>) -> Spec {
    Spec::UncertainGrowth {
        preference: 0.01,
        hazard: 0.0,
        elasticity: 2.0,
        mean,
        sd,
        log: true,
        persistence,
        compounding: Compounding::Continuous,
    }
}

fn persistent(mean: f64, sd: f64, phi: f64, start: f64) -> Spec {
    uncertain(mean, sd, Some(Persistence { phi, start }))
}

fn regimes(states: &[(f64, f64)], transition: &[&[f64]], start: &[f64]) -> Spec {
    Spec::GrowthRegimes {
        preference: 0.01,
        hazard: 0.0,
        elasticity: 2.0,
        states: states.iter().map(|&(mean, sd)| GrowthState { mean, sd }).collect(),
        transition: transition.iter().map(|row| row.to_vec()).collect(),
        start: start.to_vec(),
    }
}

fn ulps(a: f64, b: f64) -> u64 {
    a.to_bits().abs_diff(b.to_bits())
}

/// Elasticity 2, mean 2%, shocks of 3.6%, persistence 0.7, preference 1%, by hand: the weights of a shock are 1, 1.7,
/// 2.19 in years 1, 2, 3.
#[test]
fn the_first_years_by_hand() {
    let curve = made(&persistent(0.02, 0.036, 0.7, 0.0));
    let caution = 4.0 * 0.036 * 0.036 / 2.0;
    let mut squares = 0.0;
    for (n, weight) in [(1.0f64, 1.0f64), (2.0, 1.7), (3.0, 2.19)] {
        squares += weight * weight;
        let expected = (-0.05 * n + caution * squares).exp();
        assert!((curve.factor(n).unwrap() / expected - 1.0).abs() < 1e-14, "year {n}");
    }
    // Growth 5% below its mean at the base: next year 3.5% below, then 2.45%.
    let low = made(&persistent(0.02, 0.0, 0.7, -0.05));
    assert!((low.instantaneous_rate(1.0).unwrap() - (0.05 - 2.0 * 0.035)).abs() < 1e-15);
    assert!((low.instantaneous_rate(2.0).unwrap() - (0.05 - 2.0 * 0.0245)).abs() < 1e-15);
    // Within a year the rate is that of the year.
    assert_eq!(low.instantaneous_rate(1.5).unwrap(), low.instantaneous_rate(2.0).unwrap());
    assert_eq!(low.mean_rate_continuous(0.0).unwrap(), low.instantaneous_rate(1.0).unwrap());
}

/// Boom (growth 3%) and slump (-1%), no spread: from the boom a year later 0.9 exp(-0.06) + 0.1 exp(0.02).
#[test]
fn two_states_by_hand() {
    let curve = made(&regimes(&[(0.03, 0.0), (-0.01, 0.0)], &[&[0.9, 0.1], &[0.5, 0.5]], &[1.0, 0.0]));
    let (boom, slump) = ((-0.06f64).exp(), 0.02f64.exp());
    let (a, b) = (0.9 * boom, 0.1 * slump);
    assert!((curve.factor(1.0).unwrap() / ((a + b) * (-0.01f64).exp()) - 1.0).abs() < 1e-14);
    let two = (a * 0.9 + b * 0.5) * boom + (a * 0.1 + b * 0.5) * slump;
    assert!((curve.factor(2.0).unwrap() / (two * (-0.02f64).exp()) - 1.0).abs() < 1e-14);
    assert_eq!(curve.factor(-0.5).unwrap_err().kind(), ErrorKind::OutsideDomain);
}

/// A reproducible source of normal numbers: splitmix64, and the method of Box and Muller.
struct Normals(u64);

impl Normals {
    fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        ((z ^ (z >> 31)) >> 11) as f64 * 2f64.powi(-53)
    }

    fn draw(&mut self) -> f64 {
        let (u, v) = (1.0 - self.uniform(), self.uniform());
        (-2.0 * u.ln()).sqrt() * (std::f64::consts::TAU * v).cos()
    }
}

/// The mean of exp(-0.01 n - 2 x) over paths, x being total log growth, and its standard error.
fn simulated(paths: u32, years: u32, mut path: impl FnMut(u32) -> f64) -> (f64, f64) {
    let (mut sum, mut squares) = (0.0, 0.0);
    for _ in 0..paths {
        let value = (-0.01 * f64::from(years) - 2.0 * path(years)).exp();
        sum += value;
        squares += value * value;
    }
    let n = f64::from(paths);
    let mean = sum / n;
    (mean, ((squares / n - mean * mean) / n).sqrt())
}

fn within_four_errors(spec: &Spec, years: u32, (mean, error): (f64, f64)) {
    let exact = made(spec).factor(f64::from(years)).unwrap();
    assert!(error < 0.01 * mean, "the simulation is too rough to say anything: {mean} +- {error}");
    assert!((mean - exact).abs() <= 4.0 * error, "simulated {mean} +- {error}, closed form {exact}");
}

#[test]
fn a_simulation_of_independent_years_agrees() {
    let mut normals = Normals(1);
    let path = |years| (0..years).map(|_| 0.02 + 0.036 * normals.draw()).sum();
    within_four_errors(&uncertain(0.02, 0.036, None), 40, simulated(40_000, 40, path));
}

#[test]
fn a_simulation_of_persistent_growth_agrees() {
    let mut normals = Normals(2);
    for (phi, start) in [(0.7, 0.0), (0.7, -0.03), (-0.5, 0.05)] {
        let path = |years| {
            let mut departure = start;
            let year = |_| {
                departure = phi * departure + 0.02 * normals.draw();
                0.02 + departure
            };
            (0..years).map(year).sum()
        };
        let found = simulated(40_000, 30, path);
        within_four_errors(&persistent(0.02, 0.02, phi, start), 30, found);
        // And would not agree with independent years.
        let independent = made(&uncertain(0.02, 0.02, None)).factor(30.0).unwrap();
        assert!((found.0 - independent).abs() > 8.0 * found.1, "persistence {phi} makes no difference");
    }
}

#[test]
fn a_simulation_of_two_states_agrees() {
    let mut normals = Normals(3);
    let states = [(0.03, 0.02), (-0.02, 0.04)];
    let stay = [0.9, 0.6];
    let path = |years| {
        let mut state = 0;
        let year = |_| {
            if normals.uniform() >= stay[state] {
                state = 1 - state;
            }
            states[state].0 + states[state].1 * normals.draw()
        };
        (0..years).map(year).sum()
    };
    let found = simulated(40_000, 40, path);
    let spec = regimes(&states, &[&[0.9, 0.1], &[0.4, 0.6]], &[1.0, 0.0]);
    within_four_errors(&spec, 40, found);
    // Another start would be told apart.
    let other = made(&regimes(&states, &[&[0.9, 0.1], &[0.4, 0.6]], &[0.0, 1.0]));
    assert!((other.factor(40.0).unwrap() - found.0).abs() > 8.0 * found.1);
}

proptest! {
    #![proptest_config(crate::repeatable())]

    #[test]
    fn without_persistence_years_are_independent(
        mean in -0.05..0.08f64, sd in 0.0..0.1f64, t in 0.0..1000.0f64,
    ) {
        let independent = made(&uncertain(mean, sd, None)).factor(t).unwrap();
        for phi in [0.0, 1e-300] {
            let none = made(&persistent(mean, sd, phi, 0.0)).factor(t).unwrap();
            prop_assert!(ulps(independent, none) <= 1, "{} and {}", independent, none);
        }
    }

    #[test]
    fn equal_states_are_independent_years(
        mean in -0.05..0.08f64, sd in 0.0..0.1f64, a in 0.0..1.0f64, b in 0.0..1.0f64, c in 0.0..1.0f64,
        t in 0.0..1000.0f64,
    ) {
        let independent = made(&uncertain(mean, sd, None)).factor(t).unwrap();
        let state = (mean, sd);
        let spec = regimes(&[state, state], &[&[a, 1.0 - a], &[b, 1.0 - b]], &[c, 1.0 - c]);
        let equal = made(&spec).factor(t).unwrap();
        prop_assert!(ulps(independent, equal) <= 1, "{} and {}", independent, equal);
    }

    #[test]
    fn precaution_lowers_the_rate_in_every_compounding(
        preference in 0.0..0.03f64, elasticity in 0.1..4.0f64, mean in -0.02..0.05f64, sd in 0.001..0.06f64,
        phi in 0.0..0.9f64, n in 1..300u32,
    ) {
        for (log, compounding) in
            [(false, Compounding::Yearly), (false, Compounding::Continuous), (true, Compounding::Continuous)]
        {
            let growth = vec![Band { value: mean, to: None }];
            let certain =
                made(&Spec::Ramsey { preference, hazard: 0.0, elasticity, growth, exact: false, compounding });
            let uncertain = |sd, persistence| {
                made(&Spec::UncertainGrowth {
                    preference, hazard: 0.0, elasticity, mean, sd, log, persistence, compounding,
                })
            };
            let independent = uncertain(sd, None);
            let t = f64::from(n);
            prop_assert!(independent.forward_rate(t).unwrap() < certain.forward_rate(t).unwrap());
            prop_assert!(uncertain(2.0 * sd, None).mean_rate(t).unwrap() < independent.mean_rate(t).unwrap());
            if log {
                // Persistence lowers the rate further, and the more the longer the horizon.
                let persistent = uncertain(sd, Some(Persistence { phi, start: 0.0 }));
                let rate = |n: u32| persistent.instantaneous_rate(f64::from(n)).unwrap();
                let slack = 1e-15;
                prop_assert!(rate(n) <= independent.instantaneous_rate(t).unwrap() + slack);
                prop_assert!(rate(n + 1) <= rate(n) + slack);
            }
        }
    }

    #[test]
    fn the_factors_are_log_linear_within_a_year(phi in -0.9..0.99f64, n in 0..400u32, share in 0.01..0.99f64) {
        for spec in [
            persistent(0.02, 0.01, phi, 0.01),
            regimes(&[(0.03, 0.01), (-0.01, 0.02)], &[&[0.9, 0.1], &[0.3, 0.7]], &[0.5, 0.5]),
        ] {
            let curve = made(&spec);
            let log = |t: f64| curve.factor(t).unwrap().ln();
            let t = f64::from(n);
            let between = log(t) + share * (log(t + 1.0) - log(t));
            prop_assert!((log(t + share) - between).abs() < 1e-13 * (1.0 + between.abs()));
        }
    }
}

/// Growth of 1% or 3% for ever is a mixture of two flat rates, whose mean rate falls towards the lower.
#[test]
fn states_that_never_change_are_a_mixture() {
    let spec = regimes(&[(0.01, 0.0), (0.03, 0.0)], &[&[1.0, 0.0], &[0.0, 1.0]], &[0.5, 0.5]);
    let flat = |rate| Spec::Flat { rate, compounding: Compounding::Continuous };
    let mixture = made(&Spec::Mixture(vec![(0.5, flat(0.03)), (0.5, flat(0.07))]));
    let curve = made(&spec);
    for n in 1..=400 {
        let t = f64::from(n);
        let (a, b) = (curve.mean_rate(t).unwrap(), mixture.mean_rate(t).unwrap());
        assert!((a - b).abs() < 1e-15, "{a} and {b} at {n}");
        // The first year's rate is one rate; from then on the mean falls.
        assert!(n == 1 || a < curve.mean_rate(t - 1.0).unwrap());
        assert!(a > 0.03);
    }
}

#[test]
fn a_state_nobody_enters_does_not_matter() {
    let two = made(&regimes(&[(0.02, 0.01), (-0.9, 1.0)], &[&[1.0, 0.0], &[0.0, 1.0]], &[1.0, 0.0]));
    let one = made(&regimes(&[(0.02, 0.01)], &[&[1.0]], &[1.0]));
    assert_eq!(two.factor(1e6).unwrap(), one.factor(1e6).unwrap());
    assert_eq!(two.mean_rate(5000.0).unwrap(), one.mean_rate(5000.0).unwrap());
}

#[test]
fn many_offsets_are_their_scalars_far_out_too() {
    for spec in [
        persistent(0.02, 0.01, 0.9, 0.0),
        persistent(0.0, 0.05, 0.9, 0.0),
        regimes(&[(0.03, 0.01), (-0.3, 0.2)], &[&[0.9, 0.1], &[0.3, 0.7]], &[0.5, 0.5]),
    ] {
        let curve = made(&spec);
        let offsets = [0.0, 1.0, 1.5, 40.0, 100.25];
        let mut factors = [0.0; 5];
        curve.factors(&offsets, &mut factors).unwrap();
        for (&t, &factor) in offsets.iter().zip(&factors) {
            assert_eq!(factor.to_bits(), curve.factor(t).unwrap().to_bits());
        }
    }
    // The factor falls to nothing, or rises beyond any number; neither is silent nor wrong.
    assert_eq!(made(&persistent(0.02, 0.01, 0.9, 0.0)).factor(1e15).unwrap(), 0.0);
    let rising = made(&persistent(0.0, 0.05, 0.9, 0.0));
    assert_eq!(rising.factor(1e6).unwrap_err().kind(), ErrorKind::NotFinite);
    let warnings = rising.warnings();
    assert!(warnings.len() == 1 && warnings[0].contains("-49% a year"), "{warnings:?}");
    assert!(made(&persistent(0.02, 0.01, 0.9, 0.0)).warnings().is_empty());
}

#[test]
fn parameters_out_of_range_are_refused() {
    let refused = |spec: &Spec| spec.curve(&Where::default()).unwrap_err();
    for phi in [1.0, -1.0, 7.0] {
        let error = refused(&persistent(0.02, 0.03, phi, 0.0));
        assert_eq!((error.kind(), error.argument()), (ErrorKind::RateRange, "persistence"));
    }
    assert_eq!(refused(&persistent(0.02, 0.03, f64::NAN, 0.0)).kind(), ErrorKind::NotFinite);
    assert_eq!(refused(&persistent(0.02, 0.03, 0.5, -1.5)).kind(), ErrorKind::RateRange);
    let (good, one) = ((0.02, 0.01), &[1.0, 0.0][..]);
    for (states, transition, start, kind, argument, index) in [
        (vec![], vec![], vec![], ErrorKind::Shape, "states", None),
        (vec![good; 2], vec![one], vec![1.0, 0.0], ErrorKind::Shape, "transition", None),
        (vec![good; 2], vec![one, &[1.0][..]], vec![1.0, 0.0], ErrorKind::Shape, "transition", Some(1)),
        (vec![good; 2], vec![one, one], vec![1.0], ErrorKind::Shape, "start", None),
        (
            vec![good; 2],
            vec![one, &[0.5, 0.4][..]],
            vec![1.0, 0.0],
            ErrorKind::Weights,
            "transition",
            Some(1),
        ),
        (
            vec![good; 2],
            vec![one, &[1.5, -0.5][..]],
            vec![1.0, 0.0],
            ErrorKind::Weights,
            "transition",
            Some(1),
        ),
        (vec![good; 2], vec![one, one], vec![0.5, 0.6], ErrorKind::Weights, "start", None),
        (vec![good, (2.0, 0.1)], vec![one, one], vec![1.0, 0.0], ErrorKind::RateRange, "growth", Some(1)),
        (vec![good, (0.02, -0.1)], vec![one, one], vec![1.0, 0.0], ErrorKind::RateRange, "sd", Some(1)),
        (vec![good; 11], vec![one], vec![1.0], ErrorKind::Shape, "states", None),
    ] {
        let error = refused(&regimes(&states, &transition, &start));
        assert_eq!((error.kind(), error.argument(), error.index()), (kind, argument, index), "{error}");
    }
    // A tail without end needs a last rate, which states that take turns for ever do not have; one that ends does not.
    let turns: [&[f64]; 2] = [&[0.0, 1.0], &[1.0, 0.0]];
    let curve = made(&regimes(&[good, (0.01, 0.02)], &turns, &[1.0, 0.0]));
    let tail = |text: &str| Tail::parse(text).unwrap().present_value(&curve, 10.0, 100.0, Some(2026));
    assert_eq!(tail("for ever").unwrap_err().kind(), ErrorKind::Unsupported);
    assert_eq!(tail("to 11").unwrap(), 100.0 * curve.factor(11.0).unwrap());
}

/// A schedule file with this curve in place of a line.
fn schedule(curve: &str) -> Result<Schedule, hence_core::Error> {
    let text = format!(
        "id = \"own-rate\"\ntitle = \"Rates of our own\"\nbody = \"Ostrey Rivers Board\"\nyear = 2026\n\
         place = \"rule 4\"\naddress = \"\"\nstatus = \"current\"\ncomplete = true\nchecked = \"invented\"\n{curve}"
    );
    Schedule::parse("own.toml", &text)
}

#[test]
fn schedule_files_hold_what_a_line_cannot() {
    let file = "[persistent_growth]\npreference = 0.01\nelasticity = 2\nmean = 0.02\nsd = 0.036\n\
                persistence = 0.7\nstart = -0.05\n";
    let departing = schedule(file).unwrap();
    assert_eq!(departing.spec(), &persistent(0.02, 0.036, 0.7, -0.05));
    assert_eq!(departing.line().unwrap_err().kind(), ErrorKind::Unsupported);
    let level = schedule(&file.replace("start = -0.05\n", "")).unwrap();
    let line = "preference 1%, elasticity 2, log growth 2% sd 3.6% persistence 0.7";
    assert_eq!(level.line().unwrap(), line);
    let file = "[regimes]\npreference = 0.01\nelasticity = 2\nstart = [1, 0]\n\
                states = [{ mean = 0.03, sd = 0.02 }, { mean = -0.02, sd = 0.04 }]\n\
                transition = [[0.9, 0.1], [0.4, 0.6]]\n";
    let states = schedule(file).unwrap();
    let expected = regimes(&[(0.03, 0.02), (-0.02, 0.04)], &[&[0.9, 0.1], &[0.4, 0.6]], &[1.0, 0.0]);
    assert_eq!(states.spec(), &expected);
    assert_eq!(states.line().unwrap_err().kind(), ErrorKind::Unsupported);
    assert!(!states.spec().fits_a_line());
    for (from, to, message) in [
        ("[0.4, 0.6]", "[0.4, 0.5]", "own.toml: regimes: row 2 of transition: the chances sum to 0.9, not 1"),
        ("[1, 0]", "[1]", "own.toml: regimes: start: there are 1 chances for 2 states"),
        (
            "mean = 0.03",
            "mean = 3.0",
            "own.toml: regimes: state 1: growth is 300% (stored 3), allowed above -100% to 100%",
        ),
        ("sd = 0.02", "spread = 0.02", "own.toml, line 14: unknown field `spread`, expected `mean` or `sd`"),
    ] {
        let error = schedule(&file.replace(from, to)).unwrap_err();
        assert_eq!((error.kind(), error.message()), (ErrorKind::BadSchedule, message));
    }
    let both = schedule(&format!("line = \"3%\"\n{file}")).unwrap_err();
    assert!(both.message().contains("exactly one of"), "{both}");
}
