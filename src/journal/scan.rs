//! Cuts a file into blocks: the head of a journal or an entry, its sealed lines, its check.
//! A block ends with its check, or where the next header stands.
//!
//! Promises: any bytes at all give blocks, never a panic, and never more memory than a few entries
//! take. It leaves out what the blocks mean and whether their checks hold.

use std::io::{self, BufRead};

use super::text::{CHECK, ENTRY, JOURNAL, LONGEST};

/// What a block begins with.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Kind {
    /// Lines under no header: before the first one, or after a check. With a check they are a
    /// head or an entry whose header line was damaged, without one they belong to nothing.
    Unheaded,
    Journal,
    Entry,
}

/// From one header line to the next.
#[derive(Debug)]
pub(super) struct Block {
    pub kind: Kind,
    /// Line of its header, from 1.
    pub line: usize,
    /// Offset of its first byte.
    pub start: u64,
    /// Offset after its check line, or after its last byte when it has none.
    pub end: u64,
    /// The lines its check covers, each ended by LF (a CR before it is dropped: a file that went
    /// through another system's editor says the same).
    pub lines: Vec<u8>,
    /// The check as it stands.
    pub check: Option<String>,
    /// The check line ends with a line feed.
    pub ended: bool,
}

struct Line {
    bytes: Vec<u8>,
    ended: bool,
    start: u64,
    end: u64,
    no: usize,
}

/// Reads block after block.
pub(super) struct Scanner<R> {
    reader: R,
    at: u64,
    line: usize,
    ahead: Option<Line>,
}

impl<R: BufRead> Scanner<R> {
    pub fn new(reader: R) -> Self {
        Self {
            reader,
            at: 0,
            line: 0,
            ahead: None,
        }
    }

    /// The next block; `None` at the end of the file.
    pub fn next(&mut self) -> io::Result<Option<Block>> {
        let first = loop {
            match self.take_line()? {
                None => return Ok(None),
                // Blank lines part blocks and belong to none.
                Some(line) if blank(&line.bytes) => {}
                Some(line) => break line,
            }
        };
        let mut block = Block {
            kind: kind(&first.bytes).unwrap_or(Kind::Unheaded),
            line: first.no,
            start: first.start,
            end: first.end,
            lines: Vec::new(),
            check: None,
            ended: false,
        };
        block.take(first);
        while block.check.is_none()
            && let Some(line) = self.take_line()?
        {
            if kind(&line.bytes).is_some() {
                self.ahead = Some(line);
                break;
            }
            block.take(line);
        }
        Ok(Some(block))
    }

    fn take_line(&mut self) -> io::Result<Option<Line>> {
        if let Some(line) = self.ahead.take() {
            return Ok(Some(line));
        }
        let start = self.at;
        let mut bytes = Vec::new();
        let mut ended = false;
        // Like `read_until`, but a line longer than any entry may be is not kept whole.
        loop {
            let buffer = match self.reader.fill_buf() {
                Ok(buffer) => buffer,
                Err(e) if e.kind() == io::ErrorKind::Interrupted => continue,
                Err(e) => return Err(e),
            };
            if buffer.is_empty() {
                break;
            }
            let cut = buffer.iter().position(|&b| b == b'\n');
            let used = cut.map_or(buffer.len(), |at| at + 1);
            let room = (LONGEST + 1).saturating_sub(bytes.len());
            let keep = cut.unwrap_or(used).min(room);
            bytes.extend_from_slice(&buffer[..keep]);
            self.reader.consume(used);
            self.at += used as u64;
            if cut.is_some() {
                ended = true;
                break;
            }
        }
        if self.at == start {
            return Ok(None);
        }
        if bytes.last() == Some(&b'\r') && ended {
            bytes.pop();
        }
        self.line += 1;
        Ok(Some(Line {
            bytes,
            ended,
            start,
            end: self.at,
            no: self.line,
        }))
    }
}

impl Block {
    fn take(&mut self, line: Line) {
        self.end = line.end;
        if let Some(check) = check_of(&line.bytes) {
            self.check = Some(check);
            self.ended = line.ended;
        } else if self.lines.len() <= LONGEST {
            self.lines.extend_from_slice(&line.bytes);
            self.lines.push(b'\n');
        }
    }
}

fn blank(line: &[u8]) -> bool {
    line.iter().all(u8::is_ascii_whitespace)
}

fn kind(line: &[u8]) -> Option<Kind> {
    if line == JOURNAL.as_bytes() {
        Some(Kind::Journal)
    } else if line == ENTRY.as_bytes() {
        Some(Kind::Entry)
    } else {
        None
    }
}

fn check_of(line: &[u8]) -> Option<String> {
    let digits = line.strip_prefix(CHECK.as_bytes())?.strip_suffix(b"\"")?;
    let hex = |b: &u8| b.is_ascii_digit() || (b'a'..=b'f').contains(b);
    (digits.len() == 64 && digits.iter().all(hex))
        .then(|| String::from_utf8_lossy(digits).into_owned())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn blocks(bytes: &[u8]) -> Vec<Block> {
        let mut scanner = Scanner::new(bytes);
        let mut all = vec![];
        while let Some(block) = scanner.next().expect("memory can be read") {
            all.push(block);
        }
        all
    }

    #[test]
    fn blocks_are_cut_at_their_headers_and_checks() {
        let check = format!("check = \"{}\"", "0".repeat(64));
        let text = format!(
            "stray\n[[journal]]\na = 1\n{check}\n\n[[entry]]\r\nno = 1\r\n{check}\r\n# note\n\
             [[entrY]]\nno = 2\n{check}\n[[entry]]\nno = 3\nchec"
        );
        let all = blocks(text.as_bytes());
        let seen: Vec<_> = all
            .iter()
            .map(|b| (b.kind, b.line, b.check.is_some()))
            .collect();
        assert_eq!(
            seen,
            vec![
                (Kind::Unheaded, 1, false),
                (Kind::Journal, 2, true),
                (Kind::Entry, 6, true),
                (Kind::Unheaded, 9, true),
                (Kind::Entry, 13, false),
            ]
        );
        assert_eq!(all[1].lines, b"[[journal]]\na = 1\n");
        assert_eq!(all[2].lines, b"[[entry]]\nno = 1\n", "CR LF reads as LF");
        assert_eq!(all[4].end, text.len() as u64);
    }

    #[test]
    fn a_line_without_end_is_not_kept_whole() {
        let mut bytes = b"[[entry]]\n".to_vec();
        bytes.resize(3 * LONGEST, b'x');
        let all = blocks(&bytes);
        assert_eq!(all.len(), 1);
        assert!(all[0].lines.len() <= 2 * LONGEST);
        assert_eq!(all[0].end, bytes.len() as u64);
    }
}
