//! The plan of one job: people, supply and earthing, boards, circuits, what they are made of.
//!
//! These types hold what the loader (`crate::plan`) has already checked: sizes exist, lengths are
//! positive, names are unique, references lead somewhere. Lengths are metres, cross-sections mm²,
//! temperatures °C, rated currents A, all as `f64`: they are inputs to the physics, never readings.

use rust_decimal::Decimal;

use super::{
    place::{BoardId, CircuitNo, PointNo},
    reading::Unit,
};

/// One job.
#[derive(Debug, Clone, PartialEq)]
pub struct Job {
    /// Short reference, used in file names: letters, digits, dashes.
    pub reference: String,
    /// What the job is, in words.
    pub title: String,
    /// Where it is; may be empty.
    pub address: String,
    /// For whom; may be empty.
    pub client: String,
    /// Who tests. At least one.
    pub testers: Vec<String>,
    /// Ambient temperature at the conductors on the day.
    pub ambient_c: f64,
    /// Rules chosen where the sources disagree.
    pub rules: Rules,
    /// The supply.
    pub supply: Supply,
    /// Bonding conductors and other job-level protective conductors.
    pub bonds: Vec<Bond>,
    /// The instruments used.
    pub instruments: Vec<Instrument>,
    /// Boards, in the order in which they are worked.
    pub boards: Vec<Board>,
    /// The job's own names of places, for the recogniser.
    pub place_names: Vec<PlaceName>,
}

/// A name of the job's own ("boiler house") and what it stands for.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct PlaceName {
    /// In lower case.
    pub name: String,
    /// Pronunciations given by the user (phones of the pronunciation file), if any.
    pub say: Vec<String>,
    /// The board it calls.
    pub board: Option<BoardId>,
    /// The circuit it calls.
    pub circuit: Option<CircuitNo>,
}

/// Choices where published sources disagree; every output names them.
#[derive(Debug, Clone, PartialEq)]
pub struct Rules {
    /// Edition whose limits are used, as text for the schedule ("BS 7671:2018+A2:2022").
    pub edition: String,
    /// 0.004 simplified or the exact IEC 60228 form.
    pub temperature: TemperatureRule,
    /// Cold measurement of Zs: 0.8 of the tabulated value, or two thirds (IEC 60364-6).
    pub cold_loop: ColdLoopRule,
    /// Highest earth electrode resistance with an RCD: 50/IΔn or a stable 200 Ω.
    pub electrode: ElectrodeRule,
    /// Insulation to earth conductor by conductor; otherwise the lives are joined.
    pub insulation_separately: bool,
    /// Whether the test at five times the rated residual current is wanted.
    pub rcd_five_times: bool,
    /// Whether the test at half the rated residual current is wanted.
    pub rcd_half: bool,
    /// Whether live tests belong to this job at all.
    pub live_tests: bool,
    /// Below this, insulation that meets the minimum is investigated all the same (MΩ).
    pub investigate_below_megohm: f64,
}

/// Temperature correction of conductor resistance.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum TemperatureRule {
    /// 1 + 0.004 (t − 20), copper and aluminium.
    Simplified,
    /// IEC 60228 annex: 0.00393 copper, 0.00403 aluminium.
    Exact,
}

/// How a cold measurement is compared with the tabulated maximum Zs.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum ColdLoopRule {
    /// Measured ≤ 0.8 × tabulated (UK).
    FourFifths,
    /// Measured ≤ 2/3 × U0/Ia (IEC 60364-6, informative).
    TwoThirds,
}

/// Limit of the earth electrode resistance in a TT system with RCD.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum ElectrodeRule {
    /// RA ≤ 50 V / IΔn.
    FiftyVolts,
    /// RA ≤ 200 Ω, above which it may not be stable.
    TwoHundredOhm,
}

/// System earthing (IEC 60364-1).
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[allow(missing_docs)] // standard names
pub enum Earthing {
    TnS,
    TnCS,
    Tt,
    It,
}

/// The supply as declared.
#[derive(Debug, Clone, PartialEq)]
pub struct Supply {
    /// System earthing.
    pub earthing: Earthing,
    /// Nominal voltage to earth, U0.
    pub u0_v: f64,
    /// Three-phase or not.
    pub three_phase: bool,
    /// External loop impedance, declared or measured before, Ω.
    pub ze_ohm: Option<f64>,
    /// Prospective fault current declared, kA.
    pub fault_ka: Option<f64>,
    /// Main earthing conductor.
    pub main_earth: Option<Run>,
    /// Earth electrodes by name (TT).
    pub electrodes: Vec<String>,
    /// Other sources on site (PV, battery, generator): shown in the isolation reminders.
    pub other_sources: Vec<String>,
}

/// Conductor material.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[allow(missing_docs)]
pub enum Material {
    Copper,
    Aluminium,
}

/// IEC 60228 class of a conductor.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[allow(missing_docs)]
pub enum Class {
    /// Solid.
    One,
    /// Stranded.
    Two,
    /// Flexible.
    Five,
}

/// A conductor: a size of IEC 60228, or a resistance per metre the user gives (armour, conduit).
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Conductor {
    /// By size.
    Size {
        /// Cross-section in mm²; one of the table.
        mm2: f64,
        /// Copper or aluminium.
        material: Material,
        /// Class.
        class: Class,
    },
    /// By resistance: mΩ/m at 20 °C.
    Given {
        /// mΩ/m at 20 °C.
        milliohm_per_m: f64,
    },
}

/// How well a length is known.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum LengthBasis {
    /// Measured along the run.
    Measured,
    /// Scaled from a drawing.
    Drawing,
    /// Guessed.
    Guess,
}

