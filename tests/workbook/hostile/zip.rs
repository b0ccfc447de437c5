//! A zip writer that can lie. It follows the public description of the format and shares no code with the
//! library under test.

use std::io::Write;

use flate2::Compression;
use flate2::write::DeflateEncoder;

/// One entry, with what is to be wrong about it.
#[derive(Clone)]
pub struct Entry {
    pub name: String,
    pub content: Vec<u8>,
    pub stored: bool,
    /// How hard to pack.
    pub level: u32,
    /// The size to claim instead of the true one.
    pub claim: Option<u32>,
    pub encrypted: bool,
    /// Sizes after the data, as programs that write to a pipe do.
    pub descriptor: bool,
    /// Sizes in the large-file extra field.
    pub wide: bool,
    /// The directory points at the entry with this number instead.
    pub alias: Option<usize>,
}

impl Entry {
    pub fn new(name: &str, content: impl Into<Vec<u8>>) -> Self {
        Entry {
            name: name.to_owned(),
            content: content.into(),
            stored: false,
            level: 1,
            claim: None,
            encrypted: false,
            descriptor: false,
            wide: false,
            alias: None,
        }
    }
}

fn put16(out: &mut Vec<u8>, values: &[u16]) {
    values.iter().for_each(|value| out.extend_from_slice(&value.to_le_bytes()));
}

fn put32(out: &mut Vec<u8>, values: &[u32]) {
    values.iter().for_each(|value| out.extend_from_slice(&value.to_le_bytes()));
}

/// The archive; `wide_end` adds the large-file records at its end.
pub fn archive(entries: &[Entry], wide_end: bool) -> Vec<u8> {
    let mut out = Vec::new();
    let mut directory = Vec::new();
    let mut offsets: Vec<u32> = Vec::new();
    for entry in entries {
        let packed = if entry.stored {
            entry.content.clone()
        } else {
            let mut encoder = DeflateEncoder::new(Vec::new(), Compression::new(entry.level));
            encoder.write_all(&entry.content).unwrap();
            encoder.finish().unwrap()
        };
        let mut crc = flate2::Crc::new();
        crc.update(&entry.content);
        let size = entry.claim.unwrap_or(entry.content.len() as u32);
        let offset = entry.alias.map_or(out.len() as u32, |i| offsets[i]);
        offsets.push(out.len() as u32);
        let flags = u16::from(entry.encrypted) | if entry.descriptor { 8 } else { 0 };
        let method = if entry.stored { 0 } else { 8 };
        let name = entry.name.as_bytes();
        let mut extra = Vec::new();
        if entry.wide {
            put16(&mut extra, &[1, 16]);
            extra.extend_from_slice(&u64::from(size).to_le_bytes());
            extra.extend_from_slice(&(packed.len() as u64).to_le_bytes());
        }
        let sizes = if entry.wide { [u32::MAX; 2] } else { [packed.len() as u32, size] };

        out.extend_from_slice(b"PK\x03\x04");
        put16(&mut out, &[45, flags, method, 0x6000, 0x5A21]);
        put32(&mut out, &if entry.descriptor { [0; 3] } else { [crc.sum(), sizes[0], sizes[1]] });
        put16(&mut out, &[name.len() as u16, if entry.descriptor { 0 } else { extra.len() as u16 }]);
        out.extend_from_slice(name);
        if !entry.descriptor {
            out.extend_from_slice(&extra);
        }
        out.extend_from_slice(&packed);
        if entry.descriptor {
            out.extend_from_slice(b"PK\x07\x08");
            put32(&mut out, &[crc.sum(), packed.len() as u32, size]);
        }

        directory.extend_from_slice(b"PK\x01\x02");
        put16(&mut directory, &[45, 45, flags, method, 0x6000, 0x5A21]);
        put32(&mut directory, &[crc.sum(), sizes[0], sizes[1]]);
        put16(&mut directory, &[name.len() as u16, extra.len() as u16, 0, 0, 0]);
        put32(&mut directory, &[0, offset]);
        directory.extend_from_slice(name);
        directory.extend_from_slice(&extra);
    }
    let (start, length, count) = (out.len(), directory.len(), entries.len());
    out.extend_from_slice(&directory);
    if wide_end {
        let end = out.len() as u64;
        out.extend_from_slice(b"PK\x06\x06");
        out.extend_from_slice(&44_u64.to_le_bytes());
        put16(&mut out, &[45, 45]);
        put32(&mut out, &[0, 0]);
        for value in [count as u64, count as u64, length as u64, start as u64] {
            out.extend_from_slice(&value.to_le_bytes());
        }
        out.extend_from_slice(b"PK\x06\x07");
        put32(&mut out, &[0]);
        out.extend_from_slice(&end.to_le_bytes());
        put32(&mut out, &[1]);
    }
    out.extend_from_slice(b"PK\x05\x06");
    put16(&mut out, &[0, 0]);
    if wide_end {
        put16(&mut out, &[u16::MAX; 2]);
        put32(&mut out, &[u32::MAX; 2]);
    } else {
        put16(&mut out, &[count as u16; 2]);
        put32(&mut out, &[length as u32, start as u32]);
    }
    put16(&mut out, &[0]);
    out
}
