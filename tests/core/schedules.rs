//! The built-in schedules against the bands read in the published documents, and what a schedule file may hold.
//!
//! `schedule-bands.csv` and `schedule-points.csv` hold the figures read there; the last column of each row names the
//! document, whose title, place and address stand in the schedule's own file.
use hence_core::{
    Band, Catalogue, Compounding, Edge, HorizonRule, Position, PriceBasis, Schedule, ScheduleStatus, Spec,
    Timing,
};
use std::collections::{BTreeMap, BTreeSet};

/// The rows of a table by the id in their first column, without comments and heading.
pub fn rows(text: &'static str) -> BTreeMap<&'static str, Vec<Vec<&'static str>>> {
    let mut groups: BTreeMap<&str, Vec<Vec<&str>>> = BTreeMap::new();
    for line in text.lines().filter(|line| !line.starts_with('#')).skip(1) {
        let cells: Vec<&str> = line.split(',').collect();
        groups.entry(cells[0]).or_default().push(cells[1..].to_vec());
    }
    groups
}

/// The curve that the rows of one schedule say, built without the rate line.
fn published(rows: &[Vec<&str>]) -> Spec {
    let rate = |row: &[&str]| row[2].parse::<f64>().unwrap();
    if let [row] = rows {
        assert_eq!((row[0], row[1], row[3]), ("0", "", "single"));
        return Spec::Flat { rate: rate(row), compounding: Compounding::Yearly };
    }
    let mut next = 0;
    let bands = rows.iter().map(|row| {
        assert_eq!((row[0].parse(), row[3]), (Ok(next), "forward"), "bands follow on each other from year 0");
        let last = row[1].parse::<i32>().ok();
        next = last.unwrap_or(i32::MAX - 1) + 1;
        Band { value: rate(row), to: last.map(|last| Edge::Offset(f64::from(last))) }
    });
    Spec::Bands { bands: bands.collect(), edges_from: None }
}

#[test]
fn every_band_is_as_published() {
    let catalogue = Catalogue::builtin();
    let bands = rows(include_str!("schedule-bands.csv"));
    let points = rows(include_str!("schedule-points.csv"));
    for (id, rows) in &bands {
        assert_eq!(catalogue.get(id).map(Schedule::spec), Some(&published(rows)), "{id}");
    }
    for (id, rows) in &points {
        let points = rows.iter().map(|row| (row[0].parse().unwrap(), row[1].parse().unwrap())).collect();
        let spec = Spec::HorizonPoints { points, rule: HorizonRule::ByLength };
        assert_eq!(catalogue.get(id).map(Schedule::spec), Some(&spec), "{id}");
    }
    // No schedule without figures to hold it against.
    let known: BTreeSet<&str> = bands.keys().chain(points.keys()).copied().collect();
    let built_in: BTreeSet<&str> = catalogue.schedules().iter().map(|schedule| schedule.id()).collect();
    assert_eq!(built_in, known);
}

#[test]
fn every_file_is_compiled_in_under_its_own_name() {
    let folder = concat!(env!("CARGO_MANIFEST_DIR"), "/src/schedules");
    let files: BTreeSet<String> = std::fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .collect();
    let catalogue = Catalogue::builtin();
    let listed: BTreeSet<String> =
        catalogue.schedules().iter().map(|schedule| format!("{}.toml", schedule.id())).collect();
    assert_eq!(files, listed);
    for schedule in catalogue.schedules() {
        assert_eq!(schedule.file(), format!("{}.toml", schedule.id()));
        assert!(schedule.is_builtin());
    }
}

#[test]
fn built_in_schedules_are_cited_and_their_companions_exist() {
    let catalogue = Catalogue::builtin();
    let ids: Vec<&str> = catalogue.schedules().iter().map(|schedule| schedule.id()).collect();
    assert!(ids.is_sorted());
    for schedule in catalogue.schedules() {
        let id = schedule.id();
        assert!(schedule.address().starts_with("http"), "{id}");
        assert!(schedule.source().contains(schedule.title()) && schedule.source().contains(schedule.place()));
        assert_eq!(schedule.is_complete(), schedule.missing().is_none(), "{id}");
        if let Some((companion, beyond)) = schedule.companion() {
            assert!(catalogue.get(companion).is_some(), "{id}");
            assert!(beyond > 0.0);
        }
    }
    assert_eq!(catalogue.get("uk-2026").unwrap().companion(), Some(("uk-2026-sensitivity", 50.0)));
}

