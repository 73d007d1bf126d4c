//! Tokens to rules: recursive descent over the subset described in the parent module.

use std::collections::BTreeMap;

use super::{Expansion, Grammar, GrammarError, Rule, RuleRef, lexer::Token, lexer::tokens};

/// The first line of every grammar file.
const HEADER: &str = "#ABNF 1.0 UTF-8;";

/// What an optional part costs when the file does not say: said as often as not.
const EVEN: f32 = 0.5;

/// The most often an expansion can repeat; a spoken phrase is short.
const MOST: usize = 20;

/// Reads one grammar file; `file` is its name for messages and references.
///
/// # Errors
/// [`GrammarError`] for anything outside the subset, for a rule defined twice, a reference to a
/// rule that is not in this file, and a root that is none of its rules.
pub fn parse(file: &str, text: &str) -> Result<Grammar, GrammarError> {
    let Some(body) = text.strip_prefix(HEADER) else {
        return Err(GrammarError {
            file: file.into(),
            line: 1,
            wrong: "the file does not begin with its header".into(),
            right: format!("begin it with `{HEADER}`"),
        });
    };
    let mut parser = Parser {
        file,
        tokens: tokens(file, body)?,
        at: 0,
    };
    let grammar = parser.grammar()?;
    check_local_references(&grammar)?;
    Ok(grammar)
}

struct Parser<'a> {
    file: &'a str,
    tokens: Vec<(Token, usize)>,
    at: usize,
}

