//! Files and folders that do not do as they are told: whatever happens, the input stays as it was, and an output is
//! there whole or not at all, with nothing left beside it.

use std::path::{Path, PathBuf};

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, fill_file};
use hence_workbook::package::{Changes, Package};
use hence_workbook::problem::Result;
use hence_workbook::report::Report;

use crate::small::Small;

/// A folder with one workbook in it.
struct Desk {
    folder: tempfile::TempDir,
    input: PathBuf,
    before: Vec<u8>,
}

impl Desk {
    fn new() -> Desk {
        Desk::named("plan.xlsx")
    }

    fn named(name: impl AsRef<Path>) -> Desk {
        let folder = tempfile::tempdir().unwrap();
        let input = folder.path().join(name);
        let before = book();
        std::fs::write(&input, &before).unwrap();
        Desk { folder, input, before }
    }

    fn path(&self, name: impl AsRef<Path>) -> PathBuf {
        self.folder.path().join(name)
    }

    fn fill(&self, output: &Path, force: bool) -> Result<Report> {
        fill_file(&self.input, output, &FillRequest::default(), &Catalogue::builtin(), force)
    }

    /// The code of the error that filling ends with; the input and the list of files are as they were.
    fn refused(&self, output: &Path, force: bool) -> &'static str {
        let listed = self.files();
        let error = self.fill(output, force).expect_err("an error");
        assert!(error.is_about_files(), "{error}");
        assert_eq!(self.files(), listed);
        assert_eq!(std::fs::read(&self.input).unwrap(), self.before);
        error.problems()[0].code
    }

    fn files(&self) -> Vec<PathBuf> {
        let mut files: Vec<PathBuf> =
            std::fs::read_dir(self.folder.path()).unwrap().map(|entry| entry.unwrap().path()).collect();
        files.sort();
        files
    }
}

fn book() -> Vec<u8> {
    let cells = "
        A1: 'Base | 2025 | '3.5%
        A2: 'Year | 2025 | 2026 | 2027
        A3: 'Works | 100 | 50 | 25
        A4: 'Access | 0 | 80 | 90
        A5: 'NPV";
    let names = "hence_base B1, hence_basis C1, hence_years B2:D2, hence_cost_works B3:D3, \
        hence_benefit_access B4:D4, hence_npv B5";
    Small::default().sheet("Plan", cells).names(names).bytes()
}

fn is_whole(path: &Path) -> bool {
    Package::open(path).is_ok_and(|package| package.bytes().len() > book().len())
}

#[test]
fn an_output_that_exists_needs_force() {
    let desk = Desk::new();
    let output = desk.path("out.xlsx");
    std::fs::write(&output, b"someone's work").unwrap();
    assert_eq!(desk.refused(&output, false), "output-exists");
    assert_eq!(std::fs::read(&output).unwrap(), b"someone's work");
    desk.fill(&output, true).unwrap();
    assert!(is_whole(&output));
    assert_eq!(desk.files().len(), 2);
}

#[test]
fn folders_and_missing_folders_are_no_outputs() {
    let desk = Desk::new();
    let folder = desk.path("folder.xlsx");
    std::fs::create_dir(&folder).unwrap();
    for force in [false, true] {
        assert_eq!(desk.refused(&folder, force), "cannot-write");
        assert_eq!(desk.refused(&desk.path("none/out.xlsx"), force), "cannot-write");
        // A file where a folder should be.
        assert_eq!(desk.refused(&desk.input.join("out.xlsx"), force), "cannot-write");
        assert_eq!(desk.refused(&desk.path("x".repeat(300)), force), "cannot-write");
    }
}

#[test]
fn what_is_no_workbook_file_is_no_input() {
    let desk = Desk::new();
    for input in [desk.path("none.xlsx"), desk.folder.path().to_owned()] {
        let error =
            fill_file(&input, &desk.path("out.xlsx"), &FillRequest::default(), &Catalogue::builtin(), false)
                .unwrap_err();
        assert_eq!(error.problems()[0].code, "cannot-read");
        assert!(error.is_about_files());
    }
    assert_eq!(desk.files().len(), 1);
}

#[test]
fn odd_names_are_names_like_others() {
    let names = [
        "Übersicht 数字 \u{1F30A}.xlsx",
        "a & b <c> \"d\" 'e'.xlsx",
        "-rf.xlsx",
        "100%.xlsx",
        ".xlsx",
        "a\tb\u{1}c\n.xlsx",
    ];
    for name in names {
        let desk = Desk::named(name);
        let output = desk.path(format!("out {name}"));
        let filled = desk.fill(&output, false);
        assert!(filled.is_ok(), "{name:?}: {}", filled.unwrap_err());
        assert!(is_whole(&output), "{name:?}");
    }
}

#[cfg(unix)]
mod unix {
    use std::os::unix::ffi::OsStrExt;
    use std::os::unix::fs::{MetadataExt, PermissionsExt, symlink};
    use std::process::Command;

    use super::*;

