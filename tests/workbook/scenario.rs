//! A small appraisal made by hand: two or three options, with every kind of stream and target.
//!
//! Figures are made up for the test. Outcomes are worked out here from the curve's factors alone.

use chrono::NaiveDate;
use hence_core::{Basis, Catalogue, Payback, Perpetual, Position, Tail, Timing, Where, internal_rates};
use hence_workbook::appraisal::*;
use hence_workbook::dated::Flows;
use hence_workbook::outcome::*;
use hence_workbook::references::{Cell, Range, SheetRange};

pub fn cell(sheet: &str, row: u32, col: u32) -> SheetRange {
    SheetRange { sheet: sheet.into(), range: Range { first: Cell { row, col }, last: Cell { row, col } } }
}

/// Cells from (row, col) along a direction.
pub fn run(sheet: &str, row: u32, col: u32, direction: Direction, n: usize) -> SheetRange {
    let n = n as u32 - 1;
    let last = match direction {
        Direction::Across => Cell { row, col: col + n },
        Direction::Down => Cell { row: row + n, col },
    };
    SheetRange { sheet: sheet.into(), range: Range { first: Cell { row, col }, last } }
}

fn given<T>(value: T, at: Option<SheetRange>) -> Given<T> {
    Given { value, at, from: "test".into() }
}

/// What the years are.
#[derive(Clone, Copy, PartialEq)]
pub enum Labels {
    Years,
    Numbers,
    Financial,
    Dates,
    Offsets,
}

pub struct Case {
    pub basis: &'static str,
    pub timing: Timing,
    pub labels: Labels,
    pub direction: Direction,
    pub years: usize,
    /// A factor range on the sheet.
    pub factors: bool,
}

/// A line of cells: streams stand in lines 9, 10, ... from the axis in line 3.
fn line(case: &Case, sheet: &str, k: u32) -> SheetRange {
    match case.direction {
        Direction::Across => run(sheet, k, 2, case.direction, case.years),
        Direction::Down => run(sheet, 2, k, case.direction, case.years),
    }
}

fn labels(case: &Case) -> Vec<Label> {
    (0..case.years as i32)
        .map(|i| match case.labels {
            Labels::Years => Label::Year(2026 + i),
            Labels::Numbers => Label::Number(i),
            Labels::Financial => Label::Financial(2026 + i, format!("{}/{:02}", 2026 + i, (27 + i) % 100)),
            Labels::Dates => Label::Date(NaiveDate::from_ymd_opt(2026 + i, 9, 15).unwrap()),
            Labels::Offsets => Label::Offset(f64::from(i) * 1.5),
        })
        .collect()
}

fn stream(
    case: &Case,
    sheet: &str,
    k: u32,
    name: &str,
    kind: StreamKind,
    flow: impl Fn(usize) -> f64,
) -> Stream {
    Stream {
        name: name.into(),
        kind,
        from: "test".into(),
        at: line(case, sheet, k).into(),
        raw: (0..case.years).map(flow).collect(),
        sign: 1.0,
        unit: 1.0,
        uplift: given(0.0, None),
        residual: None,
        tail: None,
        growth: None,
        basis: None,
        income: None,
    }
}

fn target(role: TargetRole, at: SheetRange) -> Target {
    let n =
        ((at.range.last.row - at.range.first.row) + (at.range.last.col - at.range.first.col) + 1) as usize;
    Target { role, from: "test".into(), at: at.into(), held: vec![Held::Blank; n], formats: vec![None; n] }
}

