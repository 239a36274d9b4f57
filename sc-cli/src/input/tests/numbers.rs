//! Expressions, units and names as they end up in the model.

use super::*;
use sc_core::outline::{Point, Vertex};

#[test]
fn units_are_brought_to_those_of_the_model() {
    let section = good(PLATE);
    assert_eq!(section.length, LengthUnit { name: "cm".to_owned(), metres: 0.01 });
    assert_eq!(section.outline[2].vertex, Vertex::At(Point::new(4.0, -2.0)));
    assert!(matches!(section.condition("right"), Condition::Held(d) if d.value == Datum::Constant(0.0)));
    assert_eq!(section.material.unwrap().value, Material::Conductivity(1.4));
    let ProbePlace::Point { at, .. } = &section.probes[0].place else { panic!() };
    assert_eq!(at.value, Point::new(2.0, -1.0));
    assert_eq!(section.names[1].unit.as_deref(), Some("cm"));
    // Mixed lengths: 4 cm is the 40 mm of a section in millimetres.
    let mm = good(&plate_with("length = \"cm\"", "length = \"mm\""));
    assert_eq!(mm.outline[2].vertex, Vertex::At(Point::new(40.0, -20.0)));
}

#[test]
fn coordinates_in_the_length_unit_keep_their_bits() {
    let text = square("length = \"ft\"", "{ held = 0 }").replace("at = [1, 1]", "at = [0.1, \"1.1 ft\"]");
    let Vertex::At(p) = good(&text).outline[3].vertex else { panic!() };
    assert_eq!((p.re.to_bits(), p.im.to_bits()), (0.1_f64.to_bits(), 1.1_f64.to_bits()));
}

#[test]
fn a_heading_made_with_radians_has_to_say_so() {
    let heading = |lets: &str, away: &str| {
        let (reading, faults) = reader::read(
            &square(&format!("{lets}\nwithin = [ {{ away = \"{away}\" }} ]"), "{ held = 0 }"),
            &[],
        );
        match reading.unwrap().section.value.within.first() {
            Some(OutlineVertex { vertex: Vertex::Away { leaving, .. }, .. }) => Ok(*leaving),
            _ => Err(faults[0].kind.to_string()),
        }
    };
    assert_eq!(heading("", "90/2"), Ok(45.0));
    assert_eq!(heading("let.a = \"30 deg\"", "2*a"), Ok(60.0));
    assert_eq!(heading("", "atan2(1, 1)*180/pi deg"), Ok(45.0));
    assert!((heading("", "atan2(1, 1) rad").unwrap() - 45.0).abs() < 1e-13);
    let refused =
        "a heading without a unit is in degrees, and this one is made with `pi` or an inverse function";
    for (lets, away) in [("", "atan2(1, 1)"), ("", "pi/4"), ("let.q = \"-max(pi, 1)/2\"", "q + 1")] {
        assert_eq!(heading(lets, away).unwrap_err(), refused, "{away}");
    }
    assert_eq!(heading("", "sin(pi/2)"), Ok(1.0));
}

/// What an expression is worth as a coordinate of a section in `length`, or its fault.
fn coordinate(trade: &str, length: &str, lets: &str, expression: &str) -> Result<f64, String> {
    let text = square(&format!("trade = \"{trade}\"\nlength = \"{length}\"\n{lets}"), "{ held = 0 }")
        .replace("at = [1, 1]", &format!("at = [\"{expression}\", 1]"));
    match read_section(&text) {
        Ok(section) => match section.value.outline[3].vertex {
            Vertex::At(p) => Ok(p.re),
            Vertex::Away { .. } => Err("away".to_owned()),
        },
        Err(faults) => Err(faults[0].kind.to_string()),
    }
}

