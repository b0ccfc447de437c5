//! Every function in a real Calc: files from other programs, computed, saved, opened again.

use std::path::{Path, PathBuf};

use hence::worksheet::{Cell, FUNCTIONS, Function, Range, call};

use super::cases::{CASES, Held, address, data};
use super::office::Office;
use super::package::registered;
use super::{Found, IDENTIFIER, Kept, Sheet, agrees, books, extension, plain, read, sheets};

/// The column of the calls, right of the data.
const FIRST: usize = 21;

/// A layout for books.py, with formulas of the format.
fn layout(open: bool) -> String {
    let mut lines = String::new();
    for ((column, row), held) in data() {
        let (kind, value) = match held {
            Held::N(number) => ("n", number.to_string()),
            Held::T(text) => ("s", text.to_owned()),
            Held::D(date, _) => ("d", date.to_owned()),
            Held::Blank => continue,
        };
        lines.push_str(&format!("{}\t{kind}\t{value}\n", address(column, row)));
    }
    let mut row = 1;
    for case in CASES {
        let formula = if open { case.open_formula() } else { case.formula() };
        let at = address(FIRST, row);
        let (rows, columns) = case.shape();
        match rows * columns {
            1 => lines.push_str(&format!("{at}\tf\t{formula}\n")),
            _ => {
                let last = address(FIRST + columns - 1, row + rows - 1);
                lines.push_str(&format!("{at}\ta\t{formula}\t{at}:{last}\n"));
            }
        }
        row += rows;
    }
    lines
}

/// The sheet with every case, written without a spreadsheet program, as .xlsx and as .ods.
fn written(office: &Office) -> Option<Vec<PathBuf>> {
    let mut files = Vec::new();
    for (name, open) in [("written.xlsx", false), ("written.ods", true)] {
        let (layout, out) = (office.give("layout.txt", layout(open).as_bytes()), office.give(name, b""));
        books(&[&layout, &out], "write")?;
        files.push(out);
    }
    Some(files)
}

/// Every case of a sheet that is not as due.
fn wrong(sheet: &Sheet, kept: Kept) -> Vec<String> {
    let mut wrong = Vec::new();
    let mut row = 1;
    for case in CASES {
        let (rows, columns) = case.shape();
        for (i, j) in (0..rows).flat_map(|i| (0..columns).map(move |j| (i, j))) {
            let at = address(FIRST + j, row + i);
            let due = case.due(i, j);
            // A file need not hold an empty text.
            let empty = Found { kind: "s".into(), ..Found::default() };
            let found = sheet.get(&at).unwrap_or(&empty);
            if !agrees(&due, found, kept) {
                wrong.push(format!("{at} {}: {due:?} is due, found {found:?}", case.formula()));
            }
            let first = (i, j) == (0, 0);
            let formulas = [case.formula(), plain(&case.open_formula())];
            if first && !formulas.contains(&plain(&found.formula)) {
                wrong.push(format!("{at}: {} became {}", case.formula(), found.formula));
            }
        }
        row += rows;
    }
    wrong
}

/// The same under another name, since files are saved under the name they had.
fn renamed(office: &Office, file: &Path, name: &str) -> PathBuf {
    office.give(name, &std::fs::read(file).expect("a file"))
}

/// Files from other programs, calculated and saved in both formats, and those opened and saved again.
fn saved(office: &Office, files: &[PathBuf], folder: &str) -> Vec<PathBuf> {
    let mut all = Vec::new();
    for format in ["xlsx", "ods"] {
        let mut named = Vec::new();
        for (i, file) in files.iter().enumerate() {
            let suffix = file.extension().expect("a format").to_string_lossy();
            named.push(renamed(office, file, &format!("{folder}-{i}-{format}.{suffix}")));
        }
        all.extend(office.convert(&named, format, folder));
    }
    all
}

#[test]
fn every_function_gives_the_numbers_of_the_library() {
    assert!(FUNCTIONS.iter().all(|function| CASES.iter().any(|case| case.function == function.name)));
    let Some(office) = Office::new(None) else { return };
    office.install(extension()).unwrap_or_else(|said| panic!("{said}"));
    let Some(files) = written(&office) else { return };

    let once = saved(&office, &files, "once");
    let twice = saved(&office, &once, "twice");
    assert_eq!((once.len(), twice.len()), (4, 8));
    let all: Vec<PathBuf> = once.into_iter().chain(twice).collect();
    let Some(found) = read(&all) else { return };
    for (file, sheet) in all.iter().zip(&found) {
        assert_eq!(wrong(sheet, Kept::Digits), [""; 0], "{}", file.display());
    }

    // To the last bit, as Calc holds them; and in Calc's own words, the formula is the one of the file.
    let paths: Vec<String> =
        files.iter().chain(&all).map(|file| file.to_string_lossy().into_owned()).collect();
    let arguments: Vec<&str> = std::iter::once("cells").chain(paths.iter().map(String::as_str)).collect();
    let held = sheets(&office.ask(&arguments));
    assert_eq!(held.len(), 14);
    for (file, sheet) in paths.iter().zip(&held) {
        assert_eq!(wrong(sheet, Kept::Bits), [""; 0], "{file}");
        for ((column, row), due) in data() {
            if let Held::N(number) | Held::D(_, number) = due {
                let at = address(column, row);
                assert!(Kept::Bits.agrees(number, &sheet[&at].value), "{file}: {at}");
            }
        }
    }
}

