//! A LibreOffice with a throw-away profile: extensions go in and out, workbooks are opened and saved.

use std::ffi::OsStr;
use std::os::unix::fs::{MetadataExt, chown};
use std::os::unix::process::CommandExt;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

/// How long one run of a program may take, in seconds.
const PATIENCE: &str = "300";
/// The user without rights, as which LibreOffice runs where the tests run as root: root may install extensions for all
/// users only.
const NOBODY: u32 = 65534;
/// Asks a running LibreOffice through its own bridge.
const ASK: &str = include_str!("ask.py");
/// Opens workbooks with every formula computed anew, whatever the file says.
const CALCULATE_ALL: [(&str, &str, &str); 2] = [
    ("org.openoffice.Office.Calc/Formula/Load", "OOXMLRecalcMode", "0"),
    ("org.openoffice.Office.Calc/Formula/Load", "ODFRecalcMode", "0"),
];

pub struct Office {
    folder: tempfile::TempDir,
    soffice: PathBuf,
    unopkg: PathBuf,
    python: PathBuf,
    user: Option<u32>,
}

/// Says that something is absent; a failure where everything has to be there.
pub fn absent(what: &str) {
    let message = format!("{what} is not there: this test did not run");
    assert!(std::env::var_os("HENCE_REQUIRE_TOOLS").is_none(), "{message}");
    println!("{message}");
}

/// A program on the path.
fn program(name: &str) -> Option<PathBuf> {
    let path = std::env::var_os("PATH").unwrap_or_default();
    std::env::split_paths(&path).map(|folder| folder.join(name)).find(|file| file.is_file())
}

/// A Python that has LibreOffice's bridge: LibreOffice's own, or the system's, which need not be the first on the path.
fn python_of(soffice: &Path) -> Option<PathBuf> {
    let own = soffice.canonicalize().ok()?.parent()?.join("python");
    let path = std::env::var_os("PATH").unwrap_or_default();
    let all = std::env::split_paths(&path).map(|folder| folder.join("python3"));
    std::iter::once(own).chain(all).chain(["/usr/bin/python3".into()]).find(|python| {
        Command::new(python).args(["-c", "import uno"]).output().is_ok_and(|run| run.status.success())
    })
}

/// A settings file of a profile, from path, name and value of each setting.
fn settings(all: &[(&str, &str, &str)]) -> String {
    let item = |(path, name, value): &(&str, &str, &str)| {
        format!(
            "<item oor:path=\"/{path}\"><prop oor:name=\"{name}\" oor:op=\"fuse\"><value>{value}</value></prop></item>\n"
        )
    };
    let items: String = all.iter().map(item).collect();
    format!(
        "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n\
         <oor:items xmlns:oor=\"http://openoffice.org/2001/registry\">\n{items}</oor:items>\n"
    )
}

impl Office {
    /// With a new profile; none where LibreOffice, its tool for extensions or its bridge to Python is absent.
    pub fn new(locale: Option<&str>) -> Option<Self> {
        let Some(soffice) = program("soffice") else {
            absent("LibreOffice (soffice)");
            return None;
        };
        let beside = soffice.canonicalize().expect("soffice").with_file_name("unopkg");
        let Some(unopkg) = program("unopkg").or_else(|| beside.is_file().then_some(beside)) else {
            absent("LibreOffice's unopkg");
            return None;
        };
        let Some(python) = python_of(&soffice) else {
            absent("a Python with LibreOffice's bridge (python3-uno)");
            return None;
        };
        let folder = tempfile::tempdir().expect("a temporary folder");
        let root = folder.path().metadata().expect("a temporary folder").uid() == 0;
        let office = Office { folder, soffice, unopkg, python, user: root.then_some(NOBODY) };
        office.own(office.folder.path());
        for path in ["home", "profile", "profile/user"] {
            office.folder(path);
        }
        let mut all = CALCULATE_ALL.to_vec();
        all.extend(locale.map(|locale| ("org.openoffice.Setup/L10N", "ooSetupSystemLocale", locale)));
        office.give("profile/user/registrymodifications.xcu", settings(&all).as_bytes());
        office.give("ask.py", ASK.as_bytes());
        Some(office)
    }

