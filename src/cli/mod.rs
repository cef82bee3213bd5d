//! The command line: raw arguments become library calls, results become text.

mod build;
mod holes;
mod host;
mod output;
mod progress;
mod radii;
mod seat;
mod vet;

use annotate_snippets::{AnnotationKind, Level, Renderer, Snippet};
use clap::{Parser, Subcommand, ValueEnum};
use interstice::error::Error;
use std::process::ExitCode;

/// From an ionic composition and an anion packing to starting cells for first-principles work.
#[derive(Parser)]
#[command(version, about, disable_help_subcommand = true)]
struct Arguments {
    #[command(subcommand)]
    command: Command,
}

#[derive(Subcommand)]
enum Command {
    /// Shannon radii, ratios and bond-valence parameters of ions
    Radii(radii::Arguments),
    /// The interstices of a host: kind, number, size, position, windows
    Holes(holes::Arguments),
    /// The decision alone: charges, which interstices, how many, why
    Seat(seat::Arguments),
    /// The main job: cells as files
    Build(build::Arguments),
    /// Hold CIFs against the packing rules
    Vet(vet::Arguments),
}

/// How a command ended.
enum Outcome {
    /// Done.
    Clean,
    /// Done, and a rule was broken.
    Broken,
}

/// Which of Shannon's sets.
#[derive(Clone, Copy, ValueEnum)]
enum Radii {
    /// Crystal radii
    Crystal,
    /// Effective ionic radii
    Effective,
}

impl From<Radii> for interstice::ion::radius::RadiusSet {
    fn from(radii: Radii) -> Self {
        match radii {
            Radii::Crystal => Self::Crystal,
            Radii::Effective => Self::Effective,
        }
    }
}

/// Runs the command; 0 done, 1 a rule was broken or a constraint cannot be met, 2 the input or the call is wrong.
pub fn main() -> ExitCode {
    let arguments = Arguments::parse();
    let result = match &arguments.command {
        Command::Radii(a) => radii::run(a),
        Command::Holes(a) => holes::run(a),
        Command::Seat(a) => seat::run(a),
        Command::Build(a) => build::run(a),
        Command::Vet(a) => vet::run(a),
    };
    match result {
        Ok(Outcome::Clean) => ExitCode::SUCCESS,
        Ok(Outcome::Broken) => ExitCode::from(1),
        Err(error) => {
            eprintln!("interstice: {}", report(&error));
            ExitCode::from(if error.is_unmet_constraint() { 1 } else { 2 })
        }
    }
}

/// The message, with the source line and a caret where there is one.
fn report(error: &Error) -> String {
    let excerpt = |source: &str, column: usize, line: usize, origin: &str, label: &str| {
        let start: usize = source.chars().take(column.saturating_sub(1)).map(char::len_utf8).sum();
        let end = start + source[start..].chars().next().map_or(0, char::len_utf8);
        let snippet = Snippet::source(source)
            .line_start(line)
            .path(origin)
            .annotation(AnnotationKind::Primary.span(start..end).label(label));
        let report = &[Level::ERROR.primary_title(error.to_string()).element(snippet)];
        // The title already says it is an error of interstice.
        Renderer::plain().render(report).trim_start_matches("error: ").to_string()
    };
    match error {
        Error::Formula(e) => excerpt(&e.text, e.column, 1, "formula", "here"),
        other => other.to_string(),
    }
}

/// Prints to standard output; a closed pipe is no fault.
fn print(text: &str) {
    use std::io::Write;
    let mut out = std::io::stdout().lock();
    let _ = out.write_all(text.as_bytes()).and_then(|()| out.flush());
}

fn json<T: serde::Serialize>(value: &T) -> String {
    // Plain data: nothing in it can fail to be written.
    serde_json::to_string_pretty(value).unwrap_or_default() + "\n"
}
