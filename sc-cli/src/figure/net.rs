//! The flow net: equipotentials with their values, flow lines, and the edge of a part channel dashed.

use super::conditions::{draw_conditions, page_for, title};
use super::drawing::{Drawing, PagePoint, Pen, distance};
use super::label::Box2;
use super::number::{decimals_of_step, fixed, power_of_ten, tidy};
use super::page::{CaptionLine, Page};
use super::render::text_width;
use super::{Sheet, Subject, with_unit};
use sc_core::answers::{Bounded, FlowNet, suitable_drops};

const FLOW_LINE: Pen = Pen::solid(1.7);
const PART_CHANNEL: Pen = Pen { width: 1.7, tone: 0.0, dash: Some([9.0, 6.0]) };
const EQUIPOTENTIAL: Pen = Pen { width: 0.9, tone: 0.3, dash: None };
/// Size of the values on equipotentials, of the lettering's em.
const VALUE_SIZE: f64 = 0.82;
/// Where along an equipotential its value may stand.
const STATIONS: [f64; 9] = [0.5, 0.38, 0.62, 0.27, 0.73, 0.17, 0.83, 0.1, 0.9];
/// Every line bears its value, or every second, fifth, …
const STRIDES: [usize; 6] = [1, 2, 5, 10, 20, 50];

/// An equipotential on the page.
#[derive(Debug)]
struct Drawn {
    /// Number of drops above the lowest level.
    number: usize,
    value: f64,
    parts: Vec<Vec<PagePoint>>,
}

/// The figure of a flow net in the coordinates of the subject's outline; `shape_factor` as the solution has it.
pub fn net_figure(
    subject: &Subject<'_>,
    net: &FlowNet,
    shape_factor: Option<Bounded>,
    sheet: &Sheet,
) -> Drawing {
    let mut page = page_for(subject, sheet);
    let weight = (page.em / 15.0).max(0.6);
    let scaled =
        |pen: Pen| Pen { width: pen.width * weight, dash: pen.dash.map(|d| d.map(|v| v * weight)), ..pen };
    let lowest = subject.section.levels().iter().copied().fold(f64::INFINITY, f64::min);
    let lines: Vec<Drawn> = (net.equipotentials.iter())
        .map(|line| Drawn {
            number: ((line.value - lowest) / net.increment).round() as usize,
            value: line.value,
            parts: page.line(&line.points, scaled(EQUIPOTENTIAL)),
        })
        .collect();
    for line in &net.flow_lines {
        let pen = if line.beside_part_channel { PART_CHANNEL } else { FLOW_LINE };
        for part in page.line(&line.points, scaled(pen)) {
            page.labels.avoid(&part, 1.0);
        }
    }
    let lettered = page.marks.len();
    draw_conditions(subject, sheet, &mut page);
    // The values lie below the outline, so that their white ground does not break it.
    let outline = page.marks.split_off(lettered);
    letter_values(&lines, net.increment, lowest, &mut page);
    page.marks.extend(outline);
    let em = page.em;
    let caption: Vec<CaptionLine> = title(subject, em)
        .into_iter()
        .chain(statements(subject, net, shape_factor).into_iter().map(|text| CaptionLine {
            text,
            size: em,
            sample: None,
        }))
        .chain(key(subject, net).into_iter().map(|(text, pen)| CaptionLine {
            text,
            size: em,
            sample: Some(scaled(pen)),
        }))
        .collect();
    page.finish(&subject.scale_unit(), &caption)
}

/// A number of drops with some sixty cells, of those near to it the one with the roundest drop; ten if there is no shape
/// factor to go by.
pub fn round_drops(shape_factor: Option<f64>, range: f64) -> usize {
    let ideal = shape_factor.map_or(10, suitable_drops);
    let cost = |d: usize| {
        let drop = range / d as f64;
        let digits = (1..=4).find(|&digits| {
            let unit = 10_f64.powf(digits as f64 - 1.0 - drop.log10().floor());
            (drop * unit - (drop * unit).round()).abs() < 1e-9 * drop * unit
        });
        (d as f64 / ideal as f64).ln().abs() + 0.12 * digits.unwrap_or(5) as f64
    };
    (4..=100).min_by(|&a, &b| cost(a).total_cmp(&cost(b))).unwrap_or(ideal)
}

fn statements(subject: &Subject<'_>, net: &FlowNet, shape_factor: Option<Bounded>) -> Vec<String> {
    if net.increment <= 0.0 {
        return vec!["All held sides have one level: nothing flows.".to_owned()];
    }
    let drop = with_unit(&tidy(net.increment, 4), subject.words.difference_unit);
    let mut out = Vec::new();
    if net.n_channels.is_finite() {
        let square = if subject.fabric.is_none_or(|f| f.stretched) { " (cells near square)" } else { "" };
        out.push(format!(
            "Flow net: {} equal drops of {drop}, {} channels of the same flux as one drop{square}",
            net.n_drops,
            tidy(net.n_channels, 4),
        ));
    } else {
        out.push(format!(
            "Flow net: {} equal drops of {drop}; sides of different level meet, so flux and channels have no end",
            net.n_drops
        ));
    }
    match shape_factor {
        Some(s) if s.value.is_finite() => out.push(format!(
            "Shape factor S = n_f/n_d = {}/{} = {} ± {}",
            tidy(net.n_channels, 6),
            net.n_drops,
            with_bound(s),
            power_of_ten(s.error, 1),
        )),
        Some(_) => out.push("Shape factor: infinite".to_owned()),
        None => {}
    }
    out.extend(subject.fabric.map(|f| f.net_words()));
    out
}

