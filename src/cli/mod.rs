//! Floor 8, an edge: the command line.
//!
//! Imports every floor. Results go to stdout, everything else to stderr; a closed pipe is a normal
//! end.

mod bands;
mod measure;
mod output;
mod rehearse;
mod simulate;

use clap::{Parser, Subcommand};
use std::process::ExitCode;

/// Abundance ratios of comets from reduced spectra, with error bars and every constant's source.
#[derive(Parser)]
#[command(name = "comagauge", version, max_term_width = 100)]
struct Cli {
    #[command(subcommand)]
    command: Command,
}

#[derive(Subcommand)]
enum Command {
    /// Fit the bands of a plan and turn them into production rates and ratios.
    Measure(measure::Measure),
    /// List the bands of the line lists, with their g-factors and sources.
    Bands(bands::Bands),
    /// Repeat the analysis on the fitted model with fresh noise: bias, coverage, detections.
    Rehearse(rehearse::Rehearse),
    /// Make the spectrum of a given composition, and say what exposures can detect.
    Simulate(simulate::Simulate),
}

/// Runs the program on the process's arguments: exit code 0 done, 1 failed, 2 usage or plan.
pub fn run() -> ExitCode {
    let cli = Cli::parse();
    let done = match cli.command {
        Command::Measure(m) => m.run(),
        Command::Bands(b) => b.run(),
        Command::Rehearse(r) => r.run(),
        Command::Simulate(s) => s.run(),
    };
    match done {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            output::complain(&format!("error: {error}"));
            ExitCode::from(error.exit_code())
        }
    }
}
