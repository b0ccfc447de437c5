//! A workbook file as a package of parts: a bounded zip, opened read-only, rewritten without touching
//! what does not change.

use std::collections::BTreeMap;
use std::io::Read;
use std::path::Path;

use sha2::{Digest, Sha256};

use crate::older::Converted;
use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::shelf::mishap::refused_memory;

mod container;
mod edit;
mod output;
mod parts;
mod sniff;
mod zip;

pub use container::{MAX_ENTRIES, MAX_FILE, MAX_PART, MAX_RATIO, MAX_TOTAL, RATIO_FROM};
pub use edit::{NewRelationship, edit_content_types, edit_relationships};
pub(crate) use output::may_replace;
pub use output::{Changes, Identity, Pending, clear_abandoned, may_write, same_file, write_atomically};
pub use parts::{Relationship, relationships_part, resolve_target};

pub(crate) use container::Inflated;
pub(crate) use zip::Zip;

use container::Entry;
use parts::{ContentTypes, is_strict_kind, read_relationships};

/// The kind of workbook, by the content type of its main part.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Format {
    /// Without macros.
    Xlsx,
    /// With macros.
    Xlsm,
}

impl Format {
    /// The extension that goes with it, without the dot.
    pub fn extension(self) -> &'static str {
        match self {
            Format::Xlsx => "xlsx",
            Format::Xlsm => "xlsm",
        }
    }

    /// The content type of its main part.
    fn content_type(self) -> &'static str {
        match self {
            Format::Xlsx => "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml",
            Format::Xlsm => "application/vnd.ms-excel.sheet.macroEnabled.main+xml",
        }
    }

    /// The same of a template, from which such a workbook is made.
    fn template_type(self) -> &'static str {
        match self {
            Format::Xlsx => "application/vnd.openxmlformats-officedocument.spreadsheetml.template.main+xml",
            Format::Xlsm => "application/vnd.ms-excel.template.macroEnabled.main+xml",
        }
    }
}

/// A workbook file in memory. Part names are matched without regard to case, as the format wants.
pub struct Package {
    name: String,
    bytes: Vec<u8>,
    entries: Vec<Entry>,
    /// From a part's key to its entry.
    index: BTreeMap<String, usize>,
    types: ContentTypes,
    workbook: String,
    format: Format,
    template: bool,
    strict: bool,
    /// The file it was made from, where that is of another format.
    origin: Option<Origin>,
}

/// The file of another format that a package holds the values of.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Origin {
    /// SHA-256 of the file, lower-case hexadecimal.
    pub sha256: String,
    /// What of it was left behind, a sentence each.
    pub lost: Vec<String>,
}

/// A part name as it is compared: lower case, forward slashes, no leading slash.
fn key(name: &str) -> String {
    name.trim_start_matches(['/', '\\']).replace('\\', "/").to_lowercase()
}

impl Package {
    /// Reads a workbook file into memory and finds its parts. The file is opened for reading only.
    ///
    /// **Errors**: those of [`Package::read`] and [`Package::from_bytes`].
    pub fn open(path: &Path) -> Result<Package> {
        Package::from_bytes(&Package::name_of(path), Package::read(path)?)
    }

    /// A file's name in a package, without folders.
    pub fn name_of(path: &Path) -> String {
        path.file_name().unwrap_or(path.as_os_str()).to_string_lossy().into_owned()
    }

    /// The bytes of a file, and one more than allowed of a file that is too large, whatever its length claims.
    ///
    /// **Errors**: `cannot-read`.
    pub fn read(path: &Path) -> Result<Vec<u8>> {
        let failed = |e: std::io::Error| -> WorkbookError {
            if e.kind() == std::io::ErrorKind::OutOfMemory {
                return refused_memory("reading it").into();
            }
            Problem::error("cannot-read", Place::default(), format!("{} cannot be read: {e}", path.display()))
                .into()
        };
        let file = std::fs::File::open(path).map_err(failed)?;
        let mut bytes = Vec::new();
        file.take(MAX_FILE + 1).read_to_end(&mut bytes).map_err(failed)?;
        Ok(bytes)
    }

