//! A million factors and a present value of 10 million flows, beside powers and products of arrays in numpy.

use hence_core::{Basis, Catalogue, Curve, Where, dot, present_value};
use std::hint::black_box;

use crate::{OFFSETS, fractional, numpy};

const RATE: f64 = 0.035;
const FLOWS: usize = 10_000_000;
const RUNS: usize = 20;
/// Every so many offsets one is compared with decimal arithmetic.
const SAMPLE: usize = 499;

fn curve(line: &str) -> Curve {
    let basis = Basis::parse(line, &Catalogue::builtin()).expect("a rate line");
    basis.curve(&Where::default()).expect("a curve")
}

/// The least processor time of some runs, in seconds: a busy machine would disturb runs so long.
fn best(mut work: impl FnMut()) -> f64 {
    let run = |_| {
        let start = processor_time();
        work();
        processor_time() - start
    };
    (0..RUNS).map(run).fold(f64::INFINITY, f64::min)
}

fn processor_time() -> f64 {
    let mut time = libc::timespec { tv_sec: 0, tv_nsec: 0 };
    // SAFETY: the clock is one that every system has, and `time` is a place for its answer.
    unsafe { libc::clock_gettime(libc::CLOCK_PROCESS_CPUTIME_ID, &mut time) };
    time.tv_sec as f64 + time.tv_nsec as f64 * 1e-9
}

fn ns(seconds: f64, count: usize) -> f64 {
    seconds * 1e9 / count as f64
}

pub fn arrays() {
    let flat = curve(&RATE.to_string());
    let offsets = fractional();
    let mut factors = vec![0.0; OFFSETS];
    let ours = best(|| flat.factors(&offsets, &mut factors).expect("offsets in the domain"));
    let pairs = offsets.iter().zip(&factors).step_by(SAMPLE);
    let sample: String = pairs.map(|(t, factor)| format!("{t} {factor}\n")).collect();
    let args = [RATE.to_string(), OFFSETS.to_string(), FLOWS.to_string(), RUNS.to_string()];
    let theirs: Vec<String> =
        numpy("arrays.py", &args, &sample).join(" ").split(' ').map(str::to_owned).collect();
    // Seconds for the powers and for the product; the worst errors, ours and theirs; their version.
    let theirs = match theirs.as_slice() {
        [powers, product, own, other, version] => {
            let number = |text: &String| text.parse::<f64>().expect("a number");
            Some((number(powers), number(product), number(own), number(other), version))
        }
        _ => None,
    };

    println!(
        "| a million factors at fractional offsets, 3.5%, one core | ns a factor | times as long | worst error |"
    );
    println!("| --- | --- | --- | --- |");
    let error = theirs.map(|theirs| format!("{:.2} units in the last place", theirs.2)).unwrap_or_default();
    println!("| hence | {:.2} | 1.00 | {error} |", ns(ours, OFFSETS));
    match theirs {
        Some((powers, _, _, error, version)) => println!(
            "| numpy {version}, `np.power(1+r, -t)` | {:.2} | {:.2} | {error:.2} units in the last place |\n",
            ns(powers, OFFSETS),
            powers / ours
        ),
        None => println!("| numpy was not found (variable HENCE_PYTHON) | | | |\n"),
    }

    println!("| 10 million flows and their factors, one core | ns a flow | times as long as numpy |");
    println!("| --- | --- | --- |");
    let row = |what: &str, seconds: f64| {
        let ratio = theirs.map(|theirs| format!("{:.2}", seconds / theirs.1)).unwrap_or_default();
        println!("| {what} | {:.2} | {ratio} |", ns(seconds, FLOWS));
    };
    if let Some(theirs) = theirs {
        row("`np.dot` of two arrays, not compensated, the factors made before", theirs.1);
    }
    let flows: Vec<f64> = (0..FLOWS).map(|i| (i as f64 * 0.618).fract() * 100.0 - 30.0).collect();
    let years = |length: usize| (0..FLOWS).map(|i| (i % length) as f64).collect::<Vec<f64>>();
    let grid = years(FLOWS);
    row("`dot` of two arrays, compensated", best(|| _ = black_box(dot(&grid, &flows))));
    let again = years(300);
    let bands = "3.5% to 30, 3% to 75, 2.5% to 125, 2% to 200, 1.5% to 300, 1% after";
    for (what, line, offsets) in [
        ("years 0 to 10 million, 3.5%: factors are 0 from year 22,000 on", "3.5%", &grid),
        ("years 0 to 10 million, 0.001%: no factor is 0", "0.001%", &grid),
        ("300 years again and again, 3.5%", "3.5%", &again),
        ("300 years again and again, six bands", bands, &again),
    ] {
        let curve = curve(line);
        let value = || _ = black_box(present_value(&curve, offsets, &flows).expect("a value"));
        row(&format!("`present_value`, {what}"), best(value));
    }
    println!();
}
