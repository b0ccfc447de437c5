//! The release library, built once for the programs that are linked with it.

use std::path::{Path, PathBuf};
use std::process::Command;
use std::sync::OnceLock;

/// The folder that holds libhence.so and libhence.a, built as users build it.
pub fn folder() -> &'static Path {
    static FOLDER: OnceLock<PathBuf> = OnceLock::new();
    FOLDER.get_or_init(|| {
        let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("..");
        let mut build = Command::new(env!("CARGO"));
        build.current_dir(&root).args(["build", "--release", "--locked", "-p", "hence-ffi"]);
        let output = build.output().expect("cargo runs");
        assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
        let target = std::env::var_os("CARGO_TARGET_DIR").unwrap_or_else(|| "target".into());
        root.join(target).join("release")
    })
}
