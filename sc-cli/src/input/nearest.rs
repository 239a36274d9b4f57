//! The nearest of a list of names to one that was mistyped.

/// The candidate with the least edit distance, if it is near enough to be what was meant.
///
/// Insertion, deletion, replacement and the exchange of two neighbours each cost one. About a third of the
/// letters may differ (at least one); ties go to the earlier candidate. Capitals are compared first without case.
pub fn nearest<'a>(name: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<String> {
    let allowed = ((name.chars().count() + 1) / 3).max(1);
    let lower = name.to_lowercase();
    let mut best: Option<(usize, &str)> = None;
    for candidate in candidates {
        // A difference of case alone is the nearest there can be.
        let distance = if candidate.to_lowercase() == lower { 0 } else { 1 + edit_distance(name, candidate) };
        if distance <= allowed + 1 && best.is_none_or(|(d, _)| distance < d) && candidate != name {
            best = Some((distance, candidate));
        }
    }
    // One letter replaced by another is no resemblance.
    best.filter(|(d, c)| *d == 0 || name.chars().count() > 1 || c.chars().count() > 1)
        .map(|(_, c)| c.to_owned())
}

/// Letters of a name that are compared; a longer one has no near neighbour worth the time.
const MAX_LETTERS: usize = 100;

fn edit_distance(a: &str, b: &str) -> usize {
    let a: Vec<char> = a.chars().take(MAX_LETTERS + 1).collect();
    let b: Vec<char> = b.chars().take(MAX_LETTERS + 1).collect();
    if a.len() > MAX_LETTERS || b.len() > MAX_LETTERS {
        return usize::MAX - 1;
    }
    // Optimal string alignment: three rows, the oldest one for the exchange of neighbours.
    let mut before = vec![0; b.len() + 1];
    let mut last: Vec<usize> = (0..=b.len()).collect();
    for i in 1..=a.len() {
        let mut row = vec![i; b.len() + 1];
        for j in 1..=b.len() {
            let replaced = last[j - 1] + usize::from(a[i - 1] != b[j - 1]);
            row[j] = replaced.min(last[j] + 1).min(row[j - 1] + 1);
            if i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1] {
                row[j] = row[j].min(before[j - 2] + 1);
            }
        }
        before = std::mem::replace(&mut last, row);
    }
    last[b.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn exchanged_letters_count_as_one_slip() {
        assert_eq!(edit_distance("tilte", "title"), 1);
        assert_eq!(edit_distance("", "abc"), 3);
        assert_eq!(edit_distance("kitten", "sitting"), 3);
    }

    #[test]
    fn the_nearest_key_is_found_and_strangers_are_not() {
        let keys = ["title", "trade", "length", "outline"];
        assert_eq!(nearest("tilte", keys).as_deref(), Some("title"));
        assert_eq!(nearest("Trade", keys).as_deref(), Some("trade"));
        assert_eq!(nearest("permittivity", keys), None);
        assert_eq!(nearest("q", ["m", "s"]), None);
        assert_eq!(nearest(&"z".repeat(5000), keys), None);
    }
}
