//! The script of a rehearsal: what the tester does, one step after the other.
//!
//! Promises: a script that names an utterance that is not there, or a step that does nothing, is
//! refused when it is read. It leaves out how a step is carried out (`player`).

use serde::Deserialize;

/// One step. Exactly one of `keys` and `say` is given.
#[derive(Debug, Clone, PartialEq, Eq, Deserialize)]
#[serde(deny_unknown_fields, rename_all = "kebab-case")]
pub struct Step {
    /// What the onlooker is told first.
    #[serde(default)]
    pub note: Option<String>,
    /// Where the session must stand, as the target of its question begins (`R1+R2, DB1/1`).
    #[serde(default)]
    pub at: Option<String>,
    /// Keys, as in a script on a pipe; several lines are taken one after the other.
    #[serde(default)]
    pub keys: Option<String>,
    /// A recorded utterance.
    #[serde(default)]
    pub say: Option<String>,
    /// The value on the instrument's display: nothing else is affirmed.
    #[serde(default)]
    pub meant: Option<String>,
    /// Utterances for the second and third try.
    #[serde(default)]
    pub again: Vec<String>,
    /// Affirm by key in place of voice.
    #[serde(default)]
    pub affirm_by_key: bool,
}

/// A whole script.
#[derive(Debug, Clone, PartialEq, Eq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Script {
    /// The steps.
    pub step: Vec<Step>,
}

/// Why a script cannot be used.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[allow(missing_docs)] // the fields are named in the messages
pub enum ScriptError {
    #[error("the script is not TOML of the right shape: {0}")]
    Shape(String),
    #[error("step {step}: give keys or an utterance, and not both")]
    OneOf { step: usize },
    #[error("step {step}: there is no recorded utterance `{name}`")]
    NoClip { step: usize, name: String },
}

impl Script {
    /// Reads a script; `has_clip` says which utterances there are.
    ///
    /// # Errors
    /// [`ScriptError`] with the number of the step, from 1.
    pub fn parse(text: &str, has_clip: impl Fn(&str) -> bool) -> Result<Self, ScriptError> {
        let script: Self = toml::from_str(text).map_err(|e| ScriptError::Shape(e.to_string()))?;
        for (at, step) in script.step.iter().enumerate() {
            let number = at + 1;
            if step.keys.is_some() == step.say.is_some() {
                return Err(ScriptError::OneOf { step: number });
            }
            if let Some(name) = step.say.iter().chain(&step.again).find(|n| !has_clip(n)) {
                return Err(ScriptError::NoClip {
                    step: number,
                    name: name.clone(),
                });
            }
        }
        Ok(script)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::rehearsal;

    #[test]
    fn the_script_that_is_shipped_finds_its_utterances() {
        let script = Script::parse(rehearsal::SCRIPT, |n| rehearsal::clip(n).is_some());
        assert_eq!(script.map(|s| s.step.is_empty()), Ok(false));
    }

    #[test]
    fn a_step_that_does_nothing_or_two_things_is_refused() {
        for step in ["note = \"x\"", "keys = \"1\"\nsay = \"affirm\""] {
            let script = Script::parse(&format!("[[step]]\n{step}"), |_| true);
            assert_eq!(script, Err(ScriptError::OneOf { step: 1 }), "{step}");
        }
    }

    #[test]
    fn an_utterance_that_is_not_there_is_named() {
        let script = Script::parse("[[step]]\nsay = \"song\"", |_| false);
        assert!(matches!(script, Err(ScriptError::NoClip { step: 1, .. })));
    }
}
