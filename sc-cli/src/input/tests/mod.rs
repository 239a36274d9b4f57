//! The reader as a whole: good files, every fault with its place, and files that are no files.

mod any_text;
mod faults;
mod good;
mod numbers;

use super::*;

/// The example of the documentation, with the two vertices at infinity.
const WEIR: &str = r#"
title  = "Weir on sand with one cutoff wall"
trade  = "seepage"                # seepage | heat | conductor | plain (default)
length = "m"                      # unit of every coordinate; default "m"
# region = "outside"              # the plane outside the outline (default "inside")

let.t = 12                        # named numbers, used in any quoted expression below
let.cutoff = 4.5
let.b = "2 * cutoff + 3"

material.conductivity = "2e-5 m/s"   # hydraulic (seepage) or thermal "1.4 W/(m K)" (heat)

outline = [                       # in order, the section on the left; `side` names the side that LEAVES this vertex
  { away = 0,   side = "downstream bed" },      # a vertex at infinity where both adjoining sides run off toward 0 degrees
  { at = ["b", 0],          side = "floor" },
  { at = ["b/2", 0],        side = "wall, downstream face" },
  { at = ["b/2", "-cutoff"], side = "wall, upstream face" },   # a wall of no thickness: down one face, up the other
  { at = ["b/2", 0],        side = "floor" },                  # one name may cover several sides
  { at = [0, 0],            side = "upstream bed" },
  { away = 180, side = "rock" },
  { at = [0, "-t"],         side = "rock" },    # a flat vertex: it only says where the base of the layer lies
]

[sides]                            # a side not listed is insulated
"upstream bed"   = { held = "15 m" }
"downstream bed" = { held = 12 }

[[probe]]
name = "toe"
at = [13.0, -0.5]                  # a point; on a wall of no thickness add  side = "wall, upstream face"
[[probe]]
along = "floor"                    # count points on each side of that name, ends included
count = 20
"#;

/// A small file that is good, as a base for what goes wrong.
const PLATE: &str = r#"trade = "heat"
length = "cm"
let.w = "4 cm"
let.h = "w/2"
material.conductivity = "1.4 W/(m K)"
outline = [
  { at = [0, 0], side = "left" },
  { at = [0, "-h"] },
  { at = ["w", "-h"], side = "right" },
  { at = ["w", 0] },
]
[sides]
left = { held = "20 degC" }
right = { held = "32 degF" }
[[probe]]
name = "middle"
at = ["w/2", "-1 cm"]
"#;

/// Every fault as `line:column rule`.
fn faults(text: &str) -> Vec<String> {
    let faults = read_section(text).expect_err("the file has a fault");
    assert!(!faults.is_empty());
    let shown = render_faults("section.toml", text, &faults, false);
    assert!(faults.iter().all(|f| shown.contains(&f.kind.to_string())), "{shown}");
    faults
        .iter()
        .map(|f| match f.position {
            Some(p) => format!("{}:{} {}", p.line, p.column, f.kind),
            None => format!("- {}", f.kind),
        })
        .collect()
}

fn good(text: &str) -> SectionFile {
    match read_section(text) {
        Ok(section) => section.value,
        Err(faults) => panic!("{}", render_faults("section.toml", text, &faults, false)),
    }
}

/// The plate with one piece of its text replaced.
fn plate_with(from: &str, to: &str) -> String {
    assert_eq!(PLATE.matches(from).count(), 1, "{from}");
    PLATE.replace(from, to)
}

/// A square in the trade `plain` with whatever is asked for in front of it and for its left side.
fn square(head: &str, left: &str) -> String {
    format!(
        "{head}\noutline = [ {{ at = [0, 1], side = \"left\" }}, {{ at = [0, 0] }}, {{ at = [1, 0], side = \"right\" }}, \
         {{ at = [1, 1] }} ]\n[sides]\nright = {{ held = 1 }}\nleft = {left}\n"
    )
}
