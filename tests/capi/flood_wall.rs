//! What the samples and the C++ layer must print, made with the library itself and not through its C interface.

use chrono::NaiveDate;

use hence_core::Compounding::{Continuous, Yearly};
use hence_core::{
    Basis, Catalogue, DayCount, Error, ErrorKind, IRR_INTERVAL, Result, TaxBracket, TimedOffset, Timing,
    Where, annual_equivalent, compensating_variation, compensation, elasticity_from_tax_brackets,
    elasticity_from_taxes, equally_distributed_equivalent, equity_weight, growth_from_consumption,
    hazard_from_probability, internal_rates, marginal_utility, offset_of_dates, present_value, ramsey_rate,
    ramsey_rate_uncertain, real_rate, switching_multiplier, utility, welfare,
};

const PLAN: &str = include_str!("../../samples/flood-wall.csv");

/// A line for a number: its name, the number with six decimals, its bits.
fn show(what: &str, x: f64) -> String {
    format!("{what:<34}{x:14.6}  {:016x}\n", x.to_bits())
}

/// The plan's columns: the years, then the streams with their names.
fn columns() -> (Vec<f64>, Vec<(&'static str, Vec<f64>)>) {
    let mut lines = PLAN.lines();
    let names = lines.next().expect("a heading").split(',');
    let rows: Vec<Vec<f64>> =
        lines.map(|line| line.split(',').map(|cell| cell.parse().expect("a number")).collect()).collect();
    let column = |i: usize| rows.iter().map(|row| row[i]).collect::<Vec<f64>>();
    let streams = names.enumerate().skip(1).map(|(i, name)| (name, column(i))).collect();
    (column(0), streams)
}

/// The text that the samples print, or the error of a basis that they must refuse.
pub fn text(curve: &str, timing: &str) -> Result<String> {
    let (years, streams) = columns();
    let basis = Basis::parse(&format!("{curve}; {timing}"), &Catalogue::builtin())?;
    let curve = basis.curve(&Where::default())?;
    let timing: Timing = timing.parse()?;
    let mut text = format!("basis: {}\nin words: {}\n", basis.canonical(), basis.words());

    let offset = |year: &f64| match timing.offset(year - years[0])? {
        TimedOffset::At(t) => Ok(t),
        TimedOffset::Averaged(..) => Err(Error::new(ErrorKind::Unsupported, "timing", "two offsets")),
    };
    let offsets = years.iter().map(offset).collect::<Result<Vec<f64>>>()?;
    for (year, t) in years.iter().zip(&offsets).step_by(25) {
        text += &show(&format!("offset in {year}"), *t);
        text += &show(&format!("factor in {year}"), curve.factor(*t)?);
        text += &show(&format!("forward rate in {year}"), curve.forward_rate(*t)?);
    }

    for (name, flows) in &streams {
        text += &show(&format!("present value of {name}"), present_value(&curve, &offsets, flows)?);
    }
    let net: Vec<f64> =
        (0..years.len()).map(|i| streams[0].1[i] + streams[1].1[i] + streams[2].1[i]).collect();
    let npv = present_value(&curve, &offsets, &net)?;
    text += &show("net present value", npv);
    text += &show("the same every year", annual_equivalent(&curve, npv, 100)?.0);
    for rate in internal_rates(&offsets, &net, IRR_INTERVAL)?.rates {
        text += &show("internal rate of return", rate);
    }
    text += &show("Ramsey rate", ramsey_rate(0.015, 1.0, 0.02)?);
    text += &show("equity weight of the harbour side", equity_weight(21400.0, 34250.0, 1.3)?);

    // The gap is in the second row of 101 flows, at its 25th, counted from 0 row after row; flows are argument 3.
    text += "refused: HENCE_ERR_NOT_FINITE: NaN is not finite (argument 3, index 125)\n";
    text += "which is upkeep in 2050\n";
    Ok(text)
}

/// What `c/wrapper.cpp` must print, from the library.
pub fn layer() -> Result<String> {
    let catalogue = Catalogue::builtin();
    let curve = |line: &str, at: Where| Basis::parse(line, &catalogue)?.curve(&at);
    let edges = curve("2.5% to 2070, 1.5% after", Where { base_year: Some(2026), ..Where::default() })?;
    let by_length = "3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by length, interpolated";
    let by_length = curve(by_length, Where { length: Some(20.0), ..Where::default() })?;
    let day = |year, month| NaiveDate::from_ymd_opt(year, month, 1).expect("a date");
    let dated = |count| offset_of_dates(day(2026, 4), day(2028, 7), count);
    let numbers = [
        edges.factor(10.0)?,
        edges.factor(50.0)?,
        edges.factor(90.0)?,
        edges.mean_rate(50.0)?,
        edges.mean_rate(90.0)?,
        by_length.factor(10.0)?,
        0.0,
        dated(DayCount::Anniversary)?,
        dated(DayCount::Thirty360E)?,
        ramsey_rate_uncertain(0.01, 2.0, 0.02, 0.036)?,
        elasticity_from_taxes(0.42, 0.29)?,
        real_rate(0.0555, 0.0203)?,
    ];
    let mut numbers = numbers.to_vec();
    for t in [10.0, 50.0, 90.0] {
        numbers.push(edges.instantaneous_rate(t)?);
    }
    let (four, shares) = ([2.0, 2.5, 2.25, 3.0], [0.4, 0.3, 0.2, 0.1]);
    let brackets: Vec<TaxBracket> = (shares.iter().zip(four))
        .map(|(rate, weight)| TaxBracket { marginal: *rate, average: *rate, weight })
        .collect();
    let growth = growth_from_consumption(&four, None)?;
    let persistence = growth.persistence.expect("growth that varies");
    numbers.extend([
        elasticity_from_tax_brackets(&brackets)?,
        hazard_from_probability(0.01, Continuous)?,
        growth.geometric_mean,
        persistence.value,
        persistence.error,
        utility(2.5, 1.5)?,
        marginal_utility(2.5, 1.5)?,
        welfare(&four, &[0.0, 1.0, 2.0, 3.0], 0.01, 1.5, Yearly)?,
        compensation(0.5, 2.0, 3.0, 10.0, 0.01, 1.5, Yearly)?,
        compensating_variation(&shares, &four, &shares, 2.0, 0.4, 1.5)?,
        equally_distributed_equivalent(&four, &shares, 1.5)?,
        switching_multiplier(20.0, -100.0)?.expect("a stream that counts"),
    ]);
    let bits: Vec<String> = numbers.iter().map(|x| format!("{:016x}", x.to_bits())).collect();
    let line = catalogue.get("uk-2003").expect("a schedule").line()?;
    let slips = "HENCE_ERR_SYNTAX, argument 2, index 2\n9";
    Ok(format!("{}\n{slips}\n{line}\nHENCE_ERR_NULL, argument 1\n", bits.join("\n")))
}

/// The plan is such that the samples show what they are there to show.
#[test]
fn the_plan_has_a_hundred_years_and_two_rates_of_return() {
    let (years, streams) = columns();
    let names: Vec<&str> = streams.iter().map(|(name, _)| *name).collect();
    assert_eq!(names, ["building", "upkeep", "avoided damage"]);
    assert_eq!((years.len(), years[0], years[24], years[100]), (101, 2026.0, 2050.0, 2126.0));
    let text = text("uk-2003", "flows middle").expect("a text");
    assert_eq!(text.matches("internal rate of return").count(), 2);
}
