//! Every reported number and every filled cell of some hundreds of random workbooks against a second model, which is
//! written from the specification and shares no arithmetic with hence; published worked examples through a workbook.

use std::collections::BTreeMap;
use std::io::Cursor;

use calamine::{Data, Reader, Xlsx};
use hence_core::Catalogue;
use hence_workbook::fill::fill;
use hence_workbook::outcome::Totals;
use hence_workbook::references::Cell;
use hence_workbook::report::OptionReport;
use hence_workbook::sheets::VERDICT_AGREES;

mod book;
mod curves;
mod drawn;
mod model;
pub mod published;
mod recalculated;
mod rules;

use book::{Book, Wanted, book};
use model::{Choice, Outcome, npv_at, payback};

/// A random workbook and how it is filled, for other tests.
pub fn random(seed: u64) -> (hence_workbook::package::Package, hence_workbook::fill::FillRequest) {
    let made = book(seed);
    (made.package(), made.request)
}

/// How many random workbooks are filled.
const BOOKS: u64 = 240;

/// The cells of a workbook by sheet and place.
pub fn cells(bytes: &[u8]) -> BTreeMap<(String, Cell), Data> {
    let mut book = Xlsx::new(Cursor::new(bytes.to_vec())).expect("the output opens");
    let mut values = BTreeMap::new();
    for name in book.sheet_names() {
        let range = book.worksheet_range(&name).expect("a sheet");
        let (r0, c0) = range.start().unwrap_or((0, 0));
        for (row, col, data) in range.used_cells() {
            let cell = Cell { row: r0 + row as u32, col: c0 + col as u32 };
            values.insert((name.clone(), cell), data.clone());
        }
    }
    values
}

/// 1e-9 of a size.
#[track_caller]
fn near(found: f64, expected: f64, size: f64, what: &str) {
    let allowed = 1e-9 * size.abs().max(expected.abs()).max(1e-12);
    assert!((found - expected).abs() <= allowed, "{what}: found {found}, expected {expected}");
}

/// What the second model expects of an option, over the baseline where there is one.
struct Expected {
    own: Outcome,
    pv_costs: f64,
    pv_benefits: f64,
    /// Size of the numbers that the sums are made of.
    gross: f64,
    /// Offset and net flow.
    flows: Vec<(f64, f64)>,
    /// Offset and net present value.
    values: Vec<(f64, f64)>,
    endless: bool,
    spent: f64,
    effect: Option<(f64, f64)>,
}

fn expected(book: &Book, c: usize) -> Expected {
    let choice = &book.choices[c];
    let own = choice.value();
    let moments = |choice: &Choice, outcome: &Outcome, sign: f64| {
        let all = choice.net_moments(outcome);
        let flows: Vec<(f64, f64)> = all
            .iter()
            .flat_map(|m| choice.halves(m.0).into_iter().map(move |(t, share)| (t, sign * share * m.1)))
            .collect();
        (flows, all.iter().map(|m| (m.0, sign * m.2)).collect::<Vec<_>>())
    };
    let (flows, values) = moments(choice, &own, 1.0);
    let mut expected = Expected {
        pv_costs: own.pv_costs,
        pv_benefits: own.pv_benefits,
        gross: own.gross,
        flows,
        values,
        endless: own.endless,
        spent: own.spent,
        effect: own.effect,
        own,
    };
    // The baseline's own increment is nothing.
    if let Some(baseline) = book.baseline {
        let other = &book.choices[baseline];
        let base = other.value();
        let (flows, values) = moments(other, &base, -1.0);
        expected.flows.extend(flows);
        expected.values.extend(values);
        expected.pv_costs -= base.pv_costs;
        expected.pv_benefits -= base.pv_benefits;
        expected.gross += base.gross;
        expected.endless |= base.endless;
        expected.spent -= base.spent;
        if let (Some(own), Some(base)) = (&mut expected.effect, base.effect) {
            *own = (own.0 - base.0, own.1 - base.1);
        }
    }
    expected
}

