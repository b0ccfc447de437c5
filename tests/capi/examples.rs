//! The published worked examples through C and through Rust: what each row asks for, equal to the last bit.
//!
//! `tests/reference/npv.rs` compares the values with the published ones; here a row says what to compute.

use std::collections::BTreeMap;

use hence_core::{
    IRR_INTERVAL, TimedOffset, Timing, annual_equivalent, internal_rates, percent, present_value,
};

use crate::loaded;
use crate::reference::{Both, equal, table};

/// Offset and flow.
type Stream = Vec<(f64, f64)>;

/// What a row asks for: streams to be valued and, where stated, the years over which the first one's value is spread.
type Asked = (Vec<Stream>, Option<u32>);

/// Rows that no C function answers, with the reason. The others are compared.
const NOT_IN_C: [(&str, &str, &str); 3] = [
    ("osx_machine", "modified_irr", "not one of the measures offered"),
    ("bm_prize_c", "perpetuity_11400", "tails are not in the C interface"),
    ("bm_prize_d", "growing_perpetuity_6500_growth_0.05", "tails are not in the C interface"),
];

/// The number in a word of the measure's name: "30y" and "1000000" alike.
fn number(word: &str) -> f64 {
    word.trim_end_matches('y').parse().unwrap_or_else(|_| panic!("{word} is no number"))
}

/// The offsets of years at a position, in both libraries; the outlay at time 0 stays there.
fn timed(flows: &[(f64, f64)], timing: &str) -> Stream {
    let years: Vec<f64> = flows.iter().map(|flow| flow.0).collect();
    let rust: Timing = timing.parse().expect("a timing");
    let offset = |year: &f64| match rust.offset(*year) {
        Ok(TimedOffset::At(t)) => t,
        other => panic!("{other:?} is not one offset"),
    };
    let offsets: Vec<f64> = years.iter().map(offset).collect();
    equal(&offsets, &loaded::offsets_from_years(&years, 0.0, timing));
    let at = |(&(year, flow), t): (&(f64, f64), f64)| (if year == 0.0 { 0.0 } else { t }, flow);
    flows.iter().zip(offsets).map(at).collect()
}

/// What a measure needs; none where no C function answers it.
fn asked(words: &[&str], flows: &[(f64, f64)]) -> Option<Asked> {
    let all = || flows.iter().copied();
    let one = |t: f64, flow: f64| vec![vec![(t, flow)]];
    Some(match words {
        ["npv"] | ["pv"] | ["pv", "5", "years", "of", "the", "annual", "cost"] => {
            (vec![flows.to_vec()], None)
        }
        ["pv", "of", "period", year] => (vec![all().filter(|flow| flow.0 == number(year)).collect()], None),
        ["cumulative", "pv", "to", year] => {
            (vec![all().filter(|flow| flow.0 <= number(year)).collect()], None)
        }
        ["pv", "of", "inflows" | "benefits" | "repayments"] => {
            (vec![all().filter(|flow| flow.1 > 0.0).collect()], None)
        }
        ["profitability", "index"] => {
            let (inflows, outlays) = all().partition(|flow| flow.1 > 0.0);
            (vec![inflows, outlays], None)
        }
        // Payback itself is not in C; the present value of each year, of which it is made, is.
        ["discounted", "payback", "years"] => (all().map(|flow| vec![flow]).collect(), None),
        ["equivalent", "annual", "value", years] => (vec![flows.to_vec()], Some(number(years) as u32)),
        ["perpetuity", "of", "equivalent", "annual"] => {
            let life = all().map(|flow| flow.0).fold(0.0, f64::max);
            (vec![flows.to_vec()], Some(life as u32))
        }
        ["equivalent", "annual", "cost", "of", amount, "over", years] => {
            (one(0.0, number(amount)), Some(number(years) as u32))
        }
        ["balance", "after", year] => {
            let saved = all().filter(|flow| flow.0 <= number(year));
            (vec![saved.map(|(t, flow)| (t - number(year), flow)).collect()], None)
        }
        ["future", "value", "of", amount, "after", years] => (one(-number(years), number(amount)), None),
        ["pv", "of", amount, "in", years] | ["pv", "of", amount, "in", "year", years] => {
            (one(number(years), number(amount)), None)
        }
        ["pv", "of", amount, "years", from, "to", to] => {
            let years = number(from) as u32..=number(to) as u32;
            (vec![years.map(|year| (f64::from(year), number(amount))).collect()], None)
        }
        ["npv", "end", "of", "year"] => (vec![timed(flows, "flows end")], None),
        ["npv", "mid", "year", "flows", "at", "half"] => (vec![timed(flows, "flows middle")], None),
        ["npv", "start", "of", "year"] => (vec![timed(flows, "flows start")], None),
        ["weight", "of", "damage", .., years] => (one(number(years), 1.0), None),
        _ => return None,
    })
}

/// Values the streams of a row at its rate, in both libraries.
fn compare(rate: f64, (streams, years): Asked) {
    let basis = Both::new(&percent(rate));
    let mut first = None;
    for stream in &streams {
        assert!(!stream.is_empty(), "a row asks for something");
        let (offsets, flows): (Vec<f64>, Vec<f64>) = stream.iter().copied().unzip();
        let rust = present_value(&basis.rust, &offsets, &flows).expect("a value");
        equal(&[rust], &[basis.c.present_value(&offsets, &flows)]);
        let twice: Vec<f64> = flows.iter().copied().chain(flows.iter().map(|flow| -flow)).collect();
        equal(&[rust, -rust], &basis.c.present_values(&offsets, &twice));
        first.get_or_insert(rust);
    }
    if let (Some(value), Some(years)) = (first, years) {
        let (rust, _) = annual_equivalent(&basis.rust, value, years).expect("a value");
        equal(&[rust], &[basis.c.annual_equivalent(value, years as i32)]);
    }
}

#[test]
fn worked_examples() {
    let flows = table!("npv_cash_flows.csv");
    let mut examples: BTreeMap<&str, Stream> = BTreeMap::new();
    for row in flows.rows() {
        examples.entry(row.text("example")).or_default().push((row.number("year"), row.number("flow")));
    }
    flows.checked(examples.values().map(Vec::len).sum(), 101);

    let results = table!("npv_results.csv");
    let (mut compared, mut misprints, mut not_in_c) = (0, 0, Vec::new());
    for row in results.rows() {
        if row.text("agrees") == "NO" {
            misprints += 1;
            continue;
        }
        let flows = examples.get(row.text("example")).map_or(&[][..], Vec::as_slice);
        let words: Vec<&str> = row.text("measure").split('_').collect();
        if words[0] == "irr" {
            let (offsets, flows): (Vec<f64>, Vec<f64>) = flows.iter().copied().unzip();
            let rust = internal_rates(&offsets, &flows, IRR_INTERVAL).expect("rates");
            assert!(rust.unresolved.is_empty() && !rust.rates.is_empty(), "{}", row.text("example"));
            equal(&rust.rates, &loaded::irr_all(&offsets, &flows, IRR_INTERVAL));
        } else if let Some(asked) = asked(&words, flows) {
            compare(row.number("rate"), asked);
        } else {
            not_in_c.push((row.text("example"), row.text("measure")));
            continue;
        }
        compared += 1;
    }
    assert_eq!(not_in_c, NOT_IN_C.map(|(example, measure, _)| (example, measure)));
    // The rows of the file that its own source got wrong are those that are not used in Rust either.
    assert_eq!(misprints, 9);
    results.checked(compared, 89);
    assert_eq!(compared + misprints + NOT_IN_C.len(), results.rows().count());
}
