//! The main job on an embedded site with a simulated electrician, shown step by step; or every kind in a table.

use std::io::Write;
use std::sync::Arc;
use std::time::Duration;

use super::Trouble;
use super::sites::document;
use super::text::{Meaning, Page, Paper, Text};
use crate::faults::{Hypothesis, describe};
use crate::knowledge::Knowledge;
use crate::numeric::rng::Stream;
use crate::session::electrician::{Outcome, Step, play};
use crate::session::hidden::Hidden;
use crate::session::{Clock, ErrorCode, Log, Session, SessionError, command};

/// What to show.
#[derive(Clone, Debug)]
pub struct DemoArgs {
    /// Seed of fault, values and instruments.
    pub seed: u64,
    /// Site file or embedded name.
    pub site: String,
    /// Fault by `kind@place`, or by kind alone.
    pub fault: Option<String>,
    /// Without pauses.
    pub quick: bool,
    /// Every kind at one drawn place, as a table.
    pub all: bool,
}

/// Pause between steps, for a person to read.
const PAUSE: Duration = Duration::from_millis(900);

/// Runs the demo.
///
/// # Errors
/// A site that cannot be read, a fault that it cannot have, what the visit refuses, a closed output.
pub fn run<W: Write>(
    knowledge: Arc<Knowledge>,
    ask: &DemoArgs,
    paper: &mut Paper<W>,
) -> Result<(), Trouble> {
    let knowledge = &*knowledge;
    if ask.all {
        every_kind(knowledge, ask, paper)
    } else {
        one(knowledge, ask, paper)
    }
}

fn open(knowledge: &Knowledge, ask: &DemoArgs, seed: u64) -> Result<Session, Trouble> {
    let kit: Vec<String> = knowledge.kit.iter().map(|row| row.kind.clone()).collect();
    let open = command::Open {
        site: Some(document(knowledge, &ask.site)?),
        path: None,
        kit: Some(kit),
        seed: Some(seed),
    };
    // A fixed clock: the same seed shows the same visit.
    let (session, _) = Session::open(
        knowledge,
        Clock::stepping(1_767_258_000, 60),
        Log::in_memory(),
        &open,
    )?;
    Ok(session)
}

fn chosen(session: &Session, ask: &DemoArgs) -> Result<Hypothesis, Trouble> {
    let singles = &session.engine().model.space.singles;
    let mut stream = Stream::new(ask.seed, "demo", 0);
    let fitting: Vec<&Hypothesis> = match &ask.fault {
        None => singles.iter().filter(|h| !h.harmless).collect(),
        Some(id) => singles
            .iter()
            .filter(|h| h.id == *id || h.id.split('@').next() == Some(id))
            .collect(),
    };
    match fitting.get(stream.below(fitting.len().max(1))) {
        Some(h) => Ok((*h).clone()),
        None => {
            let ids = singles.iter().map(|h| h.id.as_str());
            let id = ask.fault.clone().unwrap_or_default();
            Err(
                SessionError::unknown(ErrorCode::UnknownPlace, "fault on this site", &id, ids)
                    .into(),
            )
        }
    }
}

fn one<W: Write>(
    knowledge: &Knowledge,
    ask: &DemoArgs,
    paper: &mut Paper<W>,
) -> Result<(), Trouble> {
    let mut session = open(knowledge, ask, ask.seed)?;
    let truth = chosen(&session, ask)?;
    let model = Arc::clone(&session.engine().model);
    let said =
        describe(&model.knowledge, &model.site, &truth.faults).unwrap_or_else(|_| truth.id.clone());
    let Some(mut hidden) = Hidden::draw(Arc::clone(&model), Some(truth), ask.seed) else {
        return Err(SessionError::new(
            ErrorCode::Internal,
            "the fault does not fit the site",
            "choose another",
        )
        .into());
    };
    line(
        paper,
        &Text::new()
            .with(Meaning::Place, model.site.name.clone())
            .plain(": a simulated visit; the fault is drawn and hidden, the instruments err."),
    )?;
    let mut failed = None;
    let outcome = play(&mut session, &mut hidden, &mut |step| {
        if failed.is_none()
            && let Err(trouble) = show(paper, step)
        {
            failed = Some(trouble);
        }
        if !ask.quick && !matches!(step, Step::Hold(..)) {
            std::thread::sleep(PAUSE);
        }
    })?;
    if let Some(trouble) = failed {
        return Err(trouble);
    }
    let values: Vec<String> = hidden.values.iter().map(|v| format!("{v:.4}")).collect();
    let with = if values.is_empty() {
        String::new()
    } else {
        format!(", value {}", values.join(", "))
    };
    line(
        paper,
        &Text::new()
            .with(Meaning::Head, "TRUTH ")
            .plain(format!("{said}{with}. "))
            .plain(format!(
                "The proved cause was {}; {} readings, {:.0} working minutes.",
                if outcome.right { "right" } else { "not found" },
                outcome.tests,
                outcome.minutes
            )),
    )?;
    Ok(())
}

