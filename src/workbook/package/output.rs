//! Writing: the changed package as bytes, and bytes as a file that is there whole or not at all.

use std::collections::{BTreeMap, BTreeSet};
use std::io::Write;
use std::path::{Path, PathBuf};

use flate2::Compression;
use flate2::write::DeflateEncoder;
use tempfile::NamedTempFile;

use super::container::moved_record;
use super::edit::edit_content_types;
use super::{Package, key};
use crate::problem::{Place, Problem, Result, WorkbookError};

/// What is to become of a package's parts. Names are matched without regard to case.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Changes {
    /// New bytes of parts that are there.
    pub replace: BTreeMap<String, Vec<u8>>,
    /// New parts, in their order.
    pub add: Vec<(String, Vec<u8>)>,
    /// Parts to leave out.
    pub remove: BTreeSet<String>,
}

impl Changes {
    /// Lets go of the new bytes, which may be many; the names of what changes stay.
    pub fn forget_contents(&mut self) {
        self.replace
            .values_mut()
            .chain(self.add.iter_mut().map(|(_, bytes)| bytes))
            .for_each(|bytes| *bytes = Vec::new());
    }
}

/// How hard new entries are packed: a sheet of a million cells takes half the time of the usual 6, and a tenth more room.
const COMPRESSION: Compression = Compression::new(4);

/// Day and time of entries that are written: the first that the format knows, so that the same input
/// gives the same bytes.
const DOS_DATE: u16 = 0x0021;

pub(super) fn write(package: &Package, changes: &Changes) -> Result<Vec<u8>> {
    let mut replace: BTreeMap<String, &Vec<u8>> =
        changes.replace.iter().map(|(name, bytes)| (key(name), bytes)).collect();
    let remove: BTreeSet<String> = changes.remove.iter().map(|name| key(name)).collect();
    check(package, &replace, &remove, changes)?;
    let retyped = if package.template { Some(workbook_types(package, changes)?) } else { None };
    replace.extend(retyped.iter().map(|types| (key(TYPES), types)));

    let mut zip = Zip::with_capacity(package.bytes.len() + package.bytes.len() / 4);
    for entry in &package.entries {
        let name = key(&entry.name);
        if remove.contains(&name) {
            continue;
        }
        match replace.get(&name) {
            Some(bytes) => zip.add(&entry.name, bytes)?,
            None => zip.copy(&package.bytes[entry.local.clone()], &package.bytes[entry.record.clone()])?,
        }
    }
    for (name, bytes) in &changes.add {
        zip.add(name.trim_start_matches('/'), bytes)?;
    }
    zip.finish()
}

/// The list of content types.
const TYPES: &str = "[Content_Types].xml";

/// The content types with a template's main part as that of a workbook.
fn workbook_types(package: &Package, changes: &Changes) -> Result<Vec<u8>> {
    let changed = changes.replace.iter().find(|(name, _)| key(name) == key(TYPES));
    let types = match changed {
        Some((_, types)) => types.clone(),
        None => package.part(TYPES)?.unwrap_or_default(),
    };
    let (old, kind) = (package.format.template_type(), package.format.content_type());
    // In its place, so that all else keeps its order.
    match types.windows(old.len()).position(|text| text.eq_ignore_ascii_case(old.as_bytes())) {
        Some(at) => Ok([&types[..at], kind.as_bytes(), &types[at + old.len()..]].concat()),
        None => edit_content_types(&types, &[&package.workbook], &[(&package.workbook, kind)], &[]),
    }
}

fn check(
    package: &Package,
    replace: &BTreeMap<String, &Vec<u8>>,
    remove: &BTreeSet<String>,
    changes: &Changes,
) -> Result<()> {
    let fault = |message: String| Err(Problem::error("package-change", Place::default(), message).into());
    for name in replace.keys().chain(remove) {
        if !package.index.contains_key(name) {
            return fault(format!("the package holds no part {name} that could be changed"));
        }
    }
    if let Some(name) = replace.keys().find(|name| remove.contains(*name)) {
        return fault(format!("{name} is to be both replaced and removed"));
    }
    let mut added = BTreeSet::new();
    for (name, _) in &changes.add {
        let name = key(name);
        let there = package.index.contains_key(&name) && !remove.contains(&name);
        if there || !added.insert(name.clone()) {
            return fault(format!("the package holds a part {name} already"));
        }
    }
    Ok(())
}

/// A zip archive under construction.
struct Zip {
    bytes: Vec<u8>,
    directory: Vec<u8>,
    count: usize,
}

impl Zip {
    fn with_capacity(capacity: usize) -> Self {
        Zip { bytes: Vec::with_capacity(capacity), directory: Vec::new(), count: 0 }
    }

    fn offset(&self) -> Result<u32> {
        small(self.bytes.len())
    }

