//! The `prevertex` program.

use clap::Parser;
use sc_cli::arguments::Arguments;
use sc_cli::commands;
use std::process::ExitCode;

fn main() -> ExitCode {
    commands::run(&Arguments::parse()).deliver()
}