#[test]
fn what_was_read_in_another_bodys_print_is_marked() {
    // The Green Book of February 2026 was read in the Department for Transport's print of its table.
    let catalogue = Catalogue::builtin();
    let marked: Vec<&str> = catalogue
        .schedules()
        .into_iter()
        .filter(|schedule| schedule.is_second_hand())
        .map(Schedule::id)
        .collect();
    assert_eq!(marked, ["uk-2026", "uk-2026-health", "uk-2026-sensitivity"]);
}

const VALID: &str = r#"
id = "house-rate"
title = "House guidance"
body = "Our board"
year = 2024
place = "section 3"
address = ""
line = "3% to 40, 2% after"
timing = "flows middle"
prices = "nominal"
status = "current"
complete = true
checked = "both bands"
"#;

#[test]
fn a_valid_schedule_is_read_whole() {
    let schedule = Schedule::parse("house.toml", VALID).unwrap();
    assert_eq!(
        (schedule.id(), schedule.title(), schedule.body()),
        ("house-rate", "House guidance", "Our board")
    );
    assert_eq!((schedule.year(), schedule.place(), schedule.address()), (2024, "section 3", ""));
    assert_eq!(schedule.source(), "House guidance, Our board, 2024, section 3");
    assert_eq!(schedule.timing(), Some(Timing { flows: Position::Middle, base: Position::End }));
    assert_eq!((schedule.prices(), schedule.status()), (Some(PriceBasis::Nominal), ScheduleStatus::Current));
    assert_eq!((schedule.checked(), schedule.notes(), schedule.file()), ("both bands", "", "house.toml"));
    assert!(!schedule.is_second_hand() && !schedule.is_builtin() && schedule.companion().is_none());
}

#[test]
fn tables_and_growth_by_year() {
    let with = |curve: &str| {
        let text = VALID.replace("line = \"3% to 40, 2% after\"", "");
        Schedule::parse("house.toml", &format!("{text}\n{curve}"))
    };
    let table = with("table = [[0, 1], [10, 0.7], [30.5, 0.3]]").unwrap();
    assert_eq!(table.spec(), &Spec::Table(vec![(0.0, 1.0), (10.0, 0.7), (30.5, 0.3)]));
    let growth = "[growth_by_year]\nfirst = 2026\ngrowth = [0.02, -0.01]\nafter = 0.015\npreference = 0.01\n\
                  elasticity = 2\nexact = true";
    let band = |value, to| Band { value, to };
    let path = |one, two| vec![band(0.02, Some(one)), band(-0.01, Some(two)), band(0.015, None)];
    let ramsey = |growth| Spec::Ramsey {
        preference: 0.01,
        hazard: 0.0,
        elasticity: 2.0,
        growth,
        exact: true,
        compounding: Compounding::Yearly,
    };
    assert_eq!(with(growth).unwrap().spec(), &ramsey(path(Edge::Year(2026), Edge::Year(2027))));
    let offsets = growth.replace("2026", "1");
    assert_eq!(with(&offsets).unwrap().spec(), &ramsey(path(Edge::Offset(1.0), Edge::Offset(2.0))));

    for (curve, message) in [
        ("", "give exactly one of `line`, `table`, `growth_by_year`, `persistent_growth` and `regimes`"),
        ("table = []", "table: the first pair must be [0, 1]"),
        ("table = [[0, 0.9]]", "table: the first pair must be [0, 1]"),
        ("table = [[0, 1]]", "table: there must be a second pair"),
        ("table = [[0, 1], [5, 0.9], [5, 0.8]]", "table: pair 3 is [5, 0.8]"),
        ("table = [[0, 1], [5, 0]]", "table: pair 2 is [5, 0]"),
        ("table = [[0, 1], [nan, 0.5]]", "table: pair 2"),
        (&growth.replace("2026", "7"), "growth_by_year: first is 7"),
        (&growth.replace("2026", "9999"), "growth_by_year: first is 9999"),
        (&growth.replace("2026", "-2147483648"), "growth_by_year: first is -2147483648"),
        (&growth.replace("[0.02, -0.01]", "[]"), "growth_by_year: growth is empty"),
        (&growth.replace("-0.01", "inf"), "growth_by_year: every number must be finite"),
        (&format!("table = [[0, 1]]\n{growth}"), "give exactly one of"),
    ] {
        let error = with(curve).expect_err(curve);
        assert!(error.message().contains(message), "{curve}: {error}");
    }
}

