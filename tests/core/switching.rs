//! Switching values. Flows are made from values chosen beforehand, or the values found are put back through the curve of
//! the changed line and must make the net present value zero.

use hence_core::{
    Curve, ErrorKind, OptionFlows, Parameter, Perpetual, RateLine, Spec, Switching, Tail, Where, dot,
    switching_multiplier, switching_values,
};
use proptest::prelude::*;

use Parameter::{Elasticity, Growth, Preference, Rate};

const NO_BASE: Where = Where { base_year: None, length: None };

fn spec(line: &str) -> Spec {
    RateLine::parse(line).unwrap().spec().clone()
}

fn years(count: usize) -> Vec<f64> {
    (0..count).map(|t| t as f64).collect()
}

fn worth(curve: &Curve, offsets: &[f64], flows: &[f64]) -> f64 {
    let mut factors = vec![0.0; offsets.len()];
    curve.factors(offsets, &mut factors).unwrap();
    dot(&factors, flows)
}

fn search(line: &str, flows: &[f64], parameter: Parameter) -> Switching {
    let net = OptionFlows { offsets: &years(flows.len()), flows, perpetual: &[] };
    switching_values(&net, &spec(line), &NO_BASE, parameter, parameter.interval()).unwrap()
}

/// Net and gross present value with a parameter put back.
fn put_back(line: &str, flows: &[f64], parameter: Parameter, value: f64) -> (f64, f64) {
    let curve = parameter.at(&spec(line), value).unwrap().curve(&NO_BASE).unwrap();
    let gross: Vec<f64> = flows.iter().map(|flow| flow.abs()).collect();
    let offsets = years(flows.len());
    (worth(&curve, &offsets, flows), worth(&curve, &offsets, &gross))
}

fn assert_zero(line: &str, flows: &[f64], parameter: Parameter, found: &Switching) {
    for &value in &found.values {
        let (net, gross) = put_back(line, flows, parameter, value);
        assert!(net.abs() <= 1e-9 * gross, "{line}, {parameter} {value}: {net} of {gross}");
    }
}

fn assert_values(found: &Switching, due: &[f64], tolerance: f64) {
    assert_eq!(found.values.len(), due.len(), "{found:?}, due {due:?}");
    assert!(found.unresolved.is_empty(), "{found:?}");
    for (value, due) in found.values.iter().zip(due) {
        assert!((value - due).abs() <= tolerance, "{found:?}, due {due:?}");
    }
}

/// Yearly flows whose present value is zero at these rates: the product of (x (1 + r) - 1), x = 1/(1 + rate).
fn flows_of(rates: &[f64]) -> Vec<f64> {
    let mut flows = vec![1.0];
    for rate in rates {
        let mut next = vec![0.0; flows.len() + 1];
        for (t, flow) in flows.iter().enumerate() {
            next[t] -= flow;
            next[t + 1] += flow * (1.0 + rate);
        }
        flows = next;
    }
    flows
}

#[test]
fn a_mine_that_must_be_restored_has_two_rates() {
    // 350 q^2 - 950 q + 620 = 0 with q = 1 + r.
    let root = (950.0f64 * 950.0 - 4.0 * 350.0 * 620.0).sqrt();
    let due = [(950.0 - root) / 700.0 - 1.0, (950.0 + root) / 700.0 - 1.0];
    assert_eq!(due.map(|r| format!("{:.4}%", r * 100.0)), ["9.1797%", "62.2488%"]);
    let flows = [-350.0, 950.0, -620.0];
    let found = search("3.5%", &flows, Rate);
    assert_values(&found, &due, 1e-15);
    assert_zero("3.5%", &flows, Rate, &found);
    assert_eq!(found.interval, (-0.5, 1.0));

    // The same two rates through a Ramsey line: preference is rate - 2%, growth (rate - 1.5%)/1, elasticity likewise /2%.
    let line = "preference 0.5%, hazard 1%, elasticity 1, growth 2%";
    assert_values(&search(line, &flows, Preference), &due.map(|r| r - 0.03), 1e-15);
    assert_values(&search(line, &flows, Growth), &due.map(|r| r - 0.015), 1e-15);
    let found = search(line, &flows, Elasticity);
    // The second lies at 30, beyond the elasticities allowed.
    assert_values(&found, &[(due[0] - 0.015) / 0.02], 1e-13);
    assert_eq!(found.interval, (0.0, 20.0));
}

