//! The summary sheet: the verdict, what was done from what, the basis, the results and every check.

use hence_core::Eras;

use super::checks::{Checks, counts};
use super::coverage::{Coverage, places};
use super::discounting::table_ref;
use super::lines::DIFFERS;
use super::{AuditInput, adjustments, block_basis, charts::era_words, charts::thousands, several};
use crate::appraisal::{StreamKind, TargetRole};
use crate::formulas::{ENDLESS_IRR, NO_IRR, no_ratio, one, refer};
use crate::layout::{Column, Layout};
use crate::outcome::ChoiceOutcome;
use crate::patch::Cached;
use crate::references::{Cell, Range, SheetRange};
use crate::welfare;
use crate::writer::{Sheet, Style};

/// The verdict where everything agrees.
pub const VERDICT_AGREES: &str = "arithmetic agrees with the declared basis";

/// Where the verdict stands.
pub(super) const VERDICT_CELL: Cell = Cell { row: VERDICT, col: 1 };
/// Rows of the verdict and the counts.
const VERDICT: u32 = 2;
const COUNT: u32 = 3;
const COUNT_DIFFERS: u32 = 4;
/// Columns that paragraphs span.
const LAST: u32 = 6;

/// The summary sheet and its verdict.
pub(super) struct Summary {
    /// The sheet.
    pub sheet: Sheet,
    /// The verdict as evaluated here.
    pub verdict: String,
    /// Where the verdict on all appraisals stands, if on this sheet.
    pub overall: Option<Cell>,
}

/// Makes the sheet.
pub(super) fn sheet(
    input: &AuditInput<'_>,
    layout: &Layout,
    checks: &Checks,
    coverage: &Coverage,
) -> Summary {
    let mut sheet = Sheet::new(&input.names.summary);
    let options = input.appraisal.choices.len() as u32;
    sheet.columns(0, 0, 48.0);
    sheet.columns(1, options.max(LAST), 18.0);
    sheet.text(0, 0, Style::Title, "Audit summary");
    let verdict = verdict(&mut sheet, input, checks, coverage);
    let mut page = Page { sheet, row: COUNT_DIFFERS + 2 };
    let own = (checks.awaiting == 0).then_some(verdict.as_str());
    let gathers = !input.siblings.is_empty();
    let overall = gathers.then(|| several::section(&mut page, input, own));
    page.provenance(input);
    page.basis(input, layout);
    page.results(input, layout);
    page.list("What was made of the flows as entered", &adjustments::words(input));
    page.checks(input, checks, coverage);
    page.warnings(input);
    page.list("What differs in the file by design", input.differs);
    page.sheet.text(page.row, 0, Style::Section, "Notes of the reviewer (type below; kept at the next fill)");
    page.sheet.freeze(VERDICT + 1, 0);
    page.sheet.repeat(0, VERDICT);
    Summary { sheet: page.sheet, verdict, overall }
}

fn verdict(sheet: &mut Sheet, input: &AuditInput<'_>, checks: &Checks, coverage: &Coverage) -> String {
    let home = sheet.name.clone();
    let (all, differs) = counts(checks.results, &home, &input.names.checks);
    let (ties, apart) = counts(coverage.results, &home, &input.names.coverage);
    let cell = |row| Cell { row, col: 1 }.to_string();
    let total = checks.count + coverage.valued;
    let wrong = checks.differing.len();
    // Where formulas wait for their results, so does the verdict: a spreadsheet program computes it.
    let pending = |result: Cached| if checks.awaiting > 0 { Cached::None } else { result };
    sheet.text(COUNT, 0, Style::Text, "Checks and ties of totals");
    sheet.formula(COUNT, 1, Style::Year, format!("{all}+{ties}"), pending(Cached::Number(total as f64)));
    sheet.text(COUNT_DIFFERS, 0, Style::Text, "of which differ");
    sheet.formula(
        COUNT_DIFFERS,
        1,
        Style::Year,
        format!("{differs}+{apart}"),
        pending(Cached::Number(wrong as f64)),
    );
    let text = match checks.differing.first() {
        None if checks.awaiting > 0 => format!(
            "awaits recalculation: {} of {total} checks are of formulas that have no result yet; the others agree",
            checks.awaiting
        ),
        None => VERDICT_AGREES.to_owned(),
        Some(first) => format!("{DIFFERS}: {wrong} of {total} checks, first at {first}"),
    };
    let results = |name: &str, range| refer(&home, &SheetRange { sheet: name.to_owned(), range });
    let first = |results: String, places: String| format!("INDEX({places},MATCH(\"{DIFFERS}\",{results},0))");
    let of_checks = first(
        results(&input.names.checks, checks.results),
        places(checks.results, &home, &input.names.checks),
    );
    let of_coverage = first(
        results(&input.names.coverage, coverage.results),
        places(coverage.results, &home, &input.names.coverage),
    );
    let formula = format!(
        "IF({n}=0,\"{VERDICT_AGREES}\",\"{DIFFERS}: \"&{n}&\" of \"&{m}&\" checks, first at \"\
         &IFERROR({of_checks},{of_coverage}))",
        n = cell(COUNT_DIFFERS),
        m = cell(COUNT),
    );
    sheet.text(VERDICT, 0, Style::Verdict, "Verdict");
    sheet.formula(VERDICT, 1, Style::Verdict, formula, pending(Cached::Text(text.clone())));
    text
}

