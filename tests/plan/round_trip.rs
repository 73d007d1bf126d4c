//! Any job that a file can hold, written, loads back as the same job.

use handsfull::{
    domain::{
        conductor,
        place::{BoardId, CircuitNo, Line, PointNo},
        plan::{
            Board, Bond, Cable, Circuit, CircuitKind, Class, ColdLoopRule, Conductor, Device,
            DeviceType, Earthing, ElectrodeRule, Instrument, InstrumentRange, Insulation, Job,
            Length, LengthBasis, Material, PlaceName, Point, Rcd, Rules, Run, Supply,
            TemperatureRule,
        },
        reading::Unit,
        words::Worded,
    },
    plan::{self, write::to_toml},
};
use proptest::{collection::vec, option, prelude::*, sample::select};
use rust_decimal::Decimal;

use super::fixtures;

#[track_caller]
fn comes_back(job: &Job) {
    let text = to_toml(job);
    let back = plan::parse(&text, "written").unwrap_or_else(|wrong| panic!("{wrong}\n{text}"));
    assert_eq!(&back, job, "{text}");
    // Equal decimals may still differ in their zeros; the text does not.
    assert_eq!(to_toml(&back), text);
}

#[test]
fn the_fixtures_and_the_example_come_back() {
    for name in fixtures::ALL {
        comes_back(&fixtures::job(name));
    }
    comes_back(&plan::parse(plan::EXAMPLE, "example").unwrap_or_else(|wrong| panic!("{wrong}")));
}

fn member<T: Worded + std::fmt::Debug>() -> impl Strategy<Value = T> {
    select(
        T::WORDS
            .iter()
            .map(|(_, member)| *member)
            .collect::<Vec<_>>(),
    )
}

/// Text as a user may write it: any character but control ones, no spaces at the ends.
fn text() -> impl Strategy<Value = String> {
    "[^\\p{C}]{0,20}".prop_map(|t| t.trim().to_string())
}

fn needed_text() -> impl Strategy<Value = String> {
    ("[a-zA-Z\"'\\\\ü#=]", text()).prop_map(|(a, b)| format!("{a}{b}").trim().to_string())
}

/// Numbers as they stand in files: up to three decimals.
fn number(low: i64, high: i64) -> impl Strategy<Value = f64> {
    (low * 1000..=high * 1000).prop_map(|thousandths| {
        let text = Decimal::new(thousandths, 3).normalize().to_string();
        text.parse().expect("a number")
    })
}

fn length() -> impl Strategy<Value = Length> {
    (number(1, 900), member::<LengthBasis>()).prop_map(|(m, basis)| Length { m, basis })
}

fn sized(material: Material, class: Option<Class>) -> impl Strategy<Value = Conductor> {
    let sizes = conductor::sizes(material, class.unwrap_or(Class::Two));
    select(sizes).prop_map(move |mm2| Conductor::Size {
        mm2,
        material,
        class: class.unwrap_or(if mm2 <= 4.0 { Class::One } else { Class::Two }),
    })
}

/// A material with a class that it has, or the usual one.
fn make() -> impl Strategy<Value = (Material, Option<Class>)> {
    select(vec![
        (Material::Copper, None),
        (Material::Copper, Some(Class::One)),
        (Material::Copper, Some(Class::Two)),
        (Material::Copper, Some(Class::Five)),
        (Material::Aluminium, None),
        (Material::Aluminium, Some(Class::Two)),
    ])
}

fn run() -> impl Strategy<Value = Run> {
    let conductor = prop_oneof![
        make().prop_flat_map(|(material, class)| sized(material, class)),
        number(1, 100).prop_map(|milliohm_per_m| Conductor::Given { milliohm_per_m }),
    ];
    (conductor, length()).prop_map(|(conductor, length)| Run { conductor, length })
}

fn cable(kind: CircuitKind) -> impl Strategy<Value = Cable> {
    let low = matches!(kind, CircuitKind::Selv | CircuitKind::Pelv);
    make()
        .prop_flat_map(move |(material, class)| {
            let cpc = prop_oneof![
                4 => sized(material, class).prop_map(Some),
                1 => number(1, 100)
                    .prop_map(|milliohm_per_m| Some(Conductor::Given { milliohm_per_m })),
            ];
            (
                sized(material, class),
                sized(material, class),
                cpc,
                any::<bool>(),
                any::<bool>(),
                member::<Insulation>(),
            )
        })
        .prop_map(move |(line, other, cpc, same, bare, insulation)| Cable {
            line,
            neutral: if same { line } else { other },
            cpc: if low && bare { None } else { cpc },
            insulation,
        })
}