    fn own(&self, path: &Path) {
        if let Some(user) = self.user {
            chown(path, Some(user), Some(user)).expect("root may give files away");
        }
    }

    /// A folder of LibreOffice's, made.
    pub fn folder(&self, name: &str) -> PathBuf {
        let path = self.folder.path().join(name);
        std::fs::create_dir_all(&path).expect("a temporary folder");
        self.own(&path);
        path
    }

    /// A file where LibreOffice can read it.
    pub fn give(&self, name: &str, bytes: &[u8]) -> PathBuf {
        let path = self.folder.path().join(name);
        std::fs::write(&path, bytes).expect("a temporary file");
        self.own(&path);
        path
    }

    fn profile(&self) -> String {
        format!("file://{}", self.folder.path().join("profile").display())
    }

    /// Runs a program with the profile's own home, in the language of the messages that are compared.
    fn run<S: AsRef<OsStr>>(&self, program: &Path, arguments: impl IntoIterator<Item = S>) -> Output {
        let mut command = Command::new("timeout");
        command.args(["--kill-after=10", PATIENCE]).arg(program).args(arguments);
        command.env("HOME", self.folder.path().join("home")).env("LC_ALL", "C.UTF-8");
        command.current_dir(self.folder.path());
        if let Some(user) = self.user {
            command.uid(user).gid(user);
        }
        command.output().expect("timeout (coreutils) runs")
    }

    fn unopkg(&self, arguments: &[&str]) -> Result<String, String> {
        let profile = format!("-env:UserInstallation={}", self.profile());
        let run = self.run(&self.unopkg, arguments.iter().copied().chain([profile.as_str()]));
        let said = String::from_utf8_lossy(&run.stdout).into_owned() + &String::from_utf8_lossy(&run.stderr);
        if run.status.success() { Ok(said) } else { Err(said) }
    }

    /// Installs an extension in place of an older one; what was said, as an error where it ends with one.
    pub fn install(&self, extension: &[u8]) -> Result<String, String> {
        let path = self.give("hence.oxt", extension);
        self.unopkg(&["add", "--force", &path.to_string_lossy()])
    }

    /// Removes an extension by its own name.
    pub fn remove(&self, identifier: &str) {
        self.unopkg(&["remove", identifier]).unwrap_or_else(|said| panic!("{identifier} stays: {said}"));
    }

    /// The extensions that are installed, as LibreOffice lists them.
    pub fn installed(&self) -> String {
        self.unopkg(&["list"]).unwrap_or_else(|said| panic!("no list: {said}"))
    }

    /// Opens workbooks in one run and saves them in another format, in a new folder.
    pub fn convert(&self, files: &[PathBuf], format: &str, folder: &str) -> Vec<PathBuf> {
        let folder = self.folder(folder);
        let mut arguments = vec![
            format!("-env:UserInstallation={}", self.profile()),
            "--headless".to_owned(),
            "--norestore".to_owned(),
            "--convert-to".to_owned(),
            format.to_owned(),
            "--outdir".to_owned(),
            folder.to_string_lossy().into_owned(),
        ];
        arguments.extend(files.iter().map(|file| file.to_string_lossy().into_owned()));
        let run = self.run(&self.soffice, &arguments);
        let made = |file: &PathBuf| {
            let name = file.with_extension(format);
            let path = folder.join(name.file_name().expect("a file name"));
            assert!(path.is_file(), "no {}: {}", path.display(), String::from_utf8_lossy(&run.stderr));
            path
        };
        files.iter().map(made).collect()
    }

    /// What ask.py says.
    pub fn ask(&self, arguments: &[&str]) -> String {
        let soffice = self.soffice.to_string_lossy().into_owned();
        let all = ["ask.py", &soffice, &self.profile()].map(str::to_owned);
        let run = self.run(&self.python, all.iter().map(String::as_str).chain(arguments.iter().copied()));
        assert!(run.status.success(), "ask.py: {}", String::from_utf8_lossy(&run.stderr));
        String::from_utf8(run.stdout).expect("text")
    }
}