impl Expected {
    fn npv(&self) -> f64 {
        self.pv_benefits - self.pv_costs
    }

    /// The ratio, where it is not decided by rounding whether there is one.
    fn ratio(&self) -> Option<Option<f64>> {
        if self.pv_costs.abs() < 1e-6 * self.gross {
            return None;
        }
        Some((self.pv_costs > 0.0).then(|| self.pv_benefits / self.pv_costs))
    }

    fn annual(&self) -> Option<f64> {
        (self.own.service_years > 0).then(|| self.npv() / self.own.annuity)
    }
}

fn totals(found: &Totals, e: &Expected, words: &str) {
    near(found.pv_costs, e.pv_costs, e.gross, &format!("{words}: PV of costs"));
    near(found.pv_benefits, e.pv_benefits, e.gross, &format!("{words}: PV of benefits"));
    near(found.npv, e.npv(), e.gross, &format!("{words}: NPV"));
    match (found.annual, e.annual()) {
        (Some(found), Some(expected)) => {
            near(found, expected, e.gross / e.own.annuity, &format!("{words}: annual"))
        }
        (found, expected) => assert_eq!(found, expected, "{words}: annual equivalent"),
    }
    if let Some(expected) = e.ratio() {
        match (found.ratio, expected) {
            (Some(found), Some(expected)) => {
                near(
                    found,
                    expected,
                    e.gross / e.pv_costs * expected.abs().max(1.0),
                    &format!("{words}: ratio"),
                );
            }
            (found, expected) => assert_eq!(found, expected, "{words}: ratio"),
        }
    }
}

/// Every rate found is a root, and every change of sign on a grid was found.
fn rates_of_return(found: &[f64], e: &Expected, words: &str) {
    if e.endless {
        assert!(found.is_empty(), "{words}: rates of return of flows without end");
        return;
    }
    let gross = |rate: f64| npv_at(&e.flows.iter().map(|(t, x)| (*t, x.abs())).collect::<Vec<_>>(), rate);
    for &rate in found {
        let (npv, slope) = (npv_at(&e.flows, rate), gross(rate) * 1e-9);
        assert!(npv.abs() <= slope, "{words}: {rate} is no rate of return, NPV {npv}");
    }
    let mut seen = 0;
    let at = |k: usize| -0.5 + 1.5 * k as f64 / 600.0;
    for k in 0..600 {
        let (a, b) = (npv_at(&e.flows, at(k)), npv_at(&e.flows, at(k + 1)));
        if (a > 0.0) != (b > 0.0) && a.abs() > gross(at(k)) * 1e-9 && b.abs() > gross(at(k + 1)) * 1e-9 {
            seen += 1;
            assert!(
                found.iter().any(|r| (at(k)..=at(k + 1)).contains(r)),
                "{words}: no rate of return found from {} to {}, where NPV turns from {a} to {b}",
                at(k),
                at(k + 1)
            );
        }
    }
    assert!(found.len() >= seen && (found.len() - seen).is_multiple_of(2), "{words}: {found:?}, {seen} seen");
}

/// Crossings agree where they are not decided by rounding.
fn crossings(found: (Option<f64>, Option<f64>), e: &Expected, words: &str) -> bool {
    let expected = payback(&e.values);
    let close = |a: Option<f64>, b: Option<f64>| match (a, b) {
        (Some(a), Some(b)) => (a - b).abs() <= 1e-6 * a.abs().max(1.0),
        (a, b) => a == b,
    };
    // Where the total only just touches zero, rounding decides.
    let total: f64 = e.values.iter().map(|v| v.1).sum();
    if total.abs() < 1e-9 * e.gross {
        return false;
    }
    assert!(
        close(found.0, expected.0) && close(found.1, expected.1),
        "{words}: payback {found:?}, {expected:?}"
    );
    true
}

