//! What a spoken utterance can mean.
//!
//! Promises: a number that can be read in several ways is [`Meaning::Ambiguous`], never a guess;
//! what was not understood is an outcome ([`Meaning::Nothing`]), not an error.
//! It leaves out how the words were found (see `phrase`) and what the session does with them.

use crate::domain::{
    place::{Place, PointNo},
    reading::{Reading, Unit},
    test::{Stage, TestKind},
};

/// Answers to the question that stands on the screen.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Reply {
    /// Yes, keep it ("affirm", "affirmative", "correct", ...).
    Affirm,
    /// No, drop it ("negative", "wrong", ...).
    Negative,
    /// The n-th of a pick list, from 1 ("first", "second", "third").
    Pick(u8),
    /// Keep an out-of-range reading as found ("keep as found").
    KeepAsFound,
    /// Measure again ("measure again").
    MeasureAgain,
    /// A reminder or step is done ("done", "ready", "acknowledged").
    Done,
}

/// Commands that work at every prompt.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
#[allow(missing_docs)] // the names are the commands
pub enum Control {
    SayAgain,
    /// Drop what is being entered.
    Disregard,
    /// Replace the last value kept; the new reading follows, or is asked for.
    Correction(Option<Box<Meaning>>),
    Standby,
    Resume,
    Back,
    Next,
    /// Leave this test with a reason.
    Skip,
    Help,
    /// What is still open.
    ListOpen,
    /// Which temporary links and works are in.
    ListLinks,
    /// Why this range is expected.
    Why,
    /// A temporary link went in / came out.
    LinkIn,
    LinkOut,
    /// Say the value one digit at a time.
    DigitByDigit,
    /// Part of a figure, where it is said digit by digit: digits and the point, such as `5` or `.`.
    Digits(String),
    Stop,
    /// Take up this test now.
    Test(TestKind),
    /// Go to this stage ("insulation", "ring", "continuity"), at the test that is next in it.
    Stage(Stage),
    /// A reason code, from 1, where one is asked for.
    Reason(u8),
    /// A ticked outcome for tests without a figure (polarity, phase sequence, function).
    Confirmed,
    NotConfirmed,
    /// Begin a free note (typed later at the van; the clip is kept).
    Note,
    /// "Roger": received, which is not yes.
    Received,
    /// "Same", "ditto", without saying as what.
    Same,
    /// The same value as the last one of this test on this circuit.
    SameAsLast,
    /// The same value as at that point of this circuit.
    SameAs(PointNo),
    /// Leave this test out for the n-th of the reasons, from 1, said in words.
    LeaveOut(u8),
    /// Keep as found for the n-th of the reasons, from 1, said in words.
    KeepFor(u8),
}

impl Reply {
    /// The reply as a word in JSON: `affirm`, `keep-as-found`, ...
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Reply::Affirm => "affirm",
            Reply::Negative => "negative",
            Reply::Pick(_) => "pick",
            Reply::KeepAsFound => "keep-as-found",
            Reply::MeasureAgain => "measure-again",
            Reply::Done => "done",
        }
    }
}

impl Control {
    /// The commands that have no parts.
    pub const PLAIN: [Control; 21] = [
        Control::SayAgain,
        Control::Disregard,
        Control::Standby,
        Control::Resume,
        Control::Back,
        Control::Next,
        Control::Skip,
        Control::Help,
        Control::ListOpen,
        Control::ListLinks,
        Control::Why,
        Control::LinkIn,
        Control::LinkOut,
        Control::DigitByDigit,
        Control::Stop,
        Control::Confirmed,
        Control::NotConfirmed,
        Control::Note,
        Control::Received,
        Control::Same,
        Control::SameAsLast,
    ];

