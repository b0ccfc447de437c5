//! One mistake of each kind, planted at a random place of a right appraisal.

use hence_workbook::findings::Kind;
use hence_workbook::references::SheetRange;

use super::book::{Book, INFLATION, Page, Row, Slip, Total, Wanted};
use super::dice::{Dice, typed};
use super::rule::{Bands, Rule};

/// A workbook with one mistake in it.
pub struct Planted {
    pub book: Book,
    /// What was done, for whoever reads of a miss.
    pub what: String,
    /// A finding is right where its place meets one of these.
    pub areas: Vec<SheetRange>,
    /// What the mistake adds to the NPV of its option, where that can be told.
    pub effect: Option<f64>,
    /// Sum of the absolute present values of the option, for tolerances.
    pub gross: f64,
}

/// Plants a mistake of that kind; the same seed gives the same workbook.
pub fn plant(kind: Kind, seed: u64) -> Planted {
    let mut dice = Dice::new(seed.wrapping_mul(31).wrapping_add(kind as u64));
    let wanted = match kind {
        Kind::FlatForBands | Kind::BandEdge => Wanted::Banded,
        Kind::WholeHorizonForForward => Wanted::BandedFromBase,
        Kind::ContinuousForYearly | Kind::NominalOnReal | Kind::Differs => Wanted::Flat,
        _ => Wanted::Any,
    };
    let mut book = Book::draw(&mut dice, wanted);
    let at = dice.whole(0, book.pages.len() as i64 - 1) as usize;
    let right = book.pages[at].clone();
    let (down, base) = (book.down, book.base);
    let page = &mut book.pages[at];
    let (what, mut areas) = match kind {
        Kind::HardCoded => hard_coded(&mut dice, page, down, base),
        Kind::ShortTotal | Kind::DoubleCount => total(&mut dice, page, down, kind),
        Kind::NegativeCost => negative_cost(&mut dice, page, down),
        Kind::UnitMismatch => units(&mut dice, page, down),
        Kind::YearsBroken => years(&mut dice, page, down),
        Kind::Differs => differs(&mut dice, page, down, base),
        _ => (factors(&mut dice, page, kind, &mut book.inflation), Vec::new()),
    };
    if areas.is_empty() {
        areas = everywhere(page, down);
    }
    let (npv, was) = (page.npv(base), right.npv(base));
    let effect = (kind != Kind::YearsBroken).then_some(npv - was);
    let gross = right.gross(base);
    Planted { what: format!("{} ({}): {what}", book.basis, book.timing), book, areas, effect, gross }
}

/// All that rests on a row of factors.
fn everywhere(page: &Page, down: bool) -> Vec<SheetRange> {
    let mut areas = vec![page.at_factors(down)];
    for (i, _) in page.streams.iter().enumerate() {
        areas.extend([page.at_pv(down, i), page.at_total(down, Total::Stream(i))]);
    }
    areas.extend([Total::Costs, Total::Benefits, Total::Npv].map(|total| page.at_total(down, total)));
    areas
}

fn bands(page: &Page) -> Bands {
    match &page.rule {
        Rule::Forward(bands) => bands.clone(),
        other => panic!("{other:?} has no bands"),
    }
}

fn factors(dice: &mut Dice, page: &mut Page, kind: Kind, inflation: &mut Option<f64>) -> String {
    let n = page.years.len();
    match kind {
        Kind::FlatForBands => {
            let rate = bands(page)[0].1;
            page.rule = Rule::flat(rate);
            format!("flat {rate}")
        }
        Kind::OffByPeriod => {
            let by = dice.one_of(&[1.0, -1.0, 0.5, -0.5]);
            page.shifts.iter_mut().for_each(|shift| *shift += by);
            format!("{by} years late")
        }
        Kind::MixedTiming => {
            let (from, by) = (dice.whole(3, n as i64 - 4) as usize, dice.one_of(&[0.5, -0.5]));
            page.shifts.iter_mut().skip(from).for_each(|shift| *shift += by);
            format!("{by} years late from year {from} on")
        }
        Kind::ContinuousForYearly => {
            page.rule = Rule::Continuous(bands(page));
            "continuous".into()
        }
        Kind::BandEdge => {
            let mut moved = bands(page);
            let room = moved[1].0.map_or(f64::INFINITY, |next| next - moved[0].0.expect("an edge"));
            let by = loop {
                let by = dice.whole(1, 5) as f64 * dice.one_of(&[1.0, -1.0]);
                if by < room {
                    break by;
                }
            };
            moved[0].0 = moved[0].0.map(|edge| edge + by);
            page.rule = Rule::Forward(moved);
            format!("the first edge {by} years late")
        }
        Kind::WholeHorizonForForward => {
            page.rule = Rule::WholeHorizon(bands(page));
            "the rate of a year over all years up to it".into()
        }
        Kind::RoundedFactors => {
            let places = dice.one_of(&[3, 4]);
            page.places = Some(places);
            format!("{places} decimals")
        }
        Kind::NominalOnReal => {
            let rate = inflation.unwrap_or_else(|| dice.one_of(&INFLATION));
            if dice.chance(0.5) {
                *inflation = Some(rate);
            }
            let nominal =
                bands(page).into_iter().map(|(to, r)| (to, typed((1.0 + r) * (1.0 + rate) - 1.0, 12)));
            page.rule = Rule::Forward(nominal.collect());
            format!("inflation {rate} in the rate")
        }
        Kind::NoKnownRate => {
            let mut factor = 1.0;
            let numbers = (0..n).map(|_| {
                let now = factor;
                factor /= 1.0 + dice.between(0.002, 0.09);
                typed(now, 6)
            });
            page.rule = Rule::Numbers(numbers.collect());
            "numbers that fall by chance".into()
        }
        other => panic!("{other:?} is no mistake in factors"),
    }
}

