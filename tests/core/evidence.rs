//! Growth from a series, and rates derived from their parts, against hand calculations and numpy.

use hence_core::{
    ElasticitySource, ErrorKind, FigureKind, GrowthBy, GrowthEstimate, GrowthSource, Hazard, RateLine,
    RateParts, Schedule, Stated, TaxBracket, growth_from_consumption,
};

/// An invented series; the figures below are those of numpy 2: polyfit(range(12), log(c), 1, cov=True), and of
/// x = diff(log(c)): x.mean(), x.std(ddof=1), and the sum of products of neighbours over the sum of squares.
const SERIES: [f64; 12] = [
    41230.0, 42011.0, 43102.5, 42890.0, 43377.25, 44900.0, 46012.0, 45120.0, 44985.5, 46210.0, 47633.0,
    48950.75,
];

fn estimate() -> GrowthEstimate {
    growth_from_consumption(&SERIES, None).expect("a sound series")
}

#[test]
fn growth_of_a_series_is_that_of_numpy() {
    let growth = estimate();
    let phi = growth.persistence.expect("growth that varies");
    for (found, expected) in [
        (growth.trend.value, 0.013590674324586003),
        (growth.trend.error, 0.0012584813411351651),
        (growth.mean.value, 0.015604413081566258),
        (growth.mean.error, 0.005266108283838102),
        (growth.geometric_mean, 0.01572679768670593),
        (growth.sd.value, 0.01746570528287338),
        (growth.sd.error, 0.0039054504287482066),
        (phi.value, 0.1543266917024161),
        (phi.error, 0.29789920080276505),
    ] {
        assert!((found / expected - 1.0).abs() < 1e-11, "{found} and {expected}");
    }
    assert_eq!(growth.values, 12);
    // The unit of consumption does not matter.
    let thousands: Vec<f64> = SERIES.iter().map(|c| c / 1000.0).collect();
    let other = growth_from_consumption(&thousands, None).unwrap();
    assert!((other.trend.value / growth.trend.value - 1.0).abs() < 1e-12);
}

/// What the estimates are estimates of, on a long series made from known parameters with a fixed seed.
#[test]
fn the_parameters_of_a_made_series_come_back() {
    let (mut state, mut departure, mut log) = (7u64, 0.0, 0.0);
    let mut series = vec![1.0];
    for _ in 0..4000 {
        // The sum of twelve uniform numbers is near enough to normal.
        let mut shock = -6.0;
        for _ in 0..12 {
            state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            shock += (state >> 11) as f64 * 2f64.powi(-53);
        }
        departure = 0.4 * departure + 0.02 * shock;
        log += 0.005 + departure;
        series.push(f64::exp(log));
    }
    let growth = growth_from_consumption(&series, None).unwrap();
    let phi = growth.persistence.unwrap();
    assert!((phi.value - 0.4).abs() < 4.0 * phi.error && phi.error < 0.02, "{phi:?}");
    let shock = growth.shock_sd(phi.value);
    assert!((shock - 0.02).abs() < 4.0 * growth.sd.error, "{shock}");
    // Years that hang together make the error of the mean larger by sqrt((1 + phi)/(1 - phi)).
    let error = growth.mean.error * (1.4f64 / 0.6).sqrt();
    assert!((growth.mean.value - 0.005).abs() < 4.0 * error, "{:?}", growth.mean);
}

fn parts() -> RateParts {
    RateParts {
        preference: 0.01,
        hazard: Hazard::Rate(0.0),
        elasticity: ElasticitySource::Given(2.0),
        growth: GrowthSource::Given(0.02),
        sd: None,
        persistence: None,
        log: false,
        continuous: false,
        decimals: None,
    }
}

fn series(by: GrowthBy) -> GrowthSource {
    GrowthSource::Series { estimate: estimate(), name: "plan.xlsx!Data!B2:B13".into(), by }
}

/// The rates of a derivation, in order.
fn rates(parts: &RateParts) -> Vec<f64> {
    let derived = parts.derive().expect("a rate");
    derived.figures().iter().filter(|f| f.kind == FigureKind::Rate).map(|f| f.value).collect()
}

fn near(found: f64, expected: f64) {
    assert!((found - expected).abs() < 1e-15, "{found} and {expected}");
}

