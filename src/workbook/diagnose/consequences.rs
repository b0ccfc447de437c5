//! What follows from the numbers that a workbook itself holds: a total of wrong present values is no mistake of its own.

use hence_core::{dot, sum};

use super::factors::Series;
use super::{Compared, Seen, Standing};
use crate::appraisal::{Held, TargetRole};
use crate::formulas::find;
use crate::tolerance::RELATIVE;
use crate::valuation::side;

/// The numbers that a workbook holds, where it holds any, else those of its basis.
pub struct Consequences<'s, 'a> {
    seen: &'s Seen<'a>,
    /// By option and stream.
    factors: Vec<Vec<Vec<f64>>>,
    /// The factors that yearly rates make, with the options that have these rates.
    made: Vec<Series>,
}

/// Where the present value of a stream is taken from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum From {
    /// Flows times the factors held.
    Factors,
    /// The present values by year held.
    Years,
    /// The totals of streams held.
    Totals,
}

const SOURCES: [From; 3] = [From::Factors, From::Years, From::Totals];

impl<'s, 'a> Consequences<'s, 'a> {
    /// Of a workbook that uses the factors of these rows, a later one before an earlier.
    pub fn of(seen: &'s Seen<'a>, rows: &[Series]) -> Self {
        let of_stream = |c: usize, s: usize| {
            let outcome = &seen.outcomes[c];
            let own = outcome.streams[s].own.is_some();
            let mut factors = outcome.factors_of(s).to_vec();
            for row in rows {
                let takes = |&(choice, stream): &(usize, Option<usize>)| {
                    choice == c && stream.map_or(!own, |stream| stream == s)
                };
                if row.users.iter().any(takes) {
                    row.points.iter().for_each(|p| factors[p.index] = p.found);
                }
            }
            factors
        };
        let of_choice = |c: usize| (0..seen.outcomes[c].streams.len()).map(|s| of_stream(c, s)).collect();
        let made = rows.iter().filter(|row| row.is_made_of_rates()).cloned().collect();
        Consequences { seen, factors: (0..seen.outcomes.len()).map(of_choice).collect(), made }
    }

