//! Floor 8, an edge: the command line.
//!
//! Imports every floor. Results go to stdout, everything else to stderr; a closed pipe is a normal
//! end.

mod alternatives;
mod bands;
mod compare;
mod describe;
mod efficiency;
mod geometry;
mod identify;
mod measure;
mod output;
mod paper;
mod prepare;
mod reading;
mod rehearse;
mod show;
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
    /// Look at a spectrum, list the bands in its range and write a starter plan.
    Prepare(prepare::Prepare),
    /// Show what a file holds and how it is understood.
    Show(show::Show),
    /// Distances, rates and angles of a comet over dates, from its orbit.
    Geometry(geometry::Geometry),
    /// Fit the bands of a plan and turn them into production rates and ratios.
    Measure(measure::Measure),
    /// List the bands of the line lists, with their g-factors and sources.
    Bands(bands::Bands),
    /// Print the JSON Schema of the plan, for editors.
    Schema,
    /// Print a completion script for a shell.
    Completions(describe::Completions),
    /// Print the manual page.
    Man,
    /// Fluorescence efficiencies of an atom or molecule at the comet, or along a range.
    Efficiency(efficiency::Efficiency),
    /// Find the peaks of a spectrum and name the lines they can be.
    Identify(identify::Identify),
    /// Say where ratios stand among known comets.
    Compare(Box<compare::Compare>),
    /// Make figures, tables, text and references for a paper draft from results.
    Paper(paper::Paper),
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
        Command::Prepare(p) => p.run(),
        Command::Show(s) => s.run(),
        Command::Geometry(g) => g.run(),
        Command::Schema => describe::schema(),
        Command::Completions(c) => c.run(),
        Command::Man => describe::man(),
        Command::Efficiency(e) => e.run(),
        Command::Identify(i) => i.run(),
        Command::Compare(c) => c.run(),
        Command::Paper(p) => p.run(),
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