#[test]
fn rates_are_the_sums_of_their_parts() {
    // 1% + 2 x 2%, and its continuous equal.
    let certain = rates(&parts());
    near(certain[0], 0.05);
    near(certain[1], 1.05f64.ln());
    let continuous = rates(&RateParts { continuous: true, ..parts() });
    near(continuous[0], 0.05);
    near(continuous[1], 0.05f64.exp_m1());
    // Less 2 x 3 x 0.036^2/2, or of log growth 4 x 0.036^2/2.
    let spread = RateParts { sd: Some(Stated::Given(0.036)), ..parts() };
    near(rates(&spread)[0], 0.05 - 3.0 * 0.036 * 0.036);
    near(rates(&RateParts { log: true, ..spread.clone() })[0], 0.05 - 2.0 * 0.036 * 0.036);
    // With persistence that is the rate of year 1; in the long run (2 x 0.036/0.3)^2/2 comes off.
    let persistent = rates(&RateParts { persistence: Some(Stated::Given(0.7)), ..spread });
    near(persistent[0], 0.05 - 2.0 * 0.036 * 0.036);
    near(persistent[2], 0.05 - 0.24 * 0.24 / 2.0);
}

#[test]
fn hazards_follow_the_compounding() {
    let hazard = |hazard, continuous| {
        let derived = RateParts { hazard, continuous, ..parts() }.derive().unwrap();
        derived.figures()[1].value
    };
    near(hazard(Hazard::Probability(0.01), false), 0.01 / 0.99);
    near(hazard(Hazard::Probability(0.01), true), -(0.99f64.ln()));
    near(hazard(Hazard::Every(100.0), false), 1.0 / 99.0);
    near(hazard(Hazard::Every(100.0), true), 0.01);
}

#[test]
fn every_figure_says_where_it_came_from() {
    let parts = RateParts {
        hazard: Hazard::Every(100.0),
        elasticity: ElasticitySource::Taxes(vec![
            TaxBracket { marginal: 0.3, average: 0.3, weight: 3.0 },
            TaxBracket { marginal: 0.4, average: 0.25, weight: 1.0 },
        ]),
        growth: series(GrowthBy::Trend),
        sd: Some(Stated::Estimated),
        persistence: Some(Stated::Estimated),
        decimals: Some(2),
        ..parts()
    };
    let derived = parts.derive().unwrap();
    // eta (3 x 1 + 1.77566)/4; shock 1.7466% x sqrt(1 - 0.15^2).
    assert_eq!(
        derived.spec().to_string(),
        "preference 1%, hazard 1%, elasticity 1.19, log growth 1.36% sd 1.73% persistence 0.15"
    );
    for (name, origin) in [
        ("pure time preference", "as given"),
        ("hazard", "1/W of an expected waiting time W of 100 years, rounded to 2 decimals"),
        ("elasticity of marginal utility", "weighted mean of 2 tax brackets, by equal absolute sacrifice"),
        ("mean of log growth of consumption", "log-linear trend of the 12 values of plan.xlsx!Data!B2:B13"),
        ("persistence of log growth", "first-order autocorrelation in the series, rounded to 2 decimals"),
        ("standard deviation of the yearly shock", "sqrt(1 - phi^2) times the standard deviation"),
    ] {
        let figure = derived.figures().iter().find(|figure| figure.name == name).expect(name);
        assert!(figure.origin.starts_with(origin), "{name}: {}", figure.origin);
    }
    assert!(derived.figures().iter().all(|figure| !figure.name.is_empty() && !figure.origin.is_empty()));
    let trend = derived.figures().iter().find(|figure| figure.name == "log-linear trend").unwrap();
    assert!((trend.error.unwrap() - 0.0012584813411351651).abs() < 1e-15);
}

#[test]
fn estimates_go_into_the_line_that_suits_them() {
    let line = |growth, sd: Option<Stated>| {
        RateParts { growth, sd, decimals: Some(3), ..parts() }.derive().unwrap().spec().to_string()
    };
    // exp(0.0135907) - 1 = 0.0136834.
    let certain = "preference 1%, elasticity 2, growth";
    assert_eq!(line(series(GrowthBy::Trend), None), format!("{certain} 1.368%"));
    assert_eq!(line(series(GrowthBy::Mean), None), format!("{certain} 1.573%"));
    let log = "preference 1%, elasticity 2, log growth";
    let sd = Some(Stated::Estimated);
    assert_eq!(line(series(GrowthBy::Trend), sd), format!("{log} 1.359% sd 1.747%"));
    assert_eq!(line(series(GrowthBy::Mean), sd), format!("{log} 1.56% sd 1.747%"));
}

