//! Every bad knowledge file of tests/bad-knowledge is refused with its message, at its line.
//!
//! Each file is added to the built-in knowledge. Its first line says `# LINE: part of the message`;
//! a line 0 stands for a table that no line can be blamed for.

use std::path::Path;

use straypath::knowledge::Knowledge;

#[test]
fn every_mistake_is_named_with_its_line() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/bad-knowledge");
    let mut seen = 0;
    let mut missed = Vec::new();
    for entry in std::fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        let bytes = std::fs::read(&path).unwrap();
        let text = String::from_utf8_lossy(&bytes);
        let head = text.lines().next().unwrap().trim_start_matches("# ");
        let (line, says) = head.split_once(": ").unwrap();
        let dir = tempfile::tempdir().unwrap();
        let name = path.file_name().unwrap();
        std::fs::write(dir.path().join(name), &bytes).unwrap();
        let issues = Knowledge::check_files(Some(dir.path())).unwrap();
        let found = issues.iter().any(|issue| {
            issue.line.to_string() == line && issue.what.contains(says) && !issue.cure.is_empty()
        });
        let said: Vec<String> = issues.iter().map(ToString::to_string).collect();
        if !found {
            missed.push(format!(
                "{}: wanted line {line}: {says}\n{}",
                path.display(),
                said.join("\n")
            ));
        }
        seen += 1;
    }
    assert!(missed.is_empty(), "{}", missed.join("\n\n"));
    assert!(seen >= 60, "{seen} bad files");
}

#[test]
fn every_mistake_of_a_file_is_reported_at_once() {
    let dir = tempfile::tempdir().unwrap();
    let text =
        "[[kit]]\nkind = \"tongs\"\n[[kit]]\nname = 3\nkind = \"x\"\n[[limits]]\nid = \"x\"\n";
    std::fs::write(dir.path().join("many.toml"), text).unwrap();
    let issues = Knowledge::check_files(Some(dir.path())).unwrap();
    let lines: Vec<usize> = issues.iter().map(|i| i.line).collect();
    assert_eq!(lines, [1, 4, 6], "{issues:?}");
    assert!(issues.iter().all(|i| i.file.ends_with("many.toml")));
}

#[test]
fn a_folder_that_is_not_there_is_named() {
    let error = Knowledge::load(Some(Path::new("no-such-folder")))
        .unwrap_err()
        .to_string();
    assert!(
        error.contains("no-such-folder") && error.contains("--knowledge"),
        "{error}"
    );
}
