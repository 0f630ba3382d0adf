//! The program `comagauge`; everything is in the library.

use std::process::ExitCode;

fn main() -> ExitCode {
    comagauge::cli::run()
}