#[test]
fn units_combine_in_expressions_by_the_stated_rules() {
    let lets = "let.t = \"2 m\"\nlet.c = \"50 cm\"\nlet.a = \"30 deg\"\nlet.k = \"3 m/s\"\nlet.d = \"4 s\"\nlet.T = \"20 degC\"";
    let rows = [
        ("2*t + 1", 5.0),
        ("t + c", 2.5),
        ("c + t", 2.5),
        ("t/c", 4.0),
        ("k*d", 12.0),
        ("sqrt(t*c)", 1.0),
        ("t^2/c", 8.0),
        ("(t*c)^0.5", 1.0),
        ("t*2*sin(a)", 2.0),
        ("max(t, c) - min(t, c)", 1.5),
        ("abs(-t)", 2.0),
        ("t*atan2(c, c)*4/pi", 2.0),
        ("4*atan(1)", std::f64::consts::PI),
        ("k/k + (T - T)/(T - T + 1)", 1.0),
    ];
    for (expression, expected) in rows {
        let got = coordinate("heat", "m", lets, expression).unwrap_or_else(|e| panic!("{expression}: {e}"));
        assert!((got - expected).abs() <= 8.0 * f64::EPSILON * expected, "{expression}: {got}");
    }
    let refused = [
        ("t*c", "a coordinate is in m (length), and `m cm` is area"),
        ("k + 1", "`+` joins m/s (speed (hydraulic conductivity)) and a plain number"),
        ("t + k", "`+` joins m (length) and m/s (speed (hydraulic conductivity))"),
        ("a + 1", "`+` joins deg (angle) and a plain number"),
        ("exp(t)", "the argument of exp is a plain number, and `m` is length"),
        ("2^t", "an exponent is a plain number, and `m` is length"),
        ("t^1.3", "m cannot be raised to 1.3"),
        ("sqrt(t)", "m cannot be raised to 1/2"),
        ("T", "a coordinate is in m (length), and `degC` is temperature level"),
        ("2*T", "`*` has no meaning for a temperature level in degC"),
        ("T + T", "`+` has no meaning for a temperature level in degC"),
        ("-T", "`-` has no meaning for a temperature level in degC"),
        ("5 - T", "`-` has no meaning for a temperature level in degC"),
        ("T + t", "`+` joins degC (temperature level) and m (length)"),
        ("abs(T)", "`abs` has no meaning for a temperature level in degC"),
        ("min(T, 3)", "`min` joins degC (temperature level) and a plain number"),
    ];
    for (expression, expected) in refused {
        assert_eq!(coordinate("heat", "m", lets, expression).unwrap_err(), expected, "{expression}");
    }
}

#[test]
fn a_plain_number_beside_a_length_is_in_the_length_unit_unless_that_is_in_doubt() {
    assert_eq!(coordinate("plain", "cm", "let.t = \"2 m\"", "t + 1"), Ok(201.0));
    assert_eq!(coordinate("seepage", "m", "let.t = \"2 m\"", "t + 1"), Ok(3.0));
    // With heads in m and coordinates in ft, a plain 1 could be either.
    let doubt = coordinate("seepage", "ft", "let.t = \"2 m\"", "t + 1").unwrap_err();
    assert_eq!(doubt, "`+` joins m (length) and a plain number");
}

#[test]
fn temperature_levels_and_differences_are_kept_apart() {
    let left = |lets: &str, held: &str| {
        let text = square(&format!("trade = \"heat\"\n{lets}"), &format!("{{ held = \"{held}\" }}"));
        match read_section(&text).map(|s| s.value) {
            Ok(s) => match s.condition("left") {
                Condition::Held(Placed { value: Datum::Constant(v), .. }) => Ok(*v),
                other => Err(format!("{other:?}")),
            },
            Err(faults) => Err(faults[0].kind.to_string()),
        }
    };
    let lets = "let.T = \"20 degC\"\nlet.F = \"50 degF\"\nlet.d = \"5 K\"";
    assert_eq!(left(lets, "T + d"), Ok(25.0));
    assert_eq!(left(lets, "d + T"), Ok(25.0));
    assert_eq!(left(lets, "T - 5"), Ok(15.0));
    assert_eq!(left(lets, "F"), Ok(10.0));
    assert_eq!(left(lets, "F + d"), Ok(15.0));
    assert_eq!(left(lets, "T + (F - T)/2"), Ok(15.0));
    assert_eq!(left(lets, "max(F, T)"), Ok(20.0));
    assert_eq!(left(lets, "2*10"), Ok(20.0));
    assert!(left(lets, "F + 5").unwrap_err().contains("joins degF"));
    assert!(left(lets, "T - F").unwrap_err().contains("temperature difference"));
}

#[test]
fn names_may_stand_in_any_order_and_circles_are_reported_once_each() {
    assert_eq!(coordinate("plain", "m", "let.a = \"b + c\"\nlet.b = \"2*c\"\nlet.c = 3", "a"), Ok(9.0));
    let text = square(
        "let.a = \"b\"\nlet.b = \"a\"\nlet.p = \"q\"\nlet.q = \"r\"\nlet.r = \"p + a\"\nlet.u = \"u\"",
        "{ held = \"a + u\" }",
    );
    assert_eq!(
        faults(&text),
        [
            "1:5 these names are defined by each other: a -> b -> a",
            "6:5 these names are defined by each other: u -> u",
        ]
    );
    // p, q, r are a circle of their own.
    let text = square("let.p = \"q\"\nlet.q = \"r\"\nlet.r = \"p\"", "{ held = 0 }");
    assert_eq!(faults(&text), ["1:5 these names are defined by each other: p -> q -> r -> p"]);
    // A long chain is not a deep recursion.
    let chain: String = (0..3000).map(|i| format!("let.n{i} = \"n{} + 1\"\n", i + 1)).collect();
    assert_eq!(coordinate("plain", "m", &format!("{chain}let.n3000 = 0"), "n0"), Ok(3000.0));
}