#[test]
fn values_that_lie_close_together_are_told_apart() {
    let line = "preference 1%, elasticity 2, growth 2%";
    let flows = flows_of(&[0.06, 0.060_001, 0.3]);
    assert_values(&search(line, &flows, Rate), &[0.06, 0.060_001, 0.3], 1e-8);
    assert_values(&search(line, &flows, Growth), &[0.025, 0.025_000_5, 0.145], 1e-8);
    assert_values(&search(line, &flows, Elasticity), &[2.5, 2.500_05, 14.5], 1e-6);
}

#[test]
fn a_path_of_growth_with_close_values() {
    // Three flows in three bands, made such that the value is zero at elasticities 1.5 and 1.5 + apart: with factors a, b
    // at one and c, d at the other, flows 1, x, y solve 1 + a x + b y = 0 = 1 + c x + d y.
    for (line, parameter, at) in [
        ("preference 1%, elasticity 1, growth 3% to 10, 1% to 40, -1% after", Elasticity, 1.5),
        ("preference 1%, elasticity 1, growth 3% to 10, 1% to 40, -1% after; exact", Elasticity, 1.5),
        ("preference 1%, elasticity 1.5, growth 3% to 10, 1% to 40, -1% after", Growth, 0.04),
        ("preference 1%, elasticity 1.5, growth 3% to 10, 1% to 40, -1% after; exact", Growth, 0.02),
        ("preference 1%, elasticity 1.5, growth 3% to 10, 1% to 40, -1% after", Preference, 0.05),
        ("preference 1%, elasticity 1.5, growth 3% to 10, 1% to 40, -1% after; exact", Preference, -0.02),
        ("preference 1%, elasticity 1, log growth 2% sd 3% persistence 0.6", Elasticity, 1.5),
    ] {
        for apart in [0.1, 1e-3, 1e-4] {
            let apart = if parameter == Elasticity { apart } else { 0.1 * apart };
            let offsets = [0.0, 25.0, 60.0];
            let factors = |value: f64| {
                let curve = parameter.at(&spec(line), value).unwrap().curve(&NO_BASE).unwrap();
                [curve.factor(offsets[1]).unwrap(), curve.factor(offsets[2]).unwrap()]
            };
            let ([a, b], [c, d]) = (factors(at), factors(at + apart));
            let determinant = a * d - b * c;
            let flows = [1.0, (b - d) / determinant, (c - a) / determinant];
            let net = OptionFlows { offsets: &offsets, flows: &flows, perpetual: &[] };
            let found =
                switching_values(&net, &spec(line), &NO_BASE, parameter, parameter.interval()).unwrap();
            // The flows themselves are rounded, and more so the closer the values are.
            let near: Vec<f64> =
                found.values.iter().copied().filter(|x| (x - at).abs() < 2.0 * apart).collect();
            assert_eq!(near.len(), 2, "{line}, {apart}: {found:?}");
            assert!((near[0] - at).abs() < 0.05 * apart, "{line}, {apart}: {found:?}");
            assert!((near[1] - at - apart).abs() < 0.05 * apart, "{line}, {apart}: {found:?}");
            assert!(found.unresolved.is_empty(), "{found:?}");
        }
    }
}

#[test]
fn a_value_that_is_only_touched_is_unresolved() {
    // (1 - 1.0625 x)^2, exact in doubles: the rate 6.25%, through the yearly rate and through the exponential of it.
    let flows = [1.0, -2.125, 1.128_906_25];
    let line = "preference 1%, elasticity 1, growth 2%";
    for (line, parameter, due, width) in [
        (line, Rate, 0.0625, 1e-12),
        (line, Elasticity, 2.625, 1e-10),
        (
            "preference 1%, elasticity 1, growth 2%; continuous",
            Elasticity,
            (0.0625f64.ln_1p() - 0.01) / 0.02,
            1e-9,
        ),
    ] {
        let found = search(line, &flows, parameter);
        assert_eq!((found.values.as_slice(), found.unresolved.len()), (&[][..], 1), "{line}: {found:?}");
        let (low, high) = found.unresolved[0];
        assert!(low <= due && due <= high && high - low < width, "{line}, {due}: {found:?}");
    }
}