impl Parser<'_> {
    fn fail<T>(
        &self,
        line: usize,
        wrong: impl Into<String>,
        right: impl Into<String>,
    ) -> Result<T, GrammarError> {
        Err(GrammarError {
            file: self.file.into(),
            line,
            wrong: wrong.into(),
            right: right.into(),
        })
    }

    fn line(&self) -> usize {
        self.tokens
            .get(self.at)
            .or(self.tokens.last())
            .map_or(1, |(_, line)| *line)
    }

    fn peek(&self) -> Option<&Token> {
        self.tokens.get(self.at).map(|(token, _)| token)
    }

    fn next(&mut self) -> Option<Token> {
        let token = self.peek().cloned();
        self.at += 1;
        token
    }

    fn sign(&mut self, wanted: char, after: &str) -> Result<(), GrammarError> {
        let line = self.line();
        match self.next() {
            Some(Token::Sign(c)) if c == wanted => Ok(()),
            other => self.fail(
                line,
                format!("{} after {after}", shown(other.as_ref())),
                format!("`{wanted}` belongs there"),
            ),
        }
    }

    fn grammar(&mut self) -> Result<Grammar, GrammarError> {
        let mut language = None;
        let mut mode = None;
        let mut format = None;
        let mut root = None;
        let mut rules = BTreeMap::new();
        let mut examples = Vec::new();
        while let Some(token) = self.peek().cloned() {
            let line = self.line();
            match token {
                Token::Examples(lines) => {
                    self.at += 1;
                    examples.extend(lines);
                }
                Token::Word(word) if word == "public" || word == "private" => {
                    self.at += 1;
                    self.rule(
                        word == "public",
                        std::mem::take(&mut examples),
                        line,
                        &mut rules,
                    )?;
                }
                Token::Rule(_) => {
                    self.rule(false, std::mem::take(&mut examples), line, &mut rules)?;
                }
                Token::Word(word) => {
                    self.at += 1;
                    let place = match word.as_str() {
                        "language" => &mut language,
                        "mode" => &mut mode,
                        "root" => &mut root,
                        "tag-format" => &mut format,
                        _ => {
                            return self.fail(
                                line,
                                format!("`{word}` is no declaration of the subset"),
                                "language, mode, root and tag-format are; a rule begins with `$` \
                                 or `public $`",
                            );
                        }
                    };
                    if place.is_some() {
                        return self.fail(
                            line,
                            format!("`{word}` is declared twice"),
                            "leave one of them out",
                        );
                    }
                    *place = Some(self.declared(&word)?);
                    self.sign(';', &format!("the declaration of `{word}`"))?;
                }
                other => {
                    return self.fail(
                        line,
                        format!("{} where a rule should begin", shown(Some(&other))),
                        "a rule reads `$name = ...;`",
                    );
                }
            }
        }
        let Some(language) = language else {
            return self.fail(
                1,
                "no language is declared",
                "write `language en-GB;` below the header",
            );
        };
        if let Some(name) = root.as_ref().filter(|name| !rules.contains_key(*name)) {
            return self.fail(
                1,
                format!("the root ${name} is not defined"),
                "name a rule of this file",
            );
        }
        Ok(Grammar {
            file: self.file.into(),
            language,
            root,
            rules,
        })
    }

    /// The value of a declaration, checked.
    fn declared(&mut self, what: &str) -> Result<String, GrammarError> {
        let line = self.line();
        let value = self.next();
        let right = match (what, &value) {
            ("root", Some(Token::Rule(name))) => return Ok(name.clone()),
            ("root", _) => "write `root $rule;`",
            ("mode", Some(Token::Word(word))) if word == "voice" => return Ok(word.clone()),
            ("mode", _) => "write `mode voice;`",
            ("tag-format", Some(Token::Angle(uri))) if uri == "semantics/1.0-literals" => {
                return Ok(uri.clone());
            }
            ("tag-format", _) => "write `tag-format <semantics/1.0-literals>;`",
            (_, Some(Token::Word(word))) => return Ok(word.clone()),
            _ => "write `language en-GB;`",
        };
        self.fail(line, format!("{} as {what}", shown(value.as_ref())), right)
    }

    fn rule(
        &mut self,
        public: bool,
        examples: Vec<String>,
        line: usize,
        rules: &mut BTreeMap<String, Rule>,
    ) -> Result<(), GrammarError> {
        let Some(Token::Rule(name)) = self.next() else {
            return self.fail(
                line,
                "`public` without a rule",
                "write `public $name = ...;`",
            );
        };
        self.sign('=', &format!("the rule's name ${name}"))?;
        let expansion = self.choice()?;
        self.sign(';', &format!("the expansion of ${name}"))?;
        if rules.contains_key(&name) {
            return self.fail(
                line,
                format!("${name} is defined twice"),
                "give one of them another name",
            );
        }
        rules.insert(
            name,
            Rule {
                public,
                expansion,
                examples,
                line,
            },
        );
        Ok(())
    }

    fn choice(&mut self) -> Result<Expansion, GrammarError> {
        let mut branches = Vec::new();
        let mut total = 0.0;
        loop {
            let weight = match self.peek() {
                Some(Token::Weight(w)) => {
                    let w = *w;
                    self.at += 1;
                    w
                }
                _ => 1.0,
            };
            total += weight;
            branches.push((weight, self.sequence()?));
            match self.peek() {
                Some(Token::Sign('|')) => self.at += 1,
                _ => break,
            }
        }
        if branches.len() == 1 {
            return Ok(branches.remove(0).1);
        }
        for (weight, _) in &mut branches {
            *weight /= total;
        }
        Ok(Expansion::Choice(branches))
    }

    fn sequence(&mut self) -> Result<Expansion, GrammarError> {
        let line = self.line();
        let mut parts = Vec::new();
        while let Some(part) = self.part()? {
            parts.push(self.repeated(part)?);
        }
        match parts.len() {
            0 => self.fail(
                line,
                "an alternative is empty",
                "write $NULL where nothing need be said",
            ),
            1 => Ok(parts.remove(0)),
            _ => Ok(Expansion::Sequence(parts)),
        }
    }

    /// One word, rule, tag or group; `None` where the sequence ends.
    fn part(&mut self) -> Result<Option<Expansion>, GrammarError> {
        let line = self.line();
        let part = match self.peek() {
            Some(Token::Word(word) | Token::Quoted(word))
                if word.chars().any(|c| c.is_ascii_uppercase()) =>
            {
                return self.fail(
                    line,
                    format!("`{word}` has capitals"),
                    "spoken words are written in lower case",
                );
            }
            Some(Token::Word(word)) => Expansion::Word(word.clone()),
            Some(Token::Quoted(words)) => Expansion::Sequence(
                words
                    .split_whitespace()
                    .map(|word| Expansion::Word(word.into()))
                    .collect(),
            ),
            Some(Token::Tag(tag)) => Expansion::Tag(tag.clone(), line),
            Some(Token::Rule(name)) => match name.as_str() {
                "NULL" => Expansion::Sequence(Vec::new()),
                "VOID" => Expansion::Void,
                "GARBAGE" => {
                    return self.fail(
                        line,
                        "$GARBAGE is not in the subset",
                        "noise and talk are rejected by the voice, not by a grammar",
                    );
                }
                _ => Expansion::Rule(RuleRef {
                    file: None,
                    rule: Some(name.clone()),
                    line,
                }),
            },
            Some(Token::External(uri)) => {
                let (file, rule) = match uri.split_once('#') {
                    Some((file, rule)) => (file, Some(rule.to_owned())),
                    None => (uri.as_str(), None),
                };
                Expansion::Rule(RuleRef {
                    file: Some(file.into()),
                    rule,
                    line,
                })
            }
            Some(Token::Sign(open @ ('(' | '['))) => {
                let optional = *open == '[';
                self.at += 1;
                let inner = self.choice()?;
                self.sign(if optional { ']' } else { ')' }, "a group")?;
                return Ok(Some(if optional {
                    Expansion::Repeat {
                        of: Box::new(inner),
                        times: (0, 1),
                        more: EVEN,
                    }
                } else {
                    inner
                }));
            }
            _ => return Ok(None),
        };
        self.at += 1;
        Ok(Some(part))
    }

    /// `part<n-m /p/>`, if a repeat follows.
    fn repeated(&mut self, part: Expansion) -> Result<Expansion, GrammarError> {
        let line = self.line();
        let Some(Token::Angle(text)) = self.peek().cloned() else {
            return Ok(part);
        };
        self.at += 1;
        let right = format!("write <2>, <0-1> or <1-4 /0.5/>, at most {MOST} times");
        let (range, more) = match text.split_once('/') {
            None => (text.trim(), EVEN),
            Some((range, rest)) => match rest.trim_end_matches('/').trim().parse::<f32>() {
                Ok(p) if p > 0.0 && p < 1.0 => (range.trim(), p),
                _ => {
                    return self.fail(
                        line,
                        format!("`<{text}>`: the probability is not between 0 and 1"),
                        right,
                    );
                }
            },
        };
        let (low, high) = range.split_once('-').unwrap_or((range, range));
        match (low.trim().parse::<usize>(), high.trim().parse::<usize>()) {
            (Ok(low), Ok(high)) if low <= high && (1..=MOST).contains(&high) => {
                Ok(Expansion::Repeat {
                    of: Box::new(part),
                    times: (low, high),
                    more,
                })
            }
            _ => self.fail(line, format!("`<{text}>` is no repeat"), right),
        }
    }
}

