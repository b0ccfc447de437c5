//! The live formulas: present values over the analyst's own cells, and what goes into each target.
//!
//! Texts are in the file's syntax (commas, no leading equals sign), valid in Excel and LibreOffice
//! without array entry, and come with the result that the library computed.

use crate::appraisal::{
    Appraisal, Axis, Choice, Direction, Held, Label, Stream, StreamKind, Target, TargetRole,
};
use crate::layout::{Column, Layout};
use crate::outcome::ChoiceOutcome;
use crate::patch::{Cached, CellWrite};
use crate::references::{Area, Cell, Range, SheetRange, quote_sheet};
use crate::writer::MAX_FORMULA;

/// Relative difference up to which two factors are the same.
pub const FACTOR_TOLERANCE: f64 = 1e-9;

/// The text where no rate of return was found.
pub const NO_IRR: &str = "none between -50% and 100%";
/// The text where flows without end leave nothing to search.
pub const ENDLESS_IRR: &str = "not searched: flows go on for ever";
/// The text where the cumulated present value never reaches zero.
pub const NO_PAYBACK: &str = "not paid back within the years valued";

/// Cells with both dollar signs: `$A$1:$A$9`.
pub fn absolute(range: Range) -> String {
    let first = cell_text(range.first, true, true);
    if range.first == range.last { first } else { format!("{first}:{}", cell_text(range.last, true, true)) }
}

/// Cells as a formula on sheet `home` refers to them: absolute, the sheet named unless it is `home`.
pub fn refer(home: &str, at: &SheetRange) -> String {
    format!("{}{}", prefix(home, &at.sheet), absolute(at.range))
}

/// An area as arguments of a function: its pieces between commas.
pub fn refer_area(home: &str, at: &Area) -> String {
    at.pieces().map(|piece| refer(home, &piece)).collect::<Vec<_>>().join(",")
}

/// Cells from one place along the years, unbroken in every area that a term is about.
struct Piece {
    from: usize,
    count: usize,
}

impl Piece {
    fn of(&self, home: &str, at: &Area) -> String {
        refer(home, &at.slice(self.from, self.count))
    }
}

/// The sum of a term over the pieces of areas along the years; in brackets where there are several.
fn in_pieces(areas: &[&Area], term: impl Fn(&Piece) -> String) -> String {
    let terms: Vec<String> =
        Area::unbroken(areas).into_iter().map(|(from, count)| term(&Piece { from, count })).collect();
    if terms.len() == 1 { terms.concat() } else { format!("({})", terms.join("+")) }
}

/// One cell as a formula on sheet `home` refers to it, relative.
pub fn refer_cell(home: &str, sheet: &str, cell: Cell) -> String {
    format!("{}{cell}", prefix(home, sheet))
}

fn prefix(home: &str, sheet: &str) -> String {
    if home == sheet { String::new() } else { format!("{}!", quote_sheet(sheet)) }
}

fn cell_text(cell: Cell, col: bool, row: bool) -> String {
    let text = cell.to_string();
    let digits = text.find(|c: char| c.is_ascii_digit()).unwrap_or(0);
    let dollar = |fixed| if fixed { "$" } else { "" };
    format!("{}{}{}{}", dollar(col), &text[..digits], dollar(row), &text[digits..])
}

/// The i-th cell of a row or column of cells.
pub fn nth(range: Range, i: usize) -> Cell {
    let i = i as u32;
    if range.last.row > range.first.row {
        Cell { row: range.first.row + i, col: range.first.col }
    } else {
        Cell { row: range.first.row, col: range.first.col + i }
    }
}

/// A number as a formula holds it.
pub fn literal(x: f64) -> String {
    let magnitude = x.abs();
    if x == 0.0 || (1e-5..1e15).contains(&magnitude) { format!("{x}") } else { format!("{x:E}") }
}

