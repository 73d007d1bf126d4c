//! `handsfull field`: work a job: next test, expected range, reading by voice or keypad

use std::{
    cell::Cell,
    io::{self, BufReader, IsTerminal, Write},
    path::{Path, PathBuf},
    rc::Rc,
    sync::{Arc, mpsc::Receiver},
};

use clap::Args as ClapArgs;

use super::{
    failure::{Failure, Kind},
    own_words,
};
use crate::{
    app::{
        self, Edges, Events, Show, Voice,
        clock::Clock,
        ledger::{JournalLedger, wall_clock},
        listening::{self, Where},
        settings,
        sound::Sound,
    },
    domain::{plan::Job, record::Record},
    journal::{
        Journal, JournalError,
        clips::{Clips, Keeping},
    },
    plan,
    session::{Event, Settings, Setup, State, Tone},
    speech::{
        Phrases,
        meaning::{Context, Heard, Hypothesis},
    },
    terminal::{
        keyboard::{Keyboard, Raw, Signals},
        keymap::Keymap,
        lines::Lines,
        plain::Plain,
        screen::Screen,
    },
};

/// Columns of the transcript on pipes and dumb terminals.
const COLUMNS: usize = 40;

/// Work a job: next test, expected range, reading by voice or keypad.
///
/// Everything affirmed is on disk at once; a session that broke off goes on at the same prompt.
/// Without a terminal (a pipe) lines of keys are read and a plain transcript is printed.
#[derive(Debug, ClapArgs)]
pub struct Args {
    /// The job file
    pub job: PathBuf,
    /// Who tests; the first tester of the job when left out
    #[arg(long, value_name = "NAME")]
    pub tester: Option<String>,
    /// Do not listen and do not look for a voice
    #[arg(long)]
    pub keypad_only: bool,
    /// No sound out: tones and read-back on the screen only
    #[arg(long)]
    pub text_only: bool,
    /// Listen to one utterance at a time, opened by a key
    #[arg(long)]
    pub hold_to_talk: bool,
    /// A recording in place of the microphone, played at the pace of speech
    #[arg(long, value_name = "FILE", conflicts_with = "keypad_only")]
    pub wav: Option<PathBuf>,
    /// The microphone to use, by its name; the default one when left out
    #[arg(long, value_name = "NAME", conflicts_with = "wav")]
    pub microphone: Option<String>,
    /// A voice folder in place of the embedded voice
    #[arg(long, value_name = "FOLDER")]
    pub voice: Option<PathBuf>,
}

