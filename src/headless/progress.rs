//! A progress bar on a terminal, nothing when piped.

use std::io::IsTerminal as _;
use std::time::Duration;

use indicatif::{ProgressBar, ProgressStyle};

use crate::ground::Work;

/// Runs `task` with work that is watched on standard error while it lasts.
pub fn watched<T: Send>(task: impl FnOnce(&Work) -> T + Send) -> T {
    let work = Work::quiet();
    if !std::io::stderr().is_terminal() {
        return task(&work);
    }
    let bar = ProgressBar::new(0);
    if let Ok(style) = ProgressStyle::with_template("{msg:32} {bar:32} {percent:>3} %") {
        bar.set_style(style);
    }
    std::thread::scope(|scope| {
        let running = scope.spawn(|| task(&work));
        while !running.is_finished() {
            let progress = work.progress();
            bar.set_message(progress.phase);
            bar.set_length(progress.total);
            bar.set_position(progress.done.min(progress.total));
            std::thread::sleep(Duration::from_millis(60));
        }
        bar.finish_and_clear();
        match running.join() {
            Ok(result) => result,
            Err(panic) => std::panic::resume_unwind(panic),
        }
    })
}
