//! The add-ins: the function table, a real LibreOffice, and a stand-in host for Excel under Wine.

mod calc;
mod excel;
mod functions;
mod table;
#[path = "../wine.rs"]
mod wine;

use std::path::{Path, PathBuf};

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("..")
}