/// What Calc does to arguments before a function sees them: stated in the README, so it is held here.
#[test]
fn what_calc_itself_makes_of_arguments_is_as_documented() {
    let cases = [
        // A single blank cell arrives as 0; within a range it stays blank.
        ("=HENCE.FACTOR(\"100%\",R1)", "n", "1.0"),
        ("=HENCE.FACTOR(\"100%\",R1:R2)", "s", ""),
        ("=HENCE.VALUE(\"100%\",N1:N3,A2:A4,R1)", "n", "9.75"),
        ("=HENCE.VALUE(\"100%\",N1:N3,A2:A4,,R1)", "e", "#VALUE!"),
        ("=ROUND(HENCE.IRR(N1:N3,O1:O3,,R1),6)", "e", "#NUM!"),
        // As an empty text it counts as left out.
        ("=HENCE.VALUE(\"100%\",N1:N3,A2:A4,,R1&\"\")", "n", "9.75"),
        ("=ROUND(HENCE.IRR(N1:N3,O1:O3,,IF(R1=\"\",\"\",R1)),6)", "n", "0.1"),
        // TRUE is a number to Calc.
        ("=HENCE.FACTOR(\"100%\",TRUE())", "n", "0.5"),
        // A single error value passes through; a range that holds one is refused as a whole.
        ("=HENCE.FACTOR(\"100%\",S1)", "e", "#DIV/0!"),
        ("=HENCE.FACTOR(\"100%\",S2)", "e", "#N/A"),
        ("=SUM(HENCE.FACTOR(\"100%\",S1:S3))", "e", "Err:504"),
        ("=HENCE.FACTOR(\"100%\",S1:S3)", "e", "Err:504"),
        // Answers go on into other functions.
        ("=SUM(HENCE.FACTOR(\"100%\",N1:N3))", "n", "1.75"),
        ("=IFERROR(HENCE.FACTOR(\"what\",1),\"caught\")", "s", "caught"),
        ("=HENCE.FACTOR(HENCE.SCHEDULE(\"uk-2003\"),0)+1", "n", "2.0"),
        ("=INDEX(HENCE.IRR(N1:N3,O1:O3),2)>0.19", "n", "1.0"),
        // Names are read in any case.
        ("=hence.factor(\"100%\",2)", "n", "0.25"),
        // Too many arguments, and none.
        ("=HENCE.REAL(0.06,0.02,1)", "e", "Err:504"),
        ("=HENCE.REAL()", "e", "#VALUE!"),
    ];
    let Some(office) = Office::new(None) else { return };
    office.install(extension()).unwrap_or_else(|said| panic!("{said}"));
    let mut lines =
        layout(false).lines().filter(|line| !line.starts_with('U')).collect::<Vec<_>>().join("\n");
    lines.push_str("\nS1\tf\t=1/0\nS2\tf\t=NA()\nS3\tn\t5\n");
    for (i, (formula, ..)) in cases.iter().enumerate() {
        lines.push_str(&format!("{}\tf\t{formula}\n", address(FIRST, i + 1)));
    }
    // In an array formula the error values of a range can be left out.
    lines.push_str("W1\ta\t=HENCE.FACTOR(\"100%\",IFERROR(S1:S3,\"\"))\tW1:W3\n");
    let (layout, out) = (office.give("layout.txt", lines.as_bytes()), office.give("host.xlsx", b""));
    let Some(_) = books(&[&layout, &out], "write") else { return };
    let sheet = sheets(&office.ask(&["cells", &out.to_string_lossy()])).remove(0);
    let mut wrong = Vec::new();
    for (i, (formula, kind, value)) in cases.iter().enumerate() {
        let found = &sheet[&address(FIRST, i + 1)];
        let value = match *kind {
            "n" => format!("{:016x}", value.parse::<f64>().expect("a number").to_bits()),
            _ => (*value).to_owned(),
        };
        if (found.kind.as_str(), &found.value) != (kind, &value) {
            wrong.push(format!("{formula}: {kind} {value} is due, found {found:?}"));
        }
    }
    assert_eq!(wrong, [""; 0]);
    let cells = ["W1", "W2", "W3"].map(|at| (sheet[at].kind.as_str(), sheet[at].value.as_str()));
    assert_eq!(cells, [("s", ""), ("s", ""), ("n", "3fa0000000000000")], "1/32 below two blanks");
}

