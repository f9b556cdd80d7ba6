//! The nearest known name.

/// The name with the fewest edits, when that is few for its length; ties by order of the list.
pub(crate) fn nearest<'a>(word: &str, known: impl Iterator<Item = &'a str>) -> Option<&'a str> {
    let limit = match word.chars().count() {
        0..=2 => 1,
        3..=5 => 2,
        _ => 3,
    };
    let mut best: Option<(usize, &str)> = None;
    for name in known {
        if name == word {
            continue;
        }
        let edits = distance(word, name, limit);
        if edits <= limit
            && edits < name.chars().count()
            && best.is_none_or(|(least, _)| edits < least)
        {
            best = Some((edits, name));
        }
    }
    best.map(|(_, name)| name)
}

/// Edits with transpositions (Damerau 1964), letter case counted as nothing but a last resort.
fn distance(left: &str, right: &str, limit: usize) -> usize {
    if left.to_lowercase() == right.to_lowercase() {
        return 1;
    }
    let (a, b): (Vec<char>, Vec<char>) = (left.chars().collect(), right.chars().collect());
    if a.len().abs_diff(b.len()) > limit {
        return limit + 1;
    }
    let mut rows = vec![vec![0_usize; b.len() + 1]; a.len() + 1];
    for (i, row) in rows.iter_mut().enumerate() {
        row[0] = i;
    }
    rows[0] = (0..=b.len()).collect();
    for i in 1..=a.len() {
        for j in 1..=b.len() {
            let change = usize::from(a[i - 1] != b[j - 1]);
            let mut least = (rows[i - 1][j] + 1)
                .min(rows[i][j - 1] + 1)
                .min(rows[i - 1][j - 1] + change);
            if i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1] {
                least = least.min(rows[i - 2][j - 2] + 1);
            }
            rows[i][j] = least;
        }
    }
    rows[a.len()][b.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn slips_of_the_finger_are_found() {
        let known = ["derive", "claim", "drive", "free"];
        assert_eq!(nearest("derve", known.into_iter()), Some("derive"));
        assert_eq!(nearest("calim", known.into_iter()), Some("claim"));
        assert_eq!(nearest("resistor", known.into_iter()), None);
    }
}
