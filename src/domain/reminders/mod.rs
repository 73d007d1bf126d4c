//! What the tester is reminded of before a stage, and how a test is connected.
//!
//! Promises: short plain sentences, one thought each, that wrap well at 38 columns; local rules
//! and competent persons come first; nothing is ever called safe. The facts are those of the
//! trade (UK practice, IEC 60364-6; HSE GS38 for leads; EN 61557 for instruments). It leaves out
//! acknowledging them (the session) and speaking them.

mod connections;

pub use connections::connections;

use super::{
    insulation,
    place::{BoardId, CircuitNo},
    plan::{Board, Circuit, CircuitKind, Earthing, Job},
    sequence::{extra_low, insulation_pairs, multiphase, voltage_class},
    test::{Between, Stage},
};

/// The reminders of a stage, for the whole job or for one board or circuit of it.
#[must_use]
pub fn reminders(
    stage: Stage,
    job: &Job,
    board: Option<&BoardId>,
    circuit: Option<CircuitNo>,
) -> Vec<String> {
    let scope = Scope {
        job,
        board: board.and_then(|id| job.board(id)),
        circuit: board
            .zip(circuit)
            .and_then(|(board, no)| job.circuit(board, no)),
    };
    match stage {
        Stage::Isolation => isolation(&scope),
        Stage::Instrument => instrument(job),
        Stage::Nulling => nulling(),
        Stage::Bonding => bonding(job),
        Stage::Continuity => continuity(&scope),
        Stage::Ring => ring(),
        Stage::Insulation => insulating(&scope),
        Stage::Separation => separation(),
        Stage::Polarity => polarity(&scope),
        Stage::Electrode => electrode(job),
        Stage::CloseUp => close_up(&scope),
        Stage::Energise => energise(job),
        Stage::Live => live(&scope),
    }
}

/// What a reminder is for.
struct Scope<'a> {
    job: &'a Job,
    board: Option<&'a Board>,
    circuit: Option<&'a Circuit>,
}

impl<'a> Scope<'a> {
    /// The circuits it concerns: one, a board's, or all.
    fn circuits(&self) -> Vec<&'a Circuit> {
        match (self.circuit, self.board) {
            (Some(circuit), _) => vec![circuit],
            (None, Some(board)) => board.circuits.iter().collect(),
            (None, None) => self.boards().iter().flat_map(|b| &b.circuits).collect(),
        }
    }

    fn boards(&self) -> Vec<&'a Board> {
        match self.board {
            Some(board) => vec![board],
            None => self.job.boards.iter().collect(),
        }
    }

    fn any(&self, which: impl Fn(&Circuit) -> bool) -> bool {
        self.circuits().into_iter().any(which)
    }
}

fn lines(texts: &[&str]) -> Vec<String> {
    texts.iter().map(|text| (*text).to_string()).collect()
}

fn isolation(scope: &Scope<'_>) -> Vec<String> {
    let mut out = lines(&[
        "Your local rules and permits come first. This list does not replace them.",
        "Right board and circuit identified. Permission given.",
        "Switched off, locked off, key held by you. Notice posted.",
    ]);
    let three = match scope.board {
        Some(board) => multiphase(scope.job, board),
        None => scope.job.supply.three_phase,
    };
    out.push("Voltage indicator proved on a known source first.".into());
    out.push(if three {
        "Dead between all pairs: L1, L2, L3, N and earth, ten pairs.".into()
    } else {
        "Dead L to N, L to E and N to E.".into()
    });
    out.push("Voltage indicator proved again afterwards.".into());
    out.push("Not a non-contact stick, not a plain multimeter.".into());
    if scope.job.supply.other_sources.is_empty() {
        out.push(
            "More than one source? Solar, battery, generator, second board, borrowed neutral."
                .into(),
        );
    } else {
        for source in &scope.job.supply.other_sources {
            out.push(format!("Second source on site: {source}. Isolated too?"));
        }
        out.push("Any further source? Battery, generator, UPS, borrowed neutral.".into());
    }
    if let Some(board) = scope.board
        && let Some((from, no)) = &board.fed_from
    {
        out.push(format!("{} is fed from {from}, circuit {no}.", board.id));
    }
    out
}

