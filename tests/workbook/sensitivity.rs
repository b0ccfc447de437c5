//! The sensitivity sheet, and comparisons of workbooks whose flows go on after their last year.

use hence_core::{Catalogue, Parameter};
use hence_workbook::compare::{CompareRequest, Comparison, Moved, compare};
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::patch::CellWrite;
use hence_workbook::sheets::VERDICT_AGREES;

use crate::libreoffice::books;
use crate::libreoffice::cells::{Cells, Stored, cells, changed, package, verdict};
use crate::libreoffice::office::{Recalculate, saved, soffice};
use crate::small::Small;

const SHEET: &str = "Audit sensitivity";

/// A mine: an outlay, income, and the restoration of the site.
fn mine(basis: &str) -> Small {
    let cells = format!(
        "A1: 'Base | 2026\nA2: 'Basis | '{basis}\nA4: 'Year | 2026 | 2027 | 2028\nA5: 'Works | 350 | 0 | 620\n\
         A6: 'Ore | 0 | 950 | 0\nA8: 'Net present value"
    );
    Small::default().sheet("Mine", &cells).names(
        "hence_base B1, hence_basis B2, hence_years B4:D4, hence_cost_works B5:D5, hence_benefit_ore B6:D6, hence_npv B8",
    )
}

fn filled(bytes: &[u8], against: &[&str]) -> Vec<u8> {
    let against = against.iter().map(|line| (*line).to_owned()).collect();
    let request = FillRequest { against, ..FillRequest::default() };
    fill(&package(bytes), &request, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}")).bytes
}

fn compared(book: &Small) -> Comparison {
    let request = CompareRequest::default();
    compare(&package(&book.bytes()), &request, &Catalogue::builtin())
        .unwrap_or_else(|error| panic!("{error}"))
}

/// The rows of the sheet whose first cells are these texts: the numbers and texts after them.
fn rows(cells: &Cells, first: &[&str]) -> Vec<Vec<Stored>> {
    let row = |row: u32| -> Vec<Stored> {
        let own = cells.iter().filter(|((sheet, cell), _)| sheet == SHEET && cell.row == row);
        own.map(|(_, held)| held.value.clone()).collect()
    };
    let begins = |row: &Vec<Stored>| {
        first.iter().enumerate().all(|(i, text)| row.get(i) == Some(&Stored::Text((*text).to_owned())))
    };
    (0..200).map(row).filter(begins).map(|row| row[first.len()..].to_vec()).collect()
}

fn number(stored: &Stored) -> f64 {
    match stored {
        Stored::Number(x) => *x,
        other => panic!("{other:?} is no number"),
    }
}

fn text(stored: &Stored) -> &str {
    match stored {
        Stored::Text(text) => text,
        other => panic!("{other:?} is no text"),
    }
}

