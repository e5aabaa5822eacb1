//! Where knowledge files come from: inside the binary, a folder beside them, and their digest.

use std::collections::BTreeMap;
use std::path::Path;

use include_dir::{Dir, include_dir};
use sha2::{Digest, Sha256};

use super::issue::KnowledgeError;

static EMBEDDED: Dir<'_> = include_dir!("$CARGO_MANIFEST_DIR/knowledge");

/// One file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct File {
    /// How messages name it.
    pub shown: String,
    /// Its bytes.
    pub bytes: Vec<u8>,
    /// Whether it came in from a folder.
    pub added: bool,
}

/// All files by relative path with `/`.
pub type Files = BTreeMap<String, File>;

/// The files inside the binary.
pub fn embedded() -> Files {
    let mut files = Files::new();
    collect(&EMBEDDED, &mut files);
    files
}

fn collect(dir: &Dir<'_>, into: &mut Files) {
    for file in dir.files() {
        if file.path().extension().is_some_and(|e| e == "toml") {
            let path = file.path().to_string_lossy().replace('\\', "/");
            into.insert(
                path.clone(),
                File {
                    shown: format!("<built-in>/{path}"),
                    bytes: file.contents().to_vec(),
                    added: false,
                },
            );
        }
    }
    for sub in dir.dirs() {
        collect(sub, into);
    }
}

/// Adds a folder's files: a file with the relative path of another replaces it.
///
/// # Errors
/// A folder or file that cannot be read.
pub fn add_folder(root: &Path, files: &mut Files) -> Result<(), KnowledgeError> {
    walk(root, "", files)
}

fn walk(folder: &Path, prefix: &str, files: &mut Files) -> Result<(), KnowledgeError> {
    let failed = |path: &Path, source| KnowledgeError::Read {
        path: path.display().to_string(),
        source,
    };
    let entries = std::fs::read_dir(folder).map_err(|e| failed(folder, e))?;
    for entry in entries {
        let path = entry.map_err(|e| failed(folder, e))?.path();
        let name = path
            .file_name()
            .map(|n| n.to_string_lossy().into_owned())
            .unwrap_or_default();
        let relative = if prefix.is_empty() {
            name
        } else {
            format!("{prefix}/{name}")
        };
        if path.is_dir() {
            walk(&path, &relative, files)?;
        } else if path.extension().is_some_and(|e| e == "toml") {
            let bytes = std::fs::read(&path).map_err(|e| failed(&path, e))?;
            files.insert(
                relative,
                File {
                    shown: path.display().to_string(),
                    bytes,
                    added: true,
                },
            );
        }
    }
    Ok(())
}

/// SHA-256, in hex, over the sorted relative paths and the bytes behind them, each with its length before it.
pub fn digest(files: &Files) -> String {
    let mut hash = Sha256::new();
    for (path, file) in files {
        for part in [path.as_bytes(), &file.bytes] {
            hash.update((part.len() as u64).to_be_bytes());
            hash.update(part);
        }
    }
    hash.finalize()
        .iter()
        .map(|byte| format!("{byte:02x}"))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn file(text: &str) -> File {
        File {
            shown: String::new(),
            bytes: text.as_bytes().to_vec(),
            added: false,
        }
    }

    #[test]
    fn digest_tells_where_a_byte_stands() {
        let one: Files = [("a".into(), file("bc"))].into();
        let other: Files = [("ab".into(), file("c"))].into();
        assert_ne!(digest(&one), digest(&other));
        assert_eq!(digest(&one).len(), 64);
    }

    #[test]
    fn a_folder_adds_and_replaces() {
        let folder = tempfile::tempdir().unwrap();
        std::fs::create_dir(folder.path().join("faults")).unwrap();
        std::fs::write(folder.path().join("faults/new.toml"), "").unwrap();
        std::fs::write(folder.path().join("effort.toml"), "x").unwrap();
        std::fs::write(folder.path().join("README.md"), "no").unwrap();
        let mut files = embedded();
        let before = files.len();
        add_folder(folder.path(), &mut files).unwrap();
        assert_eq!(files.len(), before + 1);
        assert_eq!(files["effort.toml"].bytes, b"x");
        assert!(add_folder(&folder.path().join("none"), &mut files).is_err());
    }
}
