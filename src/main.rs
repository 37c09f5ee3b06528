//! The program: commands run in the terminal, everything else opens the window.

use std::process::ExitCode;

use ventifact::headless::{self, Next};

fn main() -> ExitCode {
    match headless::main() {
        Next::Leave(code) => code,
        Next::Window(sheet) => window(sheet),
    }
}

#[cfg(feature = "window")]
fn window(sheet: Option<std::path::PathBuf>) -> ExitCode {
    match ventifact::window::open(sheet) {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            eprintln!(
                "ventifact: the window cannot be opened\n  {error}\n  The commands work without it: ventifact --help"
            );
            ExitCode::from(2)
        }
    }
}

#[cfg(not(feature = "window"))]
fn window(_sheet: Option<std::path::PathBuf>) -> ExitCode {
    eprintln!("ventifact: built without the window\n  Use a command: ventifact --help");
    ExitCode::from(2)
}
