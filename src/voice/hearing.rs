//! Utterance to meaning: the recogniser, the test whether it was speech of ours at all, `speech`.
//!
//! It promises that what does not sound like anything that may be said comes back as nothing, with
//! a reason, and never as a number. The test is a likelihood ratio: the utterance is decoded twice,
//! once along the context's grammar and once along any sounds at all; when the grammar explains
//! the sounds much worse, it was not meant for it. It leaves out capturing sound.

use std::{
    collections::HashMap,
    sync::{Arc, Mutex, PoisonError},
};

use super::{
    build::folder::{ANYTHING, SOUND},
    front::Utterance,
    recogniser::{Recogniser, RecogniserError, Way},
};
use crate::speech::{
    Context, Heard, Hypothesis, Margins, Meaning, Phrases, decide, parse::same,
    word_graph::WordGraph,
};

/// When an utterance counts as none of ours.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Limits {
    /// Most that each sound may be explained worse by the grammar than by any sounds, in nats.
    pub worse: f64,
    /// Least sounds an utterance must have ("eight" has two).
    pub sounds: usize,
}

impl Default for Limits {
    fn default() -> Self {
        Self {
            worse: 2.5,
            sounds: 1,
        }
    }
}

/// How well an utterance was explained.
#[derive(Debug, Clone, PartialEq)]
pub struct Fit {
    /// Ways along the grammar, cheapest first.
    pub ways: Vec<Way>,
    /// What the grammar alone makes the first of them cost.
    pub grammar: f64,
    /// The likeliest sounds without any grammar, and their cost without what each sound costs.
    pub anything: Way,
    /// Seconds of the utterance that stand out of the room.
    pub voiced: f32,
}

impl Fit {
    /// How many sounds there were.
    #[must_use]
    pub fn sounds(&self) -> usize {
        self.anything
            .words
            .split_whitespace()
            .filter(|sound| *sound != "[NSN]")
            .count()
    }

    /// How much worse the grammar explains each sound than any sounds do, in nats; what the
    /// grammar itself costs is not counted.
    #[must_use]
    pub fn worse(&self) -> f64 {
        let best = self.ways.first().map_or(f64::INFINITY, |way| way.cost);
        (best - self.grammar - self.anything.cost) / self.sounds().max(2) as f64
    }
}

/// A voice, with what may be said.
#[derive(Debug)]
pub struct Hearing {
    recogniser: Recogniser,
    phrases: Arc<Phrases>,
    graphs: Mutex<HashMap<Context, Arc<WordGraph>>>,
    /// When an utterance counts as none of ours.
    pub limits: Limits,
    /// How close a rival may come before the tool asks.
    pub margins: Margins,
}

impl Hearing {
    /// Over an opened voice that was built from these phrases.
    #[must_use]
    pub fn new(recogniser: Recogniser, phrases: Arc<Phrases>) -> Self {
        Self {
            recogniser,
            phrases,
            graphs: Mutex::default(),
            limits: Limits::default(),
            margins: Margins {
                different: 1.0,
                confusable: 2.5,
                ..Margins::default()
            },
        }
    }

    /// Opens what a context needs ahead of its first use.
    ///
    /// # Errors
    /// [`RecogniserError`].
    pub fn prepare(&self, context: Context) -> Result<(), RecogniserError> {
        if self.recogniser.has(ANYTHING) {
            self.recogniser.prepare(ANYTHING)?;
        }
        self.recogniser.prepare(context.name())
    }

    /// How well an utterance is explained in a context.
    ///
    /// # Errors
    /// [`RecogniserError`].
    pub fn fit(&self, context: Context, utterance: &Utterance) -> Result<Fit, RecogniserError> {
        if !self.recogniser.has(ANYTHING) {
            return self.fit_by_garbage_word(context, utterance);
        }
        let anything = self.recogniser.decode(ANYTHING, &utterance.samples)?;
        let mut anything = anything.into_iter().next().unwrap_or(Way {
            words: String::new(),
            cost: 0.0,
            seconds: 0.0,
        });
        anything.cost -= anything.words.split_whitespace().count() as f64 * f64::from(SOUND);
        let mut fit = Fit {
            ways: Vec::new(),
            grammar: 0.0,
            anything,
            voiced: utterance.voiced,
        };
        // Hardly a sound in it: not worth the search.
        if fit.sounds() < self.limits.sounds {
            return Ok(fit);
        }
        fit.ways = self.recogniser.decode(context.name(), &utterance.samples)?;
        let best = fit.ways.first().map_or("", |way| way.words.as_str());
        fit.grammar = cost(&self.graph(context), best).unwrap_or_default();
        Ok(fit)
    }

    /// An adopted model has no measure of any sounds; its garbage word competes in the grammar.
    fn fit_by_garbage_word(
        &self,
        context: Context,
        utterance: &Utterance,
    ) -> Result<Fit, RecogniserError> {
        let ways = self.recogniser.decode(context.name(), &utterance.samples)?;
        let cost = ways.first().map_or(0.0, |way| way.cost);
        Ok(Fit {
            ways,
            grammar: 0.0,
            anything: Way {
                words: String::new(),
                cost,
                seconds: utterance.voiced,
            },
            voiced: utterance.voiced,
        })
    }

    /// What an utterance means in a context.
    ///
    /// # Errors
    /// [`RecogniserError`].
    pub fn hear(&self, context: Context, utterance: &Utterance) -> Result<Heard, RecogniserError> {
        let fit = self.fit(context, utterance)?;
        Ok(self.meaning(context, &fit))
    }

