//! The progress bar: a listener of a run.

use std::io::IsTerminal;
use std::sync::OnceLock;

use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};

use super::output::Notes;
use crate::run::{Event, Listener};

/// Shows the progress of a run on a terminal, and its warnings anywhere.
pub(super) struct Progress {
    notes: Notes,
    bar: OnceLock<ProgressBar>,
    unit: OnceLock<&'static str>,
}

impl Progress {
    pub(super) fn new(notes: Notes) -> Self {
        Self {
            notes,
            bar: OnceLock::new(),
            unit: OnceLock::new(),
        }
    }

    fn begin(&self, input_bytes: Option<u64>, unit: &'static str) {
        let _ = self.unit.set(unit);
        if self.notes.are_quiet() || !std::io::stderr().is_terminal() {
            return;
        }
        let template = match input_bytes {
            Some(_) => "{elapsed_precise} {wide_bar} {percent}% {msg} {eta} left",
            None => "{elapsed_precise} {spinner} {msg}",
        };
        let bar = ProgressBar::with_draw_target(input_bytes, ProgressDrawTarget::stderr());
        let style = ProgressStyle::with_template(template);
        bar.set_style(style.expect("the template is sound"));
        bar.set_message(format!("0 {unit}"));
        let _ = self.bar.set(bar);
    }
}

impl Listener for Progress {
    fn hear(&self, event: Event<'_>) {
        match event {
            Event::Started {
                unit, input_bytes, ..
            } => self.begin(input_bytes, unit),
            Event::Progress {
                done,
                input_bytes,
                qualified,
                best,
            } => {
                if let Some(bar) = self.bar.get() {
                    let seconds = bar.elapsed().as_secs_f64();
                    let rate = if seconds > 0.0 {
                        done as f64 / seconds
                    } else {
                        0.0
                    };
                    bar.set_position(input_bytes);
                    let unit = self.unit.get().copied().unwrap_or("lines");
                    let best = best.map_or_else(String::new, |best| format!(", best {best:.3}"));
                    bar.set_message(format!(
                        "{done} {unit}, {rate:.0}/s, {qualified} qualified{best}"
                    ));
                }
            }
            Event::Finished { .. } => {
                if let Some(bar) = self.bar.get() {
                    bar.finish_and_clear();
                }
            }
            Event::Warning { text } => self.notes.say(&format!("warning: {text}")),
            _ => {}
        }
    }
}