/// +1 where a stream counts for the net, -1 where against.
pub fn side(kind: StreamKind) -> f64 {
    match kind {
        StreamKind::Benefit | StreamKind::Flow => 1.0,
        StreamKind::Cost | StreamKind::Damage => -1.0,
    }
}

/// What multiplies each raw flow, as `-1000*(1+Sheet!$B$2)*`; empty where nothing does.
pub fn scale(stream: &Stream, home: &str) -> String {
    let constant = stream.sign * stream.unit;
    let mut text = if constant == 1.0 { String::new() } else { format!("{}*", literal(constant)) };
    match &stream.uplift.at {
        Some(at) => text.push_str(&format!("(1+{})*", refer(home, at))),
        None if stream.uplift.value != 0.0 => {
            text.push_str(&format!("(1+{})*", literal(stream.uplift.value)));
        }
        None => {}
    }
    text
}

/// -1 where a residual value lowers the last flow (a cost), +1 where it raises it.
pub fn residual_sign(kind: StreamKind) -> f64 {
    if kind == StreamKind::Cost { -1.0 } else { 1.0 }
}

/// What the residual value adds to the last flow, as `-1000*Sheet!$B$3`; none without one.
///
/// It is entered positive whatever the signs of the stream, in the stream's unit, and has no uplift.
pub fn residual(stream: &Stream, home: &str) -> Option<String> {
    let given = stream.residual.as_ref()?;
    let factor = residual_sign(stream.kind) * stream.unit;
    let value = given.at.as_ref().map_or_else(|| literal(given.value), |at| refer(home, at));
    Some(match factor {
        1.0 => format!("+{value}"),
        -1.0 => format!("-{value}"),
        f if f > 0.0 => format!("+{}*{value}", literal(f)),
        f => format!("{}*{value}", literal(f)),
    })
}

/// Where the factors of an option (of a stream, where it has a basis of its own) stand that formulas may use: the analyst's own factor cells, if
/// hence fills them or found them in agreement.
pub fn analyst_factors<'a>(
    appraisal: &'a Appraisal,
    layout: &Layout,
    outcomes: &[ChoiceOutcome],
    choice: usize,
    stream: Option<usize>,
) -> Option<&'a Area> {
    let own = format!("INDEX({}!", quote_sheet(&layout.names.discounting));
    let factors = stream.map_or(&outcomes[choice].factors[..], |s| outcomes[choice].factors_of(s));
    // A stream on its option's basis uses its option's factors.
    let role =
        stream.filter(|&s| outcomes[choice].streams[s].own.is_some()).map_or(TargetRole::Factor, |s| {
            TargetRole::StreamFactor(appraisal.choices[choice].streams[s].name.clone())
        });
    let usable = |(i, held): (usize, &Held)| match held {
        Held::Blank | Held::Number(_) => true,
        Held::Formula { text, value, .. } => {
            let agrees = |v: f64| (v - factors[i]).abs() <= FACTOR_TOLERANCE * factors[i].abs();
            text.starts_with(&own) || value.is_some_and(agrees)
        }
        Held::Text(_) | Held::Error(_) => false,
    };
    appraisal.choices[choice]
        .targets
        .iter()
        .filter(|t| t.role == role && t.held.len() == factors.len())
        .find(|t| t.held.iter().enumerate().all(usable))
        .map(|t| &t.at)
}