/// An option on a sheet of its own: years in line 3, factors in line 4, streams from line 9 (from 0).
fn option(case: &Case, sheet: &str, axis: usize, strong: f64, full: bool) -> Choice {
    let s = sheet;
    let mut works =
        stream(case, s, 9, "works", StreamKind::Cost, |i| if i < 3 { -40.0 * strong } else { -1.5 });
    works.sign = -1.0;
    works.unit = 1_000.0;
    works.uplift = given(0.2, Some(cell(s, 0, 5)));
    works.residual = Some(given(12.0, Some(cell(s, 0, 6))));
    let saved = move |i: usize| if i < 2 { 0.0 } else { 9_000.0 * strong + 10.0 * i as f64 };
    let water = stream(case, s, 10, "water", StreamKind::Benefit, saved);
    let mut flood = stream(case, s, 11, "flood", StreamKind::Damage, |i| 5_000.0 / strong + i as f64);
    if full && case.basis == "3.5%" && case.years > 20 {
        flood.tail = Some(given(Tail::parse("for ever").unwrap(), None));
    }
    let mut choice = Choice {
        name: sheet.into(),
        base: match case.labels {
            Labels::Years => given(Base::Year(2026), Some(cell(s, 0, 1))),
            Labels::Financial => given(Base::Financial(2026), Some(cell(s, 0, 1))),
            Labels::Dates => {
                given(Base::Date(NaiveDate::from_ymd_opt(2026, 4, 1).unwrap()), Some(cell(s, 0, 1)))
            }
            Labels::Numbers | Labels::Offsets => given(Base::Zero, None),
        },
        basis: given(case.basis.into(), None),
        timing: None,
        prices: Prices::default(),
        welfare: Welfare::default(),
        axis,
        streams: vec![works, water, flood],
        effects: Vec::new(),
        budget: Vec::new(),
        targets: Vec::new(),
    };
    if case.factors && full {
        choice.targets.push(target(TargetRole::Factor, line(case, s, 4)));
    }
    choice.targets.push(target(TargetRole::PvByYear(Some("works".into())), line(case, s, 5)));
    choice.targets.push(target(TargetRole::PvByYear(None), line(case, s, 6)));
    choice.targets.push(target(TargetRole::Rates, line(case, s, 7)));
    for (k, role) in [
        TargetRole::Npv,
        TargetRole::PvCosts,
        TargetRole::PvBenefits,
        TargetRole::Ratio,
        TargetRole::Annual,
        TargetRole::Irr,
        TargetRole::Payback,
        TargetRole::PvTotal(None),
        TargetRole::PvTotal(Some("works".into())),
    ]
    .into_iter()
    .enumerate()
    {
        choice.targets.push(target(role, cell(s, 1, 2 + k as u32)));
    }
    choice
}

pub fn appraisal(case: &Case) -> Appraisal {
    let names = ["Do nothing", "It's a liner"];
    let axis = |s: &str| Axis {
        at: line(case, s, 3).into(),
        direction: case.direction,
        labels: labels(case),
        spans: None,
    };
    let choices: Vec<Choice> =
        vec![option(case, names[0], 0, 1.0, false), option(case, names[1], 1, 2.5, true)];
    let coverage = choices
        .iter()
        .flat_map(|c| &c.streams)
        .map(|s| Covered {
            follows: false,
            at: s.at.clone(),
            heading: s.name.clone(),
            roles: vec![s.name.clone()],
            total: s.raw.iter().sum(),
        })
        .collect();
    Appraisal {
        decide: Default::default(),
        settings: Vec::new(),
        axes: names.iter().map(|s| axis(s)).collect(),
        choices,
        baseline: Some(0),
        coverage,
        problems: Vec::new(),
        date1904: false,
    }
}

fn position(p: Position) -> f64 {
    match p {
        Position::Start => 0.0,
        Position::Middle => 0.5,
        Position::End | Position::Averaged => 1.0,
    }
}

fn offset(case: &Case, label: &Label) -> f64 {
    let shift = position(case.timing.flows) - position(case.timing.base);
    match label {
        Label::Year(y) | Label::Financial(y, _) => f64::from(y - 2026) + shift,
        Label::Number(n) => f64::from(*n) + shift,
        Label::Offset(t) => *t,
        // 15 September is 167 days after 1 April; the year after it has 365 or 366 days.
        Label::Date(d) => {
            let year = chrono::Datelike::year(d);
            let leap = chrono::NaiveDate::from_ymd_opt(year + 1, 2, 29).is_some();
            f64::from(year - 2026) + 167.0 / if leap { 366.0 } else { 365.0 }
        }
    }
}

