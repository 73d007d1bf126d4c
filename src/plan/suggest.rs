//! "Did you mean": the nearest word of a short list.
//!
//! Promises: nothing is suggested that is further off than a third of the word. It leaves out
//! correcting anything by itself.

/// The word of `among` nearest to `word`, when it is near enough to be a slip.
pub(super) fn nearest<'a>(word: &str, among: &[&'a str]) -> Option<&'a str> {
    let word = word.trim().to_lowercase();
    // The same letters with other hyphens and spaces are the same word: TNCS is TN-C-S, not TN-S.
    let letters = |text: &str| -> String {
        text.chars()
            .filter(|c| c.is_alphanumeric())
            .collect::<String>()
            .to_lowercase()
    };
    let plain = letters(&word);
    if let Some(same) = among
        .iter()
        .find(|c| !plain.is_empty() && letters(c) == plain)
    {
        return Some(same);
    }
    among
        .iter()
        .map(|candidate| (slips(&word, &candidate.to_lowercase()), *candidate))
        .filter(|(slips, candidate)| *slips <= (candidate.chars().count() / 3).max(1))
        .min_by_key(|(slips, _)| *slips)
        .map(|(_, candidate)| candidate)
}

/// "did you mean `x`? " or nothing, then what follows.
pub(super) fn with_suggestion(word: &str, among: &[&str], otherwise: &str) -> String {
    match nearest(word, among) {
        Some(near) => format!("did you mean `{near}`? {otherwise}"),
        None => otherwise.into(),
    }
}

/// Insertions, deletions, substitutions and swaps of neighbours that lead from one to the other
/// (optimal string alignment).
fn slips(a: &str, b: &str) -> usize {
    // A word far longer than any of ours is no slip; this bounds the work on hostile input.
    let a: Vec<char> = a.chars().take(64).collect();
    let b: Vec<char> = b.chars().take(64).collect();
    let mut rows = vec![vec![0; b.len() + 1]; a.len() + 1];
    for (i, row) in rows.iter_mut().enumerate() {
        row[0] = i;
    }
    for (j, cell) in rows[0].iter_mut().enumerate() {
        *cell = j;
    }
    for i in 1..=a.len() {
        for j in 1..=b.len() {
            let differs = usize::from(a[i - 1] != b[j - 1]);
            let mut best = (rows[i - 1][j] + 1)
                .min(rows[i][j - 1] + 1)
                .min(rows[i - 1][j - 1] + differs);
            if i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1] {
                best = best.min(rows[i - 2][j - 2] + 1);
            }
            rows[i][j] = best;
        }
    }
    rows[a.len()][b.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(word: &str, expected: Option<&str>) {
        let kinds = ["ring", "radial", "lighting", "distribution", "selv"];
        assert_eq!(nearest(word, &kinds), expected, "{word}");
    }

    #[test]
    fn a_slip_finds_its_word_and_another_word_does_not() {
        check("rign", Some("ring"));
        check("Ring", Some("ring"));
        check("lihgting", Some("lighting"));
        check("distribtion", Some("distribution"));
        assert_eq!(nearest("TNCS", &["TN-S", "TN-C-S"]), Some("TN-C-S"));
        check("cooker", None);
        check("", None);
    }
}
