//! Properties of the grammars: everything that may be said is understood, nothing else is; what the
//! tool reads back means what it was; another parser agrees; commands sound unlike each other.

use std::collections::BTreeMap;

use handsfull::{
    domain::{
        place::{BoardId, CircuitNo, Line, Place, PointNo},
        reading::{Bound, Reading, Unit},
    },
    speech::{
        Context, Meaning, Phrases, help::examples, lexicon::Lexicon, library::file_of, net::Net,
        say, spelling, understand, word_graph::WordGraph,
    },
};
use proptest::prelude::*;
use rust_decimal::Decimal;

/// A phrase of a graph, by a walk that `choices` steer.
fn walk(graph: &WordGraph, choices: &[u16]) -> Vec<String> {
    let mut words = Vec::new();
    let mut state = graph.start;
    for &choice in choices {
        let here = &graph.states[state];
        let ways = here.arcs.len() + usize::from(here.stop.is_some());
        let way = usize::from(choice) % ways;
        let Some(arc) = here.arcs.get(way) else {
            return words;
        };
        words.extend(arc.word.clone());
        state = arc.to;
    }
    // Out of choices: the shortest way to an end is to take the first arc until one is reached.
    while graph.states[state].stop.is_none() {
        let arc = &graph.states[state].arcs[0];
        words.extend(arc.word.clone());
        state = arc.to;
    }
    words
}

fn graphs() -> &'static BTreeMap<Context, WordGraph> {
    static GRAPHS: std::sync::OnceLock<BTreeMap<Context, WordGraph>> = std::sync::OnceLock::new();
    GRAPHS.get_or_init(|| {
        Context::EVERY
            .map(|context| (context, Phrases::plain().word_graph(context)))
            .into()
    })
}

