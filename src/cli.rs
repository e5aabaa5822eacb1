//! The command line: what can be asked for, and how it is explained.

use std::path::PathBuf;

use clap::{Args, Parser, Subcommand};

/// Leads an electrician, test by safe test, from a complaint to a proved cause.
#[derive(Debug, Parser)]
#[command(
    version,
    about,
    max_term_width = 100,
    after_help = "Exit codes: 0 done, 64 the command line is wrong, 65 a file \
    holds what cannot be used, 69 the visit refused, 70 a fault of this program, 74 a file or the terminal cannot be used. \
    A closed pipe is no failure. NO_COLOR, set and not empty, turns colour off; COLUMNS gives the width where no terminal does."
)]
pub struct Cli {
    /// What to do.
    #[command(subcommand)]
    pub command: Command,
}

/// Commands.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// Attend a site: complaint in, one safe test at a time out, down to the cause and its re-tests.
    Attend(Attend),
    /// Serve another program: one JSON object a line in, one line out.
    Pipe(Pipe),
    /// Tell the story of a saved log, and whether it is whole.
    #[command(
        after_help = "Exit codes: 0 whole and clean, 1 whole with remarks (something skipped, refused, retracted, owed, or \
        left open), 2 not whole (a line was changed, cut or is missing)."
    )]
    Audit(Audit),
    /// Watch a visit with an invented fault.
    Demo(Demo),
    /// Site files: check one, or write one by answering questions.
    #[command(subcommand)]
    Site(SiteCommand),
    /// Knowledge files: list what they hold, or check a folder of them.
    #[command(subcommand)]
    Knowledge(KnowledgeCommand),
}

/// `attend`.
#[derive(Debug, Args)]
pub struct Attend {
    /// Site file, or one of the invented sites: house, farm, shop.
    #[arg(
        long,
        value_name = "FILE",
        default_value = "demo",
        conflicts_with = "resume"
    )]
    pub site: String,
    /// Keep the visit in this file; it must be new.
    #[arg(long, value_name = "FILE", conflicts_with = "resume")]
    pub log: Option<PathBuf>,
    /// Instruments in the van, with commas between; `knowledge list` names them.
    #[arg(
        long,
        value_name = "A,B,C",
        value_delimiter = ',',
        conflicts_with = "resume"
    )]
    pub kit: Option<Vec<String>>,
    /// Seed of the random streams: the same seed and readings give the same odds.
    #[arg(long, value_name = "N", conflicts_with = "resume")]
    pub seed: Option<u64>,
    /// Go on with the visit of this log; every proof of dead is void.
    #[arg(long, value_name = "LOG")]
    pub resume: Option<PathBuf>,
    /// Folder of knowledge files that add to the built-in ones or replace them.
    #[arg(long, value_name = "DIR")]
    pub knowledge: Option<PathBuf>,
}

/// `pipe`.
#[derive(Debug, Args)]
pub struct Pipe {
    /// Keep the visit in this file.
    #[arg(long, value_name = "FILE")]
    pub log: Option<PathBuf>,
    /// Folder of knowledge files that add to the built-in ones or replace them.
    #[arg(long, value_name = "DIR")]
    pub knowledge: Option<PathBuf>,
}

/// `audit`.
#[derive(Debug, Args)]
pub struct Audit {
    /// The log.
    pub log: PathBuf,
    /// Folder of the knowledge files that the visit was made with.
    #[arg(long, value_name = "DIR")]
    pub knowledge: Option<PathBuf>,
}

/// `demo`.
#[derive(Debug, Args)]
pub struct Demo {
    /// Seed: which fault, which readings.
    #[arg(long, value_name = "N", default_value_t = 1)]
    pub seed: u64,
    /// Site file, or one of the invented sites: house, farm, shop.
    #[arg(long, value_name = "FILE", default_value = "demo")]
    pub site: String,
    /// The fault, kind@place; without it one is drawn.
    #[arg(long, value_name = "KIND@PLACE")]
    pub fault: Option<String>,
    /// Show only what was decided.
    #[arg(long)]
    pub quick: bool,
    /// Every story there is, one after another.
    #[arg(long)]
    pub all: bool,
}

/// `site`.
#[derive(Debug, Subcommand)]
pub enum SiteCommand {
    /// Read a site file as a visit would, and say what it holds and leaves open.
    Check {
        /// Site file, or one of the invented sites: house, farm, shop.
        file: String,
    },
    /// Write a site file by answering a few questions.
    New {
        /// Where to write it; it must be new. Without it the file goes to the screen.
        #[arg(long, value_name = "FILE")]
        out: Option<PathBuf>,
    },
}

/// `knowledge`.
#[derive(Debug, Subcommand)]
pub enum KnowledgeCommand {
    /// List fault kinds, tests, complaints and instruments.
    List {
        /// Folder of knowledge files that add to the built-in ones or replace them.
        #[arg(long, value_name = "DIR")]
        knowledge: Option<PathBuf>,
    },
    /// Name every mistake of the knowledge files with its line and cure; exit code 65 if there is one.
    Check {
        /// Folder of knowledge files that add to the built-in ones or replace them.
        #[arg(long, value_name = "DIR")]
        knowledge: Option<PathBuf>,
    },
}
