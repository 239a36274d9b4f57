//! Good files: what is in the model.

use super::*;
use sc_core::outline::{Point, Vertex};

#[test]
fn the_documented_example_is_read_whole() {
    let (reading, faults) = reader::read(WEIR, &[]);
    assert!(faults.is_empty());
    let section = reading.unwrap().section.value;
    assert_eq!(section.title.as_ref().unwrap().value, "Weir on sand with one cutoff wall");
    assert_eq!(section.trade, Trade::Seepage);
    assert_eq!(section.material.unwrap().value, Material::Conductivity(2e-5));
    let vertices: Vec<Vertex> = section.outline.iter().map(|v| v.vertex).collect();
    let at = |x, y| Vertex::At(Point::new(x, y));
    let away = |d| Vertex::Away { arriving: d, leaving: d };
    assert_eq!(
        vertices,
        [
            away(0.0),
            at(12.0, 0.0),
            at(6.0, 0.0),
            at(6.0, -4.5),
            at(6.0, 0.0),
            at(0.0, 0.0),
            away(180.0),
            at(0.0, -12.0)
        ]
    );
    assert!(
        matches!(section.condition("upstream bed"), Condition::Held(d) if d.value == Datum::Constant(15.0))
    );
    assert!(
        matches!(section.condition("downstream bed"), Condition::Held(d) if d.value == Datum::Constant(12.0))
    );
    assert_eq!(section.condition("floor"), &Condition::Insulated);
    assert!(
        matches!(&section.probes[1].place, ProbePlace::Along { side, count: 20, .. } if side.value == "floor")
    );
    let names =
        ["downstream bed", "floor", "wall, downstream face", "wall, upstream face", "upstream bed", "rock"];
    assert_eq!(section.side_names(), names);
    let span = section.side_span(1).unwrap();
    assert_eq!(&WEIR[span.start..span.end], "\"floor\"");
}

#[test]
fn the_weir_in_a_box_is_a_good_file() {
    let boxed = WEIR
        .replace("{ away = 0,   side", "{ at = [40, 0], side")
        .replace("{ away = 180, side", "{ at = [-30, 0], side")
        .replace("{ at = [0, \"-t\"], ", "{ at = [-30, \"-t\"], side = \"rock\" }, { at = [40, \"-t\"], ");
    let section = good(&boxed);
    assert_eq!(section.outline.len(), 9);
    assert!(section.within.is_empty());
    assert_eq!(section.region.value, Region::Inside);
}

#[test]
fn every_promised_condition_is_read_into_the_model() {
    let read = |head: &str, left: &str| {
        let (reading, faults) = reader::read(&square(head, left), &[]);
        assert!(faults.is_empty(), "{faults:?}");
        reading.unwrap().section.value
    };
    let heat = "trade = \"heat\"\nmaterial.conductivity = 2";
    let s = read(heat, "{ surface = { transfer = \"7.7 W/(m2 K)\", facing = \"20 degC\" } }");
    let Condition::Surface(surface) = s.condition("left") else { panic!() };
    assert_eq!((surface.film.value, surface.facing.value), (Film::Transfer(7.7), 20.0));
    let s = read(heat, "{ surface = { resistance = \"0.13 m2 K/W\", facing = 20 } }");
    let Condition::Surface(surface) = s.condition("left") else { panic!() };
    assert_eq!(surface.film.value, Film::Resistance(0.13));
    let s = read("", "{ held = \"3 + 0.1*x\" }");
    let Condition::Held(Placed { value: Datum::Varying(f), .. }) = s.condition("left") else { panic!() };
    assert_eq!(f.evaluate(Sample { x: 10.0, y: 0.0, s: 0.0 }), Ok(4.0));
    let s = read("", "{ inflow = { table = [[0, 1.0], [2.5, 0.4]] } }");
    let Condition::Inflow(Placed { value: Datum::Table(rows), .. }) = s.condition("left") else { panic!() };
    assert_eq!(rows, &[[0.0, 1.0], [2.5, 0.4]]);
    let s = read("", "{ insulated = true }");
    assert_eq!(s.condition("left"), &Condition::Insulated);
    let fabric = "material.conductivity = { along = \"9e-6 m/s\", across = \"1e-6 m/s\", dip = 15 }";
    let s = read(&format!("trade = \"seepage\"\n{fabric}"), "{ held = 0 }");
    let expected = LayeredFabric { along: 9e-6, across: 1e-6, dip: 15.0 };
    assert_eq!(s.material.unwrap().value, Material::Layered(expected));
    let s = read("trade = \"conductor\"\nmaterial.sheet_resistance = \"50 ohm\"", "{ inflow = \"2 mA/mm\" }");
    assert!(matches!(s.condition("left"), Condition::Inflow(d) if d.value == Datum::Constant(2.0)));
    let s = read("region = \"outside\"\nwithin = [ { away = [10, \"370 deg\"] } ]", "{ held = 0 }");
    assert_eq!(s.region.value, Region::Outside);
    assert_eq!(s.within[0].vertex, Vertex::Away { arriving: 10.0, leaving: 370.0 });
}

#[test]
fn a_name_that_is_never_used_is_a_warning() {
    let warnings = read_section(&plate_with("let.h", "let.spare = 3\nlet.h")).unwrap().warnings;
    assert_eq!(warnings.len(), 1);
    assert_eq!(warnings[0].to_string(), "line 4, column 5: `spare` is never used");
}

#[test]
fn a_name_can_be_given_another_value_in_its_own_unit() {
    let section = read_section_with(PLATE, &[("w".to_owned(), 6.0)]).unwrap().value;
    assert_eq!(section.outline[2].vertex, Vertex::At(Point::new(6.0, -3.0)));
    let fault = &read_section_with(PLATE, &[("ww".to_owned(), 6.0)]).unwrap_err()[0];
    assert_eq!(fault.to_string(), "unknown name `ww`; did you mean `w`?");
    assert!(read_section_with(PLATE, &[("w".to_owned(), f64::NAN)]).is_err());
}
