//! Arbitrary-precision arithmetic for the tests: definitions written out, 240 bits, no part of the library.

use dashu_float::{FBig, round::mode::HalfEven};

pub type Big = FBig<HalfEven, 2>;

const BITS: usize = 240;

/// The exact value of a double.
pub fn big(value: f64) -> Big {
    FBig::<HalfEven, 2>::try_from(value).expect("finite").with_precision(BITS).value()
}

/// (1 + rate)^-years.
pub fn yearly(rate: &Big, years: &Big) -> Big {
    if *rate == big(0.0) {
        return big(1.0);
    }
    (-((big(1.0) + rate).ln() * years)).exp()
}

/// exp(-rate years).
pub fn continuous(rate: &Big, years: &Big) -> Big {
    (-(rate.clone() * years)).exp()
}

/// The distance of a computed number from the exact one, in units in the last place of the exact one; none where
/// the exact number lies outside the normal doubles.
pub fn ulps(found: f64, exact: &Big) -> Option<f64> {
    let near = exact.to_f64().value();
    if !near.is_normal() {
        return None;
    }
    let unit = 2f64.powi(((near.abs().to_bits() >> 52) as i32) - 1023 - 52);
    let distance = (big(found) - exact) / big(unit.max(f64::MIN_POSITIVE));
    Some(distance.to_f64().value().abs())
}

/// Keeps the worst distance seen, and what it was for.
pub struct Worst {
    what: &'static str,
    limit: f64,
    seen: f64,
    of: String,
    count: usize,
}

impl Worst {
    pub fn new(what: &'static str, limit: f64) -> Worst {
        Worst { what, limit, seen: 0.0, of: String::new(), count: 0 }
    }

    pub fn compare(&mut self, found: f64, exact: &Big, of: impl FnOnce() -> String) {
        let Some(distance) = ulps(found, exact) else { return };
        self.count += 1;
        if distance > self.seen {
            self.seen = distance;
            self.of = of().chars().take(160).collect();
        }
    }

    /// Prints the worst, and fails where it exceeds the limit or too few were compared.
    pub fn report(self, at_least: usize) {
        println!("{}: {} compared, worst {:.3} ulp, at {}", self.what, self.count, self.seen, self.of);
        assert!(self.seen <= self.limit, "{}: {} ulp at {}", self.what, self.seen, self.of);
        assert!(self.count >= at_least, "{}: only {} compared", self.what, self.count);
    }
}