    /// An entry as it stood in the input: header, packed bytes and descriptor.
    fn copy(&mut self, local: &[u8], record: &[u8]) -> Result<()> {
        let offset = self.offset()?;
        self.bytes.extend_from_slice(local);
        self.directory.extend_from_slice(&moved_record(record, offset));
        self.count += 1;
        Ok(())
    }

    /// A new entry, deflated.
    fn add(&mut self, name: &str, content: &[u8]) -> Result<()> {
        let offset = self.offset()?;
        let mut encoder = DeflateEncoder::new(Vec::new(), COMPRESSION);
        let packed = encoder.write_all(content).and_then(|()| encoder.finish()).map_err(|e| too_large(&e))?;
        let mut crc = flate2::Crc::new();
        crc.update(content);
        let utf8 = if name.is_ascii() { 0 } else { 0x0800_u16 };
        let name_length = u16::try_from(name.len()).map_err(|e| too_large(&e))?;

        // What both headers share: version needed, flags, method, time, date, checksum, sizes, name length.
        let mut shared = Vec::with_capacity(26);
        for field in [20, utf8, 8, 0, DOS_DATE] {
            shared.extend_from_slice(&field.to_le_bytes());
        }
        for field in [crc.sum(), small(packed.len())?, small(content.len())?] {
            shared.extend_from_slice(&field.to_le_bytes());
        }
        shared.extend_from_slice(&name_length.to_le_bytes());

        self.bytes.extend_from_slice(b"PK\x03\x04");
        self.bytes.extend_from_slice(&shared);
        self.bytes.extend_from_slice(&[0; 2]);
        self.bytes.extend_from_slice(name.as_bytes());
        self.bytes.extend_from_slice(&packed);

        self.directory.extend_from_slice(b"PK\x01\x02\x14\0");
        self.directory.extend_from_slice(&shared);
        // No extra field, no comment, first disk, no attributes.
        self.directory.extend_from_slice(&[0; 12]);
        self.directory.extend_from_slice(&offset.to_le_bytes());
        self.directory.extend_from_slice(name.as_bytes());
        self.count += 1;
        Ok(())
    }

    fn finish(mut self) -> Result<Vec<u8>> {
        let offset = self.offset()?;
        let count = u16::try_from(self.count).map_err(|e| too_large(&e))?;
        self.bytes.extend_from_slice(&self.directory);
        self.bytes.extend_from_slice(b"PK\x05\x06\0\0\0\0");
        self.bytes.extend_from_slice(&count.to_le_bytes());
        self.bytes.extend_from_slice(&count.to_le_bytes());
        self.bytes.extend_from_slice(&small(self.directory.len())?.to_le_bytes());
        self.bytes.extend_from_slice(&offset.to_le_bytes());
        self.bytes.extend_from_slice(&[0; 2]);
        Ok(self.bytes)
    }
}

fn small(length: usize) -> Result<u32> {
    u32::try_from(length).map_err(|e| too_large(&e))
}

fn too_large(error: &dyn std::fmt::Display) -> WorkbookError {
    Problem::error("output-too-large", Place::default(), format!("the output cannot be packed: {error}"))
        .into()
}

/// Whether a file may be written at a place: nothing is there, or an ordinary file and `force`; its folder is there.
///
/// **Errors**: `output-exists`, `cannot-write`.
pub fn may_write(path: &Path, force: bool) -> Result<()> {
    may_replace(path, force)?;
    if folder_of(path).is_dir() { Ok(()) } else { Err(cannot_write(path, "its folder is not there")) }
}

/// As [`may_write`], where the folder may yet be made.
pub(crate) fn may_replace(path: &Path, force: bool) -> Result<()> {
    match path.metadata() {
        Ok(there) if there.is_dir() => Err(cannot_write(path, "it is a folder")),
        // A device or a pipe would be replaced by a file, which is never what was meant.
        Ok(there) if !there.is_file() => Err(cannot_write(path, "it is no ordinary file")),
        // A link that leads nowhere is there too.
        _ if !force && path.symlink_metadata().is_ok() => Err(exists(path)),
        _ => Ok(()),
    }
}

fn cannot_write(path: &Path, why: impl std::fmt::Display) -> WorkbookError {
    let message = format!("{} cannot be written: {why}", path.display());
    Problem::error("cannot-write", Place::default(), message).hint("choose another place with --out").into()
}

fn exists(path: &Path) -> WorkbookError {
    Problem::error("output-exists", Place::default(), format!("{} exists already", path.display()))
        .hint("--force replaces it, --out writes elsewhere")
        .into()
}

/// Writes a file whole or not at all: a temporary file beside it, flushed to the disk, then renamed.
///
/// **Arguments**: `force` replaces a file that is there; of a link, the link, not the file it leads to.
/// **Errors**: `output-exists`, `cannot-write`; no temporary file is left behind.
pub fn write_atomically(path: &Path, bytes: &[u8], force: bool) -> Result<()> {
    may_write(path, force)?;
    let mut file = Pending::beside(path)?;
    file.write_all(bytes).map_err(|error| cannot_write(path, error))?;
    file.commit(force)
}

