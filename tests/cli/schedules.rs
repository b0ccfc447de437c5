//! `hence schedules`: sources and folders of one's own.

use crate::{code, run, stderr, stdout};

#[test]
fn lists_and_prints_with_the_source() {
    let list = run(&["schedules"]);
    assert_eq!(code(&list), 0);
    assert!(stdout(&list).contains("uk-2003"));
    let one = stdout(&run(&["schedules", "uk-2003"]));
    for part in ["The Green Book", "HM Treasury", "2003", "3.5% to 30", "set by the body"] {
        assert!(one.contains(part), "{part} is missing from:\n{one}");
    }
    let unknown = run(&["schedules", "atlantis-1900"]);
    assert_eq!(code(&unknown), 2);
    assert!(stderr(&unknown).contains("unknown-schedule"));
}

#[test]
fn a_folder_of_ones_own_comes_first() {
    let folder = tempfile::tempdir().unwrap();
    let text = "id = \"ostrey-2026\"\ntitle = \"Rules for works on the Ostrey\"\nbody = \"Ostrey Rivers Board\"\n\
                year = 2026\nplace = \"rule 4\"\naddress = \"\"\nline = \"2% to 50, 1% after\"\nprices = \"real\"\n\
                status = \"current\"\ncomplete = true\nchecked = \"an invented body\"\n";
    std::fs::write(folder.path().join("ostrey.toml"), text).unwrap();
    let dir = folder.path().to_str().unwrap();
    let output = run(&["curve", "ostrey-2026", "--schedules", dir, "--at", "1", "--csv"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let by_variable = crate::hence()
        .args(["curve", "ostrey-2026", "--at", "1", "--csv"])
        .env("HENCE_SCHEDULES", dir)
        .output()
        .unwrap();
    assert_eq!(stdout(&output), stdout(&by_variable));
    assert!(stdout(&output).contains("0.98039215686274"));
    std::fs::write(folder.path().join("broken.toml"), "id = 3").unwrap();
    let broken = run(&["schedules", "--schedules", dir]);
    assert_eq!(code(&broken), 2);
    assert!(stderr(&broken).contains("broken.toml"), "{}", stderr(&broken));
    let absent = run(&["schedules", "--schedules", "/no/such/folder"]);
    assert_eq!(code(&absent), 2);
}
