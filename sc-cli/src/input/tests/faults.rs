//! Every fault, with its line and column.

use super::*;

#[test]
fn what_is_not_supported_yet_is_refused_by_name() {
    let rows = [
        (
            square("region = \"outside\"", "{ held = 0 }"),
            "1:10 the plane outside the outline (`region = \"outside\"`)",
        ),
        (
            square("within = [{ at = [0, 0] }, { at = [1, 0] }]", "{ held = 0 }"),
            "1:11 an inner polygon (`within`)",
        ),
        (square("", "{ held = \"x\" }"), "5:17 a held value that varies"),
        (square("", "{ held = { table = [[0, 1], [1, 2]] } }"), "5:17 a held value from a table"),
        (square("", "{ inflow = 0.2 }"), "5:19 a prescribed `inflow`"),
        (square("", "{ surface = { transfer = 1, facing = 2 } }"), "5:8 a film (`surface`)"),
    ];
    for (text, expected) in rows {
        assert_eq!(faults(&text), [format!("{expected} is not supported yet")]);
    }
}

#[test]
fn each_fault_of_form_names_its_line_and_column() {
    let rows: &[(&str, &str, &[&str])] = &[
        ("trade = \"heat\"", "tread = \"heat\"", &["1:1 unknown key `tread` in the section file"]),
        (
            "trade = \"heat\"",
            "trade = \"haet\"",
            &["1:9 `trade` cannot be `haet`; it is one of seepage, heat, conductor, plain"],
        ),
        ("length = \"cm\"", "length = 3", &["2:10 `length` is a text in quotes, not a number"]),
        (
            "length = \"cm\"",
            "length = \"kPa\"",
            &["2:10 a coordinate is in m (length), and `kPa` is pressure"],
        ),
        (
            "let.h = \"w/2\"",
            "let.sin = 1\nlet.h = \"w/2\"",
            &["4:5 `sin` cannot be a name of your own: it is a function"],
        ),
        (
            "let.h = \"w/2\"",
            "let.\"a-b\" = 1\nlet.h = \"w/2\"",
            &["4:5 `a-b` cannot be used in an expression: a name is letters, digits and `_`, a letter first"],
        ),
        ("let.h = \"w/2\"", "let.h = \"k/2\"", &["4:10 unknown name `k`"]),
        (
            "let.h = \"w/2\"",
            "let.h = \"w/2 kPa\"",
            &["4:14 the expression is already in cm, and `kPa` is added to it"],
        ),
        (
            "let.h = \"w/2\"",
            "let.h = \"w + 2 s\"",
            &["4:16 the expression is already in cm, and `s` is added to it"],
        ),
        (
            "let.h = \"w/2\"",
            "let.h = \"sqrt(-1)\"",
            &["4:10 sqrt of -1 is not defined: it takes a number not below zero"],
        ),
        (
            "let.h = \"w/2\"",
            "let.h = \"2*h2\"\nlet.h2 = \"h\"",
            &["4:5 these names are defined by each other: h -> h2 -> h"],
        ),
        ("let.h = \"w/2\"", "let.h = \"x\"", &["4:10 `x` has no value in `h`: it varies along a side"]),
        ("\"1.4 W/(m K)\"", "\"1.4 W/m K\"", &["5:34 `W/m K` can be read in two ways"]),
        (
            "\"1.4 W/(m K)\"",
            "\"1.4 m/s\"",
            &[
                "5:25 the conductivity is in W/(m K) (heat conductivity), and `m/s` is speed (hydraulic conductivity)",
            ],
        ),
        ("\"1.4 W/(m K)\"", "-1.4", &["5:25 the conductivity is -1.4 W/(m K), and must be above zero"]),
        (
            "material.conductivity = \"1.4 W/(m K)\"",
            "material.permittivity = 4",
            &["5:10 `permittivity` does not belong to the trade `heat`"],
        ),
        ("{ at = [0, 0], side", "{ at = [0], side", &["7:10 a point is a pair [x, y], not a list of 1"]),
        (
            "{ at = [0, 0], side",
            "{ at = [0, inf], side",
            &["7:14 a coordinate is inf, and must be a finite number"],
        ),
        (
            "{ at = [0, 0], side",
            "{ at = [0, true], side",
            &["7:14 a coordinate is a number, or an expression in quotes, not true"],
        ),
        (
            "{ at = [0, 0], side",
            "{ at = [0, \"1 kPa\"], side",
            &["7:14 a coordinate is in cm (length), and `kPa` is pressure"],
        ),
        ("{ at = [0, 0], side", "{ side", &["7:3 `outline[0]` needs the key `at`"]),
        (
            "{ at = [0, 0], side",
            "{ at = [0, 0], away = 3, side",
            &["7:18 `outline[0]` has both `at` and `away`; they exclude each other"],
        ),
        (
            "{ at = [0, \"-h\"] }",
            "{ at = [0, \"-h\"], name = 3 }",
            &["8:21 unknown key `name` in `outline[1]`"],
        ),
        ("{ at = [0, \"-h\"] }", "{ at = [0, \"-\\u0068 + h3\"] }", &["8:25 unknown name `h3`"]),
        (
            "{ held = \"20 degC\" }",
            "{ held = \"20 K\" }",
            &["13:17 the level held on \"left\" is a temperature level, and `K` is a temperature difference"],
        ),
        (
            "{ held = \"20 degC\" }",
            "{ held = 20, insulated = true }",
            &["13:21 the condition on \"left\" has both `held` and `insulated`; they exclude each other"],
        ),
        (
            "{ held = \"20 degC\" }",
            "{ hold = 20 }",
            &["13:10 unknown key `hold` in the condition on \"left\""],
        ),
        ("{ held = \"20 degC\" }", "{ insulated = false }", &["13:22 `insulated` is true, not false"]),
        ("{ held = \"20 degC\" }", "{}", &["13:8 the condition on \"left\" needs the key `held`"]),
        (
            "{ held = \"20 degC\" }",
            "20",
            &[
                "13:8 the condition on \"left\" is a table with one of held, inflow, surface, insulated, not a number",
            ],
        ),
        ("right = { held", "rihgt = { held", &["14:1 no side of the outline is called \"rihgt\""]),
        ("[[probe]]", "title = \"late\"\n[[probe]]", &["15:1 unknown key `title` in `[sides]`"]),
        ("name = \"middle\"", "nmae = \"middle\"", &["16:1 unknown key `nmae` in `probe[0]`"]),
        (
            "at = [\"w/2\", \"-1 cm\"]",
            "along = \"left\"\ncount = 1",
            &["18:9 `count` is 1, and must be a whole number from 2 to 100000"],
        ),
        (
            "at = [\"w/2\", \"-1 cm\"]",
            "along = \"lfet\"",
            &["17:9 no side of the outline is called \"lfet\""],
        ),
        (
            "at = [\"w/2\", \"-1 cm\"]",
            "at = [0, 0]\ncount = 4",
            &["18:1 `probe[0]` has both `at` and `count`; they exclude each other"],
        ),
        ("at = [\"w/2\", \"-1 cm\"]", "", &["15:1 `probe[0]` needs the key `at`"]),
    ];
    let mut wrong = Vec::new();
    for (from, to, expected) in rows {
        let found = faults(&plate_with(from, to));
        if found != *expected {
            wrong.push(format!("{to}: {found:?}"));
        }
    }
    assert!(wrong.is_empty(), "{wrong:#?}");
}

