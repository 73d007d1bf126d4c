//! Findings of insulation: what lies between the conductors, judged from all pairs read so far.
//!
//! Each explanation says in which span of resistance each pair falls; within a span all decades are
//! alike. The spans come from the trade (common practice, no source) except the varistor's
//! 0.3 MΩ at 500 V, which a published note reports.

use super::weigh::{Ballot, words};
use crate::domain::{expect::Finding, insulation::Span, test::Between};

/// One pair as read.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Pair {
    pub(crate) between: Between,
    pub(crate) span: Span,
    /// Whether this is the reading in hand.
    pub(crate) newest: bool,
}

/// What is known beside the readings.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Around {
    pub(crate) surge_protection: bool,
    pub(crate) electronics: bool,
    pub(crate) ceiling: f64,
    /// The reading in hand was said in another unit than the instrument shows.
    pub(crate) other_unit: bool,
}

/// Spans in MΩ for line-neutral, line-earth, neutral-earth, and between circuits.
struct Kind {
    code: &'static str,
    prior: f64,
    spans: [(f64, f64); 4],
    text: &'static str,
    check: &'static str,
}

const GOOD: (f64, f64) = (20.0, 1e5);
const ANY: (f64, f64) = (1e-3, 1e5);

const KINDS: [Kind; 11] = [
    Kind {
        code: "short",
        prior: 0.003,
        spans: [GOOD, (1e-6, 0.02), GOOD, GOOD],
        text: "line touches earth: as good as a short",
        check: "halve the circuit and read each half; look for a nail, a trapped core, a link left in",
    },
    Kind {
        code: "short",
        prior: 0.000_7,
        spans: [(1e-6, 0.004), GOOD, GOOD, GOOD],
        text: "line touches neutral: as good as a short",
        check: "look for a load still connected, then for a trapped or crossed core",
    },
    Kind {
        code: "neutral-earth-joined",
        prior: 0.003,
        spans: [GOOD, GOOD, (1e-6, 0.02), GOOD],
        text: "neutral and earth are joined: neutral still in its bar, or a touch",
        check: "take the neutral out of its terminal, then halve the circuit",
    },
    Kind {
        code: "appliance",
        prior: 0.005,
        spans: [(1e-6, 0.06), GOOD, GOOD, GOOD],
        text: "an appliance or lamp is still connected between line and neutral",
        check: "unplug, take lamps out, open local switches, read again",
    },
    Kind {
        code: "neon",
        prior: 0.004,
        spans: [(0.08, 0.7), GOOD, GOOD, GOOD],
        text: "a neon, dimmer or electronic control is left between line and neutral",
        check: "take neons, dimmers and controls out, or test lives joined to earth only",
    },
    Kind {
        code: "surge-device",
        prior: 0.000_1,
        spans: [ANY, (0.15, 0.6), (0.15, 0.6), GOOD],
        text: "a surge protective device is left in: about 0.3 MΩ to earth at 500 V",
        check: "pull its modules or disconnect it, then test again at 500 V",
    },
    Kind {
        code: "moisture",
        prior: 0.005,
        spans: [(0.03, 400.0), (0.02, 15.0), (0.02, 15.0), GOOD],
        text: "moisture or soiling: low to earth from both lives",
        check: "look for damp boxes, glands and outdoor runs; dry, then test again",
    },
    Kind {
        code: "moisture",
        prior: 0.001,
        spans: [(0.03, 15.0), (0.02, 30.0), (0.02, 30.0), (0.02, 30.0)],
        text: "moisture or soiling between all conductors",
        check: "look for damp boxes, glands and outdoor runs; dry, then test again",
    },
    Kind {
        code: "damaged-insulation",
        prior: 0.001_5,
        spans: [GOOD, (0.02, 15.0), GOOD, GOOD],
        text: "line insulation low to earth alone: damage or damp at one place",
        check: "halve the circuit and read each half",
    },
    Kind {
        code: "damaged-insulation",
        prior: 0.001_5,
        spans: [GOOD, GOOD, (0.02, 15.0), GOOD],
        text: "neutral insulation low to earth alone: damage or damp at one place",
        check: "halve the circuit and read each half",
    },
    Kind {
        code: "second-ring",
        prior: 0.002,
        spans: [GOOD, GOOD, GOOD, (1e-6, 0.02)],
        text: "this circuit is joined to another one: a second ring or a borrowed neutral",
        check: "read continuity between the legs of both circuits; they must be open",
    },
];

