//! Writing files whole or not at all.
//!
//! Bytes go to a temporary file in the target's folder, are flushed to the disk and then renamed over the target:
//! whoever looks, and whenever the program is stopped, sees either the old file or the whole new one.

use std::ffi::OsString;
use std::fs::{File, OpenOptions};
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicU64, Ordering};

/// A file could not be written.
#[derive(Debug, thiserror::Error)]
#[error("{}: cannot be written: {source}", path.display())]
pub struct WriteError {
    /// The file that was wanted.
    pub path: PathBuf,
    /// Why not.
    pub source: io::Error,
}

/// Writes `bytes` to `path`, whole or not at all.
pub fn write_whole(path: &Path, bytes: &[u8]) -> Result<(), WriteError> {
    let mut file = WholeFile::create(path)?;
    file.write_all(bytes).map_err(|source| WriteError { path: path.to_owned(), source })?;
    file.commit()
}

/// A file that appears under its name only when it is complete. Dropped before [`WholeFile::commit`], it leaves
/// nothing behind.
#[derive(Debug)]
pub struct WholeFile {
    target: PathBuf,
    temporary: PathBuf,
    writer: Option<BufWriter<File>>,
}

/// Keeps temporary names of one process apart.
static COUNTER: AtomicU64 = AtomicU64::new(0);

impl WholeFile {
    /// Opens a temporary file beside `path`. A link is followed, so that its target is replaced and not the link.
    pub fn create(path: &Path) -> Result<Self, WriteError> {
        let fail = |source| WriteError { path: path.to_owned(), source };
        let target = std::fs::canonicalize(path).unwrap_or_else(|_| path.to_owned());
        if target.is_dir() {
            return Err(fail(io::Error::new(io::ErrorKind::IsADirectory, "it is a folder")));
        }
        let Some(name) = target.file_name() else {
            return Err(fail(io::Error::new(io::ErrorKind::InvalidInput, "it names no file")));
        };
        let mut temporary_name = OsString::from(".");
        temporary_name.push(name);
        let number = COUNTER.fetch_add(1, Ordering::Relaxed);
        temporary_name.push(format!(".{}-{number}.part", std::process::id()));
        let temporary = target.with_file_name(temporary_name);
        let file = OpenOptions::new().write(true).create_new(true).open(&temporary).map_err(fail)?;
        if let Ok(existing) = std::fs::metadata(&target) {
            // Permissions of a file that is replaced stay as they were; that they can't be kept is no reason to fail.
            let _ = file.set_permissions(existing.permissions());
        }
        Ok(Self { target, temporary, writer: Some(BufWriter::new(file)) })
    }

    /// Puts the complete file in its place.
    pub fn commit(mut self) -> Result<(), WriteError> {
        self.finish().map_err(|source| WriteError { path: self.target.clone(), source })
    }

    fn finish(&mut self) -> io::Result<()> {
        if let Some(writer) = self.writer.take() {
            let file = writer.into_inner().map_err(io::IntoInnerError::into_error)?;
            file.sync_all()?;
            std::fs::rename(&self.temporary, &self.target)?;
            self.temporary = PathBuf::new();
        }
        Ok(())
    }
}

impl Write for WholeFile {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        match &mut self.writer {
            Some(writer) => writer.write(bytes),
            None => Err(io::Error::other("the file is already closed")),
        }
    }

    fn flush(&mut self) -> io::Result<()> {
        self.writer.as_mut().map_or(Ok(()), BufWriter::flush)
    }
}

impl Drop for WholeFile {
    fn drop(&mut self) {
        if !self.temporary.as_os_str().is_empty() {
            let _ = std::fs::remove_file(&self.temporary);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn names(folder: &Path) -> Vec<String> {
        let mut names: Vec<String> = std::fs::read_dir(folder)
            .unwrap()
            .map(|entry| entry.unwrap().file_name().to_string_lossy().into_owned())
            .collect();
        names.sort();
        names
    }

    #[test]
    fn an_existing_file_is_replaced_and_nothing_else_is_left() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("report.json");
        std::fs::write(&path, "old, and longer than the new one").unwrap();
        write_whole(&path, b"new").unwrap();
        assert_eq!(std::fs::read(&path).unwrap(), b"new");
        assert_eq!(names(folder.path()), ["report.json"]);
    }

    #[test]
    fn a_file_given_up_halfway_leaves_the_old_one() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("report.json");
        std::fs::write(&path, "old").unwrap();
        let mut file = WholeFile::create(&path).unwrap();
        file.write_all(b"half of the n").unwrap();
        drop(file);
        assert_eq!(std::fs::read(&path).unwrap(), b"old");
        assert_eq!(names(folder.path()), ["report.json"]);
    }

    #[test]
    fn a_missing_folder_and_a_folder_as_target_are_named() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("no/such/report.json");
        let error = write_whole(&path, b"x").unwrap_err();
        assert!(error.to_string().contains("report.json: cannot be written"), "{error}");
        let error = write_whole(folder.path(), b"x").unwrap_err();
        assert!(error.to_string().contains("it is a folder"), "{error}");
    }
}
