//! What was heard, to acts.
//!
//! Promises: a mishearing changes nothing but a counter and a line on the screen; two in a row at
//! one prompt offer the keypad and digit-by-digit entry; several meanings become a pick list. In
//! standby nothing but "resume" counts.

use crate::{
    domain::{reading::Reading, record::Entered},
    speech::meaning::{Control, Heard, Meaning, Reply},
};

use super::{
    act::{Act, How},
    effect::{Effect, Tone},
    entry::{meaning_text, spelled},
    event::Key,
    prompt::{Choice, DeadStep, Entry, List, Prompt},
    state::State,
};

impl State {
    pub(super) fn hear(&mut self, heard: Heard, out: &mut Vec<Effect>) {
        if matches!(self.top(), Prompt::Standby)
            && !matches!(heard.meaning, Meaning::Control(Control::Resume))
        {
            return;
        }
        let words = heard.words().to_owned();
        self.heard.clone_from(&words);
        let meaning = heard.meaning.clone();
        let how = How {
            entered: Entered::Voice,
            heard: Some(heard),
        };
        if self.by_digit(&words, &meaning, out) {
            return;
        }
        self.meaning(meaning, &how, out);
    }

    /// Does what a meaning says; also for a line picked from a list.
    pub(super) fn meaning(&mut self, meaning: Meaning, how: &How, out: &mut Vec<Effect>) {
        let act = match meaning {
            Meaning::Nothing(why) => return self.missed(&why, out),
            Meaning::Ambiguous(several) => return self.ambiguous(several, how, out),
            Meaning::Reading(reading) => match self.numbered(&reading) {
                Some(number) => {
                    if let Some(Prompt::Dead(dead)) = self.stack.last_mut() {
                        dead.number = number;
                    }
                    return self.understood(out);
                }
                None => Act::Value(Entry::Reading(reading)),
            },
            Meaning::Place(place) => Act::Go(place),
            Meaning::Reply(reply) => match reply {
                Reply::Affirm | Reply::Done => self.yes_or_tick(true),
                Reply::Negative => self.yes_or_tick(false),
                Reply::Pick(n) => Act::Pick(n),
                Reply::KeepAsFound => Act::KeepAsFound,
                Reply::MeasureAgain => Act::MeasureAgain,
            },
            Meaning::Control(Control::Confirmed) => Act::Value(Entry::Tick(true)),
            Meaning::Control(Control::NotConfirmed) => Act::Value(Entry::Tick(false)),
            Meaning::Control(Control::Test(test)) => Act::Test(test),
            Meaning::Control(Control::Stage(stage)) => Act::Stage(stage),
            Meaning::Control(Control::Reason(n)) => Act::Pick(n),
            Meaning::Control(Control::Correction(Some(inner))) => {
                return self.correction(*inner, how, out);
            }
            Meaning::Control(other) => Act::Command(other),
        };
        out.push(Effect::Tone(Tone::Understood));
        self.act(act, how, out);
    }

    /// Yes and no, which are the answer itself where a tick is asked for.
    fn yes_or_tick(&self, yes: bool) -> Act {
        match self.top() {
            Prompt::Ask(ask) if ask.target.test.unit().is_none() => Act::Value(Entry::Tick(yes)),
            _ if yes => Act::Yes,
            _ => Act::No,
        }
    }

    fn understood(&mut self, out: &mut Vec<Effect>) {
        out.push(Effect::Tone(Tone::Understood));
        out.push(Effect::Show);
    }

    /// The number of the voltage indicator, where that is asked for.
    fn numbered(&self, reading: &Reading) -> Option<String> {
        match self.top() {
            Prompt::Dead(dead) if dead.step == DeadStep::Number => {
                let figure = reading.figure();
                figure.chars().all(|c| c.is_ascii_digit()).then_some(figure)
            }
            _ => None,
        }
    }

