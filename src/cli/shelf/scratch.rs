//! A folder for what the processes of a run put aside while they work, taken away when the run ends.

use std::fs::File;
use std::io;
use std::path::Path;
use std::time::Duration;

use tempfile::TempDir;

/// How its name begins.
const BEGIN: &str = "hence-scratch-";
/// The file in it that is locked while its run lives.
const LOCK: &str = "in-use";

/// The folder.
#[derive(Debug)]
pub struct Scratch {
    folder: TempDir,
    _lock: File,
}

impl Scratch {
    /// Makes one, and takes away those of dead runs.
    pub fn new() -> io::Result<Self> {
        let folder = tempfile::Builder::new().prefix(BEGIN).tempdir()?;
        let lock = File::create(folder.path().join(LOCK))?;
        lock.try_lock()?;
        clear_abandoned();
        Ok(Scratch { folder, _lock: lock })
    }

    /// Where it is.
    pub fn path(&self) -> &Path {
        self.folder.path()
    }
}

impl Drop for Scratch {
    fn drop(&mut self) {
        // What a killed process had started may write here until it is ended, too.
        for _ in 0..100 {
            if std::fs::remove_dir_all(self.path()).is_ok() || !self.path().exists() {
                break;
            }
            std::thread::sleep(Duration::from_millis(20));
        }
    }
}

fn clear_abandoned() {
    let Ok(entries) = std::fs::read_dir(std::env::temp_dir()) else { return };
    for entry in entries.flatten() {
        let ours = entry.file_name().to_string_lossy().starts_with(BEGIN);
        // One that is being made has no such file yet.
        let lock = File::open(entry.path().join(LOCK));
        if ours && lock.is_ok_and(|lock| lock.try_lock().is_ok()) {
            let _ = std::fs::remove_dir_all(entry.path());
        }
    }
}

#[cfg(test)]
mod tests {
    use super::{BEGIN, LOCK, Scratch};

    #[test]
    fn only_what_dead_runs_left_is_cleared() {
        let dead = std::env::temp_dir().join(format!("{BEGIN}dead-{}", std::process::id()));
        std::fs::create_dir_all(dead.join("profile")).unwrap();
        std::fs::write(dead.join(LOCK), "").unwrap();
        let first = Scratch::new().unwrap();
        assert!(!dead.exists());
        let second = Scratch::new().unwrap();
        assert!(first.path().join(LOCK).exists(), "that of a run that lives stays");
        let path = second.path().to_owned();
        drop(second);
        assert!(!path.exists());
    }
}