fn points(length_m: f64) -> impl Strategy<Value = Vec<Point>> {
    let one = (text(), option::of(0..=1000_u32), option::of(number(1, 40)));
    prop_oneof![
        (1..9_usize).prop_map(|n| vec![(String::new(), None, None); n]),
        vec(one, 1..6),
    ]
    .prop_map(move |points| {
        (1..)
            .zip(points)
            .map(|(no, (name, share, spur_m))| Point {
                no: PointNo(no),
                name,
                at_m: share.map(|s| (length_m * f64::from(s) / 1000.0).floor()),
                spur_m,
            })
            .collect()
    })
}

fn circuit(three_phase_supply: bool) -> impl Strategy<Value = Circuit> {
    (
        (
            1..=199_u16,
            option::of(select(vec![Line::L1, Line::L2, Line::L3])),
        ),
        text(),
        member::<CircuitKind>(),
        any::<bool>(),
        length(),
        (member::<DeviceType>(), number(1, 1250)),
        option::of((number(1, 1000), any::<bool>())),
        (any::<bool>(), any::<bool>(), option::of(number(1, 800))),
    )
        .prop_flat_map(
            move |(
                (way, line),
                name,
                kind,
                three,
                length,
                device,
                rcd,
                (electronics, long_lead, design_a),
            )| {
                (cable(kind), points(length.m)).prop_map(move |(cable, points)| Circuit {
                    no: CircuitNo::new(way, line).expect("a way"),
                    name: name.clone(),
                    kind,
                    three_phase: three && three_phase_supply && line.is_none(),
                    without_neutral: three && three_phase_supply && line.is_none() && long_lead,
                    cable,
                    length,
                    device: Device {
                        kind: device.0,
                        rated_a: device.1,
                        rcd: rcd.map(|(rated_ma, delayed)| Rcd { rated_ma, delayed }),
                    },
                    points,
                    electronics,
                    long_lead,
                    design_a,
                })
            },
        )
}

fn boards(three_phase: bool) -> impl Strategy<Value = Vec<Board>> {
    vec(
        (
            "[A-Z0-9]{1,8}",
            text(),
            option::of(number(1, 20)),
            any::<bool>(),
            vec(circuit(three_phase), 1..5),
        ),
        1..4,
    )
    .prop_map(|drawn| {
        let mut boards: Vec<Board> = Vec::new();
        for (name, place, zdb_ohm, surge_protection, mut circuits) in drawn {
            let id = BoardId::new(&name).expect("a name");
            if boards.iter().any(|b| b.id == id) {
                continue;
            }
            circuits.sort_by_key(|c| c.no);
            circuits.dedup_by_key(|c| c.no);
            // Fed from the first distribution circuit there is among the boards before.
            let fed_from = boards.iter().find_map(|b| {
                let feeder = b
                    .circuits
                    .iter()
                    .find(|c| c.kind == CircuitKind::Distribution)?;
                Some((b.id.clone(), feeder.no))
            });
            boards.push(Board {
                id,
                place,
                fed_from,
                zdb_ohm,
                surge_protection,
                circuits,
            });
        }
        boards
    })
}

fn supply() -> impl Strategy<Value = Supply> {
    (
        member::<Earthing>(),
        number(12, 600),
        any::<bool>(),
        option::of(number(1, 30)),
        option::of(number(1, 30)),
        option::of(run()),
        vec(needed_text(), 1..3),
        vec(needed_text(), 0..3),
    )
        .prop_map(
            |(
                earthing,
                u0_v,
                three_phase,
                ze_ohm,
                fault_ka,
                main_earth,
                mut rods,
                other_sources,
            )| {
                rods.dedup();
                Supply {
                    earthing,
                    u0_v,
                    three_phase,
                    ze_ohm,
                    fault_ka,
                    main_earth,
                    electrodes: if earthing == Earthing::Tt {
                        rods
                    } else {
                        Vec::new()
                    },
                    other_sources,
                }
            },
        )
}