impl Args {
    /// Where to listen; nowhere when told so, and when keys come as lines and no recording is named:
    /// a script does not speak.
    fn ear(&self, settings: &Settings) -> Option<Where> {
        let script = !io::stdin().is_terminal() && self.wav.is_none();
        (!self.keypad_only && !script).then(|| Where {
            wav: self.wav.clone(),
            microphone: self.microphone.clone(),
            voice: self.voice.clone(),
            hold_to_talk: settings.hold_to_talk,
        })
    }
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(args: &Args) -> Result<(), Failure> {
    let job = plan::load(&args.job).map_err(|e| Failure::new(Kind::Input, e))?;
    let (mut settings, keymap) = settings::load().map_err(|e| {
        Failure::new(Kind::Input, e).hint("mend the line, or move the file away for the defaults")
    })?;
    settings.text_only |= args.text_only;
    settings.hold_to_talk |= args.hold_to_talk;
    let tester = match &args.tester {
        Some(name) if name.trim().is_empty() => {
            return Err(Failure::new(Kind::Usage, "--tester: the name is empty"));
        }
        Some(name) => name.trim().to_owned(),
        None => job.testers.first().cloned().unwrap_or_default(),
    };
    let signals = Signals::take()
        .map_err(|e| Failure::new(Kind::Device, format!("signals cannot be handled: {e}")))?;
    let place = args.ear(&settings);
    let session = Session::open(&args.job, job, &tester, settings)?;
    let end = session.work(keymap, signals, place)?;
    let open = end.standing().works_in.len();
    if open > 0 {
        eprintln!("still in: {open} temporary works; `handsfull review` lists them");
    }
    not_kept(end.unkept())
}

/// What was to be kept and is not on the medium is told one by one, and is a failure.
fn not_kept(lost: &[Record]) -> Result<(), Failure> {
    if lost.is_empty() {
        return Ok(());
    }
    for record in lost {
        eprintln!("NOT KEPT: {}", in_words(record));
    }
    let message = format!("{} entries could not be written to the log", lost.len());
    Err(Failure::new(Kind::Log, message).hint(
        "what was kept before is on disk; make room, then `handsfull field` asks for the rest",
    ))
}

/// A record on one line, for whoever reads that it was lost.
fn in_words(record: &Record) -> String {
    match record {
        Record::Reading(reading) => {
            let unit = reading.unit.as_deref().unwrap_or_default();
            format!("{} = {} {unit}", reading.target, reading.value)
        }
        Record::Skipped { target, reason, .. } => format!("{target} left out: {reason}"),
        Record::WorkIn { work, .. } => format!("in: {}", work.kind.words()),
        Record::WorkOut { work, .. } => format!("out: {}", work.kind.words()),
        Record::Acknowledged { stage, .. } => format!("{} acknowledged", stage.title()),
        Record::ProvedDead { board, with, .. } => format!("{board} proved dead: {with}"),
        Record::Note { text, .. } => format!("note: {text}"),
        Record::Incident { what } => what.clone(),
        Record::SessionOpened { .. } => "the session began".into(),
        Record::SessionClosed { .. } => "the session ended".into(),
        Record::StageClosed { stage, .. } => format!("{} closed", stage.title()),
        other => format!("{other:?}"),
    }
}

/// A job with its open log.
struct Session {
    setup: Setup,
    standing: crate::domain::standing::Standing,
    ledger: JournalLedger,
    phrases: Arc<Phrases>,
    clips: PathBuf,
}

impl Session {
    fn open(path: &Path, job: Job, tester: &str, settings: Settings) -> Result<Self, Failure> {
        let now = wall_clock();
        let (journal, recovery) =
            Journal::open(path, &job.reference, now).map_err(|e| journal_failure(&e))?;
        for incident in &recovery.incidents {
            eprintln!("{incident}");
        }
        let log = journal.entries().map_err(|e| journal_failure(&e))?;
        let phrases = own_words::phrases(Some(&job))?;
        let mut setup = Setup::new(job, tester, settings);
        setup.away = app::left_long(&log.entries, now);
        setup.resume_at = app::breaks_off_at(&log.entries);
        Ok(Self {
            setup,
            standing: recovery.standing,
            clips: journal.places().clips(),
            ledger: JournalLedger::new(journal),
            phrases: Arc::new(phrases),
        })
    }

    /// The ear, as the settings and the options want it; without one a line says why.
    fn ear(
        &mut self,
        place: Option<Where>,
        sound: &mut Sound,
    ) -> Result<Option<Receiver<Event>>, Failure> {
        let Some(place) = place else {
            eprintln!("keypad only: no voice is used");
            return Ok(None);
        };
        let clips = Clips::new(
            self.clips.clone(),
            Keeping {
                any: self.setup.settings.keep_clips,
                ..Keeping::default()
            },
        );
        // Old clips go when a session begins; where that fails, it is no reason not to work.
        let _ = clips.prune(std::time::SystemTime::now());
        let phrases = Arc::clone(&self.phrases);
        let (lexicon, troubles) = own_words::pronounced(Some(&self.setup.job))?;
        for trouble in troubles {
            eprintln!("{trouble}");
        }
        match listening::start(&place, phrases, &lexicon, clips, sound.mouth()) {
            Ok((ear, events)) => {
                sound.listen_with(ear);
                self.setup.voice = Some(place.voice.map_or_else(
                    || "embedded voice".to_owned(),
                    |folder| folder.display().to_string(),
                ));
                Ok(Some(events))
            }
            Err(why) => {
                self.tell(&why);
                Ok(None)
            }
        }
    }

    /// A line for whoever reads the terminal afterwards, and on the first screen, which hides it.
    fn tell(&mut self, why: &str) {
        eprintln!("{why}");
        self.setup.remark = why.to_owned();
    }

