//! Timing: every pair of positions, and the grammar of the text. Cases from the definition of the offset.

use hence_core::{ErrorKind, Position, TimedOffset, Timing, timing_sentence};

const WORDS: [(&str, Position); 4] = [
    ("start", Position::Start),
    ("middle", Position::Middle),
    ("end", Position::End),
    ("averaged", Position::Averaged),
];

#[test]
fn the_default_leaves_the_base_year_undiscounted() {
    assert_eq!(Timing::default().offset(0.0).unwrap(), TimedOffset::At(0.0));
    assert_eq!(Timing::default().to_string(), "flows end, base end");
}

#[test]
fn every_pair_of_positions_shifts_by_their_difference() {
    // Positions 0, 1/2 and 1; rows are flows, columns are bases at start, middle, end; three years after the base.
    let table = [[3.0, 2.5, 2.0], [3.5, 3.0, 2.5], [4.0, 3.5, 3.0]];
    for (row, &(_, flows)) in table.iter().zip(&WORDS) {
        for (&due, &(_, base)) in row.iter().zip(&WORDS) {
            assert_eq!(Timing { flows, base }.offset(3.0).unwrap(), TimedOffset::At(due), "{flows} {base}");
        }
    }
    let averaged = |base| Timing { flows: Position::Averaged, base }.offset(3.0).unwrap();
    assert_eq!(averaged(Position::Start), TimedOffset::Averaged(3.0, 4.0));
    assert_eq!(averaged(Position::Middle), TimedOffset::Averaged(2.5, 3.5));
    assert_eq!(averaged(Position::End), TimedOffset::Averaged(2.0, 3.0));
}

#[test]
fn an_averaged_factor_is_the_mean_of_both_ends() {
    let mean = TimedOffset::Averaged(0.0, 1.0).mean(|t| Ok(1.5_f64.powf(-t))).unwrap();
    assert_eq!(mean, (1.0 + 1.0 / 1.5) / 2.0);
}

#[test]
fn words_print_and_parse_back() {
    for (word, position) in WORDS {
        assert_eq!(position.to_string(), word);
        assert_eq!(word.to_uppercase().parse::<Position>().unwrap(), position);
        for (base_word, base) in &WORDS[..3] {
            let timing = Timing { flows: position, base: *base };
            assert_eq!(timing.to_string(), format!("flows {word}, base {base_word}"));
            assert_eq!(timing.to_string().parse::<Timing>().unwrap(), timing);
        }
    }
}

#[test]
fn a_missing_part_is_end() {
    let parse = |text: &str| text.parse::<Timing>().unwrap();
    assert_eq!(parse("flows middle"), Timing { flows: Position::Middle, base: Position::End });
    assert_eq!(parse("base start"), Timing { flows: Position::End, base: Position::Start });
    let both = Timing { flows: Position::Averaged, base: Position::Start };
    assert_eq!(parse("  Base   START ,FLOWS averaged"), both);
}

#[test]
fn errors_point_at_the_part() {
    let refused = |text: &str| {
        let error = text.parse::<Timing>().unwrap_err();
        (error.kind(), error.at(), error.message().to_string())
    };
    let (syntax, no_meaning) = (ErrorKind::Syntax, ErrorKind::NoMeaning);
    assert_eq!(refused(""), (syntax, Some(0), "found \"\", expected flows or base".into()));
    assert_eq!(
        refused("flows middle, basis end"),
        (syntax, Some(14), "found \"basis end\", expected flows or base".into())
    );
    assert_eq!(
        refused("flows mid"),
        (syntax, Some(0), "found \"mid\", allowed: start, middle, end, averaged".into())
    );
    assert_eq!(refused("flows end, flows end"), (syntax, Some(11), "flows is stated twice".into()));
    assert_eq!(
        refused("flows at end"),
        (syntax, Some(0), "found \"flows at end\", expected flows and one position".into())
    );
    let averaged = "the base is one moment and cannot be averaged, allowed: start, middle, end";
    assert_eq!(refused("base averaged"), (no_meaning, Some(0), averaged.into()));
    let built = Timing { flows: Position::End, base: Position::Averaged };
    assert_eq!(built.offset(0.0).unwrap_err().kind(), no_meaning);
}

#[test]
fn a_year_that_is_no_number_is_refused() {
    for year in [f64::NAN, f64::INFINITY] {
        let error = Timing::default().offset(year).unwrap_err();
        assert_eq!((error.kind(), error.argument()), (ErrorKind::NotFinite, "years_after_base"));
    }
}

#[test]
fn the_sentence_names_the_years_it_is_given() {
    assert_eq!(timing_sentence(&[("2026", 1.0)]), "a flow in 2026 has factor 1.0000");
    let sentence = timing_sentence(&[("2025/26", 0.982_946), ("2026/27", 0.949_706)]);
    assert_eq!(sentence, "a flow in 2025/26 has factor 0.9829, in 2026/27 0.9497");
    assert_eq!(timing_sentence(&[]), "");
}