/// A length in metres and how well it is known.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Length {
    /// Metres.
    pub m: f64,
    /// How well it is known.
    pub basis: LengthBasis,
}

/// One conductor over one length.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Run {
    /// What it is.
    pub conductor: Conductor,
    /// How long.
    pub length: Length,
}

/// A protective bonding conductor.
#[derive(Debug, Clone, PartialEq)]
pub struct Bond {
    /// What it bonds: "water", "gas", "structural steel".
    pub name: String,
    /// The conductor.
    pub run: Run,
}

/// What an instrument can show for one function.
#[derive(Debug, Clone, PartialEq)]
pub struct InstrumentRange {
    /// The unit shown.
    pub unit: Unit,
    /// Smallest step at low readings.
    pub resolution: Decimal,
    /// Highest figure shown before over-range.
    pub ceiling: Decimal,
    /// Accuracy, percent of reading.
    pub accuracy_percent: f64,
    /// Accuracy, digits of the last place.
    pub accuracy_digits: f64,
}

/// An instrument.
#[derive(Debug, Clone, PartialEq)]
pub struct Instrument {
    /// What it is, in the user's words.
    pub description: String,
    /// Serial number.
    pub serial: String,
    /// Date of the calibration certificate, as entered (ISO date); may be empty.
    pub calibrated: String,
    /// Continuity function.
    pub continuity: InstrumentRange,
    /// Insulation function.
    pub insulation: InstrumentRange,
}

/// A board.
#[derive(Debug, Clone, PartialEq)]
pub struct Board {
    /// Its name.
    pub id: BoardId,
    /// Where it is; may be empty.
    pub place: String,
    /// The circuit that feeds it, if it is not the origin.
    pub fed_from: Option<(BoardId, CircuitNo)>,
    /// Loop impedance at the board (Zdb), Ω, if known.
    pub zdb_ohm: Option<f64>,
    /// Surge protection in the board: out or tested at 250 V.
    pub surge_protection: bool,
    /// Its circuits, in order of their ways.
    pub circuits: Vec<Circuit>,
}

/// What a circuit is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum CircuitKind {
    /// Ring final circuit.
    Ring,
    /// Radial with socket-outlets.
    Radial,
    /// Lighting.
    Lighting,
    /// One fixed appliance.
    Fixed,
    /// Feeds another board.
    Distribution,
    /// Separated extra-low voltage.
    Selv,
    /// Protective extra-low voltage.
    Pelv,
}

/// Type of a protective device.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum DeviceType {
    /// Circuit-breaker or RCBO, characteristic B (BS EN 60898, 61009).
    B,
    /// Characteristic C.
    C,
    /// Characteristic D.
    D,
    /// Fuse gG, BS 88-2.
    Bs88_2,
    /// Fuse, BS 88-3.
    Bs88_3,
    /// Semi-enclosed fuse, BS 3036.
    Bs3036,
    /// Fuse, BS 1361 (withdrawn).
    Bs1361,
}

/// Residual current device.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Rcd {
    /// Rated residual current, mA.
    pub rated_ma: f64,
    /// Time-delayed (S).
    pub delayed: bool,
}

/// Protective device.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Device {
    /// Type.
    pub kind: DeviceType,
    /// Rated current, A.
    pub rated_a: f64,
    /// Its residual current function, or the RCD upstream.
    pub rcd: Option<Rcd>,
}

/// Insulation of the cable, for the operating temperature.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Insulation {
    /// 70 °C thermoplastic.
    Thermoplastic70,
    /// 90 °C thermosetting.
    Thermosetting90,
}

/// The cable of a circuit.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Cable {
    /// Line conductor.
    pub line: Conductor,
    /// Neutral conductor.
    pub neutral: Conductor,
    /// Protective conductor; none for SELV.
    pub cpc: Option<Conductor>,
    /// Insulation.
    pub insulation: Insulation,
}

/// A point of a circuit.
#[derive(Debug, Clone, PartialEq)]
pub struct Point {
    /// Its number along the run.
    pub no: PointNo,
    /// What it is ("hall socket"); may be empty.
    pub name: String,
    /// Metres along the run from the board; for a spur, of the point it leaves from.
    pub at_m: Option<f64>,
    /// A spur: metres of branch from `at_m`.
    pub spur_m: Option<f64>,
}

/// A circuit.
#[derive(Debug, Clone, PartialEq)]
pub struct Circuit {
    /// Its number on the board.
    pub no: CircuitNo,
    /// What it feeds.
    pub name: String,
    /// What it is.
    pub kind: CircuitKind,
    /// Three-phase.
    pub three_phase: bool,
    /// A three-phase circuit whose cable has no neutral (motors).
    pub without_neutral: bool,
    /// The cable.
    pub cable: Cable,
    /// Whole length: board to furthest point, or the whole loop of a ring.
    pub length: Length,
    /// Protective device.
    pub device: Device,
    /// Points, at least one, in order along the run.
    pub points: Vec<Point>,
    /// Electronics that cannot be disconnected: 250 V or lives joined.
    pub electronics: bool,
    /// R2 by long lead in place of R1+R2.
    pub long_lead: bool,
    /// Design current, A, for the voltage drop.
    pub design_a: Option<f64>,
}

impl Job {
    /// The board of that name.
    #[must_use]
    pub fn board(&self, id: &BoardId) -> Option<&Board> {
        self.boards.iter().find(|board| &board.id == id)
    }

    /// The circuit of that board and number.
    #[must_use]
    pub fn circuit(&self, board: &BoardId, no: CircuitNo) -> Option<&Circuit> {
        self.board(board)?.circuits.iter().find(|c| c.no == no)
    }
}