    fn work(
        mut self,
        keymap: Keymap,
        signals: Signals,
        place: Option<Where>,
    ) -> Result<State, Failure> {
        let dumb = std::env::var_os("TERM").is_none_or(|term| term == "dumb" || term.is_empty());
        let terminal = io::stdin().is_terminal() && io::stdout().is_terminal() && !dumb;
        let context = Rc::new(Cell::new(Context::All));
        let (mut sound, silent) = Sound::start(&self.setup.settings);
        if let Some(why) = silent {
            self.tell(&why);
        }
        let ear = self.ear(place, &mut sound)?;
        let mut voice = Listening {
            context: Rc::clone(&context),
            inner: sound,
        };
        if terminal {
            let _raw = Raw::enter().map_err(|e| {
                Failure::new(Kind::Device, format!("the terminal cannot be used: {e}"))
                    .hint("try again with lines of keys: TERM=dumb handsfull field ...")
            })?;
            let plain = std::env::var_os("NO_COLOR").is_some_and(|v| !v.is_empty());
            let mut screen = OnScreen {
                screen: Screen::new(io::stdout(), plain),
                redraw: Rc::new(Cell::new(false)),
            };
            let mut keyboard = AtKeyboard {
                keyboard: Keyboard::new(keymap, signals, ear),
                redraw: Rc::clone(&screen.redraw),
                clock: Clock::default(),
            };
            Ok(app::run(
                self.setup,
                self.standing,
                &mut Edges {
                    events: &mut keyboard,
                    show: &mut screen,
                    ledger: &mut self.ledger,
                    voice: &mut voice,
                },
            ))
        } else {
            let echo = !io::stdin().is_terminal();
            let phrases = self.phrases;
            let understand = Box::new(move |words: &str| {
                let meaning = phrases.understand(context.get(), words);
                Event::Heard(Heard {
                    hypotheses: vec![Hypothesis {
                        words: words.into(),
                        meaning: meaning.clone(),
                        margin: 0.0,
                    }],
                    meaning,
                    clip: None,
                })
            });
            let stdin = BufReader::new(io::stdin());
            let mut lines = ByLines(
                Lines::new(stdin, keymap, signals, ear, understand),
                Clock::default(),
            );
            let mut plain = AsText(Plain::new(io::stdout(), COLUMNS, echo));
            Ok(app::run(
                self.setup,
                self.standing,
                &mut Edges {
                    events: &mut lines,
                    show: &mut plain,
                    ledger: &mut self.ledger,
                    voice: &mut voice,
                },
            ))
        }
    }
}

fn journal_failure(error: &JournalError) -> Failure {
    let kind = match error {
        JournalError::Busy { .. } => Kind::Busy,
        JournalError::OtherJob { .. } | JournalError::NotALog { .. } => Kind::Input,
        _ => Kind::Log,
    };
    Failure::new(kind, error)
}

/// Remembers what may be said, for words that come as text.
struct Listening<V> {
    context: Rc<Cell<Context>>,
    inner: V,
}

impl<V: Voice> Voice for Listening<V> {
    fn say(&mut self, text: &str) {
        self.inner.say(text);
    }
    fn tone(&mut self, tone: Tone) {
        self.inner.tone(tone);
    }
    fn listen(&mut self, context: Context) {
        self.context.set(context);
        self.inner.listen(context);
    }
    fn pause(&mut self, pause: bool) {
        self.inner.pause(pause);
    }
    fn talk(&mut self) {
        self.inner.talk();
    }
}

struct OnScreen<W: Write> {
    screen: Screen<W>,
    redraw: Rc<Cell<bool>>,
}

impl<W: Write> Show for OnScreen<W> {
    fn event(&mut self, _event: &Event) {}

    fn state(&mut self, state: &State, _event: &Event) {
        if self.redraw.take() {
            self.screen.forget();
        }
        // A terminal that went away ends the session by its signal, not here.
        let _ = self.screen.show(state);
    }
}

struct AtKeyboard {
    keyboard: Keyboard,
    redraw: Rc<Cell<bool>>,
    clock: Clock,
}

impl Events for AtKeyboard {
    fn next(&mut self) -> Option<Event> {
        if let Some(event) = self.clock.due() {
            return Some(event);
        }
        let event = self.keyboard.next_event();
        if matches!(event, Some(Event::Tick(_))) {
            self.clock.look();
        }
        if self.keyboard.take_redraw() {
            self.redraw.set(true);
        }
        event
    }
}

struct ByLines(Lines, Clock);

impl Events for ByLines {
    fn next(&mut self) -> Option<Event> {
        if let Some(event) = self.1.due() {
            return Some(event);
        }
        let event = self.0.next_event();
        if matches!(event, Some(Event::Tick(_))) {
            self.1.look();
        }
        event
    }
}

struct AsText<W: Write>(Plain<W>);

impl<W: Write> Show for AsText<W> {
    fn event(&mut self, event: &Event) {
        self.0.event(event);
    }

    fn state(&mut self, state: &State, event: &Event) {
        self.0.state(state, event);
    }
}
