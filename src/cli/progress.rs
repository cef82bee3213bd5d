//! A progress bar on a terminal, nothing when piped.

use indicatif::{ProgressBar, ProgressStyle};
use interstice::ordering::Progress;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::Duration;

/// Runs `work` while a bar on standard error shows how far it is; work of less than a moment shows none.
pub fn shown<T: Send>(quiet: bool, work: impl FnOnce(&Progress) -> T + Send) -> T {
    let progress = Progress::default();
    if quiet || !console_is_watched() {
        return work(&progress);
    }
    let finished = AtomicBool::new(false);
    std::thread::scope(|scope| {
        scope.spawn(|| draw(&progress, &finished));
        let result = work(&progress);
        finished.store(true, Ordering::Relaxed);
        result
    })
}

fn console_is_watched() -> bool {
    use std::io::IsTerminal;
    std::io::stderr().is_terminal()
}

fn draw(progress: &Progress, finished: &AtomicBool) {
    const MOMENT: Duration = Duration::from_millis(100);
    let bar = ProgressBar::no_length();
    if let Ok(style) = ProgressStyle::with_template("{wide_bar} {pos}/{len} {elapsed}") {
        bar.set_style(style);
    }
    while !finished.load(Ordering::Relaxed) {
        std::thread::sleep(MOMENT);
        bar.set_length(progress.total.load(Ordering::Relaxed));
        bar.set_position(progress.done.load(Ordering::Relaxed));
    }
    bar.finish_and_clear();
}