/// The sheet with the next free row.
pub(super) struct Page {
    pub sheet: Sheet,
    pub row: u32,
}

impl Page {
    pub(super) fn section(&mut self, text: &str) {
        self.sheet.text(self.row, 0, Style::Section, text);
        self.row += 1;
    }

    fn pair(&mut self, label: &str, text: &str) {
        if !text.is_empty() {
            self.sheet.text(self.row, 0, Style::Wrapped, label);
            self.sheet.paragraph(self.row, 1, LAST, Style::Wrapped, text);
            self.row += 1;
        }
    }

    fn list(&mut self, title: &str, texts: &[String]) {
        if texts.is_empty() {
            return;
        }
        self.section(title);
        for text in texts {
            self.sheet.paragraph(self.row, 0, LAST, Style::Wrapped, text);
            self.row += 1;
        }
        self.row += 1;
    }

    fn provenance(&mut self, input: &AuditInput<'_>) {
        let meta = input.meta;
        self.section("What, from what");
        self.pair("Workbook", &meta.input_name);
        self.pair("SHA-256 of the workbook", &meta.input_sha256);
        self.pair("SHA-256 of the basis texts", &meta.basis_sha256);
        if let Some((name, sha256)) = &meta.plan {
            self.pair("Plan, which says what is where", name);
            self.pair("SHA-256 of the plan", sha256);
        }
        self.pair("Appraisal", meta.appraisal.as_deref().unwrap_or(""));
        self.pair("SHA-256 of what was asked for", &meta.request_sha256);
        self.pair("Made by", &format!("hence {}", meta.version));
        self.pair("As of", meta.as_of.as_deref().unwrap_or(""));
        self.pair("By", meta.by.as_deref().unwrap_or(""));
        let how = if meta.formulas { "live formulas with their results" } else { "plain numbers" };
        self.pair("Cells were filled with", how);
        self.row += 1;
    }

    fn basis(&mut self, input: &AuditInput<'_>, layout: &Layout) {
        for (k, block) in layout.blocks.iter().enumerate() {
            let choice = &input.appraisal.choices[block.choice];
            let outcome = &input.outcomes[block.choice];
            let basis = block_basis(input, block);
            let own = block.stream.and_then(|stream| choice.streams[stream].basis.as_ref());
            let from = own.map_or(&choice.basis.from, |given| &given.from);
            self.section(&format!("Basis of {}", layout.whose(k, input.appraisal)));
            self.pair("Basis", &format!("{} (from {from})", basis.canonical()));
            self.pair("In words, with its source", &basis.words());
            if let Some(own) = block.stream.and_then(|stream| outcome.streams[stream].own.as_ref()) {
                // Base and prices are its option's.
                self.pair("Timing", &own.timing_sentence);
                self.row += 1;
                continue;
            }
            self.pair("Base", &format!("{} (from {})", outcome.base_words, choice.base.from));
            self.pair("Timing", &outcome.timing_sentence);
            self.pair("Prices", outcome.prices.as_deref().unwrap_or(""));
            self.row += 1;
        }
        self.sheet.paragraph(self.row, 0, LAST, Style::Strong, super::CAUTION);
        self.row += 2;
    }

