//! The questions about the job as a whole, in order; boards and circuits follow (`circuits`).
//!
//! Defaults are ordinary values of the trade (common practice, no source): they save typing and
//! are shown before they are taken.

use crate::domain::{
    place::BoardId,
    plan::{Bond, Earthing, Instrument, Job, Length, LengthBasis, PlaceName, Rules, Run, Supply},
    words::Worded,
};

use super::{
    super::{board::feed_of, head::usual_instrument},
    Pause, Question, Script, answers,
    answers::{DONE, NONE},
    circuits,
};

/// A question with a default.
pub(super) fn with_default(id: &str, text: &str, default: &str, help: &str) -> Question {
    Question {
        id: id.into(),
        text: text.into(),
        default: Some(default.into()),
        help: help.into(),
    }
}

/// A question that must be answered.
pub(super) fn needed(id: &str, text: &str, help: &str) -> Question {
    Question {
        id: id.into(),
        text: text.into(),
        default: None,
        help: help.into(),
    }
}

/// All questions.
pub(super) fn job(s: &mut Script<'_>) -> Result<Job, Pause> {
    let reference = s.ask(
        needed(
            "job.reference",
            "Short reference of the job",
            "letters, digits, dashes: BARN-3",
        ),
        |answer| {
            let plain = answer
                .chars()
                .all(|c| c.is_ascii_alphanumeric() || c == '-');
            if plain && answer.len() <= 40 && !answer.starts_with('-') {
                Ok(answer.to_string())
            } else {
                Err("use at most 40 letters, digits and dashes: it names files".into())
            }
        },
    )?;
    let title = s.ask(
        needed("job.title", "What is the job", "New circuits in the barn"),
        answers::text,
    )?;
    let address = s.ask(
        with_default("job.address", "Where", NONE, ""),
        answers::text_or_none,
    )?;
    let client = s.ask(
        with_default("job.client", "For whom", NONE, ""),
        answers::text_or_none,
    )?;
    let testers = s.ask(
        needed(
            "job.testers",
            "Who tests",
            "names with commas between: A. Tester, B. Mate",
        ),
        |answer| match answers::texts(answer)? {
            names if names.is_empty() => Err("name at least one".into()),
            names => Ok(names),
        },
    )?;
    let ambient_c = s.ask(
        with_default(
            "job.ambient",
            "Temperature at the conductors, °C",
            "20",
            "10 °C are worth 4 %",
        ),
        answers::number(-40.0, 60.0),
    )?;
    let live_tests = s.ask(
        with_default(
            "job.live",
            "Do live tests belong to this job",
            "no",
            "yes or no",
        ),
        answers::yes_no,
    )?;
    let supply = supply(s)?;
    let bonds = bonds(s)?;
    let instruments = instruments(s)?;
    let mut job = Job {
        reference,
        title,
        address,
        client,
        testers,
        ambient_c,
        rules: Rules {
            live_tests,
            ..Rules::default()
        },
        supply,
        bonds,
        instruments,
        boards: Vec::new(),
        place_names: Vec::new(),
    };
    circuits::boards(s, &mut job)?;
    job.place_names = place_names(s, &job)?;
    Ok(job)
}

fn supply(s: &mut Script<'_>) -> Result<Supply, Pause> {
    let earthing: Earthing = s.ask(
        with_default(
            "supply.earthing",
            "Earthing of the supply",
            Earthing::TnCS.word(),
            &answers::words::<Earthing>().join(", "),
        ),
        answers::word,
    )?;
    let three_phase = s.ask(
        with_default("supply.phases", "Phases of the supply", "1", "1 or 3"),
        |answer| match answer {
            "1" => Ok(false),
            "3" => Ok(true),
            _ => Err("answer 1 or 3".into()),
        },
    )?;
    let ze_ohm = s.ask(
        with_default(
            "supply.ze",
            "External loop impedance Ze, ohms",
            NONE,
            "declared or measured before; without it Zs is not predicted",
        ),
        answers::number_or_none(0.001, 2000.0),
    )?;
    let fault_ka = s.ask(
        with_default(
            "supply.fault",
            "Prospective fault current declared, kA",
            NONE,
            "",
        ),
        answers::number_or_none(0.001, 200.0),
    )?;
    let main_earth = run(s, "supply.main-earth", "Main earthing conductor", "16")?;
    let electrodes = if earthing == Earthing::Tt {
        s.ask(
            with_default(
                "supply.electrodes",
                "Earth electrodes",
                "earth electrode",
                "names with commas between",
            ),
            |answer| {
                let names = answers::texts(answer)?;
                match names
                    .iter()
                    .enumerate()
                    .find(|(at, name)| names[..*at].contains(name))
                {
                    Some((_, twice)) => Err(format!("`{twice}` stands there twice")),
                    None if names.is_empty() => Err("TT has at least one".into()),
                    None => Ok(names),
                }
            },
        )?
    } else {
        Vec::new()
    };
    let other_sources = s.ask(
        with_default(
            "supply.other-sources",
            "Other sources on site",
            NONE,
            "solar, battery, generator; commas between",
        ),
        answers::texts,
    )?;
    Ok(Supply {
        earthing,
        u0_v: 230.0,
        three_phase,
        ze_ohm,
        fault_ka,
        main_earth,
        electrodes,
        other_sources,
    })
}