#[test]
fn no_value_where_there_is_none() {
    let line = "preference 1%, elasticity 1, growth 2% to 30, 1% after";
    for parameter in Parameter::ALL {
        let none = search(line, &[100.0, 7.0, 3.0], parameter);
        assert_eq!((none.values, none.unresolved, none.moves), (vec![], vec![], true));
        // 1 - 2 x + 1.5 x^2 has no real root.
        let none = search(line, &[1.0, -2.0, 1.5], parameter);
        assert_eq!((none.values, none.unresolved), (vec![], vec![]));
    }
}

#[test]
fn a_parameter_that_moves_nothing_says_so() {
    let flows = [-100.0, 104.0];
    let found = search("preference 1%, elasticity 1, growth 0%", &flows, Elasticity);
    assert_eq!((found.values.len(), found.moves), (0, false));
    let found = search("preference 1%, elasticity 0, growth 2% to 10, 1% after; exact", &flows, Growth);
    assert_eq!((found.values.len(), found.moves), (0, false));
    assert!(search("preference 1%, elasticity 0, growth 2%", &flows, Preference).moves);
}

#[test]
fn precaution_bends_the_rate_so_that_an_elasticity_occurs_twice() {
    // rate = 1% + 3% e - e (e + 1) 1%^... with sd 10%: 1% + 2.5% e - 0.5% e^2; it is 3% where e^2 - 5 e + 4 = 0.
    let line = "preference 1%, elasticity 1, growth 3% sd 10%";
    let found = search(line, &[-100.0, 103.0], Elasticity);
    assert_values(&found, &[1.0, 4.0], 1e-13);
    assert_zero(line, &[-100.0, 103.0], Elasticity, &found);
    // Of log growth: 1% + 3% e - 0.5% e^2 is ln 1.05 at two elasticities, in continuous compounding.
    let line = "preference 1%, elasticity 1, log growth 3% sd 10%";
    let root = (0.03f64 * 0.03 - 0.02 * (1.05f64.ln() - 0.01)).sqrt();
    let found = search(line, &[-100.0, 105.0], Elasticity);
    assert_values(&found, &[(0.03 - root) / 0.01, (0.03 + root) / 0.01], 1e-12);
    assert_zero(line, &[-100.0, 105.0], Elasticity, &found);
}

#[test]
fn flows_for_ever_are_part_of_it() {
    let endless = |flow, growth, every| Perpetual { start: 0.0, flow, growth, every };
    let find = |flows: &[f64], perpetual: &[Perpetual], line: &str, parameter: Parameter| {
        let net = OptionFlows { offsets: &years(flows.len()), flows, perpetual };
        switching_values(&net, &spec(line), &NO_BASE, parameter, parameter.interval()).unwrap()
    };
    // 5 growing by 1% for ever is worth 5.05/(r - 1%), which is 100 at 6.05%.
    let found = find(&[-100.0], &[endless(5.0, 0.01, 1)], "4%", Rate);
    assert_values(&found, &[0.0605], 1e-14);
    assert!((found.interval.0 - 0.01).abs() < 1e-5 && found.interval.1 == 1.0);
    let line = "preference 1%, elasticity 1, growth 2%";
    assert_values(&find(&[-100.0], &[endless(5.0, 0.01, 1)], line, Elasticity), &[2.525], 1e-12);
    // 30 every fifth year for ever is 30/((1+r)^5 - 1) = 100 where (1+r)^5 = 1.3.
    assert_values(&find(&[-100.0], &[endless(30.0, 0.0, 5)], "4%", Rate), &[1.3f64.powf(0.2) - 1.0], 1e-14);
    // Two kinds of the same growth, one year and two apart: a/r + b/((1+r)^2 - 1) = 100 at 5%.
    let (a, q) = (3.0, 1.05f64 * 1.05 - 1.0);
    let b = (100.0 - a / 0.05) * q;
    let both = [endless(a, 0.0, 1), endless(b, 0.0, 2)];
    assert_values(&find(&[-100.0], &both, "4%", Rate), &[0.05], 1e-13);
}

