//! Reads the crate's own source: files, code without comments, string literals.

use std::fs;
use std::path::{Path, PathBuf};

/// One source file.
pub struct Source {
    /// Path from the crate's root, with forward slashes.
    pub path: String,
    /// As it is.
    pub text: String,
    /// Its code up to the unit tests: comments gone, string literals empty, lines kept.
    pub code: String,
    /// String literals of that code, each with its line.
    pub literals: Vec<(usize, String)>,
}

impl Source {
    fn read(root: &Path, file: &Path) -> Self {
        let text = fs::read_to_string(file).expect("source is readable");
        let path = file.strip_prefix(root).expect("below the root");
        let path = path.to_string_lossy().replace('\\', "/");
        let (code, literals) = if path.ends_with("/tests.rs") || path.contains("/tests/") {
            (String::new(), Vec::new())
        } else {
            split(before_tests(&text))
        };
        Self {
            path,
            text,
            code,
            literals,
        }
    }

    /// The layer it belongs to: its folder or file under `src`.
    pub fn layer(&self) -> &str {
        let rest = self.path.trim_start_matches("src/");
        rest.split('/')
            .next()
            .unwrap_or(rest)
            .trim_end_matches(".rs")
    }

    /// Modules between the crate's root and this one, itself included.
    pub fn depth(&self) -> usize {
        self.path.matches('/').count() - usize::from(self.path.ends_with("/mod.rs"))
    }
}

/// The crate's root.
pub fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

/// All files below `folder` whose names end so, in order.
pub fn files(folder: &Path, ending: &str) -> Vec<PathBuf> {
    let mut found = Vec::new();
    let mut entries: Vec<PathBuf> = match fs::read_dir(folder) {
        Ok(entries) => entries.map(|e| e.expect("an entry").path()).collect(),
        Err(_) => return found,
    };
    entries.sort();
    for entry in entries {
        if entry.is_dir() {
            found.extend(files(&entry, ending));
        } else if entry.to_string_lossy().ends_with(ending) {
            found.push(entry);
        }
    }
    found
}

/// The Rust files below a folder of the crate.
pub fn sources(folder: &str) -> Vec<Source> {
    let root = root();
    files(&root.join(folder), ".rs")
        .iter()
        .map(|file| Source::read(&root, file))
        .collect()
}

/// What stands before the unit tests, which close a file.
fn before_tests(text: &str) -> &str {
    let marker = "#[cfg(test)]\nmod ";
    let tests = text.match_indices(marker).find(|(at, _)| {
        text[at + marker.len()..]
            .lines()
            .next()
            .is_some_and(|line| line.ends_with('{'))
    });
    tests.map_or(text, |(at, _)| &text[..at])
}

/// Code without comments and without the contents of its string literals, and those literals.
fn split(text: &str) -> (String, Vec<(usize, String)>) {
    let chars: Vec<char> = text.chars().collect();
    let (mut code, mut literals, mut line, mut at) = (String::new(), Vec::new(), 1, 0);
    let starts = |at: usize, word: &str| {
        word.chars()
            .enumerate()
            .all(|(i, c)| chars.get(at + i) == Some(&c))
    };
    while at < chars.len() {
        let end = if starts(at, "//") {
            (at..chars.len())
                .find(|&i| chars[i] == '\n')
                .unwrap_or(chars.len())
        } else if starts(at, "/*") {
            (at..chars.len())
                .find(|&i| starts(i, "*/"))
                .map_or(chars.len(), |i| i + 2)
        } else if starts(at, "r\"")
            || starts(at, "r#") && !chars.get(at + 2).is_some_and(|c| c.is_alphabetic())
        {
            let hashes = chars[at + 1..].iter().take_while(|c| **c == '#').count();
            let close = format!("\"{}", "#".repeat(hashes));
            let start = at + hashes + 2;
            let stop = (start..chars.len())
                .find(|&i| starts(i, &close))
                .unwrap_or(chars.len());
            literals.push((line, chars[start.min(stop)..stop].iter().collect()));
            code.push_str("\"\"");
            (stop + close.len()).min(chars.len())
        } else if chars[at] == '"' {
            let mut stop = at + 1;
            while stop < chars.len() && chars[stop] != '"' {
                stop += if chars[stop] == '\\' { 2 } else { 1 };
            }
            let stop = stop.min(chars.len());
            literals.push((line, chars[at + 1..stop].iter().collect()));
            code.push_str("\"\"");
            (stop + 1).min(chars.len())
        } else if chars[at] == '\'' && (starts(at + 1, "\\") || chars.get(at + 2) == Some(&'\'')) {
            code.push_str("' '");
            let from = if starts(at + 1, "\\") { at + 3 } else { at + 2 };
            (from..chars.len())
                .find(|&i| chars[i] == '\'')
                .map_or(chars.len(), |i| i + 1)
        } else {
            if chars[at] != '\n' {
                code.push(chars[at]);
            }
            at + 1
        };
        for _ in chars[at..end].iter().filter(|c| **c == '\n') {
            code.push('\n');
            line += 1;
        }
        at = end;
    }
    (code, literals)
}

#[test]
fn comments_and_literals_are_told_from_code() {
    let text = "let a = \"x // \\\" y\"; // \"no\"\n/* crate::z */ let b: &'a str = r#\"q\"r\"#; let c = '\"';\n\
                #[cfg(test)]\nmod tests {\n    use crate::hidden;\n}\n";
    let (code, literals) = split(before_tests(text));
    assert_eq!(
        code,
        "let a = \"\"; \n let b: &'a str = \"\"; let c = ' ';\n"
    );
    assert_eq!(
        literals,
        [(1, "x // \\\" y".to_owned()), (2, "q\"r".to_owned())]
    );
}
