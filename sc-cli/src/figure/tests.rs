use super::*;
use sc_core::answers::{FlowNetOptions, Solution, SolveOptions, suitable_drops};
use sc_core::outline::{Outline, Vertex};

struct Case {
    name: &'static str,
    title: &'static str,
    trade: Trade,
    points: Vec<(f64, f64)>,
    held: Vec<(usize, usize)>,
    levels: Vec<f64>,
    names: Vec<String>,
    drops: Option<usize>,
}

fn case(
    name: &'static str,
    trade: Trade,
    points: &[(f64, f64)],
    held: &[(usize, usize)],
    levels: &[f64],
    names: &[&str],
) -> Case {
    Case {
        name,
        title: name,
        trade,
        points: points.to_vec(),
        held: held.to_vec(),
        levels: levels.to_vec(),
        names: names.iter().map(|s| (*s).to_owned()).collect(),
        drops: None,
    }
}

fn comb() -> Vec<(f64, f64)> {
    let mut points = vec![(0.0, 0.0), (9.0, 0.0)];
    for i in (0..5).rev() {
        let x = f64::from(i) * 2.0;
        points.extend([(x + 1.0, 3.0), (x, 3.0)]);
        if i > 0 {
            points.extend([(x, 1.0), (x - 1.0, 1.0)]);
        }
    }
    points
}

fn star() -> Vec<(f64, f64)> {
    (0..10)
        .map(|i| (f64::from(i) * std::f64::consts::PI / 5.0, if i % 2 == 0 { 1.0 } else { 0.42 }))
        .map(|(t, r)| (r * t.cos(), r * t.sin()))
        .collect()
}

fn cases() -> Vec<Case> {
    let dam = [
        (0.0, -6.0),
        (24.0, -6.0),
        (24.0, 0.0),
        (15.0, 0.0),
        (15.0, -0.8),
        (9.5, -0.8),
        (9.5, -4.0),
        (9.5, -0.8),
        (9.0, -0.8),
        (9.0, 0.0),
        (0.0, 0.0),
    ];
    let mut all = vec![
        case(
            "unit square",
            Trade::Plain,
            &[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)],
            &[(1, 0), (3, 1)],
            &[0.0, 1.0],
            &["cold", "warm"],
        ),
        case(
            "L of three squares",
            Trade::Heat,
            &[(0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0), (1.0, 2.0), (0.0, 2.0)],
            &[(1, 1), (4, 0)],
            &[-5.0, 20.0],
            &["outer face", "inner face"],
        ),
        case(
            "T with three electrodes",
            Trade::Conductor,
            &[(1.0, 0.0), (2.0, 0.0), (2.0, 2.0), (3.0, 2.0), (3.0, 3.0), (0.0, 3.0), (0.0, 2.0), (1.0, 2.0)],
            &[(0, 0), (3, 1), (5, 2)],
            &[0.0, 5.0, 2.0],
            &["foot", "right arm", "left arm"],
        ),
        case(
            "Dam with a cutoff wall in a bounded layer",
            Trade::Seepage,
            &dam,
            &[(2, 0), (9, 1)],
            &[12.0, 15.0],
            &["downstream bed", "upstream bed"],
        ),
        case(
            "channel 20 to 1",
            Trade::Plain,
            &[(0.0, 0.0), (20.0, 0.0), (20.0, 1.0), (0.0, 1.0)],
            &[(1, 0), (3, 1)],
            &[0.0, 1.0],
            &["out", "in"],
        ),
        case(
            "comb",
            Trade::Conductor,
            &comb(),
            &[(2, 0), (18, 1)],
            &[0.0, 10.0],
            &["right tooth", "left tooth"],
        ),
        case(
            "star",
            Trade::Heat,
            &star(),
            &[(0, 0), (9, 0), (4, 1), (5, 1)],
            &[0.0, 100.0],
            &["east", "west"],
        ),
        case(
            "box with touching levels",
            Trade::Conductor,
            &[(0.0, 0.0), (1.6, 0.0), (1.6, 1.0), (0.0, 1.0)],
            &[(0, 0), (1, 0), (3, 0), (2, 1)],
            &[0.0, 1.0],
            &["trough", "lid"],
        ),
    ];
    all[4].drops = Some(40);
    all
}

