//! Packs the extension for LibreOffice Calc: `calc-addin OUT.oxt PLATFORM=LIBRARY...`.
//!
//! Everything said about a function comes from [`FUNCTIONS`]. The same input gives the same bytes.

use std::fmt::Write as _;
use std::io::{Cursor, Write as _};
use std::path::Path;
use std::process::ExitCode;

use hence::worksheet::{CATEGORY, FUNCTIONS};
use zip::write::SimpleFileOptions;

/// The name of the interface that declares the functions, in the modules of UNO.
const INTERFACE: &str = "hence.XFunctions";
/// What stands before the dot of a function's name.
const SERVICE: &str = "HENCE";
/// The extension's own name, by which it is removed.
const IDENTIFIER: &str = "hence.addin.calc";
/// The platforms that a library may be for, as LibreOffice names them.
const PLATFORMS: [&str; 7] = [
    "linux_x86_64",
    "linux_aarch64",
    "macosx_x86_64",
    "macosx_aarch64",
    "windows_x86_64",
    "windows_x86",
    "windows_aarch64",
];
/// The oldest LibreOffice that the extension was tried on.
const OLDEST: &str = "7.4";

fn main() -> ExitCode {
    let arguments: Vec<String> = std::env::args().skip(1).collect();
    let made = match arguments.split_first() {
        Some((out, libraries)) if !libraries.is_empty() => make(Path::new(out), libraries),
        _ => Err("allowed is: calc-addin OUT.oxt PLATFORM=LIBRARY...".to_owned()),
    };
    match made {
        Ok(()) => ExitCode::SUCCESS,
        Err(message) => {
            eprintln!("calc-addin: {message}");
            ExitCode::from(2)
        }
    }
}

/// Packs the extension with the libraries, each given with its platform as extensions name it.
fn make(out: &Path, libraries: &[String]) -> Result<(), String> {
    let mut platforms = Vec::new();
    let mut files = Vec::new();
    for library in libraries {
        let (platform, path) =
            library.split_once('=').ok_or_else(|| format!("{library}: allowed is PLATFORM=LIBRARY"))?;
        if !PLATFORMS.contains(&platform) {
            return Err(format!("found the platform {platform}, allowed are {}", PLATFORMS.join(", ")));
        }
        let path = Path::new(path);
        let file = path.file_name().and_then(|name| name.to_str()).ok_or("a library needs a file name")?;
        let bytes = std::fs::read(path).map_err(|error| format!("{}: {error}", path.display()))?;
        files.push((format!("lib/{platform}/{file}"), bytes));
        platforms.push(platform);
    }
    let mut parts = vec![
        ("META-INF/manifest.xml".to_owned(), manifest().into_bytes()),
        ("description.xml".to_owned(), description(&platforms).into_bytes()),
        ("hence.idl".to_owned(), interface().into_bytes()),
        ("hence_addin.py".to_owned(), include_bytes!("hence_addin.py").to_vec()),
        ("pythonpath/hence_functions.py".to_owned(), functions()?.into_bytes()),
        ("pythonpath/hence_library.py".to_owned(), include_bytes!("hence_library.py").to_vec()),
        ("LICENSE".to_owned(), include_bytes!("../../../LICENSE").to_vec()),
    ];
    parts.extend(files);
    let bytes = packed(&parts).map_err(|error| error.to_string())?;
    std::fs::write(out, bytes).map_err(|error| format!("{}: {error}", out.display()))
}

/// The parts as a zip. Its writer's own time, 1980, stands on every part.
fn packed(parts: &[(String, Vec<u8>)]) -> zip::result::ZipResult<Vec<u8>> {
    let mut zip = zip::ZipWriter::new(Cursor::new(Vec::new()));
    let options = SimpleFileOptions::default()
        .compression_method(zip::CompressionMethod::Deflated)
        .last_modified_time(zip::DateTime::default());
    for (name, bytes) in parts {
        zip.start_file(name.as_str(), options)?;
        zip.write_all(bytes)?;
    }
    Ok(zip.finish()?.into_inner())
}

