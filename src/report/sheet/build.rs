//! Brings plan and log together into a schedule.

use std::collections::{BTreeMap, BTreeSet};

use super::{
    cells, model,
    model::{CAUTION, FORMAT, Schedule},
    plan_words, plot,
};
use crate::{
    domain::{
        expect::Verdict,
        expected::expected,
        kept::Value,
        plan::{Board, Circuit, Job},
        record::Record,
        sequence,
        standing::Standing,
        test::Target,
        words::Worded,
    },
    report::{
        events::{event, work_words},
        history::{History, Shown},
        review::{self, Material},
        words,
    },
};

/// The schedule of a job.
#[must_use]
pub fn schedule(job: &Job, material: &Material) -> Schedule {
    let history = History::of(material.entries, material.standing);
    let targets = by_place(material, &history);
    let sources = sources(job, material.standing, material.required);
    let builder = Builder {
        job,
        material,
        history: &history,
        unchecked: sources
            .iter()
            .filter(|source| !source.checked)
            .map(|source| source.text.clone())
            .collect(),
    };
    let at = |place: Place| targets.get(&place).map_or(&[][..], Vec::as_slice);
    let time = |entry: Option<&crate::domain::standing::Entry>| {
        entry.map(|e| e.time.to_string()).unwrap_or_default()
    };
    Schedule {
        format: FORMAT,
        program: concat!("handsfull ", env!("CARGO_PKG_VERSION")).into(),
        caution: CAUTION,
        job: head(job),
        rules: model::Rules {
            edition: job.rules.edition.clone(),
            temperature: plan_words::temperature(job.rules.temperature),
            cold_loop: plan_words::cold_loop(job.rules.cold_loop),
            electrode: plan_words::electrode(job.rules.electrode),
        },
        supply: supply(job),
        instruments: job
            .instruments
            .iter()
            .map(|instrument| model::Instrument {
                description: instrument.description.clone(),
                serial: instrument.serial.clone(),
                calibrated: instrument.calibrated.clone(),
            })
            .collect(),
        results: builder.rows(at((None, None)), None),
        boards: job
            .boards
            .iter()
            .map(|board| builder.board(board, &at))
            .collect(),
        findings: builder.findings(),
        open: review::open_targets(material)
            .iter()
            .map(|target| format!("{target}: {}", review::state(material, target)))
            .collect(),
        left_out: material
            .standing
            .skipped
            .iter()
            .map(|(target, left)| format!("{target}: {} ({})", left.reason, left.by))
            .collect(),
        works_in: material.standing.works_in.iter().map(work_words).collect(),
        amendments: builder.amendments(),
        notes: material
            .entries
            .iter()
            .filter(|e| matches!(e.record, Record::Note { .. } | Record::Incident { .. }))
            .map(|e| format!("{} {}", review::number(material, e), event(&e.record)))
            .collect(),
        sources,
        from: time(material.entries.first()),
        to: time(material.entries.last()),
        integrity: model::IntegrityShown {
            statement: material.integrity.statement(),
            parts: material.integrity.clone(),
        },
    }
}

type Place = (Option<String>, Option<String>);

/// Every target that is required or has a value, by board and circuit, required ones first and in
/// working order.
fn by_place<'a>(
    material: &Material<'a>,
    history: &History<'a>,
) -> BTreeMap<Place, Vec<&'a Target>> {
    let mut all: BTreeMap<Place, Vec<&'a Target>> = BTreeMap::new();
    let required: BTreeSet<&Target> = material.required.iter().collect();
    let also = history
        .targets()
        .filter(|target| !required.contains(target));
    for target in material.required.iter().chain(also) {
        let place = (
            target.board.as_ref().map(ToString::to_string),
            target.circuit.map(|no| no.to_string()),
        );
        all.entry(place).or_default().push(target);
    }
    all
}

fn head(job: &Job) -> model::JobHead {
    model::JobHead {
        reference: job.reference.clone(),
        title: job.title.clone(),
        address: job.address.clone(),
        client: job.client.clone(),
        testers: job.testers.clone(),
        ambient_c: job.ambient_c,
    }
}

