//! Why a face could not do what it was started for: what, where, and the cure.

use std::io;
use std::path::PathBuf;

use crate::knowledge::KnowledgeError;
use crate::session::{ErrorCode, SessionError};
use crate::site::SiteError;

/// What ended a face.
#[derive(Debug, thiserror::Error)]
pub enum Trouble {
    /// The command line asks for what cannot be.
    #[error("{message}")]
    Usage {
        /// What.
        message: String,
        /// The cure.
        hint: String,
    },
    /// Knowledge files that cannot be used.
    #[error(transparent)]
    Knowledge(#[from] KnowledgeError),
    /// A site file that cannot be used.
    #[error("{path}: {error}")]
    Site {
        /// Where it came from.
        path: String,
        /// What is wrong.
        error: SiteError,
    },
    /// The visit refused.
    #[error(transparent)]
    Session(#[from] SessionError),
    /// A file.
    #[error("{} cannot be {doing}: {source}", path.display())]
    File {
        /// Which.
        path: PathBuf,
        /// `read`, `written`.
        doing: &'static str,
        /// Why.
        source: io::Error,
    },
    /// Terminal, input or output.
    #[error("the terminal cannot be used: {0}")]
    Terminal(#[from] io::Error),
}

impl Trouble {
    /// What to do about it.
    pub fn hint(&self) -> Option<&str> {
        match self {
            Self::Usage { hint, .. } => Some(hint),
            Self::Site { error, .. } => Some(&error.hint),
            Self::Session(error) => Some(&error.hint),
            Self::Knowledge(_) | Self::Terminal(_) => None,
            Self::File { .. } => Some("check the name, and that you may read and write there"),
        }
    }

    /// Whether nobody reads the output any more.
    pub fn is_closed_pipe(&self) -> bool {
        matches!(self, Self::Terminal(error) if error.kind() == io::ErrorKind::BrokenPipe)
    }

    /// Whether it is a fault of this program.
    pub fn is_internal(&self) -> bool {
        matches!(self, Self::Session(error) if error.code == ErrorCode::Internal)
    }
}