/// The present value of one stream as an expression for a formula on sheet `home`; none where it
/// would be longer than a formula may be (the table on Discounting holds it then).
pub fn pv_expression(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    layout: &Layout,
    choice: usize,
    stream: usize,
    home: &str,
) -> Option<String> {
    let flows = &appraisal.choices[choice].streams[stream];
    let axis = &appraisal.axes[appraisal.choices[choice].axis];
    let labels = layout.labels(choice);
    let block = layout.stream_factors(choice, stream);
    let factors = analyst_factors(appraisal, layout, outcomes, choice, Some(stream));
    let multipliers = layout.multipliers(choice, stream);
    let along: Vec<&Area> = [&flows.at, &axis.at].into_iter().chain(factors).collect();
    let product = in_pieces(&along, |piece| {
        let part = |at: &SheetRange| piece.of(home, &Area::from(at.clone()));
        let (cells, met) = (piece.of(home, &flows.at), meeting(axis, &labels, piece, home));
        match (factors.map(|at| piece.of(home, at)), axis.direction, &multipliers) {
            (Some(at), _, None) => format!("SUMPRODUCT({cells},{at})"),
            (Some(at), Direction::Down, Some(by)) => format!("SUMPRODUCT({cells},{at},{})", part(by)),
            (None, Direction::Down, None) => format!("SUMPRODUCT({cells},{})", part(&block)),
            (None, Direction::Down, Some(by)) => format!("SUMPRODUCT({cells},{},{})", part(&block), part(by)),
            // A comparison of a column with a row is a table in both programs, without array entry.
            (None, Direction::Across, None) => {
                format!("SUMPRODUCT({met}*{}*{cells})", refer(home, &block))
            }
            (None, Direction::Across, Some(by)) => {
                format!("SUMPRODUCT({met}*{}*{}*{cells})", refer(home, &block), refer(home, by))
            }
            (Some(at), Direction::Across, Some(by)) => {
                format!("SUMPRODUCT({met}*{}*{cells}*{at})", refer(home, by))
            }
        }
    });
    let mut text = format!("{}{product}", scale(flows, home));
    let last = outcomes[choice].factors.len().saturating_sub(1);
    if let Some(residual) = residual(flows, home) {
        let at = factors.map_or_else(|| Area::from(block.clone()), Area::clone);
        let cell = at.nth(last);
        text.push_str(&format!("{residual}*{}{}", prefix(home, &at.sheet), cell_text(cell, true, true)));
        text.push_str(&times_last(layout, choice, stream, home));
    }
    if flows.tail.is_some() {
        let cell = layout.cell(layout.rows[choice].streams[stream], Column::Tail);
        let at = SheetRange { sheet: layout.names.discounting.clone(), range: one(cell) };
        text.push_str(&format!("+{}", refer(home, &at)));
    }
    (text.chars().count() <= MAX_FORMULA).then_some(text)
}

/// Where the labels of a block (down) meet the years (across): a table of 1 and 0. By place too where labels repeat.
fn meeting(axis: &Axis, labels: &SheetRange, piece: &Piece, home: &str) -> String {
    let (all, years) = (refer(home, labels), piece.of(home, &axis.at));
    if !axis.labels.windows(2).any(|pair| reads_as(&pair[0], &pair[1])) {
        return format!("({all}={years})");
    }
    let first = refer(home, &SheetRange { sheet: labels.sheet.clone(), range: one(labels.range.first) });
    let from = Piece { from: piece.from, count: 1 }.of(home, &axis.at);
    let place = if piece.from == 0 { String::new() } else { format!("+{}", piece.from) };
    format!("({all}={years})*(ROW({all})-ROW({first})=COLUMN({years})-COLUMN({from}){place})")
}

/// The undiscounted total of one stream as an expression for a formula on sheet `home`.
pub fn sum_expression(
    appraisal: &Appraisal,
    layout: &Layout,
    choice: usize,
    stream: usize,
    home: &str,
) -> String {
    let flows = &appraisal.choices[choice].streams[stream];
    let axis = &appraisal.axes[appraisal.choices[choice].axis];
    let sum = match (layout.multipliers(choice, stream), axis.direction) {
        (None, _) => format!("SUM({})", refer_area(home, &flows.at)),
        (Some(by), Direction::Down) => in_pieces(&[&flows.at], |piece| {
            format!("SUMPRODUCT({},{})", piece.of(home, &flows.at), piece.of(home, &Area::from(by.clone())))
        }),
        (Some(by), Direction::Across) => {
            let (labels, by) = (layout.labels(choice), refer(home, &by));
            in_pieces(&[&flows.at, &axis.at], |piece| {
                let (cells, met) = (piece.of(home, &flows.at), meeting(axis, &labels, piece, home));
                format!("SUMPRODUCT({met}*{by}*{cells})")
            })
        }
    };
    let total = format!("{}{sum}", scale(flows, home));
    match residual(flows, home) {
        Some(residual) => format!("{total}{residual}{}", times_last(layout, choice, stream, home)),
        None => total,
    }
}