/// Log density of a span within another: uniform in the logarithm, soft at its ends.
fn density(seen: Span, within: (f64, f64)) -> f64 {
    let decades = (within.1 / within.0).log10();
    let inside = |value: f64| {
        let value = value.max(1e-6);
        let outside = if value < within.0 {
            (within.0 / value).log10()
        } else if value > within.1 {
            (value / within.1).log10()
        } else {
            0.0
        };
        -40.0 * outside * outside - 8.0 * outside
    };
    if seen.low == seen.high {
        // 0.00 stands for everything the display cannot tell from nothing.
        return if seen.low < 0.005 {
            share(1e-6, 0.005, within).ln()
        } else {
            inside(seen.low) - decades.ln()
        };
    }
    share(seen.low.max(1e-6), seen.high.min(1e6), within)
        .max(1e-9)
        .ln()
}

/// Share of a log-uniform span that another covers.
fn share(low: f64, high: f64, within: (f64, f64)) -> f64 {
    let (a, b) = (low.max(within.0), high.min(within.1));
    if a >= b {
        1e-9
    } else {
        ((b / a).log10() / (within.1 / within.0).log10()).max(1e-9)
    }
}

fn column(between: Between) -> Option<(usize, Option<usize>)> {
    Some(match between {
        Between::LineNeutral
        | Between::L1L2
        | Between::L2L3
        | Between::L1L3
        | Between::L1Neutral
        | Between::L2Neutral
        | Between::L3Neutral => (0, None),
        Between::LineEarth | Between::L1Earth | Between::L2Earth | Between::L3Earth => (1, None),
        Between::NeutralEarth => (2, None),
        Between::LivesEarth => (1, Some(2)),
        Between::OtherCircuits => (3, None),
    })
}

fn likelihood(pairs: &[Pair], spans: &[(f64, f64); 4]) -> f64 {
    pairs
        .iter()
        .filter_map(|pair| {
            let (one, other) = column(pair.between)?;
            // Lives joined: the worse of both counts, so the lower span is compared.
            let within = match other {
                Some(other) if spans[other].1 < spans[one].1 => spans[other],
                _ => spans[one],
            };
            Some(density(pair.span, within))
        })
        .sum()
}

/// Ranks what low insulation most likely means.
pub(crate) fn findings(pairs: &[Pair], around: Around, questioned: bool) -> Vec<Finding> {
    let healthy = [(2.0, 1e5), (2.0, 1e5), (2.0, 1e5), (2.0, 1e5)];
    let mut ballot = Ballot::new(likelihood(pairs, &healthy));
    for kind in KINDS {
        let favour: f64 = match kind.code {
            "surge-device" if around.surge_protection => 80.0,
            "neon" if around.electronics => 4.0,
            _ => 1.0,
        };
        let weight = (kind.prior * favour).ln() + likelihood(pairs, &kind.spans);
        ballot.add(kind.code, weight, move || words(kind.text, kind.check));
    }
    for pair in pairs.iter().filter(|pair| pair.newest) {
        let value = pair.span.low;
        // A figure of exactly nothing is nothing in every unit.
        if pair.span.low != pair.span.high || value < 1e-6 {
            continue;
        }
        // Entered in the wrong unit: a thousand times as much would be an ordinary reading.
        for (factor, what) in [(1e3, "a thousand times"), (1e6, "a million times")] {
            let meant: Vec<Pair> = pairs
                .iter()
                .map(|p| {
                    let mut p = *p;
                    if p.newest {
                        p.span.low *= factor;
                        p.span.high *= factor;
                    }
                    p
                })
                .collect();
            let plausible = value * factor >= 50.0 && value * factor <= around.ceiling * 1.2;
            if plausible {
                // A display in whole megohms said in the wrong unit leaves odd figures behind.
                let odd = match (around.other_unit, value < 0.01) {
                    (true, _) => 0.08_f64,
                    (false, true) => 0.02,
                    (false, false) => 0.000_5,
                };
                let usual = [(20.0, 2e3); 4];
                ballot.add(
                    "unit-slip",
                    odd.ln() + likelihood(&meant, &usual),
                    move || {
                        words(
                            format!("unit slip: {what} as much would be an ordinary reading"),
                            "read the unit on the display again",
                        )
                    },
                );
            }
        }
    }
    ballot.findings(questioned)
}
