//! Site files and knowledge files from the command line: checked, written by an interview, listed.

use std::fs::OpenOptions;
use std::io::{self, BufRead, Write};
use std::path::Path;

use serde_json::Value;

use super::Trouble;
use super::text::{Cell, Meaning, Page, Paper, Table, Text};
use crate::knowledge::Knowledge;
use crate::session::Engine;
use crate::site::{Interview, Known, Site, System, embedded, embedded_names, load_path, load_str};

/// What is taken when no site is named.
pub const USUAL: &str = "house";

/// A site document: an invented one by its name (`house`, `farm`, `shop`; `demo` is the house), or a file.
///
/// # Errors
/// A file that cannot be read, or is no site.
pub fn document(knowledge: &Knowledge, name: &str) -> Result<Value, Trouble> {
    let known = known(knowledge);
    let name = if name == "demo" { USUAL } else { name };
    let wrong = |error| Trouble::Site {
        path: name.to_owned(),
        error,
    };
    if let Some(text) = embedded(name) {
        load_str(text, &known).map_err(wrong)?;
        return serde_json::from_str(text).map_err(|error| Trouble::Usage {
            message: error.to_string(),
            hint: String::new(),
        });
    }
    Ok(load_path(Path::new(name), &known).map_err(wrong)?.given)
}

fn known(knowledge: &Knowledge) -> Known {
    Known::new(
        &knowledge.equipment,
        knowledge.rules.iter().map(|rule| rule.id.as_str()),
    )
}

/// `site check`: what a site file says, what it leaves open, and how much there is to test.
///
/// # Errors
/// What is wrong with the file; output that cannot be written.
pub fn check(
    knowledge: Knowledge,
    name: &str,
    paper: &mut Paper<impl Write>,
) -> Result<(), Trouble> {
    let given = document(&knowledge, name)?;
    let kit: Vec<String> = knowledge.kit.iter().map(|row| row.kind.clone()).collect();
    let engine = Engine::new(&knowledge, &given, &kit)?;
    let mut page = Page::new();
    page.line(summary(engine.site()));
    page.line(
        Text::new()
            .value(engine.checks().len().to_string())
            .plain(" tests at places can be made here with a full kit."),
    );
    if !engine.warnings.is_empty() {
        page.blank().line("Left open, or taken for granted:");
        for warning in &engine.warnings {
            page.hang("  -", 4, warning.text.as_str());
        }
    }
    page.blank().line(
        Text::new()
            .with(Meaning::Done, "The file loads.")
            .plain(" Walk the site and compare."),
    );
    Ok(paper.show(&page)?)
}

fn summary(site: &Site) -> Text {
    let circuits: usize = site.boards.iter().map(|board| board.circuits.len()).sum();
    Text::new()
        .with(Meaning::Place, site.name.clone())
        .plain(format!(
            ": {} supply, {} boards, {circuits} circuits, {} points, {} pieces of equipment, {} bonds, {} sources beside \
             the supply.",
            system(site.supply.system),
            site.boards.len(),
            site.points().count(),
            site.equipment.len(),
            site.bonds.len(),
            site.sources.len()
        ))
}

fn system(system: System) -> &'static str {
    match system {
        System::TnCS => "TN-C-S",
        System::TnS => "TN-S",
        System::Tt => "TT",
    }
}

