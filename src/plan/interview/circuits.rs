//! The questions about boards and circuits.
//!
//! Defaults are ordinary values of the trade (common practice, no source).

use crate::domain::{
    place::{BoardId, CircuitNo, PointNo},
    plan::{
        Board, Cable, Circuit, CircuitKind, Conductor, Device, Insulation, Job, Material, Point,
    },
    sequence::extra_low,
    words::Worded,
};

use super::{
    super::{board::feed_of, circuit::device_of},
    Pause, Script, answers,
    answers::{DONE, NONE},
    questions::{length, needed, with_default},
};

/// Asks for boards until there are no more.
pub(super) fn boards(s: &mut Script<'_>, job: &mut Job) -> Result<(), Pause> {
    loop {
        let id = format!("board.{}", job.boards.len() + 1);
        let first = job.boards.is_empty();
        let default = if first { "DB1" } else { DONE };
        let help = if first {
            "capital letters and digits"
        } else {
            "done when there is no further one"
        };
        let name = s.ask(
            with_default(&format!("{id}.id"), "Name of the board", default, help),
            |answer| {
                if !first && answers::is_done(answer) {
                    return Ok(None);
                }
                let board = BoardId::new(&answer.to_uppercase()).map_err(|e| e.to_string())?;
                match job.board(&board) {
                    Some(_) => Err(format!("there is a board {board} already")),
                    None => Ok(Some(board)),
                }
            },
        )?;
        let Some(name) = name else {
            return Ok(());
        };
        let board = board(s, job, &id, name)?;
        job.boards.push(board);
    }
}

fn board(s: &mut Script<'_>, job: &Job, id: &str, name: BoardId) -> Result<Board, Pause> {
    let place = s.ask(
        with_default(&format!("{id}.place"), "Where it is", NONE, ""),
        answers::text_or_none,
    )?;
    let fed_from = if job.boards.is_empty() {
        None
    } else {
        feed(s, job, id)?
    };
    let surge_protection = s.ask(
        with_default(
            &format!("{id}.surge"),
            "Surge protection in it",
            "no",
            "yes or no",
        ),
        answers::yes_no,
    )?;
    let mut board = Board {
        id: name,
        place,
        fed_from,
        zdb_ohm: None,
        surge_protection,
        circuits: Vec::new(),
    };
    loop {
        let nth = board.circuits.len() + 1;
        let default = if nth == 1 { "1" } else { DONE };
        let no = s.ask(
            with_default(
                &format!("{id}.circuit.{nth}.no"),
                &format!("Circuit of {}, its number", board.id),
                default,
                if nth == 1 {
                    "7, or 4L2 for one line of a three-phase way"
                } else {
                    "done when the board has no further one"
                },
            ),
            |answer| {
                if nth > 1 && answers::is_done(answer) {
                    return Ok(None);
                }
                let no: CircuitNo = answer
                    .to_uppercase()
                    .parse()
                    .map_err(|e: crate::domain::place::PlaceError| e.to_string())?;
                if board.circuits.iter().any(|c| c.no == no) {
                    Err(format!("there is a circuit {no} already"))
                } else {
                    Ok(Some(no))
                }
            },
        )?;
        let Some(no) = no else {
            // The loader sorts by number too: a written plan must load back equal.
            board.circuits.sort_by_key(|c| c.no);
            return Ok(board);
        };
        let circuit = circuit(s, job, &format!("{id}.circuit.{nth}"), no)?;
        board.circuits.push(circuit);
    }
}

fn feed(s: &mut Script<'_>, job: &Job, id: &str) -> Result<Option<(BoardId, CircuitNo)>, Pause> {
    let feeders: Vec<String> = job
        .boards
        .iter()
        .flat_map(|board| {
            board
                .circuits
                .iter()
                .filter(|c| c.kind == CircuitKind::Distribution)
                .map(move |c| (board.id.clone(), c.no))
        })
        .filter(|feeder| {
            !job.boards
                .iter()
                .any(|b| b.fed_from.as_ref() == Some(feeder))
        })
        .map(|(board, no)| format!("{board}/{no}"))
        .collect();
    s.ask(
        with_default(
            &format!("{id}.fed-from"),
            "Fed from",
            feeders.first().map_or(NONE, String::as_str),
            "board and circuit, MSB/3; none when the feeder is not of this job",
        ),
        |answer| {
            if answers::is_none(answer) {
                return Ok(None);
            }
            match feed_of(&answer.to_uppercase()) {
                Some((board, no))
                    if job
                        .circuit(&board, no)
                        .is_some_and(|c| c.kind == CircuitKind::Distribution) =>
                {
                    Ok(Some((board, no)))
                }
                _ => Err(format!(
                    "`{answer}` is no distribution circuit entered before"
                )),
            }
        },
    )
}

