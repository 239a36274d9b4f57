//! Solves the ten thousand generated sections and prints a table of what came of them, family by family.
//!
//! `cargo run --release -p sc-tests --bin corpus_table -- [options]`
//!
//! * `--count N`: about `N` sections, the same share of every family, instead of all
//! * `--family NAME`: this family only; may be given more than once
//! * `--case NAME/NUMBER`: one section only, with its outline
//! * `--once`: without the second solution
//! * `--unchecked`: without the independent methods that check one in fifty
//! * `--threads N`: this many sections at a time, each on one thread (default 1)
//! * `--failures FILE`: writes a line for each failure as it comes
//! * `--log FILE`: writes a line for each section when it is taken up and when it is done
//! * `--machine TEXT`: what the table says it was made on
//!
//! The exit status is 1 if less than 99.9 % are solved or an independent method contradicts an answer.

#![allow(clippy::print_stdout, clippy::print_stderr, reason = "printing is what this command is for")]

use std::fs::File;
use std::io::Write;
use std::process::ExitCode;
use std::sync::Mutex;
use std::sync::atomic::{AtomicUsize, Ordering};

use sc_tests::corpus::check::{check, methods};
use sc_tests::corpus::outcome::{Outcome, examine};
use sc_tests::corpus::table::{report, solved_share};
use sc_tests::corpus::{Case, Family, case};

/// Least share of sections to be solved.
const LEAST_SHARE: f64 = 0.999;

#[derive(Debug, Default)]
struct Options {
    count: Option<usize>,
    families: Vec<Family>,
    one: Option<(Family, usize)>,
    once: bool,
    unchecked: bool,
    threads: usize,
    failures: Option<String>,
    log: Option<String>,
    machine: Option<String>,
}

fn options() -> Result<Options, String> {
    let mut options = Options { threads: 1, ..Options::default() };
    let mut arguments = std::env::args().skip(1);
    while let Some(argument) = arguments.next() {
        match argument.as_str() {
            "--once" => {
                options.once = true;
                continue;
            }
            "--unchecked" => {
                options.unchecked = true;
                continue;
            }
            _ => {}
        }
        let value = arguments.next().ok_or(format!("{argument} needs a value"))?;
        let number = || value.parse::<usize>().map_err(|_| format!("{value} is not a number"));
        let family = |name: &str| Family::named(name).ok_or(format!("there is no family {name}"));
        match argument.as_str() {
            "--count" => options.count = Some(number()?),
            "--threads" => options.threads = number()?.max(1),
            "--family" => options.families.push(family(&value)?),
            "--failures" => options.failures = Some(value),
            "--log" => options.log = Some(value),
            "--machine" => options.machine = Some(value),
            "--case" => {
                let (name, index) = value.split_once('/').ok_or("a case is NAME/NUMBER".to_owned())?;
                let index = index.parse().map_err(|_| format!("{index} is not a number"))?;
                options.one = Some((family(name)?, index));
            }
            other => return Err(format!("there is no option {other}")),
        }
    }
    Ok(options)
}

/// The cases asked for, family by family.
fn wanted(options: &Options) -> Vec<(Family, usize)> {
    if let Some(one) = options.one {
        return vec![one];
    }
    let families =
        Family::ALL.iter().filter(|(f, _)| options.families.is_empty() || options.families.contains(f));
    let families: Vec<_> = families.copied().collect();
    let all: usize = families.iter().map(|&(_, count)| count).sum();
    let step = options.count.map_or(1, |count| all.div_ceil(count.max(1))).max(1);
    families.iter().flat_map(|&(f, count)| (0..count).step_by(step).map(move |index| (f, index))).collect()
}

fn describe(case: &Case) {
    for (k, (vertex, electrode)) in case.section.vertices.iter().zip(&case.section.electrodes).enumerate() {
        println!("{k:>4} {vertex:?} {}", electrode.map_or("insulated".into(), |e| format!("electrode {e}")));
    }
    println!("levels {:?}", case.section.levels);
}