#[test]
fn a_wrong_field_is_named_with_its_file() {
    for (from, to, message) in [
        ("id = \"house-rate\"", "id = \"House rate\"", "id: `House rate` is no id"),
        ("id = \"house-rate\"", "id = \"3-5\"", "id: `3-5` is no id"),
        ("id = \"house-rate\"", "id = \"a--b\"", "id: `a--b` is no id"),
        ("title = \"House guidance\"", "title = \" \"", "title: is empty"),
        ("body = \"Our board\"", "", "missing field `body`"),
        ("year = 2024", "year = 24", "year: is 24, allowed 1000 to 9999"),
        ("year = 2024", "year = \"2024\"", ", line 5: invalid type"),
        (
            "line = \"3% to 40, 2% after\"",
            "line = \"3,5%\"",
            "line: expected a decimal point, found a decimal comma at character 2; try 3.5%",
        ),
        ("line = \"3% to 40, 2% after\"", "line = \"3%; flows end\"", "line: timing stands in the line"),
        ("line = \"3% to 40, 2% after\"", "line = \"uk-2003\"", "line: "),
        ("timing = \"flows middle\"", "timing = \"flows often\"", "timing: expected `start`"),
        ("timing = \"flows middle\"", "timing = \"exact\"", "timing: expected `flows` or `base`"),
        ("prices = \"nominal\"", "prices = \"mixed\"", ", line 10: unknown variant `mixed`"),
        ("status = \"current\"", "status = \"old\"", ", line 11: unknown variant `old`"),
        ("complete = true", "complete = false", "missing: say what is missing"),
        ("complete = true", "complete = true\nmissing = \"x\"", "missing: say what is missing"),
        ("complete = true", "complete = true\ncolour = 1", ", line 13: unknown field `colour`"),
        (
            "complete = true",
            "complete = true\ncompanion = { id = \"X\", beyond = 50 }",
            "companion.id: `X` is no id",
        ),
        (
            "complete = true",
            "complete = true\ncompanion = { id = \"x\", beyond = -1 }",
            "companion.beyond: is -1",
        ),
        ("checked = \"both bands\"", "checked = \"\"", "checked: is empty"),
        ("year = 2024", "year = = 2024", ", line 5: "),
    ] {
        assert!(VALID.contains(from), "{from}");
        let error = Schedule::parse("house.toml", &VALID.replace(from, to)).expect_err(to);
        assert_eq!((error.code(), error.argument()), ("bad-schedule", "schedule"));
        assert!(error.message().starts_with("house.toml"), "{to}: {error}");
        assert!(error.message().contains(message), "{to}: {error}");
    }
    assert!(Schedule::parse("big.toml", &"#".repeat((1 << 20) + 1)).is_err());
}

#[test]
fn user_schedules_come_first_and_must_fit_together() {
    let texts = |list: &[(&str, String)]| -> Vec<(String, String)> {
        list.iter().map(|(name, text)| (name.to_string(), text.clone())).collect()
    };
    let mine = VALID.replace("house-rate", "uk-2003");
    let catalogue =
        Catalogue::builtin().with(&texts(&[("a.toml", VALID.into()), ("b.toml", mine.clone())])).unwrap();
    assert_eq!(catalogue.replaced(), ["uk-2003"]);
    assert_eq!(catalogue.get("uk-2003").map(Schedule::file), Some("b.toml"));
    assert_eq!(catalogue.schedules().len(), Catalogue::builtin().schedules().len() + 1);
    assert!(Catalogue::builtin().get("house-rate").is_none());

    let twice =
        Catalogue::builtin().with(&texts(&[("a.toml", VALID.into()), ("b.toml", VALID.into())])).unwrap_err();
    assert_eq!(
        (twice.index(), twice.message()),
        (Some(1), "b.toml: id: `house-rate` is the id of `a.toml` too")
    );
    let companion =
        VALID.replace("complete = true", "complete = true\ncompanion = { id = \"none\", beyond = 50 }");
    let error = Catalogue::builtin().with(&texts(&[("a.toml", companion.clone())])).unwrap_err();
    assert_eq!((error.index(), error.code()), (Some(0), "bad-schedule"));
    assert!(error.message().contains("companion.id: no schedule `none` is known"), "{error}");
    // A companion may stand in a later text.
    let later = VALID.replace("house-rate", "none");
    assert!(Catalogue::default().with(&texts(&[("a.toml", companion), ("b.toml", later)])).is_ok());
}
