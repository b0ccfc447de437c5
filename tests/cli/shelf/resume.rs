//! Resumed runs: what is done is kept, by what is in it; what is not is made, to the byte as by an unbroken run.

use std::path::PathBuf;
use std::time::SystemTime;

use hence_workbook::package::{Changes, Package};

use super::{Shelf, password_protected, workbook};
use crate::{code, stderr, stdout};

const NAMES: [&str; 6] = ["a.xlsx", "b.xlsx", "c.xlsx", "d.xlsx", "sub/e.xlsx", "text.xlsx"];
const ASKED: [&str; 6] = ["--basis", "3%", "--ledger", "ledger.jsonl", "--summary", "summary.xlsx"];

/// A shelf that was filled but for one workbook, and its outputs and ledger.
fn done() -> Shelf {
    let shelf = Shelf::of(&NAMES);
    shelf.put("text.xlsx", b"Dear Sir");
    assert_eq!(code(&shelf.fill("out", &ASKED)), 1);
    assert_eq!(shelf.files("out").len(), 5);
    shelf
}

fn changed(path: PathBuf) -> SystemTime {
    path.metadata().unwrap().modified().unwrap()
}

#[test]
fn a_resumed_run_makes_what_is_not_as_it_would_make_it() {
    let shelf = done();
    let kept = ["ledger.jsonl", "summary.xlsx"].map(|name| shelf.path(name));
    let all = || (shelf.files("out"), kept.clone().map(|path| std::fs::read(path).unwrap()));
    let whole = all();
    let first = stdout(&shelf.fill("again", &ASKED[..2]));
    let refused = shelf.fill("out", &ASKED[..2]);
    assert_eq!(code(&refused), 1, "without --resume nothing that is there is replaced");
    assert!(stderr(&refused).contains("output-exists"), "{}", stderr(&refused));
    assert!(stderr(&refused).contains("6 workbooks: 0 filled\n"), "{}", stderr(&refused));
    let out = |name: &str| shelf.path("out").join(name);
    // One is gone, one cut short, one of an older basis; what a dead run left lies beside them, dates say nothing.
    std::fs::remove_file(out("b.audited.xlsx")).unwrap();
    let bytes = &whole.0["c.audited.xlsx"];
    std::fs::write(out("c.audited.xlsx"), &bytes[..bytes.len() / 2]).unwrap();
    assert_eq!(code(&shelf.fill("older", &["--basis", "4%"])), 1);
    std::fs::copy(shelf.path("older/d.audited.xlsx"), out("d.audited.xlsx")).unwrap();
    for name in [".hence-dead01.tmp", "sub/.hence-dead02.tmp"] {
        std::fs::write(out(name), "PK").unwrap();
    }
    shelf.put("a.xlsx", &workbook(0));
    let before = changed(out("a.audited.xlsx"));

    let resumed = shelf.fill("out", &[&ASKED[..], &["--resume"]].concat());
    assert_eq!(code(&resumed), 1, "{}", stderr(&resumed));
    assert!(stderr(&resumed).contains("3 filled, 2 filled before and kept"), "{}", stderr(&resumed));
    assert!(all() == whole, "the outputs, ledger and summary of an unbroken run");
    assert_eq!(stdout(&resumed), first.replace("again/", "out/"), "its report");
    assert_eq!(changed(out("a.audited.xlsx")), before, "what is done is left alone");
}

#[test]
fn a_changed_input_or_request_is_done_anew() {
    let shelf = done();
    let resume = [&ASKED[..], &["--resume"]].concat();
    shelf.put("b.xlsx", &workbook(77));
    let output = shelf.fill("out", &resume);
    assert!(stderr(&output).contains("1 filled, 4 filled before and kept"), "{}", stderr(&output));
    assert_eq!(code(&shelf.fill("new", &ASKED[..2])), 1);
    assert!(shelf.files("out") == shelf.files("new"));
    for more in
        [&["--write", "values"][..], &["--by", "R. Ostrey"], &["--as-of", "May"], &["--against", "2%"]]
    {
        let output = shelf.fill("out", &[&resume[..], more].concat());
        assert!(stderr(&output).contains("6 workbooks: 5 filled\n"), "{more:?}: {}", stderr(&output));
    }
    // The user's own schedules are part of what is asked for.
    let house = |rate: &str| {
        format!(
            "id = \"house\"\ntitle = \"House rules\"\nbody = \"Ostrey\"\nyear = 2026\nplace = \"1\"\naddress = \"\"\n\
             line = \"{rate}\"\nstatus = \"current\"\ncomplete = true\nchecked = \"an invented body\"\n"
        )
    };
    std::fs::create_dir(shelf.path("rules")).unwrap();
    for (rate, due) in [("3%", "5 filled\n"), ("3%", "0 filled, 5 filled before"), ("2%", "5 filled\n")] {
        std::fs::write(shelf.path("rules/house.toml"), house(rate)).unwrap();
        let output = shelf.fill("out", &["--basis", "house", "--schedules", "rules", "--resume"]);
        assert!(stderr(&output).contains(due), "{rate}: {}", stderr(&output));
    }
}