#[test]
fn each_fault_of_the_conditions_names_its_line_and_column() {
    let table = |rows: &str| format!("{{ held = {{ table = {rows} }} }}");
    let rows = [
        (table("[[0, 1]]"), "5:27 the number of rows of `table` is 1, and must be at least two"),
        (table("[[0, 1], [0, 2]]"), "5:37 a distance of `table` is 0, and must be above the one before it"),
        (table("[[0, 1], [1]]"), "5:36 a row of `table` is a pair [s, value], not a list of 1"),
        ("{ held = { tabel = [] } }".to_owned(), "5:19 unknown key `tabel` in the level held on \"left\""),
        ("{ surface = { facing = 1 } }".to_owned(), "5:20 the surface of \"left\" needs the key `transfer`"),
        ("{ surface = { transfer = 1 } }".to_owned(), "5:20 the surface of \"left\" needs the key `facing`"),
        (
            "{ surface = { transfer = 1, resistance = 1, facing = 1 } }".to_owned(),
            "5:36 the surface of \"left\" has both `transfer` and `resistance`; they exclude each other",
        ),
        (
            "{ surface = { transfer = 0, facing = 1 } }".to_owned(),
            "5:33 the transfer of a surface is 0, and must be above zero",
        ),
        (
            "{ held = \"3 kPa\" }".to_owned(),
            "5:17 the level held on \"left\" is a plain number, and `kPa` is pressure",
        ),
    ];
    for (left, expected) in rows {
        assert_eq!(faults(&square("", &left)), [expected], "{left}");
    }
    let inflow = faults(&square("trade = \"heat\"", "{ inflow = 1 }"));
    assert_eq!(inflow[0], "5:8 an inflow needs material.conductivity");
}