fn drawn(case: &Case) -> (Drawing, Drawing) {
    let vertices: Vec<Vertex> = case.points.iter().map(|&(x, y)| Vertex::at(x, y)).collect();
    let outline = Outline::new(&vertices).unwrap().value;
    let mut electrodes = vec![None; vertices.len()];
    case.held.iter().for_each(|&(side, e)| electrodes[side] = Some(e));
    let (section, _) = Section::new(outline, &electrodes, &case.levels).unwrap();
    let solution = Solution::solve(section, &SolveOptions::default()).unwrap();
    let s = solution.shape_factor();
    let drops = case.drops.unwrap_or_else(|| s.map_or(10, |s| suitable_drops(s.value)));
    let net = solution.flow_net(&FlowNetOptions { drops, ..FlowNetOptions::default() });
    let middle = solution.section().outline().point(0).unwrap_or_default();
    let subject = Subject {
        section: solution.section(),
        outline: solution.section().outline(),
        fabric: None,
        title: Some(case.title),
        length_unit: if case.trade == Trade::Plain { "" } else { "m" },
        words: Words::of(case.trade),
        electrodes: &case.names,
        probes: vec![(
            Some("A"),
            middle * 0.97 + solution.section().outline().point(3).unwrap_or_default() * 0.03,
        )],
    };
    let sheet = Sheet { vertex_numbers: true, ..Sheet::default() };
    (section_figure(&subject, &sheet), net_figure(&subject, &net, s, &Sheet::default()))
}

#[test]
fn figures_are_well_formed() {
    let cases = cases();
    for case in &cases {
        let (section, net) = drawn(case);
        for (drawing, kind) in [(section, "section"), (net, "net")] {
            let svg = drawing.to_svg().unwrap();
            assert!(!svg.contains("NaN") && !svg.contains("\"inf"), "{}", case.name);
            assert!(svg.starts_with("<svg ") && svg.trim_end().ends_with("</svg>"));
            assert!(svg.contains("<text") && svg.contains("sans-serif"));
            for mark in &drawing.marks {
                let points: Vec<PagePoint> = match mark {
                    Mark::Line(points, _) | Mark::Area(points, _) => points.clone(),
                    Mark::Text(text) => vec![text.at],
                };
                let slack = 6.0;
                for p in points {
                    assert!(
                        p[0] >= -slack && p[0] <= f64::from(drawing.width) + slack,
                        "{} {p:?}",
                        case.name
                    );
                    assert!(
                        p[1] >= -slack && p[1] <= f64::from(drawing.height) + slack,
                        "{} {p:?}",
                        case.name
                    );
                }
            }
            let png = drawing.to_png().unwrap();
            if let Ok(folder) = std::env::var("FIGURES_TO_LOOK_AT") {
                let path = |kind2: &str| format!("{folder}/{}-{kind}.{kind2}", case.name.replace(' ', "-"));
                std::fs::write(path("png"), &png).unwrap();
                std::fs::write(path("svg"), &svg).unwrap();
            }
            assert_eq!(&png[1..4], b"PNG");
        }
    }
    assert_eq!(cases.len(), 8);
}

#[test]
fn a_section_that_opens_to_infinity_is_shown_some_way_into_it() {
    let vertices =
        [Vertex::Away { arriving: 180.0, leaving: 0.0 }, Vertex::at(4.0, 0.0), Vertex::at(0.0, 0.0)];
    let outline = Outline::new(&vertices).unwrap().value;
    let (section, _) = Section::new(outline, &[Some(0), None, Some(1)], &[1.0, 3.0]).unwrap();
    let names = ["right".to_owned(), "left".to_owned()];
    let subject = Subject {
        section: &section,
        outline: section.outline(),
        fabric: None,
        title: None,
        length_unit: "m",
        words: Words::of(Trade::Seepage),
        electrodes: &names,
        probes: Vec::new(),
    };
    let drawing = section_figure(&subject, &Sheet::default());
    assert!(drawing.height > 300, "{}", drawing.height);
    assert!(!drawing.to_svg().unwrap().contains("NaN"));
}