    /// Digit-by-digit entry: the digits go where keys would put them.
    fn by_digit(&mut self, words: &str, meaning: &Meaning, out: &mut Vec<Effect>) -> bool {
        let Prompt::Ask(ask) = self.top() else {
            return false;
        };
        if !ask.by_digit {
            return false;
        }
        let target = ask.target.clone();
        let digits = match (spelled(words), meaning) {
            (Some(digits), _) => digits,
            (None, Meaning::Reading(reading)) => reading.figure(),
            (None, Meaning::Reply(Reply::Affirm | Reply::Done)) => {
                self.key(Key::Enter, out);
                return true;
            }
            (None, Meaning::Reply(Reply::Negative)) => {
                self.drafts.remove(&target);
                self.note("Rubbed out. Say the digits again.");
                out.push(Effect::Show);
                return true;
            }
            _ => return false,
        };
        self.note("Say the next digit, point, or affirm.");
        // A second point cannot belong to the same figure: the tester began again.
        if digits.contains('.') && self.drafts.get(&target).is_some_and(|d| d.contains('.')) {
            self.drafts.remove(&target);
        }
        for digit in digits.chars() {
            let key = match digit {
                '.' => Key::Point,
                '>' => Key::Plus,
                '<' => Key::Minus,
                d => match d.to_digit(10).and_then(|d| u8::try_from(d).ok()) {
                    Some(d) => Key::Digit(d),
                    None => return false,
                },
            };
            self.key(key, out);
        }
        let draft = self.drafts.get(&target).cloned().unwrap_or_default();
        self.say(super::utter::draft(&draft), out);
        true
    }

    /// Not understood. Twice in a row at a reading: another way is offered.
    pub(super) fn missed(&mut self, why: &str, out: &mut Vec<Effect>) {
        let mut text = format!("Not understood: {why}");
        let mut spoken = super::utter::AGAIN;
        if let Some(Prompt::Ask(ask)) = self.stack.first_mut() {
            ask.misses = ask.misses.saturating_add(1);
            if ask.misses >= 2 {
                text = "Not understood. Type it, or say: digit by digit.".into();
                spoken = super::utter::ANOTHER_WAY;
            }
        }
        self.refuse(text, out);
        out.push(Effect::Say(spoken.into()));
    }

    fn ambiguous(&mut self, several: Vec<Meaning>, how: &How, out: &mut Vec<Effect>) {
        let asking = match self.stack.first() {
            Some(Prompt::Ask(ask)) => Some(ask.clone()),
            _ => None,
        };
        let mut items: Vec<(String, Choice)> = Vec::new();
        for meaning in several.into_iter().take(List::PER_PAGE) {
            let choice = match (&meaning, &asking) {
                (Meaning::Reading(reading), Some(ask)) => {
                    match self.candidate(
                        ask,
                        Entry::Reading(reading.clone()),
                        how.entered,
                        how.heard.as_ref(),
                    ) {
                        Ok(candidate) => (
                            candidate.entry.to_string(),
                            Choice::Candidate(Box::new(candidate)),
                        ),
                        // It cannot be that one: the unit does not fit this test.
                        Err(_) => continue,
                    }
                }
                (Meaning::Reading(_), None) => continue,
                _ => (meaning_text(&meaning), Choice::Meaning(meaning)),
            };
            if !items.iter().any(|(text, _)| *text == choice.0) {
                items.push(choice);
            }
        }
        // An answer that may as well have been its opposite is no answer: ask again.
        let reply = |c: &Choice| matches!(c, Choice::Meaning(Meaning::Reply(_)));
        if items.is_empty() || items.iter().any(|(_, c)| reply(c)) {
            return self.missed("several meanings", out);
        }
        out.push(Effect::Tone(Tone::Refused));
        // The list lies over the question, unless that question was about an older hearing.
        while matches!(self.top(), Prompt::Confirm(_) | Prompt::List(_)) && self.stack.len() > 1 {
            self.stack.pop();
        }
        self.list("Which one?", items, out);
    }
}