#[test]
fn several_faults_are_reported_together_in_the_order_of_the_text() {
    let text = PLATE
        .replace("length", "lenght")
        .replace("\"1.4 W/(m K)\"", "\"1.4 W/(m C)\"")
        .replace("[0, \"-h\"]", "[\"q\", \"-h*\"]")
        .replace("left = {", "lefd = {")
        .replace("32 degF", "32 feet");
    assert_eq!(
        faults(&text),
        [
            "2:1 unknown key `lenght` in the section file",
            "5:25 the conductivity is in W/(m K) (heat conductivity), and `W/(m C)` is m s-4 kg A-1",
            "8:12 unknown name `q`",
            "8:20 expected a value, found the end",
            "13:1 no side of the outline is called \"lefd\"",
            "14:22 `feet` is not a known unit",
        ]
    );
}

#[test]
fn hints_say_what_to_write() {
    let hint =
        |from: &str, to: &str| read_section(&plate_with(from, to)).unwrap_err()[0].hint.clone().unwrap();
    assert_eq!(hint("right = { held", "rihgt = { held"), "did you mean \"right\"?");
    assert_eq!(hint("trade", "tread"), "did you mean `trade`?");
    assert_eq!(
        hint("let.h = \"w/2\"", "let.h = \"2 w\""),
        "`w` is a name under `let`; a product is written with `*`, a unit stands at the end"
    );
    assert_eq!(hint("32 degF", "32 degf"), "did you mean `degF`?");
    assert!(hint("32 degF", "32F").contains("a blank stands between"));
}

#[test]
fn a_section_in_which_nothing_fixes_the_level_is_refused() {
    let text = PLATE
        .replace("{ held = \"20 degC\" }", "{ inflow = 3 }")
        .replace("{ held = \"32 degF\" }", "{ insulated = true }");
    assert!(faults(&text)[0].starts_with("13:1 nothing fixes the level"));
    let none = "outline = [ { at = [0, 0] }, { at = [1, 0] }, { at = [0, 1] } ]";
    assert!(faults(none)[0].starts_with("- nothing fixes the level"));
    assert_eq!(faults(""), ["- the section file needs the key `outline`"]);
}

#[test]
fn an_unknown_trade_is_one_fault_and_not_one_per_unit() {
    assert_eq!(faults(&plate_with("trade = \"heat\"", "trade = \"warmth\"")).len(), 1);
}

#[test]
fn a_text_that_is_not_toml_is_reported_as_that() {
    let found = faults("title = \"a\ntrade = 3");
    assert!(found[0].starts_with("1:"), "{found:?}");
    assert!(found.iter().all(|f| f.contains("not TOML")), "{found:?}");
    assert!(faults("a = 1\na = 2\n")[0].starts_with("2:1 not TOML: duplicate key"));
}
