//! A visit that plays itself on an invented fault: what it is asked for.

use std::io::Write;
use std::sync::Arc;

use super::Trouble;
use super::text::Paper;
use crate::knowledge::Knowledge;

/// What a demo is started with.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct DemoArgs {
    /// Which fault, which readings.
    pub seed: u64,
    /// Site file, or an invented site's name.
    pub site: String,
    /// `kind@place`; without it one is drawn.
    pub fault: Option<String>,
    /// Show only what was decided.
    pub quick: bool,
    /// Every story there is, one after another.
    pub all: bool,
}

/// Plays the demo.
///
/// # Errors
/// A site or a fault that is not there; output that cannot be written.
pub fn run(
    _knowledge: Arc<Knowledge>,
    args: &DemoArgs,
    _paper: &mut Paper<impl Write>,
) -> Result<(), Trouble> {
    Err(Trouble::Usage {
        message: format!("no demo of `{}` is built into this version", args.site),
        hint: "attend the invented house instead: straypath attend".to_owned(),
    })
}
