//! What a basis text stands for: a number, a rate line or a schedule, with its warnings and its words.
use hence_core::{Basis, CAUTION, Catalogue, Compounding, Position, PriceBasis, Spec, Timing};

fn parse(text: &str) -> hence_core::Result<Basis> {
    Basis::parse(text, &Catalogue::builtin())
}

/// The built-in schedules and one that states its timing.
fn with_timed() -> Catalogue {
    let text = r#"
        id = "timed"
        title = "Timed"
        body = "Board"
        year = 2024
        place = "page 1"
        address = ""
        line = "2%"
        timing = "flows middle, base start"
        status = "current"
        complete = true
        checked = "all"
    "#;
    Catalogue::builtin().with(&[("timed.toml".into(), text.into())]).unwrap()
}

#[test]
fn numbers_and_lines() {
    let flat = |rate| Spec::Flat { rate, compounding: Compounding::Yearly };
    for (text, rate) in [("0.035", 0.035), (" 3.5% ", 0.035), ("1", 1.0), ("-0.25", -0.25)] {
        assert_eq!(parse(text).map(|basis| basis.spec().clone()), Ok(flat(rate)), "{text}");
    }
    assert_eq!(parse("3.5%; flows middle").unwrap().canonical(), "3.5%; flows middle");
    assert_eq!(Basis::from_rate(-0.0).unwrap().canonical(), "0%");
    assert_eq!(Basis::from_rate(1.0).unwrap(), parse("100%").unwrap());
}

#[test]
fn number_cells_have_limits() {
    for (rate, code) in [
        (-0.5, "rate-range"),
        (-0.500001, "rate-range"),
        (1.0000001, "rate-range"),
        (150.0, "rate-range"),
        (f64::NAN, "not-finite"),
        (f64::INFINITY, "not-finite"),
    ] {
        assert_eq!(Basis::from_rate(rate).unwrap_err().code(), code, "{rate}");
    }
    assert!(Basis::from_rate(-0.499999).is_ok());
    assert_eq!(Basis::from_rate(2.25).unwrap_err().hint(), Some("enter 2.25% or 0.0225"));
    assert_eq!(Basis::from_rate(150.0).unwrap_err().hint(), None);
}

#[test]
fn ids_in_any_case_with_timing_after_them() {
    let basis = parse("  UK-2003 ;Flows Middle").unwrap();
    assert_eq!(basis.schedule().map(|schedule| schedule.id()), Some("uk-2003"));
    assert_eq!(basis.timing(), Some(Timing { flows: Position::Middle, base: Position::End }));
    assert_eq!(basis.canonical(), "uk-2003; flows middle");
    assert_eq!(parse(&basis.canonical()), Ok(basis));
    assert_eq!(parse("uk\u{2011}2003").unwrap().canonical(), "uk-2003");
    assert_eq!(parse("uk-2003").unwrap().timing(), None);
    let error = parse("uk-2003; exact").unwrap_err();
    assert_eq!((error.code(), error.at()), ("syntax", Some(9)));
    let error = parse(" uk-2003 flows middle").unwrap_err();
    assert_eq!((error.at(), error.hint()), (Some(8), Some("`uk-2003; flows middle`")));
}

#[test]
fn every_built_in_schedule_round_trips() {
    let catalogue = Catalogue::builtin();
    for schedule in catalogue.schedules() {
        let basis = parse(schedule.id()).unwrap();
        assert_eq!(basis.canonical(), schedule.id());
        assert_eq!(basis.spec(), schedule.spec());
        assert!(basis.words().ends_with(&format!("({})", schedule.source())));
        // The line says the same curve as the schedule does.
        assert_eq!(
            parse(&schedule.spec().to_string()).map(|line| line.spec().clone()),
            Ok(schedule.spec().clone())
        );
    }
}

