//! The zip container: its directory, read strictly, and each entry's bytes, inflated under limits.
//!
//! Read here and not by a library, because an untouched entry is to be copied with its headers as they
//! are, and because a directory that two programs could read in two ways has to be refused: what is
//! checked must be what is read.

use std::io::Read;
use std::ops::Range;

use flate2::bufread::DeflateDecoder;

use crate::problem::{Place, Problem, Result};
use crate::shelf::mishap::refused_memory;

/// The largest file that is opened, in bytes: it is held in memory whole, and a million cells take 10 MB.
pub const MAX_FILE: u64 = 128 << 20;
/// Entries of a package, at most. The largest workbooks in public collections hold some 2,000.
pub const MAX_ENTRIES: usize = 20_000;
/// One entry inflated, in bytes: a million cells with formulas take 60 MB.
pub const MAX_PART: u64 = 192 << 20;
/// All entries inflated, in bytes: it bounds the time that checks take.
pub const MAX_TOTAL: u64 = 512 << 20;
/// Inflated size over packed size, at most, for entries above [`RATIO_FROM`]. Sheets reach 60.
pub const MAX_RATIO: u64 = 300;
/// The inflated size in bytes above which [`MAX_RATIO`] holds: a small part cannot do harm.
pub const RATIO_FROM: u64 = 8 << 20;

/// One entry of the directory, and where its pieces stand in the file.
#[derive(Clone, Debug)]
pub(super) struct Entry {
    /// The name as stored.
    pub(super) name: String,
    /// The name as a part's name: forward slashes, none leading.
    pub(super) part: String,
    /// How it is packed: 0 stored, 8 deflated.
    method: u16,
    crc: u32,
    size: u64,
    /// Local header, packed bytes and data descriptor.
    pub(super) local: Range<usize>,
    data: Range<usize>,
    /// Its record in the directory.
    pub(super) record: Range<usize>,
}

impl Entry {
    /// What the directory says about its size.
    pub(super) fn size(&self) -> u64 {
        self.size
    }

    /// All that decides what it inflates to.
    pub(super) fn packed_as<'a>(&self, file: &'a [u8]) -> (u16, u32, u64, &'a [u8]) {
        (self.method, self.crc, self.size, &file[self.data.clone()])
    }

    /// A reader of its inflated bytes, which stops with an error after the stated size.
    pub(super) fn reader<'a>(&self, file: &'a [u8]) -> Result<Inflated<'a>> {
        let data = &file[self.data.clone()];
        let source = match self.method {
            0 => Source::Stored(data),
            8 => Source::Deflated(Box::new(DeflateDecoder::new(data))),
            other => {
                return Err(damaged(format!(
                    "{} is packed by method {other}; workbooks are stored or deflated",
                    self.name
                )));
            }
        };
        Ok(Inflated { source, left: self.size, crc: flate2::Crc::new(), expected: self.crc, ended: false })
    }

    /// All its bytes.
    pub(super) fn read(&self, file: &[u8]) -> Result<Vec<u8>> {
        // Space for what the directory states, which the limits bound; pages are taken only as they are filled.
        let mut bytes = Vec::new();
        bytes
            .try_reserve_exact(self.size as usize)
            .map_err(|_| self.unreadable(&std::io::ErrorKind::OutOfMemory.into()))?;
        self.reader(file)?.read_to_end(&mut bytes).map_err(|e| self.unreadable(&e))?;
        Ok(bytes)
    }

    /// The error for bytes that do not inflate as stated, or for which there is no memory.
    pub(super) fn unreadable(&self, error: &std::io::Error) -> crate::problem::WorkbookError {
        match error.kind() {
            std::io::ErrorKind::OutOfMemory => refused_memory(&self.name).into(),
            _ => damaged(format!("{} cannot be read: {error}", self.name)),
        }
    }
}

enum Source<'a> {
    Stored(&'a [u8]),
    Deflated(Box<DeflateDecoder<&'a [u8]>>),
}

/// The bytes of an entry. Its end is reached only where size and checksum are as stated.
pub(crate) struct Inflated<'a> {
    source: Source<'a>,
    left: u64,
    crc: flate2::Crc,
    expected: u32,
    ended: bool,
}