fn supply(job: &Job) -> model::Supply {
    let supply = &job.supply;
    model::Supply {
        earthing: supply.earthing.word(),
        u0_v: supply.u0_v,
        phases: if supply.three_phase { 3 } else { 1 },
        ze_ohm: supply.ze_ohm,
        fault_ka: supply.fault_ka,
        main_earth: supply.main_earth.map(plan_words::run),
        electrodes: supply.electrodes.clone(),
        other_sources: supply.other_sources.clone(),
    }
}

/// Every source behind the ranges and limits of the required tests, each once.
fn sources(job: &Job, standing: &Standing, required: &[Target]) -> Vec<model::SourceShown> {
    let mut all: Vec<model::SourceShown> = vec![];
    let mut add =
        |text: &str, checked: bool| match all.iter_mut().find(|source| source.text == text) {
            Some(source) => source.checked &= checked,
            None => all.push(model::SourceShown {
                text: text.into(),
                checked,
            }),
        };
    for target in required {
        let expected = expected(job, target, &standing.kept);
        for source in &expected.sources {
            add(&source.text, source.checked);
        }
        if let Some(limit) = &expected.limit {
            add(&limit.source.text, limit.source.checked);
        }
        if let Some(voltage) = sequence::test_voltage(job, target) {
            add(&voltage.source.text, voltage.source.checked);
        }
    }
    all
}

struct Builder<'a> {
    job: &'a Job,
    material: &'a Material<'a>,
    history: &'a History<'a>,
    unchecked: BTreeSet<String>,
}

