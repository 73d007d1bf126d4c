//! Writes a job as a commented job file.
//!
//! Promises: what is written loads back as the same job; what equals the loader's default is left
//! out, so that a file stays short; every section says in a comment what may stand there. It
//! leaves out keeping a user's own comments: it writes new files only.

use std::fmt::{self, Write};

use crate::domain::{
    plan::{
        Board, Circuit, CircuitKind, Class, Conductor, InstrumentRange, Insulation, Job, Length,
        LengthBasis, Material, Point, Rules, Run,
    },
    words::Worded,
};

use super::{cable::usual_class, head::usual_instrument};

/// The job as the text of a job file.
#[must_use]
pub fn to_toml(job: &Job) -> String {
    let mut out = String::new();
    // Writing into a String cannot fail.
    let _ = document(&mut out, job);
    out
}

fn document(out: &mut String, job: &Job) -> fmt::Result {
    writeln!(
        out,
        "# Job file of handsfull. Lengths in metres, sizes in mm², temperatures in °C."
    )?;
    writeln!(
        out,
        "# `handsfull plan check FILE` says what is wrong and where.\n"
    )?;
    writeln!(out, "[job]")?;
    writeln!(out, "reference = {}", quoted(&job.reference))?;
    writeln!(out, "title = {}", quoted(&job.title))?;
    optional_text(out, "address", &job.address)?;
    optional_text(out, "client", &job.client)?;
    writeln!(out, "testers = {}", list(&job.testers))?;
    writeln!(out, "# At the conductors, on the day; 10 °C are worth 4 %.")?;
    writeln!(out, "ambient-c = {}", job.ambient_c)?;
    rules(out, &job.rules)?;
    supply(out, job)?;
    for bond in &job.bonds {
        writeln!(out, "\n[[bond]]\nname = {}", quoted(&bond.name))?;
        for line in run_keys(&bond.run) {
            writeln!(out, "{line}")?;
        }
    }
    instruments(out, job)?;
    for place in &job.place_names {
        writeln!(out, "\n[[place]]\nname = {}", quoted(&place.name))?;
        if !place.say.is_empty() {
            writeln!(out, "say = {}", list(&place.say))?;
        }
        match (&place.board, place.circuit) {
            (Some(board), Some(no)) => writeln!(out, "circuit = \"{board}/{no}\"")?,
            (Some(board), None) => writeln!(out, "board = \"{board}\"")?,
            (None, _) => {}
        }
    }
    for each in &job.boards {
        board(out, each)?;
    }
    Ok(())
}

fn rules(out: &mut String, rules: &Rules) -> fmt::Result {
    let usual = Rules::default();
    writeln!(
        out,
        "\n# Where published sources disagree, the rule in use is named here.\n[rules]"
    )?;
    writeln!(out, "edition = {}", quoted(&rules.edition))?;
    writeln!(
        out,
        "# live-tests = true adds Ze, Zs, fault current, RCD, phase sequence and function.\nlive-tests = {}",
        rules.live_tests
    )?;
    if rules.temperature != usual.temperature {
        writeln!(out, "temperature = {}", quoted(rules.temperature.word()))?;
    }
    if rules.cold_loop != usual.cold_loop {
        writeln!(out, "cold-loop = {}", quoted(rules.cold_loop.word()))?;
    }
    if rules.electrode != usual.electrode {
        writeln!(out, "electrode = {}", quoted(rules.electrode.word()))?;
    }
    for (key, value) in [
        ("insulation-separately", rules.insulation_separately),
        ("rcd-five-times", rules.rcd_five_times),
        ("rcd-half", rules.rcd_half),
    ] {
        if value {
            writeln!(out, "{key} = true")?;
        }
    }
    #[allow(clippy::float_cmp)] // both are as written, nothing was reckoned
    if rules.investigate_below_megohm != usual.investigate_below_megohm {
        writeln!(
            out,
            "investigate-below-megohm = {}",
            rules.investigate_below_megohm
        )?;
    }
    Ok(())
}