#[test]
fn the_sheet_tells_other_rates_switching_values_streams_and_the_derivation() {
    let bytes = filled(&mine("preference 0.5%, hazard 1%, elasticity 1, growth 2%").bytes(), &["4%"]);
    assert_eq!(verdict(&bytes), VERDICT_AGREES);
    let cells = cells(&bytes);
    let npv = |rate: f64| -350.0 + 950.0 / (1.0 + rate) - 620.0 / (1.0 + rate).powi(2);
    let near = |found: &Stored, due: f64| assert!((number(found) - due).abs() < 1e-9, "{found:?}, due {due}");
    let declared = rows(&cells, &["Declared: preference 0.5%, hazard 1%, elasticity 1, growth 2%"]);
    near(&declared[0][0], npv(0.035));
    for (words, rate) in [
        ("Declared, every rate a point lower (of a Ramsey basis its preference)", 0.025),
        ("Declared, every rate a point higher (of a Ramsey basis its preference)", 0.045),
        ("Against: 4%", 0.04),
    ] {
        let row = &rows(&cells, &[words])[0];
        near(&row[0], npv(rate));
        // Of one option alone none is called the best.
        assert_eq!((row.len(), text(&row[1])), (2, "not independently checked"));
    }
    assert_eq!(rows(&cells, &["Basis", "Mine", "Checked"]).len(), 1);
    // The two rates of the mine, in every parameter, each put back: value, distance from zero, allowed, result.
    let root = (950.0f64 * 950.0 - 4.0 * 350.0 * 620.0).sqrt();
    let rates = [(950.0 - root) / 700.0 - 1.0, (950.0 + root) / 700.0 - 1.0];
    for (parameter, due) in [
        ("rate", vec![rates[0], rates[1]]),
        ("preference", vec![rates[0] - 0.03, rates[1] - 0.03]),
        ("elasticity", vec![(rates[0] - 0.015) / 0.02]),
        ("growth", vec![rates[0] - 0.015, rates[1] - 0.015]),
    ] {
        let found = rows(&cells, &["Mine", "zero", parameter]);
        assert_eq!(found.len(), due.len(), "{parameter}: {found:?}");
        for (row, due) in found.iter().zip(due) {
            assert!((number(&row[0]) - due).abs() < 1e-12, "{parameter}: {row:?}, due {due}");
            assert!(number(&row[1]) <= number(&row[2]) && number(&row[2]) < 1e-5, "{parameter}: {row:?}");
            assert_eq!(text(&row[3]), "zero");
        }
    }
    // Streams, the larger first: side, in the net, a tenth less and more, the multiplier.
    let (ore, works) = (950.0 / 1.035, -350.0 - 620.0 / (1.035 * 1.035));
    for (name, side, value) in [("works", "cost", works), ("ore", "benefit", ore)] {
        let row = &rows(&cells, &[name, side])[0];
        near(&row[0], value);
        near(&row[1], -0.1 * value);
        near(&row[2], 0.1 * value);
        near(&row[3], 1.0 - (ore + works) / value);
    }
    // The derivation: 0.5% + 1% + 1 x 2%, and the forward rate on Discounting.
    near(&rows(&cells, &["Wealth effect"])[0][0], 0.02);
    let rate = &rows(&cells, &["Rate, compounded yearly"])[0];
    near(&rate[0], 0.035);
    assert_eq!((number(&rate[1]), text(&rate[2])), (0.035, "agrees"));
}

#[test]
fn every_kind_of_rate_is_derived() {
    for (basis, label, due) in [
        (
            "preference 1%, elasticity 2, growth 2%; exact",
            "Rate, compounded yearly",
            1.01 * 1.02 * 1.02 - 1.0,
        ),
        ("preference 1%, elasticity 2, growth 2%; continuous", "Rate, compounded yearly", 0.05f64.exp_m1()),
        ("preference 1%, elasticity 2, growth 2% sd 3.6%", "Precautionary effect", -3.0 * 0.036 * 0.036),
        ("preference 1%, elasticity 2, log growth 2% sd 3.6%", "Precautionary effect", -2.0 * 0.036 * 0.036),
        (
            "preference 1%, elasticity 2, growth 2% to 1, 1% after",
            "Rate, after year 1, compounded yearly",
            0.03,
        ),
    ] {
        let cells = cells(&filled(&mine(basis).bytes(), &[]));
        let row = &rows(&cells, &[label])[0];
        assert!((number(&row[0]) - due).abs() < 1e-12, "{basis}: {row:?}, due {due}");
        let rates = (0..200).flat_map(|_| rows(&cells, &["Rate, compounded yearly"])).take(1);
        for row in rates {
            assert_eq!(text(&row[2]), "agrees", "{basis}");
        }
    }
    // A basis of rates says that it is one.
    let cells = cells(&filled(&mine("3.5%").bytes(), &[]));
    let words = "The basis states rates, not the preference, elasticity and growth that they come from.";
    assert_eq!(rows(&cells, &[words]).len(), 1);
}

