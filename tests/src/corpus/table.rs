//! The table of all outcomes, as a page of text.

use std::collections::BTreeMap;
use std::fmt::Write;

use super::Family;
use super::check::{Check, Method, Verdict};
use super::outcome::{Failure, Figures, Outcome};
use crate::robustness::median;

/// An estimate above this is counted as coarse.
const COARSE: f64 = 1e-9;
/// How many of the slowest and of the coarsest are named.
const NAMED: usize = 12;

/// Share of the outcomes that count as solved.
#[must_use]
pub fn solved_share(outcomes: &[Outcome]) -> f64 {
    let solved = outcomes.iter().filter(|outcome| outcome.result.is_ok()).count();
    solved as f64 / outcomes.len().max(1) as f64
}

/// The whole page.
#[must_use]
pub fn report(outcomes: &[Outcome], checked: bool, machine: Option<&str>) -> String {
    let mut page = String::from("# Robustness\n\n");
    let head = format!(
        "{} generated sections (`tests/src/corpus`), {}, made by\n\
         `cargo run --release -p sc-tests --bin corpus_table`. Times are processor time on one thread, {}.\n\
         Medians / maxima over the sections that are solved.\n\n",
        outcomes.len(),
        if checked { "each solved twice in independent ways" } else { "each solved once" },
        machine.unwrap_or("machine not stated")
    );
    page += &head;
    page += "| family | cases | solved | sides | iterations | residual | abs(G·G′ − 1) | stated error | above 1e-9 | time, ms |\n";
    page += "|---|--:|--:|--:|--:|--:|--:|--:|--:|--:|\n";
    for (family, _) in Family::ALL {
        let members: Vec<&Outcome> = outcomes.iter().filter(|outcome| outcome.family == family).collect();
        if !members.is_empty() {
            page += &row(family.name(), &members);
        }
    }
    page += &row("all", &outcomes.iter().collect::<Vec<_>>());
    page += &failures(outcomes);
    page += &checks(outcomes);
    page += &by_sides(outcomes);
    page += &ranked("Slowest", outcomes, |outcome| outcome.time.as_secs_f64());
    page += &ranked("Largest stated errors", outcomes, |outcome| {
        outcome.result.as_ref().map_or(0.0, |figures| figures.estimate)
    });
    page
}

fn row(name: &str, members: &[&Outcome]) -> String {
    let figures: Vec<&Figures> = members.iter().filter_map(|o| o.result.as_ref().ok()).collect();
    let pair = |numbers: Vec<f64>, digits: &dyn Fn(f64) -> String| {
        let largest = numbers.iter().copied().fold(0.0, f64::max);
        median(numbers).map_or("–".into(), |middle| format!("{} / {}", digits(middle), digits(largest)))
    };
    let small = |x: f64| format!("{x:.1e}");
    let whole = |x: f64| format!("{x:.0}");
    let milliseconds = |x: f64| if x < 100.0 { format!("{x:.1}") } else { format!("{x:.0}") };
    format!(
        "| {name} | {} | {} | {} | {} | {} | {} | {} | {} | {} |\n",
        members.len(),
        figures.len(),
        pair(members.iter().map(|o| o.sides as f64).collect(), &whole),
        pair(figures.iter().map(|f| f.iterations as f64).collect(), &whole),
        pair(figures.iter().map(|f| f.residual).collect(), &small),
        pair(figures.iter().filter_map(|f| f.reciprocity).collect(), &small),
        pair(figures.iter().map(|f| f.estimate).collect(), &small),
        figures.iter().filter(|f| f.estimate > COARSE).count(),
        pair(members.iter().map(|o| 1e3 * o.time.as_secs_f64()).collect(), &milliseconds),
    )
}

fn failures(outcomes: &[Outcome]) -> String {
    let mut page = format!("\n## Not solved: {:.2} %\n\n", 100.0 * (1.0 - solved_share(outcomes)));
    let failed: Vec<(&Outcome, &Failure)> =
        outcomes.iter().filter_map(|outcome| Some((outcome, outcome.result.as_ref().err()?))).collect();
    if failed.is_empty() {
        return page + "None.\n";
    }
    let mut rules: BTreeMap<&str, usize> = BTreeMap::new();
    for (_, why) in &failed {
        *rules.entry(&why.rule).or_default() += 1;
    }
    for (rule, count) in rules {
        let _ = writeln!(page, "- {rule}: {count}");
    }
    page.push('\n');
    for (outcome, why) in failed {
        let _ = writeln!(page, "- {} ({} sides): {}", outcome.name(), outcome.sides, why.message);
    }
    page
}