fn supply(out: &mut String, job: &Job) -> fmt::Result {
    let supply = &job.supply;
    writeln!(out, "\n# earthing: TN-S, TN-C-S, TT or IT.\n[supply]")?;
    writeln!(out, "earthing = {}", quoted(supply.earthing.word()))?;
    writeln!(out, "u0-v = {}", supply.u0_v)?;
    writeln!(out, "phases = {}", if supply.three_phase { 3 } else { 1 })?;
    if let Some(ze) = supply.ze_ohm {
        writeln!(out, "ze-ohm = {ze}")?;
    }
    if let Some(fault) = supply.fault_ka {
        writeln!(out, "fault-ka = {fault}")?;
    }
    if let Some(run) = &supply.main_earth {
        writeln!(out, "main-earth = {{ {} }}", run_keys(run).join(", "))?;
    }
    if !supply.electrodes.is_empty() {
        writeln!(out, "electrodes = {}", list(&supply.electrodes))?;
    }
    if !supply.other_sources.is_empty() {
        writeln!(out, "other-sources = {}", list(&supply.other_sources))?;
    }
    Ok(())
}

fn instruments(out: &mut String, job: &Job) -> fmt::Result {
    let usual = usual_instrument();
    for instrument in &job.instruments {
        // The loader's stand-in for a file that names none.
        if *instrument == usual && job.instruments.len() == 1 {
            continue;
        }
        writeln!(out, "\n[[instrument]]")?;
        writeln!(out, "description = {}", quoted(&instrument.description))?;
        writeln!(out, "serial = {}", quoted(&instrument.serial))?;
        optional_text(out, "calibrated", &instrument.calibrated)?;
        for (key, range, usual) in [
            ("continuity", &instrument.continuity, &usual.continuity),
            ("insulation", &instrument.insulation, &usual.insulation),
        ] {
            if !same_range(range, usual) {
                writeln!(
                    out,
                    "{key} = {{ resolution = {}, ceiling = {}, accuracy-percent = {}, accuracy-digits = {} }}",
                    range.resolution, range.ceiling, range.accuracy_percent, range.accuracy_digits
                )?;
            }
        }
    }
    Ok(())
}

/// Equal in value and in the zeros written: 99.9 and 99.90 differ as displays do.
fn same_range(a: &InstrumentRange, b: &InstrumentRange) -> bool {
    a == b && a.resolution.scale() == b.resolution.scale() && a.ceiling.scale() == b.ceiling.scale()
}

fn board(out: &mut String, board: &Board) -> fmt::Result {
    writeln!(out, "\n[[board]]\nid = \"{}\"", board.id)?;
    optional_text(out, "place", &board.place)?;
    if let Some((from, no)) = &board.fed_from {
        writeln!(out, "fed-from = \"{from}/{no}\"")?;
    }
    if let Some(zdb) = board.zdb_ohm {
        writeln!(out, "zdb-ohm = {zdb}")?;
    }
    if board.surge_protection {
        writeln!(out, "surge-protection = true")?;
    }
    for (nth, each) in board.circuits.iter().enumerate() {
        writeln!(out)?;
        if nth == 0 {
            writeln!(
                out,
                "# kind: ring, radial, lighting, fixed, distribution, selv or pelv. length-m is the \
                 whole\n# run, of a ring the whole loop. Class, material and neutral only where \
                 they differ."
            )?;
        }
        circuit(out, each)?;
    }
    Ok(())
}

fn circuit(out: &mut String, circuit: &Circuit) -> fmt::Result {
    writeln!(out, "[[board.circuit]]")?;
    match circuit.no.line() {
        None => writeln!(out, "no = {}", circuit.no)?,
        Some(_) => writeln!(out, "no = \"{}\"", circuit.no)?,
    }
    optional_text(out, "name", &circuit.name)?;
    writeln!(out, "kind = {}", quoted(circuit.kind.word()))?;
    if circuit.three_phase {
        writeln!(out, "phases = 3")?;
    }
    if circuit.without_neutral {
        writeln!(out, "neutral = false")?;
    }
    cable(out, circuit)?;
    for line in length_keys(&circuit.length) {
        writeln!(out, "{line}")?;
    }
    let device = &circuit.device;
    writeln!(out, "device = \"{}\"", device.label())?;
    if let Some(rcd) = &device.rcd {
        writeln!(out, "rcd-ma = {}", rcd.rated_ma)?;
        if rcd.delayed {
            writeln!(out, "rcd-delayed = true")?;
        }
    }
    points(out, circuit)?;
    if circuit.electronics {
        writeln!(out, "electronics = true")?;
    }
    if circuit.long_lead {
        writeln!(out, "long-lead = true")?;
    }
    if let Some(design) = circuit.design_a {
        writeln!(out, "design-a = {design}")?;
    }
    Ok(())
}