fn option(report: &OptionReport, e: &Expected, choice: &Choice, words: &str) {
    let a = &report.absolute;
    let own = &e.own;
    let size: f64 = own.streams.iter().flat_map(|v| &v.moments).map(|m| m.flow.abs()).sum();
    near(a.costs, own.costs, size, &format!("{words}: undiscounted costs"));
    near(a.benefits, own.benefits, size, &format!("{words}: undiscounted benefits"));
    near(a.pv_costs, own.pv_costs, own.gross, &format!("{words}: own PV of costs"));
    near(a.pv_benefits, own.pv_benefits, own.gross, &format!("{words}: own PV of benefits"));
    near(a.npv, own.pv_benefits - own.pv_costs, own.gross, &format!("{words}: own NPV"));
    assert_eq!(report.service_years, own.service_years, "{words}: service years");
    totals(report.totals(), e, words);
    rates_of_return(&report.irr, e, words);
    assert!(report.irr_unresolved.is_empty(), "{words}");
    assert_eq!(report.endless, e.endless, "{words}");
    crossings((report.payback.first, report.payback.last), e, words);
    match report.mean_time {
        Some(found) => near(found, choice.mean_time(own), 1.0, &format!("{words}: mean time")),
        None => assert!(own.endless, "{words}: no mean time"),
    }
    for (k, (found, expected)) in report.era_shares.iter().zip(choice.eras(own)).enumerate() {
        near(*found, expected, 1.0, &format!("{words}: share of era {k}"));
    }
    assert_eq!(report.era_shares.len(), 3);
    if e.spent.abs() > 1e-6 * e.gross {
        let expected = (!choice.budget.is_empty() && e.spent > 0.0).then(|| e.npv() / e.spent);
        match (report.npv_per_budget, expected) {
            (Some(found), Some(expected)) => {
                near(
                    found,
                    expected,
                    e.gross / e.spent * expected.abs().max(1.0),
                    &format!("{words}: per budget"),
                );
            }
            (found, expected) => assert_eq!(found, expected, "{words}: NPV per unit of budget"),
        }
    }
    let effects: Vec<(Option<f64>, Option<f64>)> = report.effects.iter().map(|(_, a, b)| (*a, *b)).collect();
    match (effects.as_slice(), e.effect) {
        ([], None) => {}
        ([found], Some((plain, discounted))) => {
            for (found, quantity) in [(found.0, plain), (found.1, discounted)] {
                if quantity.abs() > 1e-6 {
                    let expected = (quantity > 0.0).then(|| e.pv_costs / quantity);
                    match (found, expected) {
                        (Some(a), Some(b)) => {
                            near(a, b, e.gross / quantity * 1e3, &format!("{words}: per effect"))
                        }
                        (a, b) => assert_eq!(a, b, "{words}: per effect"),
                    }
                }
            }
        }
        (found, expected) => panic!("{words}: effects {found:?}, {expected:?}"),
    }
}

