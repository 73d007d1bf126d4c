//! The words of the plan's closed lists, as they stand in job files and on a schedule.
//!
//! One table a type, read by the loader, the writer and the reports, so that no word is spelt in
//! two places. It leaves out sentences: those belong where they are shown.

use super::plan::{
    CircuitKind, ColdLoopRule, Device, DeviceType, Earthing, ElectrodeRule, Insulation,
    LengthBasis, Material, Rules, TemperatureRule,
};

/// A closed list whose members have a word each.
pub trait Worded: Copy + PartialEq + 'static {
    /// What a member is, for messages: "kind of circuit".
    const WHAT: &'static str;
    /// Every member with its word.
    const WORDS: &'static [(&'static str, Self)];

    /// The member's word.
    #[must_use]
    fn word(self) -> &'static str {
        Self::WORDS
            .iter()
            .find(|(_, member)| *member == self)
            .map_or("", |(word, _)| word)
    }

    /// The member of that word; capitals do not matter.
    #[must_use]
    fn from_word(word: &str) -> Option<Self> {
        Self::WORDS
            .iter()
            .find(|(w, _)| w.eq_ignore_ascii_case(word.trim()))
            .map(|(_, member)| *member)
    }
}

impl Worded for Earthing {
    const WHAT: &'static str = "system of earthing";
    const WORDS: &'static [(&'static str, Self)] = &[
        ("TN-S", Earthing::TnS),
        ("TN-C-S", Earthing::TnCS),
        ("TT", Earthing::Tt),
        ("IT", Earthing::It),
    ];
}

impl Worded for CircuitKind {
    const WHAT: &'static str = "kind of circuit";
    const WORDS: &'static [(&'static str, Self)] = &[
        ("ring", CircuitKind::Ring),
        ("radial", CircuitKind::Radial),
        ("lighting", CircuitKind::Lighting),
        ("fixed", CircuitKind::Fixed),
        ("distribution", CircuitKind::Distribution),
        ("selv", CircuitKind::Selv),
        ("pelv", CircuitKind::Pelv),
    ];
}

impl Worded for DeviceType {
    const WHAT: &'static str = "type of protective device";
    const WORDS: &'static [(&'static str, Self)] = &[
        ("B", DeviceType::B),
        ("C", DeviceType::C),
        ("D", DeviceType::D),
        ("BS 88-2", DeviceType::Bs88_2),
        ("BS 88-3", DeviceType::Bs88_3),
        ("BS 3036", DeviceType::Bs3036),
        ("BS 1361", DeviceType::Bs1361),
    ];
}

impl Worded for Material {
    const WHAT: &'static str = "conductor material";
    const WORDS: &'static [(&'static str, Self)] = &[
        ("copper", Material::Copper),
        ("aluminium", Material::Aluminium),
    ];
}

impl Worded for Insulation {
    const WHAT: &'static str = "cable insulation";
    const WORDS: &'static [(&'static str, Self)] = &[
        ("thermoplastic-70", Insulation::Thermoplastic70),
        ("thermosetting-90", Insulation::Thermosetting90),
    ];
}

impl Worded for LengthBasis {
    const WHAT: &'static str = "way of knowing a length";
    const WORDS: &'static [(&'static str, Self)] = &[
        ("measured", LengthBasis::Measured),
        ("drawing", LengthBasis::Drawing),
        ("guess", LengthBasis::Guess),
    ];
}

impl Worded for TemperatureRule {
    const WHAT: &'static str = "temperature rule";
    const WORDS: &'static [(&'static str, Self)] = &[
        ("simplified", TemperatureRule::Simplified),
        ("exact", TemperatureRule::Exact),
    ];
}

impl Worded for ColdLoopRule {
    const WHAT: &'static str = "rule for cold loop impedance";
    const WORDS: &'static [(&'static str, Self)] = &[
        ("four-fifths", ColdLoopRule::FourFifths),
        ("two-thirds", ColdLoopRule::TwoThirds),
    ];
}

impl Worded for ElectrodeRule {
    const WHAT: &'static str = "rule for the earth electrode";
    const WORDS: &'static [(&'static str, Self)] = &[
        ("50-volts", ElectrodeRule::FiftyVolts),
        ("200-ohm", ElectrodeRule::TwoHundredOhm),
    ];
}

impl Device {
    /// Type and rating as written on it and in job files: `B32`, `BS 88-2 63`.
    #[must_use]
    pub fn label(&self) -> String {
        let word = self.kind.word();
        let gap = if word.len() > 1 { " " } else { "" };
        format!("{word}{gap}{}", self.rated_a)
    }
}

impl Default for Rules {
    /// What a job file gets that says nothing about rules. The edition is the newest whose
    /// figures were read for this project; a newer one may be in force where the job is.
    fn default() -> Self {
        Self {
            edition: "BS 7671:2018+A2:2022".into(),
            temperature: TemperatureRule::Simplified,
            cold_loop: ColdLoopRule::FourFifths,
            electrode: ElectrodeRule::TwoHundredOhm,
            insulation_separately: false,
            rcd_five_times: false,
            rcd_half: false,
            live_tests: false,
            investigate_below_megohm: 2.0,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn every_word_comes_back<T: Worded + std::fmt::Debug>() {
        for (word, member) in T::WORDS {
            assert_eq!(T::from_word(word), Some(*member));
            assert_eq!(member.word(), *word);
        }
    }

    #[test]
    fn a_word_and_its_member_lead_to_each_other() {
        every_word_comes_back::<Earthing>();
        every_word_comes_back::<CircuitKind>();
        every_word_comes_back::<DeviceType>();
        every_word_comes_back::<Material>();
        every_word_comes_back::<Insulation>();
        every_word_comes_back::<LengthBasis>();
        every_word_comes_back::<TemperatureRule>();
        every_word_comes_back::<ColdLoopRule>();
        every_word_comes_back::<ElectrodeRule>();
    }
}
