//! Grammar text to tokens with their lines; documentation comments keep their `@example` lines.
//!
//! It leaves out what tokens mean together (see `parser`).

use super::GrammarError;

/// One token of a grammar file.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Token {
    /// A spoken word, or a keyword of a declaration.
    Word(String),
    /// `"several words"`.
    Quoted(String),
    /// `$name`.
    Rule(String),
    /// `$<file#rule>`, the text between the angle brackets.
    External(String),
    /// `<...>` after an expansion or in a declaration.
    Angle(String),
    /// `/3/`.
    Weight(f32),
    /// `{...}`.
    Tag(String),
    /// `@example` lines of a `/** */` comment.
    Examples(Vec<String>),
    /// One of `; = | ( ) [ ]`.
    Sign(char),
}

/// Tokens with the line each begins on.
pub(super) fn tokens(file: &str, text: &str) -> Result<Vec<(Token, usize)>, GrammarError> {
    let mut lexer = Lexer {
        file,
        rest: text,
        line: 1,
    };
    let mut found = Vec::new();
    while let Some(token) = lexer.next()? {
        found.push(token);
    }
    Ok(found)
}

struct Lexer<'a> {
    file: &'a str,
    rest: &'a str,
    line: usize,
}

fn name_char(c: char) -> bool {
    c.is_ascii_alphanumeric() || c == '_'
}

fn word_char(c: char) -> bool {
    // Capitals too: a declared language has them (en-GB); the parser refuses them in a phrase.
    c.is_ascii_alphanumeric() || c == '\'' || c == '-'
}

impl<'a> Lexer<'a> {
    fn fail(&self, wrong: impl Into<String>, right: &str) -> GrammarError {
        GrammarError {
            file: self.file.into(),
            line: self.line,
            wrong: wrong.into(),
            right: right.into(),
        }
    }

    /// Takes `n` bytes, counting lines.
    fn take(&mut self, n: usize) -> &'a str {
        let (taken, rest) = self.rest.split_at(n);
        self.line += taken.matches('\n').count();
        self.rest = rest;
        taken
    }

    /// Takes up to and with `end`; gives what stands before it.
    fn until(&mut self, end: &str, what: &str) -> Result<&'a str, GrammarError> {
        match self.rest.find(end) {
            Some(at) => {
                let inner = self.take(at);
                self.take(end.len());
                Ok(inner)
            }
            None => Err(self.fail(
                format!("{what} is not closed"),
                &format!("close it with `{end}`"),
            )),
        }
    }

    fn run(&mut self, allowed: fn(char) -> bool) -> &'a str {
        let end = self
            .rest
            .find(|c: char| !allowed(c))
            .unwrap_or(self.rest.len());
        self.take(end)
    }

    fn next(&mut self) -> Result<Option<(Token, usize)>, GrammarError> {
        loop {
            let blank = self.rest.len() - self.rest.trim_start().len();
            self.take(blank);
            let line = self.line;
            let Some(first) = self.rest.chars().next() else {
                return Ok(None);
            };
            if self.rest.starts_with("//") {
                self.run(|c| c != '\n');
                continue;
            }
            if self.rest.starts_with("/*") {
                let documentation = self.rest.starts_with("/**");
                self.take(2);
                let inner = self.until("*/", "a comment")?;
                if documentation {
                    return Ok(Some((Token::Examples(examples(inner)), line)));
                }
                continue;
            }
            let token = match first {
                ';' | '=' | '|' | '(' | ')' | '[' | ']' => {
                    self.take(1);
                    Token::Sign(first)
                }
                '"' => {
                    self.take(1);
                    Token::Quoted(self.until("\"", "a quoted token")?.into())
                }
                '{' => {
                    let end = if self.rest.starts_with("{!{") {
                        self.take(3);
                        "}!}"
                    } else {
                        self.take(1);
                        "}"
                    };
                    Token::Tag(self.until(end, "a tag")?.trim().into())
                }
                '<' => {
                    self.take(1);
                    Token::Angle(self.until(">", "`<`")?.trim().into())
                }
                '/' => {
                    self.take(1);
                    let text = self.until("/", "a weight")?.trim();
                    match text.parse::<f32>() {
                        Ok(weight) if weight > 0.0 && weight.is_finite() => Token::Weight(weight),
                        _ => {
                            return Err(self.fail(
                                format!("`/{text}/` is no weight"),
                                "write a number above zero, such as /3/ or /0.5/",
                            ));
                        }
                    }
                }
                '$' => {
                    self.take(1);
                    if self.rest.starts_with('<') {
                        self.take(1);
                        Token::External(self.until(">", "a reference")?.trim().into())
                    } else {
                        let name = self.run(name_char);
                        if name.is_empty() {
                            return Err(self.fail(
                                "`$` without a rule's name",
                                "write $name or $<file.abnf#name>",
                            ));
                        }
                        Token::Rule(name.into())
                    }
                }
                c if word_char(c) => Token::Word(self.run(word_char).into()),
                c => {
                    return Err(self.fail(
                        format!("`{c}` has no meaning here"),
                        "words are letters, digits, ' and -; signs are ; = | ( ) [ ] < > / $ { }",
                    ));
                }
            };
            return Ok(Some((token, line)));
        }
    }
}

/// The `@example` lines of a documentation comment.
fn examples(comment: &str) -> Vec<String> {
    comment
        .lines()
        .filter_map(|line| {
            let line = line.trim().trim_start_matches('*').trim();
            line.strip_prefix("@example")
                .map(|text| text.trim().to_owned())
        })
        .collect()
}
