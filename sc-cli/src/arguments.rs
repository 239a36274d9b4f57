//! The command line.

use clap::{Args, Parser, Subcommand, ValueEnum};
use std::path::PathBuf;

/// Potential, flux and shape factor of a polygonal section, with error bounds.
#[derive(Debug, Clone, Parser)]
#[command(name = "prevertex", version, after_help = FIRST_SECTION, max_term_width = 100, arg_required_else_help = true)]
pub struct Arguments {
    /// What to do.
    #[command(subcommand)]
    pub command: Command,
}

/// The first section in a minute.
const FIRST_SECTION: &str = "\
A first section: a wall corner of two arms, warm inside, cold outside. Write this to corner.toml

    trade = \"heat\"
    material.conductivity = \"0.8 W/(m K)\"
    outline = [                              # in order, the section on the left;
      { at = [0, 0],     side = \"outside\" }, # `side` names the side that leaves a vertex
      { at = [2, 0] },
      { at = [2, 0.3],   side = \"inside\" },
      { at = [0.3, 0.3], side = \"inside\" },
      { at = [0.3, 2] },
      { at = [0, 2],     side = \"outside\" },
    ]
    [sides]                                  # a side that is not listed is insulated
    inside  = { held = \"20 degC\" }
    outside = { held = \"-5 degC\" }
    [[probe]]
    name = \"corner\"
    at = [0.3, 0.3]

and run

    prevertex check corner.toml              # what was understood
    prevertex solve corner.toml              # the heat flow per metre, with its error bound
    prevertex draw corner.toml --out net.svg # the isotherms and heat flow lines
    prevertex solve corner.toml --json       # the same for a script
    prevertex starter seepage                # a commented section of another trade

Exit status
    0  done
    1  the section was understood and cannot be answered
    2  the file or the command line is wrong
    3  answered, with an error above the tolerance asked for";

/// The commands.
#[derive(Debug, Clone, Subcommand)]
#[non_exhaustive]
pub enum Command {
    /// Answer a section: shape factor, flux of each side, matrix, probes, corners
    Solve(SolveArguments),
    /// Read and validate a section without solving it, and show what was understood
    Check(CheckArguments),
    /// Draw a section: its conditions, or its flow net with equal drops, as SVG or PNG
    Draw(DrawArguments),
    /// Print a commented section to start from
    Starter(StarterArguments),
    /// List the units a section file may use
    Units(UnitsArguments),
    /// List the answers: every key of the JSON document with its meaning and unit
    Answers,
    /// Print completions for a shell
    #[cfg(feature = "completions")]
    Completions(CompletionsArguments),
    /// Print the manual page of the program or of one command
    #[cfg(feature = "manual")]
    Man(ManArguments),
}

/// A section file and changes of its names.
#[derive(Debug, Clone, Args)]
pub struct SectionArguments {
    /// The section file, or - for standard input
    pub file: PathBuf,
    /// Give a name under `let` another value, in the unit the file gives it
    #[arg(long, value_name = "NAME=VALUE", value_parser = assignment)]
    pub set: Vec<(String, f64)>,
}

/// Arguments of `solve`.
#[derive(Debug, Clone, Args)]
pub struct SolveArguments {
    /// The section.
    #[command(flatten)]
    pub section: SectionArguments,
    /// Print the JSON document instead of the report
    #[arg(long)]
    pub json: bool,
    /// Relative error asked for; an answer with a larger bound ends with status 3
    #[arg(long, value_name = "X", value_parser = tolerance, default_value = "1e-10")]
    pub tolerance: f64,
    /// Number of threads; the answers do not depend on it [default: all cores]
    #[arg(long, value_name = "N", value_parser = threads)]
    pub threads: Option<usize>,
    /// Leave out the second, independent solution: half the time, and a weaker error bound
    #[arg(long)]
    pub no_check: bool,
    /// Where the answer goes instead of standard output.
    #[command(flatten)]
    pub destination: Destination,
}

/// Arguments of `check`.
#[derive(Debug, Clone, Args)]
pub struct CheckArguments {
    /// The section.
    #[command(flatten)]
    pub section: SectionArguments,
}

/// What is drawn.
#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub enum FigureKind {
    /// The outline with its conditions and probes
    Section,
    /// The flow net
    Net,
}

/// Arguments of `draw`.
#[derive(Debug, Clone, Args)]
pub struct DrawArguments {
    /// The section.
    #[command(flatten)]
    pub section: SectionArguments,
    /// The picture; the end of its name, .svg or .png, tells its kind
    #[arg(long, value_name = "FILE")]
    pub out: PathBuf,
    /// What is drawn
    #[arg(long, value_enum, default_value = "net")]
    pub figure: FigureKind,
    /// Number of equal drops between the highest and the lowest level [default: some sixty cells]
    #[arg(long, value_name = "N", value_parser = drops)]
    pub drops: Option<usize>,
    /// Width of the picture in pixels
    #[arg(long, value_name = "PIXELS", value_parser = pixels, default_value = "1000")]
    pub width: u32,
    /// Draw the section stretched so that its layered fabric conducts alike in all directions
    #[arg(long)]
    pub stretched: bool,
    /// Number the vertices, as the outline lists them, from 0
    #[arg(long)]
    pub vertex_numbers: bool,
    /// Replace the file if it exists
    #[arg(long)]
    pub replace: bool,
}

/// A trade that has a starter.
#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub enum StarterTrade {
    /// Water under a structure
    Seepage,
    /// Heat through a building section
    Heat,
    /// Conductors and resistive films
    Conductor,
    /// Numbers without units
    Plain,
}

/// Arguments of `starter`.
#[derive(Debug, Clone, Args)]
pub struct StarterArguments {
    /// The trade
    pub trade: StarterTrade,
    /// Where it goes instead of standard output.
    #[command(flatten)]
    pub destination: Destination,
}

/// A file for the results.
#[derive(Debug, Clone, Default, Args)]
pub struct Destination {
    /// Write to this file instead of standard output
    #[arg(long, value_name = "FILE")]
    pub out: Option<PathBuf>,
    /// Replace the file if it exists
    #[arg(long, requires = "out")]
    pub replace: bool,
}

/// Arguments of `units`.
#[derive(Debug, Clone, Args)]
pub struct UnitsArguments {
    /// Only units of what is called so, such as length or conductivity
    pub measure: Option<String>,
}

/// Arguments of `completions`.
#[cfg(feature = "completions")]
#[derive(Debug, Clone, Args)]
pub struct CompletionsArguments {
    /// The shell
    pub shell: clap_complete::Shell,
}

/// Arguments of `man`.
#[cfg(feature = "manual")]
#[derive(Debug, Clone, Args)]
pub struct ManArguments {
    /// The command whose page is wanted
    pub command: Option<String>,
}

fn assignment(text: &str) -> Result<(String, f64), String> {
    let (name, value) = text.split_once('=').ok_or("write NAME=VALUE, as in depth=4.5")?;
    let value: f64 = value.trim().parse().map_err(|_| format!("`{}` is not a number", value.trim()))?;
    if !value.is_finite() {
        return Err("the value must be finite".to_owned());
    }
    Ok((name.trim().to_owned(), value))
}

fn tolerance(text: &str) -> Result<f64, String> {
    match text.parse::<f64>() {
        Ok(x) if 0.0 < x && x < 1.0 => Ok(x),
        _ => Err("a relative error is a number above 0 and below 1, such as 1e-6".to_owned()),
    }
}

/// More drops than this cannot be told apart on a page.
const MAX_DROPS: usize = 1000;

fn drops(text: &str) -> Result<usize, String> {
    match text.parse::<usize>() {
        Ok(n) if 1 <= n && n <= MAX_DROPS => Ok(n),
        _ => Err(format!("the number of drops is a whole number from 1 to {MAX_DROPS}")),
    }
}

/// Widths of a picture.
const MIN_PIXELS: u32 = 200;
const MAX_PIXELS: u32 = 6000;

fn pixels(text: &str) -> Result<u32, String> {
    match text.parse::<u32>() {
        Ok(n) if MIN_PIXELS <= n && n <= MAX_PIXELS => Ok(n),
        _ => Err(format!("the width is a whole number of pixels from {MIN_PIXELS} to {MAX_PIXELS}")),
    }
}

/// More threads than this are taken for a slip.
const MAX_THREADS: usize = 1024;

fn threads(text: &str) -> Result<usize, String> {
    match text.parse::<usize>() {
        Ok(n) if 1 <= n && n <= MAX_THREADS => Ok(n),
        _ => Err(format!("the number of threads is a whole number from 1 to {MAX_THREADS}")),
    }
}