/// `site new`: asks, and writes a site file that loads.
///
/// # Errors
/// An output file that is there already or cannot be written; input that ends early; output.
pub fn new(
    knowledge: &Knowledge,
    out: Option<&Path>,
    input: &mut impl BufRead,
    echo: bool,
    paper: &mut Paper<impl Write>,
) -> Result<(), Trouble> {
    if let Some(path) = out.filter(|path| path.exists()) {
        return Err(Trouble::Usage {
            message: format!(
                "{} is there already, and is not overwritten",
                path.display()
            ),
            hint: "name a new file with --out".to_owned(),
        });
    }
    let mut interview = Interview::new(known(knowledge));
    let mut page = Page::new();
    page.line(
        Text::new()
            .plain("A few questions about the installation. ")
            .word("?")
            .plain(" means: not known. Enter takes what stands in brackets."),
    );
    paper.show(&page)?;
    while let Some(question) = interview.question() {
        let mut page = Page::new();
        let mut text = Text::from(question.text.clone());
        if !question.example.is_empty() {
            text = text.dim(format!(" (such as {})", question.example));
        }
        page.blank().line(text);
        paper.show(&page)?;
        paper.raw(&format!("[{}] > ", question.default))?;
        let Some(line) = next_line(input)? else {
            return Err(Trouble::Usage {
                message: format!(
                    "the answers end after {}; nothing was written",
                    interview.answered()
                ),
                hint: "answer every question; Enter takes the default".to_owned(),
            });
        };
        if echo {
            paper.raw(&format!("{line}\n"))?;
        }
        if let Err(error) = interview.answer(&line) {
            let mut page = Page::new();
            page.line(
                Text::new()
                    .with(Meaning::Wrong, error.message)
                    .plain(format!("; {}", error.hint)),
            );
            paper.show(&page)?;
        }
    }
    let document = interview.document();
    let text = serde_json::to_string_pretty(&document).unwrap_or_default() + "\n";
    let Some(path) = out else {
        return Ok(paper.raw(&text)?);
    };
    let write = || {
        OpenOptions::new()
            .write(true)
            .create_new(true)
            .open(path)?
            .write_all(text.as_bytes())
    };
    write().map_err(|source: io::Error| Trouble::File {
        path: path.to_owned(),
        doing: "written",
        source,
    })?;
    let mut page = Page::new();
    page.blank().line(
        Text::new()
            .plain("Written to ")
            .with(Meaning::Place, path.display().to_string())
            .plain(". Look it over, then: ")
            .word(format!("straypath attend --site {}", path.display())),
    );
    Ok(paper.show(&page)?)
}

/// A line of input without its newline, bytes that are not text replaced; `None`: the input has ended.
pub fn next_line(input: &mut impl BufRead) -> io::Result<Option<String>> {
    let mut bytes = Vec::new();
    // A line longer than any answer is cut, so that no input fills the memory.
    let read = io::Read::take(&mut *input, LONGEST).read_until(b'\n', &mut bytes)?;
    if read == 0 {
        return Ok(None);
    }
    let text = String::from_utf8_lossy(&bytes);
    Ok(Some(text.trim_end_matches(['\n', '\r']).to_owned()))
}

/// Longest line taken, bytes.
const LONGEST: u64 = 1 << 16;

/// `knowledge list`: what the trade's files hold.
///
/// # Errors
/// Output that cannot be written.
pub fn list(knowledge: &Knowledge, paper: &mut Paper<impl Write>) -> Result<(), Trouble> {
    let mut page = Page::new();
    let words = |template: &str| template.replace(['{', '}'], "");
    page.line(Text::new().with(Meaning::Head, "FAULT KINDS"));
    let mut table = Table::new(1);
    for kind in &knowledge.faults {
        table.row(vec![
            Text::new().word(kind.kind.clone()).into(),
            words(&kind.name).into(),
        ]);
    }
    page.table(2, table)
        .blank()
        .line(Text::new().with(Meaning::Head, "TESTS"));
    let mut table = Table::new(1);
    for check in &knowledge.checks {
        table.row(vec![
            Text::new().word(check.id.clone()).into(),
            words(&check.name).into(),
        ]);
    }
    page.table(2, table)
        .blank()
        .line(Text::new().with(Meaning::Head, "COMPLAINTS"));
    let mut table = Table::new(1);
    for row in &knowledge.symptoms {
        table.row(vec![
            Text::new().word(row.kind.clone()).into(),
            Cell::from(row.name.clone()),
        ]);
    }
    page.table(2, table)
        .blank()
        .line(Text::new().with(Meaning::Head, "KIT"));
    let kit: Vec<&str> = knowledge.kit.iter().map(|row| row.kind.as_str()).collect();
    page.hang("", 2, Text::new().word(kit.join(", ")));
    page.blank()
        .line(Text::new().with(Meaning::Head, "SITES"))
        .hang("", 2, Text::new().word(embedded_names().join(", ")));
    page.blank()
        .line(Text::new().dim(format!("digest {}", knowledge.digest)));
    Ok(paper.show(&page)?)
}

/// `knowledge check`: every fault of the files; `true`: there is none.
///
/// # Errors
/// A folder that cannot be read; output.
pub fn check_knowledge(
    folder: Option<&Path>,
    paper: &mut Paper<impl Write>,
) -> Result<bool, Trouble> {
    let issues = Knowledge::check_files(folder)?;
    let mut page = Page::new();
    for issue in &issues {
        page.line(issue.to_string());
    }
    if issues.is_empty() {
        page.line(Text::new().with(Meaning::Done, "The knowledge files are sound."));
    }
    paper.show(&page)?;
    Ok(issues.is_empty())
}