fn main() -> ExitCode {
    let options = match options() {
        Ok(options) => options,
        Err(message) => {
            eprintln!("{message}");
            return ExitCode::FAILURE;
        }
    };
    let created = |path: &Option<String>| path.as_ref().map(File::create).transpose();
    let (failures, log) = match (created(&options.failures), created(&options.log)) {
        (Ok(failures), Ok(log)) => (failures, log),
        (Err(error), _) | (_, Err(error)) => {
            eprintln!("a file cannot be written: {error}");
            return ExitCode::FAILURE;
        }
    };
    let wanted = wanted(&options);
    if let Some((family, index)) = options.one {
        describe(&case(family, index));
    }
    let next = AtomicUsize::new(0);
    let results = Mutex::new(Results { outcomes: Vec::new(), failures, log });
    std::thread::scope(|scope| {
        for _ in 0..options.threads {
            scope.spawn(|| work(&options, &wanted, &next, &results));
        }
    });
    let mut outcomes = results.into_inner().unwrap_or_else(std::sync::PoisonError::into_inner).outcomes;
    outcomes.sort_by_key(|outcome| (outcome.family, outcome.index));
    print!("{}", report(&outcomes, !options.once, options.machine.as_deref()));
    let contradicted = outcomes.iter().any(Outcome::is_contradicted);
    if solved_share(&outcomes) >= LEAST_SHARE && !contradicted {
        ExitCode::SUCCESS
    } else {
        ExitCode::FAILURE
    }
}

/// What has come of the cases so far, and where it is written.
#[derive(Debug)]
struct Results {
    outcomes: Vec<Outcome>,
    failures: Option<File>,
    log: Option<File>,
}

impl Results {
    fn add(&mut self, outcome: Outcome) {
        let name = outcome.name();
        let ms = 1e3 * outcome.time.as_secs_f64();
        match &outcome.result {
            Ok(f) => {
                let figures = format!(
                    "{} iterations, residual {:.1e}, error {:.1e}",
                    f.iterations, f.residual, f.estimate
                );
                write_line(&mut self.log, &format!("{name} ({} sides) {ms:.1} ms, {figures}", outcome.sides));
            }
            Err(why) => {
                let line = format!("{name} ({} sides) {ms:.1} ms, {}: {why}", outcome.sides, why.rule());
                write_line(&mut self.log, &line);
                write_line(&mut self.failures, &line);
            }
        }
        for check in &outcome.checks {
            let line = format!("{name} {check:?}");
            write_line(&mut self.log, &line);
            if check.verdict.as_ref().is_ok_and(|verdict| !verdict.agrees) {
                write_line(&mut self.failures, &line);
            }
        }
        self.outcomes.push(outcome);
    }
}

fn write_line(file: &mut Option<File>, line: &str) {
    if let Some(Err(error)) = file.as_mut().map(|file| writeln!(file, "{line}")) {
        eprintln!("a line cannot be written ({error}): {line}");
    }
}

/// Takes cases until none is left; each is solved on one thread from start to end.
fn work(options: &Options, wanted: &[(Family, usize)], next: &AtomicUsize, results: &Mutex<Results>) {
    let pool = match rayon::ThreadPoolBuilder::new().num_threads(1).build() {
        Ok(pool) => pool,
        Err(error) => {
            eprintln!("no thread to work on: {error}");
            return;
        }
    };
    let locked = || results.lock().unwrap_or_else(std::sync::PoisonError::into_inner);
    while let Some(&(family, index)) = wanted.get(next.fetch_add(1, Ordering::Relaxed)) {
        let case = case(family, index);
        write_line(&mut locked().log, &format!("{} taken up", case.name()));
        let mut outcome = pool.install(|| examine(&case, !options.once));
        if let Ok(Some(conductance)) = outcome.result.as_ref().map(|figures| figures.conductance)
            && !options.unchecked
        {
            let methods = methods(family, index).into_iter();
            outcome.checks =
                pool.install(|| methods.map(|method| check(method, family, index, conductance)).collect());
        }
        locked().add(outcome);
    }
}
