//! What the samples that weigh two walls must print, made with the library itself and not through its C interface.

use std::num::NonZeroUsize;

use hence_core::{
    Compounding, Distribution, Draws, OptionFlows, Parameter, Quantity, RateDistribution, RateLine, Result,
    Where, draw_values, equivalent_variation, growth_from_consumption, hazard_from_waiting_time,
    switching_values, welfare_factors,
};

const NAMES: [&str; 2] = ["the low wall", "the high wall"];
const PERCENTILES: [f64; 3] = [5.0, 50.0, 95.0];
const SERIES: [f64; 10] = [21.0, 21.4, 21.3, 21.9, 22.4, 22.6, 22.5, 23.1, 23.6, 23.9];

/// A line for a number: its name, the number with six decimals, its bits.
fn show(what: &str, x: f64) -> String {
    format!("{what:<44}{x:14.6}  {:016x}\n", x.to_bits())
}

/// The text that the samples print.
pub fn text() -> Result<String> {
    let offsets: Vec<f64> = (0..101).map(f64::from).collect();
    let low: Vec<f64> = offsets.iter().map(|t| if *t == 0.0 { -28.0 } else { 1.25 }).collect();
    let high: Vec<f64> = offsets.iter().map(|t| if *t == 0.0 { -70.0 } else { 1.25 + 0.0625 * t }).collect();
    let options = [&low, &high].map(|flows| OptionFlows { offsets: &offsets, flows, perpetual: &[] });

    let growth = growth_from_consumption(&SERIES, None)?;
    let mut text = show("growth along the trend", growth.trend_growth());
    text += &show("standard error of log growth", growth.trend.error);
    text += &show("standard deviation from year to year", growth.sd.value);
    let hazard = hazard_from_waiting_time(500.0, Compounding::Yearly)?;
    text += &show("hazard of a flood that ends the town", hazard);

    let parse = |quantity, words| Distribution::parse(quantity, words);
    let rate = RateDistribution::new([
        parse(Quantity::Preference, "uniform 0% to 1%")?,
        Distribution::Fixed(hazard),
        parse(Quantity::Elasticity, "triangular 1, 1.5, 2")?,
        parse(Quantity::Growth, "normal mean 1.5% sd 0.4%")?,
    ])?;
    let draws = Draws { count: 10_000, seed: 7, threads: NonZeroUsize::MIN };
    let summary = draw_values(&rate, &options, &draws)?.summary(&PERCENTILES, NonZeroUsize::MIN)?;
    for (i, name) in NAMES.iter().enumerate() {
        let spread = &summary.values[i];
        text += &show(&format!("mean of {name}"), spread.mean);
        for (percentile, value) in PERCENTILES.iter().zip(&spread.percentiles) {
            text += &show(&format!("percentile {percentile} of {name}"), *value);
        }
        text += &show(&format!("chance to be worth it of {name}"), spread.positive.share);
        text += &show(&format!("chance to be first of {name}"), summary.first[i].alone.share);
    }

    let more: Vec<f64> = high.iter().zip(&low).map(|(high, low)| high - low).collect();
    let net = OptionFlows { offsets: &offsets, flows: &more, perpetual: &[] };
    let line = RateLine::parse("preference 0.5%, hazard 0.2%, elasticity 1.5, growth 1.5%")?;
    for parameter in Parameter::ALL {
        let found = switching_values(&net, line.spec(), &Where::default(), parameter, parameter.interval())?;
        for value in found.values {
            text += &show(&format!("the walls swap at this {parameter}"), value);
        }
    }

    let consumption: Vec<f64> = offsets.iter().map(|t| 600.0 + 9.0 * t).collect();
    let base = consumption[0];
    let factors = welfare_factors(&consumption, &offsets, base, 0.007, 1.5, Compounding::Yearly)?;
    let exact = equivalent_variation(&high, &consumption, &factors, base, 1.5)?;
    text += &show("exact value of the high wall", exact);

    // The comma stands at this character of the text for growth, which is argument 4.
    let comma = "normal mean 1,5% sd 0.4%".find(',').expect("a slip");
    text += &format!("refused: HENCE_ERR_SYNTAX (argument 4, index {comma})\n");
    Ok(text)
}

/// The flows are such that the samples show what they are there to show.
#[test]
fn the_walls_swap_and_neither_is_always_first() {
    let text = text().expect("a text");
    assert!(
        ["rate", "preference", "elasticity", "growth"]
            .iter()
            .all(|word| { text.matches(&format!("the walls swap at this {word} ")).count() == 1 }),
        "{text}"
    );
    let chance = |name: &str| -> f64 {
        let line = text.lines().find(|line| line.starts_with(&format!("chance to be first of {name} ")));
        line.and_then(|line| line[44..58].trim().parse().ok()).expect("a number")
    };
    assert!(NAMES.iter().all(|name| (0.05..0.95).contains(&chance(name))), "{text}");
}