/// A flow is changed in LibreOffice: the live rows follow, and the switching values say that they have moved.
#[test]
fn the_sheet_is_live() {
    let Some(soffice) = soffice() else { return };
    let first = filled(&mine("3.5%").bytes(), &[]);
    let edited = changed(&first, "Mine", &[("C6", CellWrite::Number(1000.0))]);
    let back = saved(&soffice, &[("mine.xlsx".to_owned(), edited)], Recalculate::All);
    let cells = cells(&back["mine.xlsx"]);
    let found = rows(&cells, &["Mine", "zero", "rate"]);
    assert_eq!(found.iter().map(|row| text(&row[3])).collect::<Vec<_>>(), ["moved since", "moved since"]);
    let ore = &rows(&cells, &["ore", "benefit"])[0];
    assert!((number(&ore[0]) - 1000.0 / 1.035).abs() < 1e-9, "{ore:?}");
    let npv = -350.0 + 1000.0 / 1.035 - 620.0 / (1.035 * 1.035);
    assert!((number(&ore[3]) - (1.0 - npv / (1000.0 / 1.035))).abs() < 1e-9, "{ore:?}");
}

/// Flows for ever are part of the search; of two options with the same tail the tail cancels.
#[test]
fn flows_for_ever_are_compared() {
    let book = |second: &str| {
        let cells = format!(
            "A1: 'Base | 2026\nA2: 'Basis | '4%\nA3: 'Tail | 'growing 1%, for ever\nA4: 'Year | 2026 | 2027\n\
             A5: 'Works | 100 | 0\nA6: 'Rent | 0 | 5\n{second}\nA9: 'Net present value"
        );
        Small::default().sheet("Plan", &cells)
    };
    let names = "hence_base B1, hence_basis B2, hence_years B4:C4, hence_tail_rent B3";
    let one =
        book("").names(&format!("{names}, hence_cost_works B5:C5, hence_benefit_rent B6:C6, hence_npv B9"));
    let found = compared(&one);
    let rate = |found: &Comparison, option: usize, against: Option<usize>| {
        let moved = Moved::Parameter(Parameter::Rate);
        let entry = found
            .switching
            .iter()
            .find(|entry| entry.option == option && entry.against == against && entry.moved == moved)
            .expect("an entry");
        assert!(entry.unresolved.is_empty(), "{entry:?}");
        entry.values.clone()
    };
    // 5 a year from 2027 growing by 1% is worth 5/(r - 1%), which is 100 at 6%.
    let values = rate(&found, 0, None);
    assert!(values.len() == 1 && (values[0] - 0.06).abs() < 1e-12, "{values:?}");
    // A second option that costs 10 more at first and 11 less a year later, with the same rent: they swap at 10%.
    let two = book("A7: 'Works | 110 | -11").names(&format!(
        "{names}, hence_cost_works__small B5:C5, hence_benefit_rent__small B6:C6, hence_cost_works__large B7:C7, \
         hence_benefit_rent__large B6:C6, hence_npv__small B9, hence_npv__large C9"
    ));
    let found = compared(&two);
    let values = rate(&found, 0, Some(1));
    assert!(values.len() == 1 && (values[0] - 0.1).abs() < 1e-12, "{values:?}");
}

/// The flat rates of a workbook with a tail have no live formula, and say why.
#[test]
fn a_tail_is_named_where_it_keeps_a_row_from_being_live() {
    let cells = cells(&filled(&books::options().bytes(), &[]));
    let said = cells.iter().filter(|((sheet, _), held)| {
        sheet == SHEET && held.value == Stored::Text("flows follow the last year".into())
    });
    assert!(said.count() >= 9);
}