#[test]
fn a_line_and_a_schedule_read_back_to_the_same_curve() {
    for parts in [
        parts(),
        RateParts { continuous: true, hazard: Hazard::Probability(0.013), ..parts() },
        RateParts { growth: series(GrowthBy::Trend), sd: Some(Stated::Estimated), ..parts() },
        RateParts { persistence: Some(Stated::Given(0.7)), sd: Some(Stated::Given(0.02)), ..parts() },
    ] {
        let derived = parts.derive().unwrap();
        let line = RateLine::parse(&derived.spec().to_string()).unwrap();
        assert_eq!(line.spec(), derived.spec());
        let text = derived.schedule("our-rate", 2026).unwrap();
        let schedule = Schedule::parse("our-rate.toml", &text).unwrap();
        assert_eq!((schedule.spec(), schedule.id(), schedule.year()), (derived.spec(), "our-rate", 2026));
        assert!(
            schedule.notes().contains("pure time preference (delta) 1%: as given"),
            "{}",
            schedule.notes()
        );
    }
    let odd =
        GrowthSource::Series { estimate: estimate(), name: "a \"b\\c\".xlsx!\tX".into(), by: GrowthBy::Mean };
    let text = RateParts { growth: odd, ..parts() }.derive().unwrap().schedule("our-rate", 2026).unwrap();
    assert!(Schedule::parse("our-rate.toml", &text).unwrap().notes().contains("a \"b\\c\".xlsx!\tX"));
    let derived = parts().derive().unwrap();
    assert_eq!(derived.schedule("Our rate", 2026).unwrap_err().kind(), ErrorKind::BadSchedule);
    assert_eq!(derived.schedule("our-rate", 26).unwrap_err().kind(), ErrorKind::BadSchedule);
}

#[test]
fn parts_that_do_not_go_together_are_refused() {
    let refused = |parts: RateParts| {
        let error = parts.derive().unwrap_err();
        (error.kind(), error.argument())
    };
    let estimated = Some(Stated::Estimated);
    assert_eq!(refused(RateParts { sd: estimated, ..parts() }), (ErrorKind::NoMeaning, "sd"));
    let sd = Some(Stated::Given(0.02));
    let alone = RateParts { persistence: Some(Stated::Given(0.5)), ..parts() };
    assert_eq!(refused(alone.clone()), (ErrorKind::NoMeaning, "persistence"));
    assert_eq!(
        refused(RateParts { persistence: estimated, sd, ..parts() }),
        (ErrorKind::NoMeaning, "persistence")
    );
    let wild = RateParts { persistence: Some(Stated::Given(1.0)), sd, ..alone };
    assert_eq!(refused(wild), (ErrorKind::RateRange, "persistence"));
    assert_eq!(refused(RateParts { preference: 3.0, ..parts() }), (ErrorKind::RateRange, "preference"));
    let hazard = Hazard::Probability(1.0);
    assert_eq!(refused(RateParts { hazard, ..parts() }), (ErrorKind::RateRange, "probability"));
    let level = growth_from_consumption(&[1.0, 2.0, 4.0, 8.0], None).unwrap();
    let growth = GrowthSource::Series { estimate: level, name: "a series".into(), by: GrowthBy::Trend };
    let parts = RateParts {
        growth,
        sd: estimated,
        persistence: estimated,
        elasticity: ElasticitySource::Given(0.1),
        ..parts()
    };
    assert_eq!(refused(parts), (ErrorKind::NoMeaning, "persistence"));
}

#[test]
fn figures_are_read_from_texts() {
    assert_eq!(Stated::parse_sd("3.6%").unwrap(), Stated::Given(0.036));
    assert_eq!(Stated::parse_sd(" Estimated").unwrap(), Stated::Estimated);
    assert_eq!(Stated::parse_persistence("-0.2").unwrap(), Stated::Given(-0.2));
    for (error, argument, at, hint) in [
        (Stated::parse_sd("3,6%").unwrap_err(), "sd", 1, Some("3.6%")),
        (Stated::parse_persistence("70%").unwrap_err(), "persistence", 2, None),
        (Hazard::parse("every 100").unwrap_err(), "hazard", 9, None),
        (Hazard::parse("evry 100 years").unwrap_err(), "hazard", 0, Some("`every`")),
        (
            Hazard::parse("probability 0.01").unwrap_err(),
            "hazard",
            16,
            Some("`1%` if 0.01 is meant as a fraction, else `0.01%`"),
        ),
        (TaxBracket::parse("40%;25%").unwrap_err(), "taxes", 3, None),
        (TaxBracket::parse("40%,25%,3%").unwrap_err(), "taxes", 9, None),
    ] {
        assert_eq!(error.kind(), ErrorKind::Syntax);
        assert_eq!((error.argument(), error.at(), error.hint()), (argument, Some(at), hint), "{error}");
    }
}
