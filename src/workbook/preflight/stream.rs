//! The events of a part as it is inflated: nothing is held but the event at hand, and that is bounded.

use std::io::{BufRead, BufReader, Read};

use quick_xml::events::Event;
use quick_xml::{Reader, XmlVersion};

use crate::package::{Inflated, Package};
use crate::problem::{Place, Problem, Result};
use crate::xml::{Shape, bad_utf8, bad_xml, check_encoding, configure};

/// One tag, text or comment, in bytes. The longest cell text, 32,767 characters all escaped, takes 330 KB.
pub const MAX_TOKEN: usize = 1 << 20;

/// A part being read.
pub(super) struct Stream<'a> {
    reader: Reader<Metered<BufReader<Inflated<'a>>>>,
    part: String,
    buffer: Vec<u8>,
    shape: Shape,
}

impl<'a> Stream<'a> {
    pub(super) fn open(package: &'a Package, part: &str) -> Result<Option<Self>> {
        let Some(bytes) = package.part_reader(part)? else { return Ok(None) };
        let mut source = Metered { inner: BufReader::with_capacity(1 << 16, bytes), left: MAX_TOKEN };
        check_encoding(part, source.fill_buf().map_err(|e| unreadable(part, &e))?)?;
        let mut reader = Reader::from_reader(source);
        configure(&mut reader);
        Ok(Some(Stream { reader, part: part.to_owned(), buffer: Vec::new(), shape: Shape::default() }))
    }

    /// The next event, or none at the end of a well-formed part.
    pub(super) fn next(&mut self) -> Result<Option<Event<'_>>> {
        let at = self.reader.buffer_position();
        self.reader.get_mut().left = MAX_TOKEN;
        self.buffer.clear();
        let event = match self.reader.read_event_into(&mut self.buffer) {
            Ok(event) => event,
            Err(_) if self.reader.get_ref().left == 0 => {
                return Err(Problem::error(
                    "long-token",
                    Place::default(),
                    format!("{} holds a tag or text of over {} KB at byte {at}", self.part, MAX_TOKEN >> 10),
                )
                .hint("open the file in a spreadsheet program and save it again")
                .into());
            }
            Err(quick_xml::Error::Io(e)) => return Err(unreadable(&self.part, &e).into()),
            Err(e) => return Err(bad_xml(&self.part, at, &e.to_string()).into()),
        };
        self.shape.see(&self.part, at, &event)?;
        if let Err(e) = std::str::from_utf8(&event) {
            return Err(bad_utf8(&self.part, at + e.valid_up_to() as u64).into());
        }
        if let Event::Start(tag) | Event::Empty(tag) = &event {
            for attribute in tag.attributes() {
                let attribute = attribute.map_err(|e| bad_xml(&self.part, at, &e.to_string()))?;
                if attribute.value.contains(&b'<') {
                    return Err(bad_xml(&self.part, at, "a < inside an attribute").into());
                }
                if attribute.value.contains(&b'&') {
                    attribute
                        .normalized_value(XmlVersion::Implicit1_0)
                        .map_err(|e| bad_xml(&self.part, at, &e.to_string()))?;
                }
            }
        }
        Ok((!matches!(event, Event::Eof)).then_some(event))
    }

    /// Elements that are open after the last event.
    pub(super) fn depth(&self) -> usize {
        self.shape.depth
    }

    /// Reads to the end.
    pub(super) fn finish(mut self) -> Result<()> {
        while self.next()?.is_some() {}
        Ok(())
    }
}

/// The error for a part that does not inflate as the directory states.
pub(super) fn unreadable(part: &str, error: &std::io::Error) -> Problem {
    Problem::error("damaged-zip", Place::default(), format!("{part} cannot be read: {error}"))
        .hint("get the file again from its source, or open it in a spreadsheet program and save it")
}

/// Lets only so many bytes through until it is set again.
struct Metered<R> {
    inner: R,
    left: usize,
}

impl<R: BufRead> Read for Metered<R> {
    fn read(&mut self, buffer: &mut [u8]) -> std::io::Result<usize> {
        let n = self.fill_buf()?.read(buffer)?;
        self.consume(n);
        Ok(n)
    }
}

impl<R: BufRead> BufRead for Metered<R> {
    fn fill_buf(&mut self) -> std::io::Result<&[u8]> {
        if self.left == 0 {
            return Err(std::io::Error::other("too long"));
        }
        let available = self.inner.fill_buf()?;
        Ok(&available[..available.len().min(self.left)])
    }

    fn consume(&mut self, amount: usize) {
        self.left = self.left.saturating_sub(amount);
        self.inner.consume(amount);
    }
}
