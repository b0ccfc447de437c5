//! From money of the day to constant prices and back: rates and flows.

use crate::{Error, ErrorKind, Result, check};

/// The real rate behind a nominal rate.
///
/// **Formula**: (1 + nominal)/(1 + inflation) - 1.
///
/// **Arguments**: `nominal` and `inflation`, fractions per year with yearly compounding, above -1.
///
/// **Returns**: a fraction per year.
///
/// **Accuracy**: computed as (nominal - inflation)/(1 + inflation), within 2 units in the last place; equal rates
/// give exactly 0.
///
/// **Errors**: `NotFinite`; `RateRange` at or below -1.
///
/// **Source**: I. Fisher, The Theory of Interest, 1930, ch. 2.
///
/// ```
/// use hence_core::real_rate;
/// assert!((real_rate(0.0506, 0.02).unwrap() - 0.03).abs() < 1e-15);
/// assert_eq!(real_rate(0.05, -1.0).unwrap_err().to_string(),
///     "inflation: found -100%, allowed above -100% (rate-range)");
/// ```
pub fn real_rate(nominal: f64, inflation: f64) -> Result<f64> {
    above_minus_one("nominal", nominal)?;
    above_minus_one("inflation", inflation)?;
    check::result("nominal", (nominal - inflation) / (1.0 + inflation))
}

/// The nominal rate that a real rate and inflation make.
///
/// **Formula**: (1 + real)(1 + inflation) - 1.
///
/// **Arguments**: `real` and `inflation`, fractions per year with yearly compounding, above -1.
///
/// **Returns**: a fraction per year.
///
/// **Accuracy**: computed as real + inflation (1 + real), within 2 units in the last place of the larger term.
///
/// **Errors**: `NotFinite`; `RateRange` at or below -1.
///
/// **Source**: I. Fisher, The Theory of Interest, 1930, ch. 2.
///
/// ```
/// assert!((hence_core::nominal_rate(0.03, 0.02).unwrap() - 0.0506).abs() < 1e-15);
/// ```
pub fn nominal_rate(real: f64, inflation: f64) -> Result<f64> {
    above_minus_one("real", real)?;
    above_minus_one("inflation", inflation)?;
    check::result("real", inflation.mul_add(1.0 + real, real))
}

/// Flows in money of the day turned into constant prices by a price index.
///
/// **Formula**: real flow = nominal flow × index of the base year/index of the flow's year.
///
/// **Arguments**: `flows`, money of the day; `index`, the price level of each flow's year, above 0 on any scale,
/// as many as flows; `base`, the place in `index` (from 0) whose prices are wanted. The price base year need not
/// be the year discounted to.
///
/// **Returns**: flows in the prices of the base, in order, not rounded.
///
/// **Edge cases**: without flows there is no base, which is an error.
///
/// **Accuracy**: two roundings a flow.
///
/// **Errors**: `Shape` where lengths differ or `base` is outside the index; `NotFinite`, with the index;
/// `NoMeaning` where the index is 0 or negative.
///
/// ```
/// let real = hence_core::real_flows(&[100.0, 104.0], &[100.0, 104.0], 0).unwrap();
/// assert_eq!(real, [100.0, 100.0]);
/// ```
pub fn real_flows(flows: &[f64], index: &[f64], base: usize) -> Result<Vec<f64>> {
    check::same_length(("flows", flows), ("index", index))?;
    check::finite_all("flows", flows)?;
    check::finite_all("index", index)?;
    if let Some(place) = index.iter().position(|&level| level <= 0.0) {
        let message = format!("found a price level of {}, allowed above 0", index[place]);
        return Err(Error::new(ErrorKind::NoMeaning, "index", message)
            .with_index(place)
            .with_hint("give the level of prices (100, 102, ...), not their change"));
    }
    let Some(&level) = index.get(base) else {
        let message = format!("found place {base} (counted from 0) of an index of {} years", index.len());
        return Err(Error::new(ErrorKind::Shape, "base", message).with_hint("a year that the index covers"));
    };
    let real = flows.iter().zip(index).map(|(flow, own)| check::result("flows", flow * (level / own)));
    real.enumerate().map(|(place, value)| value.map_err(|error| error.with_index(place))).collect()
}

/// Flows in money of the day turned into constant prices by a steady rate of inflation.
///
/// **Formula**: real flow = nominal flow × (1 + inflation)^-n.
///
/// **Arguments**: `flows`, money of the day; `years`, n, the years from the price base to each flow, negative
/// before it, as many as flows; `inflation`, a fraction per year with yearly compounding, above -1.
///
/// **Returns**: flows in the prices of the price base, in order, not rounded.
///
/// **Accuracy**: within 2 units in the last place.
///
/// **Errors**: `Shape` where lengths differ; `NotFinite`, with the index; `RateRange` at or below -1.
///
/// ```
/// let real = hence_core::real_flows_by_inflation(&[100.0, 102.0], &[0.0, 1.0], 0.02).unwrap();
/// assert!((real[1] - 100.0).abs() < 1e-12);
/// ```
pub fn real_flows_by_inflation(flows: &[f64], years: &[f64], inflation: f64) -> Result<Vec<f64>> {
    check::same_length(("flows", flows), ("years", years))?;
    check::finite_all("flows", flows)?;
    check::finite_all("years", years)?;
    above_minus_one("inflation", inflation)?;
    let real =
        flows.iter().zip(years).map(|(flow, n)| check::result("flows", flow * (1.0 + inflation).powf(-n)));
    real.enumerate().map(|(place, value)| value.map_err(|error| error.with_index(place))).collect()
}

fn above_minus_one(argument: &'static str, rate: f64) -> Result<()> {
    check::finite(argument, rate)?;
    if rate > -1.0 {
        return Ok(());
    }
    let message = format!("found {}%, allowed above -100%", 100.0 * rate);
    Err(Error::new(ErrorKind::RateRange, argument, message).with_hint("a fraction, 0.02 for 2%"))
}