/// What each part is to LibreOffice.
fn manifest() -> String {
    let entries = [
        ("application/vnd.sun.star.uno-typelibrary;type=RDB", "hence.idl"),
        ("application/vnd.sun.star.uno-component;type=Python", "hence_addin.py"),
    ];
    let mut text = String::from(
        "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n\
         <manifest:manifest xmlns:manifest=\"http://openoffice.org/2001/manifest\">\n",
    );
    for (kind, path) in entries {
        let line =
            format!(" <manifest:file-entry manifest:media-type=\"{kind}\" manifest:full-path=\"{path}\"/>\n");
        text.push_str(&line);
    }
    text.push_str("</manifest:manifest>\n");
    text
}

/// Name, version and platforms.
fn description(platforms: &[&str]) -> String {
    format!(
        "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n\
         <description xmlns=\"http://openoffice.org/extensions/description/2006\"\n\
         \x20xmlns:libreoffice=\"http://libreoffice.org/extensions/description/2011\">\n\
         \x20<identifier value=\"{IDENTIFIER}\"/>\n\
         \x20<version value=\"{}\"/>\n\
         \x20<platform value=\"{}\"/>\n\
         \x20<dependencies>\n\
         \x20 <libreoffice:LibreOffice-minimal-version value=\"{OLDEST}\" name=\"LibreOffice {OLDEST}\"/>\n\
         \x20</dependencies>\n\
         \x20<display-name><name lang=\"en\">hence: discount factors and present values</name></display-name>\n\
         </description>\n",
        env!("CARGO_PKG_VERSION"),
        platforms.join(","),
    )
}

/// The interface that Calc reads the functions from: one method each. `any` takes values and ranges alike, and keeps
/// texts apart from numbers; what comes back is always rows of cells, which is how Calc knows a range.
fn interface() -> String {
    let (module, interface) = INTERFACE.split_once('.').expect("a module and a name");
    let mut text = format!("module {module} {{\n interface {interface} {{\n");
    for function in FUNCTIONS {
        let arguments: Vec<String> =
            function.arguments.iter().map(|argument| format!("[in] any {}", argument.name)).collect();
        let _ = writeln!(
            text,
            "  sequence<sequence<any> > {}({});",
            function.name.to_lowercase(),
            arguments.join(", ")
        );
    }
    text.push_str(" };\n};\n");
    text
}

/// The table and the constants for Python.
fn functions() -> Result<String, String> {
    let mut text =
        String::from("\"\"\"The worksheet functions: made from hence's table, not edited by hand.\"\"\"\n\n");
    let constants = [
        ("ABI_VERSION", i64::from(hence::HENCE_ABI_VERSION)),
        ("CELL_NUMBER", i64::from(hence::HENCE_CELL_NUMBER)),
        ("CELL_TEXT", i64::from(hence::HENCE_CELL_TEXT)),
        ("CELL_BLANK", i64::from(hence::HENCE_CELL_BLANK)),
        ("CELL_ERROR", i64::from(hence::HENCE_CELL_ERROR)),
        ("OK", i64::from(hence::HENCE_OK)),
        ("ERR_CAPACITY", i64::from(hence::HENCE_ERR_CAPACITY)),
    ];
    for (name, value) in constants {
        let _ = writeln!(text, "{name} = {value}");
    }
    let names = [
        ("SERVICE", SERVICE),
        ("IMPLEMENTATION", IDENTIFIER),
        ("INTERFACE", INTERFACE),
        ("CATEGORY", CATEGORY),
    ];
    for (name, value) in names {
        let _ = writeln!(text, "{name} = {}", quoted(value)?);
    }
    text.push_str("\n# Method: its help, and name and help of each argument.\nFUNCTIONS = {\n");
    for function in FUNCTIONS {
        let _ = writeln!(text, "    {}: (", quoted(&function.name.to_lowercase())?);
        let _ = writeln!(text, "        {},\n        (", quoted(function.help)?);
        for argument in function.arguments {
            let _ = writeln!(text, "            ({}, {}),", quoted(argument.name)?, quoted(argument.help)?);
        }
        text.push_str("        ),\n    ),\n");
    }
    text.push_str("}\n");
    Ok(text)
}

/// A text as Python writes it. Printable ASCII is written alike in both languages.
fn quoted(text: &str) -> Result<String, String> {
    match text.chars().find(|c| !matches!(c, ' '..='~')) {
        None => Ok(format!("{text:?}")),
        Some(c) => Err(format!("{text:?} holds {c:?}, allowed is printable ASCII")),
    }
}
