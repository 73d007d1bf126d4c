//! The grammar files of the tool, built in, with the job's own names of places woven in.
//!
//! Promises: no file is read at run time; the text that drives the recogniser, the understanding
//! and the help is the same. It leaves out what phrases mean (see `phrases`).

use std::collections::BTreeMap;

use super::{
    grammar::{Expansion, Grammar, GrammarError, parse},
    meaning::Context,
};

/// The files under `grammars/`: a file a context, and the files they share.
const FILES: [(&str, &str); 17] = [
    ("ohms.abnf", include_str!("../../grammars/ohms.abnf")),
    (
        "insulation.abnf",
        include_str!("../../grammars/insulation.abnf"),
    ),
    ("live.abnf", include_str!("../../grammars/live.abnf")),
    ("tick.abnf", include_str!("../../grammars/tick.abnf")),
    ("confirm.abnf", include_str!("../../grammars/confirm.abnf")),
    (
        "question.abnf",
        include_str!("../../grammars/question.abnf"),
    ),
    ("pick.abnf", include_str!("../../grammars/pick.abnf")),
    ("gate.abnf", include_str!("../../grammars/gate.abnf")),
    ("digits.abnf", include_str!("../../grammars/digits.abnf")),
    ("all.abnf", include_str!("../../grammars/all.abnf")),
    ("numbers.abnf", include_str!("../../grammars/numbers.abnf")),
    ("units.abnf", include_str!("../../grammars/units.abnf")),
    (
        "readings.abnf",
        include_str!("../../grammars/readings.abnf"),
    ),
    ("places.abnf", include_str!("../../grammars/places.abnf")),
    ("tests.abnf", include_str!("../../grammars/tests.abnf")),
    ("replies.abnf", include_str!("../../grammars/replies.abnf")),
    ("control.abnf", include_str!("../../grammars/control.abnf")),
];

/// Where the job's own names of places go: this rule of this file is `$VOID` until then.
const OWN: (&str, &str) = ("places.abnf", "own");

/// Grammar files by name.
#[derive(Debug, Clone)]
pub struct Library {
    files: BTreeMap<String, Grammar>,
}

impl Library {
    /// The files built into the tool.
    ///
    /// # Errors
    /// [`GrammarError`] when one of them is wrong (a test keeps that from happening).
    pub fn built_in() -> Result<Library, GrammarError> {
        Library::from_texts(FILES)
    }

    /// Any files: name and text.
    ///
    /// # Errors
    /// [`GrammarError`] of the first file that is wrong.
    pub fn from_texts<'a>(
        texts: impl IntoIterator<Item = (&'a str, &'a str)>,
    ) -> Result<Library, GrammarError> {
        let mut files = BTreeMap::new();
        for (name, text) in texts {
            files.insert(name.to_owned(), parse(name, text)?);
        }
        Ok(Library { files })
    }

    /// A file by name.
    #[must_use]
    pub fn file(&self, name: &str) -> Option<&Grammar> {
        self.files.get(name)
    }

    /// Every file, by name.
    pub fn files(&self) -> impl Iterator<Item = &Grammar> {
        self.files.values()
    }

    /// Puts names of places in: each is a list of words already checked to be sayable.
    pub(super) fn weave(&mut self, names: &[Vec<String>]) {
        let Some(rule) = self
            .files
            .get_mut(OWN.0)
            .and_then(|grammar| grammar.rules.get_mut(OWN.1))
        else {
            return;
        };
        if names.is_empty() {
            return;
        }
        let share = 1.0 / names.len() as f32;
        rule.expansion = Expansion::Choice(
            names
                .iter()
                .map(|words| {
                    let mut parts: Vec<Expansion> =
                        words.iter().cloned().map(Expansion::Word).collect();
                    parts.push(Expansion::Tag(format!("own:{}", words.join(" ")), 0));
                    (share, Expansion::Sequence(parts))
                })
                .collect(),
        );
    }
}

/// The text of a context's grammar file, or of a shared one, as built in.
#[must_use]
pub fn text(file: &str) -> Option<&'static str> {
    FILES
        .iter()
        .find(|(name, _)| *name == file)
        .map(|(_, text)| *text)
}

/// The name of a context's grammar file.
#[must_use]
pub fn file_of(context: Context) -> String {
    format!("{}.abnf", context.name())
}