    fn results(&mut self, input: &AuditInput<'_>, layout: &Layout) {
        self.section("Results");
        self.sheet.text(self.row, 0, Style::Heading, "Measure");
        for (c, choice) in input.appraisal.choices.iter().enumerate() {
            self.sheet.text(self.row, c as u32 + 1, Style::Heading, &choice.name);
        }
        self.row += 1;
        self.totals(input, layout);
        self.measures(input);
        self.row += 1;
        for choice in &input.appraisal.choices {
            let names = |wanted: &[StreamKind]| {
                let names: Vec<&str> = choice
                    .streams
                    .iter()
                    .filter(|s| wanted.contains(&s.kind))
                    .map(|s| s.name.as_str())
                    .collect();
                if names.is_empty() { "nothing".to_owned() } else { names.join(", ") }
            };
            let mut text = format!(
                "above the line {}; below the line {}",
                names(&[StreamKind::Benefit, StreamKind::Flow, StreamKind::Damage]),
                names(&[StreamKind::Cost]),
            );
            if !choice.budget.is_empty() {
                text.push_str(&format!("; constrained cost {}", choice.budget.join(", ")));
            }
            self.pair(&format!("Ratio of {}", choice.name), &text);
        }
        if let Some(baseline) = input.appraisal.baseline {
            let name = &input.appraisal.choices[baseline].name;
            let text =
                format!("{name}; ratio, annual equivalent, rates of return and payback use increments");
            self.pair("Baseline", &text);
        }
        for (choice, outcome) in input.appraisal.choices.iter().zip(input.outcomes) {
            if let Some(value) = &outcome.exact {
                self.pair(&format!("{} against consumption", choice.name), &welfare::words(value));
            }
        }
        for (choice, beside) in input.appraisal.choices.iter().zip(input.companions) {
            if let Some(beside) = beside {
                let t = &beside.totals;
                let text = format!(
                    "PV of benefits {}, PV of costs {}, net present value {}. {}",
                    thousands(t.pv_benefits),
                    thousands(t.pv_costs),
                    thousands(t.npv),
                    beside.words
                );
                self.pair(&format!("{}, beside it on {}", choice.name, beside.id), &text);
            }
        }
        self.row += 1;
    }

    fn totals(&mut self, input: &AuditInput<'_>, layout: &Layout) {
        type Pick = fn(&crate::layout::ChoiceRows) -> Option<u32>;
        let rows: [(&str, Column, Pick); 12] = [
            ("Undiscounted costs", Column::Undiscounted, |r| Some(r.absolute.costs)),
            ("Undiscounted benefits", Column::Undiscounted, |r| Some(r.absolute.benefits)),
            ("Undiscounted net", Column::Undiscounted, |r| Some(r.absolute.net)),
            ("Present value of costs", Column::Value, |r| Some(r.absolute.costs)),
            ("Present value of benefits", Column::Value, |r| Some(r.absolute.benefits)),
            ("Net present value", Column::Value, |r| Some(r.absolute.net)),
            ("Present value of costs over the baseline", Column::Value, |r| Some(r.increment?.costs)),
            ("Present value of benefits over the baseline", Column::Value, |r| Some(r.increment?.benefits)),
            ("Net present value over the baseline", Column::Value, |r| Some(r.increment?.net)),
            ("Benefit-cost ratio", Column::Value, |r| Some(r.ratio)),
            ("Annual equivalent", Column::Value, |r| Some(r.annual)),
            ("Sum of factors of the service years", Column::Value, |r| Some(r.annuity)),
        ];
        let home = self.sheet.name.clone();
        for (k, (label, column, pick)) in rows.into_iter().enumerate() {
            let found: Vec<Option<u32>> = layout.rows.iter().map(pick).collect();
            if found.iter().all(Option::is_none) {
                continue;
            }
            let of_increments = matches!(k, 9 | 10) && input.appraisal.baseline.is_some();
            let label = if of_increments { format!("{label} over the baseline") } else { label.to_owned() };
            self.sheet.text(self.row, 0, Style::Wrapped, label);
            for (c, row) in found.into_iter().enumerate() {
                let Some(row) = row else { continue };
                let style = match k {
                    9 => Style::Ratio,
                    11 => Style::Factor,
                    _ => Style::Money,
                };
                let text = table_ref(&home, layout, row, column);
                let result = table_value(input, k, c);
                let style = if matches!(result, Cached::Text(_)) { Style::Instead } else { style };
                self.sheet.formula(self.row, c as u32 + 1, style, text, result);
            }
            self.row += 1;
        }
    }

