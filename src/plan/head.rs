//! The head of a job file: job, rules, supply, bonds, instruments; boards and places are joined on.
//!
//! Promises: what is left out gets the default written beside it here; defaults that change a
//! range are told. It leaves out the cables (`cable`), circuits (`circuit`) and names (`place`).

use rust_decimal::Decimal;
use toml::de::DeValue;

use crate::domain::{
    plan::{Bond, Earthing, Instrument, InstrumentRange, Job, Rules, Supply},
    range::{usual_continuity, usual_insulation},
    words::Worded,
};

use super::{
    board, cable,
    error::Mistakes,
    fields::{Fields, described},
    place,
};

/// Temperature that IEC 60228 gives its resistances for; used when the day's is not given.
const TABLE_TEMPERATURE_C: f64 = 20.0;

/// Reads the whole document.
pub(super) fn job(document: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> Job {
    let mut job = heading(document, mistakes);
    job.rules = rules(document, mistakes);
    job.supply = supply(document, mistakes);
    job.bonds = bonds(document, mistakes);
    job.instruments = instruments(document, mistakes);
    job.boards = board::boards(document, &job.supply, mistakes);
    job.place_names = place::names(document, &job, mistakes);
    // The document itself is read by reference; its leftovers are named like any table's.
    document.rest(mistakes);
    job
}

fn heading(document: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> Job {
    let mut job = Job {
        reference: String::new(),
        title: String::new(),
        address: String::new(),
        client: String::new(),
        testers: Vec::new(),
        ambient_c: TABLE_TEMPERATURE_C,
        rules: Rules::default(),
        supply: no_supply(),
        bonds: Vec::new(),
        instruments: Vec::new(),
        boards: Vec::new(),
        place_names: Vec::new(),
    };
    if !document.has("job") {
        document.missing(
            "job",
            "a section [job] with reference, title and testers",
            mistakes,
        );
    }
    let Some(mut head) = document.table("job", "[job]", mistakes) else {
        return job;
    };
    if let Some(reference) = head.needed_text(
        "reference",
        "a short reference: reference = \"BARN-3\"",
        mistakes,
    ) {
        let plain = reference
            .value
            .chars()
            .all(|c| c.is_ascii_alphanumeric() || c == '-');
        if !plain || reference.value.chars().count() > 40 || reference.value.starts_with('-') {
            mistakes.add(
                &reference.span,
                format!("`{}` cannot name files", reference.value),
                "use at most 40 letters, digits and dashes, such as BARN-3",
            );
        }
        job.reference = reference.value;
    }
    job.title = head
        .needed_text("title", "a title: title = \"New barn circuits\"", mistakes)
        .map(|t| t.value)
        .unwrap_or_default();
    job.address = head.text_or_empty("address", mistakes);
    job.client = head.text_or_empty("client", mistakes);
    let given = head.has("testers");
    let before = mistakes.count();
    let testers = head.texts("testers", mistakes);
    if !given {
        head.missing("testers", "who tests: testers = [\"A. Tester\"]", mistakes);
    } else if testers.is_empty() && mistakes.count() == before {
        mistakes.add(
            head.span(),
            "`testers` names nobody",
            "name at least one: testers = [\"A. Tester\"]",
        );
    }
    job.testers = testers.into_iter().map(|t| t.value).collect();
    if head.has("ambient-c") {
        // Colder or hotter than any place where a person tests is a slip.
        if let Some(at) = head.number("ambient-c", -40.0, 60.0, mistakes) {
            job.ambient_c = at.value;
        }
    } else {
        head.number("ambient-c", -40.0, 60.0, mistakes);
        mistakes.tell(format!(
            "[job] gives no ambient-c: ranges are for conductors at {TABLE_TEMPERATURE_C} °C, and \
             every 10 °C are worth 4 %"
        ));
    }
    head.done(mistakes);
    job
}

fn rules(document: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> Rules {
    let mut rules = Rules::default();
    let Some(mut f) = document.table("rules", "[rules]", mistakes) else {
        return rules;
    };
    if let Some(edition) = f.text("edition", mistakes).filter(|e| !e.value.is_empty()) {
        rules.edition = edition.value;
    }
    rules.temperature = f
        .choice("temperature", mistakes)
        .unwrap_or(rules.temperature);
    rules.cold_loop = f.choice("cold-loop", mistakes).unwrap_or(rules.cold_loop);
    rules.electrode = f.choice("electrode", mistakes).unwrap_or(rules.electrode);
    rules.insulation_separately = f.flag("insulation-separately", false, mistakes);
    rules.rcd_five_times = f.flag("rcd-five-times", false, mistakes);
    rules.rcd_half = f.flag("rcd-half", false, mistakes);
    rules.live_tests = f.flag("live-tests", false, mistakes);
    if let Some(at) = f.number("investigate-below-megohm", 0.0, 10_000.0, mistakes) {
        rules.investigate_below_megohm = at.value;
    }
    f.done(mistakes);
    rules
}

fn no_supply() -> Supply {
    Supply {
        earthing: Earthing::TnS,
        u0_v: 230.0,
        three_phase: false,
        ze_ohm: None,
        fault_ka: None,
        main_earth: None,
        electrodes: Vec::new(),
        other_sources: Vec::new(),
    }
}

fn supply(document: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> Supply {
    let mut supply = no_supply();
    if !document.has("supply") {
        document.missing("supply", "a section [supply] with its earthing", mistakes);
    }
    let Some(mut f) = document.table("supply", "[supply]", mistakes) else {
        return supply;
    };
    if f.has("earthing") {
        supply.earthing = f.choice("earthing", mistakes).unwrap_or(supply.earthing);
    } else {
        f.choice::<Earthing>("earthing", mistakes);
        let systems: Vec<&str> = Earthing::WORDS.iter().map(|(word, _)| *word).collect();
        f.missing(
            "earthing",
            &format!("the system: one of {}", systems.join(", ")),
            mistakes,
        );
    }
    // Low voltage ends at 1000 V a.c. between conductors (IEC 60364-1); below 12 V nothing feeds
    // a board.
    if let Some(at) = f.number("u0-v", 12.0, 600.0, mistakes) {
        supply.u0_v = at.value;
    }
    if let Some(at) = f.decimal("phases", mistakes) {
        if at.value == Decimal::ONE || at.value == Decimal::from(3) {
            supply.three_phase = at.value != Decimal::ONE;
        } else {
            mistakes.add(
                &at.span,
                format!("a supply of {} phases", at.value),
                "write phases = 1 or phases = 3",
            );
        }
    }
    supply.ze_ohm = f
        .number("ze-ohm", 0.001, 2000.0, mistakes)
        .map(|at| at.value);
    supply.fault_ka = f
        .number("fault-ka", 0.001, 200.0, mistakes)
        .map(|at| at.value);
    supply.main_earth = f
        .table("main-earth", "the main earthing conductor", mistakes)
        .and_then(|mut run| {
            let read = cable::run(&mut run, mistakes);
            run.done(mistakes);
            read
        });
    let electrodes = f.texts("electrodes", mistakes);
    if let (Some(first), false) = (electrodes.first(), supply.earthing == Earthing::Tt) {
        mistakes.add(
            &first.span,
            format!(
                "an earth electrode is named but the earthing is {}",
                supply.earthing.word()
            ),
            "drop `electrodes`, or write earthing = \"TT\"",
        );
    }
    let mut seen: Vec<&str> = Vec::new();
    for electrode in &electrodes {
        if seen.contains(&electrode.value.as_str()) {
            mistakes.add(
                &electrode.span,
                format!("two electrodes are called `{}`", electrode.value),
                "give each its own name",
            );
        }
        seen.push(&electrode.value);
    }
    supply.electrodes = electrodes.into_iter().map(|e| e.value).collect();
    if supply.earthing == Earthing::Tt && supply.electrodes.is_empty() {
        supply.electrodes.push("earth electrode".into());
    }
    supply.other_sources = f
        .texts("other-sources", mistakes)
        .into_iter()
        .map(|s| s.value)
        .collect();
    f.done(mistakes);
    supply
}

fn bonds(document: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> Vec<Bond> {
    let mut bonds: Vec<Bond> = Vec::new();
    for mut f in document.tables("bond", "a bond", mistakes) {
        let name = f.needed_text("name", "what it bonds: name = \"water\"", mistakes);
        if let Some(name) = &name {
            f.name = format!("bond {}", name.value);
            if bonds.iter().any(|bond| bond.name == name.value) {
                mistakes.add(
                    &name.span,
                    format!("two bonds are called `{}`", name.value),
                    "give each its own name",
                );
            }
        }
        let run = cable::run(&mut f, mistakes);
        f.done(mistakes);
        if let (Some(name), Some(run)) = (name, run) {
            bonds.push(Bond {
                name: name.value,
                run,
            });
        }
    }
    bonds
}

fn instruments(document: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> Vec<Instrument> {
    let mut list = Vec::new();
    for mut f in document.tables("instrument", "an instrument", mistakes) {
        let description = f
            .needed_text(
                "description",
                "what it is: description = \"installation tester\"",
                mistakes,
            )
            .map(|t| t.value)
            .unwrap_or_default();
        let serial = f
            .needed_text("serial", "its number: serial = \"1042\"", mistakes)
            .map(|t| t.value)
            .unwrap_or_default();
        let calibrated = date(&mut f, mistakes);
        let mut instrument = usual_instrument();
        instrument.description = description;
        instrument.serial = serial;
        instrument.calibrated = calibrated;
        range(&mut f, "continuity", &mut instrument.continuity, mistakes);
        range(&mut f, "insulation", &mut instrument.insulation, mistakes);
        f.done(mistakes);
        list.push(instrument);
    }
    if list.is_empty() {
        mistakes.tell(
            "no [[instrument]] is named: ranges allow for a usual one (0.01 Ω steps, 3 % and 2 \
             digits); the schedule will lack its number",
        );
        list.push(usual_instrument());
    }
    list
}

/// The stand-in for a file that names no instrument: the ranges of a usual one.
pub(super) fn usual_instrument() -> Instrument {
    Instrument {
        description: "instrument not named".into(),
        serial: String::new(),
        calibrated: String::new(),
        continuity: usual_continuity(),
        insulation: usual_insulation(),
    }
}

fn range(
    f: &mut Fields<'_>,
    key: &'static str,
    into: &mut InstrumentRange,
    mistakes: &mut Mistakes<'_>,
) {
    let Some(mut f) = f.table(key, key, mistakes) else {
        return;
    };
    for (key, into) in [
        ("resolution", &mut into.resolution),
        ("ceiling", &mut into.ceiling),
    ] {
        if let Some(at) = f.decimal(key, mistakes) {
            if at.value > Decimal::ZERO && at.value <= Decimal::from(1_000_000) {
                *into = at.value;
            } else {
                mistakes.add(
                    &at.span,
                    format!("`{key}` is {}", at.value),
                    "it must be above 0 and at most 1000000",
                );
            }
        }
    }
    if let Some(at) = f.number("accuracy-percent", 0.0, 50.0, mistakes) {
        into.accuracy_percent = at.value;
    }
    if let Some(at) = f.number("accuracy-digits", 0.0, 100.0, mistakes) {
        into.accuracy_digits = at.value;
    }
    if into.resolution > into.ceiling {
        mistakes.add(
            f.span(),
            format!(
                "a step of {} is larger than the ceiling of {}",
                into.resolution, into.ceiling
            ),
            "give the smallest step as resolution and the highest figure as ceiling",
        );
    }
    f.done(mistakes);
}

/// The date of calibration, as a TOML date or as text; kept as text.
fn date(f: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> String {
    let Some(found) = f.any("calibrated") else {
        return String::new();
    };
    let right = "write the date as 2026-03-31";
    let text = match found.get_ref() {
        DeValue::Datetime(when) => when.to_string(),
        DeValue::String(text) if text.trim().is_empty() => return String::new(),
        DeValue::String(text) => text.trim().to_string(),
        other => {
            mistakes.add(
                &found.span(),
                format!("`calibrated` is {}, not a date", described(other)),
                right,
            );
            return String::new();
        }
    };
    if text.parse::<jiff::civil::Date>().is_err() || text.len() != 10 {
        mistakes.add(&found.span(), format!("`{text}` is not a date"), right);
    }
    text
}
