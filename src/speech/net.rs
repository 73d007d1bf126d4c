//! A grammar rule compiled to a network: words, tags and costs on arcs, references put in place.
//!
//! Promises: the same grammar gives the same network, state for state; no loops (a rule that leads
//! to itself is an error). Costs are −ln of the grammar's probabilities. It leaves out parsing
//! (see `parse`) and the tag-free form for recognisers (see `word_graph`).

use super::{
    grammar::{Expansion, Grammar, GrammarError, Rule, RuleRef},
    library::Library,
    tag::Tag,
};

/// What an arc carries.
#[derive(Debug, Clone, PartialEq)]
pub enum Label {
    /// Nothing is said.
    Silent,
    /// One spoken word.
    Word(String),
    /// Nothing is said; the tag joins the meaning.
    Tag(Tag),
}

/// A step of the network.
#[derive(Debug, Clone, PartialEq)]
pub struct Arc {
    /// What it carries.
    pub label: Label,
    /// −ln probability.
    pub cost: f32,
    /// The state it leads to.
    pub to: usize,
}

/// States by number, each with its arcs; it starts at 0 and ends at `end`.
#[derive(Debug, Clone, PartialEq)]
pub struct Net {
    /// Arcs by state.
    pub states: Vec<Vec<Arc>>,
    /// The only state in which a phrase is complete.
    pub end: usize,
}

impl Net {
    /// Compiles `rule` of `file` (its root when `None`).
    ///
    /// # Errors
    /// [`GrammarError`] for a reference that leads nowhere or to a rule that is not public, for
    /// recursion, and for a tag that means nothing.
    pub fn compile(library: &Library, file: &str, rule: Option<&str>) -> Result<Net, GrammarError> {
        let mut builder = Builder {
            library,
            states: vec![Vec::new()],
            open: Vec::new(),
        };
        let reference = RuleRef {
            file: Some(file.into()),
            rule: rule.map(Into::into),
            line: 1,
        };
        let end = builder.reference(None, &reference, 0)?;
        Ok(Net {
            states: builder.states,
            end,
        })
    }
}

/// A rule of a file that a reference led to.
pub(super) struct Found<'a> {
    pub grammar: &'a Grammar,
    pub name: &'a str,
    pub rule: &'a Rule,
}

/// Follows a reference that stands in `from` (`None`: asked for from outside any file).
pub(super) fn follow<'a>(
    library: &'a Library,
    from: Option<&'a Grammar>,
    reference: &RuleRef,
) -> Result<Found<'a>, GrammarError> {
    let fail = |wrong: String, right: &str| GrammarError {
        file: from.map_or_else(|| "grammars".into(), |g| g.file.clone()),
        line: reference.line,
        wrong,
        right: right.into(),
    };
    let grammar = match (&reference.file, from) {
        (Some(file), _) => library.file(file).ok_or_else(|| {
            fail(
                format!("there is no grammar file {file}"),
                "name one of the files under grammars/",
            )
        })?,
        (None, Some(grammar)) => grammar,
        (None, None) => {
            return Err(fail(
                "a rule without its file".into(),
                "write $<file.abnf#rule>",
            ));
        }
    };
    let name = reference
        .rule
        .as_ref()
        .or(grammar.root.as_ref())
        .ok_or_else(|| {
            fail(
                format!("{} has no root", grammar.file),
                "name the rule: $<file.abnf#rule>",
            )
        })?;
    let (name, rule) = grammar.rules.get_key_value(name).ok_or_else(|| {
        fail(
            format!("{} has no rule ${name}", grammar.file),
            "name a rule of that file",
        )
    })?;
    let own = from.is_some_and(|from| from.file == grammar.file);
    // A root asked for as such may be private (SRGS 1.0, section 4.7).
    if !own && !rule.public && reference.rule.is_some() {
        return Err(fail(
            format!("${name} of {} is not public", grammar.file),
            "write `public` before it where it is defined",
        ));
    }
    Ok(Found {
        grammar,
        name,
        rule,
    })
}

struct Builder<'a> {
    library: &'a Library,
    states: Vec<Vec<Arc>>,
    /// Rules being put in place, outermost first: one met again leads to itself.
    open: Vec<(&'a str, &'a str)>,
}

impl<'a> Builder<'a> {
    fn state(&mut self) -> usize {
        self.states.push(Vec::new());
        self.states.len() - 1
    }

    fn arc(&mut self, from: usize, label: Label, cost: f32, to: usize) {
        self.states[from].push(Arc { label, cost, to });
    }

    fn reference(
        &mut self,
        from: Option<&'a Grammar>,
        reference: &RuleRef,
        at: usize,
    ) -> Result<usize, GrammarError> {
        let found = follow(self.library, from, reference)?;
        let key = (found.grammar.file.as_str(), found.name);
        if self.open.contains(&key) {
            return Err(GrammarError {
                file: found.grammar.file.clone(),
                line: found.rule.line,
                wrong: format!("${} leads to itself", found.name),
                right: "spoken phrases are finite: use a repeat such as <1-4>".into(),
            });
        }
        self.open.push(key);
        let end = self.expansion(found.grammar, &found.rule.expansion, at)?;
        self.open.pop();
        Ok(end)
    }

    /// Adds the expansion after state `at`; gives the state after it.
    fn expansion(
        &mut self,
        grammar: &'a Grammar,
        expansion: &'a Expansion,
        at: usize,
    ) -> Result<usize, GrammarError> {
        match expansion {
            Expansion::Word(word) => {
                let to = self.state();
                self.arc(at, Label::Word(word.clone()), 0.0, to);
                Ok(to)
            }
            Expansion::Tag(text, line) => {
                let tag = Tag::parse(text).ok_or_else(|| GrammarError {
                    file: grammar.file.clone(),
                    line: *line,
                    wrong: format!("the tag {{{text}}} means nothing"),
                    right: "use a tag of the list in speech::tag".into(),
                })?;
                let to = self.state();
                self.arc(at, Label::Tag(tag), 0.0, to);
                Ok(to)
            }
            Expansion::Rule(reference) => self.reference(Some(grammar), reference, at),
            Expansion::Sequence(parts) => parts
                .iter()
                .try_fold(at, |at, part| self.expansion(grammar, part, at)),
            Expansion::Choice(branches) => {
                let end = self.state();
                for (probability, branch) in branches {
                    let start = self.state();
                    self.arc(at, Label::Silent, -probability.ln(), start);
                    let last = self.expansion(grammar, branch, start)?;
                    self.arc(last, Label::Silent, 0.0, end);
                }
                Ok(end)
            }
            Expansion::Repeat { of, times, more } => {
                let mut at = at;
                for _ in 0..times.0 {
                    at = self.expansion(grammar, of, at)?;
                }
                let end = self.state();
                for _ in times.0..times.1 {
                    self.arc(at, Label::Silent, -(1.0 - more).ln(), end);
                    let start = self.state();
                    self.arc(at, Label::Silent, -more.ln(), start);
                    at = self.expansion(grammar, of, start)?;
                }
                self.arc(at, Label::Silent, 0.0, end);
                Ok(end)
            }
            // A fresh state that nothing leads to: the phrase cannot go on.
            Expansion::Void => Ok(self.state()),
        }
    }
}