/// What a kind of circuit usually has: line mm², device.
fn usual(kind: CircuitKind) -> (&'static str, &'static str) {
    match kind {
        CircuitKind::Ring => ("2.5", "B32"),
        CircuitKind::Radial => ("2.5", "B20"),
        CircuitKind::Lighting => ("1.5", "B6"),
        CircuitKind::Fixed => ("2.5", "B16"),
        CircuitKind::Distribution => ("16", "C63"),
        CircuitKind::Selv | CircuitKind::Pelv => ("2.5", "B6"),
    }
}

/// The protective conductor that flat twin-and-earth cable has beside a line; elsewhere the same
/// size as the line.
fn usual_cpc(line_mm2: f64) -> f64 {
    const PAIRS: [(f64, f64); 6] = [
        (1.5, 1.0),
        (2.5, 1.5),
        (4.0, 1.5),
        (6.0, 2.5),
        (10.0, 4.0),
        (16.0, 6.0),
    ];
    PAIRS
        .iter()
        .find(|(line, _)| (line - line_mm2).abs() < f64::EPSILON)
        .map_or(line_mm2, |(_, cpc)| *cpc)
}

fn circuit(s: &mut Script<'_>, job: &Job, id: &str, no: CircuitNo) -> Result<Circuit, Pause> {
    let key = |name: &str| format!("{id}.{name}");
    let name = s.ask(
        with_default(&key("name"), "What it feeds", NONE, ""),
        answers::text_or_none,
    )?;
    let kind: CircuitKind = s.ask(
        with_default(
            &key("kind"),
            "Kind of circuit",
            CircuitKind::Radial.word(),
            &answers::words::<CircuitKind>().join(", "),
        ),
        answers::word,
    )?;
    let may_be_three = job.supply.three_phase && no.line().is_none();
    let three_phase = may_be_three
        && s.ask(
            with_default(&key("phases"), "Phases", "1", "1 or 3"),
            |answer| match answer {
                "1" => Ok(false),
                "3" => Ok(true),
                _ => Err("answer 1 or 3".into()),
            },
        )?;
    let without_neutral = three_phase
        && !s.ask(
            with_default(
                &key("neutral"),
                "A neutral in the cable",
                "yes",
                "yes or no; motors often have none",
            ),
            answers::yes_no,
        )?;
    let (line_default, device_default) = usual(kind);
    let line = s.ask(
        with_default(
            &key("line"),
            "Line, mm²",
            line_default,
            "of copper, or 25 al of aluminium",
        ),
        answers::conductor,
    )?;
    let cpc = cpc(s, &key("cpc"), kind, line)?;
    let whole = if kind == CircuitKind::Ring {
        "Length of the whole loop, m"
    } else {
        "Length to the furthest point, m"
    };
    let length = length(s, id, whole)?;
    let (device, rated_a) = s.ask(
        with_default(
            &key("device"),
            "Protective device",
            device_default,
            "B32, C16, BS 88-2 32",
        ),
        device_of,
    )?;
    let rcd = s.ask(
        with_default(
            &key("rcd"),
            "RCD, rated residual current in mA",
            NONE,
            "none when there is none; 100 s when it is time-delayed",
        ),
        answers::rcd,
    )?;
    let points = points(s, id, kind, length.m)?;
    let electronics = s.ask(
        with_default(
            &key("electronics"),
            "Electronics that stay connected",
            "no",
            "yes or no; they are tested at 250 V to earth only",
        ),
        answers::yes_no,
    )?;
    let earth_read = cpc.is_some() && !matches!(kind, CircuitKind::Ring | CircuitKind::Selv);
    let long_lead = earth_read
        && s.ask(
            with_default(
                &key("long-lead"),
                "R2 by long lead in place of R1+R2",
                "no",
                "yes or no",
            ),
            answers::yes_no,
        )?;
    let design_a = s.ask(
        with_default(
            &key("design"),
            "Design current, A",
            NONE,
            "for the voltage drop",
        ),
        answers::number_or_none(0.01, 6300.0),
    )?;
    Ok(Circuit {
        no,
        name,
        kind,
        three_phase,
        without_neutral,
        cable: Cable {
            line,
            neutral: line,
            cpc,
            insulation: Insulation::Thermoplastic70,
        },
        length,
        device: Device {
            kind: device,
            rated_a,
            rcd,
        },
        points,
        electronics,
        long_lead,
        design_a,
    })
}

