//! Files that are written whole or not at all.

use std::fs;
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};

use tempfile::NamedTempFile;
use thiserror::Error;

use crate::diag::{Code, Diagnostic};

/// A file that could not be written.
#[derive(Debug, Error)]
#[error("cannot write {}: {error}", path.display())]
pub struct WriteError {
    /// The file.
    pub path: PathBuf,
    /// What the system said.
    pub error: io::Error,
}

impl WriteError {
    /// The message for the user.
    pub fn diagnostic(&self) -> Diagnostic {
        Diagnostic::error(Code("F090"), format!("the file cannot be written: {}", self.error))
            .in_file(self.path.display().to_string())
            .expected("a place that can be written")
    }
}

/// Writes a file through a temporary one beside it, which takes its name only when all is written. The folder is made
/// where it is missing.
pub fn write_whole(path: &Path, fill: impl FnOnce(&mut dyn Write) -> io::Result<()>) -> Result<(), WriteError> {
    let attempt = || -> io::Result<()> {
        let folder = match path.parent() {
            Some(parent) if !parent.as_os_str().is_empty() => parent,
            _ => Path::new("."),
        };
        fs::create_dir_all(folder)?;
        let mut file = BufWriter::with_capacity(1 << 18, NamedTempFile::new_in(folder)?);
        fill(&mut file)?;
        let file = file.into_inner().map_err(io::IntoInnerError::into_error)?;
        readable_by_all(file.as_file())?;
        file.as_file().sync_all()?;
        file.persist(path).map_err(|error| error.error)?;
        Ok(())
    };
    attempt().map_err(|error| WriteError { path: path.to_owned(), error })
}

/// Temporary files are private to their owner; results are ordinary files.
#[cfg(unix)]
fn readable_by_all(file: &fs::File) -> io::Result<()> {
    use std::os::unix::fs::PermissionsExt;
    file.set_permissions(fs::Permissions::from_mode(0o644))
}

#[cfg(not(unix))]
fn readable_by_all(_: &fs::File) -> io::Result<()> {
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_failed_write_leaves_the_old_file_and_nothing_else() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("sub/a.txt");
        write_whole(&path, |out| out.write_all(b"first")).unwrap();
        let failed = write_whole(&path, |out| {
            out.write_all(b"second")?;
            Err(io::Error::other("no more"))
        });
        assert!(failed.is_err());
        assert_eq!(fs::read(&path).unwrap(), b"first");
        assert_eq!(fs::read_dir(path.parent().unwrap()).unwrap().count(), 1);
    }
}
