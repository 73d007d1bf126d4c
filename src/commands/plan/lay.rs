//! Lays text out for screens of 40 columns and wider.
//!
//! Promises: words are broken only when they alone are wider than the line; columns are counted
//! in characters. A reader that closes the pipe early is no error.

use std::io::Write;

/// The narrowest screen that is laid out for.
const NARROWEST: usize = 40;
/// Where output goes to no terminal.
const ON_A_PIPE: usize = 80;

/// The width asked for, the terminal's, or 80 on a pipe; never under 40.
pub(super) fn width(asked: Option<usize>) -> usize {
    use std::io::IsTerminal;
    let found = asked.or_else(|| {
        std::io::stdout()
            .is_terminal()
            .then(|| crossterm::terminal::size().ok())
            .flatten()
            .map(|(columns, _)| usize::from(columns))
    });
    found.unwrap_or(ON_A_PIPE).max(NARROWEST)
}

/// Writes to standard output; a closed pipe ends the output, not the program.
pub(super) fn print(text: &str) {
    let mut out = std::io::stdout().lock();
    let _ = out.write_all(text.as_bytes()).and_then(|()| out.flush());
}

/// Wraps a paragraph, every line indented.
pub(super) fn wrapped(text: &str, indent: usize, width: usize) -> String {
    let room = width.saturating_sub(indent).max(8);
    let mut lines: Vec<String> = Vec::new();
    let mut line = String::new();
    for word in text.split_whitespace() {
        let mut word = word.to_string();
        loop {
            let used = line.chars().count();
            let gap = usize::from(used > 0);
            if used + gap + word.chars().count() <= room {
                if gap > 0 {
                    line.push(' ');
                }
                line.push_str(&word);
                break;
            }
            if used > 0 {
                lines.push(std::mem::take(&mut line));
                continue;
            }
            // Wider than the line by itself.
            let rest = word.chars().skip(room).collect();
            lines.push(word.chars().take(room).collect());
            word = rest;
        }
    }
    lines.push(line);
    lines.retain(|line| !line.is_empty());
    lines
        .iter()
        .map(|line| format!("{}{line}\n", " ".repeat(indent)))
        .collect()
}

/// A label at the left and a value at the right of one line, or the value on the next line when
/// they do not fit side by side.
pub(super) fn pair(label: &str, value: &str, indent: usize, width: usize) -> String {
    let pad = " ".repeat(indent);
    let taken = indent + label.chars().count() + value.chars().count();
    if taken + 2 <= width {
        format!("{pad}{label}{}{value}\n", " ".repeat(width - taken))
    } else {
        let mut out = wrapped(label, indent, width);
        out.push_str(&wrapped(value, indent + 2, width));
        out
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_line_is_wider_than_the_screen() {
        let text = "a sentence with a verylongwordthatisfarwiderthanthelineitmustfitinto and more";
        for width in [40, 41, 60] {
            for line in wrapped(text, 4, width).lines().chain(
                pair(
                    "label of some length",
                    "value of some more length",
                    6,
                    width,
                )
                .lines(),
            ) {
                assert!(line.chars().count() <= width, "{width}: {line:?}");
            }
        }
        assert_eq!(wrapped("one two", 2, 40), "  one two\n");
        assert_eq!(pair("a", "b", 2, 40).trim_end().chars().count(), 40);
    }
}