impl Read for Inflated<'_> {
    fn read(&mut self, buffer: &mut [u8]) -> std::io::Result<usize> {
        if buffer.is_empty() || self.ended {
            return Ok(0);
        }
        let n = match &mut self.source {
            Source::Stored(data) => data.read(buffer)?,
            Source::Deflated(data) => data.read(buffer)?,
        };
        let wrong = |what: &str| Err(std::io::Error::other(what.to_owned()));
        if n as u64 > self.left {
            return wrong("it holds more than the stated size");
        }
        self.left -= n as u64;
        self.crc.update(&buffer[..n]);
        if n == 0 {
            self.ended = true;
            if self.left > 0 {
                return wrong("it holds less than the stated size");
            }
            if self.crc.sum() != self.expected {
                return wrong("its checksum is wrong");
            }
        }
        Ok(n)
    }
}

pub(super) fn damaged(message: impl Into<String>) -> crate::problem::WorkbookError {
    Problem::error("damaged-zip", Place::default(), message)
        .hint("get the file again from its source, or open it in a spreadsheet program and save it")
        .into()
}

fn truncated(message: &str) -> crate::problem::WorkbookError {
    Problem::error("truncated", Place::default(), message)
        .hint("copy or download the file again; its end is missing")
        .into()
}

fn bomb(message: String) -> crate::problem::WorkbookError {
    Problem::error("zip-bomb", Place::default(), message)
        .hint("if the workbook is genuine, delete unused rows and sheets and save it again")
        .into()
}

fn u16_at(bytes: &[u8], at: usize) -> Option<u16> {
    Some(u16::from_le_bytes(bytes.get(at..at.checked_add(2)?)?.try_into().ok()?))
}

fn u32_at(bytes: &[u8], at: usize) -> Option<u32> {
    Some(u32::from_le_bytes(bytes.get(at..at.checked_add(4)?)?.try_into().ok()?))
}

fn u64_at(bytes: &[u8], at: usize) -> Option<u64> {
    Some(u64::from_le_bytes(bytes.get(at..at.checked_add(8)?)?.try_into().ok()?))
}

/// Where the directory stands: its bytes and the number of records.
struct Directory {
    bytes: Range<usize>,
    count: u64,
}

const END: &[u8] = b"PK\x05\x06";
const END_LENGTH: usize = 22;

fn directory(file: &[u8]) -> Result<Directory> {
    let lost = || truncated("the zip directory at the end of the file is missing");
    let from = file.len().saturating_sub(END_LENGTH + u16::MAX as usize);
    let end = (from..=file.len().saturating_sub(END_LENGTH))
        .rev()
        .find(|&at| file[at..].starts_with(END))
        .ok_or_else(lost)?;
    let field = |at: usize| u16_at(file, end + at).map(u64::from).ok_or_else(lost);
    if end + END_LENGTH + field(20)? as usize != file.len() {
        return Err(damaged("there are bytes after the end of the zip directory"));
    }
    let (mut count, mut size, mut offset, mut until) = (
        field(10)?,
        u64::from(u32_at(file, end + 12).ok_or_else(lost)?),
        u64::from(u32_at(file, end + 16).ok_or_else(lost)?),
        end,
    );
    if field(4)? != field(6)? || field(8)? != count {
        return Err(damaged("the zip archive is split over several files"));
    }
    let wide = count == 0xFFFF || size == 0xFFFF_FFFF || offset == 0xFFFF_FFFF;
    if let Some(locator) = end.checked_sub(20).filter(|&at| file[at..].starts_with(b"PK\x06\x07")) {
        let at = u64_at(file, locator + 8).and_then(|at| usize::try_from(at).ok()).ok_or_else(lost)?;
        if !file.get(at..).is_some_and(|rest| rest.starts_with(b"PK\x06\x06")) {
            return Err(damaged("the large-file record of the zip directory is not where it should be"));
        }
        let long = |skip: usize| u64_at(file, at + skip).ok_or_else(lost);
        let stated = (long(32)?, long(40)?, long(48)?);
        // Both records have to say the same wherever the short one says anything.
        let agree = (count == 0xFFFF || count == stated.0)
            && (size == 0xFFFF_FFFF || size == stated.1)
            && (offset == 0xFFFF_FFFF || offset == stated.2);
        if !agree {
            return Err(damaged("the two records of the zip directory contradict each other"));
        }
        (count, size, offset) = stated;
        until = at;
    } else if wide {
        return Err(damaged("the large-file record of the zip directory is missing"));
    }
    if offset.checked_add(size) != Some(until as u64) {
        return Err(damaged("the zip directory is not where the end of the file says"));
    }
    Ok(Directory { bytes: offset as usize..until, count })
}