#[test]
fn what_a_person_did_to_an_output_is_not_lost() {
    let shelf = done();
    let path = shelf.path("out/a.audited.xlsx");
    let made = Package::open(&path).unwrap();
    let app = "docProps/app.xml";
    let mut bytes = made.part(app).unwrap().unwrap();
    bytes.extend(b"<!-- saved by another program -->");
    let saved =
        made.write(&Changes { replace: [(app.to_owned(), bytes)].into(), ..Changes::default() }).unwrap();
    std::fs::write(&path, &saved).unwrap();
    let refused = shelf.fill("out", &[&ASKED[..], &["--resume"]].concat());
    assert_eq!(code(&refused), 1);
    let text = stderr(&refused);
    assert!(text.contains("a.audited.xlsx is not as hence left it") && text.contains("--force"), "{text}");
    assert!(text.contains("0 filled, 4 filled before"), "{text}");
    assert!(std::fs::read(&path).unwrap() == saved);
    let forced = shelf.fill("out", &[&ASKED[..], &["--resume", "--force"]].concat());
    assert!(stderr(&forced).contains("1 filled, 4 filled before"), "{}", stderr(&forced));
    assert!(std::fs::read(&path).unwrap() == made.bytes());
}

#[test]
fn what_is_no_output_of_hence_is_not_replaced_as_a_damaged_one() {
    let shelf = done();
    let path = shelf.path("out/a.audited.xlsx");
    let made = std::fs::read(&path).unwrap();
    let resume = [&ASKED[..2], &["--resume"]].concat();
    let mut otherwise_damaged = made.clone();
    let middle = otherwise_damaged.len() / 2;
    otherwise_damaged[middle] ^= 0xff;
    let other_end = [&made[..middle], b"and more"].concat();
    for theirs in [
        password_protected(),
        b"Dear Sir".to_vec(),
        b"PK\x03\x04 and so on".to_vec(),
        otherwise_damaged,
        other_end,
    ] {
        std::fs::write(&path, &theirs).unwrap();
        let refused = shelf.fill("out", &resume);
        assert_eq!(code(&refused), 1);
        let text = stderr(&refused);
        assert!(text.contains("a.audited.xlsx is not as hence left it"), "{text}");
        assert!(text.contains("(output-changed)"), "{text}");
        assert!(std::fs::read(&path).unwrap() == theirs);
    }
    // What a full disk leaves: the beginning, or nothing.
    for length in [0, 1, middle, made.len() - 1] {
        std::fs::write(&path, &made[..length]).unwrap();
        let resumed = shelf.fill("out", &resume);
        assert!(stderr(&resumed).contains("1 filled, 4 filled before"), "{}", stderr(&resumed));
        assert!(std::fs::read(&path).unwrap() == made);
    }
}

#[test]
fn only_the_ledger_and_summary_of_the_run_are_replaced() {
    let shelf = done();
    let (ledger, summary) = (shelf.path("ledger.jsonl"), shelf.path("summary.xlsx"));
    let lines = std::fs::read_to_string(&ledger).unwrap();
    let made = Package::open(&summary).unwrap();
    let app = "docProps/app.xml";
    let mut bytes = made.part(app).unwrap().unwrap();
    bytes.extend(b"<!-- saved by another program -->");
    let edited = Changes { replace: [(app.to_owned(), bytes)].into(), ..Changes::default() };
    let edited = made.write(&edited).unwrap();
    // A run over another shelf.
    let other = Shelf::of(&["other.xlsx"]);
    assert_eq!(code(&other.fill("out", &ASKED)), 0);
    let others = |name: &str| std::fs::read(other.path(name)).unwrap();
    for (path, text) in [
        (&ledger, b"Dear Sir".to_vec()),
        (&ledger, (lines.clone() + "my own note\n").into_bytes()),
        (&ledger, others("ledger.jsonl")),
        (&summary, edited),
        (&summary, others("summary.xlsx")),
        (&summary, lines.clone().into_bytes()),
    ] {
        let before = std::fs::read(path).unwrap();
        std::fs::write(path, &text).unwrap();
        let refused = shelf.fill("out", &[&ASKED[..], &["--resume"]].concat());
        assert_eq!(code(&refused), 2);
        let name = path.file_name().unwrap().to_str().unwrap();
        assert!(stderr(&refused).contains(&format!("{name} exists already")), "{}", stderr(&refused));
        assert!(std::fs::read(path).unwrap() == text);
        std::fs::write(path, before).unwrap();
    }
    assert_eq!(code(&shelf.fill("out", &[&ASKED[..], &["--resume"]].concat())), 1, "theirs are replaced");
}