/// What the independent methods say.
fn checks(outcomes: &[Outcome]) -> String {
    let mut page = String::from(
        "\n## Independent checks\n\n\
         One in fifty, by methods that share no code with the map: agreement within both bounds. \
         Uncertainty of the method in parts of the conductance.\n\n\
         | method | family | cases | agree | no answer | uncertainty, median / largest |\n|---|---|--:|--:|--:|--:|\n",
    );
    let mut notes = String::new();
    for (method, name) in
        [(Method::TwoSided, "trial functions (two-sided)"), (Method::Rational, "rational least squares")]
    {
        for (family, _) in Family::ALL {
            let members = outcomes.iter().filter(|outcome| outcome.family == family);
            let all: Vec<(&Outcome, &Check)> = members
                .flat_map(|outcome| outcome.checks.iter().map(move |check| (outcome, check)))
                .filter(|(_, check)| check.method == method)
                .collect();
            let verdicts: Vec<&Verdict> = all.iter().filter_map(|(_, c)| c.verdict.as_ref().ok()).collect();
            for (outcome, check) in &all {
                match &check.verdict {
                    Ok(verdict) if !verdict.agrees => {
                        let _ = writeln!(notes, "- {} is contradicted: {verdict:?}", outcome.name());
                    }
                    Err(why) => {
                        let _ = writeln!(notes, "- {}, no answer by {name}: {why}", outcome.name());
                    }
                    Ok(_) => {}
                }
            }
            let agree = verdicts.iter().filter(|verdict| verdict.agrees).count();
            let largest = verdicts.iter().map(|verdict| verdict.uncertainty).fold(0.0, f64::max);
            if let Some(middle) = median(verdicts.iter().map(|verdict| verdict.uncertainty).collect()) {
                let (cases, silent) = (all.len(), all.len() - verdicts.len());
                let name_of = family.name();
                let _ = writeln!(
                    page,
                    "| {name} | {name_of} | {cases} | {agree} | {silent} | {middle:.1e} / {largest:.1e} |"
                );
            }
        }
    }
    if !notes.is_empty() {
        page.push('\n');
        page += &notes;
    }
    page
}

fn by_sides(outcomes: &[Outcome]) -> String {
    let mut page = String::from(
        "\n## By number of sides\n\n| sides | cases | median time, ms | largest |\n|---|--:|--:|--:|\n",
    );
    for (low, high) in [(4, 10), (10, 20), (20, 50), (50, 100), (100, 150), (150, 1000)] {
        let times: Vec<f64> = outcomes
            .iter()
            .filter(|o| low <= o.sides && o.sides < high)
            .map(|o| 1e3 * o.time.as_secs_f64())
            .collect();
        let (count, largest) = (times.len(), times.iter().copied().fold(0.0, f64::max));
        if let Some(middle) = median(times) {
            let _ = writeln!(page, "| {low} to {} | {count} | {middle:.1} | {largest:.0} |", high - 1);
        }
    }
    page
}

fn ranked(title: &str, outcomes: &[Outcome], by: impl Fn(&Outcome) -> f64) -> String {
    let mut page = format!(
        "\n## {title}\n\n| section | sides | ms | iterations | decades of gaps | stated error | abs(G·G′ − 1) |\n|---|--:|--:|--:|--:|--:|--:|\n"
    );
    let mut order: Vec<&Outcome> = outcomes.iter().collect();
    order.sort_by(|a, b| by(b).total_cmp(&by(a)));
    for outcome in order.into_iter().take(NAMED) {
        let figures = outcome.result.as_ref().ok();
        let _ = writeln!(
            page,
            "| {}/{} | {} | {:.0} | {} | {} | {} | {} |",
            outcome.family.name(),
            outcome.index,
            outcome.sides,
            1e3 * outcome.time.as_secs_f64(),
            figures.map_or("–".into(), |f| f.iterations.to_string()),
            figures.map_or("–".into(), |f| format!("{:.0}", f.decades)),
            figures.map_or("–".into(), |f| format!("{:.1e}", f.estimate)),
            figures.and_then(|f| f.reciprocity).map_or("–".into(), |r| format!("{r:.1e}")),
        );
    }
    page
}
