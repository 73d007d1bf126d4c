//! From a key to the lines of the screen, and from the first event to the first prompt.

use handsfull::{
    domain::standing::Standing,
    plan,
    session::{self, Effect, Event, Key, Prompt, Settings, Setup, State, screen::screen},
};

fn main() {
    divan::main();
}

fn setup() -> Setup {
    let text = include_str!("../tests/fixtures/workshop.toml");
    let job = plan::parse(text, "workshop.toml").expect("a job");
    Setup::new(job, "A. Tester", Settings::default())
}

/// Takes an event and answers every record.
fn take(state: State, event: Event) -> State {
    let (mut state, mut effects) = session::step(state, event);
    while effects.iter().any(|e| matches!(e, Effect::Keep(_))) {
        let no = state.standing().last + 1;
        (state, effects) = session::step(state, Event::Kept(no));
    }
    state
}

/// A session that asks for its first reading.
fn at_reading() -> State {
    let (state, _) = session::begin(setup(), Standing::new());
    let mut state = take(state, Event::Kept(1));
    while !matches!(state.top(), Prompt::Ask(_)) {
        let key = match state.top() {
            Prompt::Dead(dead) if dead.method.is_none() => Key::Digit(1),
            _ => Key::Enter,
        };
        state = take(state, Event::Key(key));
    }
    state
}

#[divan::bench]
fn key_to_screen(bencher: divan::Bencher) {
    let state = at_reading();
    bencher
        .with_inputs(|| state.clone())
        .bench_values(|state| screen(&take(state, Event::Key(Key::Digit(7))), 40, 15));
}

#[divan::bench]
fn affirm_to_next_prompt_on_screen(bencher: divan::Bencher) {
    let mut state = at_reading();
    for key in [Key::Digit(0), Key::Point, Key::Digit(1), Key::Enter] {
        state = take(state, Event::Key(key));
    }
    bencher
        .with_inputs(|| state.clone())
        .bench_values(|state| screen(&take(state, Event::Key(Key::Enter)), 40, 15));
}

#[divan::bench]
fn first_prompt(bencher: divan::Bencher) {
    bencher.with_inputs(setup).bench_values(|setup| {
        let (state, _) = session::begin(setup, Standing::new());
        screen(&take(state, Event::Kept(1)), 40, 15)
    });
}