/// A token as it would be pointed at in a message.
fn shown(token: Option<&Token>) -> String {
    match token {
        None => "the end of the file".into(),
        Some(Token::Word(w)) => format!("`{w}`"),
        Some(Token::Quoted(w)) => format!("`\"{w}\"`"),
        Some(Token::Rule(r)) => format!("`${r}`"),
        Some(Token::External(r)) => format!("`$<{r}>`"),
        Some(Token::Angle(a)) => format!("`<{a}>`"),
        Some(Token::Weight(w)) => format!("the weight `/{w}/`"),
        Some(Token::Tag(t)) => format!("the tag `{{{t}}}`"),
        Some(Token::Examples(_)) => "a documentation comment".into(),
        Some(Token::Sign(c)) => format!("`{c}`"),
    }
}

fn check_local_references(grammar: &Grammar) -> Result<(), GrammarError> {
    for rule in grammar.rules.values() {
        let mut stack = vec![&rule.expansion];
        while let Some(expansion) = stack.pop() {
            match expansion {
                Expansion::Rule(RuleRef {
                    file: None,
                    rule: Some(name),
                    line,
                }) if !grammar.rules.contains_key(name) => {
                    return Err(GrammarError {
                        file: grammar.file.clone(),
                        line: *line,
                        wrong: format!("${name} is not defined in this file"),
                        right: "define it, or name the file it is in: $<file.abnf#rule>".into(),
                    });
                }
                Expansion::Sequence(parts) => stack.extend(parts),
                Expansion::Choice(branches) => stack.extend(branches.iter().map(|(_, e)| e)),
                Expansion::Repeat { of, .. } => stack.push(of),
                _ => {}
            }
        }
    }
    Ok(())
}