    /// The totals of present values that an option shows.
    pub fn totals(&self, choice: usize) -> impl Iterator<Item = &'s Compared> {
        let seen = self.seen;
        seen.compared.iter().filter(move |cell| {
            let role = &seen.target(cell).role;
            let total = matches!(role, TargetRole::PvTotal(_) | TargetRole::PvCosts | TargetRole::PvBenefits);
            cell.choice == choice && (total || *role == TargetRole::Npv) && seen.held(cell).number().is_some()
        })
    }

    /// The largest distance of the totals of present values that an option shows, one at least, from what follows from the
    /// factors; none where one does not follow: with all digits, or as it is shown.
    pub fn gives(&self, choice: usize, exactly: bool) -> Option<f64> {
        let mut farthest = None;
        for cell in self.totals(choice) {
            let (away, value) = self.nearest(cell)?;
            let tolerance = if exactly { 0.0 } else { cell.tolerance };
            if away > tolerance.max(RELATIVE * value.abs()) {
                return None;
            }
            farthest = Some(away.max(farthest.unwrap_or(0.0)));
        }
        farthest
    }

    /// Whether a cell that differs holds what follows from other cells of the workbook.
    pub fn follows(&self, cell: &Compared) -> bool {
        self.holds(cell, cell.tolerance)
    }

    /// The same with all digits.
    pub fn gives_exactly(&self, cell: &Compared) -> bool {
        self.holds(cell, 0.0)
    }

    fn holds(&self, cell: &Compared, tolerance: f64) -> bool {
        self.nearest(cell).is_some_and(|(away, value)| away <= tolerance.max(RELATIVE * value.abs()))
    }

    /// The value nearest to what a cell holds of those that it may have from others, and the distance.
    fn nearest(&self, cell: &Compared) -> Option<(f64, f64)> {
        let found = self.seen.held(cell).number()?;
        let values = self.values(cell.choice, &self.seen.target(cell).role, cell.index);
        let away = values.into_iter().map(|value| ((found - value).abs(), value));
        away.min_by(|a, b| a.0.total_cmp(&b.0))
    }

    /// Whether anything before the totals of an option differs.
    pub fn differs_before(&self, choice: usize) -> bool {
        self.seen.compared.iter().any(|cell| {
            cell.choice == choice
                && cell.standing == Standing::Differs
                && !matches!(
                    self.seen.target(cell).role,
                    TargetRole::Annual | TargetRole::Irr | TargetRole::Payback
                )
        })
    }

    /// Every value that a cell may have from others.
    fn values(&self, c: usize, role: &TargetRole, i: usize) -> Vec<f64> {
        let outcome = &self.seen.outcomes[c];
        let choice = &self.seen.appraisal.choices[c];
        match role {
            TargetRole::PvByYear(Some(name)) => find(choice, name)
                .map(|s| outcome.streams[s].flows[i] * self.factors[c][s][i])
                .into_iter()
                .collect(),
            TargetRole::PvByYear(None) => {
                [From::Factors, From::Years].map(|from| self.net(c, |s| self.by_year(c, s, from)[i])).to_vec()
            }
            TargetRole::PvTotal(Some(name)) => match find(choice, name) {
                Some(s) => [From::Factors, From::Years].map(|from| self.pv(c, s, from)).to_vec(),
                None => Vec::new(),
            },
            TargetRole::PvTotal(None) => {
                let sums = SOURCES.map(|from| self.net(c, |s| self.pv(c, s, from)));
                sums.into_iter().chain(self.net_row(c)).collect()
            }
            TargetRole::PvCosts => SOURCES.map(|from| self.sides(c, from).1).to_vec(),
            TargetRole::PvBenefits => SOURCES.map(|from| self.sides(c, from).0).to_vec(),
            TargetRole::Npv => self.npvs(c),
            TargetRole::Ratio => {
                let own = SOURCES.map(|from| self.sides(c, from));
                own.into_iter().chain(self.held_totals(c)).map(|(benefits, costs)| benefits / costs).collect()
            }
            TargetRole::Annual => {
                let held = self.one(c, &TargetRole::Npv);
                let npvs: Vec<f64> = self.npvs(c).into_iter().chain(held).collect();
                let annuities = [outcome.annuity, self.annuity(c)];
                npvs.iter().flat_map(|npv| annuities.map(|annuity| npv / annuity)).collect()
            }
            TargetRole::Factor => {
                let rows = self.made.iter().filter(|row| row.users.iter().any(|user| user.0 == c));
                rows.filter_map(|row| row.points.get(i)).map(|p| p.found).collect()
            }
            TargetRole::StreamFactor(_) | TargetRole::Rates | TargetRole::Irr | TargetRole::Payback => {
                Vec::new()
            }
        }
    }

    fn npvs(&self, c: usize) -> Vec<f64> {
        let own = SOURCES.map(|from| self.sides(c, from));
        let all = own.into_iter().chain(self.held_totals(c)).map(|(benefits, costs)| benefits - costs);
        let net = |c: usize| self.one(c, &TargetRole::PvTotal(None)).or_else(|| self.net_row(c));
        let base = self.seen.appraisal.baseline;
        let over = net(c).map(|npv| npv - base.and_then(net).unwrap_or(0.0));
        all.chain(self.net_row(c).filter(|_| base.is_none())).chain(over).collect()
    }

    /// PV of benefits and of costs, over the baseline where there is one.
    fn sides(&self, c: usize, from: From) -> (f64, f64) {
        let absolute = |c: usize| {
            let part = |pick: fn((f64, f64)) -> f64| {
                let streams = self.seen.appraisal.choices[c].streams.iter().enumerate();
                sum(&streams
                    .map(|(s, stream)| pick(side(stream.kind)) * self.pv(c, s, from))
                    .collect::<Vec<_>>())
            };
            (part(|side| side.0), part(|side| side.1))
        };
        let (benefits, costs) = absolute(c);
        let (less_benefits, less_costs) = self.seen.appraisal.baseline.map_or((0.0, 0.0), absolute);
        (benefits - less_benefits, costs - less_costs)
    }

    /// PV of benefits and of costs as the workbook's cells say.
    fn held_totals(&self, c: usize) -> Option<(f64, f64)> {
        Some((self.one(c, &TargetRole::PvBenefits)?, self.one(c, &TargetRole::PvCosts)?))
    }

    fn pv(&self, c: usize, s: usize, from: From) -> f64 {
        let stream = &self.seen.outcomes[c].streams[s];
        let name = &self.seen.appraisal.choices[c].streams[s].name;
        let total = || self.one_of(c, |role| matches!(role, TargetRole::PvTotal(Some(n)) if same(n, name)));
        match from {
            From::Totals => total().unwrap_or_else(|| self.pv(c, s, From::Years)),
            From::Years => sum(&self.by_year(c, s, from)) + stream.pv_tail,
            From::Factors => dot(&stream.flows, &self.factors[c][s]) + stream.pv_tail,
        }
    }

    fn by_year(&self, c: usize, s: usize, from: From) -> Vec<f64> {
        let flows = &self.seen.outcomes[c].streams[s].flows;
        let mut values: Vec<f64> = flows.iter().zip(&self.factors[c][s]).map(|(x, d)| x * d).collect();
        let choice = &self.seen.appraisal.choices[c];
        let row = choice.targets.iter().find(|target| {
            matches!(&target.role, TargetRole::PvByYear(Some(n)) if same(n, &choice.streams[s].name))
        });
        if let (From::Years, Some(row)) = (from, row) {
            for (value, held) in values.iter_mut().zip(&row.held) {
                *value = held.number().unwrap_or(*value);
            }
        }
        values
    }

    fn net(&self, c: usize, of: impl Fn(usize) -> f64) -> f64 {
        let streams = self.seen.appraisal.choices[c].streams.iter().enumerate();
        let signed = streams.map(|(s, stream)| {
            let (above, below) = side(stream.kind);
            (above - below) * of(s)
        });
        sum(&signed.collect::<Vec<_>>())
    }

    /// The sum of the row of net present values, where it is whole.
    fn net_row(&self, c: usize) -> Option<f64> {
        let targets = &self.seen.appraisal.choices[c].targets;
        let row = targets.iter().find(|target| target.role == TargetRole::PvByYear(None))?;
        let held: Option<Vec<f64>> = row.held.iter().map(Held::number).collect();
        let tails = self.net(c, |s| self.seen.outcomes[c].streams[s].pv_tail);
        Some(sum(&held?) + tails)
    }

    /// The sum of the held factors of the service years, where the row has one for each.
    fn annuity(&self, c: usize) -> f64 {
        let outcome = &self.seen.outcomes[c];
        let Some(factors) = self.factors[c].iter().zip(&outcome.streams).find(|(_, s)| s.own.is_none())
        else {
            return outcome.annuity;
        };
        let service = |t: f64| t >= 1.0 && t <= f64::from(outcome.service_years) && t.fract() == 0.0;
        let years = outcome.offsets.iter().zip(factors.0).filter(|(t, _)| service(**t));
        let years: Vec<f64> = years.map(|(_, factor)| *factor).collect();
        if years.len() == outcome.service_years as usize { sum(&years) } else { outcome.annuity }
    }

    fn one(&self, c: usize, role: &TargetRole) -> Option<f64> {
        self.one_of(c, |other| other == role)
    }

    fn one_of(&self, c: usize, wanted: impl Fn(&TargetRole) -> bool) -> Option<f64> {
        let targets = &self.seen.appraisal.choices[c].targets;
        let target = targets.iter().find(|target| target.held.len() == 1 && wanted(&target.role))?;
        target.held[0].number()
    }
}

fn same(a: &str, b: &str) -> bool {
    a.to_lowercase() == b.to_lowercase()
}
