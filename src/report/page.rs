//! Lines that fit a screen: wraps at words, continues under the text it belongs to.

/// Text being laid out for a width.
#[derive(Debug)]
pub struct Page {
    width: usize,
    out: String,
}

impl Page {
    /// An empty page; narrower than 20 columns is taken as 20.
    #[must_use]
    pub fn new(width: usize) -> Self {
        Self {
            width: width.max(20),
            out: String::new(),
        }
    }

    /// A line, `indent` columns in; what does not fit goes on two columns further in. Control
    /// characters out of a log or a plan are shown as `\u{..}`, so that no text of a file can move
    /// the cursor.
    pub fn line(&mut self, indent: usize, text: &str) {
        let mut column = 0;
        let mut empty = true;
        for word in text.split_whitespace() {
            let word = visible(word);
            let mut rest = word.as_str();
            loop {
                let inset = if empty { indent } else { indent + 2 };
                let length = rest.chars().count();
                if column == 0 {
                    self.out.extend(std::iter::repeat_n(' ', inset));
                    column = inset;
                    let room = self.width.saturating_sub(inset).max(1);
                    let cut = rest.char_indices().nth(room).map(|(at, _)| at);
                    match cut {
                        // A word longer than the line is broken: nothing is left out.
                        Some(at) => {
                            self.out.push_str(&rest[..at]);
                            self.out.push('\n');
                            rest = &rest[at..];
                            column = 0;
                            empty = false;
                            continue;
                        }
                        None => {
                            self.out.push_str(rest);
                            column += length;
                        }
                    }
                } else if column + 1 + length <= self.width {
                    self.out.push(' ');
                    self.out.push_str(rest);
                    column += 1 + length;
                } else {
                    self.out.push('\n');
                    column = 0;
                    empty = false;
                    continue;
                }
                empty = false;
                break;
            }
        }
        self.out.push('\n');
    }

    /// An empty line, unless the page begins or the line before is empty.
    pub fn gap(&mut self) {
        if !self.out.is_empty() && !self.out.ends_with("\n\n") {
            self.out.push('\n');
        }
    }

    /// A heading: a gap, then the line.
    pub fn heading(&mut self, text: &str) {
        self.gap();
        self.line(0, text);
    }

    /// What was laid out.
    #[must_use]
    pub fn finish(self) -> String {
        self.out
    }
}

/// Control characters made visible.
#[must_use]
pub fn visible(text: &str) -> String {
    if !text.chars().any(hidden) {
        return text.to_owned();
    }
    text.chars()
        .map(|c| {
            if hidden(c) {
                c.escape_unicode().to_string()
            } else {
                c.to_string()
            }
        })
        .collect()
}

/// Control characters, and those that turn the direction of writing or hide.
fn hidden(c: char) -> bool {
    c.is_control()
        || matches!(c, '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}' | '\u{2066}'..='\u{2069}' | '\u{feff}')
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(width: usize, indent: usize, text: &str, right: &str) {
        let mut page = Page::new(width);
        page.line(indent, text);
        assert_eq!(page.finish(), right);
    }

    #[test]
    fn lines_wrap_under_their_text() {
        check(20, 0, "twelve and eight more", "twelve and eight\n  more\n");
        check(20, 2, "short", "  short\n");
        check(20, 0, "", "\n");
    }

    #[test]
    fn a_word_longer_than_the_line_is_broken_and_nothing_is_lost() {
        check(
            20,
            0,
            "abcdefghijklmnopqrstuvwxyz",
            "abcdefghijklmnopqrst\n  uvwxyz\n",
        );
        check(
            20,
            0,
            "a abcdefghijklmnopqrstuvwxyz",
            "a\n  abcdefghijklmnopqr\n  stuvwxyz\n",
        );
    }

    #[test]
    fn what_would_move_the_cursor_is_shown() {
        check(40, 0, "DB1\u{1b}[2J", "DB1\\u{1b}[2J\n");
    }
}
