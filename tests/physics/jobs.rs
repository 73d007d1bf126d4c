//! Jobs for these tests, of an invented workshop.

use handsfull::domain::{
    place::{BoardId, CircuitNo, PointNo},
    plan::{
        Board, Cable, Circuit, CircuitKind, Class, ColdLoopRule, Conductor, Device, DeviceType,
        Earthing, ElectrodeRule, Instrument, Insulation, Job, Length, LengthBasis, Material, Point,
        Rules, Supply, TemperatureRule,
    },
    range::{usual_continuity, usual_insulation},
    test::{Target, TestKind},
};

pub fn copper(mm2: f64) -> Conductor {
    Conductor::Size {
        mm2,
        material: Material::Copper,
        class: Class::One,
    }
}

pub fn board() -> BoardId {
    BoardId::new("DB1").expect("a board name")
}

pub fn no(way: u16) -> CircuitNo {
    CircuitNo::new(way, None).expect("a way")
}

pub fn circuit(way: u16, kind: CircuitKind, pair: (f64, f64), m: f64, points: usize) -> Circuit {
    Circuit {
        no: no(way),
        name: String::new(),
        kind,
        three_phase: false,
        cable: Cable {
            line: copper(pair.0),
            neutral: copper(pair.0),
            cpc: Some(copper(pair.1)),
            insulation: Insulation::Thermoplastic70,
        },
        without_neutral: false,
        length: Length {
            m,
            basis: LengthBasis::Measured,
        },
        device: Device {
            kind: DeviceType::B,
            rated_a: 32.0,
            rcd: None,
        },
        points: (1..=points)
            .map(|n| Point {
                no: PointNo(u16::try_from(n).unwrap_or(u16::MAX)),
                name: String::new(),
                at_m: None,
                spur_m: None,
            })
            .collect(),
        electronics: false,
        long_lead: false,
        design_a: None,
    }
}

pub fn job(circuits: Vec<Circuit>) -> Job {
    Job {
        reference: "mill".into(),
        title: "Old mill".into(),
        address: String::new(),
        client: String::new(),
        testers: vec!["A. Tester".into()],
        ambient_c: 20.0,
        rules: Rules {
            edition: "BS 7671:2018+A2:2022".into(),
            temperature: TemperatureRule::Simplified,
            cold_loop: ColdLoopRule::FourFifths,
            electrode: ElectrodeRule::FiftyVolts,
            rcd_five_times: false,
            rcd_half: false,
            live_tests: true,
            investigate_below_megohm: 2.0,
            insulation_separately: true,
        },
        supply: Supply {
            earthing: Earthing::TnCS,
            u0_v: 230.0,
            three_phase: false,
            ze_ohm: Some(0.35),
            fault_ka: None,
            main_earth: None,
            electrodes: Vec::new(),
            other_sources: Vec::new(),
        },
        bonds: Vec::new(),
        instruments: vec![Instrument {
            description: "tester".into(),
            serial: "1".into(),
            calibrated: String::new(),
            continuity: usual_continuity(),
            insulation: usual_insulation(),
        }],
        boards: vec![Board {
            id: board(),
            place: String::new(),
            fed_from: None,
            zdb_ohm: None,
            surge_protection: false,
            circuits,
        }],
        place_names: Vec::new(),
    }
}

pub fn target(test: TestKind, way: u16, point: Option<u16>) -> Target {
    Target {
        test,
        board: Some(board()),
        circuit: Some(no(way)),
        point: point.map(PointNo),
        name: None,
    }
}
