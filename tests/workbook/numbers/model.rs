//! The whole appraisal once more in plain floating point, written from the specification (sections 2, 3 and 6). It calls
//! nothing of hence: sums are plain, tails are summed flow by flow, dates are counted here.

/// A curve as the rate line states it.
#[derive(Clone, Debug)]
pub enum Curve {
    Yearly(f64),
    Continuous(f64),
    /// (last offset, rate): the rate applies to the years inside its band.
    Bands(Vec<(f64, f64)>),
    /// (last offset, rate) by the offset of each flow, or by the length.
    Steps(Vec<(f64, f64)>, bool),
    /// (offset, rate), straight lines between, by the offset of each flow or by the length.
    Points(Vec<(f64, f64)>, bool),
    /// One yearly rate, from the base on only (exact Ramsey rule).
    Exact(f64),
    Gamma(f64, f64),
    Mix(Vec<(f64, Curve)>),
}

impl Curve {
    /// D(t) for an appraisal of so many years.
    pub fn factor(&self, t: f64, length: f64) -> f64 {
        match self {
            Curve::Yearly(r) | Curve::Exact(r) => (1.0 + r).powf(-t),
            Curve::Continuous(r) => (-r * t).exp(),
            Curve::Bands(bands) => {
                let (low, high, power) = if t < 0.0 { (t, 0.0, 1.0) } else { (0.0, t, -1.0) };
                let mut lower = f64::NEG_INFINITY;
                let mut factor = 1.0;
                for &(upper, rate) in bands {
                    let inside = (high.min(upper) - low.max(lower)).max(0.0);
                    factor *= (1.0 + rate).powf(power * inside);
                    lower = upper;
                }
                factor
            }
            Curve::Steps(bands, by_length) => {
                let at = if *by_length { length } else { t };
                let band = bands.iter().find(|band| at <= band.0).expect("the last band has no end");
                (1.0 + band.1).powf(-t)
            }
            Curve::Points(points, by_length) => {
                let at = if *by_length { length } else { t };
                let (first, last) = (points[0], points[points.len() - 1]);
                let rate = if at <= first.0 {
                    first.1
                } else if at >= last.0 {
                    last.1
                } else {
                    let k = points.iter().position(|p| p.0 >= at).unwrap();
                    let (a, b) = (points[k - 1], points[k]);
                    a.1 + (b.1 - a.1) * (at - a.0) / (b.0 - a.0)
                };
                (1.0 + rate).powf(-t)
            }
            Curve::Gamma(m, s) => (1.0 + t * s * s / m).powf(-m * m / (s * s)),
            Curve::Mix(parts) => parts.iter().map(|(w, curve)| w * curve.factor(t, length)).sum(),
        }
    }

    /// Whether it says anything of offsets before the base.
    pub fn before_base(&self) -> bool {
        match self {
            Curve::Yearly(_) | Curve::Continuous(_) | Curve::Bands(_) | Curve::Gamma(..) => true,
            Curve::Steps(_, by_length) | Curve::Points(_, by_length) => *by_length,
            Curve::Exact(_) => false,
            Curve::Mix(parts) => parts.iter().all(|part| part.1.before_base()),
        }
    }
}

/// Positions in the year: 0, 1/2, 1; flows may be averaged (none).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Timing {
    pub flows: Option<f64>,
    pub base: f64,
}

pub const END: Timing = Timing { flows: Some(1.0), base: 1.0 };

#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Side {
    Cost,
    Benefit,
    Flow,
    Damage,
}

#[derive(Clone, Debug)]
pub struct Tail {
    pub growth: f64,
    pub every: f64,
    /// The last year after the base at which a flow may stand; none is for ever.
    pub to: Option<f64>,
}

#[derive(Clone, Debug)]
pub struct Stream {
    pub name: String,
    pub side: Side,
    pub raw: Vec<f64>,
    /// +1 or -1.
    pub sign: f64,
    pub unit: f64,
    pub uplift: f64,
    pub residual: f64,
    pub tail: Option<Tail>,
}

#[derive(Clone, Debug)]
pub struct Choice {
    pub name: String,
    /// Years after the base (dates and offsets: the offsets themselves).
    pub years: Vec<f64>,
    pub timing: Timing,
    pub curve: Curve,
    pub streams: Vec<Stream>,
    pub budget: Vec<String>,
    pub effect: Option<Vec<f64>>,
}

/// A flow in the stream's own direction.
#[derive(Clone, Copy, Debug)]
pub struct Moment {
    pub t: f64,
    pub flow: f64,
    pub factor: f64,
}

pub struct Valued {
    pub undiscounted: f64,
    pub by_year: Vec<f64>,
    pub pv: f64,
    /// Year by year, the tail included.
    pub moments: Vec<Moment>,
}

