//! The nearest name to a mistyped one.

/// The name that takes the fewest single-letter edits to reach; the first of several equally near ones.
pub fn nearest<'a>(word: &str, names: impl Iterator<Item = &'a str>) -> Option<&'a str> {
    names.min_by_key(|name| distance(word, name))
}

/// Insertions, deletions and replacements between two words, row by row.
fn distance(from: &str, to: &str) -> usize {
    let mut row: Vec<usize> = (0..=to.chars().count()).collect();
    for (line, a) in from.chars().enumerate() {
        let mut diagonal = line;
        let mut left = line + 1;
        if let Some(first) = row.first_mut() {
            *first = left;
        }
        for (cell, b) in row.iter_mut().skip(1).zip(to.chars()) {
            let replaced = diagonal + usize::from(a != b);
            diagonal = *cell;
            left = replaced.min(left + 1).min(*cell + 1);
            *cell = left;
        }
    }
    row.last().copied().unwrap_or_default()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn distances_are_counted_in_letters() {
        for (a, b, want) in [("", "", 0), ("", "abc", 3), ("abc", "", 3), ("kitten", "sitting", 3), ("μ", "ν", 1)] {
            assert_eq!(distance(a, b), want, "{a} {b}");
            assert_eq!(distance(b, a), want, "{b} {a}");
        }
    }

    #[test]
    fn the_nearest_name_is_found() {
        let names = ["dummy-levels", "index-thrice", "free-index-mismatch"];
        assert_eq!(nearest("index-trice", names.into_iter()), Some("index-thrice"));
        assert_eq!(nearest("anything", std::iter::empty()), None);
    }
}
