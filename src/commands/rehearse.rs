//! `handsfull rehearse`: work an invented job from recorded utterances, then show its review.

use std::{
    cell::{Cell, RefCell},
    fs, io,
    path::{Path, PathBuf},
    rc::Rc,
    sync::Arc,
    thread,
    time::Duration,
};

use clap::Args as ClapArgs;

use super::{
    failure::{Failure, Kind},
    logbook::{Logbook, print},
    voice::lexicon,
};
use crate::{
    app::{
        self, Edges, Show, Voice,
        ledger::{JournalLedger, wall_clock},
    },
    journal::{
        Journal,
        clips::{Clips, Keeping},
    },
    plan,
    rehearsal::{
        self,
        player::{Player, Sight, Stage, look},
        script::Script,
    },
    report::review::{self, Filter, Order},
    session::{self, Event, Settings, Setup, State, wrap::wrap},
    speech::{
        Phrases,
        meaning::{Context, Heard, Meaning},
    },
    terminal::plain::Plain,
    voice::{
        front::{Front, FrontEvent, activity},
        hearing::Hearing,
        ready,
        speaker::{self, Speaker, clips},
    },
};

/// Columns of the small screen.
const COLUMNS: usize = 40;
/// Name of the job's files.
const NAME: &str = "quince-lane";

/// Work an invented job from recorded utterances
///
/// Every utterance goes through the recogniser and the session as in the field; the job's log is
/// written, then its review is shown. The utterances are a synthetic voice that the recogniser was
/// not trained on.
#[derive(Debug, ClapArgs)]
pub struct Args {
    /// Play utterances and read-back, and pace the session like a person
    #[arg(long)]
    aloud: bool,
    /// Keep the job and its log in this folder (a new one in the system's folder for passing files
    /// when left out)
    #[arg(long, value_name = "FOLDER")]
    to: Option<PathBuf>,
    /// A voice folder in place of the embedded voice
    #[arg(long, value_name = "FOLDER")]
    voice: Option<PathBuf>,
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code; of kind device when there is no recogniser.
pub fn run(args: &Args) -> Result<(), Failure> {
    let folder = folder(args.to.as_deref())?;
    let file = folder.join(format!("{NAME}.toml"));
    let write = |e: io::Error| {
        Failure::new(Kind::Log, format!("{}: {e}", file.display()))
            .hint("name a folder that can be written: rehearse --to FOLDER")
    };
    if file.exists() {
        return Err(
            Failure::new(Kind::Input, format!("{} is there already", file.display()))
                .hint("name a new folder: rehearse --to FOLDER"),
        );
    }
    fs::write(&file, rehearsal::JOB).map_err(write)?;
    let job = plan::load(&file).map_err(|e| Failure::new(Kind::Input, e))?;
    let script = Script::parse(rehearsal::SCRIPT, |name| rehearsal::clip(name).is_some())
        .map_err(|e| Failure::new(Kind::Input, e))?;

    println!("Getting the voice ready ...");
    let device = |e: &dyn std::fmt::Display| {
        Failure::new(Kind::Device, e).hint("run ./models-download.sh, then try again")
    };
    let phrases = Phrases::with_places(&[]).map_err(|e| Failure::new(Kind::Input, e))?;
    let hearing = ready::ready(Arc::new(phrases), &lexicon()?, args.voice.as_deref())
        .map_err(|e| device(&e))?;

    let log = |e: &dyn std::fmt::Display| Failure::new(Kind::Log, e);
    let (journal, recovery) =
        Journal::open(&file, &job.reference, wall_clock()).map_err(|e| log(&e))?;
    let kept = Clips::new(journal.places().clips(), Keeping::default());
    let speaker = match args.aloud.then(|| Speaker::open(0.8)) {
        None => None,
        Some(Ok(speaker)) => Some(Rc::new(speaker)),
        Some(Err(silent)) => {
            eprintln!("handsfull: {silent}");
            None
        }
    };
    let context = Rc::new(Cell::new(Context::All));
    let sight = Sight::default();
    let plain = Rc::new(RefCell::new(Plain::new(io::stdout(), COLUMNS, true)));
    let mut stage = OnStage {
        hearing: &hearing,
        context: Rc::clone(&context),
        clips: kept,
        speaker: speaker.clone(),
    };
    let tester = job.testers.first().cloned().unwrap_or_default();
    let mut setup = Setup::new(job, &tester, Settings::default());
    setup.voice = Some(hearing_name(args.voice.as_deref()));
    let mut player = Player::new(script, Rc::clone(&sight), &mut stage);
    let mut show = Watched { plain, sight };
    let mut voice = Prompts { context, speaker };
    app::run(
        setup,
        recovery.standing,
        &mut Edges {
            events: &mut player,
            show: &mut show,
            ledger: &mut JournalLedger::new(journal),
            voice: &mut voice,
        },
    );
    if let Some(why) = player.broke_off {
        return Err(Failure::new(
            Kind::Findings,
            format!("the rehearsal broke off: {why}"),
        ));
    }
    println!("\nThe job and its log are in\n{}\n", folder.display());
    let book = Logbook::open(&file)?;
    println!("Review at the van (handsfull review):\n");
    let show = |order| review::review(&book.material(), order, &Filter::default(), COLUMNS);
    print(&show(Order::Circuit))?;
    println!("\nWhat was heard against what was kept\n(handsfull review --spoken):\n");
    print(&show(Order::Spoken))
}

/// The name of the voice in the log.
fn hearing_name(folder: Option<&Path>) -> String {
    folder.map_or_else(
        || "embedded voice".to_owned(),
        |folder| folder.display().to_string(),
    )
}

/// The folder to work in; made when it is not there.
fn folder(named: Option<&Path>) -> Result<PathBuf, Failure> {
    let failed = |what: &Path, e: io::Error| {
        Failure::new(Kind::Log, format!("{}: {e}", what.display()))
            .hint("name a folder that can be written: rehearse --to FOLDER")
    };
    match named {
        Some(folder) => {
            fs::create_dir_all(folder).map_err(|e| failed(folder, e))?;
            Ok(folder.to_owned())
        }
        None => tempfile::Builder::new()
            .prefix("handsfull-rehearsal-")
            .tempdir()
            .map(tempfile::TempDir::keep)
            .map_err(|e| failed(&std::env::temp_dir(), e)),
    }
}

/// Utterances into the recogniser, words to the onlooker.
struct OnStage<'a> {
    hearing: &'a Hearing,
    context: Rc<Cell<Context>>,
    clips: Clips,
    speaker: Option<Rc<Speaker>>,
}

