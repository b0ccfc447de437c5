//! Draws of an uncertain rate: 10,000 over 300 years, beside the same work in vectorised numpy in the same run.

use std::hint::black_box;
use std::num::NonZeroUsize;
use std::time::Duration;

use hence_core::{Distribution, DrawSummary, Draws, OptionFlows, Quantity, RateDistribution, draw_values};

use crate::{best, numpy};

const DRAWS: usize = 10_000;
const YEARS: usize = 300;
const OPTIONS: usize = 3;
const PERCENTILES: [f64; 5] = [5.0, 25.0, 50.0, 75.0, 95.0];
const RUNS: usize = 100;

/// The parts of the rate; `draws.py` states the same.
const PARTS: [(Quantity, &str); 4] = [
    (Quantity::Preference, "normal mean 1% sd 0.2%"),
    (Quantity::Hazard, "0.5%"),
    (Quantity::Elasticity, "normal mean 1.5 sd 0.2"),
    (Quantity::Growth, "normal mean 1.5% sd 0.3%"),
];

/// A cost and a benefit of each option: works, then upkeep; benefits that grow for a while and fall off.
fn streams(option: usize) -> [Vec<f64>; 2] {
    let size = 1.0 + option as f64;
    let cost = |t: usize| if t == 0 { -1000.0 * size } else { -4.0 - size };
    let benefit = |t: usize| if t == 0 { 0.0 } else { 35.0 * size.powf(0.8) / (1.0 + t as f64 / 150.0) };
    [(0..=YEARS).map(cost).collect(), (0..=YEARS).map(benefit).collect()]
}

/// All that is timed: from the texts of the distributions to percentiles and probabilities.
fn draw(options: &[OptionFlows], threads: usize) -> DrawSummary {
    let parsed = PARTS.map(|(quantity, text)| Distribution::parse(quantity, text).expect("a distribution"));
    let rate = RateDistribution::new(parsed).expect("distributions of a rate");
    let threads = NonZeroUsize::new(threads).expect("a thread");
    let drawn = draw_values(&rate, options, &Draws { count: DRAWS, seed: 1, threads }).expect("draws");
    drawn.summary(&PERCENTILES, threads).expect("values")
}

pub fn draws() {
    println!("| 10,000 draws over 300 years, three options, six streams | time | times as long |");
    println!("| --- | --- | --- |");
    let offsets: Vec<f64> = (0..2 * (YEARS + 1)).map(|i| (i % (YEARS + 1)) as f64).collect();
    let flows: Vec<Vec<f64>> = (0..OPTIONS).map(|option| streams(option).concat()).collect();
    let options: Vec<OptionFlows> =
        flows.iter().map(|flows| OptionFlows { offsets: &offsets, flows, perpetual: &[] }).collect();
    let one = best(RUNS, || drop(black_box(draw(black_box(&options), 1))));
    row("hence, 1 thread", one, one);
    row("hence, 2 threads", best(RUNS, || drop(black_box(draw(black_box(&options), 2)))), one);
    let args = [DRAWS, YEARS, RUNS].map(|number| number.to_string());
    let lines = flows.iter().map(|flows| flows.iter().map(f64::to_string).collect::<Vec<_>>().join(" "));
    let theirs = numpy("draws.py", &args, &lines.map(|line| line + "\n").collect::<String>());
    if theirs.is_empty() {
        println!("| numpy was not found (variable HENCE_PYTHON), so it was not measured | | |");
    }
    for line in theirs {
        let mut cells = line.split('\t');
        let name = cells.next().expect("a name");
        let mut number = || cells.next().and_then(|cell| cell.parse::<f64>().ok()).expect("a number");
        row(name, Duration::from_secs_f64(number()), one);
        // Both must have done the same work: they drew differently, so within five standard errors.
        let ours = draw(&options, 1);
        for (values, first) in ours.values.iter().zip(ours.first.iter().map(|first| first.alone.share)) {
            let (mean, positive, alone) = (number(), number(), number());
            let error =
                |share: f64| 5.0 * (2.0 * share.max(0.01) * (1.0 - share).max(0.01) / DRAWS as f64).sqrt();
            assert!((mean - values.mean).abs() < 5.0 * 2f64.sqrt() * values.mean_error, "{line}: {values:?}");
            assert!((positive - values.positive.share).abs() < error(positive), "{line}: {values:?}");
            assert!((alone - first).abs() < error(alone), "{line}: {first}");
        }
    }
    println!();
}

fn row(what: &str, time: Duration, one: Duration) {
    let ratio = time.as_secs_f64() / one.as_secs_f64();
    println!("| {what} | {:.2} ms | {ratio:.2} |", time.as_secs_f64() * 1e3);
}