    fn measures(&mut self, input: &AuditInput<'_>) {
        let each = |page: &mut Page, label: &str, put: &dyn Fn(&mut Sheet, u32, u32, usize)| {
            page.sheet.text(page.row, 0, Style::Wrapped, label);
            for c in 0..input.outcomes.len() {
                put(&mut page.sheet, page.row, c as u32 + 1, c);
            }
            page.row += 1;
        };
        let years = |sheet: &mut Sheet, row, col, value: Option<f64>, none: &str| match value {
            Some(x) => sheet.number(row, col, Style::Ratio, x),
            None => sheet.text(row, col, Style::Instead, none),
        };
        each(self, "Service years N of the annual equivalent", &|sheet, row, col, c| {
            sheet.number(row, col, Style::Year, f64::from(input.outcomes[c].service_years));
        });
        let over = if input.appraisal.baseline.is_some() { " over the baseline" } else { "" };
        each(
            self,
            &format!("Discounted payback{over} (years from the base, first crossing)"),
            &|sheet, row, col, c| {
                years(sheet, row, col, input.outcomes[c].payback.first, "none");
            },
        );
        each(
            self,
            &format!("Discounted payback{over} (years from the base, last crossing)"),
            &|sheet, row, col, c| {
                years(sheet, row, col, input.outcomes[c].payback.last, "none");
            },
        );
        each(self, &format!("Internal rates of return{over}"), &|sheet, row, col, c| {
            sheet.text(row, col, Style::Instead, rates_of_return(&input.outcomes[c]));
        });
        each(self, "Mean time of gross present value (years)", &|sheet, row, col, c| {
            years(sheet, row, col, input.outcomes[c].mean_time, "none");
        });
        let edges = Eras::default().0;
        for k in 0..=edges.len() {
            let label = format!("Share of gross present value {}", era_words(&edges, k));
            each(self, &label, &|sheet, row, col, c| {
                if let Some(&share) = input.outcomes[c].era_shares.get(k) {
                    sheet.number(row, col, Style::Share, share);
                }
            });
        }
        if input.outcomes.iter().any(|o| o.npv_per_budget.is_some()) {
            each(self, "Net present value per unit of constrained cost", &|sheet, row, col, c| {
                years(sheet, row, col, input.outcomes[c].npv_per_budget, "none");
            });
        }
        self.effects(input);
    }

    fn effects(&mut self, input: &AuditInput<'_>) {
        for (c, choice) in input.appraisal.choices.iter().enumerate() {
            for (effect, (plain, discounted)) in choice.effects.iter().zip(&input.outcomes[c].effects) {
                for (words, value) in [("undiscounted", plain), ("discounted", discounted)] {
                    let Some(x) = value else { continue };
                    let label = format!("Cost per unit of {} (effect {words})", effect.name);
                    self.sheet.text(self.row, 0, Style::Wrapped, label);
                    self.sheet.number(self.row, c as u32 + 1, Style::Ratio, *x);
                    self.row += 1;
                }
            }
        }
    }