/// How the names of temporary files begin and end.
const TEMPORARY: (&str, &str) = (".hence-", ".tmp");

/// A file that is being written, under another name until it is whole; taken away where it never is.
///
/// While its writer lives, it is locked, so that what a dead run left behind can be told from it.
pub struct Pending {
    path: PathBuf,
    file: NamedTempFile,
}

impl Pending {
    /// Begins a file beside its place.
    ///
    /// **Errors**: `cannot-write`.
    pub fn beside(path: &Path) -> Result<Self> {
        let mut builder = tempfile::Builder::new();
        builder.prefix(TEMPORARY.0).suffix(TEMPORARY.1);
        #[cfg(unix)]
        {
            use std::os::unix::fs::PermissionsExt;
            // As for any new file, what others may do is left to the user's mask.
            builder.permissions(std::fs::Permissions::from_mode(0o666));
        }
        let file = builder.tempfile_in(folder_of(path)).map_err(|error| cannot_write(path, error))?;
        // A file system without locks loses nothing but the telling apart.
        let _ = file.as_file().try_lock();
        Ok(Pending { path: path.to_owned(), file })
    }

    /// That it could not be written to.
    pub fn cannot_write(&self, why: std::io::Error) -> WorkbookError {
        cannot_write(&self.path, why)
    }

    /// Gives the file its name, once it is on the disk.
    ///
    /// **Errors**: as [`write_atomically`].
    pub fn commit(self, force: bool) -> Result<()> {
        let Pending { path, file } = self;
        may_write(&path, force)?;
        let failed = |error: std::io::Error| cannot_write(&path, error);
        file.as_file().sync_all().map_err(failed)?;
        let renamed = if force { file.persist(&path) } else { file.persist_noclobber(&path) };
        match renamed {
            Err(e) if e.error.kind() == std::io::ErrorKind::AlreadyExists => return Err(exists(&path)),
            Err(e) => return Err(failed(e.error)),
            Ok(_) => {}
        }
        // The rename itself is made durable where the system lets a folder be flushed.
        if let Ok(folder) = std::fs::File::open(folder_of(&path)) {
            let _ = folder.sync_all();
        }
        Ok(())
    }
}

impl Write for Pending {
    fn write(&mut self, bytes: &[u8]) -> std::io::Result<usize> {
        self.file.write(bytes)
    }

    fn flush(&mut self) -> std::io::Result<()> {
        self.file.flush()
    }
}

/// Takes away the temporary files that dead runs left in a folder; those of a run that lives are locked, and stay.
pub fn clear_abandoned(folder: &Path) {
    let Ok(entries) = std::fs::read_dir(folder) else { return };
    for path in entries.flatten().map(|entry| entry.path()) {
        let name = path.file_name().unwrap_or_default().to_string_lossy();
        let ours = name.starts_with(TEMPORARY.0) && name.ends_with(TEMPORARY.1);
        let is_file = path.symlink_metadata().is_ok_and(|there| there.is_file());
        if ours && is_file && std::fs::File::open(&path).is_ok_and(|file| file.try_lock().is_ok()) {
            let _ = std::fs::remove_file(&path);
        }
    }
}

fn folder_of(path: &Path) -> PathBuf {
    match path.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder.to_path_buf(),
        _ => PathBuf::from("."),
    }
}

/// What a path names, whatever links, case or ways of writing lead there. A path that is not there yet goes by the place
/// at which it would come to be.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Identity {
    /// A file of the system, by device and number.
    File(u64, u64),
    /// By its real path.
    Path(PathBuf),
}

impl Identity {
    /// That of a path.
    pub fn of(path: &Path) -> Self {
        let real = real(path);
        #[cfg(unix)]
        if let Ok(there) = real.metadata() {
            return Identity::of_file(&there);
        }
        Identity::Path(real)
    }

    /// That of a file that is open or was looked at.
    #[cfg(unix)]
    pub fn of_file(there: &std::fs::Metadata) -> Self {
        use std::os::unix::fs::MetadataExt;
        Identity::File(there.dev(), there.ino())
    }
}

/// The real path: what is there as the system sees it, what is not there yet as it would be made, so that a `..` after it
/// leads back.
fn real(path: &Path) -> PathBuf {
    if let Ok(real) = path.canonicalize() {
        return real;
    }
    let mut real = PathBuf::new();
    for part in std::path::absolute(path).unwrap_or_else(|_| path.to_owned()).components() {
        if part == std::path::Component::ParentDir {
            real.pop();
        } else {
            real.push(part);
            real = real.canonicalize().unwrap_or(real);
        }
    }
    real
}

/// Whether two paths name one file.
pub fn same_file(a: &Path, b: &Path) -> bool {
    Identity::of(a) == Identity::of(b)
}
