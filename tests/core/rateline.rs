//! The rate line against its specification: the design's examples, errors that point, and print-then-parse.
//!
//! The case files hold the examples of the grammar's specification and its rules, worked by hand.
use hence_core::{
    Band, Compounding, Edge, HorizonRule, Persistence, Position, RateLine, Spec, Where, percent,
};
use proptest::prelude::*;

/// The cases of a file: lines that are neither empty nor a comment, cut at " | ".
fn cases(text: &'static str) -> impl Iterator<Item = Vec<&'static str>> {
    text.lines()
        .filter(|line| !line.trim().is_empty() && !line.starts_with('#'))
        .map(|line| line.split(" | ").collect())
}

#[test]
fn canonical_forms() {
    let mut count = 0;
    for case in cases(include_str!("rateline-canonical.txt")) {
        let [written, canonical] = case[..] else { panic!("bad case {case:?}") };
        let line = RateLine::parse(written).unwrap_or_else(|error| panic!("{written}: {error}"));
        assert_eq!(line.to_string(), canonical, "{written}");
        assert_eq!(RateLine::parse(canonical).as_ref(), Ok(&line), "{written}");
        count += 1;
    }
    assert!(count >= 40);
}

#[test]
fn errors_point_and_help() {
    let mut count = 0;
    let mut wrong = Vec::new();
    for case in cases(include_str!("rateline-errors.txt")) {
        let [written, kind, at, message, hint] = case[..] else { panic!("bad case {case:?}") };
        let error = RateLine::parse(written).expect_err(written);
        let found = (error.code(), error.at(), error.hint().unwrap_or("-"), error.argument());
        if found != (kind, at.parse().ok(), hint, "basis") || !error.message().contains(message) {
            wrong.push(format!("{written}\n  {error} at {:?}, hint {:?}", error.at(), error.hint()));
        }
        count += 1;
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
    assert!(count >= 60);
}

#[test]
fn meanings() {
    let spec = |text: &str| RateLine::parse(text).map(|line| line.spec().clone());
    let band = |value, to| Band { value, to };
    assert_eq!(spec("3.5%"), Ok(Spec::Flat { rate: 0.035, compounding: Compounding::Yearly }));
    assert_eq!(spec("3.5% continuous"), Ok(Spec::Flat { rate: 0.035, compounding: Compounding::Continuous }));
    let bands = vec![band(0.025, Some(Edge::Year(2070))), band(0.015, None)];
    assert_eq!(spec("2.5% to 2070, 1.5% after"), Ok(Spec::Bands { bands, edges_from: None }));
    let bands = vec![band(0.025, Some(Edge::Offset(999.5)))];
    assert_eq!(spec("2.5% to 999.5; edges from 2026"), Ok(Spec::Bands { bands, edges_from: Some(2026) }));
    let points = vec![(3.0, 0.039), (10.0, 0.04), (30.0, 0.042)];
    assert_eq!(
        spec("3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by length, interpolated"),
        Ok(Spec::HorizonPoints { points, rule: HorizonRule::ByLength })
    );
    assert_eq!(
        spec("preference 0.5%, hazard 1%, elasticity 1, growth 2%"),
        Ok(Spec::Ramsey {
            preference: 0.005,
            hazard: 0.01,
            elasticity: 1.0,
            growth: vec![band(0.02, None)],
            exact: false,
            compounding: Compounding::Yearly,
        })
    );
    assert_eq!(
        spec("preference 1%, elasticity 2, log growth 2% sd 3.6% persistence 0.7"),
        Ok(Spec::UncertainGrowth {
            preference: 0.01,
            hazard: 0.0,
            elasticity: 2.0,
            mean: 0.02,
            sd: 0.036,
            log: true,
            persistence: Some(Persistence { phi: 0.7, start: 0.0 }),
            compounding: Compounding::Continuous,
        })
    );
    assert_eq!(spec("gamma mean 4% sd 3%"), Ok(Spec::Gamma { mean: 0.04, sd: 0.03 }));
    let flat = |rate, compounding| Spec::Flat { rate, compounding };
    assert_eq!(
        spec("0.5 of (1%), 0.5 of (7% continuous)"),
        Ok(Spec::Mixture(vec![
            (0.5, flat(0.01, Compounding::Yearly)),
            (0.5, flat(0.07, Compounding::Continuous))
        ]))
    );
}

#[test]
fn timing_is_end_where_it_is_not_stated() {
    let timing =
        |text: &str| RateLine::parse(text).unwrap().timing().map(|timing| (timing.flows, timing.base));
    assert_eq!(timing("3%"), None);
    assert_eq!(timing("3%; flows averaged"), Some((Position::Averaged, Position::End)));
    assert_eq!(timing("3%; base start"), Some((Position::End, Position::Start)));
    assert_eq!(timing("3%; base middle, flows start"), Some((Position::Start, Position::Middle)));
}

#[test]
fn limits_of_length_and_depth() {
    let nested = |depth: usize| format!("{}3%{}", "1 of (".repeat(depth), ")".repeat(depth));
    assert!(RateLine::parse(&nested(8)).is_ok());
    let error = RateLine::parse(&nested(9)).unwrap_err();
    assert_eq!((error.code(), error.at()), ("syntax", Some(48)));
    assert!(RateLine::parse(&nested(600)).is_err());

    let spaced = |chars: usize| format!("3%{}", " ".repeat(chars - 2));
    assert!(RateLine::parse(&spaced(4096)).is_ok());
    assert_eq!(RateLine::parse(&spaced(4097)).unwrap_err().at(), Some(4096));
    // Short as written, but over the limit in its canonical form.
    let dense: Vec<String> = (1..=500).map(|year| format!("1%to{year}")).collect();
    assert!(dense.join(",").len() < 4096);
    assert_eq!(RateLine::parse(&dense.join(",")).unwrap_err().code(), "syntax");
    assert_eq!(RateLine::parse(&format!("{}%", "9".repeat(400))).unwrap_err().code(), "not-finite");
    // Decimal commas without end stay cheap.
    assert!(RateLine::parse(&"1,1".repeat(1365)).is_err());
}

#[test]
fn control_characters_do_not_reach_the_message() {
    let error = RateLine::parse("3% \u{1b}[31m").unwrap_err();
    assert!(!error.to_string().contains('\u{1b}'), "{error}");
}

/// Deterministic: a 64-bit linear congruential generator (Knuth's constants).
fn random(state: &mut u64, below: usize) -> usize {
    *state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
    ((*state >> 33) as usize) % below
}

#[test]
fn random_texts_never_panic_and_what_parses_round_trips() {
    let pieces = [
        "3.5%",
        "1%",
        "0.5",
        "2",
        "30",
        "2070",
        "%",
        ",",
        ";",
        "(",
        ")",
        " ",
        "to",
        "after",
        "at",
        "of",
        "flows",
        "middle",
        "base",
        "whole horizon by flow",
        "interpolated",
        "exact",
        "continuous",
        "edges from",
        "growth",
        "elasticity",
        "preference",
        "log",
        "sd",
        "persistence",
        "gamma mean",
        "-",
        ".",
        "\u{e9}",
        "0.5 of (",
        "1,5",
    ];
    let mut state = 42;
    let mut parsed = 0;
    for _ in 0..20_000 {
        let count = 1 + random(&mut state, 9);
        let text: Vec<&str> = (0..count).map(|_| pieces[random(&mut state, pieces.len())]).collect();
        let text = text.join(if random(&mut state, 3) == 0 { "" } else { " " });
        match RateLine::parse(&text) {
            Ok(line) => {
                parsed += 1;
                // The curve may be refused, for a parameter out of its range, but it never panics.
                let at = Where { base_year: Some(2026), length: Some(60.0) };
                if let Ok(curve) = line.spec().curve(&at) {
                    let _ = curve.factor(25.0);
                }
                assert_eq!(RateLine::parse(&line.to_string()), Ok(line), "{text}");
            }
            Err(error) => {
                let at = error.at().expect("every error points at a character");
                assert!(at <= text.chars().count(), "{text}: {error}");
            }
        }
    }
    assert!(parsed > 50, "only {parsed} texts were valid, too few to prove anything");
}

fn rate() -> impl Strategy<Value = f64> {
    prop_oneof![
        -0.4999..1.0f64,
        (-4999..=10_000i32).prop_map(|basis_points| f64::from(basis_points) / 10_000.0)
    ]
}

fn edges(count: std::ops::Range<usize>) -> impl Strategy<Value = Vec<f64>> {
    prop::collection::vec(0.001..20.0f64, count).prop_map(|steps| {
        let mut at = 0.0;
        steps
            .into_iter()
            .map(|step| {
                at += step;
                at
            })
            .collect()
    })
}

/// Bands by offset, then by calendar year, then "after".
fn bands() -> impl Strategy<Value = Vec<Band>> {
    (edges(0..5), 0..4i32, any::<bool>()).prop_flat_map(|(offsets, years, after)| {
        let mut to: Vec<Option<Edge>> = offsets.into_iter().map(|years| Some(Edge::Offset(years))).collect();
        to.extend((0..years).map(|i| Some(Edge::Year(2030 + 7 * i))));
        if after || to.is_empty() {
            to.push(None);
        }
        let count = to.len();
        (Just(to), prop::collection::vec(rate(), count))
            .prop_map(|(to, rates)| to.into_iter().zip(rates).map(|(to, value)| Band { value, to }).collect())
    })
}

fn rule() -> impl Strategy<Value = HorizonRule> {
    prop_oneof![Just(HorizonRule::ByFlow), Just(HorizonRule::ByLength)]
}

fn compounding() -> impl Strategy<Value = Compounding> {
    prop_oneof![Just(Compounding::Yearly), Just(Compounding::Continuous)]
}

/// Every curve that a line can state, but mixtures.
fn simple() -> impl Strategy<Value = Spec> {
    let parameters = || (rate(), rate(), 0.0..10.0f64);
    prop_oneof![
        (rate(), compounding()).prop_map(|(rate, compounding)| Spec::Flat { rate, compounding }),
        (bands(), prop::option::of(1000..=9999i32))
            .prop_map(|(bands, edges_from)| Spec::Bands { bands, edges_from }),
        (bands(), rule()).prop_map(|(bands, rule)| Spec::HorizonSteps { bands, rule }),
        (
            edges(1..6).prop_flat_map(|at| {
                let n = at.len();
                (Just(at), prop::collection::vec(rate(), n))
            }),
            rule()
        )
            .prop_map(|((at, rates), rule)| {
                Spec::HorizonPoints { points: at.into_iter().zip(rates).collect(), rule }
            }),
        (parameters(), bands(), 0..3u8).prop_map(|((preference, hazard, elasticity), growth, form)| {
            let compounding = if form == 2 { Compounding::Continuous } else { Compounding::Yearly };
            Spec::Ramsey { preference, hazard, elasticity, growth, exact: form == 1, compounding }
        }),
        (parameters(), rate(), 0.0..1.0f64, any::<bool>(), prop::option::of(-1.0..1.0f64), compounding())
            .prop_map(|((preference, hazard, elasticity), mean, sd, log, persistence, compounding)| {
                // Log growth is continuous, and persistence is that of log growth.
                let compounding = if log { Compounding::Continuous } else { compounding };
                let persistence =
                    persistence.filter(|_| log).map(|phi| Persistence { phi: phi + 0.0, start: 0.0 });
                Spec::UncertainGrowth {
                    preference,
                    hazard,
                    elasticity,
                    mean,
                    sd,
                    log,
                    persistence,
                    compounding,
                }
            }),
        (rate(), 0.0..1.0f64).prop_map(|(mean, sd)| Spec::Gamma { mean, sd }),
    ]
}

fn spec() -> impl Strategy<Value = Spec> {
    simple().prop_recursive(3, 8, 3, |inner| {
        prop::collection::vec((1..100u32, inner), 1..4).prop_map(|parts| {
            let total: u32 = parts.iter().map(|part| part.0).sum();
            Spec::Mixture(
                parts.into_iter().map(|(w, spec)| (f64::from(w) / f64::from(total), spec)).collect(),
            )
        })
    })
}

proptest! {
    #[test]
    fn a_printed_curve_parses_back(spec in spec()) {
        let text = spec.to_string();
        let line = RateLine::parse(&text).map_err(|error| TestCaseError::fail(format!("{text}: {error}")))?;
        prop_assert_eq!(line.spec(), &spec);
        prop_assert_eq!(line.to_string(), text);
    }

    #[test]
    fn a_percentage_reads_back_as_the_same_double(rate in -0.4999..1.0f64) {
        let text = percent(rate);
        let line = RateLine::parse(&text).map_err(|error| TestCaseError::fail(format!("{text}: {error}")))?;
        prop_assert_eq!(line.spec(), &Spec::Flat { rate, compounding: Compounding::Yearly });
    }

    #[test]
    fn any_text_is_read_or_refused(text in "\\PC{0,60}") {
        let _ = RateLine::parse(&text);
    }
}