/// Compares the cells of one target; false where nothing could be compared.
fn target(found: &[Option<&Data>], wanted: &Wanted, e: &Expected, choice: &Choice, words: &str) {
    let number = |data: Option<&Data>| match data {
        Some(Data::Float(x)) => *x,
        Some(Data::Int(x)) => *x as f64,
        other => panic!("{words}: {wanted:?} holds {other:?}"),
    };
    let text = |data: Option<&Data>| matches!(data, Some(Data::String(_)));
    let words = format!("{words}: {wanted:?}");
    let own = &e.own;
    let size = |v: &model::Valued| v.moments.iter().map(|m| (m.flow * m.factor).abs()).sum::<f64>();
    let each = |expected: &[f64], size: f64| {
        assert_eq!(found.len(), expected.len());
        for (i, (data, expected)) in found.iter().zip(expected).enumerate() {
            near(number(*data), *expected, size, &format!("{words} {i}"));
        }
    };
    match wanted {
        Wanted::Factor => each(&own.factors, 0.0),
        Wanted::Rates => each(&own.rates, 1e-3),
        Wanted::NetByYear => {
            let net = choice.net(own);
            each(&net.iter().zip(&own.factors).map(|(x, d)| x * d).collect::<Vec<_>>(), own.gross);
        }
        Wanted::NetTotal => each(&[own.pv_benefits - own.pv_costs], own.gross),
        Wanted::ByYear(s) => each(&own.streams[*s].by_year, size(&own.streams[*s])),
        Wanted::Total(s) => each(&[own.streams[*s].pv], size(&own.streams[*s])),
        Wanted::Npv => each(&[e.npv()], e.gross),
        Wanted::Costs => each(&[e.pv_costs], e.gross),
        Wanted::Benefits => each(&[e.pv_benefits], e.gross),
        Wanted::Ratio => match e.ratio() {
            Some(Some(ratio)) => each(&[ratio], e.gross / e.pv_costs * ratio.abs().max(1.0)),
            Some(None) => assert!(text(found[0]), "{words}"),
            None => {}
        },
        Wanted::Annual => match e.annual() {
            Some(annual) => each(&[annual], e.gross / own.annuity),
            None => assert!(text(found[0]), "{words}"),
        },
        Wanted::Irr => match found[0] {
            Some(Data::Float(rate)) => rates_of_return(&[*rate], e, &words),
            data => assert!(text(data), "{words}"),
        },
        Wanted::Payback => match found[0] {
            Some(Data::Float(years)) => {
                crossings((Some(*years), Some(*years)), e, &words);
            }
            data => {
                let (first, last) = payback(&e.values);
                // Where all cancels, rounding decides here.
                let cancels = e.npv().abs() < 1e-9 * e.gross;
                assert!(cancels || text(data) && (first.is_none() || first != last), "{words}: {data:?}");
            }
        },
    }
}

/// Fills the workbooks of a quarter of the seeds, so that the quarters run side by side.
fn quarter(which: u64) {
    let catalogue = Catalogue::builtin();
    let mut compared = 0;
    for seed in (which..BOOKS).step_by(4) {
        let book = book(seed);
        let filled = fill(&book.package(), &book.request, &catalogue)
            .unwrap_or_else(|error| panic!("{}: {error}", book.words));
        let report = &filled.report;
        assert_eq!(report.verdict, VERDICT_AGREES, "{}", book.words);
        assert_eq!(report.options.len(), book.choices.len(), "{}", book.words);
        let values = cells(&filled.bytes);
        let expected: Vec<Expected> = (0..book.choices.len()).map(|c| expected(&book, c)).collect();
        for (c, choice) in book.choices.iter().enumerate() {
            let words = format!("{}: {}", book.words, choice.name);
            assert_eq!(report.options[c].baseline, book.baseline == Some(c), "{words}");
            option(&report.options[c], &expected[c], choice, &words);
        }
        for (c, wanted, sheet, at) in &book.targets {
            let found: Vec<Option<&Data>> =
                at.iter().map(|cell| values.get(&(sheet.clone(), *cell))).collect();
            let words = format!("{}: {}", book.words, book.choices[*c].name);
            target(&found, wanted, &expected[*c], &book.choices[*c], &words);
            compared += at.len();
        }
    }
    // Enough was compared for the test to mean something.
    assert!(compared > 8_000, "{compared}");
}

#[test]
fn random_workbooks_agree_with_a_second_model_first_quarter() {
    quarter(0);
}

#[test]
fn random_workbooks_agree_with_a_second_model_second_quarter() {
    quarter(1);
}

#[test]
fn random_workbooks_agree_with_a_second_model_third_quarter() {
    quarter(2);
}

#[test]
fn random_workbooks_agree_with_a_second_model_last_quarter() {
    quarter(3);
}