/// The entries of a zip archive in the order of its directory.
///
/// **Errors**: `truncated`, `damaged-zip`, `zip-bomb` (by the declared sizes), `encrypted-entry`.
pub(super) fn entries(file: &[u8]) -> Result<Vec<Entry>> {
    let directory = directory(file)?;
    if directory.count > MAX_ENTRIES as u64 {
        return Err(bomb(format!(
            "the file holds {} entries; at most {MAX_ENTRIES} are read",
            directory.count
        )));
    }
    let mut entries = Vec::with_capacity(directory.count as usize);
    let mut at = directory.bytes.start;
    for _ in 0..directory.count {
        let entry = entry(file, at, &directory.bytes)?;
        at = entry.record.end;
        entries.push(entry);
    }
    if at != directory.bytes.end {
        return Err(damaged("the zip directory holds more than the number of entries it states"));
    }
    check_sizes(&entries)?;
    check_overlaps(file, &mut entries, directory.bytes.start)?;
    Ok(entries)
}

fn entry(file: &[u8], at: usize, directory: &Range<usize>) -> Result<Entry> {
    let cut = || damaged("the zip directory is cut short");
    let file_until = &file[..directory.end];
    if !file_until.get(at..).is_some_and(|rest| rest.starts_with(b"PK\x01\x02")) {
        return Err(cut());
    }
    let short = |skip: usize| u16_at(file_until, at + skip).ok_or_else(cut);
    let long = |skip: usize| u32_at(file_until, at + skip).map(u64::from).ok_or_else(cut);
    let flags = short(8)?;
    let (name_length, extra_length, comment_length) =
        (short(28)? as usize, short(30)? as usize, short(32)? as usize);
    let name_at = at + 46;
    let record = at..name_at + name_length + extra_length + comment_length;
    if record.end > directory.end {
        return Err(cut());
    }
    let raw_name = &file[name_at..name_at + name_length];
    let name = entry_name(raw_name);
    let extra = &file[name_at + name_length..name_at + name_length + extra_length];
    let (mut size, mut packed, mut offset) = (long(24)?, long(20)?, long(42)?);
    wide_fields(extra, [&mut size, &mut packed, &mut offset])
        .ok_or_else(|| damaged(format!("the sizes of {name} are missing from the zip directory")))?;
    if flags & 1 != 0 {
        return Err(Problem::error(
            "encrypted-entry",
            Place::default(),
            format!("{name} inside the file is encrypted"),
        )
        .hint("save the workbook without zip encryption")
        .into());
    }
    let method = short(10)?;
    let local = usize::try_from(offset).ok().filter(|&at| at < directory.start);
    let local = local.filter(|&at| file[at..directory.start].starts_with(b"PK\x03\x04"));
    let local = local.ok_or_else(|| damaged(format!("{name} is not where the zip directory says")))?;
    let local_field = |skip: usize| u16_at(file, local + skip).unwrap_or(0);
    let local_name_at = local + 30;
    let data_at = local_name_at + local_field(26) as usize + local_field(28) as usize;
    let same_name = file.get(local_name_at..local_name_at + local_field(26) as usize) == Some(raw_name);
    if !same_name || local_field(8) != method {
        return Err(damaged(format!("{name} is described in two ways inside the zip file")));
    }
    let data_end = (data_at as u64).checked_add(packed).filter(|&end| end <= directory.start as u64);
    let data_end =
        data_end.ok_or_else(|| truncated(&format!("{name} runs past the end of the zip file")))? as usize;
    let crc = long(16)? as u32;
    let part = name.replace('\\', "/").trim_start_matches('/').to_owned();
    Ok(Entry { name, part, method, crc, size, local: local..data_end, data: data_at..data_end, record })
}

/// Replaces fields that say "see the large-file extra" by what the extra says, in its order.
fn wide_fields(mut extra: &[u8], fields: [&mut u64; 3]) -> Option<()> {
    let mut wide: &[u8] = &[];
    while let (Some(id), Some(length)) = (u16_at(extra, 0), u16_at(extra, 2)) {
        let Some(body) = extra.get(4..4 + length as usize) else { break };
        if id == 1 {
            wide = body;
        }
        extra = &extra[4 + length as usize..];
    }
    for field in fields {
        if *field == 0xFFFF_FFFF {
            *field = u64_at(wide, 0)?;
            wide = &wide[8..];
        }
    }
    Some(())
}

