//! Progress on a terminal: one line on standard error that goes away.

use std::io::{self, IsTerminal};
use std::time::Duration;

use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};

use crate::budget::Budget;
use crate::cli::Global;

/// The budget that the options give, with progress where a person looks on.
pub(super) fn budget(global: &Global) -> (Budget, Line) {
    let mut budget = Budget::unlimited();
    if let Some(seconds) = global.time {
        budget = budget.within(Duration::from_secs_f64(seconds));
    }
    if global.json || !io::stderr().is_terminal() {
        return (budget, Line(None));
    }
    let bar = ProgressBar::with_draw_target(None, ProgressDrawTarget::stderr_with_hz(10));
    let style = ProgressStyle::with_template("{spinner} {msg} {elapsed}").expect("a template that is accepted");
    bar.set_style(style);
    let seen = bar.clone();
    let budget = budget.with_listener(move |progress| {
        let share = progress.total.map_or_else(String::new, |total| format!(" {}/{total}", progress.done));
        seen.set_message(format!("{}{share}", progress.stage));
        seen.tick();
    });
    (budget, Line(Some(bar)))
}

/// The line; it is cleared when this goes out of scope.
pub(super) struct Line(Option<ProgressBar>);

impl Drop for Line {
    fn drop(&mut self) {
        if let Some(bar) = &self.0 {
            bar.finish_and_clear();
        }
    }
}
