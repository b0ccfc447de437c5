//! The extension for LibreOffice Calc, built, installed into a throw-away profile and run by a real LibreOffice.
//!
//! Workbooks come from openpyxl and from plain XML; what LibreOffice saves is read back without it, and compared with
//! the library. The data are invented.

mod cases;
mod office;

use std::collections::BTreeMap;
use std::io::{Cursor, Read, Write};
use std::path::{Path, PathBuf};
use std::process::Command;
use std::sync::OnceLock;

use hence::worksheet::{Cell, FUNCTIONS, Function, Range, call};
use zip::write::SimpleFileOptions;

use crate::root;
use cases::{CASES, Held, address, data};
use office::{Office, absent};

/// The extension's own name.
const IDENTIFIER: &str = "hence.addin.calc";
/// The column of the calls, right of the data.
const FIRST: usize = 21;

/// The folder of everything built.
fn target() -> PathBuf {
    Path::new(env!("CARGO_TARGET_TMPDIR")).parent().expect("a folder").to_owned()
}

fn build() -> Vec<u8> {
    let mut command = Command::new("bash");
    command.arg("ffi/addin/build.sh").arg("calc").current_dir(root()).env("CARGO_TARGET_DIR", target());
    let run = command.output().expect("bash runs");
    assert!(run.status.success(), "build.sh: {}", String::from_utf8_lossy(&run.stderr));
    std::fs::read(target().join("addin/hence.oxt")).expect("the extension")
}

/// The extension, built once.
fn extension() -> &'static [u8] {
    static BUILT: OnceLock<Vec<u8>> = OnceLock::new();
    BUILT.get_or_init(build)
}

/// The parts of a package, in their order.
fn parts(package: &[u8]) -> Vec<(String, Vec<u8>)> {
    let mut package = zip::ZipArchive::new(Cursor::new(package)).expect("a zip");
    let count = package.len();
    let part = |i| {
        let mut part = package.by_index(i).expect("a part");
        let mut bytes = Vec::new();
        part.read_to_end(&mut bytes).expect("its bytes");
        (part.name().expect("a name").into_owned(), bytes)
    };
    (0..count).map(part).collect()
}

/// The extension with each part as `change` leaves it.
fn changed(change: impl Fn(&mut String, &mut Vec<u8>)) -> Vec<u8> {
    let mut out = zip::ZipWriter::new(Cursor::new(Vec::new()));
    for (mut name, mut bytes) in parts(extension()) {
        change(&mut name, &mut bytes);
        out.start_file(name, SimpleFileOptions::default()).expect("a part");
        out.write_all(&bytes).expect("its bytes");
    }
    out.finish().expect("a zip").into_inner()
}

/// Runs books.py.
fn books(arguments: &[&Path], what: &str) -> Option<String> {
    let python = std::env::var_os("HENCE_PYTHON").unwrap_or_else(|| "python3".into());
    if !Command::new(&python).args(["-c", "import openpyxl"]).output().is_ok_and(|run| run.status.success()) {
        absent("Python with openpyxl (HENCE_PYTHON)");
        return None;
    }
    let script = root().join("tests/addin/calc/books.py");
    let run = Command::new(&python).arg(script).arg(what).args(arguments).output().expect("Python runs");
    assert!(run.status.success(), "books.py: {}", String::from_utf8_lossy(&run.stderr));
    Some(String::from_utf8(run.stdout).expect("text"))
}

/// What a cell was found to hold, and its formula.
#[derive(Clone, Debug, Default, PartialEq)]
struct Found {
    kind: String,
    value: String,
    formula: String,
}

type Sheet = BTreeMap<String, Found>;

/// The cells of each file, from what a script printed.
fn sheets(said: &str) -> Vec<Sheet> {
    let mut all = Vec::new();
    for line in said.lines() {
        let fields: Vec<&str> = line.split('\t').collect();
        match fields[..] {
            ["file", _] => all.push(Sheet::new()),
            [address, kind, value, formula] => {
                let found = Found { kind: kind.into(), value: value.into(), formula: formula.into() };
                all.last_mut().expect("a file first").insert(address.into(), found);
            }
            _ => panic!("a script said {line:?}"),
        }
    }
    all
}

/// A formula as every reader gives it alike: without what a format puts around it.
fn plain(formula: &str) -> String {
    formula
        .trim_start_matches('{')
        .trim_end_matches('}')
        .replace("of:=", "=")
        .replace("[.", "")
        .replace(":.", ":")
        .replace(']', "")
}

/// How numbers are told.
#[derive(Clone, Copy)]
enum Kept {
    /// By their bits.
    Bits,
    /// In the 15 digits that LibreOffice writes into files.
    Digits,
}

impl Kept {
    fn agrees(self, due: f64, found: &str) -> bool {
        match self {
            Kept::Bits => found == format!("{:016x}", due.to_bits()),
            Kept::Digits => found.parse().is_ok_and(|found: f64| {
                let unit = 10f64.powi(due.abs().log10().floor() as i32 - 14);
                found == due || (found - due).abs() <= 0.5 * unit + f64::EPSILON * due.abs()
            }),
        }
    }
}

/// Whether a cell is as due.
fn agrees(due: &Cell<'_>, found: &Found, kept: Kept) -> bool {
    match due {
        Cell::Number(number) => found.kind == "n" && kept.agrees(*number, &found.value),
        Cell::Text(text) => found.kind == "s" && found.value == *text,
        Cell::Error(error) => found.kind == "e" && found.value == error.text(),
        Cell::Blank | Cell::Logical(_) => false,
    }
}

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

