//! Grammar files: what may be said, in the ABNF form of the W3C Speech Recognition Grammar
//! Specification 1.0 (SRGS), as a tree of expansions.
//!
//! Promises: [`parse`] reads the subset below and refuses everything else with file, line, what is
//! wrong and what would be right. It leaves out references between files (see `library`) and what
//! a tag means (see `tag`).
//!
//! # The subset
//!
//! ```text
//! #ABNF 1.0 UTF-8;                         the first line, exactly
//! language en-GB;                          declarations, in any order, each at most once:
//! mode voice;                              `language`, `mode`, `root` and `tag-format`
//! root $reading;
//! tag-format <semantics/1.0-literals>;
//!
//! /** What a rule is for.                  a documentation comment belongs to the next rule;
//!   * @example zero point five eight       each @example is one thing one can say by it
//!   */
//! public $reading = $number [$unit];       only a public rule is seen from other files
//! ```
//!
//! | in an expansion | means |
//! |---|---|
//! | `word` `x-ray` | a token: lower-case letters, digits, `'` and `-`; `"quoted words"` are several |
//! | `a b` | one after the other |
//! | `a \| b` | one or the other |
//! | `/3/ a \| /1/ b` | alternatives with weights, relative to their sum; 1 where none is given |
//! | `( a )` | grouping |
//! | `[ a ]` | `a` or nothing, both as likely; the same as `a<0-1>` |
//! | `a<2>` `a<1-3>` | `a` that many times; an upper bound is required |
//! | `a<1-3 /0.4/>` | the same, each repetition beyond the required ones with probability 0.4 |
//! | `$rule` | a rule of this file |
//! | `$<numbers.abnf#whole>` | a public rule of another file; without `#whole`, its root |
//! | `$NULL` `$VOID` | always said (silence); never said |
//! | `{text}` `{!{text}!}` | a tag: a literal of the meaning, read in the order of speaking |
//! | `// ...` `/* ... */` | comments |
//!
//! Left out of the standard: `$GARBAGE`, language attachments (`!en-US`), `base`, `lexicon`, `meta`
//! and `http-equiv` declarations, unbounded repeats, and recursion (found when a rule is compiled).

mod lexer;
mod parser;
#[cfg(test)]
mod tests;

use std::collections::BTreeMap;

pub use parser::parse;

/// A place in a grammar file that is wrong.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{file}:{line}: {wrong}; {right}")]
pub struct GrammarError {
    /// The file's name.
    pub file: String,
    /// The line, from 1.
    pub line: usize,
    /// What is wrong.
    pub wrong: String,
    /// What would be right.
    pub right: String,
}

/// A rule that an expansion refers to.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord)]
pub struct RuleRef {
    /// Another file (`numbers.abnf`), or this one.
    pub file: Option<String>,
    /// The rule's name without `$`; `None` is the other file's root.
    pub rule: Option<String>,
    /// Where the reference stands, from line 1.
    pub line: usize,
}

/// The right-hand side of a rule.
#[derive(Debug, Clone, PartialEq)]
pub enum Expansion {
    /// One spoken word.
    Word(String),
    /// A literal of the meaning, with the line it stands on.
    Tag(String, usize),
    /// Another rule.
    Rule(RuleRef),
    /// One after the other; empty is `$NULL`.
    Sequence(Vec<Expansion>),
    /// One of several, each with its probability (they add up to 1).
    Choice(Vec<(f32, Expansion)>),
    /// `times.0` to `times.1` times; each one beyond the required ones with probability `more`.
    Repeat {
        /// What is repeated.
        of: Box<Expansion>,
        /// Least and most.
        times: (usize, usize),
        /// Probability of each optional repetition.
        more: f32,
    },
    /// Can never be said.
    Void,
}

/// One rule.
#[derive(Debug, Clone, PartialEq)]
pub struct Rule {
    /// Whether other files may refer to it.
    pub public: bool,
    /// What it stands for.
    pub expansion: Expansion,
    /// The `@example` lines of its documentation comment.
    pub examples: Vec<String>,
    /// Where it is defined, from line 1.
    pub line: usize,
}

/// One grammar file.
#[derive(Debug, Clone, PartialEq)]
pub struct Grammar {
    /// The file's name, such as `ohms.abnf`.
    pub file: String,
    /// The declared language, such as `en-GB`.
    pub language: String,
    /// The root rule's name, if one is declared.
    pub root: Option<String>,
    /// Rules by name, without `$`.
    pub rules: BTreeMap<String, Rule>,
}
