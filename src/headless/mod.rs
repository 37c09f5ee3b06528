//! The same engine from the command line.
//!
//! Results go to standard output, everything else to standard error. Exit codes: 0 done, 1 finished
//! with a patch or file that failed (named), 2 wrong use or unreadable input.

mod args;
mod check;
mod demo;
mod look;
mod measure;
mod progress;
mod run;
mod write;

use std::path::PathBuf;
use std::process::ExitCode;

use clap::Parser as _;

use crate::study::handover;

use self::args::{Arguments, Command};

/// What is left to do after the command line was read.
pub enum Next {
    /// Leave with this code.
    Leave(ExitCode),
    /// Open the window on this sheet, or on the last one.
    Window(Option<PathBuf>),
}

/// Why a command could not do its work; printed as one readable report, exit code 2.
#[derive(Debug, thiserror::Error)]
#[error("{what}\n  {why}\n  {hint}")]
pub struct Trouble {
    what: String,
    why: String,
    hint: String,
}

impl Trouble {
    fn new(what: impl Into<String>, why: impl ToString, hint: impl Into<String>) -> Self {
        Self { what: what.into(), why: why.to_string(), hint: hint.into() }
    }
}

/// Everything went well, or some named part failed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Outcome {
    Done,
    PartFailed,
}

/// Reads the command line and does what it says.
pub fn main() -> Next {
    let arguments = Arguments::parse();
    let Some(command) = arguments.command else {
        return Next::Window(arguments.sheet);
    };
    let outcome = match command {
        Command::Demo { out, no_window } => match demo::demo(&out) {
            Ok((outcome, sheet)) if !no_window && has_display() && outcome == Outcome::Done => {
                return Next::Window(Some(sheet));
            }
            Ok((outcome, _)) => Ok(outcome),
            Err(trouble) => Err(trouble),
        },
        Command::Look { raster, json } => look::look(&raster, json),
        Command::Measure(options) => measure::measure(&options),
        Command::Run { sheet, out } => run::run(&sheet, out.as_deref()),
        Command::Check { sheet } => check::check(&sheet),
        Command::Methods { bibtex } => {
            print!("{}", if bibtex { handover::bibtex() } else { handover::methods_markdown() });
            Ok(Outcome::Done)
        }
    };
    Next::Leave(match outcome {
        Ok(Outcome::Done) => ExitCode::SUCCESS,
        Ok(Outcome::PartFailed) => ExitCode::from(1),
        Err(trouble) => {
            eprintln!("ventifact: {trouble}");
            ExitCode::from(2)
        }
    })
}

/// Whether a window could be shown at all.
fn has_display() -> bool {
    cfg!(not(target_os = "linux"))
        || ["DISPLAY", "WAYLAND_DISPLAY"]
            .iter()
            .any(|name| std::env::var_os(name).is_some_and(|v| !v.is_empty()))
}
