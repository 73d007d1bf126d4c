//! Words along a network: every meaning a phrase can have, the likelier first.
//!
//! Promises: all ways through the grammar are followed, so that a phrase with two meanings is never
//! taken for one; what is not in the grammar gives where it left it and what could have followed.

use std::collections::{BTreeSet, HashMap};

use super::{
    meaning::{Control, Meaning},
    net::{Label, Net},
    sense,
    tag::Tag,
};

/// What a phrase means along a network.
#[derive(Debug, Clone, PartialEq)]
pub enum Parsed {
    /// Meanings with their costs, cheapest first; at least one.
    Meanings(Vec<(f32, Meaning)>),
    /// In the grammar, but no whole meaning: why.
    Senseless(String),
    /// Not in the grammar: how many words were, and what could have followed them (nothing, if the
    /// phrase was over).
    Left {
        /// Words that could begin a phrase.
        understood: usize,
        /// Words that could have been next, sorted.
        next: Vec<String>,
        /// Whether the words so far were a phrase by themselves.
        whole: bool,
    },
}

/// Tag strings, each sharing its beginning with others: (tag string before, last tag).
#[derive(Default)]
struct Tails {
    nodes: Vec<(usize, Tag)>,
    known: HashMap<(usize, Tag), usize>,
}

/// The empty tag string.
const EMPTY: usize = usize::MAX;

impl Tails {
    fn push(&mut self, tail: usize, tag: &Tag) -> usize {
        let key = (tail, tag.clone());
        if let Some(&known) = self.known.get(&key) {
            return known;
        }
        self.nodes.push(key.clone());
        self.known.insert(key, self.nodes.len() - 1);
        self.nodes.len() - 1
    }

    fn tags(&self, mut tail: usize) -> Vec<&Tag> {
        let mut tags = Vec::new();
        while tail != EMPTY {
            let (before, tag) = &self.nodes[tail];
            tags.push(tag);
            tail = *before;
        }
        tags.reverse();
        tags
    }
}

/// States with the tags and least cost on the way there.
type Front = HashMap<(usize, usize), f32>;

/// Follows `words` through `net`.
#[must_use]
pub fn parse(net: &Net, words: &[&str]) -> Parsed {
    let mut tails = Tails::default();
    let mut front = silently(net, &mut tails, Front::from([((0, EMPTY), 0.0)]));
    for (n, word) in words.iter().enumerate() {
        let mut next = Front::new();
        for (&(state, tail), &cost) in &front {
            for arc in &net.states[state] {
                if matches!(&arc.label, Label::Word(w) if w == word) {
                    lower(&mut next, (arc.to, tail), cost + arc.cost);
                }
            }
        }
        if next.is_empty() {
            return Parsed::Left {
                understood: n,
                next: next_words(net, &front),
                whole: front.keys().any(|(state, _)| *state == net.end),
            };
        }
        front = silently(net, &mut tails, next);
    }
    let mut complete: Vec<(usize, f32)> = front
        .iter()
        .filter(|((state, _), _)| *state == net.end)
        .map(|((_, tail), cost)| (*tail, *cost))
        .collect();
    if complete.is_empty() {
        return Parsed::Left {
            understood: words.len(),
            next: next_words(net, &front),
            whole: false,
        };
    }
    // Maps have no order of their own; ties are broken by the order of discovery of the tags.
    complete.sort_by(|a, b| a.1.total_cmp(&b.1).then(a.0.cmp(&b.0)));
    let mut meanings: Vec<(f32, Meaning)> = Vec::new();
    let mut senseless = None;
    for (tail, cost) in complete {
        match sense::meaning(tails.tags(tail)) {
            Ok(meaning) => {
                if !meanings.iter().any(|(_, known)| same(known, &meaning)) {
                    meanings.push((cost, meaning));
                }
            }
            Err(why) => senseless = Some(why),
        }
    }
    match (meanings.is_empty(), senseless) {
        (true, Some(why)) => Parsed::Senseless(why),
        _ => Parsed::Meanings(meanings),
    }
}

/// Whether two meanings are the same, decimals as said: 1.10 is not 1.1.
#[must_use]
pub fn same(a: &Meaning, b: &Meaning) -> bool {
    match (a, b) {
        (Meaning::Reading(x), Meaning::Reading(y)) => x == y && x.figure() == y.figure(),
        (
            Meaning::Control(Control::Correction(Some(x))),
            Meaning::Control(Control::Correction(Some(y))),
        ) => same(x, y),
        (Meaning::Ambiguous(x), Meaning::Ambiguous(y)) => {
            x.len() == y.len() && x.iter().zip(y).all(|(x, y)| same(x, y))
        }
        _ => a == b,
    }
}

fn lower(front: &mut Front, key: (usize, usize), cost: f32) -> bool {
    match front.get_mut(&key) {
        Some(known) if *known <= cost => false,
        Some(known) => {
            *known = cost;
            true
        }
        None => {
            front.insert(key, cost);
            true
        }
    }
}

/// Adds what is reached without a word, collecting tags.
fn silently(net: &Net, tails: &mut Tails, front: Front) -> Front {
    let mut reached = Front::new();
    let mut todo: Vec<((usize, usize), f32)> = front.into_iter().collect();
    // A fixed order, so that tag strings are numbered the same way on every run.
    todo.sort_by_key(|entry| std::cmp::Reverse(entry.0));
    while let Some((key, cost)) = todo.pop() {
        if !lower(&mut reached, key, cost) {
            continue;
        }
        // The stack is last in, first out: reversed, so that the file's order is followed.
        for arc in net.states[key.0].iter().rev() {
            let tail = match &arc.label {
                Label::Word(_) => continue,
                Label::Silent => key.1,
                Label::Tag(tag) => tails.push(key.1, tag),
            };
            todo.push(((arc.to, tail), cost + arc.cost));
        }
    }
    reached
}

fn next_words(net: &Net, front: &Front) -> Vec<String> {
    let mut words = BTreeSet::new();
    for (state, _) in front.keys() {
        for arc in &net.states[*state] {
            if let Label::Word(word) = &arc.label {
                words.insert(word.clone());
            }
        }
    }
    words.into_iter().collect()
}