fn read(files: &[PathBuf]) -> Option<Vec<Sheet>> {
    let paths: Vec<&Path> = files.iter().map(PathBuf::as_path).collect();
    books(&paths, "read").map(|said| sheets(&said))
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
    // The years here are offsets from 0 to 999, calendar years and dates: they do not go together.
    let value = call(Function::find("VALUE").expect("it is there"), &[line(), numbers(), numbers()]);
    assert_eq!(format!("column\te\t{}", error(&value)), lines[ROWS]);
}

fn error(range: &Range<'_>) -> &'static str {
    match &range.cells()[0] {
        Cell::Error(error) => error.text(),
        other => panic!("{other:?}"),
    }
}

/// What the function wizard shows is the table's.
#[test]
fn the_function_wizard_shows_the_table() {
    let Some(office) = Office::new(None) else { return };
    office.install(extension()).unwrap_or_else(|said| panic!("{said}"));
    let said = office.ask(&["wizard", "HENCE"]);
    let mut due = Vec::new();
    for function in FUNCTIONS {
        // 11 is Calc's number for functions of extensions.
        due.push(format!("function\t{}\t{}\t11", function.full_name(), function.help));
        due.extend(function.arguments.iter().map(|a| format!("argument\t{}\t{}", a.name, a.help)));
    }
    // Calc keeps its own order.
    let blocks = |lines: Vec<String>| {
        let mut blocks: Vec<String> = Vec::new();
        for line in lines {
            match (line.starts_with("argument"), blocks.last_mut()) {
                (true, Some(block)) => block.push_str(&format!("\n{line}")),
                _ => blocks.push(line),
            }
        }
        blocks.sort();
        blocks
    };
    assert_eq!(blocks(said.lines().map(str::to_owned).collect()), blocks(due));
}

/// The same source gives the same bytes, and the package holds what it says.
#[test]
fn the_package_is_the_same_each_time() {
    assert!(build() == extension(), "two builds differ");
    let parts: BTreeMap<String, Vec<u8>> = parts(extension()).into_iter().collect();
    let names: Vec<&str> = parts.keys().map(String::as_str).collect();
    let library = names.iter().copied().find(|name| name.starts_with("lib/")).expect("a library");
    let due = ["LICENSE", "META-INF/manifest.xml", "description.xml", "hence.idl", "hence_addin.py", library];
    assert_eq!(names, [&due[..], &["pythonpath/hence_functions.py", "pythonpath/hence_library.py"]].concat());
    let file = Path::new(library).file_name().expect("a file");
    assert!(parts[library] == std::fs::read(target().join("release").join(file)).expect("the library"));
    let text = |name: &str| String::from_utf8(parts[name].clone()).expect("text");
    let platform = library.split('/').nth(1).expect("a platform");
    assert!(text("description.xml").contains(&format!("<platform value=\"{platform}\"/>")));
    for function in FUNCTIONS {
        let arguments: Vec<String> =
            function.arguments.iter().map(|a| format!("[in] any {}", a.name)).collect();
        let line = format!(" {}({});", function.name.to_lowercase(), arguments.join(", "));
        assert!(text("hence.idl").contains(&line), "{line}");
    }
}

/// A library of another interface version, or none for this platform, ends the installation with words that say so. What
/// LibreOffice then lists is not in force, and gives way to a sound one.
#[test]
fn a_library_that_does_not_fit_is_refused() {
    let Some(office) = Office::new(None) else { return };
    let folder = tempfile::tempdir().expect("a temporary folder");
    let (source, library) = (folder.path().join("other.c"), folder.path().join("other.so"));
    std::fs::write(&source, "#include <stdint.h>\nuint32_t hence_abi_version(void) { return 987; }\n")
        .expect("a file");
    let run =
        Command::new("cc").args(["-shared", "-fPIC", "-o"]).arg(&library).arg(&source).output().expect("cc");
    assert!(run.status.success(), "{}", String::from_utf8_lossy(&run.stderr));
    let other = std::fs::read(&library).expect("a library");
    let refused = changed(|name, bytes| {
        if name.starts_with("lib/") {
            *bytes = other.clone();
        }
    });
    let said = office.install(&refused).expect_err("another version is refused");
    let words = format!("has interface version 987, the extension needs {}", hence::HENCE_ABI_VERSION);
    assert!(said.contains(&words), "{said}");
    assert_eq!(registered(&office), Some(false));

    let refused = changed(|name, _| {
        if name.starts_with("lib/") {
            *name = "lib/another_place/libhence.so".into();
        }
    });
    let said = office.install(&refused).expect_err("another platform is refused");
    assert!(said.contains("this extension has no library for"), "{said}");
    assert!(said.contains("it has another_place"), "{said}");
    assert_eq!(registered(&office), Some(false));

    office.install(extension()).unwrap_or_else(|said| panic!("the sound one is taken: {said}"));
    assert_eq!(registered(&office), Some(true));
    office.remove(IDENTIFIER);

    // LibreOffice itself reads the platforms.
    let refused = changed(|name, bytes| {
        if name == "description.xml" {
            let text = String::from_utf8(std::mem::take(bytes)).expect("text");
            let (before, after) = text.split_once("<platform value=\"").expect("platforms");
            *bytes = format!(
                "{before}<platform value=\"windows_x86\"{}",
                &after[after.find('/').expect("an end")..]
            )
            .into_bytes();
        }
    });
    let said = office.install(&refused).unwrap_or_else(|said| said);
    assert!(said.contains("does not work on this computer"), "{said}");
    assert_eq!(registered(&office), None);
}

/// Whether the component is registered; none where the extension is not installed.
fn registered(office: &Office) -> Option<bool> {
    let list = office.installed();
    let (_, component) = list.split_once("/hence_addin.py")?;
    Some(component.trim_start().starts_with("is registered: yes"))
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
