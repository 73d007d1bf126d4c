//! The subset, and what is said about everything outside it.

use super::{Expansion, parse};
use crate::speech::{library::Library, net::Net, word_graph::WordGraph};

const HEAD: &str = "#ABNF 1.0 UTF-8;\nlanguage en-GB;\nroot $a;\n";

/// The message for a grammar whose rules (from line 4) are `rules`.
#[track_caller]
fn refused(rules: &str, message: &str) {
    let text = format!("{HEAD}{rules}");
    let error = parse("t.abnf", &text)
        .map(|_| ())
        .map_err(|error| error.to_string());
    assert_eq!(error, Err(message.to_owned()));
}

/// The phrases of a grammar's root with their probabilities, best first.
#[track_caller]
fn says(rules: &str, expected: &[(&str, f32)]) {
    let text = format!("{HEAD}{rules}");
    let library = Library::from_texts([("t.abnf", text.as_str())]).expect("the grammar");
    let net = Net::compile(&library, "t.abnf", None).expect("the network");
    let graph = WordGraph::of(&net);
    let mut total = 0.0;
    for (phrase, probability) in expected {
        let words: Vec<&str> = phrase.split_whitespace().collect();
        let cost = graph.cost(&words).unwrap_or_else(|| panic!("{phrase}"));
        assert!(
            ((-cost).exp() - probability).abs() < 1e-3,
            "{phrase}: {}",
            (-cost).exp()
        );
        total += probability;
    }
    assert!((total - 1.0).abs() < 1e-3, "other phrases may be said too");
}

#[test]
fn alternatives_have_their_weights() {
    says("$a = /3/ one | /1/ two;", &[("one", 0.75), ("two", 0.25)]);
    says(
        "$a = one | two | three | four;",
        &[
            ("one", 0.25),
            ("two", 0.25),
            ("three", 0.25),
            ("four", 0.25),
        ],
    );
}

#[test]
fn optional_parts_groups_and_repeats() {
    says("$a = one [two];", &[("one", 0.5), ("one two", 0.5)]);
    says(
        "$a = one (two | three) \"four five\";",
        &[("one two four five", 0.5), ("one three four five", 0.5)],
    );
    says("$a = one<2>;", &[("one one", 1.0)]);
    says(
        "$a = one<1-3 /0.2/>;",
        &[("one", 0.8), ("one one", 0.16), ("one one one", 0.04)],
    );
    says(
        "$a = $b two;\n$b = one | $NULL;",
        &[("one two", 0.5), ("two", 0.5)],
    );
}

#[test]
fn what_can_never_be_said_leaves_no_dead_ends() {
    let text = format!("{HEAD}$a = one two $VOID | three;");
    let library = Library::from_texts([("t.abnf", text.as_str())]).expect("the grammar");
    let net = Net::compile(&library, "t.abnf", None).expect("the network");
    assert_eq!(WordGraph::of(&net).words(), ["three"]);
}

#[test]
fn comments_and_examples() {
    let text = format!(
        "{HEAD}// a comment\n/** Numbers.\n  * @example one two\n  */\npublic $a = one /* no */ two; // end"
    );
    let grammar = parse("t.abnf", &text).expect("the grammar");
    let rule = &grammar.rules["a"];
    assert_eq!(rule.examples, ["one two"]);
    assert!(rule.public);
    assert_eq!(
        rule.expansion,
        Expansion::Sequence(vec![
            Expansion::Word("one".into()),
            Expansion::Word("two".into())
        ])
    );
}

#[test]
fn mistakes_are_named_with_line_and_remedy() {
    refused(
        "$a = one | ;",
        "t.abnf:4: an alternative is empty; write $NULL where nothing need be said",
    );
    refused(
        "$a = one\n",
        "t.abnf:4: the end of the file after the expansion of $a; `;` belongs there",
    );
    refused(
        "$a = (one;",
        "t.abnf:4: `;` after a group; `)` belongs there",
    );
    refused(
        "$a = One;",
        "t.abnf:4: `One` has capitals; spoken words are written in lower case",
    );
    refused(
        "$a =\n $b;",
        "t.abnf:5: $b is not defined in this file; define it, or name the file it is in: \
         $<file.abnf#rule>",
    );
    refused(
        "$a = one;\n$a = two;",
        "t.abnf:5: $a is defined twice; give one of them another name",
    );
    refused(
        "$b = one;",
        "t.abnf:1: the root $a is not defined; name a rule of this file",
    );
    refused(
        "$a = one<1->;",
        "t.abnf:4: `<1->` is no repeat; write <2>, <0-1> or <1-4 /0.5/>, at most 20 times",
    );
    refused(
        "$a = /x/ one;",
        "t.abnf:4: `/x/` is no weight; write a number above zero, such as /3/ or /0.5/",
    );
    refused(
        "$a = {one;",
        "t.abnf:4: a tag is not closed; close it with `}`",
    );
    refused(
        "$a = $GARBAGE;",
        "t.abnf:4: $GARBAGE is not in the subset; noise and talk are rejected by the voice, not by \
         a grammar",
    );
    refused(
        "base <x>;",
        "t.abnf:4: `base` is no declaration of the subset; language, mode, root and tag-format \
         are; a rule begins with `$` or `public $`",
    );
    refused(
        "mode dtmf;\n$a = one;",
        "t.abnf:4: `dtmf` as mode; write `mode voice;`",
    );
    let error = parse("t.abnf", "language en-GB;").expect_err("no header");
    assert_eq!(
        error.to_string(),
        "t.abnf:1: the file does not begin with its header; begin it with `#ABNF 1.0 UTF-8;`"
    );
}

/// The message for a pair of files whose second is compiled.
#[track_caller]
fn does_not_compile(other: &str, rules: &str, message: &str) {
    let other = format!("#ABNF 1.0 UTF-8;\nlanguage en-GB;\n{other}");
    let text = format!("{HEAD}{rules}");
    let library = Library::from_texts([("o.abnf", other.as_str()), ("t.abnf", text.as_str())])
        .expect("the grammars");
    let error = Net::compile(&library, "t.abnf", None).expect_err(message);
    assert_eq!(error.to_string(), message);
}

#[test]
fn references_between_files_are_checked() {
    does_not_compile(
        "$b = one;",
        "$a = $<o.abnf#b>;",
        "t.abnf:4: $b of o.abnf is not public; write `public` before it where it is defined",
    );
    does_not_compile(
        "public $b = one;",
        "$a = $<o.abnf#c>;",
        "t.abnf:4: o.abnf has no rule $c; name a rule of that file",
    );
    does_not_compile(
        "public $b = one;",
        "$a = $<o.abnf>;",
        "t.abnf:4: o.abnf has no root; name the rule: $<file.abnf#rule>",
    );
    does_not_compile(
        "public $b = one;",
        "$a = $<p.abnf#b>;",
        "t.abnf:4: there is no grammar file p.abnf; name one of the files under grammars/",
    );
    does_not_compile(
        "public $b = $<t.abnf#a>;",
        "public $a = one | $<o.abnf#b>;",
        "t.abnf:4: $a leads to itself; spoken phrases are finite: use a repeat such as <1-4>",
    );
    does_not_compile(
        "public $b = one;",
        "$a = one {sideways};",
        "t.abnf:4: the tag {sideways} means nothing; use a tag of the list in speech::tag",
    );
}