#[test]
fn flows_for_ever_under_bands_agree_with_their_tail() {
    for line in [
        "preference 1%, elasticity 1.5, growth 2% to 30, 1% after",
        "preference 1%, elasticity 1.5, growth 2% to 30, 1% after; exact",
        "preference 1%, elasticity 1.5, growth 2% to 30, 1% after; continuous",
    ] {
        let Ok(parsed) = RateLine::parse(line) else { continue };
        for parameter in [Preference, Elasticity, Growth] {
            let tail = Tail::parse("growing 0.5%, every 3 years, for ever").unwrap();
            let net = OptionFlows {
                offsets: &[0.0, 2.0],
                flows: &[-200.0, 12.0],
                perpetual: &[Perpetual { start: 2.0, flow: 12.0, growth: 0.005, every: 3 }],
            };
            let found =
                switching_values(&net, parsed.spec(), &NO_BASE, parameter, parameter.interval()).unwrap();
            assert_eq!(
                (found.values.len(), found.unresolved.len()),
                (1, 0),
                "{line}, {parameter}: {found:?}"
            );
            let curve = parameter.at(parsed.spec(), found.values[0]).unwrap().curve(&NO_BASE).unwrap();
            let finite = dot(&[-200.0, 12.0], &[1.0, curve.factor(2.0).unwrap()]);
            let npv = finite + tail.present_value(&curve, 2.0, 12.0, None).unwrap();
            assert!(npv.abs() < 1e-9 * 400.0, "{line}, {parameter}: {npv}");
        }
    }
}

#[test]
fn a_schedule_of_states_has_a_preference() {
    use hence_core::GrowthState;
    let regimes = Spec::GrowthRegimes {
        preference: 0.01,
        hazard: 0.0,
        elasticity: 2.0,
        states: vec![GrowthState { mean: 0.03, sd: 0.02 }, GrowthState { mean: -0.01, sd: 0.04 }],
        transition: vec![vec![0.9, 0.1], vec![0.3, 0.7]],
        start: vec![1.0, 0.0],
    };
    let flows = [-100.0, 20.0, 20.0, 20.0, 20.0, 20.0, 20.0];
    let offsets = years(flows.len());
    let net = OptionFlows { offsets: &offsets, flows: &flows, perpetual: &[] };
    let found = switching_values(&net, &regimes, &NO_BASE, Preference, Preference.interval()).unwrap();
    assert_eq!(found.values.len(), 1, "{found:?}");
    let curve = Preference.at(&regimes, found.values[0]).unwrap().curve(&NO_BASE).unwrap();
    assert!(worth(&curve, &offsets, &flows).abs() < 1e-11);
}

#[test]
fn what_cannot_be_searched_is_refused() {
    let line = spec("preference 1%, elasticity 1, growth 2% to 30, 1% after");
    let refused = |net: OptionFlows, spec: &Spec, parameter, interval| {
        let error = switching_values(&net, spec, &NO_BASE, parameter, interval).unwrap_err();
        (error.kind(), error.argument(), error.index())
    };
    let net = OptionFlows { offsets: &[0.0, 1.0], flows: &[-1.0, 2.0], perpetual: &[] };
    let whole = (-0.5, 1.0);
    assert_eq!(refused(net, &spec("4%"), Growth, whole), (ErrorKind::Unsupported, "parameter", None));
    assert_eq!(refused(net, &line, Growth, (1.0, 1.0)), (ErrorKind::RateRange, "interval", None));
    assert_eq!(refused(net, &line, Growth, (f64::NAN, 1.0)), (ErrorKind::NotFinite, "interval", Some(0)));
    let short = OptionFlows { flows: &[1.0], ..net };
    assert_eq!(refused(short, &line, Rate, whole), (ErrorKind::Shape, "flows", None));
    let zero = OptionFlows { flows: &[0.0, 0.0], ..net };
    assert_eq!(refused(zero, &line, Growth, whole), (ErrorKind::NoMeaning, "flows", None));
    let ends = spec("preference 1%, elasticity 1, growth 2% to 30");
    let late = OptionFlows { offsets: &[0.0, 31.0], ..net };
    assert_eq!(refused(late, &ends, Growth, whole), (ErrorKind::OutsideDomain, "offset", Some(1)));
    let tail = [Perpetual { start: 1.0, flow: 1.0, growth: 0.0, every: 1 }];
    let for_ever = OptionFlows { perpetual: &tail, ..net };
    assert_eq!(refused(for_ever, &ends, Growth, whole), (ErrorKind::Unsupported, "perpetual", None));
    let growing = [Perpetual { growth: 2.0, ..tail[0] }];
    let too_fast = OptionFlows { perpetual: &growing, ..net };
    assert_eq!(refused(too_fast, &line, Rate, whole), (ErrorKind::Diverges, "interval", None));
}

