//! What the extension holds, what the function wizard shows of it, and what is refused.

use std::collections::BTreeMap;
use std::path::Path;
use std::process::Command;

use hence::worksheet::FUNCTIONS;

use super::office::Office;
use super::{IDENTIFIER, build, changed, extension, parts, target};

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
    let first = extension();
    assert!(build() == first, "two builds differ");
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
pub fn registered(office: &Office) -> Option<bool> {
    let list = office.installed();
    let (_, component) = list.split_once("/hence_addin.py")?;
    Some(component.trim_start().starts_with("is registered: yes"))
}
