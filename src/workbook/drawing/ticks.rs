//! Round numbers for axes.

use super::measure::width;

/// An axis: its ends and the round numbers on it, both ends among them.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Ticks {
    pub low: f64,
    pub high: f64,
    pub step: f64,
    /// Labels are in units of ten to this power.
    power: i32,
}

/// Labels of this many digits before the point are the longest without a unit of their own.
const LONGEST: i32 = 6;

impl Ticks {
    /// About `count` steps of 1, 2 or 5 times a power of ten that hold all values. Values that are all alike get some
    /// room around them.
    pub fn over(values: impl IntoIterator<Item = f64>, count: f64) -> Self {
        let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
        for value in values {
            (low, high) = (low.min(value), high.max(value));
        }
        if low > high {
            (low, high) = (0.0, 1.0);
        }
        if low == high {
            let room = if low == 0.0 { 1.0 } else { low.abs() };
            (low, high) = ((low - room).min(0.0), (high + room).max(0.0));
        }
        let rough = (high - low) / count;
        let power = 10f64.powf(rough.log10().floor());
        let step = power * [1.0, 2.0, 5.0, 10.0].into_iter().find(|m| m * power >= rough).unwrap_or(10.0);
        let (low, high) = ((low / step).floor() * step, (high / step).ceil() * step);
        Ticks { low, high, step, power: unit_power(low.abs().max(high.abs()), step) }
    }

    /// As [`Ticks::over`] with as many steps as labels side by side leave room for on an axis so long.
    pub fn along(values: &[f64], length: f64) -> Self {
        const APART: f64 = 10.0;
        let fits = |ticks: &Ticks| {
            let all = ticks.all();
            let widest = all.iter().map(|tick| width(&ticks.label(*tick))).fold(0.0, f64::max);
            (widest + APART) * (all.len() - 1) as f64 <= length
        };
        let tries = [8.0, 6.0, 5.0, 4.0, 3.0, 2.0].map(|count| Ticks::over(values.iter().copied(), count));
        let least = tries[tries.len() - 1].clone();
        tries.into_iter().find(fits).unwrap_or(least)
    }

    /// The numbers, rising.
    pub fn all(&self) -> Vec<f64> {
        let steps = ((self.high - self.low) / self.step).round() as i64;
        (0..=steps).map(|i| (self.low / self.step).round() * self.step + i as f64 * self.step).collect()
    }

    /// Whether a number on the axis is its zero.
    pub fn is_zero(&self, tick: f64) -> bool {
        tick.abs() < self.step / 2.0
    }

    /// The share of the way from the low to the high end.
    pub fn share(&self, value: f64) -> f64 {
        (value - self.low) / (self.high - self.low)
    }

    /// A number on the axis in its unit, with the decimals its step needs and its thousands apart.
    pub fn label(&self, value: f64) -> String {
        let step = scaled(self.step, self.power);
        let decimals = (-step.log10().floor()).max(0.0) as usize;
        // A zero of either sign is 0.
        grouped(if self.is_zero(value) { 0.0 } else { scaled(value, self.power) }, decimals)
    }

    /// What the axis measures, with the unit of its labels.
    pub fn measure(&self, what: &str) -> String {
        let unit = match self.power {
            0 => return what.to_owned(),
            6 => "millions".to_owned(),
            9 => "billions".to_owned(),
            12 => "trillions".to_owned(),
            power => format!("10^{power}"),
        };
        format!("{what}, {unit}")
    }
}

/// The power of ten, a multiple of 3, in which labels of an axis are short.
fn unit_power(largest: f64, step: f64) -> i32 {
    let digits = largest.log10().floor() as i32 + 1;
    if digits > LONGEST {
        return (digits - 1).div_euclid(3) * 3;
    }
    let of_step = step.log10().floor() as i32;
    if of_step < -4 { of_step.div_euclid(3) * 3 } else { 0 }
}

fn scaled(value: f64, power: i32) -> f64 {
    if power < 0 { value * 10f64.powi(-power) } else { value / 10f64.powi(power) }
}

/// A number with its thousands apart.
pub(crate) fn grouped(value: f64, decimals: usize) -> String {
    let text = format!("{:.decimals$}", value.abs());
    let (whole, rest) = text.split_at(text.find('.').unwrap_or(text.len()));
    let mut out = String::new();
    for (i, digit) in whole.chars().enumerate() {
        if i > 0 && (whole.len() - i).is_multiple_of(3) {
            out.push(',');
        }
        out.push(digit);
    }
    let zero = text.chars().all(|c| matches!(c, '0' | '.'));
    let sign = if value < 0.0 && !zero { "-" } else { "" };
    format!("{sign}{out}{rest}")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn axes_end_on_round_numbers() {
        let ticks = Ticks::over([0.03, 0.97], 5.0);
        assert_eq!((ticks.low, ticks.high, ticks.all().len()), (0.0, 1.0, 6));
        let ticks = Ticks::over([-3_400.0, 12_100.0], 5.0);
        assert_eq!(ticks.all(), [-5000.0, 0.0, 5000.0, 10_000.0, 15_000.0]);
        assert_eq!(ticks.label(-5000.0), "-5,000");
        let alike = Ticks::over([7.0, 7.0], 5.0);
        assert!(alike.low <= 0.0 && alike.high >= 7.0);
        let none = Ticks::over([], 5.0);
        assert_eq!((none.low, none.high), (0.0, 1.0));
    }

    #[test]
    fn large_and_small_numbers_get_a_unit() {
        for (values, label, measure) in [
            ([0.0, 500_000.0], "500,000", "NPV"),
            ([0.0, 50_000_000.0], "50", "NPV, millions"),
            ([-3e9, 0.0], "-3", "NPV, billions"),
            ([0.0, 2e12], "2.0", "NPV, trillions"),
            ([0.0, 5e20], "500", "NPV, 10^18"),
            ([0.0, 0.05], "0.05", "NPV"),
            ([0.0, 5e-7], "500", "NPV, 10^-9"),
        ] {
            let ticks = Ticks::over(values, 5.0);
            let end = if values[0] < 0.0 { ticks.low } else { ticks.high };
            assert_eq!((ticks.label(end).as_str(), ticks.measure("NPV").as_str()), (label, measure));
        }
    }

    #[test]
    fn labels_side_by_side_leave_room() {
        for values in [[0.0, 999_999.0], [-999_999.0, 999_999.0], [0.0, 0.00012], [0.0, 1e300]] {
            let ticks = Ticks::along(&values, 220.0);
            let all: f64 = ticks.all().iter().map(|tick| width(&ticks.label(*tick))).sum();
            assert!(all < 260.0 && ticks.all().len() >= 2, "{values:?}: {all}");
        }
    }

    #[test]
    fn thousands_stand_apart() {
        for (value, decimals, due) in [
            (0.0, 0, "0"),
            (-0.2, 0, "0"),
            (999.0, 0, "999"),
            (1000.0, 0, "1,000"),
            (-1_234_567.89, 1, "-1,234,567.9"),
        ] {
            assert_eq!(grouped(value, decimals), due);
        }
    }
}