pub struct Outcome {
    pub factors: Vec<f64>,
    pub rates: Vec<f64>,
    pub streams: Vec<Valued>,
    pub costs: f64,
    pub benefits: f64,
    pub pv_costs: f64,
    pub pv_benefits: f64,
    /// Sum of the absolute present values: what sums are compared with.
    pub gross: f64,
    pub service_years: u32,
    pub annuity: f64,
    pub spent: f64,
    pub effect: Option<(f64, f64)>,
    pub endless: bool,
}

/// +1 for what counts for, -1 for what counts against.
pub fn net_sign(side: Side) -> f64 {
    if matches!(side, Side::Benefit | Side::Flow) { 1.0 } else { -1.0 }
}

impl Choice {
    pub fn offset(&self, years: f64) -> f64 {
        years + self.timing.flows.unwrap_or(1.0) - self.timing.base
    }

    fn factor(&self, years: f64, length: f64) -> f64 {
        let t = self.offset(years);
        let at = self.curve.factor(t, length);
        match self.timing.flows {
            Some(_) => at,
            None => (at + self.curve.factor(t - 1.0, length)) / 2.0,
        }
    }

    pub fn length(&self) -> f64 {
        self.years.iter().map(|y| self.offset(*y)).fold(0.0, f64::max)
    }

    pub fn value(&self) -> Outcome {
        let length = self.length();
        let offsets: Vec<f64> = self.years.iter().map(|y| self.offset(*y)).collect();
        let factors: Vec<f64> = self.years.iter().map(|y| self.factor(*y, length)).collect();
        let rate = |t: f64| {
            let n = if self.curve.before_base() { t.ceil() } else { t.ceil().max(1.0) };
            self.curve.factor(n - 1.0, length) / self.curve.factor(n, length) - 1.0
        };
        let streams: Vec<Valued> = self.streams.iter().map(|s| self.stream(s, &factors)).collect();
        let sum = |wanted: &dyn Fn(Side) -> f64, pick: &dyn Fn(&Valued) -> f64| -> f64 {
            self.streams.iter().zip(&streams).map(|(s, v)| wanted(s.side) * pick(v)).sum()
        };
        let cost = |side: Side| if side == Side::Cost { 1.0 } else { 0.0 };
        let benefit = |side: Side| if side == Side::Cost { 0.0 } else { net_sign(side) };
        let service_years = length.ceil() as u32;
        let constrained = self.streams.iter().zip(&streams).filter(|(s, _)| self.budget.contains(&s.name));
        Outcome {
            rates: offsets.iter().map(|t| rate(*t)).collect(),
            costs: sum(&cost, &|v| v.undiscounted),
            benefits: sum(&benefit, &|v| v.undiscounted),
            pv_costs: sum(&cost, &|v| v.pv),
            pv_benefits: sum(&benefit, &|v| v.pv),
            gross: streams.iter().flat_map(|v| &v.moments).map(|m| (m.flow * m.factor).abs()).sum(),
            service_years,
            annuity: (1..=service_years).map(|n| self.curve.factor(f64::from(n), length)).sum(),
            spent: constrained.map(|(_, v)| v.pv).sum(),
            effect: self
                .effect
                .as_ref()
                .map(|e| (e.iter().sum(), e.iter().zip(&factors).map(|(x, d)| x * d).sum())),
            endless: self.streams.iter().any(|s| s.tail.as_ref().is_some_and(|tail| tail.to.is_none())),
            factors,
            streams,
        }
    }

    fn stream(&self, stream: &Stream, factors: &[f64]) -> Valued {
        let length = self.length();
        let mut flows: Vec<f64> =
            stream.raw.iter().map(|x| x * stream.sign * stream.unit * (1.0 + stream.uplift)).collect();
        let last_flow = *flows.last().unwrap();
        // A residual value lowers a cost and raises a benefit; no uplift.
        let worth = stream.residual * stream.unit;
        *flows.last_mut().unwrap() += if stream.side == Side::Cost { -worth } else { worth };
        let years = self.years.iter().zip(&flows).zip(factors);
        let mut moments: Vec<Moment> = years
            .map(|((y, flow), factor)| Moment { t: self.offset(*y), flow: *flow, factor: *factor })
            .collect();
        let by_year: Vec<f64> = moments.iter().map(|m| m.flow * m.factor).collect();
        if let Some(tail) = &stream.tail {
            let last = *self.years.last().unwrap();
            for k in 1.. {
                let ahead = f64::from(k) * tail.every;
                if tail.to.is_some_and(|to| last + ahead > to) {
                    break;
                }
                let flow = last_flow * (1.0 + tail.growth).powf(ahead);
                let factor = self.factor(last + ahead, length);
                moments.push(Moment { t: self.offset(last + ahead), flow, factor });
                if tail.to.is_none() && (flow * factor).abs() <= 1e-14 * last_flow.abs() {
                    break;
                }
            }
        }
        let pv = moments.iter().map(|m| m.flow * m.factor).sum();
        Valued { undiscounted: flows.iter().sum(), by_year, pv, moments }
    }