#[test]
fn multipliers_have_a_closed_form() {
    assert_eq!(switching_multiplier(-50.0, 100.0), Ok(Some(1.5)));
    assert_eq!(switching_multiplier(150.0, 100.0), Ok(Some(-0.5)));
    assert_eq!(switching_multiplier(0.0, 100.0), Ok(Some(1.0)));
    assert_eq!(switching_multiplier(0.0, 0.0), Ok(None));
    assert_eq!(switching_multiplier(1.0, f64::NAN).unwrap_err().argument(), "stream");
}

/// Rate lines of every law, with the parameters that move them.
fn lines() -> impl Strategy<Value = String> {
    let numbers = (-20..60i32, 0..40i32, 5..40i32, -10..40i32, -10..40i32, 0..60i32, 0..9i32);
    (0..8u8, numbers).prop_map(|(kind, (rho, hazard, eta, g, later, sd, phi))| {
        let tenths = |n: i32| f64::from(n) / 10.0;
        let (rho, hazard, eta) = (tenths(rho), tenths(hazard) / 4.0, tenths(eta));
        let head = format!("preference {rho}%, hazard {hazard}%, elasticity {eta}");
        let (g, later, sd, phi) = (tenths(g), tenths(later), tenths(sd), tenths(phi));
        match kind {
            0 => format!("{head}, growth {g}%"),
            1 => format!("{head}, growth {g}% to 12, {later}% after"),
            2 => format!("{head}, growth {g}% to 12, {later}% to 40, 1% after; exact"),
            3 => format!("{head}, growth {g}%; exact"),
            4 => format!("{head}, growth {g}% sd {sd}%"),
            5 => format!("{head}, log growth {g}% sd {sd}%"),
            6 => format!("{head}, growth {g}%; continuous"),
            _ => format!("{head}, log growth {g}% sd {sd}% persistence {phi}"),
        }
    })
}

proptest! {
    #![proptest_config(super::repeatable())]

    /// Values put back give zero, and no change of sign on a grid is without a value.
    #[test]
    fn values_put_back_give_zero_and_none_is_missed(
        line in lines(),
        which in 0..4usize,
        flows in prop::collection::vec(-10i32..=10, 2..70),
    ) {
        let parameter = Parameter::ALL[which];
        let flows: Vec<f64> = flows.into_iter().map(f64::from).collect();
        prop_assume!(flows.iter().any(|flow| *flow != 0.0));
        prop_assume!(spec(&line).curve(&NO_BASE).is_ok());
        let found = search(&line, &flows, parameter);
        let (low, high) = found.interval;
        // A line states less than the search covers.
        let stated = |value: f64| {
            parameter.at(&spec(&line), value).is_some_and(|spec| spec.curve(&NO_BASE).is_ok())
        };
        for &value in found.values.iter().filter(|value| stated(**value)) {
            let (net, gross) = put_back(&line, &flows, parameter, value);
            prop_assert!(net.abs() <= 1e-9 * gross, "{line}, {parameter} {value}: {net} of {gross}");
        }
        if found.moves {
            let grid: Vec<f64> = (1..60).map(|k| low + (high - low) * f64::from(k) / 60.0).collect();
            for pair in grid.windows(2).filter(|pair| stated(pair[0]) && stated(pair[1])) {
                let [a, b] = [pair[0], pair[1]].map(|value| put_back(&line, &flows, parameter, value));
                let certain = |(net, gross): (f64, f64)| net.abs() > 1e-12 * gross;
                if certain(a) && certain(b) && (a.0 > 0.0) != (b.0 > 0.0) {
                    let inside = |x: f64| x >= pair[0] && x <= pair[1];
                    let open = found.unresolved.iter().any(|(a, b)| *b >= pair[0] && *a <= pair[1]);
                    prop_assert!(open || found.values.iter().any(|x| inside(*x)), "{line}, {parameter} {pair:?}");
                }
            }
        }
    }
}
