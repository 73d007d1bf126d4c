//! The screens a tester meets, 40 columns by 15 lines, to be read as documentation. The frame is
//! the test's; every line inside is as the terminal shows it.

use handsfull::session::{Event, Key, Prompt, screen::screen};

use super::bench::{Bench, job};

#[track_caller]
fn snap(bench: &Bench, name: &str) {
    let lines = screen(bench.state(), 40, 15);
    assert_eq!(lines.len(), 15);
    let mut text = format!("+{}+\n", "-".repeat(40));
    for line in lines {
        assert!(line.text.chars().count() <= 40);
        text.push_str(&format!("|{:40}|\n", line.text));
    }
    text.push_str(&format!("+{}+", "-".repeat(40)));
    insta::assert_snapshot!(name, text);
}

fn slip() -> Bench {
    Bench::new(job(include_str!("jobs/radial.toml")))
}

/// Enters readings, each affirmed, up to the next one.
fn up_to(bench: &mut Bench, readings: &[&str]) {
    for reading in readings {
        bench.reach_reading();
        bench.script(&format!("{reading}\n\n"));
    }
    bench.reach_reading();
}

fn until(bench: &mut Bench, there: impl Fn(&Prompt) -> bool) {
    for _ in 0..80 {
        match bench.state().top() {
            top if there(top) => return,
            Prompt::Dead(dead) if dead.method.is_none() => bench.take(Event::Key(Key::Digit(1))),
            _ => bench.take(Event::Key(Key::Enter)),
        }
    }
    panic!("never there:\n{}", bench.text);
}

#[test]
fn gates_and_proving_dead() {
    let mut bench = slip();
    snap(&bench, "gate_reminders_page_by_page");
    until(&mut bench, |p| matches!(p, Prompt::Dead(_)));
    snap(&bench, "dead_how_the_indicator_is_proved");
    bench.script("1\n4172");
    until(
        &mut bench,
        |p| matches!(p, Prompt::Dead(d) if d.step == handsfull::session::prompt::DeadStep::Dead),
    );
    snap(&bench, "dead_no_voltage_between_which");
}

#[test]
fn a_reading_from_prompt_to_kept() {
    let mut bench = slip();
    up_to(&mut bench, &["0.02", "0.01"]);
    bench.take(Event::Level(45));
    snap(&bench, "ask_what_to_connect_and_what_to_expect");
    for key in [Key::Digit(0), Key::Point, Key::Digit(2)] {
        bench.take(Event::Key(key));
    }
    snap(&bench, "ask_half_typed");
    bench.say("zero point two three");
    snap(&bench, "confirm_heard_and_read_back");
    bench.say("affirm");
    snap(&bench, "ask_after_kept");
    bench.say("zero point nine one");
    snap(&bench, "confirm_out_of_range");
    bench.say("affirm");
    snap(&bench, "question_out_of_range");
    bench.say("keep as found");
    snap(&bench, "list_of_reasons");
}

#[test]
fn doubts_misses_and_two_values_at_once() {
    let mut bench = slip();
    up_to(&mut bench, &["0.02", "0.01"]);
    bench.script("0.30\n\n");
    snap(&bench, "question_in_range_but_in_doubt");
    bench.script("2");
    for _ in 0..2 {
        bench.hear(
            "",
            handsfull::speech::meaning::Meaning::Nothing("noise".into()),
        );
    }
    snap(&bench, "ask_after_two_misses_another_way");
    bench.hear(
        "zero point two five",
        handsfull::speech::meaning::Meaning::Ambiguous(vec![
            handsfull::speech::meaning::Meaning::Reading("0.25".parse().expect("a reading")),
            handsfull::speech::meaning::Meaning::Reading("0.29".parse().expect("a reading")),
        ]),
    );
    snap(&bench, "pick_which_of_two_hearings");
}

#[test]
fn works_to_fit_and_to_take_out() {
    let mut bench = slip();
    up_to(&mut bench, &["0.02", "0.01"]);
    let mut fit = slip();
    up_to(&mut fit, &[]);
    fit.script("0.02\n\n");
    until(&mut fit, |p| matches!(p, Prompt::Fit(_)));
    snap(&fit, "fit_before_the_test");
    until(&mut fit, |p| matches!(p, Prompt::Ask(_)));
    snap(&fit, "ask_with_a_work_in");
    up_to(&mut bench, &["0.23", "0.41"]);
    bench.script("0.59\n\n");
    snap(&bench, "take_out_before_the_next_test");
    bench.say("polarity");
    snap(&bench, "take_out_with_a_call_remembered");
    bench.say("list links");
    snap(&bench, "list_of_links_in");
}

#[test]
fn lists_menu_help_why_and_standby() {
    let mut bench = slip();
    up_to(&mut bench, &["0.02", "0.01"]);
    bench.script("*3");
    snap(&bench, "list_of_what_is_open");
    bench.script("-*");
    snap(&bench, "menu");
    bench.script("*\n*1");
    snap(&bench, "call_a_circuit");
    bench.script("-\n?");
    snap(&bench, "help_keys_on_one_screen");
    bench.take(Event::Key(Key::Enter));
    snap(&bench, "help_words");
    bench.take(Event::Key(Key::Enter));
    bench.script("*5");
    snap(&bench, "why_and_how");
    bench.script("-");
    bench.say("standby");
    snap(&bench, "standby");
}

#[test]
fn trouble_holding_and_the_end() {
    let mut bench = slip();
    up_to(&mut bench, &["0.02", "0.01"]);
    bench.script("0.23\n");
    bench.refusals = 1;
    bench.take(Event::Key(Key::Enter));
    snap(&bench, "trouble_not_kept");
    bench.take(Event::Key(Key::Enter));
    for reading in ["0.41", "0.59"] {
        bench.reach_reading();
        bench.script(&format!("{reading}\n\n"));
    }
    bench.reach_reading();
    bench.script("+299\n\n");
    until(&mut bench, |p| {
        matches!(p, Prompt::Hold(_) | Prompt::Ask(_))
    });
    for _ in 0..2 {
        if matches!(bench.state().top(), Prompt::Hold(_)) {
            break;
        }
        bench.script("+299\n\n");
    }
    bench.take(Event::Tick(4_000));
    snap(&bench, "hold_until_discharged");
    bench.say("stop");
    snap(&bench, "end_the_session");
    bench.take(Event::Key(Key::Minus));
    bench.take(Event::DeviceLost);
    snap(&bench, "microphone_gone");
}
