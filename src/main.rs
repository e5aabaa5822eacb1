//! The program's entry: parse arguments, call a face, turn a failure into an exit code.

mod cli;
mod failure;

use std::env;
use std::io::{self, IsTerminal, Write};
use std::path::Path;
use std::process::ExitCode;
use std::sync::Arc;

use clap::Parser;
use clap::error::ErrorKind;

use cli::{Cli, Command, KnowledgeCommand, SiteCommand};
use failure::Kind;
use straypath::faces::demo::DemoArgs;
use straypath::faces::prompt::{self, Options};
use straypath::faces::text::{Paper, Style, columns};
use straypath::faces::{Trouble, audit, demo, pipe, sites};
use straypath::knowledge::Knowledge;

/// What the surroundings say, asked once.
struct Surroundings {
    width: usize,
    out: Style,
    err: Style,
}

impl Surroundings {
    fn ask() -> Self {
        let variable = |name: &str| env::var(name).ok();
        let (no_color, term) = (variable("NO_COLOR"), variable("TERM"));
        let decide = |terminal| Style::decide(terminal, no_color.as_deref(), term.as_deref());
        Self {
            width: columns(prompt::terminal_width(), variable("COLUMNS").as_deref()),
            out: decide(io::stdout().is_terminal()),
            err: decide(io::stderr().is_terminal()),
        }
    }

    fn paper(&self) -> Paper<io::StdoutLock<'static>> {
        Paper::new(io::stdout().lock(), self.width, self.out)
    }
}

fn main() -> ExitCode {
    let around = Surroundings::ask();
    let cli = match Cli::try_parse() {
        Ok(cli) => cli,
        Err(error) => {
            // Help and version are answers, not failures; nobody is left to hear of a failing write.
            let _ = error.print();
            return match error.kind() {
                ErrorKind::DisplayHelp | ErrorKind::DisplayVersion => ExitCode::SUCCESS,
                _ => Kind::Usage.code(),
            };
        }
    };
    match carry_out(cli.command, &around) {
        Ok(code) => code,
        Err(trouble) => {
            let kind = Kind::of(&trouble);
            if kind != Kind::ClosedPipe {
                let text = failure::lines(&trouble, around.width, around.err);
                let _ = io::stderr().lock().write_all(text.as_bytes());
            }
            kind.code()
        }
    }
}

fn knowledge(folder: Option<&Path>) -> Result<Arc<Knowledge>, Trouble> {
    Ok(Arc::new(Knowledge::load(folder)?))
}

fn carry_out(command: Command, around: &Surroundings) -> Result<ExitCode, Trouble> {
    match command {
        Command::Attend(ask) => {
            let options = Options {
                knowledge: knowledge(ask.knowledge.as_deref())?,
                site: ask.site,
                log: ask.log,
                kit: ask.kit,
                seed: ask.seed,
                resume: ask.resume,
            };
            prompt::run(&options, around.paper(), around.err)?;
        }
        Command::Pipe(ask) => {
            let knowledge = knowledge(ask.knowledge.as_deref())?;
            pipe::run(knowledge, ask.log, io::stdin().lock(), io::stdout().lock())?;
        }
        Command::Audit(ask) => {
            let knowledge = knowledge(ask.knowledge.as_deref())?;
            let finding = audit::run(&knowledge, &ask.log, &mut around.paper())?;
            return Ok(ExitCode::from(finding.code()));
        }
        Command::Demo(ask) => {
            let args = DemoArgs {
                seed: ask.seed,
                site: ask.site,
                fault: ask.fault,
                quick: ask.quick,
                all: ask.all,
            };
            demo::run(knowledge(None)?, &args, &mut around.paper())?;
        }
        Command::Site(SiteCommand::Check { file }) => {
            sites::check(Knowledge::embedded()?, &file, &mut around.paper())?;
        }
        Command::Site(SiteCommand::New { out }) => {
            let echo = !io::stdin().is_terminal();
            let mut input = io::stdin().lock();
            sites::new(
                &Knowledge::embedded()?,
                out.as_deref(),
                &mut input,
                echo,
                &mut around.paper(),
            )?;
        }
        Command::Knowledge(KnowledgeCommand::List { knowledge: folder }) => {
            sites::list(&*knowledge(folder.as_deref())?, &mut around.paper())?;
        }
        Command::Knowledge(KnowledgeCommand::Check { knowledge: folder }) => {
            let sound = sites::check_knowledge(folder.as_deref(), &mut around.paper())?;
            return Ok(if sound {
                ExitCode::SUCCESS
            } else {
                Kind::Data.code()
            });
        }
    }
    Ok(ExitCode::SUCCESS)
}