/// The protective conductor: a size, or armour and conduit by their resistance (`4.6 per m`).
fn cpc(
    s: &mut Script<'_>,
    id: &str,
    kind: CircuitKind,
    line: Conductor,
) -> Result<Option<Conductor>, Pause> {
    let low = extra_low(kind);
    let default = match line {
        _ if low => NONE.to_string(),
        Conductor::Size {
            mm2,
            material: Material::Aluminium,
            ..
        } => format!("{mm2} al"),
        Conductor::Size { mm2, .. } => usual_cpc(mm2).to_string(),
        Conductor::Given { .. } => NONE.to_string(),
    };
    s.ask(
        with_default(
            id,
            "Protective conductor, mm²",
            &default,
            "of copper, or 25 al of aluminium; for armour or conduit its milliohms per metre: 4.6 per m",
        ),
        |answer| {
            if answers::is_none(answer) {
                return if low {
                    Ok(None)
                } else {
                    Err("only SELV and PELV circuits may have none".into())
                };
            }
            if let Some(figure) = answer.strip_suffix("per m") {
                return answers::number(0.0001, 10_000.0)(figure.trim())
                    .map(|milliohm_per_m| Some(Conductor::Given { milliohm_per_m }));
            }
            answers::conductor(answer).map(Some)
        },
    )
}

fn points(
    s: &mut Script<'_>,
    id: &str,
    kind: CircuitKind,
    length_m: f64,
) -> Result<Vec<Point>, Pause> {
    let help = "how many, or their names with commas between";
    let read = |answer: &str| -> Result<Vec<String>, String> {
        if let Ok(count) = answer.parse::<u16>() {
            return if (1..=200).contains(&count) {
                Ok(vec![String::new(); usize::from(count)])
            } else {
                Err("a circuit has 1 to 200 points".into())
            };
        }
        match answers::texts(answer)? {
            names if (1..=200).contains(&names.len()) => Ok(names),
            _ => Err("a circuit has 1 to 200 points".into()),
        }
    };
    let key = format!("{id}.points");
    let names = if matches!(kind, CircuitKind::Fixed | CircuitKind::Distribution) {
        s.ask(with_default(&key, "Points", "1", help), read)?
    } else {
        s.ask(needed(&key, "Points", help), read)?
    };
    let count = names.len();
    let spurs = if kind == CircuitKind::Ring && count > 1 {
        s.ask(
            with_default(
                &format!("{id}.spurs"),
                "Spurs",
                NONE,
                "point and metres of branch, 4:7; commas between",
            ),
            |answer| spurs(answer, count),
        )?
    } else {
        Vec::new()
    };
    let places = s.ask(
        with_default(
            &format!("{id}.places"),
            "Metres from the board to each point",
            NONE,
            "along the run, commas between; for a spur where it leaves",
        ),
        |answer| places(answer, count, length_m),
    )?;
    Ok((1..)
        .zip(names)
        .map(|(no, name)| Point {
            no: PointNo(no),
            name,
            at_m: places.get(usize::from(no) - 1).copied(),
            spur_m: spurs
                .iter()
                .find(|(point, _)| *point == usize::from(no))
                .map(|(_, m)| *m),
        })
        .collect())
}

/// `4:7, 6:2.5`: point 4 at the end of a spur of 7 m.
fn spurs(answer: &str, count: usize) -> Result<Vec<(usize, f64)>, String> {
    answers::texts(answer)?
        .iter()
        .map(|item| {
            let (point, m) = item
                .split_once(':')
                .ok_or("write point and metres with a colon: 4:7")?;
            let point: usize = point.trim().parse().unwrap_or(0);
            if !(1..=count).contains(&point) {
                return Err(format!("the points are numbered 1 to {count}"));
            }
            Ok((point, answers::number(0.1, 10_000.0)(m.trim())?))
        })
        .collect()
}

fn places(answer: &str, count: usize, length_m: f64) -> Result<Vec<f64>, String> {
    let metres = answers::texts(answer)?
        .iter()
        .map(|m| answers::number(0.0, length_m)(m))
        .collect::<Result<Vec<f64>, String>>()?;
    if metres.is_empty() || metres.len() == count {
        Ok(metres)
    } else {
        Err(format!("{} places for {count} points", metres.len()))
    }
}
