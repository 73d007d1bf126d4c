//! The example jobs load, and load as what they say.

use std::path::{Path, PathBuf};

use handsfull::{
    domain::{
        place::PointNo,
        plan::{Class, Conductor, DeviceType, Earthing, Insulation, Job, LengthBasis, Material},
    },
    plan,
};

/// The example jobs.
pub const ALL: [&str; 4] = [
    "workshop.toml",
    "barn.toml",
    "press-hall.toml",
    "garden.toml",
];

/// A fixture's path.
pub fn path(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/fixtures")
        .join(name)
}

/// A fixture, loaded.
pub fn job(name: &str) -> Job {
    plan::load(&path(name)).unwrap_or_else(|wrong| panic!("{wrong}"))
}

#[test]
fn every_fixture_loads() {
    for name in ALL {
        job(name);
    }
}

#[test]
fn what_a_file_leaves_out_gets_the_documented_default() {
    let job = job("workshop.toml");
    let ring = &job.boards[0].circuits[0];
    let copper = |mm2, class| Conductor::Size {
        mm2,
        material: Material::Copper,
        class,
    };
    assert_eq!(ring.cable.line, copper(2.5, Class::One));
    assert_eq!(ring.cable.neutral, ring.cable.line, "neutral as line");
    assert_eq!(ring.cable.cpc, Some(copper(1.5, Class::One)));
    assert_eq!(ring.cable.insulation, Insulation::Thermoplastic70);
    assert_eq!(ring.length.basis, LengthBasis::Drawing);
    assert_eq!(job.bonds[0].run.conductor, copper(10.0, Class::Two));
    assert_eq!(job.supply.u0_v, 230.0);
    assert!(!job.supply.three_phase && !job.rules.live_tests);
    assert_eq!(job.instruments[0].calibrated, "2026-02-10");
    let extractor = &job.boards[0].circuits[3];
    assert_eq!(extractor.points.len(), 1, "one appliance, one point");
    assert_eq!(extractor.device.kind, DeviceType::C);
    assert_eq!(extractor.device.rcd, None);
}

#[test]
fn points_may_be_a_number_names_or_places_with_spurs() {
    let workshop = job("workshop.toml");
    let spur = &workshop.boards[0].circuits[0].points[3];
    assert_eq!(
        (spur.no, spur.at_m, spur.spur_m),
        (PointNo(4), Some(26.0), Some(7.0))
    );
    assert_eq!(workshop.boards[0].circuits[2].points.len(), 5);
    let hall = job("press-hall.toml");
    assert_eq!(hall.boards[0].circuits[0].points[0].name, "DB2");
}

#[test]
fn a_tt_job_has_its_electrode_even_when_it_is_not_named() {
    let barn = job("barn.toml");
    assert_eq!(barn.supply.earthing, Earthing::Tt);
    assert_eq!(barn.supply.electrodes, ["rod by the gate"]);
    let text = std::fs::read_to_string(path("barn.toml"))
        .expect("the fixture")
        .replace("electrodes = [\"rod by the gate\"]", "");
    let unnamed = plan::parse(&text, "barn.toml").unwrap_or_else(|wrong| panic!("{wrong}"));
    assert_eq!(unnamed.supply.electrodes, ["earth electrode"]);
}

#[test]
fn numbers_may_be_integers_floats_or_text() {
    let text = std::fs::read_to_string(path("workshop.toml")).expect("the fixture");
    let plain = plan::parse(&text, "a").unwrap_or_else(|wrong| panic!("{wrong}"));
    let other = text
        .replace("length-m = 58", "length-m = \"58.0\"")
        .replace("line-mm2 = 4\n", "line-mm2 = 4.0\n")
        .replace("no = 2\n", "no = \"2\"\n")
        .replace("points = 5", "points = \"5\"");
    assert_ne!(text, other);
    assert_eq!(plan::parse(&other, "b").as_ref(), Ok(&plain));
}

#[test]
fn defaults_that_matter_and_oddities_are_told() {
    let text = "
        [job]
        reference = \"X\"
        title = \"X\"
        testers = \"A. Tester\"
        [supply]
        earthing = \"TT\"
        [[board]]
        id = \"DB1\"
        [[board.circuit]]
        no = 1
        kind = \"ring\"
        line-mm2 = 1.5
        cpc-mm2 = 2.5
        length-m = 40
        device = \"B32\"
        design-a = 40
        points = 1
    ";
    let loaded = plan::examine(text, "x.toml").unwrap_or_else(|wrong| panic!("{wrong}"));
    let told: Vec<&str> = loaded.notices.iter().map(|n| n.text.as_str()).collect();
    for part in [
        "gives no ambient-c",
        "no [[instrument]]",
        "gives no ze-ohm",
        "gives no main-earth",
        "TT without an RCD",
        "larger than the line",
        "a ring with one point",
        "design current 40 A above",
    ] {
        assert!(told.iter().any(|t| t.contains(part)), "{part}: {told:#?}");
    }
}
