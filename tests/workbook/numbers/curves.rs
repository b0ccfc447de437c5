//! Rate lines, and the curve that the second model makes of each.

use super::book::Random;
use super::model::Curve;

/// A rate line and its curve; calendar edges count from `base`.
pub fn basis(random: &mut Random, base: i32, calendar: bool) -> (String, Curve) {
    let inf = f64::INFINITY;
    let lines: Vec<(String, Curve)> = vec![
        ("3.5%".into(), Curve::Yearly(0.035)),
        ("0.045".into(), Curve::Yearly(0.045)),
        ("-1.5%".into(), Curve::Yearly(-0.015)),
        ("4% continuous".into(), Curve::Continuous(0.04)),
        (
            "3.5% to 30, 3% to 75, 2.5% after".into(),
            Curve::Bands(vec![(30.0, 0.035), (75.0, 0.03), (inf, 0.025)]),
        ),
        // HM Treasury, The Green Book, 2003, Annex 6, Table 6.1.
        (
            "uk-2003".into(),
            Curve::Bands(vec![
                (30.0, 0.035),
                (75.0, 0.03),
                (125.0, 0.025),
                (200.0, 0.02),
                (300.0, 0.015),
                (inf, 0.01),
            ]),
        ),
        (
            "4% to 10, 3% to 30, 2% after; whole horizon by flow".into(),
            Curve::Steps(vec![(10.0, 0.04), (30.0, 0.03), (inf, 0.02)], false),
        ),
        (
            "4% to 10, 3% to 30, 2% after; whole horizon by length".into(),
            Curve::Steps(vec![(10.0, 0.04), (30.0, 0.03), (inf, 0.02)], true),
        ),
        (
            "3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by flow, interpolated".into(),
            Curve::Points(vec![(3.0, 0.039), (10.0, 0.04), (30.0, 0.042)], false),
        ),
        (
            "3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by length, interpolated".into(),
            Curve::Points(vec![(3.0, 0.039), (10.0, 0.04), (30.0, 0.042)], true),
        ),
        ("preference 0.5%, hazard 1%, elasticity 1, growth 2%".into(), Curve::Yearly(0.035)),
        ("preference 1%, elasticity 2, growth 2%; exact".into(), Curve::Exact(1.01 * 1.02 * 1.02 - 1.0)),
        (
            "preference 1%, elasticity 2, growth 2% to 50, 1% after".into(),
            Curve::Bands(vec![(50.0, 0.05), (inf, 0.03)]),
        ),
        (
            "preference 1%, elasticity 2, growth 2% sd 3.6%".into(),
            Curve::Yearly(0.01 + 2.0 * 0.02 - 2.0 * 3.0 * 0.036 * 0.036 / 2.0),
        ),
        (
            "preference 1%, elasticity 2, log growth 2% sd 3.6%".into(),
            Curve::Continuous(0.01 + 2.0 * 0.02 - 4.0 * 0.036 * 0.036 / 2.0),
        ),
        ("gamma mean 4% sd 3%".into(), Curve::Gamma(0.04, 0.03)),
        (
            "0.5 of (1%), 0.5 of (7% continuous)".into(),
            Curve::Mix(vec![(0.5, Curve::Yearly(0.01)), (0.5, Curve::Continuous(0.07))]),
        ),
    ];
    let edge = |year: i32| f64::from(year - base);
    let dated = vec![
        ("2.5% to 2040, 1.5% after".to_owned(), Curve::Bands(vec![(edge(2040), 0.025), (inf, 0.015)])),
        (
            "3.5% to 20, 3% after; edges from 2020".to_owned(),
            Curve::Bands(vec![(edge(2040), 0.035), (inf, 0.03)]),
        ),
    ];
    if calendar && random.chance(15) { random.pick(&dated) } else { random.pick(&lines) }
}

/// Whether level flows for ever have a value that summing finds in reasonable time.
pub fn lasting(curve: &Curve) -> bool {
    match curve {
        Curve::Yearly(r) | Curve::Continuous(r) | Curve::Exact(r) => *r >= 0.008,
        Curve::Bands(_) | Curve::Steps(..) | Curve::Points(..) => true,
        Curve::Gamma(..) => false,
        Curve::Mix(parts) => parts.iter().all(|part| lasting(&part.1)),
    }
}