fn in_graph(context: Context, words: &[&str]) -> bool {
    graphs()[&context].cost(words).is_some()
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(1500))]

    #[test]
    fn every_phrase_of_a_grammar_is_understood(
        which in 0..Context::EVERY.len(),
        choices in prop::collection::vec(any::<u16>(), 1..16),
    ) {
        let context = Context::EVERY[which];
        let words = walk(&graphs()[&context], &choices).join(" ");
        let meaning = understand(context, &words);
        prop_assert!(!matches!(meaning, Meaning::Nothing(_)), "{context:?} {words}: {meaning:?}");
        // What a recogniser writes goes through the spelling table unchanged.
        prop_assert_eq!(spelling::words(&words).join(" "), words);
    }

    #[test]
    fn nothing_but_phrases_of_the_grammar_is_understood(
        which in 0..Context::EVERY.len(),
        choices in prop::collection::vec(any::<u16>(), 1..10),
        at in any::<prop::sample::Index>(),
        change in 0..3,
        from in any::<prop::sample::Index>(),
    ) {
        let context = Context::EVERY[which];
        let mut words = walk(&graphs()[&context], &choices);
        let vocabulary = graphs()[&context].words();
        let at = at.index(words.len());
        match change {
            0 => { words.remove(at); }
            1 => words.insert(at, (*from.get(&vocabulary)).to_owned()),
            _ => words[at] = (*from.get(&vocabulary)).to_owned(),
        }
        let words: Vec<&str> = words.iter().map(String::as_str).collect();
        // Typed "board a" is spelled out, which changes the words: compare after the spelling.
        let spelled = spelling::words(&words.join(" "));
        let spelled: Vec<&str> = spelled.iter().map(String::as_str).collect();
        let understood = !matches!(understand(context, &words.join(" ")), Meaning::Nothing(_));
        prop_assert_eq!(understood, in_graph(context, &spelled), "{:?} {:?}", context, spelled);
    }

    #[test]
    fn a_reading_read_back_means_the_same_reading(
        digits in 0_i64..1_000_000,
        scale in 0_u32..5,
        bound in prop::sample::select(vec![Bound::Exact, Bound::Above, Bound::Below]),
        unit in prop::option::of(prop::sample::select(Unit::ALL.to_vec())),
    ) {
        let reading = Reading::new(Decimal::new(digits, scale), bound, unit).expect("in bounds");
        let words = say::reading(&reading);
        let Meaning::Reading(back) = understand(Context::All, &words) else {
            return Err(TestCaseError::fail(format!("{reading}: {words}")));
        };
        prop_assert_eq!(back.figure(), reading.figure(), "{}", &words);
        prop_assert_eq!(back.unit(), reading.unit(), "{}", &words);
    }

    #[test]
    fn a_place_read_back_means_the_same_place(
        board in prop::option::of("[A-Z]{1,3}([1-9][0-9]?)?"),
        way in prop::option::of(1_u16..200),
        line in prop::option::of(prop::sample::select(vec![Line::L1, Line::L2, Line::L3])),
        point in prop::option::of(1_u16..100),
    ) {
        let place = Place {
            board: board.map(|b| BoardId::new(&b).expect("letters and digits")),
            circuit: way.map(|way| CircuitNo::new(way, line).expect("1 to 199")),
            point: point.map(PointNo),
            spur: point.is_some_and(|n| n % 3 == 0),
            name: None,
        };
        prop_assume!(place != Place::default());
        let words = say::place(&place);
        prop_assert_eq!(understand(Context::All, &words), Meaning::Place(place), "{}", &words);
    }

    /// Oracle: the crate text2num, which reads English cardinals and "point" with digits.
    #[test]
    fn another_parser_reads_the_same_numbers(n in 0_u32..99_999, tail in prop::option::of("[0-9]{1,4}")) {
        let mut words = cardinal(n);
        let mut figure = n.to_string();
        if let Some(tail) = &tail {
            words.push_str(" point");
            for c in tail.chars() {
                words.push(' ');
                words.push_str(&cardinal(c.to_digit(10).expect("a digit")));
            }
            figure = format!("{figure}.{tail}");
        }
        let language = text2num::Language::english();
        let theirs = text2num::replace_numbers_in_text(&words, &language, 0.0);
        let Meaning::Reading(ours) = understand(Context::All, &words) else {
            return Err(TestCaseError::fail(words));
        };
        prop_assert_eq!(&theirs, &figure, "{}", &words);
        prop_assert_eq!(ours.figure(), theirs, "{}", &words);
    }
}

/// A whole number in British English words: "one thousand and five".
fn cardinal(n: u32) -> String {
    const SMALL: [&str; 20] = [
        "zero",
        "one",
        "two",
        "three",
        "four",
        "five",
        "six",
        "seven",
        "eight",
        "nine",
        "ten",
        "eleven",
        "twelve",
        "thirteen",
        "fourteen",
        "fifteen",
        "sixteen",
        "seventeen",
        "eighteen",
        "nineteen",
    ];
    const TENS: [&str; 10] = [
        "", "", "twenty", "thirty", "forty", "fifty", "sixty", "seventy", "eighty", "ninety",
    ];
    match n {
        0..20 => SMALL[n as usize].into(),
        20..100 => {
            let tens = TENS[(n / 10) as usize];
            match n % 10 {
                0 => tens.into(),
                one => format!("{tens} {}", SMALL[one as usize]),
            }
        }
        100..1000 => {
            let hundreds = SMALL[(n / 100) as usize];
            match n % 100 {
                0 => format!("{hundreds} hundred"),
                rest => format!("{hundreds} hundred and {}", cardinal(rest)),
            }
        }
        _ => {
            let thousands = cardinal(n / 1000);
            match n % 1000 {
                0 => format!("{thousands} thousand"),
                rest @ 1..100 => format!("{thousands} thousand and {}", cardinal(rest)),
                rest => format!("{thousands} thousand {}", cardinal(rest)),
            }
        }
    }
}