    /// The command as a word in JSON: `say-again`, `link-out`, ...
    #[must_use]
    pub fn word(&self) -> &'static str {
        match self {
            Control::SayAgain => "say-again",
            Control::Disregard => "disregard",
            Control::Correction(_) => "correction",
            Control::Standby => "standby",
            Control::Resume => "resume",
            Control::Back => "back",
            Control::Next => "next",
            Control::Skip => "skip",
            Control::Help => "help",
            Control::ListOpen => "list-open",
            Control::ListLinks => "list-links",
            Control::Why => "why",
            Control::LinkIn => "link-in",
            Control::LinkOut => "link-out",
            Control::DigitByDigit => "digit-by-digit",
            Control::Digits(_) => "digits",
            Control::Stop => "stop",
            Control::Test(_) => "test",
            Control::Stage(_) => "stage",
            Control::Reason(_) => "reason",
            Control::Confirmed => "confirmed",
            Control::NotConfirmed => "not-confirmed",
            Control::Note => "note",
            Control::Received => "received",
            Control::Same => "same",
            Control::SameAsLast => "same-as-last",
            Control::SameAs(_) => "same-as",
            Control::LeaveOut(_) => "leave-out",
            Control::KeepFor(_) => "keep-for",
        }
    }
}

/// The meaning of one utterance.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub enum Meaning {
    /// A reading.
    Reading(Reading),
    /// A board, circuit, line or point called by name.
    Place(Place),
    /// An answer.
    Reply(Reply),
    /// A command.
    Control(Control),
    /// Several meanings, the likelier first; the tool asks which.
    Ambiguous(Vec<Meaning>),
    /// Not understood; the reason is a whole phrase for the screen.
    Nothing(String),
}

/// One hypothesis of the recogniser with its meaning.
#[derive(Debug, Clone, PartialEq)]
pub struct Hypothesis {
    /// Words in lower case, separated by single spaces.
    pub words: String,
    /// What they mean.
    pub meaning: Meaning,
    /// How much less likely than the best (log likelihood, 0 for the best).
    pub margin: f64,
}

/// What was heard of one utterance: the best hypothesis first.
#[derive(Debug, Clone, PartialEq)]
pub struct Heard {
    /// Best first; empty when nothing was understood.
    pub hypotheses: Vec<Hypothesis>,
    /// The decision, after the margin was looked at.
    pub meaning: Meaning,
    /// Name of the kept clip, if one was kept.
    pub clip: Option<String>,
}

impl Heard {
    /// The words of the best hypothesis, or nothing.
    #[must_use]
    pub fn words(&self) -> &str {
        self.hypotheses.first().map_or("", |h| h.words.as_str())
    }
}

/// What may be said now: the names of the grammar contexts under `grammars/`.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Context {
    /// Continuity, loop and electrode readings (ohms).
    Ohms,
    /// Insulation readings (megohms).
    Insulation,
    /// Times, currents, voltages of the live tests.
    Live,
    /// Ticked outcomes (polarity, phase sequence, function).
    Tick,
    /// Affirm or negative after a read-back.
    Confirm,
    /// Keep as found or measure again, then a reason.
    Question,
    /// Pick list.
    Pick,
    /// Safety reminders and gates: done, negative.
    Gate,
    /// A figure digit by digit: a digit or the point at a time.
    Digits,
    /// Anything: all of the above (the default of `hear`).
    All,
}

impl Context {
    /// Every context.
    pub const EVERY: [Context; 10] = [
        Context::Ohms,
        Context::Insulation,
        Context::Live,
        Context::Tick,
        Context::Confirm,
        Context::Question,
        Context::Pick,
        Context::Gate,
        Context::Digits,
        Context::All,
    ];

    /// The context's name: its grammar file is `grammars/NAME.abnf`.
    #[must_use]
    pub fn name(self) -> &'static str {
        match self {
            Context::Ohms => "ohms",
            Context::Insulation => "insulation",
            Context::Live => "live",
            Context::Tick => "tick",
            Context::Confirm => "confirm",
            Context::Question => "question",
            Context::Pick => "pick",
            Context::Gate => "gate",
            Context::Digits => "digits",
            Context::All => "all",
        }
    }

    /// The unit a figure has when none was said in this context.
    #[must_use]
    pub fn unit(self) -> Option<Unit> {
        match self {
            Context::Ohms => Some(Unit::Ohm),
            Context::Insulation => Some(Unit::Megohm),
            _ => None,
        }
    }
}
