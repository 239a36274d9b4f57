//! Texts that are no section files at all, or were ones.

use super::*;
use proptest::prelude::*;

proptest! {
    #![proptest_config(ProptestConfig::with_cases(400))]

    #[test]
    fn no_text_makes_the_reader_panic(text in "\\PC{0,200}") {
        if let Err(faults) = read_section(&text) {
            prop_assert!(!render_faults("any.toml", &text, &faults, true).is_empty());
        }
    }

    #[test]
    fn a_mutated_file_is_read_or_refused_with_places_inside_it(
        which in 0..2_usize,
        edits in prop::collection::vec((any::<prop::sample::Index>(), 0..8_usize, "[\\[\\]{}\"'=.,\\\\#\n a-z0-9µ+*^/()-]{0,6}"), 1..6),
    ) {
        let mut text = [WEIR, PLATE][which].to_owned();
        for (index, removed, added) in edits {
            let chars: Vec<(usize, char)> = text.char_indices().collect();
            let start = index.index(chars.len());
            let end = (start + removed).min(chars.len());
            let byte = |i: usize| chars.get(i).map_or(text.len(), |c| c.0);
            text = format!("{}{}{}", &text[..byte(start)], added, &text[byte(end)..]);
        }
        if let Err(faults) = read_section(&text) {
            prop_assert!(!faults.is_empty());
            for fault in &faults {
                if let Some(span) = fault.span {
                    prop_assert!(span.start <= span.end && span.end <= text.len(), "{fault:?}");
                }
            }
            prop_assert!(!render_faults("mutated.toml", &text, &faults, false).is_empty());
        }
    }
}