#[test]
fn every_example_shown_as_help_is_understood_where_it_is_shown() {
    for context in Context::EVERY {
        let shown = examples(Phrases::plain().library(), &file_of(context));
        assert!(!shown.is_empty(), "{} shows nothing", context.name());
        for example in shown {
            let meaning = understand(context, &example);
            assert!(
                !matches!(meaning, Meaning::Nothing(_)),
                "{}: {example}: {meaning:?}",
                context.name()
            );
        }
        for line in Phrases::plain().help(context) {
            assert!(line.chars().count() <= 38, "too wide: {line}");
        }
    }
}

/// Every phrase of a graph of at most `longest` words.
fn phrases(graph: &WordGraph, longest: usize) -> Vec<Vec<String>> {
    let mut found = Vec::new();
    let mut todo = vec![(graph.start, Vec::new())];
    while let Some((state, words)) = todo.pop() {
        if graph.states[state].stop.is_some() {
            found.push(words.clone());
        }
        if words.len() < longest {
            for arc in &graph.states[state].arcs {
                let mut words: Vec<String> = words.clone();
                words.extend(arc.word.clone());
                todo.push((arc.to, words));
            }
        }
    }
    found.sort();
    found.dedup();
    found
}

/// Levenshtein distance.
fn distance<T: PartialEq>(a: &[T], b: &[T]) -> usize {
    let mut row: Vec<usize> = (0..=b.len()).collect();
    for (i, x) in a.iter().enumerate() {
        let mut corner = row[0];
        row[0] = i + 1;
        for (j, y) in b.iter().enumerate() {
            let changed = corner + usize::from(x != y);
            corner = row[j + 1];
            row[j + 1] = changed.min(corner + 1).min(row[j] + 1);
        }
    }
    row[b.len()]
}

#[test]
fn commands_differ_in_more_than_one_sound_from_all_that_is_said_beside_them() {
    let lexicon = Lexicon::built_in().expect("the built-in file");
    let library = Phrases::plain().library();
    let rules = [
        ("control.abnf", "command"),
        ("replies.abnf", "yes_no"),
        ("replies.abnf", "out_of_range"),
        ("replies.abnf", "pick"),
        ("replies.abnf", "done"),
        ("replies.abnf", "outcome_short"),
    ];
    let commands: Vec<Vec<String>> = rules
        .iter()
        .flat_map(|(file, rule)| {
            let net = Net::compile(library, file, Some(rule)).expect("a public rule");
            phrases(&WordGraph::of(&net), 5)
        })
        .collect();
    // The first two pronunciations: the others are rare and would make everything alike.
    let sounds = |words: &[String]| -> Vec<Vec<_>> {
        let mut ways = vec![Vec::new()];
        for word in words {
            let said = lexicon.get(word);
            ways = ways
                .iter()
                .flat_map(|way| {
                    said.iter().take(2).map(move |said| {
                        let mut way: Vec<_> = way.clone();
                        way.extend(said.iter().copied());
                        way
                    })
                })
                .collect();
        }
        ways
    };
    let mut near = Vec::new();
    // `all` is the union of the prompts, for recordings and typed words; no session listens to it.
    for context in Context::EVERY.into_iter().filter(|c| *c != Context::All) {
        let beside: Vec<_> = phrases(&graphs()[&context], 2)
            .into_iter()
            .map(|words| (understand(context, &words.join(" ")), sounds(&words), words))
            .collect();
        for command in &commands {
            let meaning = understand(context, &command.join(" "));
            if matches!(meaning, Meaning::Nothing(_)) {
                continue;
            }
            let ways = sounds(command);
            for (other, other_ways, words) in &beside {
                let alike = ways
                    .iter()
                    .any(|a| other_ways.iter().any(|b| distance(a, b) < 2));
                if alike && *other != meaning {
                    near.push(format!(
                        "{}: \"{}\" and \"{}\"",
                        context.name(),
                        command.join(" "),
                        words.join(" ")
                    ));
                }
            }
        }
    }
    assert!(near.is_empty(), "{}", near.join("\n"));
}