fn cable(out: &mut String, circuit: &Circuit) -> fmt::Result {
    let cable = &circuit.cable;
    let mut material = Material::Copper;
    let mut class = None;
    let mut unusual = |conductor: &Conductor| {
        if let Conductor::Size { mm2, class: c, .. } = conductor
            && *c != usual_class(*mm2)
        {
            class = Some(*c);
        }
    };
    unusual(&cable.line);
    unusual(&cable.neutral);
    if let Some(cpc) = &cable.cpc {
        unusual(cpc);
    }
    if let Conductor::Size {
        mm2, material: m, ..
    } = &cable.line
    {
        material = *m;
        writeln!(out, "line-mm2 = {mm2}")?;
    }
    if let Conductor::Size { mm2, .. } = &cable.neutral
        && cable.neutral != cable.line
    {
        writeln!(out, "neutral-mm2 = {mm2}")?;
    }
    match &cable.cpc {
        Some(Conductor::Size {
            mm2, material: m, ..
        }) => {
            writeln!(out, "cpc-mm2 = {mm2}")?;
            if *m != material {
                writeln!(out, "cpc-material = {}", quoted(m.word()))?;
            }
        }
        Some(Conductor::Given { milliohm_per_m }) => {
            writeln!(out, "cpc-milliohm-per-m = {milliohm_per_m}")?;
        }
        None => {}
    }
    if material != Material::Copper {
        writeln!(out, "material = {}", quoted(material.word()))?;
    }
    if let Some(class) = class {
        writeln!(out, "class = {}", class_number(class))?;
    }
    if cable.insulation != Insulation::Thermoplastic70 {
        writeln!(out, "insulation = {}", quoted(cable.insulation.word()))?;
    }
    Ok(())
}

fn points(out: &mut String, circuit: &Circuit) -> fmt::Result {
    let bare = |p: &Point| p.name.is_empty() && p.at_m.is_none() && p.spur_m.is_none();
    if circuit.points.iter().all(bare) {
        let implied = circuit.points.len() == 1
            && matches!(circuit.kind, CircuitKind::Fixed | CircuitKind::Distribution);
        if !implied {
            writeln!(out, "points = {}", circuit.points.len())?;
        }
        return Ok(());
    }
    writeln!(out, "points = [")?;
    for point in &circuit.points {
        let mut keys = Vec::new();
        if !point.name.is_empty() {
            keys.push(format!("name = {}", quoted(&point.name)));
        }
        if let Some(at) = point.at_m {
            keys.push(format!("at-m = {at}"));
        }
        if let Some(spur) = point.spur_m {
            keys.push(format!("spur-m = {spur}"));
        }
        writeln!(out, "  {{ {} }},", keys.join(", "))?;
    }
    writeln!(out, "]")
}

/// The keys of a conductor with its length, as `key = value`.
fn run_keys(run: &Run) -> Vec<String> {
    let mut keys = Vec::new();
    match run.conductor {
        Conductor::Size {
            mm2,
            material,
            class,
        } => {
            keys.push(format!("mm2 = {mm2}"));
            if material != Material::Copper {
                keys.push(format!("material = {}", quoted(material.word())));
            }
            if class != usual_class(mm2) {
                keys.push(format!("class = {}", class_number(class)));
            }
        }
        Conductor::Given { milliohm_per_m } => {
            keys.push(format!("milliohm-per-m = {milliohm_per_m}"));
        }
    }
    keys.extend(length_keys(&run.length));
    keys
}

fn length_keys(length: &Length) -> Vec<String> {
    let mut keys = vec![format!("length-m = {}", length.m)];
    if length.basis != LengthBasis::Drawing {
        keys.push(format!("length-basis = {}", quoted(length.basis.word())));
    }
    keys
}

fn class_number(class: Class) -> u8 {
    match class {
        Class::One => 1,
        Class::Two => 2,
        Class::Five => 5,
    }
}

fn optional_text(out: &mut String, key: &str, text: &str) -> fmt::Result {
    if text.is_empty() {
        Ok(())
    } else {
        writeln!(out, "{key} = {}", quoted(text))
    }
}

/// A TOML string; the crate knows its escapes.
fn quoted(text: &str) -> String {
    toml::Value::String(text.into()).to_string()
}

fn list(texts: &[String]) -> String {
    let items: Vec<String> = texts.iter().map(|text| quoted(text)).collect();
    format!("[{}]", items.join(", "))
}
