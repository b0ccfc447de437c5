//! How a row of factors follows from its offsets: the number, and the formula that an analyst would write for it.

/// Rates of bands: up to which offset (none: for good), and the rate.
pub type Bands = Vec<(Option<f64>, f64)>;

#[derive(Clone, Debug)]
pub enum Rule {
    /// Each rate over the years of its own band.
    Forward(Bands),
    /// The same, continuously compounded.
    Continuous(Bands),
    /// The rate of a year's band over all years up to it.
    WholeHorizon(Bands),
    /// Gamma-distributed rates of a mean and a standard deviation.
    Gamma(f64, f64),
    /// Numbers that follow nothing.
    Numbers(Vec<f64>),
}

impl Rule {
    pub fn flat(rate: f64) -> Self {
        Rule::Forward(vec![(None, rate)])
    }

    /// The factor of the `i`-th year, at offset `t`.
    pub fn factor(&self, i: usize, t: f64) -> f64 {
        match self {
            Rule::Forward(bands) => spans(bands, t).map(|(rate, years)| (1.0 + rate).powf(-years)).product(),
            Rule::Continuous(bands) => spans(bands, t).map(|(rate, years)| (-rate * years).exp()).product(),
            Rule::WholeHorizon(bands) => {
                let band = bands.iter().find(|(to, _)| to.is_none_or(|to| t <= to));
                (1.0 + band.expect("the last band goes on for good").1).powf(-t)
            }
            Rule::Gamma(mean, sd) => (1.0 + t * sd * sd / mean).powf(-(mean * mean) / (sd * sd)),
            Rule::Numbers(numbers) => numbers[i],
        }
    }

    /// The formula over the cell that holds the offset; none for plain numbers.
    pub fn formula(&self, t: &str) -> Option<String> {
        Some(match self {
            Rule::Forward(bands) if bands.len() == 1 => format!("1/(1+{})^{t}", bands[0].1),
            Rule::Forward(bands) => {
                let parts: Vec<String> = clipped(bands, t)
                    .into_iter()
                    .map(|(rate, years)| format!("(1+{rate})^({years})"))
                    .collect();
                format!("1/({})", parts.join("*"))
            }
            Rule::Continuous(bands) if bands.len() == 1 => format!("EXP(-{}*{t})", bands[0].1),
            Rule::Continuous(bands) => {
                let parts: Vec<String> =
                    clipped(bands, t).into_iter().map(|(rate, years)| format!("{rate}*({years})")).collect();
                format!("EXP(-({}))", parts.join("+"))
            }
            Rule::WholeHorizon(bands) => {
                let last = bands[bands.len() - 1].1.to_string();
                let rate = bands[..bands.len() - 1].iter().rev().fold(last, |rest, (to, rate)| {
                    format!("IF({t}<={},{rate},{rest})", to.expect("an edge"))
                });
                format!("1/(1+{rate})^{t}")
            }
            Rule::Gamma(mean, sd) => format!("(1+{t}*{sd}^2/{mean})^(-({mean}^2)/{sd}^2)"),
            Rule::Numbers(_) => return None,
        })
    }
}

/// The years up to `t` that fall into each band; before the base the first band goes on.
fn spans(bands: &Bands, t: f64) -> impl Iterator<Item = (f64, f64)> + '_ {
    let mut from = f64::NEG_INFINITY;
    bands.iter().map(move |(to, rate)| {
        let end = t.min(to.unwrap_or(f64::INFINITY));
        let years = if from == f64::NEG_INFINITY { end } else { (end - from).max(0.0) };
        from = to.unwrap_or(f64::INFINITY);
        (*rate, years)
    })
}

/// The same as formulas.
fn clipped(bands: &Bands, t: &str) -> Vec<(f64, String)> {
    let mut from: Option<f64> = None;
    let mut all = Vec::new();
    for (to, rate) in bands {
        let end = to.map_or(t.to_owned(), |to| format!("MIN({t},{to})"));
        all.push((*rate, from.map_or(end.clone(), |from| format!("MAX(0,{end}-{from})"))));
        from = *to;
    }
    all
}