impl Stage for OnStage<'_> {
    fn utter(&mut self, clip: &str) -> Result<Heard, String> {
        let flac = rehearsal::clip(clip).ok_or_else(|| format!("there is no clip `{clip}`"))?;
        let samples: Vec<f32> = clips::samples(flac);
        if let Some(speaker) = &self.speaker {
            wait(speaker);
            speaker.play(samples.iter().copied());
            wait(speaker);
        }
        let mut front = Front::new(clips::RATE, activity::Settings::default())
            .ok_or("the front end does not take clips")?;
        let mut events = Vec::new();
        front.push(&samples, &mut events);
        front.finish(&mut events);
        let utterance = events.into_iter().find_map(|event| match event {
            FrontEvent::Utterance(utterance) => Some(utterance),
            _ => None,
        });
        let Some(utterance) = utterance else {
            return Ok(Heard {
                hypotheses: Vec::new(),
                meaning: Meaning::Nothing("nobody spoke".into()),
                clip: None,
            });
        };
        let mut heard = self
            .hearing
            .hear(self.context.get(), &utterance)
            .map_err(|e| e.to_string())?;
        match self.clips.save(&utterance.clip) {
            Ok(saved) => heard.clip = saved.map(|s| s.file),
            // The entry stands without its clip; the log then says nothing of one.
            Err(error) => eprintln!("handsfull: {error}"),
        }
        Ok(heard)
    }

    fn tell(&mut self, text: &str) {
        println!();
        for line in wrap(text, COLUMNS - 2) {
            println!("~ {line}");
        }
    }
}

/// Waits until nothing sounds, then a breath.
fn wait(speaker: &Speaker) {
    while speaker.sounding() {
        thread::sleep(Duration::from_millis(30));
    }
    thread::sleep(Duration::from_millis(250));
}

/// The transcript, with the player looking on.
struct Watched {
    plain: Rc<RefCell<Plain<io::Stdout>>>,
    sight: Sight,
}

impl Show for Watched {
    fn event(&mut self, event: &Event) {
        self.plain.borrow_mut().event(event);
    }

    fn state(&mut self, state: &State, event: &Event) {
        self.plain.borrow_mut().state(state, event);
        *self.sight.borrow_mut() = look(state);
    }
}

/// Contexts to the recogniser, prompts to the loudspeaker.
struct Prompts {
    context: Rc<Cell<Context>>,
    speaker: Option<Rc<Speaker>>,
}

impl Voice for Prompts {
    fn say(&mut self, text: &str) {
        if let Some(speaker) = &self.speaker {
            speaker.say(text);
        }
    }

    fn tone(&mut self, tone: session::Tone) {
        if let Some(speaker) = &self.speaker {
            speaker.tone(match tone {
                session::Tone::Listening => speaker::Tone::Listening,
                session::Tone::Understood => speaker::Tone::Understood,
                session::Tone::Refused => speaker::Tone::Refused,
                session::Tone::OutOfRange => speaker::Tone::OutOfRange,
                session::Tone::Saved => speaker::Tone::Saved,
            });
        }
    }

    fn listen(&mut self, context: Context) {
        self.context.set(context);
    }
}