    /// A package from the bytes of a file; `name` is the file's name, without folders.
    ///
    /// **Errors**: `file-too-large`, `empty-file`, `password-protected`, `old-format`, `other-format`,
    /// `not-a-package`, `not-a-workbook`, `truncated`, `damaged-zip`, `zip-bomb`,
    /// `encrypted-entry`, `duplicate-entry`, and those of reading XML.
    pub fn from_bytes(name: &str, bytes: Vec<u8>) -> Result<Package> {
        if bytes.len() as u64 > MAX_FILE {
            return Err(Problem::error(
                "file-too-large",
                Place::default(),
                format!("{name} is larger than {} MB, the most that is read", MAX_FILE >> 20),
            )
            .hint("split the workbook, or delete sheets that the appraisal does not need")
            .into());
        }
        sniff::check_zip(name, &bytes)?;
        let entries = container::entries(&bytes)?;
        let mut index = BTreeMap::new();
        for (i, entry) in entries.iter().enumerate() {
            if let Some(j) = index.insert(key(&entry.name), i) {
                let (a, b): (&Entry, &Entry) = (&entries[j], entry);
                return Err(Problem::error(
                    "duplicate-entry",
                    Place::default(),
                    format!("the file holds two entries of one name: {} and {}", a.name, b.name),
                )
                .hint("open the file in a spreadsheet program and save it again")
                .into());
            }
        }
        let mut package = Package {
            name: name.to_owned(),
            bytes,
            entries,
            index,
            types: ContentTypes::default(),
            workbook: String::new(),
            format: Format::Xlsx,
            template: false,
            strict: false,
            origin: None,
        };
        package.find_workbook()?;
        Ok(package)
    }

    /// A package with the values of a file of another format: `original` are that file's bytes.
    ///
    /// **Errors**: as [`Package::from_bytes`].
    pub fn converted(name: &str, original: &[u8], values: Converted) -> Result<Package> {
        let mut package = Package::from_bytes(name, values.bytes)?;
        package.origin = Some(Origin { sha256: sha256(original), lost: values.lost });
        Ok(package)
    }

    /// The file of another format that this holds the values of, if it does.
    pub fn origin(&self) -> Option<&Origin> {
        self.origin.as_ref()
    }

    /// SHA-256 of the file that was read, lower-case hexadecimal.
    pub fn sha256(&self) -> String {
        self.origin.as_ref().map_or_else(|| sha256(&self.bytes), |origin| origin.sha256.clone())
    }

    fn find_workbook(&mut self) -> Result<()> {
        let Some(types) = self.part("[Content_Types].xml")? else {
            return Err(sniff::other_package(self));
        };
        self.types = ContentTypes::read(&types)?;
        let mut links = self.relationships("")?;
        links.retain(|link| link.kind.ends_with("/officeDocument"));
        let main = links.pop().filter(|link| !link.external);
        let main = main.ok_or_else(|| not_a_workbook("its main part is not named"))?;
        if !links.is_empty() {
            return Err(not_a_workbook("it names more than one main part"));
        }
        if !self.has(&main.target) {
            return Err(not_a_workbook(&format!("its main part {} is missing", main.target)));
        }
        (self.format, self.template) =
            sniff::format_of(&self.content_type(&main.target).unwrap_or_default())?;
        self.strict = is_strict_kind(&main.kind);
        self.workbook = main.target;
        Ok(())
    }

    /// The file's name, without folders.
    pub fn file_name(&self) -> &str {
        &self.name
    }

    /// The whole file as it was read.
    pub fn bytes(&self) -> &[u8] {
        &self.bytes
    }

    /// What kind of workbook it is; the output's extension follows it.
    pub fn format(&self) -> Format {
        self.format
    }

    /// Whether it is a template (.xltx, .xltm). What is written from it is a workbook: its main part is retyped.
    pub fn is_template(&self) -> bool {
        self.template
    }

    /// The names of the parts in the file's order: as stored, but without a leading slash and with
    /// backslashes turned into slashes.
    pub fn parts(&self) -> impl Iterator<Item = &str> {
        self.entries.iter().map(|entry| entry.part.as_str()).filter(|name| !name.ends_with('/'))
    }

    /// The names of all entries of the zip file exactly as stored, folders too.
    pub fn entry_names(&self) -> impl Iterator<Item = &str> {
        self.entries.iter().map(|entry| entry.name.as_str())
    }

    /// Whether there is a part of that name.
    pub fn has(&self, name: &str) -> bool {
        self.index.contains_key(&key(name))
    }