/// The multiplier of the last year as `*Discounting!$G$30`; empty where flows are not multiplied.
fn times_last(layout: &Layout, choice: usize, stream: usize, home: &str) -> String {
    let last = layout.multipliers(choice, stream).map(|at| at.range.last);
    let text = |cell| format!("*{}{}", prefix(home, &layout.names.discounting), cell_text(cell, true, true));
    last.map(text).unwrap_or_default()
}

/// One cell as a range.
pub fn one(cell: Cell) -> Range {
    Range { first: cell, last: cell }
}

/// What each cell of a target comes to on the option's basis.
pub fn expected(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    layout: &Layout,
    choice: usize,
    target: &Target,
) -> Vec<Cached> {
    let outcome = &outcomes[choice];
    let totals = outcome.totals();
    let stream = |name: &str| find(&appraisal.choices[choice], name).map(|s| &outcome.streams[s]);
    let missing = || Cached::Text("no stream of that name".to_owned());
    let number = |x: f64| vec![Cached::Number(x)];
    match &target.role {
        TargetRole::Factor => outcome.factors.iter().map(|&d| Cached::Number(d)).collect(),
        TargetRole::StreamFactor(name) => {
            let own = find(&appraisal.choices[choice], name).map(|s| outcome.factors_of(s));
            own.unwrap_or(&outcome.factors).iter().map(|&d| Cached::Number(d)).collect()
        }
        TargetRole::Rates => outcome.forward.iter().map(|r| Cached::Number(r.unwrap_or(0.0))).collect(),
        TargetRole::PvByYear(None) => {
            let sides = || appraisal.choices[choice].streams.iter().map(|s| side(s.kind));
            (0..outcome.net.len()).map(|i| Cached::Number(outcome.net_value(i, sides()))).collect()
        }
        TargetRole::PvByYear(Some(name)) => match stream(name) {
            Some(s) => s.pv_by_year.iter().map(|&x| Cached::Number(x)).collect(),
            None => outcome.factors.iter().map(|_| missing()).collect(),
        },
        TargetRole::PvTotal(Some(name)) => {
            vec![stream(name).map_or_else(missing, |s| Cached::Number(s.pv))]
        }
        TargetRole::PvTotal(None) => number(outcome.absolute.npv),
        TargetRole::PvCosts => number(totals.pv_costs),
        TargetRole::PvBenefits => number(totals.pv_benefits),
        TargetRole::Npv => number(totals.npv),
        TargetRole::Ratio => vec![or_text(totals.ratio, no_ratio(outcome))],
        TargetRole::Annual => vec![or_text(totals.annual, NO_ANNUAL)],
        TargetRole::Irr => vec![match (outcome.irr.as_slice(), outcome.irr_unresolved.as_slice()) {
            _ if outcome.endless => Cached::Text(ENDLESS_IRR.to_owned()),
            ([], []) => Cached::Text(NO_IRR.to_owned()),
            ([rate], []) => Cached::Number(*rate),
            ([], _) => Cached::Text(format!("not settled: see {}", layout.names.summary)),
            _ => Cached::Text(format!("several rates: see {}", layout.names.summary)),
        }],
        TargetRole::Payback => vec![match (outcome.payback.first, outcome.payback.last) {
            (None, _) => Cached::Text(NO_PAYBACK.to_owned()),
            (Some(a), Some(b)) if a == b => Cached::Number(a),
            _ => Cached::Text(format!("several crossings: see {}", layout.names.summary)),
        }],
    }
}

