//! The sample programs that call the C interface, in every language: built, run, and compared to the last bit.
//!
//! Their texts must be those that `flood_wall.rs` makes from the library itself. A language that is not installed is
//! said to have been left out, and fails where HENCE_REQUIRE_TOOLS is set.

mod flood_wall;
#[allow(dead_code)] // parts of it serve the other tests of the C interface
mod library;
mod sample;
mod two_walls;

use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::Command;

use sample::{LIBRARY_PATH, Sample};

/// Says something past the test harness, which keeps what a passing test prints to itself.
fn say(message: &str) {
    writeln!(std::io::stderr(), "{message}").expect("standard error");
}

/// Says what did not run; a failure where everything has to.
fn did_not_run(language: &str, why: &str) {
    let message = format!("samples in {language} did not run: {why}");
    assert!(std::env::var_os("HENCE_REQUIRE_TOOLS").is_none(), "{message}");
    say(&message);
}

/// The first line of what a tool says of its version; none, said aloud, where it is not there.
fn version(language: &str, tool: impl AsRef<Path>, arguments: &[&str]) -> Option<String> {
    let tool = tool.as_ref();
    if !cfg!(target_os = "linux") {
        did_not_run(language, "their lines are those of Linux");
        return None;
    }
    let output = Command::new(tool).args(arguments).output().ok().filter(|output| output.status.success());
    let Some(output) = output else {
        did_not_run(language, &format!("no working {}", tool.display()));
        return None;
    };
    let said = String::from_utf8_lossy(&output.stdout).into_owned();
    Some(said.lines().next().unwrap_or_default().to_owned())
}

/// Says with what a language ran.
fn ran(language: &str, version: &str) {
    say(&format!("samples in {language} ran with {version}"));
}

/// Runs again under valgrind: no memory is lost, and none used that is not the program's.
fn check_memory(sample: &Sample, language: &str) {
    let under = format!("{language} under valgrind");
    let Some(valgrind) = version(&under, "valgrind", &["--version"]) else { return };
    sample.check("valgrind -q --leak-check=full --error-exitcode=9 ", &[]);
    ran(&under, &valgrind);
}

fn compiled(language: &str, compiler: &str, program: &str, strict: &str) {
    let Some(version) = version(language, compiler, &["--version"]) else { return };
    let sample = Sample::new(program);
    assert!(sample.lines[0].starts_with(&format!("{compiler} {strict} ")), "{}", sample.lines[0]);
    sample.build(&[]);
    sample.check("", &[]);
    ran(language, &version);
    check_memory(&sample, language);
}

#[test]
fn c() {
    compiled("C", "cc", "samples/c/flood_wall.c", "-std=c99 -Wall -Wextra -Werror -pedantic");
}

/// The standard of C++ and the warnings that the samples must do without.
const CPP: &str = "-std=c++17 -Wall -Wextra -Werror -pedantic";

#[test]
fn cpp() {
    compiled("C++", "c++", "samples/cpp/flood_wall.cpp", CPP);
}

/// What hence.hpp offers beyond the sample, against the library; the handle moves and is freed once.
#[test]
fn cpp_layer() {
    let Some(version) = version("C++", "c++", &["--version"]) else { return };
    let sample = Sample::new("samples/cpp/flood_wall.cpp");
    let wrapper = library::root().join("tests/capi/c/wrapper.cpp");
    let compile = format!("c++ {CPP} -Iinclude -Isamples/cpp -Ltarget/release -o target/wrapper");
    let output = sample.shell(&compile, &[wrapper.to_str().expect("a path in UTF-8"), "-lhence"], &[]);
    assert!(output.status.success(), "{}", library::said(&output));
    let output = sample.shell(&format!("{LIBRARY_PATH}target/wrapper"), &[], &[]);
    assert_eq!(library::said(&output), flood_wall::layer().expect("a text"));
    ran("C++ (hence.hpp)", &version);
}

/// A Python with numpy: the one of HENCE_PYTHON, else `python3`.
fn python_with_numpy() -> Option<(PathBuf, String)> {
    let python = PathBuf::from(std::env::var_os("HENCE_PYTHON").unwrap_or_else(|| "python3".into()));
    let script =
        "import platform, numpy; print('Python', platform.python_version(), 'numpy', numpy.__version__)";
    let version = version("Python with numpy", &python, &["-c", script])?;
    Some((python, version))
}

#[test]
fn python() {
    let Some((python, version)) = python_with_numpy() else { return };
    let mut sample = Sample::new("samples/python/flood_wall.py");
    let line = sample.lines.last_mut().expect("a line that runs it");
    *line = line.replace("python3 ", &format!("'{}' ", python.display()));
    sample.build(&[]);
    sample.check("", &[]);
    ran("Python", &version);
}

/// Doubles without gaps go to the library where they stand; others are first made into such an array.
#[test]
fn numpy_arrays_are_not_copied() {
    let Some((python, _)) = python_with_numpy() else { return };
    let script = "import sys\n\
        sys.path.insert(0, 'samples/python')\n\
        import ctypes, hence, numpy as np\n\
        address = lambda array: ctypes.addressof(hence._pointer(hence._numbers(array)).contents)\n\
        table = np.ones((4, 101))\n\
        print(address(table[1:]) - table.ctypes.data, address(table[:, 1]) == table.ctypes.data + 8)\n\
        print(hence._numbers(np.arange(3)).dtype)";
    let sample = Sample::new("samples/python/flood_wall.py");
    let output = sample.shell(&format!("{LIBRARY_PATH}'{}' -c", python.display()), &[script], &[]);
    let said = String::from_utf8_lossy(&output.stderr);
    assert_eq!(String::from_utf8_lossy(&output.stdout), "808 False\nfloat64\n", "{said}");
}