/// The built-in schedules, and two of growth that no rate line can state.
pub fn catalogue() -> Catalogue {
    let file = |id: &str, curve: &str| {
        let text = format!(
            "id = \"{id}\"\ntitle = \"Growth made up for a test\"\nbody = \"Ostrey Rivers Board\"\nyear = 2026\n\
             place = \"rule 5\"\naddress = \"\"\nstatus = \"current\"\ncomplete = true\nchecked = \"invented\"\n{curve}"
        );
        (format!("{id}.toml"), text)
    };
    let states = "[regimes]\npreference = 0.01\nhazard = 0.002\nelasticity = 1.5\nstart = [0.7, 0.2, 0.1]\n\
                  states = [{ mean = 0.03, sd = 0.02 }, { mean = -0.01, sd = 0.03 }, { mean = 0.05, sd = 0 }]\n\
                  transition = [[0.9, 0.05, 0.05], [0.3, 0.6, 0.1], [0.25, 0.25, 0.5]]\n";
    let low = "[persistent_growth]\npreference = 0.005\nelasticity = 2\nmean = 0.02\nsd = 0.015\n\
               persistence = 0.6\nstart = -0.04\n";
    Catalogue::builtin().with(&[file("ostrey-states", states), file("ostrey-low", low)]).expect("schedules")
}

pub fn outcomes(case: &Case, appraisal: &Appraisal) -> Vec<ChoiceOutcome> {
    let basis = Basis::parse(case.basis, &catalogue()).unwrap();
    let mut all: Vec<ChoiceOutcome> =
        appraisal.choices.iter().map(|c| outcome(case, appraisal, c, &basis)).collect();
    let base = all[0].absolute;
    for o in &mut all {
        let (a, n) = (o.absolute, o.annuity);
        let npv = a.npv - base.npv;
        let pv_costs = a.pv_costs - base.pv_costs;
        let pv_benefits = a.pv_benefits - base.pv_benefits;
        o.increment = Some(Totals {
            benefits: a.benefits - base.benefits,
            costs: a.costs - base.costs,
            pv_benefits,
            pv_costs,
            npv,
            ratio: (pv_costs > 0.0).then(|| pv_benefits / pv_costs),
            annual: Some(npv / n),
        });
    }
    // Rates of return of the increment over the baseline.
    let flows: Vec<f64> = all[1].net.iter().zip(&all[0].net).map(|(a, b)| a - b).collect();
    let averaged =
        case.timing.flows == Position::Averaged && !matches!(case.labels, Labels::Dates | Labels::Offsets);
    let ends: &[f64] = if averaged { &[0.0, 1.0] } else { &[0.0] };
    let pairs = all[1].offsets.iter().zip(&flows);
    let halves = pairs.flat_map(|(t, x)| ends.iter().map(move |end| (t - end, x / ends.len() as f64)));
    let (offsets, flows): (Vec<f64>, Vec<f64>) = halves.unzip();
    all[1].irr = internal_rates(&offsets, &flows, (-0.5, 1.0)).unwrap().rates;
    assert_eq!(all[1].irr.len(), 1);
    all
}