/// As many digits as the bound vouches for, ten at most.
fn with_bound(s: Bounded) -> String {
    let digits = if s.error > 0.0 && s.value > 0.0 { (s.value / s.error).log10().floor() } else { 10.0 };
    tidy(s.value, (digits.max(1.0) as usize).min(10))
}

fn key(subject: &Subject<'_>, net: &FlowNet) -> Vec<(String, Pen)> {
    let words = &subject.words;
    let mut out = Vec::new();
    let part = net.flow_lines.iter().filter(|l| l.beside_part_channel).count();
    if net.flow_lines.len() > part {
        out.push((words.flow_line.to_owned(), FLOW_LINE));
    }
    if part > 0 {
        let fraction = net.n_channels - net.n_channels.floor();
        let text = if part == 1 && net.n_channels.is_finite() {
            format!("{} beside the last channel, {} of a whole one", words.flow_line, tidy(fraction, 2))
        } else {
            format!("{} beside a part channel", words.flow_line)
        };
        out.push((text, PART_CHANNEL));
    } else if net.increment > 0.0 && net.n_channels < 1.0 {
        out.push((format!("the whole flow is {} of a channel", tidy(net.n_channels, 2)), FLOW_LINE));
        out.retain(|(_, pen)| pen.dash.is_some());
    }
    if !net.equipotentials.is_empty() {
        let unit =
            if words.level_unit.is_empty() { String::new() } else { format!(" in {}", words.level_unit) };
        let level = if words.equipotential.ends_with(words.level) { "" } else { words.level };
        let comma = if level.is_empty() && unit.is_empty() { "" } else { ", " };
        out.push((format!("{}{comma}{level}{unit}", words.equipotential), EQUIPOTENTIAL));
    }
    out
}

/// Values on the equipotentials: on as many as there is room for, at a regular step.
fn letter_values(lines: &[Drawn], increment: f64, lowest: f64, page: &mut Page) {
    let size = VALUE_SIZE * page.em;
    let decimals = decimals_of_step(lowest, increment);
    for line in lines {
        for part in &line.parts {
            page.labels.avoid(part, 1.0);
        }
    }
    for stride in STRIDES {
        let chosen: Vec<&Drawn> = lines.iter().filter(|l| l.number % stride == 0).collect();
        let mut taken = Vec::new();
        let mut missed = 0;
        for line in &chosen {
            let text = fixed(line.value, decimals);
            match place_value(line, &text, size, &taken, page) {
                Some(place) => taken.push((place, text)),
                None => missed += 1,
            }
        }
        // A few lines too short for their value do not spoil the step.
        if missed * 5 <= chosen.len() || Some(&stride) == STRIDES.last() {
            for (place, text) in taken {
                page.framed_text(&text, place, size);
                page.labels.take(place);
            }
            return;
        }
    }
}

fn place_value(line: &Drawn, text: &str, size: f64, taken: &[(Box2, String)], page: &Page) -> Option<Box2> {
    let (width, height) = (text_width(text, size) + 0.4 * size, 1.15 * size);
    let length = |part: &Vec<PagePoint>| part.windows(2).map(|w| distance(w[0], w[1])).sum::<f64>();
    let part = line.parts.iter().max_by(|a, b| length(a).total_cmp(&length(b)))?;
    let total = length(part);
    if total < 1.5 * width {
        return None;
    }
    let free = |place: &Box2| taken.iter().all(|(other, _)| !other.grown(0.15 * size).meets(place));
    let places =
        STATIONS.iter().filter_map(|t| along(part, t * total)).map(|at| Box2::about(at, width, height));
    let places: Vec<Box2> = places.filter(free).collect();
    let (_, place) = page.labels.best(places, 0.12 * width)?;
    // More than its own line and one or two others below a value: the lines are too close for it.
    (page.labels.cost(&place) <= 2.6 * width).then_some(place)
}

/// The point at a distance along a line.
fn along(line: &[PagePoint], mut s: f64) -> Option<PagePoint> {
    for w in line.windows(2) {
        let length = distance(w[0], w[1]);
        if s <= length && length > 0.0 {
            let t = s / length;
            return Some([w[0][0] + t * (w[1][0] - w[0][0]), w[0][1] + t * (w[1][1] - w[0][1])]);
        }
        s -= length;
    }
    line.last().copied()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn drops_are_round_numbers_of_the_level() {
        // 25 K: ten drops of 2.5 K rather than twelve of 2.08 K.
        assert_eq!(round_drops(Some(0.39), 25.0), 10);
        for (s, range) in [(Some(0.05), 1.0), (Some(3.0), 2.4), (None, 0.0), (Some(f64::NAN), f64::NAN)] {
            assert!((4..=100).contains(&round_drops(s, range)), "{s:?} {range}");
        }
    }
}
