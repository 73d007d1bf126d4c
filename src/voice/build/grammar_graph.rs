//! A context's word graph as the acceptor libvosk obeys: `Gr.fst`.
//!
//! It promises: exactly the sentences of the word graph, each at the cost of its cheapest way
//! through; costs pushed to the front so that pruning sees them early, arcs sorted; the same bytes
//! every time. Words the voice lacks are reported, and the branches that need them fall away.
//! It is not determinised: the word graphs come with equal states merged, and phrases that several
//! rules allow at different costs make determinisation grow from 300 states to 50 000 and from
//! milliseconds to seconds, only to be merged again; the decoder's lattice keeps the best anyway.

use std::collections::{BTreeSet, VecDeque};

use rustfst::{
    algorithms::{
        PushWeightsConfig, ReweightType, connect, push_weights_with_config, rm_epsilon::rm_epsilon,
        tr_sort,
    },
    prelude::{CoreFst, ExpandedFst, ILabelCompare, MutableFst, Semiring, Tr, Trs},
    semirings::TropicalWeight,
};

use super::{Automaton, BuildError, GARBAGE, WordIds, automaton_error};
use crate::speech::word_graph::WordGraph;

/// What the automata library's errors become.
type Trouble = Box<dyn std::error::Error>;

/// Differences below this many nats are no differences (a power of two, so that rounding to it is
/// exact).
const GRAIN: f32 = 1.0 / 1024.0;

/// A compiled grammar and what had to be left out of it.
#[derive(Debug, Clone)]
pub struct Grammar {
    /// The acceptor.
    pub automaton: Automaton,
    /// Words of the grammar that the voice does not have, sorted.
    pub missing: Vec<String>,
}

/// Compiles a word graph. `garbage` is the cost of the garbage word in its place; `None` leaves
/// it out.
///
/// # Errors
/// [`BuildError::BrokenGraph`] when an arc leads nowhere; [`BuildError::Automaton`] when nothing
/// that can be said is left, or the automata library gives up.
pub fn build(
    graph: &WordGraph,
    ids: &WordIds,
    garbage: Option<f32>,
    context: &str,
) -> Result<Grammar, BuildError> {
    let (mut automaton, missing) = raw(graph, ids, context)?;
    connect(&mut automaton).map_err(|e| automaton_error(context, &e))?;
    if automaton.num_states() == 0 {
        return Err(automaton_error(
            context,
            &"nothing is left that can be said",
        ));
    }
    if let (Some(cost), Some(id)) = (garbage, ids.get(GARBAGE)) {
        add_garbage(&mut automaton, id, cost).map_err(|e| automaton_error(context, &e))?;
    }
    let automaton = optimised(automaton).map_err(|e| automaton_error(context, &e))?;
    Ok(Grammar {
        automaton: canonical(&automaton).map_err(|e| automaton_error(context, &e))?,
        missing,
    })
}

/// The cost of a sentence along a compiled grammar: the cheapest of its ways; `None` when it is
/// not one of its sentences.
#[must_use]
pub fn cost(automaton: &Automaton, ids: &WordIds, sentence: &str) -> Option<f32> {
    let mut reached = vec![(automaton.start()?, 0.0)];
    for word in sentence.split_whitespace() {
        let id = ids.get(word)? as usize;
        let mut next = Vec::new();
        for (at, sofar) in reached {
            for arc in automaton.get_trs(at).ok()?.trs() {
                if arc.ilabel == id {
                    next.push((arc.nextstate, sofar + arc.weight.value()));
                }
            }
        }
        reached = next;
    }
    let ends = reached
        .iter()
        .filter_map(|(at, sofar)| Some(sofar + *automaton.final_weight(*at).ok()??.value()));
    ends.min_by(f32::total_cmp)
}

fn raw(
    graph: &WordGraph,
    ids: &WordIds,
    context: &str,
) -> Result<(Automaton, Vec<String>), BuildError> {
    let broken = |state: usize| BuildError::BrokenGraph {
        context: context.to_owned(),
        state,
    };
    let mut automaton = Automaton::new();
    automaton.add_states(graph.states.len());
    automaton
        .set_start(graph.start as _)
        .map_err(|_| broken(graph.start))?;
    let mut missing = BTreeSet::new();
    for (from, state) in graph.states.iter().enumerate() {
        for arc in &state.arcs {
            if arc.to >= graph.states.len() {
                return Err(broken(arc.to));
            }
            let id = match &arc.word {
                None => 0,
                Some(word) => match ids.get(word) {
                    Some(id) => id,
                    None => {
                        missing.insert(word.clone());
                        continue;
                    }
                },
            };
            let arc = Tr::new(id as _, id as _, TropicalWeight::new(arc.cost), arc.to as _);
            automaton.add_tr(from as _, arc).map_err(|_| broken(from))?;
        }
        if let Some(cost) = state.stop {
            automaton
                .set_final(from as _, TropicalWeight::new(cost))
                .map_err(|_| broken(from))?;
        }
    }
    Ok((automaton, missing.into_iter().collect()))
}

