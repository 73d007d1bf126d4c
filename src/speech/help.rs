//! What can be said, for the screen: the `@example` lines of the rules that can be a context's
//! whole phrase.
//!
//! Promises: lines fit 38 columns (40 with a margin), in the order in which the context's file
//! names its rules, none twice. It leaves out what the phrases mean.

use std::collections::BTreeSet;

use super::{
    grammar::{Expansion, RuleRef},
    library::Library,
    net::follow,
};

/// The widest line.
const COLUMNS: usize = 38;

/// The examples of every rule that can be a whole phrase of the root of `file`, outermost first.
#[must_use]
pub fn examples(library: &Library, file: &str) -> Vec<String> {
    let root = RuleRef {
        file: Some(file.into()),
        rule: None,
        line: 1,
    };
    let mut seen = BTreeSet::new();
    let mut found: Vec<String> = Vec::new();
    collect(library, None, &root, &mut seen, &mut found);
    found
}

/// The same as lines for the screen.
#[must_use]
pub fn lines(library: &Library, file: &str) -> Vec<String> {
    examples(library, file).iter().map(|e| line(e)).collect()
}

/// One phrase cut to the width of the screen.
#[must_use]
pub fn line(phrase: &str) -> String {
    if phrase.chars().count() <= COLUMNS {
        return phrase.into();
    }
    let cut: String = phrase.chars().take(COLUMNS - 3).collect();
    format!("{cut}...")
}

fn collect(
    library: &Library,
    from: Option<&str>,
    reference: &RuleRef,
    seen: &mut BTreeSet<(String, String)>,
    found: &mut Vec<String>,
) {
    let from = from.and_then(|file| library.file(file));
    // References were checked when the grammar was compiled.
    let Ok(target) = follow(library, from, reference) else {
        return;
    };
    if !seen.insert((target.grammar.file.clone(), target.name.to_owned())) {
        return;
    }
    for example in &target.rule.examples {
        if !found.contains(example) {
            found.push(example.clone());
        }
    }
    // The rules it names, in the order in which it names them.
    let mut todo = vec![&target.rule.expansion];
    while let Some(expansion) = todo.pop() {
        match expansion {
            Expansion::Rule(next) => {
                collect(library, Some(&target.grammar.file), next, seen, found);
            }
            // A rule that is only a part of a phrase is shown by the rule it is a part of.
            Expansion::Sequence(parts) => {
                let mut said = parts.iter().filter(|part| !optional(part));
                if let (Some(only), None) = (said.next(), said.next()) {
                    todo.push(only);
                }
            }
            Expansion::Choice(branches) => todo.extend(branches.iter().rev().map(|(_, e)| e)),
            Expansion::Repeat { .. }
            | Expansion::Word(_)
            | Expansion::Tag(..)
            | Expansion::Void => {}
        }
    }
}

/// Whether nothing need be said for it.
fn optional(expansion: &Expansion) -> bool {
    match expansion {
        Expansion::Tag(..) => true,
        Expansion::Repeat { times, .. } => times.0 == 0,
        Expansion::Choice(branches) => branches.iter().any(|(_, branch)| optional(branch)),
        Expansion::Sequence(parts) => parts.iter().all(optional),
        Expansion::Word(_) | Expansion::Rule(_) | Expansion::Void => false,
    }
}
