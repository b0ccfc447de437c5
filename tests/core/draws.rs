//! Draws of an uncertain rate: texts, random numbers, values against the curves' exact route, statistics against theory.
//!
//! The case files hold the grammar's rules, worked by hand. Quantiles are from mpmath 1.3 (60 digits) at the doubles given.

use std::num::NonZeroUsize;

use hence_core::{
    Band, Compounding, Distribution, Drawn, Draws, ErrorKind, OptionFlows, Perpetual, Quantity,
    RateDistribution, Spec, Tail, Where, dot, draw_values, first_places, histogram, internal_rates, spread,
};

fn quantity(name: &str) -> Quantity {
    Quantity::ALL.into_iter().find(|quantity| quantity.name() == name).expect(name)
}

fn cases(text: &'static str) -> impl Iterator<Item = Vec<&'static str>> {
    text.lines().filter(|line| !line.starts_with('#')).map(|line| line.split(" | ").collect())
}

#[test]
fn canonical_texts() {
    for case in cases(include_str!("distribution-texts.txt")) {
        let [name, written, canonical] = case[..] else { panic!("bad case {case:?}") };
        let of = quantity(name);
        let found = Distribution::parse(of, written).unwrap_or_else(|error| panic!("{written}: {error}"));
        assert_eq!(found.text(of), canonical, "{written}");
        assert_eq!(Distribution::parse(of, canonical).as_ref(), Ok(&found), "{written}");
    }
}

#[test]
fn errors_point_and_help() {
    let mut wrong = Vec::new();
    for case in cases(include_str!("distribution-errors.txt")) {
        let [name, written, kind, at, message, hint] = case[..] else { panic!("bad case {case:?}") };
        let error = Distribution::parse(quantity(name), written).expect_err(written);
        let found = (error.code(), error.at(), error.hint().unwrap_or("-"), error.argument());
        if found != (kind, at.parse().ok(), hint, name) || !error.message().contains(message) {
            wrong.push(format!("{written}\n  {error} at {:?}, hint {:?}", error.at(), error.hint()));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// p, and the standard normal quantile.
#[expect(clippy::excessive_precision, reason = "as mpmath prints them")]
const NORMAL: [(f64, f64); 25] = [
    (1.110_223_024_625_156_5e-16, -8.209_536_151_601_386_855_6),
    (1e-15, -7.941_345_326_170_996_771_3),
    (1e-12, -7.034_483_825_301_131_932_6),
    (1.4e-11, -6.656_723_091_518_183_635_6),
    (1e-9, -5.997_807_015_007_686_861_4),
    (1e-6, -4.753_424_308_822_898_957_3),
    (0.001, -3.090_232_306_167_813_535_4),
    (0.025, -1.959_963_984_540_054_211_8),
    (0.074_99, -1.439_602_118_239_316_209_2),
    (0.075, -1.439_531_470_938_455_934_9),
    (0.075_1, -1.438_825_392_752_539_982_4),
    (0.1, -1.281_551_565_544_600_435_3),
    (0.25, -0.674_489_750_196_081_743_2),
    (0.49, -0.025_068_908_258_711_058_033),
    (0.499_999_9, -2.506_628_274_703_106_513_5e-7),
    (0.5, 0.0),
    (0.6, 0.253_347_103_135_799_741_32),
    (0.75, 0.674_489_750_196_081_743_2),
    (0.9, 1.281_551_565_544_600_593_5),
    (0.925, 1.439_531_470_938_456_229_1),
    (0.925_1, 1.440_238_267_527_963_859_4),
    (0.975, 1.959_963_984_540_053_855_6),
    (0.999, 3.090_232_306_167_813_277_8),
    (0.999_999, 4.753_424_308_817_087_765_7),
    (1.0 - 1.110_223_024_625_156_5e-16, 8.209_536_151_601_386_855_6),
];

#[test]
fn normal_quantiles_against_arbitrary_precision() {
    let standard = Distribution::Normal { mean: 0.0, sd: 1.0, within: None };
    for (p, exact) in NORMAL {
        let found = standard.quantile(Quantity::Growth, p).unwrap();
        assert!((found - exact).abs() <= 1e-15 * exact.abs(), "{p}: {found} is not {exact}");
    }
}

#[test]
#[expect(clippy::excessive_precision, reason = "as mpmath prints them")]
fn quantiles_between_bounds_against_arbitrary_precision() {
    for (mean, sd, low, high, p, exact) in [
        (0.01, 0.003, 0.0, 0.02, 0.5, 0.010_000_000_000_000_000_208),
        (0.01, 0.003, 0.0, 0.02, 0.001, 0.001_051_651_018_586_896_6),
        (0.01, 0.003, 0.012, 0.02, 0.25, 0.012_639_479_334_110_299_588),
        (0.01, 0.003, 0.012, 0.02, 0.999, 0.019_607_598_552_127_673_886),
        (0.01, 0.003, 0.014, 0.03, 0.75, 0.015_997_076_084_146_327_028),
        (0.01, 0.003, -0.2, 0.008, 0.9, 0.007_756_131_352_372_451_327_7),
        (1.5, 0.3, 0.0, 20.0, 1e-9, 0.000_201_447_950_098_155_744_52),
        (1.5, 0.3, 1.0, 2.0, 0.975, 1.941_843_673_846_692_540_1),
    ] {
        let distribution = Distribution::Normal { mean, sd, within: Some((low, high)) };
        let of = if mean > 1.0 { Quantity::Elasticity } else { Quantity::Preference };
        let found = distribution.quantile(of, p).unwrap();
        assert!(
            (found - exact).abs() <= 1e-15 * (mean + sd),
            "{distribution:?} at {p}: {found} is not {exact}"
        );
    }
}

#[test]
fn other_quantiles_by_hand() {
    let at = |text: &str, p| {
        Distribution::parse(Quantity::Elasticity, text).unwrap().quantile(Quantity::Elasticity, p)
    };
    assert_eq!(at("uniform 1 to 3", 0.25), Ok(1.5));
    // Half of 2 (4 - 1)... the area up to 2 is 1/3: (x - 1)^2 / (3 x 1) = p.
    assert_eq!(at("triangular 1, 2, 4", 1.0 / 12.0), Ok(1.5));
    assert_eq!(at("triangular 1, 2, 4", 1.0 - 1.0 / 6.0), Ok(3.0));
    assert_eq!(at("triangular 1, 4, 4", 0.25), Ok(2.5));
    for (p, value) in [(0.2, 1.0), (0.21, 3.0), (0.5, 3.0), (0.51, 2.0), (0.999, 2.0)] {
        assert_eq!(at("0.2 at 1, 0.3 at 3, 0 at 9, 0.5 at 2", p), Ok(value), "{p}");
    }
    for p in [0.0, 1.0, -0.1] {
        assert_eq!(at("1", p).unwrap_err().kind(), ErrorKind::RateRange);
    }
}

fn rate(texts: [&str; 4]) -> RateDistribution {
    let parsed = |of: Quantity| Distribution::parse(of, texts[of as usize]).unwrap();
    RateDistribution::new(Quantity::ALL.map(parsed)).unwrap()
}

fn draws(count: usize, seed: u64, threads: usize) -> Draws {
    Draws { count, seed, threads: NonZeroUsize::new(threads).unwrap() }
}

const BROAD: [&str; 4] = [
    "normal mean 1% sd 0.3%",
    "uniform 0% to 1%",
    "triangular 0.5, 1, 3",
    "0.2 at -0.5%, 0.3 at 1%, 0.5 at 2.5%",
];

/// Many kinds of offsets: whole, half, thirds of a year, before the base, far out, twice the same.
fn odd_flows() -> (Vec<f64>, Vec<f64>) {
    let mut offsets: Vec<f64> = (0..=300).map(f64::from).collect();
    offsets.extend((0..50).map(|i| f64::from(i) + 0.5));
    offsets.extend([-3.0, -0.5, 7.0 / 3.0, 100.0 + 92.0 / 365.0, 12.0, 12.0, 999.75]);
    let flow = |(i, _): (usize, &f64)| if i % 7 == 0 { -90.0 - i as f64 } else { 15.0 + (i % 11) as f64 };
    let flows = offsets.iter().enumerate().map(flow).collect();
    (offsets, flows)
}

#[test]
fn the_same_bits_for_any_number_of_threads_and_any_count() {
    let rate = rate(BROAD);
    let (offsets, flows) = odd_flows();
    let less: Vec<f64> = flows.iter().map(|flow| flow * 0.9).collect();
    let of = |flows| OptionFlows { offsets: &offsets, flows, perpetual: &[] };
    let options = [of(&flows), of(&less)];
    let bits =
        |drawn: &Drawn| -> Vec<u64> { drawn.values.concat().iter().map(|value| value.to_bits()).collect() };
    let whole = draw_values(&rate, &options, &draws(1_001, 7, 1)).unwrap();
    for threads in [1, 2, 3, 7, 64, 5_000] {
        let again = draw_values(&rate, &options, &draws(1_001, 7, threads)).unwrap();
        assert_eq!(bits(&again), bits(&whole), "{threads} threads");
        assert_eq!(again.rates, whole.rates, "{threads} threads");
        let of = |threads| whole.summary(&[5.0, 50.0], NonZeroUsize::new(threads).unwrap()).unwrap();
        assert_eq!(of(threads), of(1));
    }
    let fewer = draw_values(&rate, &options, &draws(25, 7, 2)).unwrap();
    assert_eq!(fewer.rates, whole.rates[..25]);
    assert_eq!(fewer.values[1], whole.values[1][..25]);
    for (k, drawn) in whole.rates.iter().enumerate() {
        assert_eq!(*drawn, rate.draw(7, k as u64));
    }
    let other = draw_values(&rate, &options, &draws(1_001, 8, 1)).unwrap();
    assert_ne!(other.rates[0], whole.rates[0]);
    assert_ne!(bits(&other), bits(&whole));
}

#[test]
fn one_distribution_leaves_the_draws_of_the_others() {
    let (broad, other) = (rate(BROAD), rate([BROAD[0], "0%", BROAD[2], "uniform 1% to 2%"]));
    for k in 0..100 {
        let (a, b) = (broad.draw(3, k).parts, other.draw(3, k).parts);
        assert_eq!((a[0], a[2]), (b[0], b[2]));
        assert_ne!(a[3], b[3]);
    }
}

/// The parts of a draw as a curve, whose factors are within two units in the last place, and exact sums.
#[test]
fn values_against_the_route_of_the_curves() {
    let rate = rate(BROAD);
    let (offsets, flows) = odd_flows();
    let option = OptionFlows { offsets: &offsets, flows: &flows, perpetual: &[] };
    let drawn = draw_values(&rate, &[option], &draws(200, 11, 1)).unwrap();
    let gross: Vec<f64> = flows.iter().map(|flow| flow.abs()).collect();
    let mut worst: f64 = 0.0;
    for (drawn, value) in drawn.rates.iter().zip(&drawn.values[0]) {
        let [preference, hazard, elasticity, growth] = drawn.parts;
        let spec = Spec::Ramsey {
            preference,
            hazard,
            elasticity,
            growth: vec![Band { value: growth, to: None }],
            exact: false,
            compounding: Compounding::Yearly,
        };
        let curve = spec.curve(&Where::default()).unwrap();
        let mut factors = vec![0.0; offsets.len()];
        curve.factors(&offsets, &mut factors).unwrap();
        let error = (value - dot(&flows, &factors)).abs() / dot(&gross, &factors);
        worst = worst.max(error);
    }
    println!("worst {worst:e} of gross present value");
    // The bound of the docstring, for an offset of 1,000 years.
    assert!(worst < (4.0 * 1_000.0 + 30.0) * 2f64.powi(-53), "{worst:e}");
}

#[test]
fn flows_for_ever_are_those_of_a_tail() {
    let rate = rate(["uniform 2% to 5%", "0%", "1", "0%"]);
    for (text, growth, every) in [("for ever", 0.0, 1), ("growing 1.5%, every 25 years, for ever", 0.015, 25)]
    {
        let tail = Tail::parse(text).unwrap();
        for start in [40.0, 39.5, -1.0] {
            let perpetual = [Perpetual { start, flow: -12.0, growth, every }];
            let option = OptionFlows { offsets: &[], flows: &[], perpetual: &perpetual };
            let drawn = draw_values(&rate, &[option], &draws(60, 5, 1)).unwrap();
            for (drawn, value) in drawn.rates.iter().zip(&drawn.values[0]) {
                let flat = Spec::Flat { rate: drawn.rate, compounding: Compounding::Yearly };
                let exact =
                    tail.present_value(&flat.curve(&Where::default()).unwrap(), start, -12.0, None).unwrap();
                assert!(
                    (value / exact - 1.0).abs() < 1e-12,
                    "{text} from {start} at {}: {value}",
                    drawn.rate
                );
            }
        }
    }
}

/// Twelve combinations of values: every draw is one of them, and each comes as often as it should.
#[test]
fn discrete_distributions_enumerated() {
    let rate =
        rate(["0.25 at 0%, 0.75 at 1%", "1%", "0.5 at 1, 0.25 at 1.5, 0.25 at 2", "0.4 at 1%, 0.6 at 2%"]);
    let (offsets, flows) = ([0.0, 1.0, 2.0, 30.0], [-1_000.0, 30.0, 60.0, 2_600.0]);
    let option = OptionFlows { offsets: &offsets, flows: &flows, perpetual: &[] };
    let count = 20_000;
    let drawn = draw_values(&rate, &[option], &draws(count, 1, 2)).unwrap();
    let (mut mean, mut positive, mut seen) = (0.0, 0.0, 0);
    for (w1, preference) in [(0.25, 0.0), (0.75, 0.01)] {
        for (w2, elasticity) in [(0.5, 1.0), (0.25, 1.5), (0.25, 2.0)] {
            for (w3, growth) in [(0.4, 0.01), (0.6, 0.02)] {
                let (weight, r) = (w1 * w2 * w3, preference + 0.01 + elasticity * growth);
                let npv: f64 = offsets.iter().zip(flows).map(|(t, x)| x * (1.0f64 + r).powf(-t)).sum();
                mean += weight * npv;
                positive += if npv > 0.0 { weight } else { 0.0 };
                let same =
                    |drawn: &&hence_core::DrawnRate| drawn.parts == [preference, 0.01, elasticity, growth];
                let times = drawn.rates.iter().filter(same).count();
                let error = (weight * (1.0 - weight) * count as f64).sqrt();
                assert!((times as f64 - weight * count as f64).abs() < 4.0 * error, "{r}: {times} times");
                let k = drawn.rates.iter().position(|drawn| same(&drawn)).unwrap();
                assert!((drawn.values[0][k] - npv).abs() < 1e-10);
                seen += times;
            }
        }
    }
    assert_eq!(seen, count);
    let found = spread(&drawn.values[0], &[]).unwrap();
    assert!((found.mean - mean).abs() < 4.0 * found.mean_error, "{} is not {mean}", found.mean);
    assert!((found.positive.share - positive).abs() < 4.0 * found.positive.error);
    assert!(positive > 0.1 && positive < 0.9);
}

/// E[(1+r)^-t] of a rate uniform on a to b is ((1+a)^(1-t) - (1+b)^(1-t)) / ((t-1)(b-a)).
#[test]
fn the_mean_and_the_chance_under_a_uniform_rate() {
    let (a, b): (f64, f64) = (0.01, 0.06);
    let rate = rate(["uniform 1% to 6%", "0%", "1", "0%"]);
    let offsets: Vec<f64> = (0..=60).map(f64::from).collect();
    let flows: Vec<f64> = offsets.iter().map(|t| if *t == 0.0 { -1_000.0 } else { 40.0 }).collect();
    let option = OptionFlows { offsets: &offsets, flows: &flows, perpetual: &[] };
    let drawn = draw_values(&rate, &[option], &draws(40_000, 4, 2)).unwrap();
    let expected = |t: f64| match t {
        0.0 => 1.0,
        1.0 => ((1.0 + b) / (1.0 + a)).ln() / (b - a),
        t => ((1.0 + a).powf(1.0 - t) - (1.0 + b).powf(1.0 - t)) / ((t - 1.0) * (b - a)),
    };
    let mean: f64 = offsets.iter().zip(&flows).map(|(t, x)| x * expected(*t)).sum();
    let found = spread(&drawn.values[0], &[10.0, 50.0, 90.0]).unwrap();
    assert!((found.mean - mean).abs() < 4.0 * found.mean_error, "{} is not {mean}", found.mean);
    // The value falls as the rate rises, and is 0 at the internal rate of return.
    let irr = internal_rates(&offsets, &flows, (a, b)).unwrap().rates[0];
    let chance = (irr - a) / (b - a);
    assert!(chance > 0.1 && chance < 0.9, "{chance}");
    assert!((found.positive.share - chance).abs() < 4.0 * found.positive.error, "{:?}", found.positive);
    // Percentiles of a falling function are its values at the other percentiles of the rate.
    for (p, found) in [(0.1, found.percentiles[0]), (0.5, found.percentiles[1]), (0.9, found.percentiles[2])]
    {
        let npv = |r: f64| offsets.iter().zip(&flows).map(|(t, x)| x * (1.0 + r).powf(-t)).sum::<f64>();
        // Four standard errors of a percentile, as a share of the draws.
        let slack = 4.0 * (p * (1.0 - p) / 40_000.0f64).sqrt();
        let at = |p: f64| npv(b - (b - a) * p);
        assert!(at(p - slack) < found && found < at(p + slack), "{p}: {found}");
    }
}

#[test]
fn means_variances_and_independence_of_what_is_drawn() {
    let n = 40_000;
    let rate = rate([
        "normal mean 1% sd 0.3%",
        "uniform 0% to 1%",
        "triangular 0.5, 1, 3",
        "normal mean 2% sd 1% within 1% to 4%",
    ]);
    let columns: Vec<Vec<f64>> =
        (0..4).map(|i| (0..n).map(|k| rate.draw(99, k).parts[i]).collect()).collect();
    // Between bounds: m + s (phi(a) - phi(b))/(F(b) - F(a)) with a = -1, b = 2, from tables of the normal distribution.
    let (phi_a, phi_b, kept) = (0.241_970_724_519, 0.053_990_966_513, 0.977_249_868_052 - 0.158_655_253_931);
    let tilt: f64 = (phi_a - phi_b) / kept;
    let cut = 1.0 + (-phi_a - 2.0 * phi_b) / kept - tilt * tilt;
    let expected = [
        (0.01, 0.003f64.powi(2)),
        (0.005, 0.01f64.powi(2) / 12.0),
        // (a + b + c)/3 and (a^2 + b^2 + c^2 - ab - ac - bc)/18
        (1.5, (0.25 + 1.0 + 9.0 - 0.5 - 1.5 - 3.0) / 18.0),
        (0.02 + 0.01 * tilt, 0.0001 * cut),
    ];
    for (column, (mean, variance)) in columns.iter().zip(expected) {
        let found = spread(column, &[]).unwrap();
        assert!((found.mean - mean).abs() < 4.0 * found.mean_error, "{} is not {mean}", found.mean);
        // The standard error of a variance is variance sqrt((kurtosis - 1)/n), and no kurtosis here is above 3.
        let slack = 4.0 * variance * (2.0 / n as f64).sqrt();
        assert!((found.sd * found.sd - variance).abs() < slack, "{} is not {variance}", found.sd * found.sd);
    }
    for i in 0..4 {
        for j in 0..i {
            let (a, b) = (spread(&columns[i], &[]).unwrap(), spread(&columns[j], &[]).unwrap());
            let product: f64 =
                columns[i].iter().zip(&columns[j]).map(|(x, y)| (x - a.mean) * (y - b.mean)).sum();
            let correlation = product / (n as f64 * a.sd * b.sd);
            assert!(correlation.abs() < 4.0 / (n as f64).sqrt(), "parts {i} and {j}: {correlation}");
        }
        // Neither does a draw say anything of the next.
        let a = spread(&columns[i], &[]).unwrap();
        let product: f64 = columns[i].windows(2).map(|w| (w[0] - a.mean) * (w[1] - a.mean)).sum();
        assert!((product / (n as f64 * a.sd * a.sd)).abs() < 4.0 / (n as f64).sqrt());
    }
    // Each twentieth of the normal distribution comes as often as the others.
    let normal = Distribution::Normal { mean: 0.01, sd: 0.003, within: None };
    for twentieth in 0..20 {
        let edge = |i: i32| match i {
            0 => f64::NEG_INFINITY,
            20 => f64::INFINITY,
            i => normal.quantile(Quantity::Preference, f64::from(i) / 20.0).unwrap(),
        };
        let (low, high) = (edge(twentieth), edge(twentieth + 1));
        let found = columns[0].iter().filter(|x| (low..high).contains(*x)).count() as f64;
        let (expected, error) = (n as f64 / 20.0, (n as f64 * 0.05 * 0.95).sqrt());
        assert!((found - expected).abs() < 4.0 * error, "{twentieth}: {found}");
    }
}

#[test]
fn draws_out_of_range_are_counted_and_refused() {
    let option = OptionFlows { offsets: &[0.0, 10.0], flows: &[-100.0, 200.0], perpetual: &[] };
    let refused = |texts, options: &[OptionFlows]| {
        let (one, four) = (
            draw_values(&rate(texts), options, &draws(1_000, 2, 1)).unwrap_err(),
            draw_values(&rate(texts), options, &draws(1_000, 2, 4)).unwrap_err(),
        );
        assert_eq!(one, four);
        one
    };
    let error = refused(["1%", "0%", "normal mean 1 sd 0.6", "2%"], &[option]);
    assert_eq!((error.kind(), error.argument()), (ErrorKind::RateRange, "elasticity"));
    let rates = rate(["1%", "0%", "normal mean 1 sd 0.6", "2%"]);
    let below: Vec<(usize, f64)> =
        (0..1_000).map(|k| (k, rates.draw(2, k as u64).parts[2])).filter(|(_, eta)| *eta < 0.0).collect();
    // F(-1/0.6) is 4.8%.
    assert!((20..80).contains(&below.len()), "{}", below.len());
    assert_eq!(error.index(), Some(below[0].0));
    let message = error.message();
    let start = format!("elasticity is outside its range in {} of 1,000 draws: {}", below.len(), below[0].1);
    assert!(message.starts_with(&start) && message.ends_with("allowed 0 to 20"), "{message}");

    let error = refused(["0.9 at 1%, 0.1 at 90%", "20%", "1", "2%"], &[option]);
    assert_eq!((error.kind(), error.argument()), (ErrorKind::RateRange, "rate"));
    assert!(error.message().contains("112% in draw"), "{}", error.message());
    // The rate's range is open below.
    let error = refused(["-49%", "0%", "1", "0.5 at -1%, 0.5 at 0%"], &[option]);
    assert!(error.message().contains("-50% in draw"), "{}", error.message());

    let perpetual = [Perpetual { start: 0.0, flow: 1.0, growth: 0.02, every: 1 }];
    let endless = OptionFlows { perpetual: &perpetual, ..option };
    let error = refused(["0.5 at 2%, 0.5 at 3%", "0%", "1", "0%"], &[option, endless]);
    assert_eq!(error.kind(), ErrorKind::Diverges);
    assert!(error.message().contains("growing by 2% a year"), "{}", error.message());
    draw_values(&rate(["0.5 at 2.1%, 0.5 at 3%", "0%", "1", "0%"]), &[endless], &draws(100, 2, 1)).unwrap();

    let far = OptionFlows { offsets: &[9_000.0], flows: &[1.0], perpetual: &[] };
    let error = refused(["0.1 at -20%, 0.9 at 3%", "0%", "1", "0%"], &[far]);
    assert_eq!(error.kind(), ErrorKind::NotFinite);
}

#[test]
fn bad_arguments_are_refused() {
    let fixed = rate(["1%", "0%", "1", "2%"]);
    let option = OptionFlows { offsets: &[0.0, 1.0], flows: &[-1.0, 2.0], perpetual: &[] };
    let kind = |options: &[OptionFlows], count| {
        let error = draw_values(&fixed, options, &draws(count, 1, 1)).unwrap_err();
        (error.kind(), error.argument(), error.index())
    };
    assert_eq!(kind(&[], 10), (ErrorKind::Shape, "options", None));
    assert_eq!(kind(&[option], 0), (ErrorKind::Shape, "draws", None));
    assert_eq!(kind(&[option], 10_000_001), (ErrorKind::Shape, "draws", None));
    let short = OptionFlows { flows: &[1.0], ..option };
    assert_eq!(kind(&[short], 10), (ErrorKind::Shape, "flows", None));
    let hole = OptionFlows { flows: &[1.0, f64::NAN], ..option };
    assert_eq!(kind(&[hole], 10), (ErrorKind::NotFinite, "flows", Some(1)));
    let far = OptionFlows { offsets: &[0.0, 10_001.0], ..option };
    assert_eq!(kind(&[far], 10), (ErrorKind::OutsideDomain, "offsets", Some(1)));
    for (start, growth, every) in [(0.0, -1.0, 1), (0.0, 0.0, 0), (0.0, 1.1, 1)] {
        let perpetual = [Perpetual { start, flow: 1.0, growth, every }];
        let endless = OptionFlows { perpetual: &perpetual, ..option };
        assert_eq!(kind(&[endless], 10), (ErrorKind::RateRange, "perpetual", Some(0)));
    }
    let bare = OptionFlows { offsets: &[], flows: &[], perpetual: &[] };
    assert_eq!(draw_values(&fixed, &[bare], &draws(2, 1, 1)).unwrap().values, [[0.0, 0.0]]);
    let unsound = Distribution::Uniform { lowest: 0.02, highest: f64::NAN };
    let parts = [Distribution::Fixed(0.0), Distribution::Fixed(0.0), Distribution::Fixed(1.0), unsound];
    assert_eq!(RateDistribution::new(parts).unwrap_err().kind(), ErrorKind::NotFinite);
}

#[test]
fn the_order_of_streams_does_not_matter() {
    let rate = rate(BROAD);
    let (offsets, flows) = odd_flows();
    let (turned_offsets, turned): (Vec<f64>, Vec<f64>) = offsets.iter().zip(&flows).rev().unzip();
    let option = OptionFlows { offsets: &offsets, flows: &flows, perpetual: &[] };
    let other = OptionFlows { offsets: &turned_offsets, flows: &turned, perpetual: &[] };
    let drawn = draw_values(&rate, &[option, other], &draws(100, 1, 1)).unwrap();
    assert_eq!(drawn.values[0], drawn.values[1]);
    // Equal options share the first place in every draw.
    let places = first_places(&drawn.values).unwrap();
    assert!(places.iter().all(|place| place.alone.count == 0 && place.shared.share == 1.0));
}

#[test]
fn spreads_by_hand() {
    let found = spread(&[3.0, 1.0, -2.0, 0.0], &[0.0, 25.0, 50.0, 100.0]).unwrap();
    assert_eq!(found.percentiles, [-2.0, -0.5, 0.5, 3.0]);
    assert_eq!((found.lowest, found.highest, found.mean), (-2.0, 3.0, 0.5));
    // Squares of the deviations 2.5, 0.5, 2.5, 0.5 sum to 13.
    assert_eq!(found.sd, (13.0f64 / 3.0).sqrt());
    assert_eq!(found.mean_error, found.sd / 2.0);
    assert_eq!((found.positive.count, found.positive.share, found.positive.error), (2, 0.5, 0.25));
    let one = spread(&[-5.0], &[37.0]).unwrap();
    assert_eq!((one.mean, one.sd, one.percentiles[0], one.positive.count), (-5.0, 0.0, -5.0, 0));
    assert_eq!(spread(&[], &[]).unwrap_err().kind(), ErrorKind::Shape);
    assert_eq!(spread(&[1.0, f64::INFINITY], &[]).unwrap_err().index(), Some(1));
    assert_eq!(spread(&[1.0], &[50.0, -1.0]).unwrap_err().index(), Some(1));
    assert_eq!(first_places(&[vec![1.0], vec![1.0, 2.0]]).unwrap_err().kind(), ErrorKind::Shape);
    let alone = first_places(&[vec![-1.0, -2.0]]).unwrap();
    assert_eq!(alone[0].alone.share, 1.0);
}

#[test]
fn histograms_have_round_edges_and_hold_everything() {
    let found = histogram(&[-0.3, 0.3, 0.1, 0.6]).unwrap();
    assert_eq!(found.edges, [-0.3, -0.2, -0.1, 0.0, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6]);
    assert_eq!(found.counts, [1, 0, 0, 0, 1, 0, 1, 0, 1]);
    for scale in [1e-9, 0.03, 1.0, 777.0, 1e12] {
        let values: Vec<f64> =
            (0..1_000).map(|k| scale * (f64::from(k) * 0.37).sin() + 0.2 * scale).collect();
        let found = histogram(&values).unwrap();
        assert_eq!(found.counts.iter().sum::<usize>(), 1_000);
        assert!((6..=15).contains(&found.counts.len()), "{scale}: {}", found.counts.len());
        let (first, last) = (found.edges[0], found.edges[found.edges.len() - 1]);
        assert!(values.iter().all(|value| (first..=last).contains(value)));
        for (pair, count) in found.edges.windows(2).zip(&found.counts) {
            let inside = values.iter().filter(|value| (pair[0]..pair[1]).contains(*value)).count();
            assert!(inside == *count, "{scale}: {pair:?}");
        }
    }
    let alike = histogram(&[2.5, 2.5]).unwrap();
    assert_eq!((alike.edges, alike.counts), (vec![2.5, 2.5], vec![2]));
}