/// Whether a text in a target cell is one that a fill writes where a measure has no number.
pub fn is_own_text(text: &str) -> bool {
    [NO_IRR, ENDLESS_IRR, NO_PAYBACK, NO_ANNUAL].contains(&text)
        || ["no ratio: ", "several rates: see ", "not settled: see ", "several crossings: see "]
            .iter()
            .any(|own| text.starts_with(own))
}

/// The text where the ratio has no meaning.
pub fn no_ratio(outcome: &ChoiceOutcome) -> &'static str {
    match outcome.increment {
        Some(_) => "no ratio: costs over the baseline are not positive",
        None => "no ratio: costs are not positive",
    }
}

/// The text where there is no annual equivalent.
pub const NO_ANNUAL: &str = "no annual equivalent: no service years";

fn or_text(value: Option<f64>, text: &str) -> Cached {
    value.map_or_else(|| Cached::Text(text.to_owned()), Cached::Number)
}

/// The stream of that name, whatever its case.
pub fn find(choice: &Choice, name: &str) -> Option<usize> {
    choice.streams.iter().position(|s| s.name.to_lowercase() == name.to_lowercase())
}

/// What to write into each cell of a target: a formula with its result, or with `formulas` false the
/// plain number.
pub fn target_writes(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    layout: &Layout,
    choice: usize,
    target: &Target,
    formulas: bool,
) -> Vec<CellWrite> {
    let results = expected(appraisal, outcomes, layout, choice, target);
    let make = Maker { appraisal, outcomes, layout, choice, home: &target.at.sheet };
    let write = |(i, result): (usize, Cached)| {
        let text = if formulas { make.formula(target, i) } else { None };
        match (text, result) {
            (Some(text), result) => CellWrite::Formula(text, result),
            (None, Cached::Text(text)) => CellWrite::Text(text),
            (None, Cached::Number(x)) => CellWrite::Number(x),
            (None, Cached::None) => CellWrite::Text(String::new()),
        }
    };
    results.into_iter().enumerate().map(write).collect()
}

/// Formulas of one option's targets on one sheet.
struct Maker<'a> {
    appraisal: &'a Appraisal,
    outcomes: &'a [ChoiceOutcome],
    layout: &'a Layout,
    choice: usize,
    home: &'a str,
}