    #[test]
    fn names_need_not_be_unicode() {
        let desk = Desk::named(std::ffi::OsStr::from_bytes(b"caf\xE9.xlsx"));
        let output = desk.path(std::ffi::OsStr::from_bytes(b"caf\xE9.audited.xlsx"));
        desk.fill(&output, false).unwrap();
        assert!(is_whole(&output));
    }

    #[test]
    fn the_input_by_another_name_is_never_written() {
        let desk = Desk::new();
        let (soft, hard, loops) = (desk.path("soft.xlsx"), desk.path("hard.xlsx"), desk.path("loop"));
        symlink(&desk.input, &soft).unwrap();
        std::fs::hard_link(&desk.input, &hard).unwrap();
        symlink(desk.folder.path(), &loops).unwrap();
        let round = loops.join("./plan.xlsx");
        for output in [&desk.input, &soft, &hard, &round] {
            for force in [false, true] {
                assert_eq!(desk.refused(output, force), "output-is-input", "{}", output.display());
            }
        }
    }

    #[test]
    fn a_link_is_replaced_and_not_the_file_it_leads_to() {
        let desk = Desk::new();
        let (link, target, lost) = (desk.path("link.xlsx"), desk.path("target.xlsx"), desk.path("lost.xlsx"));
        std::fs::write(&target, b"someone's work").unwrap();
        symlink(&target, &link).unwrap();
        symlink(desk.path("nowhere.xlsx"), &lost).unwrap();
        for output in [&link, &lost] {
            assert_eq!(desk.refused(output, false), "output-exists");
            desk.fill(output, true).unwrap();
            assert!(is_whole(output) && !output.is_symlink());
        }
        assert_eq!(std::fs::read(&target).unwrap(), b"someone's work");
        assert!(!desk.path("nowhere.xlsx").exists());
    }

    #[test]
    fn devices_and_pipes_are_not_replaced() {
        let desk = Desk::new();
        let pipe = desk.path("pipe.xlsx");
        assert!(Command::new("mkfifo").arg(&pipe).status().unwrap().success());
        for output in [Path::new("/dev/null"), &pipe] {
            assert_eq!(desk.refused(output, true), "cannot-write");
            assert!(!output.metadata().unwrap().is_file());
        }
    }

    #[test]
    fn a_pipe_can_be_an_input() {
        let desk = Desk::new();
        let (pipe, output) = (desk.path("pipe.xlsx"), desk.path("out.xlsx"));
        assert!(Command::new("mkfifo").arg(&pipe).status().unwrap().success());
        let (write_to, bytes) = (pipe.clone(), desk.before.clone());
        let writer = std::thread::spawn(move || std::fs::write(write_to, bytes));
        fill_file(&pipe, &output, &FillRequest::default(), &Catalogue::builtin(), false).unwrap();
        writer.join().unwrap().unwrap();
        assert!(is_whole(&output));
    }

    #[test]
    fn a_new_file_leaves_permissions_to_the_users_mask() {
        let desk = Desk::new();
        let (plain, output) = (desk.path("plain"), desk.path("out.xlsx"));
        std::fs::write(&plain, b"").unwrap();
        desk.fill(&output, false).unwrap();
        assert_eq!(output.metadata().unwrap().mode(), plain.metadata().unwrap().mode());
    }

    #[test]
    fn without_room_for_temporary_files_nothing_is_written() {
        const TRY: &str = "HENCE_TEST_TEMPORARY";
        if let Some(folder) = std::env::var_os(TRY) {
            let folder = PathBuf::from(folder);
            let (input, output) = (folder.join("plan.xlsx"), folder.join("out.xlsx"));
            let error = fill_file(&input, &output, &FillRequest::default(), &Catalogue::builtin(), false);
            println!("FILL {}", error.unwrap_err().problems()[0].code);
            return;
        }
        let desk = Desk::new();
        let name = "files::unix::without_room_for_temporary_files_nothing_is_written";
        let mut child = Command::new(std::env::current_exe().unwrap());
        child.args(["--exact", name, "--nocapture"]).env(TRY, desk.folder.path());
        let ended = child.env("TMPDIR", desk.path("nowhere")).output().unwrap();
        let text = String::from_utf8_lossy(&ended.stdout);
        assert!(text.contains("FILL cannot-write"), "{text}");
        assert_eq!(desk.files().len(), 1);
    }

    /// Whether this user is let into everything, as root is.
    fn all_powerful(desk: &Desk) -> bool {
        let probe = desk.path("probe");
        std::fs::create_dir(&probe).unwrap();
        std::fs::set_permissions(&probe, PermissionsExt::from_mode(0o500)).unwrap();
        let powerful = std::fs::write(probe.join("x"), b"").is_ok();
        if powerful {
            std::fs::remove_file(probe.join("x")).unwrap();
        }
        std::fs::remove_dir(&probe).unwrap();
        powerful
    }

