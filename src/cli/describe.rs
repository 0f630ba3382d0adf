//! The plan's schema, shell completions and the manual page, made from the same definitions.

use super::{Cli, output};
use crate::ground::{Error, Result};
use crate::plan::Plan;
use clap::{Args, CommandFactory};
use clap_complete::Shell;

/// Prints the JSON Schema of the plan.
pub(super) fn schema() -> Result<()> {
    let schema = schemars::schema_for!(Plan);
    let mut text = serde_json::to_string_pretty(&schema)
        .map_err(|e| Error::compute(format!("the schema cannot be written: {e}")))?;
    text.push('\n');
    output::print(&text)
}

/// Arguments of `completions`.
#[derive(Args)]
pub(super) struct Completions {
    /// The shell.
    shell: Shell,
}

impl Completions {
    pub(super) fn run(self) -> Result<()> {
        let mut text = Vec::new();
        clap_complete::generate(self.shell, &mut Cli::command(), "comagauge", &mut text);
        output::print(&String::from_utf8_lossy(&text))
    }
}

/// Prints the manual page of the program and its commands (roff).
pub(super) fn man() -> Result<()> {
    let mut text = Vec::new();
    let fail = |e: std::io::Error| Error::compute(format!("the manual cannot be written: {e}"));
    let command = Cli::command();
    clap_mangen::Man::new(command.clone())
        .render(&mut text)
        .map_err(fail)?;
    for sub in command.get_subcommands() {
        clap_mangen::Man::new(sub.clone())
            .render(&mut text)
            .map_err(fail)?;
    }
    output::print(&String::from_utf8_lossy(&text))
}