/// A German profile shows 1,5 and computes the same.
#[test]
fn another_locale_changes_no_number() {
    let Some(office) = Office::new(Some("de-DE")) else { return };
    office.install(extension()).unwrap_or_else(|said| panic!("{said}"));
    let Some(files) = written(&office) else { return };
    let comma = office.give("comma.xlsx", b"");
    let layout = office.give("layout.txt", b"A1\tf\t=1.5&\"\"\n");
    let Some(_) = books(&[&layout, &comma], "write") else { return };
    let paths: Vec<String> =
        files.iter().chain([&comma]).map(|file| file.to_string_lossy().into_owned()).collect();
    let arguments: Vec<&str> = std::iter::once("cells").chain(paths.iter().map(String::as_str)).collect();
    let held = sheets(&office.ask(&arguments));
    assert_eq!(held[2]["A1"].value, "1,5", "the profile is not a German one");
    for (file, sheet) in paths.iter().zip(&held[..2]) {
        let mut sheet = sheet.clone();
        // The separator that Calc shows is the locale's.
        for found in sheet.values_mut() {
            found.formula.clear();
        }
        let wrong: Vec<String> =
            wrong(&sheet, Kept::Bits).into_iter().filter(|words| !words.ends_with(" became ")).collect();
        assert_eq!(wrong, [""; 0], "{file}");
    }
}

/// 100,000 factors in one array formula, each as the library gives it, and one number from two whole columns.
#[test]
fn long_ranges_and_whole_columns_are_taken() {
    const ROWS: usize = 100_000;
    const LINE: &str = "2% to 300, 0.01% after";
    let Some(office) = Office::new(None) else { return };
    office.install(extension()).unwrap_or_else(|said| panic!("{said}"));
    let said = office.ask(&["long", &ROWS.to_string(), LINE]);
    let lines: Vec<&str> = said.lines().collect();
    assert_eq!(lines.len(), ROWS + 1);

    let numbers =
        || Some(Range::new(ROWS, 1, (0..ROWS).map(|i| Cell::Number(i as f64)).collect()).expect("a range"));
    let line = || Some(Range::single(Cell::Text(LINE.into())));
    let factors = call(Function::find("FACTOR").expect("it is there"), &[line(), numbers()]);
    let bits = |cell: &Cell<'_>| match cell {
        Cell::Number(number) => format!("{:016x}", number.to_bits()),
        other => panic!("{other:?}"),
    };
    for (i, (due, found)) in factors.cells().iter().zip(&lines).enumerate() {
        assert_eq!(bits(due), *found, "offset {i}");
    }
    // The first 500 rows of two columns; below them the columns are blank.
    let short = || Range::new(500, 1, (0..500).map(|i| Cell::Number(f64::from(i))).collect());
    let value = call(Function::find("VALUE").expect("it is there"), &[line(), short(), short()]);
    assert_eq!(format!("column\tn\t{}", bits(&value.cells()[0])), lines[ROWS]);
}

/// Without the extension the results are gone and the formulas stay; with it again, they compute.
#[test]
fn formulas_outlive_the_extension() {
    let Some(office) = Office::new(None) else { return };
    office.install(extension()).unwrap_or_else(|said| panic!("{said}"));
    let Some(files) = written(&office) else { return };
    let with = saved(&office, &files, "with");
    office.remove(IDENTIFIER);
    assert_eq!(registered(&office), None);
    let without = saved(&office, &with, "without");
    let Some(found) = read(&without) else { return };
    for (file, sheet) in without.iter().zip(&found) {
        let mut row = 1;
        for case in CASES {
            let cell = &sheet[&address(FIRST, row)];
            let formulas = [case.formula(), plain(&case.open_formula())].map(|text| text.to_lowercase());
            assert!(formulas.contains(&plain(&cell.formula).to_lowercase()), "{}: {cell:?}", file.display());
            assert_eq!((cell.kind.as_str(), cell.value.as_str()), ("e", "#NAME?"), "{}", case.formula());
            row += case.shape().0;
        }
    }
    office.install(extension()).unwrap_or_else(|said| panic!("{said}"));
    let again = saved(&office, &without, "again");
    let Some(found) = read(&again) else { return };
    for (file, sheet) in again.iter().zip(&found) {
        assert_eq!(wrong(sheet, Kept::Digits), [""; 0], "{}", file.display());
    }
}
