//! What testers say and do beside readings, and what the session answers: calls at an open link,
//! reasons in words, roger, the same again, a doubt inside the range, sound that was lost.

use handsfull::{
    domain::record::Record,
    session::{Event, Key, Prompt, StopCause, screen::screen},
};

use super::bench::{Bench, job};

/// The slip sockets up to their first reading of R1+R2.
fn at_the_slip() -> Bench {
    let mut bench = Bench::new(job(include_str!("jobs/radial.toml")));
    for reading in ["0.02", "0.01"] {
        bench.reach_reading();
        bench.script(&format!("{reading}\n\n"));
    }
    bench.reach_reading();
    bench
}

/// The same with all three readings in and the link to be taken out.
fn at_take_out() -> Bench {
    let mut bench = at_the_slip();
    for reading in ["0.23", "0.41", "0.59"] {
        bench.reach_reading();
        bench.script(&format!("{reading}\n\n"));
    }
    assert!(
        matches!(bench.state().top(), Prompt::TakeOut(_)),
        "{}",
        bench.text
    );
    bench
}

fn shown(bench: &Bench) -> String {
    let lines = screen(bench.state(), 40, 15);
    let lines: Vec<&str> = lines.iter().map(|l| l.text.as_str()).collect();
    lines.join("\n")
}

#[track_caller]
fn shows(bench: &Bench, text: &str) {
    // A notice may be broken where the screen ends.
    let flat = shown(bench)
        .split_whitespace()
        .collect::<Vec<_>>()
        .join(" ");
    assert!(flat.contains(text), "no `{text}` on\n{}", shown(bench));
}

fn kept(bench: &Bench, value: &str) -> bool {
    bench
        .records
        .iter()
        .any(|r| matches!(r, Record::Reading(r) if r.value == value))
}

#[test]
fn a_call_while_a_link_must_come_out_is_told_and_followed_afterwards() {
    let mut bench = at_take_out();
    bench.say("polarity");
    shows(&bench, "TAKE OUT");
    shows(&bench, "Then: DB1/3 Polarity");
    bench.say("done");
    bench.reach_reading();
    shows(&bench, "Polarity");
}

#[test]
fn link_removed_is_an_answer_where_a_link_is_to_be_taken_out() {
    let mut bench = at_take_out();
    bench.say("link removed");
    assert!(
        bench.state().standing().works_in.is_empty(),
        "{}",
        shown(&bench)
    );
    shows(&bench, "Off the list");
}

#[test]
fn link_in_is_an_answer_where_a_link_is_to_be_fitted_and_no_other_work_is_a_link() {
    let mut bench = Bench::new(job(include_str!("jobs/radial.toml")));
    bench.reach_reading();
    bench.script("0.02\n\n");
    while !matches!(bench.state().top(), Prompt::Fit(_)) {
        bench.take(Event::Key(Key::Enter));
    }
    bench.say("link in");
    shows(&bench, "Asked is: protective conductor off at one end");
    bench.say("done");
    bench.reach_reading();
    bench.script("0.01\n\n");
    while !matches!(bench.state().top(), Prompt::Fit(_)) {
        bench.take(Event::Key(Key::Enter));
    }
    bench.say("link fitted");
    assert!(
        matches!(bench.state().top(), Prompt::Ask(_)),
        "{}",
        shown(&bench)
    );
}

#[test]
fn a_correction_is_taken_where_a_link_is_to_be_taken_out() {
    let mut bench = at_take_out();
    bench.say("correction zero point five eight");
    shows(&bench, "0.58 Ω, right?");
    bench.say("affirm");
    assert!(kept(&bench, "0.58"));
    shows(&bench, "TAKE OUT");
}

#[test]
fn roger_means_received_and_affirms_nothing() {
    let mut bench = at_the_slip();
    bench.say("zero point two three");
    bench.say("roger");
    shows(&bench, "Roger means received, not yes");
    shows(&bench, "0.23 Ω, right?");
    assert!(!kept(&bench, "0.23"));
}