fn instrument(job: &Job) -> Vec<String> {
    let mut out = Vec::new();
    for instrument in &job.instruments {
        let mut line = instrument.description.clone();
        if !instrument.serial.is_empty() {
            line.push_str(&format!(", number {}", instrument.serial));
        }
        match instrument.calibrated.as_str() {
            "" => line.push_str(". Calibration date not in the plan: look at the label."),
            date => line.push_str(&format!(". Calibrated {date}: still current?")),
        }
        out.push(line);
    }
    out.extend(lines(&[
        "Case, leads and probes undamaged. Battery good.",
        "Finger guards, tips 4 mm or less, fused or limited leads.",
        "Category CAT III at boards and sockets, CAT IV at the intake.",
    ]));
    out
}

fn nulling() -> Vec<String> {
    lines(&[
        "Null with the leads, probes and fuse you will really use.",
        "Tips joined: the display must settle near 0.00.",
        "Null again after any change of lead, probe, fuse or range.",
        "If it cannot null: note the lead value and subtract it.",
    ])
}

fn bonding(job: &Job) -> Vec<String> {
    let mut out = lines(&[
        "Supply off and locked. Taking the earth off a live installation can kill.",
        "One conductor at a time, off at one end only.",
        "Left on at both ends you measure the metalwork, not the conductor.",
        "Reconnect, tighten, label before the next one.",
    ]);
    if !job.supply.other_sources.is_empty() {
        out.push("Other sources on site may need this earth: off and locked too.".into());
    }
    out
}

fn continuity(scope: &Scope<'_>) -> Vec<String> {
    let mut out = lines(&[
        "Dead, and proved so.",
        "Loads that join line and earth are out.",
        "Parallel metalwork pulls a reading down: think of it before trusting a low one.",
    ]);
    if scope.any(|c| !c.long_lead && !extra_low(c.kind) && c.kind != CircuitKind::Ring) {
        out.push("The line to cpc link is on the list until it is out again.".into());
    }
    if scope.any(|c| c.kind == CircuitKind::Lighting) {
        out.push("Work every switch while reading; two-way switches in both positions.".into());
    }
    if scope.any(|c| c.long_lead) {
        out.push(
            "Long lead: null with it in the loop. Clear that null before short leads again.".into(),
        );
        out.push("The long lead does not prove polarity.".into());
    }
    if scope.any(|c| c.three_phase) {
        out.push("Three-phase: link each line in turn and keep the highest reading.".into());
    }
    out
}

fn ring() -> Vec<String> {
    lines(&[
        "Both legs of line, neutral and cpc out of their terminals, told apart and marked.",
        "Nothing plugged in. Socket switches on.",
        "First between line, neutral and cpc of one leg: must be open.",
        "Cross-links: leg one line to leg two neutral, and the reverse.",
        "Near zero at the board: legs are linked to themselves, not crossed.",
        "Read every socket and every spur.",
        "Links and legs stay on the list until they are out or home.",
    ])
}

fn insulating(scope: &Scope<'_>) -> Vec<String> {
    let mut out = Vec::new();
    let circuits = scope.circuits();
    let mut volts: Vec<u16> = circuits
        .iter()
        .map(|circuit| insulation::rule(voltage_class(scope.job, circuit)).test_v)
        .collect();
    volts.sort_unstable();
    volts.dedup();
    let volts: Vec<String> = volts.iter().map(u16::to_string).collect();
    out.push(format!(
        "{} V d.c. on the conductors: it shocks.",
        volts.join(" and ")
    ));
    out.extend(lines(&[
        "Warn everybody. No hands on ends. Far ends guarded.",
        "Long runs store the charge. Keep the probes on until the display is below 50 V, then touch.",
        "Lamps, appliances, neons, dimmers, sensors, drivers out.",
        "Switches on, protective devices closed, cpc on the earth terminal.",
    ]));
    for board in scope.boards() {
        if board.surge_protection {
            out.push(format!(
                "{}: surge protection out. Put it back after.",
                board.id
            ));
        }
    }
    if scope.any(|c| c.electronics) {
        out.push(
            "Electronics stay in: lives joined, to earth only, 250 V. Ask the maker's sheet first."
                .into(),
        );
    }
    if circuits
        .iter()
        .any(|c| insulation_pairs(scope.job, c).contains(&Between::LivesEarth))
    {
        out.push("The link that joins the lives is on the list until it is out.".into());
    }
    out.push("A voltage warning on the instrument: stop, prove dead again.".into());
    out
}