fn hard_coded(dice: &mut Dice, page: &mut Page, down: bool, base: i32) -> (String, Vec<SheetRange>) {
    page.pasted = false;
    page.rows = true;
    let year = dice.whole(5, page.years.len() as i64 - 2) as usize;
    let row = if dice.chance(0.4) { Row::Factor } else { Row::Pv(dice.whole(1, 2) as usize) };
    let factor = page.rule.factor(year, page.offset(base, year));
    let was = match row {
        Row::Factor => factor,
        Row::Pv(s) => page.streams[s].flows[year] * factor,
    };
    let now = was * dice.one_of(&[1.0, 0.9, 0.83, 1.12, 1.3]);
    page.overwritten = Some((row, year, now));
    (format!("{now} for {was} in {row:?}, year {year}"), vec![page.at_one(down, row, year)])
}

fn total(dice: &mut Dice, page: &mut Page, down: bool, kind: Kind) -> (String, Vec<SheetRange>) {
    let (at, slip) = if kind == Kind::ShortTotal {
        let stream = dice.whole(1, page.streams.len() as i64 - 1) as usize;
        (Total::Stream(stream), Slip::Without(dice.whole(1, 8) as usize))
    } else {
        let cost = dice.chance(0.5);
        let side = page.side(cost);
        (if cost { Total::Costs } else { Total::Benefits }, Slip::Twice(dice.one_of(&side)))
    };
    page.slip = Some((at, slip));
    let mut areas = vec![page.at_total(down, at)];
    if !page.rows {
        // A page without rows of present values adds its streams up in the totals of their sides.
        areas.extend([Total::Costs, Total::Benefits].map(|total| page.at_total(down, total)));
    }
    areas.push(page.at_total(down, Total::Npv));
    (format!("{at:?}: {slip:?}"), areas)
}

fn negative_cost(dice: &mut Dice, page: &mut Page, down: bool) -> (String, Vec<SheetRange>) {
    let stream = dice.whole(0, 1) as usize;
    let flows = &mut page.streams[stream].flows;
    let what = if dice.chance(0.75) {
        flows.iter_mut().for_each(|flow| *flow = if *flow == 0.0 { 0.0 } else { -*flow });
        "all of it".to_owned()
    } else {
        let some: Vec<usize> = (0..flows.len()).filter(|i| flows[*i] != 0.0).collect();
        let year = dice.one_of(&some);
        flows[year] = -flows[year];
        format!("year {year}")
    };
    (format!("stream {stream} negative, {what}"), vec![page.at_stream(down, stream)])
}

fn units(dice: &mut Dice, page: &mut Page, down: bool) -> (String, Vec<SheetRange>) {
    let stream = dice.whole(1, 2) as usize;
    match dice.whole(0, 2) {
        0 => {
            page.streams[stream].unit = "EUR thousand";
            page.streams[stream].flows.iter_mut().for_each(|flow| *flow = typed(*flow * 1000.0, 0));
            (format!("stream {stream} in thousands"), vec![page.at_stream(down, stream)])
        }
        1 => {
            let total = dice.one_of(&[Total::Costs, Total::Benefits, Total::Npv]);
            page.slip = Some((total, Slip::Thousandth));
            (
                format!("{total:?} in thousandths"),
                vec![page.at_total(down, total), page.at_total(down, Total::Npv)],
            )
        }
        _ => {
            let flows = &mut page.streams[stream].flows;
            let year = dice.whole(6, flows.len() as i64 - 2) as usize;
            flows[year] = typed(flows[year] * 1000.0, 0);
            (format!("stream {stream}, year {year} in thousands"), vec![page.at_stream(down, stream)])
        }
    }
}

fn years(dice: &mut Dice, page: &mut Page, down: bool) -> (String, Vec<SheetRange>) {
    let at = dice.whole(2, page.years.len() as i64 - 2) as usize;
    let what = match dice.whole(0, 2) {
        0 => {
            page.labels.iter_mut().skip(at).for_each(|year| *year += 1);
            "one missing"
        }
        1 => {
            page.labels.iter_mut().skip(at).for_each(|year| *year -= 1);
            "one repeated"
        }
        _ => {
            page.year_as_text = Some(at);
            "one as text"
        }
    };
    (format!("{what} at {at}"), vec![page.at_years(down)])
}

fn differs(dice: &mut Dice, page: &mut Page, down: bool, base: i32) -> (String, Vec<SheetRange>) {
    if dice.chance(0.5) {
        let npv = typed(page.npv(base) * dice.between(1.05, 1.4) + 0.37, 2);
        page.slip = Some((Total::Npv, Slip::Typed(npv)));
        return (format!("{npv} typed for the NPV"), vec![page.at_total(down, Total::Npv)]);
    }
    let rate = typed(bands(page)[0].1 - dice.one_of(&[0.0025, 0.005, 0.0075]), 4);
    page.rule = Rule::flat(rate);
    (format!("flat {rate}"), Vec::new())
}
