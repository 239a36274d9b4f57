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
//! * `--record FILE`: keeps each outcome in a file as it comes; started again, takes up where it was left
//! * `--machine TEXT`: what the table says it was made on
//!
//! The exit status is 1 if less than 99.9 % are solved or an independent method contradicts an answer.

#![allow(clippy::print_stdout, clippy::print_stderr, reason = "printing is what this command is for")]

use std::collections::BTreeSet;
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
    record: Option<String>,
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
            "--record" => options.record = Some(value),
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
    let mut wanted = wanted(&options);
    if let Some((family, index)) = options.one {
        describe(&case(family, index));
    }
    let results = match options.record.as_deref().map_or(Ok(Results::default()), Results::kept_in) {
        Ok(results) => results,
        Err(error) => {
            eprintln!("the record cannot be used: {error}");
            return ExitCode::FAILURE;
        }
    };
    let known: BTreeSet<(Family, usize)> = results.outcomes.iter().map(|o| (o.family, o.index)).collect();
    wanted.retain(|case| !known.contains(case));
    let next = AtomicUsize::new(0);
    let results = Mutex::new(results);
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

/// What has come of the cases so far, and where it is kept.
#[derive(Debug, Default)]
struct Results {
    outcomes: Vec<Outcome>,
    record: Option<File>,
}

impl Results {
    /// What a file holds already, an outcome a line; more is added to it. A last line cut short is dropped.
    fn kept_in(path: &str) -> std::io::Result<Results> {
        let before = std::fs::read_to_string(path).or_else(|error| match error.kind() {
            std::io::ErrorKind::NotFound => Ok(String::new()),
            _ => Err(error),
        })?;
        let outcomes: Vec<Outcome> =
            before.lines().filter_map(|line| serde_json::from_str(line).ok()).collect();
        let mut results = Results { outcomes: Vec::new(), record: Some(File::create(path)?) };
        for outcome in outcomes {
            results.add(outcome);
        }
        Ok(results)
    }

    fn add(&mut self, outcome: Outcome) {
        if let Some(file) = &mut self.record {
            let written =
                serde_json::to_string(&outcome).map_err(Into::into).and_then(|line| writeln!(file, "{line}"));
            if let Err(error) = written {
                eprintln!("{} cannot be recorded: {error}", outcome.name());
            }
        }
        self.outcomes.push(outcome);
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
    while let Some(&(family, index)) = wanted.get(next.fetch_add(1, Ordering::Relaxed)) {
        let case = case(family, index);
        let mut outcome = pool.install(|| examine(&case, !options.once));
        if let Ok(Some(conductance)) = outcome.result.as_ref().map(|figures| figures.conductance)
            && !options.unchecked
        {
            let methods = methods(family, index).into_iter();
            outcome.checks =
                pool.install(|| methods.map(|method| check(method, family, index, conductance)).collect());
        }
        results.lock().unwrap_or_else(std::sync::PoisonError::into_inner).add(outcome);
    }
}