fn separation() -> Vec<String> {
    lines(&[
        "250 V d.c. on the conductors. Warn everybody.",
        "Extra-low-voltage lives joined, against the other circuits' lives joined.",
        "SELV also against earth. PELV may be earthed on purpose.",
        "Keep the probes on until the display is below 50 V, then touch.",
    ])
}

fn polarity(scope: &Scope<'_>) -> Vec<String> {
    let mut out = lines(&[
        "Breakers, fuses and single-pole switches in the line only.",
        "Sockets, seen from the front: earth up, line right, neutral left. Local types differ.",
    ]);
    if scope.any(|c| c.kind == CircuitKind::Lighting) {
        out.push("Edison-screw holders: centre contact to line. E14 and E27 are exempt.".into());
    }
    if scope.any(|c| c.kind == CircuitKind::Ring) {
        out.push("The ring line-neutral readings do not show a socket wired L for N.".into());
    }
    if scope.any(|c| c.long_lead) {
        out.push("Long-lead circuits: polarity is not proved yet. Test or look.".into());
    }
    out
}

fn electrode(job: &Job) -> Vec<String> {
    let mut out = lines(&[
        "Installation isolated and locked before the electrode comes off.",
        "Driving test spikes: buried cables and pipes?",
        "Reconnect the electrode before anything is energised.",
    ]);
    if !job.supply.other_sources.is_empty() {
        out.push("Other sources off too: they may rely on this electrode.".into());
    }
    out
}

fn close_up(scope: &Scope<'_>) -> Vec<String> {
    let mut out = lines(&[
        "Walk the list: every link that went in is out.",
        "All conductors home, screws tight, legs in their own terminals.",
        "Neutrals and cpcs in the order of the circuits.",
        "Lamps, electronics and what else was out: back.",
    ]);
    if scope.boards().iter().any(|b| b.surge_protection) {
        out.push("Surge protection back in.".into());
    }
    if scope.job.supply.earthing == Earthing::Tt {
        out.push("Electrode back on.".into());
    }
    out.extend(lines(&[
        "Main earth and bonds back on, tight.",
        "Covers on, no tools inside. A second person looks.",
        "The lock comes off last.",
    ]));
    out
}

fn energise(job: &Job) -> Vec<String> {
    let mut out = lines(&[
        "Only if you are competent and authorised under your local rules, and the test cannot be made dead.",
        "All dead tests in, doubts settled, list of temporary works empty.",
        "Covers on as far as possible. Barriers. Second person where the rules ask for one.",
        "People told. Polarity at the origin looked at again.",
    ]);
    for source in &job.supply.other_sources {
        out.push(format!("Second source: {source}. Its state is decided."));
    }
    out
}

fn live(scope: &Scope<'_>) -> Vec<String> {
    let mut out = lines(&[
        "Live. Only what cannot be done dead. Probes with finger guards, one hand where you can.",
        "Ze: main switch off and locked first, then the earthing conductor off; back on at once.",
        "Stand clear of exposed metalwork during loop and RCD tests.",
    ]);
    if scope.any(|c| c.device.rcd.is_some()) {
        out.push("Loop behind an RCD: the no-trip setting.".into());
        out.push("RCD tests switch loads off: tell people.".into());
    } else {
        out.push("A loop test draws some 20 A for an instant; small breakers may trip.".into());
    }
    out
}
