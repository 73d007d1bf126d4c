//! What may be said, for a recogniser: a weighted acceptor over words.
//!
//! Promises: exactly the word strings of the grammar; no silent arcs, no loops, no dead ends, equal
//! states merged; the same grammar gives the same graph. A string's cost is that of its likeliest
//! way through the grammar. It is not determinised (the graph builder does that with the phones).

use std::collections::HashMap;

use super::net::{Label, Net};

/// A weighted acceptor over words.
#[derive(Debug, Clone, PartialEq)]
pub struct WordGraph {
    /// States by number; arcs lead to states with smaller numbers.
    pub states: Vec<State>,
    /// Where every phrase begins.
    pub start: usize,
}

/// A state of a [`WordGraph`].
#[derive(Debug, Clone, Default, PartialEq)]
pub struct State {
    /// Sorted by word, then by the state they lead to.
    pub arcs: Vec<Arc>,
    /// Cost of ending here; `None` where a phrase is not complete.
    pub stop: Option<f32>,
}

/// An arc of a [`WordGraph`].
#[derive(Debug, Clone, PartialEq)]
pub struct Arc {
    /// The word; always one (the type leaves room for silent arcs of other sources).
    pub word: Option<String>,
    /// −ln probability.
    pub cost: f32,
    /// The state it leads to.
    pub to: usize,
}

/// Costs are rounded to this many parts of a nat, so that equal states are found equal however
/// their costs were added up. A part in 4096 is far below what a decoder can tell apart.
const GRAIN: f32 = 4096.0;

fn rounded(cost: f32) -> f32 {
    (cost * GRAIN).round() / GRAIN
}

impl WordGraph {
    /// The words of a network, without its tags.
    #[must_use]
    pub fn of(net: &Net) -> WordGraph {
        let mut maker = Maker::new(net);
        match maker.state(0) {
            Some(start) => WordGraph {
                states: maker.states,
                start,
            },
            // Nothing at all may be said.
            None => WordGraph {
                states: vec![State::default()],
                start: 0,
            },
        }
    }

    /// Every word, once, in order.
    #[must_use]
    pub fn words(&self) -> Vec<&str> {
        let mut words: Vec<&str> = self
            .states
            .iter()
            .flat_map(|state| &state.arcs)
            .filter_map(|arc| arc.word.as_deref())
            .collect();
        words.sort_unstable();
        words.dedup();
        words
    }

    /// Cost of a phrase, or `None` when it is not in the graph.
    #[must_use]
    pub fn cost(&self, words: &[&str]) -> Option<f32> {
        let mut here: HashMap<usize, f32> = HashMap::from([(self.start, 0.0)]);
        for word in words {
            let mut next: HashMap<usize, f32> = HashMap::new();
            for (state, cost) in here {
                for arc in &self.states[state].arcs {
                    if arc.word.as_deref() == Some(word) {
                        let best = next.entry(arc.to).or_insert(f32::INFINITY);
                        *best = best.min(cost + arc.cost);
                    }
                }
            }
            here = next;
        }
        here.into_iter()
            .filter_map(|(state, cost)| self.states[state].stop.map(|stop| cost + stop))
            .min_by(f32::total_cmp)
    }
}

/// Equal states have equal keys: what they stop for and where each word leads, costs in bits.
type Key = (Option<u32>, Vec<(u32, u32, usize)>);

struct Maker<'a> {
    net: &'a Net,
    /// Every word of the network, sorted: arcs are compared by its place here.
    words: Vec<&'a str>,
    /// State of the network to state of the graph; the inner `None` is a dead end.
    done: Vec<Option<Option<usize>>>,
    known: HashMap<Key, usize>,
    states: Vec<State>,
    /// Least cost of the states reached in one search; infinite between searches.
    best: Vec<f32>,
}

impl<'a> Maker<'a> {
    fn new(net: &'a Net) -> Self {
        let mut words: Vec<&str> = net
            .states
            .iter()
            .flatten()
            .filter_map(|arc| match &arc.label {
                Label::Word(word) => Some(word.as_str()),
                _ => None,
            })
            .collect();
        words.sort_unstable();
        words.dedup();
        Maker {
            net,
            words,
            done: vec![None; net.states.len()],
            known: HashMap::new(),
            states: Vec::new(),
            best: vec![f32::INFINITY; net.states.len()],
        }
    }

    /// The graph's state for a state of the network, made (with all that follows) if need be.
    fn state(&mut self, of: usize) -> Option<usize> {
        if let Some(done) = self.done[of] {
            return done;
        }
        let mut stop: Option<f32> = None;
        let mut arcs: Vec<(u32, usize, f32)> = Vec::new();
        for (state, cost) in self.silently_from(of) {
            if state == self.net.end {
                stop = Some(stop.map_or(cost, |s| s.min(cost)));
            }
            let net = self.net;
            for arc in &net.states[state] {
                let Label::Word(word) = &arc.label else {
                    continue;
                };
                if let (Some(to), Ok(id)) =
                    (self.state(arc.to), self.words.binary_search(&word.as_str()))
                {
                    arcs.push((id as u32, to, rounded(cost + arc.cost)));
                }
            }
        }
        arcs.sort_by(|a, b| (a.0, a.1).cmp(&(b.0, b.1)).then(a.2.total_cmp(&b.2)));
        // The cheapest of several ways comes first and stays.
        arcs.dedup_by_key(|arc| (arc.0, arc.1));
        let made = (stop.is_some() || !arcs.is_empty()).then(|| {
            let stop = stop.map(rounded);
            let key = (
                stop.map(f32::to_bits),
                arcs.iter().map(|a| (a.0, a.2.to_bits(), a.1)).collect(),
            );
            let next = self.states.len();
            let number = *self.known.entry(key).or_insert(next);
            if number == next {
                let arcs = arcs
                    .into_iter()
                    .map(|(word, to, cost)| Arc {
                        word: Some(self.words[word as usize].to_owned()),
                        cost,
                        to,
                    })
                    .collect();
                self.states.push(State { arcs, stop });
            }
            number
        });
        self.done[of] = Some(made);
        made
    }

    /// States reached without a word, each with its least cost, in the order of first reaching.
    fn silently_from(&mut self, of: usize) -> Vec<(usize, f32)> {
        self.best[of] = 0.0;
        let mut order = vec![of];
        let mut todo = vec![(of, 0.0_f32)];
        while let Some((state, cost)) = todo.pop() {
            // A cheaper way was found after this one was put aside.
            if cost > self.best[state] {
                continue;
            }
            for arc in &self.net.states[state] {
                if matches!(arc.label, Label::Word(_)) {
                    continue;
                }
                let cost = cost + arc.cost;
                let known = &mut self.best[arc.to];
                if *known <= cost {
                    continue;
                }
                if known.is_infinite() {
                    order.push(arc.to);
                }
                *known = cost;
                todo.push((arc.to, cost));
            }
        }
        order
            .into_iter()
            .map(|state| {
                let cost = self.best[state];
                self.best[state] = f32::INFINITY;
                (state, cost)
            })
            .collect()
    }
}