fn outcome(case: &Case, appraisal: &Appraisal, choice: &Choice, basis: &Basis) -> ChoiceOutcome {
    let labels = &appraisal.axes[choice.axis].labels;
    let offsets: Vec<f64> = labels.iter().map(|l| offset(case, l)).collect();
    let length = offsets.iter().copied().fold(0.0, f64::max);
    let dated = matches!(case.labels, Labels::Dates | Labels::Offsets);
    let base_year = (case.labels != Labels::Numbers && case.labels != Labels::Offsets).then_some(2026);
    let curve = basis.curve(&Where { base_year, length: Some(length) }).unwrap();
    let averaged = case.timing.flows == Position::Averaged && !dated;
    let factor = |t: f64| {
        let at = curve.factor(t).unwrap();
        if averaged { (at + curve.factor(t - 1.0).unwrap()) / 2.0 } else { at }
    };
    let factors: Vec<f64> = offsets.iter().map(|&t| factor(t)).collect();
    let streams: Vec<StreamOutcome> = choice
        .streams
        .iter()
        .map(|s| {
            let scale = s.sign * s.unit * (1.0 + s.uplift.value);
            let mut flows: Vec<f64> = s.raw.iter().map(|x| x * scale).collect();
            if let Some(residual) = &s.residual {
                *flows.last_mut().unwrap() -= residual.value * s.unit;
            }
            let pv_by_year: Vec<f64> = flows.iter().zip(&factors).map(|(x, d)| x * d).collect();
            // For ever at 3.5%, after the last flow.
            let for_ever = flows[flows.len() - 1] / 0.035 * factors[factors.len() - 1];
            let pv_tail = if s.tail.is_some() { for_ever } else { 0.0 };
            let pv = pv_by_year.iter().sum::<f64>() + pv_tail;
            StreamOutcome {
                undiscounted: flows.iter().sum(),
                flows,
                pv_by_year,
                pv_tail,
                pv,
                multipliers: None,
                own: None,
                weight: None,
            }
        })
        .collect();
    let net: Vec<f64> =
        (0..labels.len()).map(|i| streams[1].flows[i] - streams[0].flows[i] - streams[2].flows[i]).collect();
    let pv_costs = streams[0].pv;
    let pv_benefits = streams[1].pv - streams[2].pv;
    let service_years = length.ceil() as u32;
    let annuity: f64 = (1..=service_years).map(|n| curve.factor(f64::from(n)).unwrap()).sum();
    let ends: &[f64] = if averaged { &[0.0, 1.0] } else { &[0.0] };
    let halves = offsets.iter().zip(&net);
    let halves = halves.flat_map(|(t, x)| ends.iter().map(move |end| (t - end, x / ends.len() as f64)));
    let (at, flows) = halves.unzip();
    let signs = [-1.0, 1.0, -1.0];
    let tailed = choice.streams.iter().zip(&streams).zip(signs).filter(|((s, _), _)| s.tail.is_some());
    let perpetual = tailed.map(|((_, o), sign)| Perpetual {
        start: offsets[offsets.len() - 1],
        flow: sign * o.flows[o.flows.len() - 1],
        growth: 0.0,
        every: 1,
    });
    let perpetual = perpetual.collect();
    ChoiceOutcome {
        dated: Flows { offsets: at, flows, perpetual },
        basis: basis.clone(),
        timing: case.timing,
        base_words: "2026".into(),
        prices: None,
        elasticity: None,
        exact: None,
        timing_sentence: "a flow in 2026 has factor 1.0000, in 2027 0.9662".into(),
        forward: offsets.iter().map(|&t| (t > 0.0).then(|| curve.forward_rate(t.ceil()).unwrap())).collect(),
        length,
        service_years,
        annuity,
        absolute: Totals {
            benefits: streams[1].undiscounted - streams[2].undiscounted,
            costs: streams[0].undiscounted,
            pv_benefits,
            pv_costs,
            npv: pv_benefits - pv_costs,
            ratio: Some(pv_benefits / pv_costs),
            annual: Some((pv_benefits - pv_costs) / annuity),
        },
        increment: None,
        irr: Vec::new(),
        irr_unresolved: Vec::new(),
        endless: false,
        payback: Payback { first: Some(6.5), last: Some(6.5) },
        mean_time: Some(17.0),
        era_shares: vec![0.8, 0.2, 0.0],
        npv_per_budget: None,
        effects: Vec::new(),
        curve,
        offsets,
        factors,
        streams,
        net,
    }
}
