//! A screenful at a time, when there is a screen and somebody at the keys.

use std::io::{self, BufRead, IsTerminal, Write};

use super::{super::failure::Failure, print};

/// Prints; on a terminal, stops after each screenful until Enter (or `q`) is pressed.
pub(super) fn show(text: &str) -> Result<(), Failure> {
    let screen = io::stdout().is_terminal() && io::stdin().is_terminal();
    let rows = match crossterm::terminal::size() {
        Ok((_, rows)) if screen && rows > 3 => usize::from(rows),
        _ => return print(text),
    };
    let lines: Vec<&str> = text.lines().collect();
    if lines.len() < rows {
        return print(text);
    }
    let mut answers = io::stdin().lock();
    for (at, screenful) in lines.chunks(rows - 1).enumerate() {
        print(&(screenful.join("\n") + "\n"))?;
        if (at + 1) * (rows - 1) >= lines.len() {
            break;
        }
        print("-- Enter: more, q: end -- ")?;
        let _ = io::stdout().flush();
        let mut answer = String::new();
        let read = answers.read_line(&mut answer);
        if !matches!(read, Ok(n) if n > 0) || answer.trim().eq_ignore_ascii_case("q") {
            break;
        }
    }
    Ok(())
}
