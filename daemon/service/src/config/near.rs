//! The known name nearest to a misspelt one.

/// The name among `known` that is fewest edits away, if that is at most a third of its length (at least 1).
///
/// An edit inserts, removes, changes a character or swaps two neighbours. Source: optimal string
/// alignment distance, R. A. Wagner and R. Lowrance, J. ACM 22(2), 1975 (from memory).
pub(crate) fn nearest<'a>(name: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let allowed = (name.chars().count() / 3).max(1);
    known
        .into_iter()
        .map(|candidate| (distance(name, candidate), candidate))
        .filter(|&(edits, _)| edits <= allowed)
        .min_by_key(|&(edits, _)| edits)
        .map(|(_, candidate)| candidate)
}

fn distance(a: &str, b: &str) -> usize {
    let (a, b): (Vec<char>, Vec<char>) = (a.chars().collect(), b.chars().collect());
    let mut before: Vec<usize> = Vec::new();
    let mut last: Vec<usize> = (0..=b.len()).collect();
    for i in 1..=a.len() {
        let mut row = vec![i; b.len() + 1];
        for j in 1..=b.len() {
            let changed = last[j - 1] + usize::from(a[i - 1] != b[j - 1]);
            row[j] = changed.min(last[j] + 1).min(row[j - 1] + 1);
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
    use super::{distance, nearest};

    #[test]
    fn edits_are_counted() {
        assert_eq!(distance("kitten", "sitting"), 3, "the textbook pair");
        assert_eq!(distance("alret", "alert"), 1, "a swap is one edit");
        assert_eq!(distance("", "abc"), 3);
    }

    #[test]
    fn only_a_near_name_is_suggested() {
        let known = ["alert", "danger", "deadband"];
        assert_eq!(nearest("alret", known), Some("alert"));
        assert_eq!(nearest("dead_band", known), Some("deadband"));
        assert_eq!(nearest("colour", known), None);
    }
}
