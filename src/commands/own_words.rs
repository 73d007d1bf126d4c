//! A job's own names of places: what may be said for them, and how they sound.
//!
//! It promises that a name whose sounds cannot be used takes nothing else with it: it is told, and
//! its sounds are guessed. It leaves out how a guess is made (`speech::guess`).

use super::{
    failure::{Failure, Kind},
    voice::lexicon,
};
use crate::{
    domain::{
        place::Place,
        plan::{Job, PlaceName},
    },
    speech::{
        Phrases,
        lexicon::{Lexicon, Pronunciation},
        spelling,
    },
};

/// What may be said in a job: the grammars with its own names.
///
/// # Errors
/// A [`Failure`] when a name already means something.
pub(super) fn phrases(job: Option<&Job>) -> Result<Phrases, Failure> {
    let names: Vec<(String, Place)> = job
        .iter()
        .flat_map(|job| &job.place_names)
        .map(|name| {
            let place = Place {
                board: name.board.clone(),
                circuit: name.circuit,
                ..Place::default()
            };
            (name.name.clone(), place)
        })
        .collect();
    Phrases::with_places(&names).map_err(|e| Failure::new(Kind::Input, e))
}

/// The pronunciations with those of the job's own names, and what could not be used of them.
///
/// # Errors
/// As [`lexicon`].
pub(super) fn pronounced(job: Option<&Job>) -> Result<(Lexicon, Vec<String>), Failure> {
    let mut known = lexicon()?;
    let mut troubles = Vec::new();
    for name in job.iter().flat_map(|job| &job.place_names) {
        if let Err(why) = add(&mut known, name) {
            troubles.push(why);
        }
    }
    Ok((known, troubles))
}

fn add(lexicon: &mut Lexicon, name: &PlaceName) -> Result<(), String> {
    let added = lexicon
        .add_name(&name.name, &name.say)
        .map_err(|e| format!("{e}; guessed from the spelling instead"));
    if added.is_err() {
        // Without given sounds nothing can be wrong with them.
        let _guessed = lexicon.add_name(&name.name, &[]);
    }
    added
}

/// How the recogniser expects a name to sound, for the user to read back, and where each word's
/// sounds come from.
///
/// # Errors
/// As [`lexicon`].
pub(super) fn told(name: &PlaceName) -> Result<String, Failure> {
    let Sounds {
        ways,
        guessed,
        given,
        trouble,
    } = sounds(name)?;
    let said: Vec<String> = ways.iter().map(plainly).collect();
    let phones: Vec<String> = ways.iter().map(spelled).collect();
    let mut line = format!(
        "Place \"{}\" is listened for as \"{}\" ({})",
        name.name,
        said.join(" "),
        phones.join(" / ")
    );
    line.push_str(&match (&guessed[..], given) {
        (_, true) => ", as given.".to_owned(),
        ([], _) => ", from the dictionary.".to_owned(),
        (guessed, _) => format!(
            "; {} guessed from the spelling. If it is said otherwise: say = [\"{}\"], corrected; \
             `handsfull soundcheck --job FILE` tries it by voice.",
            guessed.join(" and "),
            phones.join(" / ")
        ),
    });
    if let Some(trouble) = trouble {
        line.push_str(&format!(" {trouble}."));
    }
    Ok(line)
}

/// The sounds of a name's words in which something was guessed or given, so worth hearing.
///
/// # Errors
/// As [`lexicon`].
pub(super) fn unsure(name: &PlaceName) -> Result<Option<Vec<Pronunciation>>, Failure> {
    let sounds = sounds(name)?;
    Ok((sounds.given || !sounds.guessed.is_empty()).then_some(sounds.ways))
}

/// How a name's words sound, and why.
struct Sounds {
    ways: Vec<Pronunciation>,
    guessed: Vec<String>,
    given: bool,
    trouble: Option<String>,
}

fn sounds(name: &PlaceName) -> Result<Sounds, Failure> {
    let before = lexicon()?;
    let mut after = lexicon()?;
    let trouble = add(&mut after, name).err();
    let given = trouble.is_none() && !name.say.is_empty();
    let words = spelling::words(&name.name);
    let sounds = |word: &String| {
        let ways = after.get(word);
        // What was given stands after what the word had.
        let way = if given { ways.last() } else { ways.first() };
        way.cloned().unwrap_or_default()
    };
    let ways: Vec<Pronunciation> = words.iter().map(sounds).collect();
    let guessed: Vec<String> = words
        .iter()
        .filter(|word| !given && before.get(word).is_empty())
        .cloned()
        .collect();
    Ok(Sounds {
        ways,
        guessed,
        given,
        trouble,
    })
}

fn spelled(way: &Pronunciation) -> String {
    let names: Vec<&str> = way.iter().map(|phone| phone.name()).collect();
    names.join(" ")
}

/// Sounds in letters that most English readers read aloud the same way.
fn plainly(way: &Pronunciation) -> String {
    let letters = |name| match name {
        "AA" => "ah",
        "AE" => "a",
        "AH" => "u",
        "AO" => "aw",
        "AW" => "ow",
        "AY" => "igh",
        "EH" => "e",
        "ER" => "er",
        "EY" => "ay",
        "HH" => "h",
        "IH" => "i",
        "IY" => "ee",
        "JH" => "j",
        "OW" => "oh",
        "OY" => "oy",
        "UH" => "oo",
        "UW" => "oo",
        other => other,
    };
    let text: String = way.iter().map(|phone| letters(phone.name())).collect();
    text.to_lowercase()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{
        domain::place::BoardId,
        speech::Context,
        voice::{base::Base, ready},
    };

    fn place(name: &str, say: &[&str]) -> PlaceName {
        PlaceName {
            name: name.into(),
            say: say.iter().map(|s| (*s).to_owned()).collect(),
            board: BoardId::new("DB2").ok(),
            circuit: None,
        }
    }

    #[test]
    fn a_guess_can_be_read_back_and_what_was_given_is_taken() {
        let line = told(&place("quern loft", &[])).expect("told");
        assert!(line.contains("quern and loft guessed"), "{line}");
        assert!(line.contains("\"kwern lahft\""), "{line}");
        let line = told(&place("quern loft", &["K W AO N / L AO F T"])).expect("told");
        assert!(
            line.ends_with("\"kwawn lawft\" (K W AO N / L AO F T), as given."),
            "{line}"
        );
        let line = told(&place("main switch", &[])).expect("told");
        assert!(line.ends_with("from the dictionary."), "{line}");
        let line = told(&place("quern", &["OO"])).expect("told");
        assert!(line.contains("guessed from the spelling instead"), "{line}");
    }

    #[test]
    fn every_word_of_a_job_with_odd_names_has_sounds_and_a_graph_is_built() {
        let text = include_str!("../../tests/fixtures/workshop.toml");
        let mut job = crate::plan::parse(text, "workshop.toml").expect("a job");
        job.place_names = vec![place("quern loft", &["nonsense"])];
        let phrases = phrases(Some(&job)).expect("sayable");
        let (lexicon, troubles) = pronounced(Some(&job)).expect("a lexicon");
        assert_eq!(troubles.len(), 1, "{troubles:?}");
        let graph = phrases.word_graph(Context::Ohms);
        assert!(graph.words().contains(&"quern"));
        lexicon.covers(&graph, "ohms").expect("every word");
        if let Ok(base) = Base::embedded() {
            let recipe = ready::recipe(base, &phrases, &lexicon);
            let out = tempfile::tempdir().expect("a folder");
            recipe.build_into(&out.path().join("voice")).expect("built");
        }
    }
}