#[test]
fn the_same_again_needs_its_scope_and_is_read_back() {
    let mut bench = at_the_slip();
    bench.say("same as last point");
    shows(&bench, "No R1+R2 is kept here");
    bench.script("0.23\n\n");
    bench.say("same");
    shows(&bench, "Same as what?");
    bench.say("ditto");
    shows(&bench, "Same as what?");
    bench.say("same as point one");
    shows(&bench, "0.23 Ω, right?");
    shows(&bench, "BELOW the range");
    bench.say("negative");
    let before = bench.records.len();
    bench.script("0.41\n\n");
    bench.say("same as last point");
    shows(&bench, "0.41 Ω, right?");
    assert_eq!(bench.records.len(), before + 1, "nothing kept by itself");
}

#[test]
fn undo_drops_what_is_not_affirmed_and_says_how_a_kept_value_is_replaced() {
    let mut bench = at_the_slip();
    bench.say("zero point two three");
    bench.say("undo that");
    shows(&bench, "0.23 Ω dropped, not kept.");
    bench.say("undo");
    shows(&bench, "Nothing to drop. Correction replaces");
}

#[test]
fn reasons_are_taken_in_words_and_asked_once_more_when_they_come_alone() {
    let mut bench = at_the_slip();
    bench.say("no access");
    shows(&bench, "1 no access");
    shows(&bench, "This one?");
    let before = bench.records.len();
    bench.say("negative");
    assert_eq!(bench.records.len(), before);
    bench.say("skip");
    bench.say("cannot be disconnected");
    shows(&bench, "Left out: R1+R2, equipment cannot be");
    bench.say("skip no access");
    bench.say("affirm");
    shows(&bench, "Left out: R1+R2, no access");
}

#[test]
fn a_reading_kept_as_found_takes_its_reason_in_words() {
    let mut bench = at_the_slip();
    bench.say("zero point nine one");
    bench.say("affirm");
    bench.say("keep as found");
    shows(&bench, "Keep 0.91 Ω as found: why?");
    bench.say("no access");
    assert!(!kept(&bench, "0.91"));
    bench.say("fault found");
    assert!(kept(&bench, "0.91"));
    shows(&bench, "Kept as found: 0.91 Ω, fault, to be put right");
}

#[test]
fn a_doubt_inside_the_range_is_a_question_of_its_own() {
    // The upper end of the range: a thinner cable than planned explains it better than none.
    let mut bench = at_the_slip();
    bench.script("0.30\n\n");
    let Prompt::Question(candidate) = bench.state().top().clone() else {
        panic!("{}", shown(&bench));
    };
    assert!(!candidate.assessment.verdict.questioned());
    shows(&bench, "in range, but in doubt");
    assert!(!kept(&bench, "0.30"));
    bench.script("1\n1\n");
    assert!(kept(&bench, "0.30"), "{}", shown(&bench));
}

#[test]
fn lost_sound_is_told_counted_and_in_the_log_when_it_is_much() {
    let mut bench = at_the_slip();
    bench.take(Event::SoundLost(300));
    shows(&bench, "0.3 s of sound lost (0.3 s in all): say it again.");
    bench.take(Event::SoundLost(400));
    bench.take(Event::SoundLost(100));
    let told: Vec<String> = bench
        .records
        .iter()
        .filter_map(|r| match r {
            Record::Incident { what } => Some(what.clone()),
            _ => None,
        })
        .collect();
    assert_eq!(told, ["sound lost, machine too slow: 0.7 s in all"]);
    shows(&bench, "Reading in Ω?");
}

#[test]
fn a_sound_that_was_no_speech_is_told_where_the_line_is_free() {
    let mut bench = at_the_slip();
    bench.take(Event::Key(Key::Digit(2)));
    bench.take(Event::Key(Key::Erase));
    bench.take(Event::NoSpeech);
    shows(&bench, "A sound too short to be words.");
    bench.script("0.23\n\n");
    bench.take(Event::NoSpeech);
    shows(&bench, "Kept: 0.23 Ω");
}