/// Growth by bands: each value is put back band by band, live, and LibreOffice comes to the same; where every year has a
/// rate of its own it is put back by the second route at the fill.
#[test]
fn values_under_a_path_of_growth_have_a_second_route() {
    let live = [
        "preference 0.5%, elasticity 1, growth 2% to 1, 4% after",
        "preference 0.5%, hazard 1%, elasticity 1.5, growth 2% to 1, 1% after; exact",
        "preference 0.5%, elasticity 1.5, growth 2% to 1, 1% after; continuous; flows middle, base start",
        "preference 0.5%, elasticity 1.5, growth 2% sd 3%; flows averaged",
    ];
    let every_year = "preference 0.5%, elasticity 1.5, log growth 2% sd 3% persistence 0.5";
    let check = |cells: &Cells, basis: &str, result: &str| {
        let mut seen = 0;
        for parameter in ["rate", "preference", "elasticity", "growth"] {
            let none = Stored::Text("none".into());
            for row in rows(cells, &["Mine", "zero", parameter]).iter().filter(|row| row[0] != none) {
                assert!(number(&row[1]) <= number(&row[2]) && number(&row[2]) < 1e-5, "{basis}: {row:?}");
                let due = if parameter == "rate" { "zero" } else { result };
                assert_eq!(text(&row[3]), due, "{basis}, {parameter}");
                seen += 1;
            }
        }
        assert!(seen >= 6, "{basis}: {seen}");
    };
    let mut books = Vec::new();
    for (i, basis) in live.iter().enumerate() {
        let bytes = filled(&mine(basis).bytes(), &[]);
        check(&cells(&bytes), basis, "zero");
        books.push((format!("{i}.xlsx"), bytes));
    }
    check(&cells(&filled(&mine(every_year).bytes(), &[])), every_year, "zero at the fill");
    // As another basis beside the declared one it is put back just so.
    check(&cells(&filled(&mine("4%").bytes(), &[live[0]])), live[0], "zero");
    let Some(soffice) = soffice() else { return };
    let back = saved(&soffice, &books, Recalculate::All);
    for (i, basis) in live.iter().enumerate() {
        check(&cells(&back[&format!("{i}.xlsx")]), basis, "zero");
    }
}

/// Rent of 5 a year from 2027 on, for ever, where growth persists: summed here year by year.
#[test]
fn flows_for_ever_are_filled_where_growth_persists() {
    let text = "A1: 'Base | 2026\nA2: 'Basis | 'preference 1%, elasticity 2, log growth 2% sd 1% persistence 0.8\n\
                 A3: 'Tail | 'for ever\nA4: 'Year | 2026 | 2027\nA5: 'Works | 100 | 0\nA6: 'Rent | 0 | 5\n\
                 A9: 'Net present value";
    let book = Small::default().sheet("Plan", text).names(
        "hence_base B1, hence_basis B2, hence_years B4:C4, hence_tail_rent B3, hence_cost_works B5:C5, \
         hence_benefit_rent B6:C6, hence_npv B9",
    );
    let (mut due, mut weight, mut log) = (-100.0, 0.0, 0.0);
    for _ in 0..4000 {
        weight = 1.0 + 0.8 * weight;
        log += -0.05 + 4.0 * 0.01f64.powi(2) * weight * weight / 2.0;
        due += 5.0 * f64::exp(log);
    }
    let bytes = filled(&book.bytes(), &[]);
    assert_eq!(verdict(&bytes), VERDICT_AGREES);
    let cells = cells(&bytes);
    let npv = cells.iter().find(|((sheet, cell), _)| sheet == "Plan" && cell.to_string() == "B9");
    let npv = number(&npv.expect("the cell").1.value);
    assert!((npv - due).abs() < 1e-9, "{npv}, due {due}");
    let found = compared(&book);
    for entry in found.switching.iter().filter(|entry| matches!(entry.moved, Moved::Parameter(_))) {
        assert!(!entry.values.is_empty() && entry.unresolved.is_empty() && entry.note.is_none(), "{entry:?}");
    }
}