    fn checks(&mut self, input: &AuditInput<'_>, checks: &Checks, coverage: &Coverage) {
        self.section("Checks and their tolerances");
        for (i, heading) in ["Check", "Number", "Allowed difference"].iter().enumerate() {
            self.sheet.text(self.row, i as u32, Style::Heading, heading);
        }
        self.row += 1;
        let factors: usize = input.outcomes.iter().map(|o| o.factors.len()).sum();
        let (multipliers, welfare) = (checks.multipliers, checks.welfare);
        let factors = factors + checks.own_factors;
        let in_lines = input.cells.iter().filter(|cell| is_factor(input, cell)).count();
        let cells = input.cells.len() - in_lines;
        let rest = checks.count.saturating_sub(factors + multipliers + welfare + cells + checks.settings);
        for (label, number, allowed) in [
            ("Factors: second route, Discounting, filled cells", factors, "1e-9 relative"),
            ("Multipliers of flows: prices, their growth, weights", multipliers, "1e-9 relative"),
            ("Exact values against consumption", welfare, "1e-9 of the gross present value"),
            ("Present values and totals on Discounting", rest, "1e-9 of the gross present value"),
            ("What the workbook states: base, basis, timing and the like", checks.settings, "none"),
            ("Other filled or compared cells", cells, "half of the last displayed unit, or 1e-9"),
            ("Undiscounted totals of valued rows", coverage.valued, "1e-9 relative, or 0.000001"),
        ] {
            if number == 0 && (label.starts_with("Multipliers") || label.starts_with("Exact")) {
                continue;
            }
            self.sheet.text(self.row, 0, Style::Wrapped, label);
            self.sheet.number(self.row, 1, Style::Year, number as f64);
            // Room between the number and what it may differ by.
            self.sheet.paragraph(self.row, 2, LAST, Style::Wrapped, format!("  {allowed}"));
            self.row += 1;
        }
        let text = format!(
            "{} of {} checks have an independent second route, on the sheet {}; each cell's own tolerance stands there.",
            checks.independent, checks.count, input.names.checks
        );
        self.sheet.paragraph(self.row, 0, LAST, Style::Wrapped, text);
        self.row += 2;
    }

    fn warnings(&mut self, input: &AuditInput<'_>) {
        let mut texts: Vec<String> = Vec::new();
        for problem in input.problems {
            let hint = problem.hint.as_ref().map(|hint| format!(" Try: {hint}")).unwrap_or_default();
            texts.push(format!("{problem}{hint}"));
        }
        if texts.is_empty() {
            texts.push("None.".to_owned());
        }
        self.list("Warnings", &texts);
    }
}

/// Every rate of return in words, and where their number could not be settled.
fn rates_of_return(outcome: &ChoiceOutcome) -> String {
    if outcome.endless {
        return ENDLESS_IRR.to_owned();
    }
    let percent = |rate: f64| format!("{:.4}%", rate * 100.0);
    let found = outcome.irr.iter().map(|&rate| percent(rate));
    let open = outcome.irr_unresolved.iter().map(|&(low, high)| {
        format!("none, one or several at {} to {} (the flows do not settle it)", percent(low), percent(high))
    });
    let all: Vec<String> = found.chain(open).collect();
    if all.is_empty() { NO_IRR.to_owned() } else { all.join("; ") }
}

fn is_factor(input: &AuditInput<'_>, cell: &super::TargetCell) -> bool {
    let choice = &input.appraisal.choices[cell.choice];
    let rows = input.outcomes[cell.choice].factors.len();
    let first = choice.targets.iter().position(|t| t.role == TargetRole::Factor && t.held.len() == rows);
    first == Some(cell.target)
}

fn table_value(input: &AuditInput<'_>, k: usize, c: usize) -> Cached {
    let outcome = &input.outcomes[c];
    let (a, i) = (&outcome.absolute, outcome.increment.unwrap_or_default());
    let text_or = |value: Option<f64>, text: &str| value.map_or(Cached::Text(text.into()), Cached::Number);
    Cached::Number(match k {
        0 => a.costs,
        1 => a.benefits,
        2 => a.benefits - a.costs,
        3 => a.pv_costs,
        4 => a.pv_benefits,
        5 => a.npv,
        6 => i.pv_costs,
        7 => i.pv_benefits,
        8 => i.npv,
        9 => return text_or(outcome.totals().ratio, no_ratio(outcome)),
        10 => return text_or(outcome.totals().annual, crate::formulas::NO_ANNUAL),
        _ => outcome.annuity,
    })
}

/// The verdict cell as the text of its defined name.
pub(super) fn verdict_text(sheet: &str, cell: Cell) -> String {
    let range: Range = one(cell);
    refer("", &SheetRange { sheet: sheet.to_owned(), range })
}
