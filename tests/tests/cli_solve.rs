//! `solve`: the values, units and form of the JSON document, and the readable report.

mod cli;

use cli::{assert_rel, number, rectangle, run_on, solved};
use sc_cli::commands::answers::ANSWERS;
use serde_json::Value;
use std::collections::BTreeSet;

/// Relative error granted to answers with a closed form: measured worst 2e-14.
const RTOL: f64 = 1e-13;

#[test]
fn a_rectangle_has_its_parallel_field() {
    let document = solved(&rectangle("", "1", "0"));
    assert_rel("shape factor", number(&document, "/shape_factor/value"), 0.5, RTOL);
    assert!(number(&document, "/shape_factor/error") < 1e-12);
    assert_eq!(document["conductance"], Value::Null);
    assert_rel("potential", number(&document, "/probes/0/potential"), 0.75, RTOL);
    assert_rel("gradient", number(&document, "/probes/0/gradient/0"), -0.5, RTOL);
    assert!(number(&document, "/probes/0/gradient/1").abs() < RTOL);
    // ψ is zero at the start of the first held side of the outline, the lower right corner; W = 1 − z/2 + i c.
    assert_rel("stream", number(&document, "/probes/0/stream"), -0.125, RTOL);
    assert_eq!(document["probes"][0]["side"], Value::Null);
    assert_rel("in", number(&document, "/held/0/flux"), 0.5, RTOL);
    assert_rel("out", number(&document, "/held/1/flux"), -0.5, RTOL);
    assert_eq!(document["held"][0]["side"], "left");
    assert_eq!(
        document["sides"][0],
        serde_json::json!({"side": "lower", "flux": 0.0, "error": 0.0, "length": 2.0})
    );
}

#[test]
fn a_section_that_its_mirror_image_turns_into_its_conjugate_has_shape_factor_one() {
    // The L is symmetric about y = x, and the reflection exchanges held and insulated sides: S = 1/S.
    let document = solved(
        r#"
outline = [
  { at = [0, 0], side = "high" },
  { at = [2, 0] },
  { at = [2, 1] },
  { at = [1, 1], side = "low" },
  { at = [1, 2], side = "low" },
  { at = [0, 2] },
]
[sides]
high = { held = 7 }
low  = { held = 3 }
"#,
    );
    assert_rel("shape factor", number(&document, "/shape_factor/value"), 1.0, RTOL);
    assert_rel("flux", number(&document, "/held/0/flux"), 4.0, RTOL);
}

#[test]
fn a_film_with_one_bend_has_its_published_resistance() {
    // Hall 1967 (Thin Solid Films 1), arms of width 1 and outer length 2: 2.5585... squares, evaluated from the closed
    // form 2 K(r)/K(r') to 25 digits (reference-data/conductors.json, lbend-film-2).
    let text = r#"
trade = "conductor"
material.sheet_resistance = "1 ohm"
outline = [
  { at = [0, 0] }, { at = [2, 0], side = "right" }, { at = [2, 1] }, { at = [1, 1] },
  { at = [1, 2], side = "top" }, { at = [0, 2] },
]
[sides]
right = { held = "1 V" }
top   = { held = "0 V" }
"#;
    let document = solved(text);
    let squares = 2.558_523_142_342_012_932_370_313;
    assert_rel("squares", number(&document, "/resistance/value"), squares, RTOL);
    let bound = number(&document, "/resistance/error");
    assert!((number(&document, "/resistance/value") - squares).abs() <= bound && bound < 1e-12);
}

#[test]
fn conductance_and_flux_have_the_unit_of_the_trade() {
    let vacuum = 8.854_187_818_8e-12;
    let cases = [
        ("trade = \"seepage\"\nmaterial.conductivity = \"2e-5 m/s\"", 2e-5, "m/s", "m3/s per m"),
        ("trade = \"heat\"\nmaterial.conductivity = 1.4", 1.4, "W/(m K)", "W/m"),
        ("trade = \"conductor\"\nmaterial.permittivity = 4.2", 4.2 * vacuum, "F/m", "C/m"),
        ("trade = \"conductor\"\nmaterial.sheet_resistance = \"50 ohm\"", 0.02, "1/ohm", "A"),
        ("material.conductivity = 3", 3.0, "1", "1"),
    ];
    for (head, k, unit, flux_unit) in cases {
        let document = solved(&rectangle(head, "12", "10"));
        assert_rel(head, number(&document, "/conductance/value"), 0.5 * k, RTOL);
        assert_eq!(document["conductance"]["unit"], unit);
        assert_rel(head, number(&document, "/held/0/flux"), k, RTOL);
        assert_eq!(document["units"]["flux"], flux_unit);
        // The matrix is for a conductivity of 1.
        assert_rel(head, number(&document, "/matrix/values/0/0"), 0.5, RTOL);
    }
    let film = solved(&rectangle("trade = \"conductor\"\nmaterial.sheet_resistance = 50", "1", "0"));
    assert_rel("resistance", number(&film, "/resistance/value"), 100.0, RTOL);
}

