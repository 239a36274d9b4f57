//! Layered fabrics: everything in true coordinates, against closed forms and against what does not depend on the axes.

mod cli;

use cli::{assert_rel, number, rectangle, run_on, solved};
use serde_json::Value;
use std::f64::consts::FRAC_PI_6;
use std::path::Path;

/// Relative error granted to answers with a closed form: measured worst below.
const RTOL: f64 = 1e-12;

fn fabric(along: f64, across: f64, dip: f64) -> String {
    format!("material.conductivity = {{ along = {along:e}, across = {across:e}, dip = {dip} }}")
}

#[test]
fn a_block_conducts_as_its_principal_direction_does() {
    // Width 2, height 1, held left and right: the field is parallel to x, which is a principal direction.
    let mut seen = 0;
    for (along, across) in [(9.0, 4.0), (0.01, 25.0), (3e4, 1.0)] {
        for (dip, k) in [(0, along), (180, along), (90, across), (-90, across)] {
            let document = solved(&rectangle(&fabric(along, across, f64::from(dip)), "1", "0"));
            assert_rel("conductance", number(&document, "/conductance/value"), k / 2.0, RTOL);
            let s = k / 2.0 / (along * across).sqrt();
            assert_rel("shape factor", number(&document, "/shape_factor/value"), s, RTOL);
            assert_rel("flux", number(&document, "/held/0/flux"), k / 2.0, RTOL);
            assert_rel("potential", number(&document, "/probes/0/potential"), 0.75, RTOL);
            assert_rel("gradient", number(&document, "/probes/0/gradient/0"), -0.5, RTOL);
            assert!(number(&document, "/probes/0/gradient/1").abs() < 1e-10);
            assert_eq!(document["probes"][0]["at"], serde_json::json!([0.5, 0.25]));
            assert_rel("length", number(&document, "/sides/0/length"), 2.0, 0.0);
            seen += 1;
        }
    }
    assert_eq!(seen, 12);
}

#[test]
fn the_conductivity_of_the_stretched_section_is_the_geometric_mean() {
    // kx = 9, kz = 4 gives k' = 6 (1e-7 m/s): the worked value of a course on seepage, recalled.
    let head = format!("trade = \"seepage\"\n{}", fabric(9e-7, 4e-7, 0.0));
    let document = solved(&rectangle(&head, "1", "0"));
    let ratio = number(&document, "/conductance/value") / number(&document, "/shape_factor/value");
    assert_rel("conductivity", ratio, 6e-7, RTOL);
    assert_eq!(document["conductance"]["unit"], "m/s");
}

