//! Files that appear whole or not at all.

use crate::ground::{Error, Result};
use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};

/// Writes all files of a run into a folder, which is made if need be. Every file is first written
/// under a temporary name; only when all are on disk are they renamed.
///
/// # Errors
/// The first refusal of the operating system; temporary files are then removed.
pub fn write_all(folder: &Path, files: &[(&str, Vec<u8>)]) -> Result<()> {
    fs::create_dir_all(folder).map_err(|e| Error::io("cannot make the folder", folder, &e))?;
    let mut waiting: Vec<(PathBuf, PathBuf)> = Vec::new();
    for (name, bytes) in files {
        let target = folder.join(name);
        let partial = folder.join(format!(".{name}.{}.partial", std::process::id()));
        let written = fs::File::create(&partial)
            .and_then(|mut f| f.write_all(bytes).and_then(|()| f.sync_data()));
        waiting.push((partial, target.clone()));
        if let Err(cause) = written {
            remove(&waiting);
            return Err(Error::io("cannot write", &target, &cause));
        }
    }
    for (partial, target) in &waiting {
        if let Err(cause) = fs::rename(partial, target) {
            remove(&waiting);
            return Err(Error::io("cannot write", target, &cause));
        }
    }
    Ok(())
}

fn remove(files: &[(PathBuf, PathBuf)]) {
    for (partial, _) in files {
        // Nothing more can be done about a temporary file that will not go.
        let _ = fs::remove_file(partial);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn all_or_nothing() {
        let dir = tempfile::tempdir().expect("a folder");
        write_all(
            dir.path(),
            &[("a.txt", b"1".to_vec()), ("b.txt", b"2".to_vec())],
        )
        .expect("written");
        assert_eq!(fs::read(dir.path().join("b.txt")).expect("b"), b"2");
        fs::create_dir(dir.path().join("c.txt")).expect("a folder in the way");
        fs::write(dir.path().join("c.txt/x"), b"x").expect("not empty");
        let refused = write_all(dir.path(), &[("c.txt", b"3".to_vec())]);
        assert!(refused.is_err());
        let left = fs::read_dir(dir.path())
            .expect("listing")
            .filter(|e| {
                e.as_ref()
                    .is_ok_and(|e| e.file_name().to_string_lossy().contains("partial"))
            })
            .count();
        assert_eq!(left, 0);
    }
}