/// What hence.py offers beyond the samples, by the bits of each number; they are those of the layer for C++.
#[test]
fn python_layer() {
    let Some((python, version)) = python_with_numpy() else { return };
    let script = "import sys\n\
        sys.path.insert(0, 'samples/python')\n\
        import hence, numpy as np\n\
        show = lambda x: print(f'{np.float64(x).view(np.uint64):016x}')\n\
        four, shares = [2, 2.5, 2.25, 3], [0.4, 0.3, 0.2, 0.1]\n\
        show(hence.elasticity_from_brackets(shares, shares, four))\n\
        show(hence.hazard_from_probability(0.01, hence.CONTINUOUS))\n\
        growth = hence.growth(four, [2020, 2021, 2022, 2023])\n\
        for x in growth.mean_growth, growth.persistence, growth.persistence_error: show(x)\n\
        show(hence.utility(2.5, 1.5))\n\
        show(hence.marginal_utility(2.5, 1.5))\n\
        show(hence.welfare(four, range(4), 0.01, 1.5))\n\
        show(hence.compensation(0.5, 2, 3, 10, 0.01, 1.5))\n\
        show(hence.compensating_variation(shares, four, shares, 2, 0.4, 1.5))\n\
        show(hence.equally_distributed_equivalent(four, shares, 1.5))\n\
        show(hence.switching_multiplier(20, -100))\n\
        with hence.Basis('3.5%') as basis:\n\
        \tshow(basis.instantaneous_rates([7.0])[0])\n\
        \tflows = np.poly([1 + 0.05 * k for k in range(1, 10)])\n\
        \tprint(basis.switching_values(hence.RATE, np.arange(10.0), flows, 0, 1).size)";
    let sample = Sample::new("samples/python/flood_wall.py");
    let output = sample.shell(&format!("{LIBRARY_PATH}'{}' -c", python.display()), &[script], &[]);
    let said = library::said(&output);
    let layer = flood_wall::layer().expect("a text");
    // Behind the first numbers, which the layer for Python does not offer, and the rates of a curve.
    let shared: Vec<&str> = layer.lines().skip(15).take(12).collect();
    let flat = hence_core::RateLine::parse("3.5%").and_then(|line| line.spec().curve(&Default::default()));
    let rate = flat.and_then(|curve| curve.instantaneous_rate(7.0)).expect("a rate");
    assert_eq!(said, format!("{}\n{:016x}\n9\n", shared.join("\n"), rate.to_bits()));
    ran("Python (hence.py)", &version);
}

/// The program that weighs two walls, in the languages whose layers offer what it calls.
#[test]
fn two_walls() {
    let expected = two_walls::text().expect("a text");
    for (language, compiler, program) in
        [("C", "cc", "samples/c/two_walls.c"), ("C++", "c++", "samples/cpp/two_walls.cpp")]
    {
        let Some(version) = version(language, compiler, &["--version"]) else { continue };
        let sample = Sample::new(program);
        sample.build(&[]);
        sample.check_alone("", &expected);
        ran(&format!("{language} (two walls)"), &version);
    }
    let Some((python, version)) = python_with_numpy() else { return };
    let mut sample = Sample::new("samples/python/two_walls.py");
    let line = sample.lines.last_mut().expect("a line that runs it");
    *line = line.replace("python3 ", &format!("'{}' ", python.display()));
    sample.check_alone("", &expected);
    ran("Python (two walls)", &version);
}

#[test]
fn r() {
    let Some(version) = version("R", "R", &["--version"]) else { return };
    let sample = Sample::new("samples/r/flood_wall.R");
    sample.build(&[]);
    sample.check("", &[]);
    ran("R", &version);
}

/// The folder of the Java that `javac` is of, unless JAVA_HOME names one.
fn java_home() -> Option<String> {
    if let Ok(home) = std::env::var("JAVA_HOME") {
        return Some(home);
    }
    let path = std::env::var_os("PATH")?;
    let javac = std::env::split_paths(&path).map(|folder| folder.join("javac")).find(|file| file.exists())?;
    let home = javac.canonicalize().ok()?.parent()?.parent()?.to_owned();
    home.to_str().map(str::to_owned)
}

#[test]
fn java() {
    let Some(version) = version("Java", "javac", &["--version"]) else { return };
    let home = java_home().expect("the folder of javac");
    let sample = Sample::new("samples/java/FloodWall.java");
    sample.build(&[("JAVA_HOME", &home)]);
    sample.check("", &[]);
    // The virtual machine looks for misuse of its native interface, and would say so on the output compared.
    sample.check("", &[("JAVA_TOOL_OPTIONS", "-Xcheck:jni")]);
    ran("Java", &version);
}

#[test]
fn csharp() {
    if version("C#", "mcs", &["--version"]).is_none() {
        return;
    }
    let Some(version) = version("C#", "mono", &["--version"]) else { return };
    let sample = Sample::new("samples/csharp/FloodWall.cs");
    sample.build(&[]);
    sample.check("", &[]);
    ran("C#", &version);
}