#[test]
fn the_parallel_field_in_a_parallelogram_across_dipping_layers_is_exact() {
    // φ = 1 − x/2 has the flux K (1/2, 0) everywhere; with the insulated sides along it and the held ones upright it
    // is the solution. K = R diag(4, 1) Rᵀ with R a turn by 30 degrees.
    let (sin, cos) = FRAC_PI_6.sin_cos();
    let (kxx, kxy) = (4.0 * cos * cos + sin * sin, 3.0 * cos * sin);
    let rise = 2.0 * kxy / kxx;
    let text = format!(
        "{}
outline = [
  {{ at = [0, 0], side = \"lower\" }},
  {{ at = [2, {rise}], side = \"right\" }},
  {{ at = [2, {}] }},
  {{ at = [0, 1], side = \"left\" }},
]
[sides]
left  = {{ held = 1 }}
right = {{ held = 0 }}
[[probe]]
at = [0.6, 0.8]
[[probe]]
along = \"lower\"
count = 5
[[probe]]
along = \"left\"
count = 3
",
        fabric(4.0, 1.0, 30.0),
        rise + 1.0
    );
    let document = solved(&text);
    assert_rel("conductance", number(&document, "/conductance/value"), kxx / 2.0, RTOL);
    assert_rel("shape factor", number(&document, "/shape_factor/value"), kxx / 4.0, RTOL);
    assert_rel("length", number(&document, "/sides/0/length"), 2_f64.hypot(rise), 1e-15);
    let probes = document["probes"].as_array().unwrap();
    assert_eq!(probes.len(), 9);
    for probe in probes {
        let x = probe["at"][0].as_f64().unwrap();
        let potential = probe["potential"].as_f64().unwrap();
        assert!((potential - (1.0 - x / 2.0)).abs() < 1e-12, "{probe}");
        let gradient = [0, 1].map(|i| probe["gradient"][i].as_f64().unwrap());
        let allowed = probe["errors"]["gradient"].as_f64().unwrap();
        let off = (gradient[0] + 0.5).hypot(gradient[1]);
        assert!(off <= 1e-11 && off <= 1.5 * allowed + 1e-15, "{probe}");
    }
    // s is a true length, and the points lie evenly on the true side.
    assert_rel("s", number(&document, "/probes/3/s"), 2_f64.hypot(rise) / 2.0, 1e-15);
    assert_eq!(document["probes"][5]["at"], serde_json::json!([2.0, rise]));
}

/// Vertices `(x, y)` or headings, turned about the origin.
fn turned(entries: &[([f64; 2], bool, &str)], degrees: f64) -> String {
    let (sin, cos) = degrees.to_radians().sin_cos();
    let lines: Vec<String> = entries
        .iter()
        .map(|&([a, b], finite, side)| {
            if finite {
                format!("  {{ at = [{:e}, {:e}], side = \"{side}\" }},", a * cos - b * sin, a * sin + b * cos)
            } else {
                format!("  {{ away = [{:e}, {:e}], side = \"{side}\" }},", a + degrees, b + degrees)
            }
        })
        .collect();
    format!("outline = [\n{}\n]\n[sides]\nhigh = {{ held = 1 }}\nlow = {{ held = 0 }}\n", lines.join("\n"))
}

const BENT: [([f64; 2], bool, &str); 7] = [
    ([0.0, 0.0], true, "floor"),
    ([3.0, 0.0], true, "low"),
    ([3.0, 1.0], true, "roof"),
    ([1.2, 1.5], true, "roof"),
    ([1.2, 0.7], true, "roof"),
    ([1.2, 1.5], true, "roof"),
    ([0.0, 2.0], true, "high"),
];

const LAYER: [([f64; 2], bool, &str); 6] = [
    ([0.0, 0.0], false, "low"),
    ([0.0, 0.0], true, "pile"),
    ([0.2, -0.6], true, "pile"),
    ([0.0, 0.0], true, "high"),
    ([180.0, 180.0], false, "rock"),
    ([0.0, -1.0], true, "rock"),
];

#[test]
fn turning_section_and_layers_together_changes_nothing() {
    let mut seen = 0;
    for section in [&BENT[..], &LAYER[..]] {
        for (along, across, dip) in [(9.0, 4.0, 30.0), (1.0, 20.0, -15.0), (1000.0, 1.0, 75.0)] {
            let answer = |turn: f64| {
                solved(&format!("{}\n{}", fabric(along, across, dip + turn), turned(section, turn)))
            };
            let straight = answer(0.0);
            let (value, error) =
                (number(&straight, "/shape_factor/value"), number(&straight, "/shape_factor/error"));
            for turn in [37.0, 90.0, 211.5] {
                let other = answer(turn);
                let apart = (number(&other, "/shape_factor/value") - value).abs();
                let allowed = error + number(&other, "/shape_factor/error");
                assert!(
                    apart <= allowed && allowed < 1e-10 * value,
                    "{dip} {turn}: {apart:e} of {allowed:e}"
                );
                seen += 1;
            }
        }
    }
    assert_eq!(seen, 18);
}

#[test]
fn the_boundary_of_a_half_plane_hides_its_layers() {
    // Every length along a straight boundary is stretched alike, so electrodes on it have the shape factor that they
    // have without layers, whatever the dip.
    let section = "outline = [ { away = [180, 0] }, { at = [2.5, 0], side = \"low\" }, { at = [1, 0] },
  { at = [0, 0], side = \"high\" }, { at = [-0.7, 0] } ]\n[sides]\nhigh = { held = 1 }\nlow = { held = 0 }\n";
    let plain = number(&solved(section), "/shape_factor/value");
    for (along, across, dip) in [(9.0, 1.0, 30.0), (1.0, 400.0, 71.0), (1e6, 1.0, 110.0)] {
        let layered = solved(&format!("{}\n{section}", fabric(along, across, dip)));
        assert_rel("shape factor", number(&layered, "/shape_factor/value"), plain, RTOL);
    }
}

/// Reference values of a sheet pile in an endless layer of depth 1: its depth, whether it is the discharge, the value.
fn pile_values() -> Vec<(f64, bool, f64)> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("../reference-data/seepage.json");
    let text = std::fs::read_to_string(path).expect("the reference values are there");
    let file: Value = serde_json::from_str(&text).expect("they are JSON");
    let number = |v: &Value| v.as_str().and_then(|t| t.parse::<f64>().ok()).expect("a number in quotes");
    let cases = file["cases"].as_array().expect("a list of cases");
    let piles = cases.iter().filter_map(|case| {
        let id = case["id"].as_str()?;
        let discharge = id.starts_with("pile-layer-q-");
        let asked = discharge || id.starts_with("pile-layer-exit-");
        asked.then(|| (-number(&case["vertices"][2][1]), discharge, number(&case["value"])))
    });
    piles.collect()
}

#[test]
fn a_sheet_pile_in_a_level_fabric_has_the_values_of_the_layer_without() {
    // In the trade's stretch x' = x √(kz/kx), y' = y the layer and the pile keep their depths, and the ends of the
    // layer stay where they are: q / (√(kx kz) h) and the vertical exit gradient are those of equal conductivities.
    // Against K(m')/(2 K(m)) and its exit gradient, from the reference values.
    let mut seen = 0;
    for (depth, discharge, want) in pile_values() {
        for (kx, kz) in [(9e-7, 4e-7), (1e-5, 1e-6), (1e-7, 5e-6)] {
            let text = format!(
                "trade = \"seepage\"\n{}
outline = [
  {{ away = 0, side = \"downstream\" }},
  {{ at = [0, 0], side = \"face\" }},
  {{ at = [0, -{depth}] }},
  {{ at = [0, 0], side = \"upstream\" }},
  {{ away = 180, side = \"rock\" }},
  {{ at = [0, -1], side = \"rock\" }},
]
[sides]
upstream   = {{ held = 1 }}
downstream = {{ held = 0 }}
[[probe]]
at = [0, 0]
side = \"downstream\"
",
                fabric(kx, kz, 0.0)
            );
            let document = solved(&text);
            if discharge {
                assert_rel("shape factor", number(&document, "/shape_factor/value"), want, 1e-10);
                let q = (kx * kz).sqrt() * want;
                assert_rel("discharge", number(&document, "/held/0/flux"), q, 1e-10);
            } else {
                let vertical = number(&document, "/probes/0/gradient/1").abs();
                assert_rel("exit gradient", vertical, want.abs(), 1e-10);
                assert!(number(&document, "/probes/0/gradient/0").abs() < 1e-10 * vertical);
            }
            seen += 1;
        }
    }
    assert!(seen >= 24, "{seen}");
}

#[test]
fn the_gradient_is_the_slope_of_the_potential_in_true_coordinates() {
    let h = 1e-4;
    let mut text = format!("{}\n{}", fabric(7.0, 0.5, 28.0), turned(&BENT, 0.0));
    let places = [(0.5, 0.6), (1.6, 0.4), (2.4, 0.9), (1.2, 0.5)];
    for (x, y) in places {
        for (dx, dy) in [(0.0, 0.0), (h, 0.0), (-h, 0.0), (0.0, h), (0.0, -h)] {
            text.push_str(&format!("[[probe]]\nat = [{:e}, {:e}]\n", x + dx, y + dy));
        }
    }
    let document = solved(&text);
    for (i, (x, y)) in places.iter().enumerate() {
        let at = |j: usize, what: &str| number(&document, &format!("/probes/{}/{what}", 5 * i + j));
        let slope = [
            (at(1, "potential") - at(2, "potential")) / (2.0 * h),
            (at(3, "potential") - at(4, "potential")) / (2.0 * h),
        ];
        for k in 0..2 {
            let gradient = at(0, &format!("gradient/{k}"));
            // Central differences: third derivatives of order ten times h²/6, and 1e-13/h of rounding.
            assert!((gradient - slope[k]).abs() < 1e-6, "({x}, {y}) {k}: {gradient} and {}", slope[k]);
        }
    }
}

#[test]
fn the_coefficient_of_a_corner_is_that_along_the_side_that_leaves_it() {
    let mut text = format!("{}\n{}", fabric(7.0, 0.5, 28.0), turned(&BENT, 0.0));
    // Vertex 4 is the tip of the wall; the side that leaves it runs up from (1.2, 0.7).
    text = text.replace("[1.2e0, 7e-1], side = \"roof\"", "[1.2e0, 7e-1], side = \"back\"");
    text.push_str("[[probe]]\nalong = \"back\"\nfrom = 1e-10\nto = 4e-10\ncount = 2\n");
    let document = solved(&text);
    let corner = &document["corners"][4];
    assert_eq!((corner["vertex"].as_u64(), corner["angle"].as_f64()), (Some(4), Some(360.0)));
    let (c, e) = (corner["coefficient"].as_f64().unwrap(), corner["exponent"].as_f64().unwrap());
    assert!((e + 0.5).abs() < 1e-12);
    for (i, r) in [(0, 1e-10), (1, 4e-10_f64)] {
        let component = |k: usize| number(&document, &format!("/probes/{i}/gradient/{k}"));
        let length = component(0).hypot(component(1));
        // The next term is smaller by the root of the distance.
        assert_rel("gradient beside the tip", length, c * r.powf(e), 1e-4);
    }
}

#[test]
fn equal_conductivities_give_the_very_bits_of_a_plain_one() {
    let section = turned(&BENT, 0.0) + "[[probe]]\nat = [0.5, 0.6]\n";
    let plain = run_on(&format!("material.conductivity = 3\n{section}"), &["solve", "-", "--json"]);
    let layered = run_on(&format!("{}\n{section}", fabric(3.0, 3.0, 33.0)), &["solve", "-", "--json"]);
    assert_eq!(plain.status, 0, "{}", plain.messages);
    // The root of the square may be off by one unit in the last place; that of 3 times itself is not.
    let (mut a, mut b) = (plain.document(), layered.document());
    for document in [&mut a, &mut b] {
        let map = document.as_object_mut().unwrap();
        map.remove("conductance");
        map.remove("held");
        map.remove("sides");
    }
    assert_eq!(a, b);
}

#[test]
fn a_fabric_beyond_the_limits_is_refused_at_its_place() {
    let run = run_on(&rectangle(&fabric(1e10, 1.0, 0.0), "1", "0"), &["solve", "-"]);
    assert_eq!(run.status, 1);
    assert!(run.messages.contains("differ 1e10 times, more than 1e6"), "{}", run.messages);
    assert!(run.messages.contains("1:25"), "{}", run.messages);
    let run = run_on(&rectangle(&fabric(2.0, 1.0, 1e9), "1", "0"), &["check", "-"]);
    assert_ne!(run.status, 0);
    assert!(run.messages.contains("dip"), "{}", run.messages);
}

#[test]
fn the_report_says_what_was_stretched() {
    let run = run_on(&rectangle(&fabric(9.0, 4.0, 30.0), "1", "0"), &["solve", "-"]);
    assert_eq!(run.status, 0, "{}", run.messages);
    for words in ["9 along and 4 across layers dipping 30 degrees", "stretched coordinates", "conductivity 6"]
    {
        let flat = run.results.split_whitespace().collect::<Vec<_>>().join(" ");
        assert!(flat.contains(words), "{words} in\n{}", run.results);
    }
}

#[test]
fn both_sections_are_drawn() {
    let draw = |text: &str, name: &str, options: &[&str]| {
        let out = std::env::temp_dir().join(format!("prevertex-layered-{}-{name}.svg", std::process::id()));
        let path = out.to_str().unwrap().to_owned();
        let run = run_on(text, &[&["draw", "-", "--replace", "--out", &path], options].concat());
        let svg = std::fs::read_to_string(&out).unwrap_or_default();
        let _ = std::fs::remove_file(&out);
        (run, svg)
    };
    let layered = rectangle(&fabric(9.0, 1.0, 0.0), "1", "0");
    for figure in ["net", "section"] {
        let (run, svg) = draw(&layered, "true", &["--figure", figure]);
        assert_eq!((run.status, run.messages.as_str()), (0, ""));
        assert!(svg.contains("9 times as conductive along as across") && !svg.contains("Stretched section"));
        let (run, svg) = draw(&layered, "stretched", &["--figure", figure, "--stretched"]);
        assert_eq!((run.status, run.messages.as_str()), (0, ""));
        assert!(svg.contains("Stretched section"), "{svg}");
        assert!(!svg.contains("NaN"));
    }
    let (run, _) = draw(&rectangle("", "1", "0"), "none", &["--stretched"]);
    assert_eq!(run.status, 2);
    assert!(run.messages.contains("no layered fabric"), "{}", run.messages);
}
