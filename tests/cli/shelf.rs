//! Runs over a shelf: folders are walked, one bad workbook never ends a run, and the outputs are those of single runs.

mod kill;
mod resume;

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use crate::books::plan;
use crate::{code, hence, stderr, stdout};

/// A folder with a shelf of workbooks in it.
pub struct Shelf {
    folder: tempfile::TempDir,
}

impl Shelf {
    /// A shelf with nothing on it.
    pub fn empty() -> Self {
        let shelf = Shelf { folder: tempfile::tempdir().expect("a temporary folder") };
        std::fs::create_dir(shelf.path("shelf")).expect("the shelf");
        shelf
    }

    /// Sound workbooks of these names, no two alike.
    pub fn of(names: &[&str]) -> Self {
        let shelf = Shelf::empty();
        for (i, name) in names.iter().enumerate() {
            shelf.put(name, &workbook(i));
        }
        shelf
    }

    /// Puts a file on it.
    pub fn put(&self, name: &str, bytes: &[u8]) {
        let path = self.path("shelf").join(name);
        std::fs::create_dir_all(path.parent().expect("a folder")).expect("the folder");
        std::fs::write(path, bytes).expect("the file");
    }

    /// A path in the folder that holds the shelf.
    pub fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    /// `hence fill shelf --out OUT ...`, within the folder.
    pub fn command(&self, out: &str, more: &[&str]) -> Command {
        let mut command = hence();
        command.current_dir(self.folder.path()).args(["fill", "shelf", "--out", out]).args(more);
        command.env("HENCE_TEST_MISHAPS", "1");
        command
    }

    /// Runs it.
    pub fn fill(&self, out: &str, more: &[&str]) -> Output {
        self.command(out, more).output().expect("the program starts")
    }

    /// Every file under a folder with its bytes.
    pub fn files(&self, name: &str) -> BTreeMap<String, Vec<u8>> {
        let mut files = BTreeMap::new();
        collect(&self.path(name), "", &mut files);
        files
    }

    /// The names of the files under a folder.
    pub fn names(&self, name: &str) -> Vec<String> {
        self.files(name).into_keys().collect()
    }
}

fn collect(folder: &Path, before: &str, files: &mut BTreeMap<String, Vec<u8>>) {
    let Ok(entries) = std::fs::read_dir(folder) else { return };
    for entry in entries {
        let entry = entry.expect("an entry");
        let name = format!("{before}{}", entry.file_name().to_str().expect("a name in UTF-8"));
        if entry.path().is_dir() {
            collect(&entry.path(), &format!("{name}/"), files);
        } else {
            files.insert(name, std::fs::read(entry.path()).expect("a file"));
        }
    }
}

/// A sound workbook: works of 1000 and a little more, so that no two are alike.
pub fn workbook(number: usize) -> Vec<u8> {
    plan(&[("B9", &(1000 + number).to_string())]).bytes().to_vec()
}

/// The lines of a ledger.
pub fn ledger(path: &Path) -> Vec<serde_json::Value> {
    let text = std::fs::read_to_string(path).expect("the ledger");
    text.lines().map(|line| serde_json::from_str(line).expect("a line of JSON")).collect()
}

