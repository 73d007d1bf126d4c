//! Lines that fit a narrow screen.
//!
//! Width is counted in characters: every sign the tool prints is one column wide.

/// Breaks text at spaces into lines of at most `width` characters; a longer word is cut.
#[must_use]
pub fn wrap(text: &str, width: usize) -> Vec<String> {
    let width = width.max(1);
    // What fits stays as it is, so that columns of keys keep their places.
    if text.trim_end().chars().count() <= width {
        return vec![text.trim_end().into()];
    }
    let mut lines = Vec::new();
    let mut line = String::new();
    for word in text.split_whitespace() {
        let mut word: Vec<char> = word.chars().collect();
        let used = line.chars().count();
        let gap = usize::from(used > 0);
        if used + gap + word.len() <= width {
            if gap == 1 {
                line.push(' ');
            }
            line.extend(word);
            continue;
        }
        if used > 0 {
            lines.push(std::mem::take(&mut line));
        }
        while word.len() > width {
            lines.push(word.drain(..width).collect());
        }
        line = word.into_iter().collect();
    }
    if !line.is_empty() || lines.is_empty() {
        lines.push(line);
    }
    lines
}

/// Cuts to `width` characters; a cut is shown by a final `~`.
#[must_use]
pub fn cut(text: &str, width: usize) -> String {
    if text.chars().count() <= width {
        return text.into();
    }
    let mut short: String = text.chars().take(width.saturating_sub(1)).collect();
    if width > 0 {
        short.push('~');
    }
    short
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(text: &str, width: usize, expected: &[&str]) {
        assert_eq!(wrap(text, width), expected);
    }

    #[test]
    fn lines_break_at_spaces_and_long_words_are_cut() {
        check("", 5, &[""]);
        check("one two three", 7, &["one two", "three"]);
        check("Ω Ω Ω", 3, &["Ω Ω", "Ω"]);
        check("a abcdefgh b", 3, &["a", "abc", "def", "gh", "b"]);
        check("any width", 0, &["a", "n", "y", "w", "i", "d", "t", "h"]);
    }

    #[test]
    fn a_cut_is_shown() {
        assert_eq!(cut("abcdef", 4), "abc~");
        assert_eq!(cut("abcd", 4), "abcd");
        assert_eq!(cut("abcd", 0), "");
    }
}