#[test]
fn while_the_tool_speaks_the_screen_says_that_it_does_not_listen() {
    let mut bench = at_the_slip();
    bench.take(Event::Deaf(true));
    shows(&bench, "mic waits: tool speaks");
    bench.take(Event::Deaf(false));
    shows(&bench, "] open");
}

#[test]
fn what_a_full_disk_cost_is_known_at_the_end_unless_it_was_made_good() {
    let mut bench = at_the_slip();
    bench.script("0.23\n");
    bench.refusals = 1;
    bench.take(Event::Key(Key::Enter));
    shows(&bench, "NOT KEPT");
    bench.take(Event::Key(Key::Minus));
    assert_eq!(bench.state().unkept().len(), 1);
    bench.script("0.24\n\n");
    assert!(kept(&bench, "0.24"));
    assert!(bench.state().unkept().is_empty());
    bench.script("0.41\n");
    bench.refusals = 3;
    bench.take(Event::Key(Key::Enter));
    bench.take(Event::Stop(StopCause::Power));
    assert!(bench.quit);
    assert!(matches!(&bench.state().unkept()[0], Record::Reading(r) if r.value == "0.41"));
}

#[test]
fn a_spur_is_called_by_the_point_it_leaves() {
    let mut bench = Bench::new(job(include_str!("jobs/ring.toml")));
    for reading in ["0.00", "0.01"] {
        bench.reach_reading();
        bench.script(&format!("{reading}\n\n"));
    }
    for reading in ["0.44", "0.44", "0.72"] {
        bench.reach_reading();
        bench.script(&format!("{reading}\n\n"));
    }
    bench.reach_reading();
    shows(&bench, "cross-connected pt 1");
    bench.say("spur off two");
    shows(&bench, "pt 3");
    bench.say("spur off one");
    shows(&bench, "no single spur off point 1");
}

#[test]
fn after_a_long_sleep_isolation_is_proved_again_and_nothing_unaffirmed_is_kept() {
    let mut bench = at_the_slip();
    bench.script("0.23\n");
    bench.take(Event::ClockChanged("forward by 2 h".into()));
    bench.take(Event::LeftLong);
    shows(&bench, "Isolation, proving dead");
    shows(&bench, "Left for long");
    assert!(!kept(&bench, "0.23"));
    let proved = |b: &Bench| {
        let all = b.records.iter();
        all.filter(|r| matches!(r, Record::ProvedDead { .. }))
            .count()
    };
    let before = proved(&bench);
    bench.reach_reading();
    assert_eq!(proved(&bench), before + 1);
    shows(&bench, "R1+R2 pt 1");
    // Once proved again, it stays so.
    bench.script("0.23\n\n");
    shows(&bench, "R1+R2 pt 2");
}

#[test]
fn a_pressed_key_shows_that_it_listens_and_pressed_again_that_it_was_said() {
    let mut setup = handsfull::session::Setup::new(
        job(include_str!("jobs/radial.toml")),
        "A. Tester",
        handsfull::session::Settings {
            hold_to_talk: true,
            ..handsfull::session::Settings::default()
        },
    );
    setup.voice = Some("test voice".into());
    let mut bench = Bench::with(setup, handsfull::domain::standing::Standing::new());
    bench.reach_reading();
    shows(&bench, "on key");
    bench.take(Event::Key(Key::Talk));
    shows(&bench, "SPEAK");
    bench.take(Event::Speaking(true));
    shows(&bench, "HEARING");
    bench.take(Event::Key(Key::Talk));
    bench.take(Event::Speaking(false));
    bench.say("zero point zero two");
    shows(&bench, "0.02 Ω, right?");
    shows(&bench, "on key");
    bench.take(Event::Key(Key::Talk));
    bench.take(Event::NoSpeech);
    shows(&bench, "No words heard. Press and say it again.");
    shows(&bench, "on key");
}