/// A new start with two ways on: into the grammar, or the garbage word and out.
fn add_garbage(automaton: &mut Automaton, id: u32, cost: f32) -> Result<(), Trouble> {
    let Some(old) = automaton.start() else {
        return Ok(());
    };
    let start = automaton.add_state();
    let out = automaton.add_state();
    automaton.add_tr(start, Tr::new(0, 0, TropicalWeight::one(), old))?;
    let word = Tr::new(id as _, id as _, TropicalWeight::new(cost), out);
    automaton.add_tr(start, word)?;
    automaton.set_final(out, TropicalWeight::one())?;
    automaton.set_start(start)?;
    Ok(())
}

fn optimised(mut automaton: Automaton) -> Result<Automaton, Trouble> {
    rm_epsilon(&mut automaton)?;
    push_weights_with_config(
        &mut automaton,
        ReweightType::ReweightToInitial,
        PushWeightsConfig::default(),
    )?;
    tr_sort(&mut automaton, ILabelCompare {});
    Ok(automaton)
}

/// States renumbered breadth-first along sorted arcs and costs rounded: the library's own numbers
/// follow the order of a hash map and differ from run to run.
fn canonical(automaton: &Automaton) -> Result<Automaton, Trouble> {
    let round = |w: &TropicalWeight| TropicalWeight::new((w.value() / GRAIN).round() * GRAIN);
    let mut numbers = vec![None; automaton.num_states()];
    let mut due = VecDeque::new();
    let mut out = Automaton::new();
    if let Some(start) = automaton.start() {
        numbers[start] = Some(out.add_state());
        out.set_start(0)?;
        due.push_back(start);
    }
    let mut next_number = 1;
    while let Some(old) = due.pop_front() {
        let Some(new) = numbers[old] else {
            continue;
        };
        if let Some(weight) = automaton.final_weight(old)? {
            out.set_final(new, round(&weight))?;
        }
        for arc in automaton.get_trs(old)?.trs() {
            let to = match numbers[arc.nextstate] {
                Some(number) => number,
                None => {
                    let number = out.add_state();
                    debug_assert_eq!(number, next_number);
                    next_number += 1;
                    numbers[arc.nextstate] = Some(number);
                    due.push_back(arc.nextstate);
                    number
                }
            };
            out.add_tr(new, Tr::new(arc.ilabel, arc.olabel, round(&arc.weight), to))?;
        }
    }
    Ok(out)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::speech::word_graph::{Arc, State};

    /// Arcs (word, cost, to) and the cost of stopping.
    type Drawn<'a> = (&'a [(&'a str, f32, usize)], Option<f32>);

    fn graph(states: &[Drawn<'_>]) -> WordGraph {
        WordGraph {
            start: 0,
            states: states
                .iter()
                .map(|(arcs, stop)| State {
                    arcs: arcs
                        .iter()
                        .map(|(word, cost, to)| Arc {
                            word: (!word.is_empty()).then(|| (*word).to_owned()),
                            cost: *cost,
                            to: *to,
                        })
                        .collect(),
                    stop: *stop,
                })
                .collect(),
        }
    }

    fn digits() -> (WordGraph, WordIds) {
        let graph = graph(&[
            (&[("", 0.0, 1), ("open", 3.0, 2)], None),
            (&[("one", 1.0, 3), ("two", 1.0, 3), ("two", 0.5, 3)], None),
            (&[("circuit", 0.0, 3)], None),
            (&[("", 0.25, 1), ("ohms", 0.5, 4)], Some(0.75)),
            (&[], Some(0.0)),
        ]);
        (
            graph,
            WordIds::new(["circuit", "ohms", "one", "open", "two", GARBAGE]),
        )
    }

    #[test]
    fn a_grammar_keeps_its_sentences_and_their_cheapest_costs() {
        let (graph, ids) = digits();
        let built = build(&graph, &ids, Some(4.0), "test").expect("built");
        let near = |sentence: &str, due: Option<f32>| {
            let got = cost(&built.automaton, &ids, sentence);
            let same = match (got, due) {
                (Some(a), Some(b)) => (a - b).abs() < 0.01,
                (a, b) => a == b,
            };
            assert!(same, "{sentence}: {got:?}, not {due:?}");
        };
        near("one", Some(1.75));
        near("two", Some(1.25));
        near("one two ohms", Some(1.0 + 0.25 + 0.5 + 0.5));
        near("open circuit", Some(3.75));
        near("open", None);
        near("ohms", None);
        near("", None);
        near("[unk]", Some(4.0));
        near("[unk] one", None);
        assert!(built.missing.is_empty());
    }

    #[test]
    fn the_same_graph_gives_the_same_bytes() {
        let (graph, ids) = digits();
        let bytes = || {
            let built = build(&graph, &ids, Some(4.0), "test").expect("built");
            super::super::to_bytes(&built.automaton, "test").expect("stored")
        };
        let first = bytes();
        for _ in 0..20 {
            assert_eq!(bytes(), first);
        }
    }

    #[test]
    fn words_the_voice_lacks_are_told_and_their_branches_fall_away() {
        let (graph, _) = digits();
        let ids = WordIds::new(["one", "two", "open", "ohms"]);
        let built = build(&graph, &ids, None, "test").expect("built");
        assert_eq!(built.missing, ["circuit"]);
        assert_eq!(cost(&built.automaton, &ids, "open"), None);
        let none = WordIds::new(["nothing"]);
        let error = build(&graph, &none, None, "test").expect_err("nothing is left");
        assert!(error.to_string().contains("nothing is left"), "{error}");
    }
}