    /// Net flow of each year.
    pub fn net(&self, outcome: &Outcome) -> Vec<f64> {
        let year = |i: usize| {
            let each = self.streams.iter().zip(&outcome.streams);
            each.map(|(s, v)| net_sign(s.side) * v.moments[i].flow).sum()
        };
        (0..self.years.len()).map(year).collect()
    }

    /// Offset of the year, net flow, net present value; tails included.
    pub fn net_moments(&self, outcome: &Outcome) -> Vec<(f64, f64, f64)> {
        let each = self.streams.iter().zip(&outcome.streams);
        each.flat_map(|(s, v)| {
            let sign = net_sign(s.side);
            v.moments.iter().map(move |m| (m.t, sign * m.flow, sign * m.flow * m.factor))
        })
        .collect()
    }

    /// Where the flows of the year at offset `t` stand, with their shares.
    pub fn halves(&self, t: f64) -> Vec<(f64, f64)> {
        if self.timing.flows.is_none() { vec![(t - 1.0, 0.5), (t, 0.5)] } else { vec![(t, 1.0)] }
    }

    /// Mean time of the gross present value.
    pub fn mean_time(&self, outcome: &Outcome) -> f64 {
        let length = self.length();
        let (mut weighed, mut total) = (0.0, 0.0);
        for m in outcome.streams.iter().flat_map(|v| &v.moments) {
            for (t, share) in self.halves(m.t) {
                let value = (share * m.flow * self.curve.factor(t, length)).abs();
                weighed += value * t;
                total += value;
            }
        }
        weighed / total
    }

    /// Shares of gross present value to offset 30, to 100 and after.
    pub fn eras(&self, outcome: &Outcome) -> [f64; 3] {
        let mut held = [0.0; 3];
        for m in outcome.streams.iter().flat_map(|v| &v.moments) {
            let era = if m.t <= 30.0 {
                0
            } else if m.t <= 100.0 {
                1
            } else {
                2
            };
            held[era] += (m.flow * m.factor).abs();
        }
        held.map(|x| x / held.iter().sum::<f64>())
    }
}

/// Sum of flows (1+r)^-t.
pub fn npv_at(flows: &[(f64, f64)], rate: f64) -> f64 {
    flows.iter().map(|(t, x)| x * (1.0 + rate).powf(-t)).sum()
}

/// First and last crossing of the cumulated present value, linear within its year.
pub fn payback(moments: &[(f64, f64)]) -> (Option<f64>, Option<f64>) {
    let mut sorted = moments.to_vec();
    sorted.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut points: Vec<(f64, f64)> = Vec::new();
    let mut total = 0.0;
    for (t, x) in sorted {
        total += x;
        match points.last_mut() {
            Some(last) if (last.0 - t).abs() < 1e-7 => last.1 = total,
            _ => points.push((t, total)),
        }
    }
    if points.iter().all(|p| p.1 >= 0.0) {
        return (Some(points[0].0), Some(points[0].0));
    }
    let crossings: Vec<f64> = points
        .windows(2)
        .filter(|p| p[0].1 < 0.0 && p[1].1 >= 0.0)
        .map(|p| p[0].0 + (p[1].0 - p[0].0) * p[0].1 / (p[0].1 - p[1].1))
        .collect();
    let stays = points.last().unwrap().1 >= 0.0;
    (crossings.first().copied(), crossings.last().copied().filter(|_| stays))
}

/// Days from 1 January of year 1 of the proleptic Gregorian calendar.
pub fn days(year: i32, month: u32, day: u32) -> i64 {
    const BEFORE: [i64; 12] = [0, 31, 59, 90, 120, 151, 181, 212, 243, 273, 304, 334];
    let y = i64::from(year) - 1;
    let leap = (year % 4 == 0 && year % 100 != 0) || year % 400 == 0;
    let feb = i64::from(leap && month > 2);
    365 * y + y / 4 - y / 100 + y / 400 + BEFORE[month as usize - 1] + feb + i64::from(day) - 1
}

/// Whole anniversaries of the base date, and actual days over the length of the part-year, for a date after the base.
pub fn date_offset(base: (i32, u32, u32), date: (i32, u32, u32)) -> f64 {
    let at = |years: i32| days(base.0 + years, base.1, base.2);
    let date_day = days(date.0, date.1, date.2);
    let mut whole = date.0 - base.0;
    if at(whole) > date_day {
        whole -= 1;
    }
    f64::from(whole) + (date_day - at(whole)) as f64 / (at(whole + 1) - at(whole)) as f64
}