fn line<W: Write>(paper: &mut Paper<W>, text: &Text) -> Result<(), Trouble> {
    let mut page = Page::new();
    page.line(text.clone());
    paper.show(&page)?;
    Ok(())
}

fn odds(groups: &[crate::session::view::GroupRow]) -> String {
    let said: Vec<String> = groups
        .iter()
        .take(3)
        .map(|g| format!("{} {:.0} in 100", g.group, g.p * 100.0))
        .collect();
    said.join("; ")
}

fn show<W: Write>(paper: &mut Paper<W>, step: &Step) -> Result<(), Trouble> {
    let text = match step {
        Step::Complaint(symptom, moved) => {
            let at = symptom
                .at
                .as_ref()
                .map_or(String::new(), |at| format!(" at {at}"));
            let mut text = Text::new()
                .with(Meaning::Head, "COMPLAINT ")
                .plain(format!("{}{at}", symptom.kind));
            for warning in moved.warnings.iter().flatten() {
                text = text.plain(" ").with(Meaning::Danger, warning.text.clone());
            }
            text
        }
        Step::Advice(advice) => Text::new().with(Meaning::Head, "NEXT ").plain(format!(
            "{}, {:.0} min; {}",
            advice.test.name,
            advice.test.minutes.ceil(),
            advice.why
        )),
        Step::Hold(point, readings) => {
            let read: Vec<String> = readings
                .iter()
                .map(|(name, value)| format!("{name} {value}"))
                .collect();
            Text::new()
                .plain("  ")
                .with(Meaning::Done, "(x) ")
                .plain(point.clone())
                .plain(if read.is_empty() {
                    String::new()
                } else {
                    format!(": {}", read.join(", "))
                })
        }
        Step::Read {
            test,
            at,
            value,
            moved,
        } => Text::new()
            .plain(format!("  {test} at {at} reads "))
            .with(Meaning::Value, value.clone())
            .plain(format!("; now {}", odds(&moved.odds.groups))),
        Step::Again(test, at, value) => Text::new()
            .plain(format!("  {test} at {at}: "))
            .with(Meaning::Wrong, value.clone())
            .plain(" fits nothing; taken again"),
        Step::Cannot(test, at, why) => {
            Text::new().plain(format!("  {test} at {at} cannot be done: {why}"))
        }
        Step::Verdict(verdict, there) => Text::new().with(Meaning::Head, "DECIDE ").plain(format!(
            "{} ({:.0} in 100): {}. {}",
            verdict.group,
            verdict.p * 100.0,
            verdict.action,
            if *there {
                "Found there."
            } else {
                "Looked: not there."
            }
        )),
        Step::Recheck(name, value, result) => Text::new()
            .with(Meaning::Head, "RE-TEST ")
            .plain(format!("{name}: {value}, {result}")),
        Step::Stuck(why) => Text::new().with(Meaning::Wrong, format!("No further: {why}")),
    };
    line(paper, &text)?;
    Ok(())
}

/// Every kind at one drawn place; the last line is `right N of M`.
fn every_kind<W: Write>(
    knowledge: &Knowledge,
    ask: &DemoArgs,
    paper: &mut Paper<W>,
) -> Result<(), Trouble> {
    let (mut right, mut total) = (0, 0);
    for kind in &knowledge.faults {
        let mut session = open(knowledge, ask, ask.seed)?;
        let own = DemoArgs {
            fault: Some(kind.kind.clone()),
            ..ask.clone()
        };
        let Ok(truth) = chosen(&session, &own) else {
            line(
                paper,
                &Text::new().plain(format!("{:<26} no place for it on this site", kind.kind)),
            )?;
            continue;
        };
        let id = truth.id.clone();
        let model = Arc::clone(&session.engine().model);
        let Some(mut hidden) = Hidden::draw(model, Some(truth), ask.seed) else {
            continue;
        };
        total += 1;
        let (outcome, why) = match play(&mut session, &mut hidden, &mut |_| {}) {
            Ok(outcome) => {
                let why = if outcome.right {
                    String::new()
                } else if outcome.first_group.is_empty() {
                    "no verdict stood within the budget".to_owned()
                } else {
                    format!("took it for {}", outcome.first_group)
                };
                (outcome, why)
            }
            Err(error) => (Outcome::default(), error.message),
        };
        right += usize::from(outcome.right);
        let word = if outcome.right { "right" } else { "wrong" };
        line(
            paper,
            &Text::new().plain(format!(
                "{:<44} {word:<6} {:>2} readings {:>4.0} min  {why}",
                id, outcome.tests, outcome.minutes
            )),
        )?;
    }
    line(
        paper,
        &Text::new().plain(format!("right {right} of {total}")),
    )?;
    Ok(())
}
