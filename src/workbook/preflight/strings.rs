//! Shared strings and styles: a small file must not become a large table in memory.

use quick_xml::events::Event;

use super::stream::Stream;
use crate::package::Package;
use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::xml::attribute;

/// What a reader's table of shared strings may take, in bytes, at [`STRING_COST`] a string and its text.
pub const MAX_STRINGS: u64 = 192 << 20;
/// What one string takes beside its text: pointer, length, capacity and the allocator's share.
pub const STRING_COST: u64 = 64;
/// How many strings more than there are the table may claim; readers reserve room by its claim.
pub const MAX_CLAIM: u64 = 1_000_000;
/// Cell formats, at most: the documented limit of Excel.
pub const MAX_FORMATS: usize = 65_490;
/// An attribute of the styles, in bytes: a number format has 255 characters, and each cell format may
/// copy one.
pub const MAX_STYLE_TEXT: usize = 2_048;

fn refuse(code: &'static str, message: String, hint: &str) -> WorkbookError {
    Problem::error(code, Place::default(), message).hint(hint).into()
}

/// The number of shared strings; 0 where there are none.
pub(super) fn check_strings(package: &Package, part: &str) -> Result<usize> {
    let Some(mut stream) = Stream::open(package, part)? else { return Ok(0) };
    let (mut count, mut cost, mut claim) = (0_u64, 0_u64, 0_u64);
    while let Some(event) = stream.next()? {
        match event {
            Event::Start(tag) | Event::Empty(tag) => match tag.local_name().as_ref() {
                b"sst" => {
                    let stated = attribute(part, &tag, "uniqueCount")?;
                    claim = stated.and_then(|stated| stated.trim().parse().ok()).unwrap_or(0);
                }
                b"si" => {
                    count += 1;
                    cost += STRING_COST;
                }
                _ => {}
            },
            Event::Text(text) => cost += text.len() as u64,
            Event::CData(text) => cost += text.len() as u64,
            _ => {}
        }
        if cost > MAX_STRINGS {
            return Err(refuse(
                "too-many-strings",
                format!("the workbook's texts take more than {} MB", MAX_STRINGS >> 20),
                "delete sheets that the appraisal does not need",
            ));
        }
    }
    if claim > count + MAX_CLAIM {
        return Err(refuse(
            "string-count",
            format!("{part} claims {claim} texts and holds {count}"),
            "open the file in a spreadsheet program and save it again",
        ));
    }
    Ok(count as usize)
}

/// Square brackets of one number format, at most; readers count them in a byte.
const MAX_BRACKETS: usize = 200;

/// Checks the styles part.
pub(super) fn check_styles(package: &Package, part: &str) -> Result<()> {
    let Some(mut stream) = Stream::open(package, part)? else { return Ok(()) };
    let mut formats = 0;
    while let Some(event) = stream.next()? {
        let (Event::Start(tag) | Event::Empty(tag)) = event else { continue };
        let long = tag.attributes().flatten().any(|attribute| {
            attribute.value.len() > MAX_STYLE_TEXT
                || attribute.value.iter().filter(|&&c| c == b'[').count() > MAX_BRACKETS
        });
        formats += usize::from(tag.local_name().as_ref() == b"xf");
        if long || formats > 2 * MAX_FORMATS {
            return Err(refuse(
                "too-many-formats",
                format!("{part} holds more than {MAX_FORMATS} cell formats, or one with an overlong text"),
                "remove unused cell styles in a spreadsheet program and save it again",
            ));
        }
    }
    Ok(())
}
