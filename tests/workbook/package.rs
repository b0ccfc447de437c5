//! The package layer on real workbooks and on archives built here.
//!
//! Real workbooks come from the folder that the variable HENCE_CORPUS names; without it the tests that
//! need them say so and check nothing. Archives built here follow the public description of the zip format.

use std::collections::BTreeMap;
use std::io::{Cursor, Read};
use std::path::PathBuf;

use hence_workbook::package::{Changes, Package, same_file, write_atomically};
use hence_workbook::preflight::preflight;

use crate::hostile::read_all;

/// The real workbooks, or none with a message.
pub fn corpus() -> Vec<PathBuf> {
    let Some(folder) = std::env::var_os("HENCE_CORPUS") else {
        eprintln!("HENCE_CORPUS is not set: no real workbooks are checked");
        return Vec::new();
    };
    let mut files: Vec<PathBuf> = std::fs::read_dir(folder)
        .expect("HENCE_CORPUS names a folder")
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|e| e == "xlsx" || e == "xlsm"))
        .collect();
    files.sort();
    assert!(!files.is_empty(), "HENCE_CORPUS holds no workbooks");
    files
}

/// Name, packed bytes, time, attributes of every entry, read by a general zip library.
fn entries(bytes: &[u8]) -> Vec<(String, Vec<u8>, String)> {
    let mut zip = zip::ZipArchive::new(Cursor::new(bytes)).unwrap();
    (0..zip.len())
        .map(|i| {
            let mut entry = zip.by_index_raw(i).unwrap();
            let mut packed = Vec::new();
            entry.read_to_end(&mut packed).unwrap();
            let about = format!(
                "{:?} {} {} {:?} {:?} {:?}",
                entry.last_modified(),
                entry.crc32(),
                entry.size(),
                entry.unix_mode(),
                entry.comment(),
                entry.extra_data(),
            );
            (entry.name().expect("a name").into_owned(), packed, about)
        })
        .collect()
}

#[test]
fn writing_without_changes_keeps_every_entry() {
    for path in corpus() {
        let Ok(package) = Package::open(&path) else { continue };
        let written = package.write(&Changes::default()).unwrap();
        assert_eq!(entries(&written), entries(package.bytes()), "{}", path.display());
        assert_eq!(written, package.write(&Changes::default()).unwrap());
        let again = Package::from_bytes("again.xlsx", written).unwrap();
        assert!(again.parts().eq(package.parts()));
        for part in package.parts() {
            assert_eq!(again.part(part).unwrap(), package.part(part).unwrap(), "{part}");
        }
    }
}

#[test]
fn changed_parts_come_back_and_the_rest_stays() {
    for path in corpus() {
        let Ok(package) = Package::open(&path) else { continue };
        let main = package.workbook_part().to_owned();
        let mut text = package.part(&main).unwrap().unwrap();
        text.extend_from_slice(b"<!-- changed -->");
        let changes = Changes {
            replace: BTreeMap::from([(main.to_uppercase(), text.clone())]),
            add: vec![("xl/new.xml".to_owned(), b"<new/>".to_vec())],
            ..Changes::default()
        };
        let written = package.write(&changes).unwrap();
        let (before, after) = (entries(package.bytes()), entries(&written));
        assert_eq!(after.len(), before.len() + 1);
        assert_eq!(after.last().unwrap().0, "xl/new.xml");
        for (old, new) in before.iter().zip(&after) {
            assert_eq!(old.0, new.0);
            let entry = old.0.replace('\\', "/");
            assert_eq!(old == new, !entry.eq_ignore_ascii_case(&main), "{}", old.0);
        }
        let again = Package::from_bytes("again.xlsx", written).unwrap();
        assert_eq!(again.part(&main).unwrap().unwrap(), text);
        assert_eq!(again.part("/XL/New.xml").unwrap().unwrap(), b"<new/>");
        let removal = Changes { remove: ["xl/new.xml".to_owned()].into(), ..Changes::default() };
        assert!(!Package::from_bytes("b.xlsx", again.write(&removal).unwrap()).unwrap().has("xl/new.xml"));
    }
}

#[test]
fn files_are_written_whole_or_not_at_all() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("out.xlsx");
    write_atomically(&path, b"one", false).unwrap();
    let refused = write_atomically(&path, b"two", false).unwrap_err();
    assert_eq!(refused.problems()[0].code, "output-exists");
    assert_eq!(std::fs::read(&path).unwrap(), b"one");
    write_atomically(&path, b"three", true).unwrap();
    assert_eq!(std::fs::read(&path).unwrap(), b"three");
    let lost = write_atomically(&folder.path().join("none/out.xlsx"), b"x", false).unwrap_err();
    assert_eq!(lost.problems()[0].code, "cannot-write");
    let busy = write_atomically(folder.path(), b"x", true).unwrap_err();
    assert_eq!(busy.problems()[0].code, "cannot-write");
    assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 1, "no temporary file is left");
}

#[test]
fn one_file_by_two_paths() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("a.xlsx");
    std::fs::write(&path, b"a").unwrap();
    let other = folder.path().join("b.xlsx");
    assert!(same_file(&path, &folder.path().join(".").join("a.xlsx")));
    assert!(!same_file(&path, &other));
    assert!(same_file(&other, &folder.path().join("./b.xlsx")));
    #[cfg(unix)]
    {
        std::os::unix::fs::symlink(&path, &other).unwrap();
        assert!(same_file(&path, &other));
    }
}

/// Real files are let in, and the spreadsheet library reads all that is let in. Strict, signed and
/// backslash-named ones can be read, but take no new sheets. Prints the table.
#[test]
fn real_workbooks_pass_the_checks() {
    let mut refused = Vec::new();
    for path in corpus() {
        let name = path.file_name().unwrap().to_string_lossy().into_owned();
        let checked = Package::open(&path).and_then(|package| Ok((preflight(&package)?, package)));
        match checked {
            Ok((warnings, package)) => {
                let codes: Vec<&str> = warnings.iter().map(|problem| problem.code).collect();
                let graft = package.graftable().map_or_else(|problem| problem.code, |()| "accepted");
                let (cells, _) = read_all(&package);
                println!("{name:55} {cells:>6} cells  {graft} {codes:?}");
                let signed = name.contains("signed");
                assert_eq!(graft == "signed", signed, "{name}");
            }
            Err(error) => {
                println!("{name:55} refused: {error}");
                refused.push(name);
            }
        }
    }
    assert!(refused.is_empty(), "refused without need: {refused:?}");
}