#[test]
fn an_unknown_id_is_told_from_a_mistyped_line() {
    for (text, code, hint) in [
        ("uk-2030", "unknown-schedule", Some("`uk-2003`, `uk-2018` or `uk-2018-health`")),
        ("dk-2019; flows middle", "unknown-schedule", Some("`dk-2013` or `dk-2018`")),
        (
            "house",
            "unknown-schedule",
            Some("a rate line such as `3.5%`, or the id of a schedule file of your own"),
        ),
        ("gama", "syntax", Some("`gamma`")),
        ("gama mean 4% sd 3%", "syntax", Some("`gamma`")),
        ("3,5%", "syntax", Some("3.5%")),
        ("3.5", "rate-range", Some("enter 3.5% or 0.035")),
        ("", "syntax", None),
    ] {
        let error = parse(text).expect_err(text);
        assert_eq!((error.code(), error.hint(), error.argument()), (code, hint, "basis"), "{text}: {error}");
    }
    assert_eq!(parse("  xx-1").unwrap_err().at(), Some(2));
}

#[test]
fn the_line_beats_the_schedule_position_by_position() {
    let catalogue = with_timed();
    let timing = |text: &str| Basis::parse(text, &catalogue).unwrap().timing().unwrap();
    assert_eq!(timing("timed"), Timing { flows: Position::Middle, base: Position::Start });
    assert_eq!(timing("timed; base end"), Timing { flows: Position::Middle, base: Position::End });
    let warned = Basis::parse("timed; base end", &catalogue).unwrap().warnings();
    assert_eq!(
        warned,
        ["the line's timing (base end) is used, not that of timed (flows middle, base start)"]
    );
    assert!(Basis::parse("timed; flows middle", &catalogue).unwrap().warnings().is_empty());
}

#[test]
fn warnings_of_the_source() {
    let warnings = |text: &str| parse(text).unwrap().warnings().join("\n");
    assert!(warnings("3.5%").is_empty());
    assert!(warnings("uk-2003").starts_with("uk-2003 is superseded"));
    assert!(warnings("uk-2018").contains("uk-2018 is not complete: its table stops at year 125"));
    assert!(warnings("uk-2026").starts_with("uk-2026 is known second hand: "));
    assert!(warnings("echa-2011").is_empty());
}

#[test]
fn companion_and_prices_are_those_of_the_schedule() {
    let basis = parse("uk-2026").unwrap();
    assert_eq!(basis.companion(), Some(("uk-2026-sensitivity", 50.0)));
    assert_eq!(basis.price_basis(), Some(PriceBasis::Real));
    assert_eq!(parse("us-a94c-2000-nominal").unwrap().price_basis(), Some(PriceBasis::Nominal));
    assert_eq!(parse("3.5%").unwrap().companion(), None);
    assert_eq!(parse("3.5%").unwrap().price_basis(), None);
}

#[test]
fn words_say_the_curve_and_its_source() {
    for (text, words) in [
        ("3.5%", "3.5% a year (as stated, no published source)"),
        ("3.5% continuous", "3.5% a year, continuously compounded (as stated, no published source)"),
        (
            "uk-2003",
            "3.5% a year for years 0 to 30, then 3% to year 75, then 2.5% to year 125, then 2% to year 200, then 1.5% \
             to year 300, then 1% after; each rate compounds over the years of its own band (The Green Book: appraisal \
             and evaluation in central government, HM Treasury (UK), 2003, Annex 6, paragraphs 10 to 12, Table 6.1)",
        ),
        (
            "2.5% to 2070, 1.5% after",
            "2.5% a year to the end of 2070, then 1.5% after; each rate compounds over the years of its own band (as \
             stated, no published source)",
        ),
        (
            "preference 1%, hazard 0.5%, elasticity 2, growth 2%; exact",
            "the Ramsey rule with pure time preference 1%, hazard 0.5%, elasticity 2, growth 2%; in its exact form, a \
             year's factor being 1/((1+rho)(1+g)^eta) (as stated, no published source)",
        ),
        (
            "0.5 of (1%), 0.5 of (7% continuous)",
            "a weighted sum of factors: 0.5 of the factor at (1% a year), 0.5 of the factor at (7% a year, \
             continuously compounded) (as stated, no published source)",
        ),
    ] {
        assert_eq!(parse(text).unwrap().words(), words);
    }
    assert!(CAUTION.contains("set by the body that funds or reviews the appraisal"));
}