    #[test]
    fn without_permission_nothing_is_read_or_written() {
        let desk = Desk::new();
        // No user may make files there.
        assert_eq!(desk.refused(Path::new("/proc/out.xlsx"), false), "cannot-write");
        if all_powerful(&desk) {
            println!(
                "this user may read and write everything: permissions of files and folders were not tried"
            );
            return;
        }
        let shut = desk.path("shut");
        std::fs::create_dir(&shut).unwrap();
        std::fs::set_permissions(&shut, PermissionsExt::from_mode(0o500)).unwrap();
        assert_eq!(desk.refused(&shut.join("out.xlsx"), false), "cannot-write");
        std::fs::set_permissions(&desk.input, PermissionsExt::from_mode(0o000)).unwrap();
        let error = desk.fill(&desk.path("out.xlsx"), false).unwrap_err();
        assert_eq!(error.problems()[0].code, "cannot-read");
    }

    /// Set in the process that fills one workbook: its output.
    const OUTPUT: &str = "HENCE_TEST_OUTPUT";

    /// The workbook with a picture in it that does not pack.
    fn bulky() -> Vec<u8> {
        let mut state = 1_u32;
        let noise = (0..400_000).map(|_| {
            state = state.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
            (state >> 24) as u8
        });
        let add = vec![("xl/media/noise.bin".to_owned(), noise.collect())];
        let package = Package::from_bytes("plan.xlsx", book()).unwrap();
        package.write(&Changes { add, ..Changes::default() }).unwrap()
    }

    /// A disk that takes files of up to 300 KB: writing fails (where the signal is ignored), or the process is ended in
    /// the middle of it, as by a kill. What was there stays, and no half file stands under the output's name.
    #[test]
    fn a_full_disk_or_a_kill_leaves_no_half_file() {
        if let Some(output) = std::env::var_os(OUTPUT) {
            let output = PathBuf::from(output);
            let input = output.with_file_name("plan.xlsx");
            let error = fill_file(&input, &output, &FillRequest::default(), &Catalogue::builtin(), true);
            println!("FILL {}", error.unwrap_err().problems()[0].code);
            return;
        }
        for (ignored, told) in [("trap '' XFSZ; ", true), ("", false)] {
            for there in [false, true] {
                let mut desk = Desk::new();
                desk.before = bulky();
                std::fs::write(&desk.input, &desk.before).unwrap();
                let output = desk.path("out.xlsx");
                if there {
                    std::fs::write(&output, b"someone's work").unwrap();
                }
                let mut child = Command::new("bash");
                child.args(["-c", &format!("{ignored}ulimit -c 0; ulimit -f 300; exec \"$@\""), "bash"]);
                child.arg(std::env::current_exe().unwrap());
                child.args([
                    "--exact",
                    "files::unix::a_full_disk_or_a_kill_leaves_no_half_file",
                    "--nocapture",
                ]);
                let ended = child.env(OUTPUT, &output).output().unwrap();
                let text = String::from_utf8_lossy(&ended.stdout).into_owned();
                assert_eq!(ended.status.success(), told, "{text}");
                assert_eq!(text.contains("FILL cannot-write"), told, "{text}");
                let held = std::fs::read(&output).ok();
                assert_eq!(held.as_deref(), there.then_some(&b"someone's work"[..]));
                if told {
                    assert_eq!(desk.files().len(), 1 + usize::from(there), "{:?}", desk.files());
                }
                assert_eq!(std::fs::read(&desk.input).unwrap(), desk.before);
            }
        }
    }
}

/// A template's content types, with the kind of its main part.
fn template(kind: &str) -> Vec<u8> {
    let package = Package::from_bytes("plan.xlsx", book()).unwrap();
    let types = String::from_utf8(package.part("[Content_Types].xml").unwrap().unwrap()).unwrap();
    let workbook = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml";
    assert!(types.contains(workbook));
    let mut changes = Changes::default();
    changes.replace.insert("[Content_Types].xml".into(), types.replace(workbook, kind).into_bytes());
    package.write(&changes).unwrap()
}

#[test]
fn a_template_gives_a_workbook_of_its_kind() {
    for (kind, extension, workbook) in [
        (
            "application/vnd.openxmlformats-officedocument.spreadsheetml.template.main+xml",
            "xlsx",
            "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml",
        ),
        (
            "application/vnd.ms-excel.template.macroEnabled.main+xml",
            "xlsm",
            "application/vnd.ms-excel.sheet.macroEnabled.main+xml",
        ),
    ] {
        let bytes = template(kind);
        let package = Package::from_bytes("plan.xltx", bytes.clone()).unwrap();
        assert!(package.is_template());
        assert_eq!(package.format().extension(), extension);
        let filled =
            hence_workbook::fill::fill(&package, &FillRequest::default(), &Catalogue::builtin()).unwrap();
        let made = Package::from_bytes("plan.xlsx", filled.bytes).unwrap();
        assert!(!made.is_template());
        assert_eq!(made.content_type(made.workbook_part()).as_deref(), Some(workbook));
        assert!(filled.report.problems.iter().any(|problem| problem.code == "template"), "it is said");
        // A copy with nothing changed is one too; the input is what it was.
        let copy = Package::from_bytes("copy.xlsx", package.write(&Changes::default()).unwrap()).unwrap();
        assert!(!copy.is_template());
        assert!(package.bytes() == bytes);
    }
}