    /// What an utterance that was explained so means.
    #[must_use]
    pub fn meaning(&self, context: Context, fit: &Fit) -> Heard {
        let nothing = |why: &str, hypotheses| Heard {
            hypotheses,
            meaning: Meaning::Nothing(why.to_owned()),
            clip: None,
        };
        let Some(best) = fit.ways.first().filter(|way| !way.words.is_empty()) else {
            return nothing("there was sound, but no words", Vec::new());
        };
        if fit.worse() > self.limits.worse {
            let why = "it did not sound like anything that can be said here";
            // What it came nearest to is shown, with the reason it was not taken.
            let nearest = Hypothesis {
                words: best.words.clone(),
                meaning: Meaning::Nothing(why.to_owned()),
                margin: 0.0,
            };
            return nothing(why, vec![nearest]);
        }
        let hypotheses: Vec<(String, f64)> = fit
            .ways
            .iter()
            .map(|way| (way.words.clone(), way.cost - best.cost))
            .collect();
        decide(&self.phrases, context, &hypotheses, &self.margins)
    }

    /// How far behind the next hypothesis of another meaning lies, in nats; infinite when there is
    /// none.
    #[must_use]
    pub fn lead(&self, context: Context, fit: &Fit) -> f64 {
        let Some((best, rest)) = fit.ways.split_first() else {
            return 0.0;
        };
        let due = self.phrases.understand(context, &best.words);
        rest.iter()
            .find(|way| {
                let other = self.phrases.understand(context, &way.words);
                !matches!(other, Meaning::Nothing(_)) && !alike(&due, &other)
            })
            .map_or(f64::INFINITY, |way| way.cost - best.cost)
    }

    fn graph(&self, context: Context) -> Arc<WordGraph> {
        let mut graphs = self.graphs.lock().unwrap_or_else(PoisonError::into_inner);
        let graph = graphs
            .entry(context)
            .or_insert_with(|| Arc::new(self.phrases.word_graph(context)));
        Arc::clone(graph)
    }
}

/// The same meaning, or the same figure with and without its unit.
fn alike(a: &Meaning, b: &Meaning) -> bool {
    match (a, b) {
        (Meaning::Reading(a), Meaning::Reading(b)) => {
            a.value() == b.value() && a.bound() == b.bound()
        }
        _ => same(a, b),
    }
}

/// The cost of words along a word graph: the cheapest way through it.
fn cost(graph: &WordGraph, words: &str) -> Option<f64> {
    let silent = |reached: &mut HashMap<usize, f32>| {
        let mut due: Vec<usize> = reached.keys().copied().collect();
        while let Some(state) = due.pop() {
            let sofar = reached[&state];
            for arc in graph.states[state].arcs.iter().filter(|a| a.word.is_none()) {
                let known = reached.entry(arc.to).or_insert(f32::INFINITY);
                if sofar + arc.cost < *known {
                    *known = sofar + arc.cost;
                    due.push(arc.to);
                }
            }
        }
    };
    let mut reached = HashMap::from([(graph.start, 0.0_f32)]);
    silent(&mut reached);
    for word in words.split_whitespace() {
        let mut next = HashMap::new();
        for (state, sofar) in &reached {
            let arcs = graph.states[*state].arcs.iter();
            for arc in arcs.filter(|a| a.word.as_deref() == Some(word)) {
                let known = next.entry(arc.to).or_insert(f32::INFINITY);
                *known = known.min(sofar + arc.cost);
            }
        }
        reached = next;
        silent(&mut reached);
    }
    let ends = reached
        .iter()
        .filter_map(|(state, sofar)| Some(sofar + graph.states[*state].stop?));
    ends.min_by(f32::total_cmp).map(f64::from)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::speech::word_graph::{Arc as Way_, State};

    #[test]
    fn words_cost_what_their_cheapest_way_costs() {
        let arc = |word: &str, cost: f32, to: usize| Way_ {
            word: (!word.is_empty()).then(|| word.to_owned()),
            cost,
            to,
        };
        let graph = WordGraph {
            start: 2,
            states: vec![
                State {
                    arcs: vec![],
                    stop: Some(0.5),
                },
                State {
                    arcs: vec![arc("two", 1.0, 0)],
                    stop: None,
                },
                State {
                    arcs: vec![arc("one", 1.0, 1), arc("one", 3.0, 0), arc("", 0.25, 1)],
                    stop: None,
                },
            ],
        };
        assert_eq!(cost(&graph, "one two"), Some(2.5));
        assert_eq!(cost(&graph, "one"), Some(3.5));
        assert_eq!(cost(&graph, "two"), Some(1.75));
        assert_eq!(cost(&graph, "two two"), None);
    }

    #[test]
    fn a_fit_is_judged_by_sounds_and_not_by_how_rare_a_phrase_is() {
        let fit = Fit {
            ways: vec![Way {
                words: "seven".into(),
                cost: -90.0,
                seconds: 0.4,
            }],
            grammar: 5.0,
            anything: Way {
                words: "[S] [EH] [V] [AH] [N]".into(),
                cost: -100.0,
                seconds: 0.4,
            },
            voiced: 0.5,
        };
        assert_eq!(fit.sounds(), 5);
        assert!((fit.worse() - 1.0).abs() < 1e-9);
    }
}