impl Maker<'_> {
    fn formula(&self, target: &Target, i: usize) -> Option<String> {
        let choice = &self.appraisal.choices[self.choice];
        let rows = &self.layout.rows[self.choice];
        let sums = self.layout.sums(self.choice);
        match &target.role {
            TargetRole::Factor => Some(self.look_up(&self.layout.factors(self.choice), i)),
            TargetRole::StreamFactor(name) => {
                let factors = self.layout.stream_factors(self.choice, find(choice, name)?);
                Some(self.look_up(&factors, i))
            }
            TargetRole::Rates => Some(self.look_up(&self.layout.forward(self.choice), i)),
            TargetRole::PvByYear(Some(name)) => {
                let s = find(choice, name)?;
                let text = format!("{}*{}", self.flow(s, i, true), self.factor(Some(s), i));
                (text.len() <= MAX_FORMULA).then_some(text)
            }
            TargetRole::PvByYear(None) => {
                let own = self.outcomes[self.choice].streams.iter().any(|stream| stream.own.is_some());
                let mut sum = String::new();
                for (k, stream) in choice.streams.iter().enumerate() {
                    let plus = side(stream.kind) > 0.0;
                    sum.push_str(if !plus {
                        "-"
                    } else if k > 0 {
                        "+"
                    } else {
                        ""
                    });
                    sum.push_str(&self.flow(k, i, false));
                    if own {
                        sum.push_str(&format!("*{}", self.factor(Some(k), i)));
                    }
                }
                let text = if own { sum.clone() } else { format!("({sum})*{}", self.factor(None, i)) };
                // A number is left where so many streams do not fit into one formula.
                (!sum.is_empty() && text.len() <= MAX_FORMULA).then_some(text)
            }
            TargetRole::PvTotal(Some(name)) => {
                let s = find(choice, name)?;
                let (a, o, l) = (self.appraisal, self.outcomes, self.layout);
                pv_expression(a, o, l, self.choice, s, self.home)
                    .or_else(|| Some(self.table(rows.streams[s])))
            }
            TargetRole::PvTotal(None) => Some(self.table(rows.absolute.net)),
            TargetRole::PvCosts => Some(self.table(sums.costs)),
            TargetRole::PvBenefits => Some(self.table(sums.benefits)),
            TargetRole::Npv => Some(self.table(sums.net)),
            TargetRole::Ratio => Some(self.table(rows.ratio)),
            TargetRole::Annual => Some(self.table(rows.annual)),
            // No closed form stands behind these: they are written as found.
            TargetRole::Irr | TargetRole::Payback => None,
        }
    }

    fn table(&self, row: u32) -> String {
        let range = one(self.layout.cell(row, Column::Value));
        refer(self.home, &SheetRange { sheet: self.layout.names.discounting.clone(), range })
    }

    /// INDEX/MATCH by the label in the analyst's years cell.
    fn look_up(&self, column: &SheetRange, i: usize) -> String {
        let axis = &self.appraisal.axes[self.appraisal.choices[self.choice].axis];
        let across = axis.direction == Direction::Across;
        let label = cell_text(axis.at.nth(i), !across, across);
        let labels = refer(self.home, &self.layout.labels(self.choice));
        let values = refer(self.home, column);
        // Parts of a year bear the label of their year: the first of them is found, the others stand after it.
        let after =
            axis.labels[..i].iter().rev().take_while(|earlier| reads_as(earlier, &axis.labels[i])).count();
        let after = if after == 0 { String::new() } else { format!("+{after}") };
        format!("INDEX({values},MATCH({}{label},{labels},0){after})", prefix(self.home, &axis.at.sheet))
    }

    /// The analyst's factor cell where there is one, else the look-up.
    fn factor(&self, stream: Option<usize>, i: usize) -> String {
        match analyst_factors(self.appraisal, self.layout, self.outcomes, self.choice, stream) {
            Some(at) => {
                let down = at.is_column();
                format!("{}{}", prefix(self.home, &at.sheet), cell_text(at.nth(i), down, !down))
            }
            None => {
                let factors = stream.map_or_else(
                    || self.layout.factors(self.choice),
                    |s| self.layout.stream_factors(self.choice, s),
                );
                self.look_up(&factors, i)
            }
        }
    }

    /// One flow after unit, sign, uplift and residual; in brackets where it is a sum.
    fn flow(&self, s: usize, i: usize, leading: bool) -> String {
        let stream = &self.appraisal.choices[self.choice].streams[s];
        let by = self.layout.multipliers(self.choice, s).map(|at| self.look_up(&at, i));
        let by = by.map(|by| format!("*{by}")).unwrap_or_default();
        let cell = format!("{}{}", prefix(self.home, &stream.at.sheet), stream.at.nth(i));
        let text = format!("{}{cell}", scale(stream, self.home));
        let last = i + 1 == self.outcomes[self.choice].factors.len();
        match residual(stream, self.home).filter(|_| last) {
            Some(residual) => format!("({text}{residual}){by}"),
            None if !leading && text.starts_with('-') => format!("({text}{by})"),
            None => format!("{text}{by}"),
        }
    }
}

/// Whether a spreadsheet takes two labels for the same.
fn reads_as(a: &Label, b: &Label) -> bool {
    match (a, b) {
        (Label::Financial(_, a), Label::Financial(_, b)) => a.to_lowercase() == b.to_lowercase(),
        _ => a == b,
    }
}