#[test]
fn a_folder_is_filled_into_the_same_folders() {
    let shelf = Shelf::of(&["b.xlsx", "a.XLSX", "dams/deep/c.xlsx"]);
    shelf.put("read me.txt", b"not a workbook");
    let output = shelf.fill("out", &[]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert_eq!(shelf.names("out"), ["a.audited.XLSX", "b.audited.xlsx", "dams/deep/c.audited.xlsx"]);
    let text = stdout(&output);
    let places: Vec<_> = ["a.XLSX ->", "b.xlsx ->", "c.xlsx ->"].map(|name| text.find(name)).into();
    assert!(places.iter().all(Option::is_some) && places.is_sorted(), "in order of their names: {text}");
    // Works of 1000 to 1002, benefits of 600 in each of two years at 3.5%.
    for works in [1000.0, 1001.0, 1002.0] {
        let npv = format!("NPV {:.2}", 600.0 / 1.035 + 600.0 / 1.035_f64.powi(2) - works);
        assert!(text.contains(&npv), "{npv} in {text}");
    }
    assert!(stderr(&output).contains("3 workbooks: 3 filled"), "{}", stderr(&output));
    assert_eq!(shelf.names("shelf").len(), 4, "nothing is written beside the inputs");
}

#[test]
fn outputs_are_those_of_single_runs_whatever_the_number_of_jobs() {
    let names = ["a.xlsx", "b.xlsx", "c.xlsx", "dams/a.xlsx", "dams/b.xlsx"];
    let shelf = Shelf::of(&names);
    let asked = ["--basis", "3%", "--write", "values", "--by", "R. Ostrey"];
    let runs: Vec<Output> = ["1", "4"]
        .iter()
        .map(|jobs| shelf.fill(&format!("out{jobs}"), &[&asked[..], &["--jobs", jobs]].concat()))
        .collect();
    let (one, four) = (shelf.files("out1"), shelf.files("out4"));
    assert!(one.len() == 5 && one == four, "the same bytes");
    let words = |output: &Output| (code(output), stdout(output).replace("out4", "out1"), stderr(output));
    assert_eq!(words(&runs[0]), words(&runs[1]));
    for name in names {
        let single = shelf.path("single.xlsx");
        let book = shelf.path("shelf").join(name);
        let output = hence().arg("fill").arg(book).args(asked).arg("--out").arg(&single).output().unwrap();
        assert_eq!(code(&output), 0, "{}", stderr(&output));
        let made = name.replace(".xlsx", ".audited.xlsx");
        assert!(std::fs::read(&single).unwrap() == one[&made], "{name}");
        std::fs::remove_file(single).unwrap();
    }
}

#[test]
fn of_many_warnings_of_a_kind_the_first_are_told_and_the_rest_counted() {
    let shelf = Shelf::of(&["a.xlsx", "b.xlsx", "c.xlsx", "d.xlsx", "e.xlsx"]);
    let output = shelf.fill("out", &["--basis", "3%", "--ledger", "ledger.jsonl"]);
    assert_eq!(code(&output), 0, "warnings alone are no failure");
    let text = stderr(&output);
    assert_eq!(text.matches("(basis-overridden)").count(), 3, "{text}");
    assert!(text.contains("2 more warnings of the kind basis-overridden"), "{text}");
    assert!(!text.contains("blank-zero"), "{text}");
    for line in ledger(&shelf.path("ledger.jsonl")) {
        let codes: Vec<_> = line["problems"].as_array().unwrap().iter().map(|p| p["code"].clone()).collect();
        assert!(codes.contains(&"basis-overridden".into()), "{line}");
    }
}

#[test]
fn what_is_no_input_is_passed_over_and_told() {
    let shelf = Shelf::of(&["a.xlsx", "sub/b.xlsx"]);
    for name in ["~$a.xlsx", ".hidden.xlsx", ".git/c.xlsx", "old.audited.xlsx"] {
        shelf.put(name, b"not to be read");
    }
    // An output under another name is known by the sheets in it.
    assert_eq!(code(&shelf.fill("first", &[])), 0);
    std::fs::copy(shelf.path("first/a.audited.xlsx"), shelf.path("shelf/renamed.xlsx")).unwrap();
    // So is a summary.
    assert_eq!(code(&shelf.fill("first", &["--force", "--summary", "shelf/summary.xlsx"])), 0);
    // Outputs lie in the folder that is walked.
    for _ in 0..2 {
        let output = shelf.fill("shelf/out", &["--force"]);
        assert_eq!(code(&output), 0, "{}", stderr(&output));
        assert_eq!(shelf.names("shelf/out"), ["a.audited.xlsx", "sub/b.audited.xlsx"]);
        let text = stderr(&output);
        for part in [
            "skipped (a lock file of a spreadsheet program): shelf/~$a.xlsx",
            "skipped (hidden): shelf/.git, shelf/.hidden.xlsx",
            "skipped (an audited output): shelf/old.audited.xlsx",
            "skipped (it holds sheets made by hence): shelf/renamed.xlsx, shelf/summary.xlsx",
            "2 workbooks: 2 filled",
        ] {
            assert!(text.contains(part), "{part} is missing from:\n{text}");
        }
    }
}

#[cfg(unix)]
#[test]
fn what_has_no_end_is_not_waited_for() {
    let shelf = Shelf::of(&["a.xlsx"]);
    let made = Command::new("mkfifo").arg(shelf.path("shelf/pipe.xlsx")).status().expect("mkfifo runs");
    assert!(made.success());
    let output = shelf.fill("out", &["--time-limit", "60"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert!(stderr(&output).contains("skipped (no ordinary file): shelf/pipe.xlsx"), "{}", stderr(&output));
    assert_eq!(shelf.names("out"), ["a.audited.xlsx"]);
    let output = shelf.fill("endless", &["--plan", "/dev/zero"]);
    assert_eq!(code(&output), 2);
    assert!(stderr(&output).contains("the plan is longer than 1048576 bytes"), "{}", stderr(&output));
    std::fs::create_dir(shelf.path("rules")).unwrap();
    std::os::unix::fs::symlink("/dev/zero", shelf.path("rules/house.toml")).unwrap();
    let output = shelf.fill("endless", &["--schedules", "rules"]);
    assert_eq!(code(&output), 2);
    assert!(stderr(&output).contains("more than 1048576 bytes"), "{}", stderr(&output));
}

#[cfg(unix)]
#[test]
fn links_that_go_in_circles_end() {
    use std::os::unix::fs::symlink;
    let shelf = Shelf::of(&["a.xlsx", "sub/b.xlsx"]);
    symlink("..", shelf.path("shelf/sub/up")).unwrap();
    symlink(".", shelf.path("shelf/sub/here")).unwrap();
    symlink("nowhere", shelf.path("shelf/gone")).unwrap();
    symlink("sub/b.xlsx", shelf.path("shelf/c.xlsx")).unwrap();
    let output = shelf.fill("out", &[]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert_eq!(shelf.names("out"), ["a.audited.xlsx", "c.audited.xlsx", "sub/b.audited.xlsx"]);
    let text = stderr(&output);
    assert!(text.contains("walked already): shelf/sub/here, shelf/sub/up"), "{text}");
}

/// A workbook as a program saves it under a password: a compound file, not a package.
fn password_protected() -> Vec<u8> {
    let mut bytes = vec![0xD0, 0xCF, 0x11, 0xE0, 0xA1, 0xB1, 0x1A, 0xE1];
    bytes.resize(1536, 0);
    bytes.extend("EncryptedPackage".encode_utf16().flat_map(u16::to_le_bytes));
    bytes.resize(4096, 0);
    bytes
}

#[cfg(target_os = "linux")]
#[test]
fn a_bad_workbook_never_ends_the_run() {
    let shelf = Shelf::of(&["a.xlsx", "n.xlsx", "z.xlsx"]);
    let sound = workbook(9);
    shelf.put("locked.xlsx", &password_protected());
    shelf.put("short.xlsx", &sound[..sound.len() * 2 / 3]);
    shelf.put("letter.xlsx", b"Dear Sir");
    shelf.put("text.xlsx", plan(&[("E9", "12 000 or so")]).bytes());
    for name in ["panics", "aborts", "hangs", "eats"] {
        shelf.put(&format!("{name}.xlsx"), &sound);
    }
    let more = ["--memory-limit", "200", "--time-limit", "30", "--ledger", "ledger.jsonl", "--jobs", "3"];
    let output = shelf.fill("out", &more);
    assert_eq!(code(&output), 1, "{}", stderr(&output));
    assert_eq!(shelf.names("out"), ["a.audited.xlsx", "n.audited.xlsx", "z.audited.xlsx"]);
    let text = stderr(&output);
    let list = &text[text.find("11 workbooks: 3 filled").expect("a count")..];
    let due = [
        ("aborts", "broke-off", "signal: 6"),
        ("eats", "memory-limit", "more than 200 MB of memory"),
        ("hangs", "time-limit", "more than 30 seconds"),
        ("letter", "not-a-package", ""),
        ("locked", "password-protected", "password"),
        ("panics", "broke-off", "as the test wants"),
        ("short", "truncated", ""),
        ("text", "text-value", "E9"),
    ];
    assert!(list.contains("8 not filled:"), "{list}");
    for (name, code, words) in due {
        let line = list.lines().find(|line| line.contains(&format!("shelf/{name}.xlsx")));
        let line = line.unwrap_or_else(|| panic!("{name} in {list}"));
        assert!(line.contains(code) && line.contains(words), "{line}");
    }
    let lines = ledger(&shelf.path("ledger.jsonl"));
    assert_eq!(lines.len(), 11);
    for line in &lines {
        let input = line["input"].as_str().unwrap();
        let name = input.strip_prefix("shelf/").unwrap().strip_suffix(".xlsx").unwrap();
        match due.iter().find(|(bad, ..)| *bad == name) {
            Some((_, code, _)) => {
                assert_eq!((&line["status"], &line["output"]), (&"failed".into(), &serde_json::Value::Null));
                let codes: Vec<_> = line["problems"].as_array().unwrap().iter().map(|p| &p["code"]).collect();
                assert!(codes.contains(&&serde_json::Value::from(*code)), "{line}");
            }
            None => assert_eq!(line["status"], "done", "{line}"),
        }
    }
}

#[cfg(target_os = "linux")]
#[test]
fn want_of_memory_is_told_as_such() {
    let shelf = Shelf::of(&["a.xlsx"]);
    // More MB than a number of bytes can say is no limit.
    let output = shelf.fill("out", &["--memory-limit", "17592186044416"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    shelf.put("b.xlsx", b"");
    let large = std::fs::File::options().write(true).open(shelf.path("shelf/b.xlsx")).unwrap();
    large.set_len(127 << 20).unwrap();
    let output = shelf.fill("new", &["--memory-limit", "120"]);
    assert_eq!(code(&output), 1);
    assert!(stderr(&output).contains("(memory-limit)"), "{}", stderr(&output));
    assert!(!stderr(&output).contains("cannot-read"), "{}", stderr(&output));
    assert_eq!(shelf.names("new"), ["a.audited.xlsx"]);
}

#[test]
fn the_ledger_holds_the_hashes_of_what_went_in_and_came_out() {
    let shelf = Shelf::of(&["a.xlsx", "b.xlsx"]);
    let output = shelf.fill("out", &["--replace", "3.5%=3%", "--ledger", "ledger.jsonl"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let hash = |path: &str| {
        let output = Command::new("sha256sum").arg(shelf.path(path)).output().expect("sha256sum runs");
        stdout(&output)[..64].to_owned()
    };
    let lines = ledger(&shelf.path("ledger.jsonl"));
    assert_eq!(lines.len(), 2);
    for (name, line) in ["a", "b"].iter().zip(&lines) {
        assert_eq!(line["schema"], 1);
        assert_eq!(line["input"], format!("shelf/{name}.xlsx"));
        assert_eq!(line["output"], format!("out/{name}.audited.xlsx"));
        assert_eq!(line["sha256"]["input"], hash(&format!("shelf/{name}.xlsx")));
        assert_eq!(line["sha256"]["output"], hash(&format!("out/{name}.audited.xlsx")));
        assert_eq!(line["version"], env!("CARGO_PKG_VERSION"));
        let basis = &line["bases"][0];
        assert_eq!((&basis["declared"], &basis["basis"]), (&"3.5%".into(), &"3%".into()));
        let npv = line["options"][0]["npv"].as_f64().unwrap();
        let works = if *name == "a" { 1000.0 } else { 1001.0 };
        assert!((npv - (600.0 / 1.03 + 600.0 / 1.03_f64.powi(2) - works)).abs() < 1e-9, "{line}");
    }
    // One request, one basis: one hash of each; two inputs: two of the rest.
    assert_eq!(lines[0]["sha256"]["request"], lines[1]["sha256"]["request"]);
    assert_eq!(lines[0]["sha256"]["basis"], lines[1]["sha256"]["basis"]);
    assert_ne!(lines[0]["sha256"]["input"], lines[1]["sha256"]["input"]);
    // A ledger is not written over what is there, and never over a workbook.
    for (path, more) in [("ledger.jsonl", &[][..]), ("shelf/a.xlsx", &["--force"]), ("o/a.audited.xlsx", &[])]
    {
        let before = std::fs::read(shelf.path(path)).ok();
        let refused = shelf.fill("o", &[&["--ledger", path], more].concat());
        assert_eq!(code(&refused), 2, "{path}");
        assert_eq!(std::fs::read(shelf.path(path)).ok(), before, "{path}");
        assert!(!shelf.path("o").exists(), "nothing is filled where the ledger cannot be kept");
    }
}

#[test]
fn a_ledger_or_summary_never_takes_the_place_of_what_the_run_reads() {
    let shelf = Shelf::of(&["a.xlsx"]);
    std::fs::write(shelf.path("plan.toml"), "[settings]\nbasis = \"3.5%\"\n").unwrap();
    std::fs::create_dir(shelf.path("rules")).unwrap();
    let house = "id = \"house\"\ntitle = \"House rules\"\nbody = \"Ostrey\"\nyear = 2026\nplace = \"1\"\naddress = \"\"\n\
                 line = \"3%\"\nstatus = \"current\"\ncomplete = true\nchecked = \"an invented body\"\n";
    std::fs::write(shelf.path("rules/house.toml"), house).unwrap();
    let read = ["--plan", "plan.toml", "--schedules", "rules", "--force"];
    for flag in ["--ledger", "--summary"] {
        for path in ["plan.toml", "rules/house.toml", "rules/../plan.toml"] {
            let refused = shelf.fill("out", &[&read[..], &[flag, path]].concat());
            assert_eq!(code(&refused), 2, "{flag} {path}");
            assert!(stderr(&refused).contains("this file is read by the run"), "{}", stderr(&refused));
        }
    }
    let refused = shelf.fill("out", &["--ledger", "x", "--summary", "./x"]);
    assert_eq!(code(&refused), 2);
    assert!(stderr(&refused).contains("are one file"), "{}", stderr(&refused));
    assert_eq!(shelf.names(""), ["plan.toml", "rules/house.toml", "shelf/a.xlsx"]);
    assert_eq!(shelf.files("")["rules/house.toml"], house.as_bytes());
    assert_eq!(code(&shelf.fill("out", &[&read[..], &["--ledger", "rules/x.jsonl"]].concat())), 0);
}

#[test]
fn workbooks_of_two_folders_never_share_an_output() {
    let shelf = Shelf::of(&["a.xlsx", "b.xlsx"]);
    let fill = |args: &[&str]| hence().current_dir(shelf.path("")).arg("fill").args(args).output().unwrap();
    std::fs::create_dir(shelf.path("other")).unwrap();
    std::fs::copy(shelf.path("shelf/a.xlsx"), shelf.path("other/a.xlsx")).unwrap();
    let clash = fill(&["shelf", "other", "--out", "out"]);
    assert_eq!(code(&clash), 2);
    let words = "shelf/a.xlsx and other/a.xlsx would both be written to out/a.audited.xlsx";
    assert!(stderr(&clash).contains(words), "{}", stderr(&clash));
    let file = fill(&["other", "--out", "out.xlsx"]);
    assert_eq!(code(&file), 2, "a folder does not go into one file");
    assert!(!shelf.path("out").exists() && !shelf.path("out.xlsx").exists());
    // Beside the inputs they do not clash.
    assert_eq!(code(&fill(&["shelf", "other/a.xlsx"])), 0);
    assert!(shelf.path("shelf/a.audited.xlsx").exists() && shelf.path("other/a.audited.xlsx").exists());
}

#[test]
fn a_folder_without_workbooks_is_an_error() {
    let shelf = Shelf::empty();
    shelf.put("x.audited.xlsx", b"not to be read");
    let output = shelf.fill("out", &[]);
    assert_eq!(code(&output), 2);
    assert!(stderr(&output).contains("shelf: no workbooks are in it"), "{}", stderr(&output));
    assert!(!shelf.path("out").exists());
}
