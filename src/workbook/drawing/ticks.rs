//! Round numbers for axes.

/// An axis: its ends and the round numbers on it, both ends among them.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Ticks {
    pub low: f64,
    pub high: f64,
    pub step: f64,
}

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
        Ticks { low: (low / step).floor() * step, high: (high / step).ceil() * step, step }
    }

    /// The numbers, rising.
    pub fn all(&self) -> Vec<f64> {
        let steps = ((self.high - self.low) / self.step).round() as i64;
        (0..=steps).map(|i| (self.low / self.step).round() * self.step + i as f64 * self.step).collect()
    }

    /// The share of the way from the low to the high end.
    pub fn share(&self, value: f64) -> f64 {
        (value - self.low) / (self.high - self.low)
    }

    /// A number on the axis, with the decimals its step needs and its thousands apart.
    pub fn label(&self, value: f64) -> String {
        let decimals = (-self.step.log10().floor()).max(0.0) as usize;
        // A zero of either sign is 0.
        grouped(if value.abs() < self.step / 2.0 { 0.0 } else { value }, decimals)
    }
}

/// A number with its thousands apart.
pub(crate) fn grouped(value: f64, decimals: usize) -> String {
    let text = format!("{:.decimals$}", value.abs());
    let (whole, rest) = text.split_at(text.find('.').unwrap_or(text.len()));
    let mut out = String::new();
    for (i, digit) in whole.chars().enumerate() {
        if i > 0 && (whole.len() - i) % 3 == 0 {
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