/// A conductor with its length; none when its size is not known.
fn run(s: &mut Script<'_>, id: &str, what: &str, mm2: &str) -> Result<Option<Run>, Pause> {
    let mm2 = s.ask(
        with_default(
            &format!("{id}.mm2"),
            &format!("{what}, mm²"),
            mm2,
            "of copper, or 25 al of aluminium; none when unknown",
        ),
        |answer| {
            if answers::is_none(answer) {
                Ok(None)
            } else {
                answers::conductor(answer).map(Some)
            }
        },
    )?;
    let Some(conductor) = mm2 else {
        return Ok(None);
    };
    let length = length(s, id, &format!("{what}, length in m"))?;
    Ok(Some(Run { conductor, length }))
}

/// A length and how it is known.
pub(super) fn length(s: &mut Script<'_>, id: &str, text: &str) -> Result<Length, Pause> {
    let m = s.ask(
        needed(&format!("{id}.length"), text, "metres along the run"),
        answers::number(0.1, 10_000.0),
    )?;
    let basis = s.ask(
        with_default(
            &format!("{id}.basis"),
            "That length is",
            LengthBasis::Drawing.word(),
            &answers::words::<LengthBasis>().join(", "),
        ),
        answers::word,
    )?;
    Ok(Length { m, basis })
}

fn bonds(s: &mut Script<'_>) -> Result<Vec<Bond>, Pause> {
    let mut bonds: Vec<Bond> = Vec::new();
    loop {
        let id = format!("bond.{}", bonds.len() + 1);
        let name = s.ask(
            with_default(
                &format!("{id}.name"),
                "Protective bond to",
                DONE,
                "water, gas, structural steel; done when there is no further one",
            ),
            |answer| {
                if bonds.iter().any(|bond| bond.name == answer) {
                    Err(format!("there is a bond to {answer} already"))
                } else {
                    Ok(answer.to_string())
                }
            },
        )?;
        if answers::is_done(&name) {
            return Ok(bonds);
        }
        let conductor = s.ask(
            with_default(
                &format!("{id}.mm2"),
                "Its size, mm²",
                "10",
                "of copper, or 25 al of aluminium",
            ),
            answers::conductor,
        )?;
        let length = length(s, &id, "Its length in m")?;
        bonds.push(Bond {
            name,
            run: Run { conductor, length },
        });
    }
}

fn instruments(s: &mut Script<'_>) -> Result<Vec<Instrument>, Pause> {
    let mut instrument = usual_instrument();
    let description = s.ask(
        with_default(
            "instrument.description",
            "Test instrument",
            NONE,
            "what it is, in your words",
        ),
        answers::text_or_none,
    )?;
    if description.is_empty() {
        return Ok(vec![instrument]);
    }
    instrument.description = description;
    instrument.serial = s.ask(
        needed("instrument.serial", "Its serial number", ""),
        answers::text,
    )?;
    instrument.calibrated = s.ask(
        with_default(
            "instrument.calibrated",
            "Date of its calibration",
            NONE,
            "2026-03-31",
        ),
        |answer| {
            if answers::is_none(answer) {
                Ok(String::new())
            } else if answer.len() == 10 && answer.parse::<jiff::civil::Date>().is_ok() {
                Ok(answer.to_string())
            } else {
                Err("write the date as 2026-03-31".into())
            }
        },
    )?;
    for (key, what, range) in [
        ("continuity", "continuity", &mut instrument.continuity),
        ("insulation", "insulation", &mut instrument.insulation),
    ] {
        let usual = format!("{} + {}", range.accuracy_percent, range.accuracy_digits);
        (range.accuracy_percent, range.accuracy_digits) = s.ask(
            with_default(
                &format!("instrument.{key}"),
                &format!("Its accuracy at {what}, % and digits"),
                &usual,
                "as its papers say: 3 + 2",
            ),
            answers::accuracy,
        )?;
    }
    Ok(vec![instrument])
}

/// Names of places that are called by voice: `boiler house = DB1/7`.
fn place_names(s: &mut Script<'_>, job: &Job) -> Result<Vec<PlaceName>, Pause> {
    s.ask(
        with_default(
            "places",
            "Your own names of places, to call them by voice",
            NONE,
            "boiler house = DB1/7, yard = DB2; commas between",
        ),
        |answer| {
            let mut names: Vec<PlaceName> = Vec::new();
            for item in answers::texts(answer)? {
                let (name, called) = item
                    .split_once('=')
                    .ok_or("write name and place with an equals sign: boiler house = DB1/7")?;
                let name = name.trim().to_lowercase();
                let plain = |c: char| c.is_alphabetic() || matches!(c, ' ' | '\'' | '-');
                if name.is_empty() || !name.chars().all(plain) {
                    return Err(format!("`{name}` cannot be said: use words of letters"));
                }
                if names.iter().any(|n| n.name == name) {
                    return Err(format!("two places are called `{name}`"));
                }
                let called = called.trim().to_uppercase();
                let (board, circuit) = match feed_of(&called) {
                    Some((board, no)) => (Some(board), Some(no)),
                    None => (BoardId::new(&called).ok(), None),
                };
                let known = match (&board, circuit) {
                    (Some(board), Some(no)) => job.circuit(board, no).is_some(),
                    (Some(board), None) => job.board(board).is_some(),
                    _ => false,
                };
                if !known {
                    return Err(format!("`{called}` is no board or circuit of this job"));
                }
                names.push(PlaceName {
                    name,
                    say: Vec::new(),
                    board,
                    circuit,
                });
            }
            Ok(names)
        },
    )
}