#[test]
fn gradients_are_per_metre_in_the_trades_and_per_length_unit_in_plain() {
    let heat = solved(&rectangle("trade = \"heat\"\nlength = \"mm\"", "\"20 degC\"", "\"-5 degC\""));
    assert_rel("K/m", number(&heat, "/probes/0/gradient/0"), -12_500.0, RTOL);
    assert_eq!(heat["units"]["gradient"], "K/m");
    assert_eq!(heat["units"]["level"], "degC");
    let seepage = solved(&rectangle("trade = \"seepage\"\nlength = \"ft\"", "\"1 ft\"", "0"));
    assert_rel("m/m", number(&seepage, "/probes/0/gradient/0"), -0.5, RTOL);
    let plain = solved(&rectangle("length = \"mm\"", "1", "0"));
    assert_rel("1/mm", number(&plain, "/probes/0/gradient/0"), -0.5, RTOL);
    assert_eq!(plain["units"]["gradient"], "1/mm");
}

#[test]
fn the_corner_law_is_in_the_units_of_the_gradient() {
    let corner = |length: &str, scale: f64| {
        let at = |x: f64, y: f64| format!("at = [{}, {}]", x * scale, y * scale);
        let text = format!(
            "trade = \"heat\"\nlength = \"{length}\"
outline = [ {{ {}, side = \"cold\" }}, {{ {} }}, {{ {}, side = \"warm\" }}, {{ {}, side = \"warm\" }}, {{ {} }}, {{ {}, side = \"cold\" }} ]
[sides]\nwarm = {{ held = 20 }}\ncold = {{ held = 0 }}\n[[probe]]\nat = [{}, {}]",
            at(0.0, 0.0), at(3.0, 0.0), at(3.0, 1.0), at(1.0, 1.0), at(1.0, 3.0), at(0.0, 3.0),
            (1.0 - 1e-6) * scale, (1.0 - 1e-6) * scale,
        );
        solved(&text)
    };
    let (metres, millimetres) = (corner("m", 1.0), corner("mm", 1000.0));
    let c = number(&metres, "/corners/3/coefficient");
    assert_rel("mm", number(&millimetres, "/corners/3/coefficient"), c, 1e-12);
    assert_eq!(metres["corners"][3]["unit"], "K m^-0.667");
    assert_eq!(metres["corners"][3]["infinite"], true);
    // Close to the corner the law gives the gradient; the next term is smaller by r^(4/3).
    let gradient = ["/probes/0/gradient/0", "/probes/0/gradient/1"].map(|p| number(&millimetres, p));
    let r = 1e-6 * 2_f64.sqrt();
    assert_rel("law", gradient[0].hypot(gradient[1]), c * r.powf(-1.0 / 3.0), 1e-6);
}

#[test]
fn names_that_touch_at_one_value_are_one_group_of_the_matrix() {
    let text = r#"
outline = [
  { at = [0, 0], side = "a" },
  { at = [1, 0], side = "b" },
  { at = [1, 1], side = "free" },
  { at = [0, 1], side = "c" },
  { at = [0, 0.5], side = "free" },
]
[sides]
a = { held = 1 }
b = { held = 1 }
c = { held = 0 }
"#;
    let document = solved(text);
    assert_eq!(document["matrix"]["order"], serde_json::json!(["a + b", "c"]));
    assert_eq!(document["matrix"]["groups"], serde_json::json!([["a", "b"], ["c"]]));
    let flux = number(&document, "/held/0/flux") + number(&document, "/held/1/flux");
    assert_rel("flux of the group", flux, number(&document, "/matrix/values/0/0"), RTOL);
    assert_rel("shape factor", number(&document, "/shape_factor/value"), flux, RTOL);
}

#[test]
fn one_name_on_several_sides_is_one_electrode() {
    // Left and right of a square at 1 against the middle third of nothing: by symmetry both carry half.
    let text = r#"
outline = [
  { at = [0, 0], side = "ground" },
  { at = [1, 0] },
  { at = [1, 0.5], side = "plate" },
  { at = [1, 1] },
  { at = [0, 1], side = "plate" },
  { at = [0, 0.5] },
]
[sides]
plate  = { held = 1 }
ground = { held = 0 }
"#;
    let document = solved(text);
    assert_eq!(document["matrix"]["order"], serde_json::json!(["plate", "ground"]));
    assert_eq!(document["sides"][1]["length"], 1.0);
    assert_rel("flux", number(&document, "/sides/1/flux"), number(&document, "/shape_factor/value"), RTOL);
}

#[test]
fn infinite_values_are_words_with_a_warning_each() {
    let text = r#"
outline = [
  { at = [0, 0], side = "a" },
  { at = [1, 0], side = "b" },
  { at = [1, 1], side = "c" },
  { at = [0, 1] },
]
[sides]
a = { held = 2 }
b = { held = 1 }
c = { held = 0 }
[[probe]]
name = "edge"
at = [1, 0]
"#;
    let document = solved(text);
    assert_eq!(document["held"][0]["flux"], "infinite");
    assert_eq!(document["held"][1]["flux"], Value::Null);
    assert_eq!(document["held"][2]["flux"], "-infinite");
    assert_eq!(document["matrix"]["values"][0][1], "-infinite");
    assert_eq!(document["probes"][0]["gradient"], "infinite");
    assert_eq!(document["probes"][0]["stream"], "infinite");
    let warnings = document["warnings"].to_string();
    for word in ["\\\"a\\\"", "no value", "matrix", "gradient is infinite at \\\"edge\\\"", "stream function"]
    {
        assert!(warnings.contains(word), "{word} in {warnings}");
    }
    let two = solved(&text.replace("b = { held = 1 }", "b = { held = 2 }"));
    assert_eq!(two["shape_factor"]["value"], "infinite");
    assert!(two["warnings"].to_string().contains("shape factor is infinite"));
}

#[test]
fn a_reversed_outline_keeps_names_and_indices_with_a_warning() {
    let text = r#"
outline = [
  { at = [0, 0], side = "left" },
  { at = [0, 1] },
  { at = [3, 1], side = "right" },
  { at = [3, 0.5] },
  { at = [2.5, 0] },
]
[sides]
left  = { held = 1 }
right = { held = 0 }
[[probe]]
along = "right"
count = 3
"#;
    let document = solved(text);
    assert!(document["warnings"][0].as_str().unwrap().contains("walked the other way round"));
    let corner = &document["corners"][4];
    assert_eq!(corner["vertex"], 4);
    assert_eq!(corner["at"], serde_json::json!([2.5, 0.0]));
    // s runs in walking order, which is against the order of the file.
    assert_eq!(document["probes"][0]["at"], serde_json::json!([3.0, 0.5]));
    assert_eq!(document["probes"][2]["s"], 0.5);
    assert_eq!(document["probes"][0]["side"], "right");
}

#[test]
fn a_probe_names_the_face_of_a_wall() {
    let text = r#"
outline = [
  { at = [-2, -2] }, { at = [2, -2] },
  { at = [2, 0], side = "low" },
  { at = [0, 0], side = "right face" },
  { at = [0, -1], side = "left face" },
  { at = [0, 0], side = "high" },
  { at = [-2, 0] },
]
[sides]
high = { held = 1 }
low  = { held = 0 }
[[probe]]
at = [0, -0.5]
side = "left face"
[[probe]]
at = [0, -0.5]
side = "right face"
[[probe]]
at = [0, -1]
"#;
    let document = solved(text);
    let potential = [0, 1, 2].map(|k| number(&document, &format!("/probes/{k}/potential")));
    // Symmetry: the faces lie as far above the mean as below it, and the tip on it.
    assert_rel("faces", potential[0] + potential[1], 1.0, RTOL);
    assert!(potential[0] > 0.6);
    assert_rel("tip", potential[2], 0.5, RTOL);
    assert_eq!(document["probes"][2]["gradient"], "infinite");
}

/// A sheet pile to a depth in a layer of depth 1 without ends.
fn sheet_pile(depth: f64) -> String {
    format!(
        r#"
trade = "seepage"
outline = [
  {{ away = 0, side = "downstream" }},
  {{ at = [0, 0], side = "face" }},
  {{ at = [0, -{depth}] }},
  {{ at = [0, 0], side = "upstream" }},
  {{ away = 180, side = "rock" }},
  {{ at = [0, -1], side = "rock" }},
]
[sides]
upstream   = {{ held = 1 }}
downstream = {{ held = 0 }}
[[probe]]
along = "downstream"
from = -2
to = 0
count = 3
"#
    )
}

#[test]
fn a_sheet_pile_in_an_endless_layer_has_its_closed_form() {
    // q/(k h) = K(k')/(2 K(k)) with k = sin(π s/2T) (from memory): k = k' at half the depth.
    let document = solved(&sheet_pile(0.5));
    assert_rel("shape factor", number(&document, "/shape_factor/value"), 0.5, RTOL);
    assert_eq!(document["sides"][0]["length"], "infinite");
    assert!(document["warnings"].to_string().contains("goes to a vertex at infinity"));
    assert_eq!(document["map"]["vertices"], 6);
    // On a side from infinity s is measured from its finite end, and is negative.
    assert_eq!(document["probes"][0]["at"], serde_json::json!([2.0, 0.0]));
    assert_eq!(document["probes"][0]["s"], -2.0);
    assert_eq!(document["corners"].as_array().unwrap().len(), 4);
    let endless = sheet_pile(0.5).replace("from = -2\nto = 0\n", "");
    let run = run_on(&endless, &["solve", "-"]);
    assert_eq!(run.status, 1);
    assert!(run.messages.contains("goes to infinity, and does not say how far"), "{}", run.messages);
}

#[test]
fn set_gives_a_name_another_value() {
    let text = rectangle("let.w = 2", "1", "0").replace("[2, ", "[\"w\", ");
    let run = run_on(&text, &["solve", "-", "--json", "--set", "w=4"]);
    assert_rel("shape factor", number(&run.document(), "/shape_factor/value"), 0.25, RTOL);
}

#[test]
fn the_answer_is_the_same_for_any_number_of_threads() {
    let text = sc_cli::commands::starter::starter(sc_cli::arguments::StarterTrade::Seepage);
    let one = run_on(text, &["solve", "-", "--json", "--threads", "1"]);
    let three = run_on(text, &["solve", "-", "--json", "--threads", "3"]);
    assert_eq!(one.status, 0);
    assert_eq!(one.results, three.results);
}

/// Every path in a document, `[]` for the entries of a list.
fn paths(value: &Value, path: &str, out: &mut BTreeSet<String>) {
    match value {
        Value::Object(entries) => {
            for (key, value) in entries {
                paths(value, &if path.is_empty() { key.clone() } else { format!("{path}.{key}") }, out);
            }
        }
        Value::Array(entries) => entries.iter().for_each(|v| paths(v, &format!("{path}[]"), out)),
        _ => {
            out.insert(path.to_owned());
        }
    }
}

#[test]
fn every_key_of_the_document_is_in_the_list_of_answers_and_the_other_way_round() {
    let text = sc_cli::commands::starter::starter(sc_cli::arguments::StarterTrade::Conductor);
    let mut document = solved(text);
    document["warnings"] = serde_json::json!(["one"]);
    let mut found = BTreeSet::new();
    paths(&document, "", &mut found);
    let listed: BTreeSet<String> = ANSWERS.iter().map(|(key, ..)| (*key).to_owned()).collect();
    assert_eq!(found, listed);
}

#[test]
fn the_promised_keys_stand_in_the_promised_order() {
    let document = run_on(&rectangle("title = \"T\"", "1", "0"), &["solve", "-", "--json"]).results;
    let promised = [
        "title",
        "trade",
        "shape_factor",
        "conductance",
        "held",
        "matrix",
        "sides",
        "probes",
        "map",
        "error",
        "warnings",
        "cautions",
    ];
    let places: Vec<usize> = promised
        .iter()
        .map(|k| document.find(&format!("\n  \"{k}\":")).unwrap_or_else(|| panic!("{k}")))
        .collect();
    assert!(places.is_sorted(), "{places:?}");
}

#[test]
fn the_report_shows_value_bound_and_cautions_and_no_false_digits() {
    let run =
        run_on(&rectangle("trade = \"seepage\"\nmaterial.conductivity = 2e-5", "15", "12"), &["solve", "-"]);
    assert_eq!((run.status, run.messages.as_str()), (0, ""));
    for line in [
        "Shape factor  0.5000000000   (relative error at most 1e-12)",
        "Conductance   1.000000000e-5 m/s",
        "Piping and heave",
        "two independent solutions",
    ] {
        assert!(run.results.contains(line), "{line} in\n{}", run.results);
    }
    let unchecked = run_on(&rectangle("", "1", "0"), &["solve", "-", "--no-check"]);
    assert!(unchecked.results.contains("residuals of a single solution"));
}
