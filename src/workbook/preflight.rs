//! Checks of everything that has to hold before a spreadsheet library may see the file.

use crate::package::Package;
use crate::problem::{Problem, Result};

/// Checks the whole package.
pub fn preflight(_package: &Package) -> Result<Vec<Problem>> {
    Ok(Vec::new())
}