/// Names are UTF-8 or, in old archives, another encoding: each of its bytes becomes a character, so that
/// different names stay different.
fn entry_name(raw: &[u8]) -> String {
    std::str::from_utf8(raw).map_or_else(|_| raw.iter().map(|&b| char::from(b)).collect(), str::to_owned)
}

fn check_sizes(entries: &[Entry]) -> Result<()> {
    let mut total = 0_u64;
    for entry in entries {
        if entry.size > MAX_PART {
            return Err(bomb(format!(
                "{} states a size of {} MB; at most {} MB are read",
                entry.name,
                entry.size >> 20,
                MAX_PART >> 20
            )));
        }
        let packed = entry.data.len() as u64;
        if entry.size > RATIO_FROM && entry.size > packed.saturating_mul(MAX_RATIO) {
            return Err(bomb(format!(
                "{} grows {} times when it is unpacked; at most {MAX_RATIO} times is read",
                entry.name,
                entry.size / packed.max(1)
            )));
        }
        total += entry.size;
    }
    if total > MAX_TOTAL {
        return Err(bomb(format!(
            "the file unpacks to {} MB; at most {} MB are read",
            total >> 20,
            MAX_TOTAL >> 20
        )));
    }
    Ok(())
}

/// Entries that share bytes are a bomb's trick; what follows an entry's data may be its descriptor.
fn check_overlaps(file: &[u8], entries: &mut [Entry], directory: usize) -> Result<()> {
    let mut order: Vec<usize> = (0..entries.len()).collect();
    order.sort_by_key(|&i| entries[i].local.start);
    for (k, &i) in order.iter().enumerate() {
        let next = order.get(k + 1).map_or(directory, |&j| entries[j].local.start);
        if entries[i].local.end > next {
            return Err(damaged(format!("{} shares its bytes with another entry", entries[i].name)));
        }
        if u16_at(file, entries[i].local.start + 6).is_some_and(|flags| flags & 8 != 0) {
            let gap = &file[entries[i].local.end..next];
            entries[i].local.end += descriptor_length(gap, &entries[i]);
        }
    }
    Ok(())
}

fn descriptor_length(gap: &[u8], entry: &Entry) -> usize {
    let packed = entry.data.len() as u64;
    for (mark, wide) in [(4, false), (4, true), (0, false), (0, true)] {
        if mark == 4 && !gap.starts_with(b"PK\x07\x08") {
            continue;
        }
        let number = |at: usize| {
            if wide { u64_at(gap, mark + 4 + 2 * at) } else { u32_at(gap, mark + 4 + at).map(u64::from) }
        };
        if u32_at(gap, mark) == Some(entry.crc) && number(0) == Some(packed) && number(4) == Some(entry.size)
        {
            return mark + if wide { 20 } else { 12 };
        }
    }
    0
}

/// The directory record of an entry with its new place in the file.
pub(super) fn moved_record(record: &[u8], offset: u32) -> Vec<u8> {
    let mut record = record.to_vec();
    let stated = u32_at(&record, 42);
    if stated != Some(0xFFFF_FFFF) {
        record[42..46].copy_from_slice(&offset.to_le_bytes());
        return record;
    }
    // The place stands in the large-file extra, after whichever sizes stand there too.
    let name = u16_at(&record, 28).unwrap_or(0) as usize;
    let skip = 8 * [20, 24].iter().filter(|&&at| u32_at(&record, at) == Some(0xFFFF_FFFF)).count();
    let mut at = 46 + name;
    while let (Some(id), Some(length)) = (u16_at(&record, at), u16_at(&record, at + 2)) {
        if id == 1 {
            let place = at + 4 + skip;
            record[place..place + 8].copy_from_slice(&u64::from(offset).to_le_bytes());
            break;
        }
        at += 4 + length as usize;
    }
    record
}

#[cfg(test)]
mod tests {
    use super::Entry;
    use std::io::{Error, ErrorKind};

    #[test]
    fn want_of_memory_is_no_damage() {
        let nothing = || 0..0;
        let entry = Entry {
            name: "xl/workbook.xml".into(),
            part: "xl/workbook.xml".into(),
            method: 0,
            crc: 0,
            size: 0,
            local: nothing(),
            data: nothing(),
            record: nothing(),
        };
        for (kind, code) in
            [(ErrorKind::OutOfMemory, "memory-limit"), (ErrorKind::InvalidData, "damaged-zip")]
        {
            assert_eq!(entry.unreadable(&Error::from(kind)).problems()[0].code, code);
        }
    }
}