    /// The bytes of a part, or none if there is no such part.
    ///
    /// **Errors**: `damaged-zip` where the bytes are not of the stated size and checksum.
    pub fn part(&self, name: &str) -> Result<Option<Vec<u8>>> {
        self.entry(name).map(|entry| entry.read(&self.bytes)).transpose()
    }

    /// Whether two packages hold a part packed alike, and so with the same bytes.
    pub(crate) fn packs_alike(&self, other: &Package, name: &str) -> bool {
        match (self.entry(name), other.entry(name)) {
            (Some(a), Some(b)) => a.packed_as(&self.bytes) == b.packed_as(&other.bytes),
            _ => false,
        }
    }

    /// A reader of a part's bytes, for parts that need not be held whole.
    pub(crate) fn part_reader(&self, name: &str) -> Result<Option<Inflated<'_>>> {
        self.entry(name).map(|entry| entry.reader(&self.bytes)).transpose()
    }

    /// The size of a part in bytes as the directory states it.
    pub fn part_size(&self, name: &str) -> Option<u64> {
        self.entry(name).map(Entry::size)
    }

    fn entry(&self, name: &str) -> Option<&Entry> {
        self.index.get(&key(name)).map(|&i| &self.entries[i])
    }

    /// The content type of a part: its own, else that of its extension.
    pub fn content_type(&self, name: &str) -> Option<String> {
        self.types.of(name)
    }

    /// The name of the workbook's main part, `xl/workbook.xml` as a rule.
    pub fn workbook_part(&self) -> &str {
        &self.workbook
    }

    /// The relationships of a part, in their order; none if it has none. The package's own go by "".
    ///
    /// **Errors**: those of reading XML.
    pub fn relationships(&self, part: &str) -> Result<Vec<Relationship>> {
        let name = relationships_part(part);
        let Some(xml) = self.part(&name)? else { return Ok(Vec::new()) };
        let mut found = read_relationships(&name, part, &xml)?;
        for relationship in found.iter_mut().filter(|r| !r.external) {
            if let Some(entry) = self.entry(&relationship.target) {
                entry.part.clone_into(&mut relationship.target);
            }
        }
        Ok(found)
    }

    /// Whether hence's sheets can be put into this package, and if not, why.
    ///
    /// **Errors**: `strict-format`, `signed`, `backslash-name`.
    pub fn graftable(&self) -> std::result::Result<(), Box<Problem>> {
        let refuse = |code, message: &str, hint: &str| {
            Err(Box::new(Problem::error(code, Place::default(), message).hint(hint)))
        };
        if self.strict {
            return refuse(
                "strict-format",
                "the workbook is saved in the strict variant of the format, into which no sheet is put",
                "save it as an ordinary Excel workbook (.xlsx)",
            );
        }
        let signed = |name: &str| {
            key(name).starts_with("_xmlsignatures/")
                || self.content_type(name).is_some_and(|kind| kind.contains("digital-signature"))
        };
        if self.parts().any(signed) {
            return refuse(
                "signed",
                "the workbook is digitally signed, and any change would break the signature",
                "fill an unsigned copy and sign the result",
            );
        }
        if self.entries.iter().any(|entry| entry.name.contains('\\')) {
            return refuse(
                "backslash-name",
                "the file's part names hold backslashes, which spreadsheet programs read in different ways",
                "open the file in a spreadsheet program and save it again",
            );
        }
        Ok(())
    }

    /// The package with changes made: the bytes of a new file.
    ///
    /// Entries that do not change are copied with their headers and packed bytes as they are and in their
    /// order; replaced ones stay in their place; added ones come last. The same package and changes give the
    /// same bytes: written entries bear the date 1980-01-01. A template gives a workbook.
    ///
    /// **Errors**: `package-change` (a part to change that is not there, or to add that is),
    /// `output-too-large`.
    pub fn write(&self, changes: &Changes) -> Result<Vec<u8>> {
        output::write(self, changes)
    }
}

/// SHA-256 as lower-case hexadecimal.
pub fn sha256(bytes: &[u8]) -> String {
    Sha256::digest(bytes).iter().map(|byte| format!("{byte:02x}")).collect()
}

fn not_a_workbook(why: &str) -> WorkbookError {
    Problem::error("not-a-workbook", Place::default(), format!("the file is no workbook: {why}"))
        .hint("give a workbook saved as .xlsx or .xlsm (or a template, .xltx or .xltm)")
        .into()
}