fn rules() -> impl Strategy<Value = Rules> {
    (
        needed_text(),
        member::<TemperatureRule>(),
        member::<ColdLoopRule>(),
        member::<ElectrodeRule>(),
        any::<[bool; 4]>(),
        number(0, 200),
    )
        .prop_map(
            |(edition, temperature, cold_loop, electrode, yes, investigate_below_megohm)| Rules {
                edition,
                temperature,
                cold_loop,
                electrode,
                insulation_separately: yes[0],
                rcd_five_times: yes[1],
                rcd_half: yes[2],
                live_tests: yes[3],
                investigate_below_megohm,
            },
        )
}

fn instrument() -> impl Strategy<Value = Instrument> {
    let range = |unit| {
        (
            1..100_i64,
            0..4_u32,
            1000..99999_i64,
            0..2_u32,
            number(0, 50),
            number(0, 100),
        )
            .prop_map(
                move |(step, finer, ceiling, places, accuracy_percent, accuracy_digits)| {
                    InstrumentRange {
                        unit,
                        resolution: Decimal::new(step, finer),
                        ceiling: Decimal::new(ceiling, places),
                        accuracy_percent,
                        accuracy_digits,
                    }
                },
            )
    };
    (
        needed_text(),
        needed_text(),
        select(vec!["", "2026-02-10"]),
        range(Unit::Ohm),
        range(Unit::Megohm),
    )
        .prop_map(
            |(description, serial, calibrated, continuity, insulation)| Instrument {
                description,
                serial,
                calibrated: calibrated.into(),
                continuity,
                insulation,
            },
        )
}

fn job() -> impl Strategy<Value = Job> {
    (
        supply(),
        rules(),
        vec((needed_text(), run()), 0..3),
        vec(instrument(), 1..3),
    )
        .prop_flat_map(|(supply, rules, bonds, instruments)| {
            (
                (
                    "[A-Z][A-Z0-9-]{0,8}",
                    needed_text(),
                    text(),
                    text(),
                    vec(needed_text(), 1..3),
                ),
                number(-40, 60),
                boards(supply.three_phase),
                option::of("[a-z]{1,6}( [a-z]{1,6})?"),
            )
                .prop_map(
                    move |(
                        (reference, title, address, client, testers),
                        ambient_c,
                        boards,
                        name,
                    )| {
                        let mut bonded: Vec<Bond> = Vec::new();
                        for (name, run) in &bonds {
                            if !bonded.iter().any(|b| &b.name == name) {
                                bonded.push(Bond {
                                    name: name.clone(),
                                    run: *run,
                                });
                            }
                        }
                        let place_names = name
                            .map(|name| PlaceName {
                                name,
                                say: Vec::new(),
                                board: Some(boards[0].id.clone()),
                                circuit: Some(boards[0].circuits[0].no),
                            })
                            .into_iter()
                            .collect();
                        Job {
                            reference,
                            title,
                            address,
                            client,
                            testers,
                            ambient_c,
                            rules: rules.clone(),
                            supply: supply.clone(),
                            bonds: bonded,
                            instruments: instruments.clone(),
                            boards,
                            place_names,
                        }
                    },
                )
        })
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(192))]

    #[test]
    fn a_written_job_loads_back_equal(job in job()) {
        comes_back(&job);
    }

    /// On any job: no test twice, stages rise, and what a failure repeats comes before it.
    #[test]
    fn the_sequence_holds_its_promises_on_any_job(job in job()) {
        use handsfull::domain::sequence;
        let all = sequence::required(&job);
        let mut seen = std::collections::HashSet::new();
        for (at, target) in all.iter().enumerate() {
            prop_assert!(seen.insert(target.clone()), "{target} twice");
            prop_assert!(at == 0 || all[at - 1].test.stage() <= target.test.stage());
            let works = sequence::works_needed(&job, target);
            prop_assert!(sequence::works_in_the_way(&job, target, &works).is_empty(), "{target}");
        }
        for failed in all.iter().step_by(7) {
            for again in sequence::influenced_by(&job, failed) {
                let place = |t| all.iter().position(|x| x == t);
                prop_assert!(place(&again) < place(failed), "{again} after {failed}");
            }
        }
    }
}