impl<'a> Builder<'a> {
    fn board(&self, board: &Board, at: &impl Fn(Place) -> &'a [&'a Target]) -> model::Board {
        let id = board.id.to_string();
        model::Board {
            results: self.rows(at((Some(id.clone()), None)), None),
            circuits: board
                .circuits
                .iter()
                .map(|circuit| {
                    let targets = at((Some(id.clone()), Some(circuit.no.to_string())));
                    self.circuit(&id, circuit, targets)
                })
                .collect(),
            id,
            place: board.place.clone(),
            fed_from: board
                .fed_from
                .as_ref()
                .map(|(board, no)| format!("{board}/{no}")),
            zdb_ohm: board.zdb_ohm,
            surge_protection: board.surge_protection,
        }
    }

    fn circuit(&self, board: &str, circuit: &Circuit, targets: &[&Target]) -> model::Circuit {
        model::Circuit {
            no: circuit.no.to_string(),
            name: circuit.name.clone(),
            kind: circuit.kind.word(),
            three_phase: circuit.three_phase,
            points: circuit.points.len(),
            line: plan_words::conductor(circuit.cable.line),
            cpc: circuit.cable.cpc.map(plan_words::conductor),
            length_m: circuit.length.m,
            length_basis: circuit.length.basis.word(),
            device: plan_words::device(circuit.device),
            rcd_ma: circuit.device.rcd.map(|rcd| rcd.rated_ma),
            columns: cells::columns(self.material, self.history, targets),
            results: self.rows(targets, Some(circuit)),
            plots: plot::plots(&format!("{board}/{}", circuit.no), self.history, targets),
        }
    }

    fn rows(&self, targets: &[&Target], circuit: Option<&Circuit>) -> Vec<model::Row> {
        targets
            .iter()
            .map(|target| self.row(target, circuit))
            .collect()
    }

    fn row(&self, target: &Target, circuit: Option<&Circuit>) -> model::Row {
        let shown = self.history.counting(target);
        let expected = shown.and_then(|s| s.expected);
        let source = expected.map(|e| e.source.clone()).filter(|s| !s.is_empty());
        let measured = shown.filter(|s| s.amends.is_none()).map(|s| s.measured);
        let point_name = target.point.and_then(|no| {
            let point = circuit?.points.iter().find(|p| p.no == no)?;
            (!point.name.is_empty()).then(|| point.name.clone())
        });
        let (value, unit) = match shown.map(|s| (s, &s.value)) {
            Some((_, Some(Value::Reading(reading)))) => (
                Some(reading.figure()),
                reading.unit().map(|unit| unit.word().to_owned()),
            ),
            Some((shown, _)) => (Some(shown.text.clone()), None),
            None => (None, None),
        };
        let figures = target.test.unit().is_some();
        model::Row {
            test: target.test.word(),
            title: target.test.title(),
            point: target.point.map(|no| no.0),
            point_name,
            name: target.name.clone(),
            test_voltage_v: sequence::test_voltage(self.job, target).map(|v| v.volts),
            state: match shown {
                Some(_) => "measured",
                None => self.state(target),
            },
            state_words: shown
                .is_none()
                .then(|| review::state(self.material, target)),
            value,
            unit,
            printed: shown.map(|s| s.text.clone()),
            verdict: shown.filter(|_| figures).map(|s| verdict(s.verdict)),
            lies: shown.filter(|_| figures).map(|s| words::lies(s.verdict)),
            mark: shown
                .filter(|_| figures)
                .map_or("", |s| words::mark(s.verdict)),
            expected_low: expected.and_then(|e| e.low.clone()),
            expected_high: expected.and_then(|e| e.high.clone()),
            limit: expected.and_then(|e| e.limit.clone()),
            expected_unit: expected.map(|e| e.unit.clone()),
            expected: expected.map(words::range),
            source_checked: source.as_ref().map(|s| !self.unchecked.contains(s)),
            source,
            entry: shown.map(|s| s.entry.no),
            time: shown.map(|s| s.entry.time.to_string()),
            entered: shown.map(|s| match s.amends {
                Some(_) => "amended",
                None => words::entered(s.measured.entered),
            }),
            by: shown.map(|s| s.by().to_owned()),
            heard: measured.and_then(|m| m.heard.clone()),
            kept_as_found: measured.and_then(|m| m.kept_as_found.clone()),
            corrects: shown.and_then(Shown::corrects),
        }
    }

    fn state(&self, target: &Target) -> &'static str {
        let standing = self.material.standing;
        if standing.undecided.contains_key(target) {
            "undecided"
        } else if standing.repeats.contains_key(target) {
            "to-repeat"
        } else if standing.skipped.contains_key(target) {
            "left-out"
        } else if self
            .history
            .of_target(target)
            .any(|s| standing.unreadable.contains(&s.entry.no))
        {
            "unreadable"
        } else {
            "not-measured"
        }
    }

    fn findings(&self) -> Vec<model::Finding> {
        let mut findings: Vec<model::Finding> = self
            .history
            .iter()
            .filter(|shown| shown.counts)
            .filter(|shown| shown.verdict.questioned() || !shown.measured.findings.is_empty())
            .map(|shown| model::Finding {
                entry: shown.entry.no,
                target: shown.target.to_string(),
                value: shown.text.clone(),
                lies: words::lies(shown.verdict),
                expected: shown
                    .expected
                    .map_or_else(|| "none given".into(), words::range),
                // An amended value was not looked at again: its meanings were the old one's.
                meanings: match shown.amends {
                    Some(_) => vec![],
                    None => shown
                        .measured
                        .findings
                        .iter()
                        .map(|f| f.text.clone())
                        .collect(),
                },
                kept_as_found: shown.measured.kept_as_found.clone(),
            })
            .collect();
        findings.sort_by_key(|finding| finding.entry);
        findings
    }

    fn amendments(&self) -> Vec<model::Amendment> {
        self.history
            .iter()
            .filter_map(|shown| {
                let (corrects, reason, by) = shown.amends?;
                Some(model::Amendment {
                    entry: shown.entry.no,
                    time: shown.entry.time.to_string(),
                    target: shown.target.to_string(),
                    corrects,
                    from: self
                        .history
                        .entry(corrects)
                        .map(|old| old.text.clone())
                        .unwrap_or_default(),
                    to: shown.text.clone(),
                    reason: reason.to_owned(),
                    by: by.to_owned(),
                })
            })
            .collect()
    }
}

/// The verdict as the word it has in the log.
fn verdict(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::InRange => "in-range",
        Verdict::Below => "below",
        Verdict::Above => "above",
        Verdict::Open => "open",
        Verdict::NotOpen => "not-open",
        Verdict::BeyondLimit => "beyond-limit",
        Verdict::Unknown => "unknown",
    }
}
