//! Laws that hold for every input.

use handsfull::domain::{
    conductor::{of_size, sizes},
    expected::expected,
    insulation::{Span, parallel},
    kept::Kept,
    network::Network,
    plan::{CircuitKind, Class, LengthBasis, Material, TemperatureRule},
    quantity::{Celsius, Metres, Ohms, Round, show},
    ring::{cross, own_leg},
    temperature::{From20, To20},
    test::TestKind,
};
use proptest::prelude::*;

use crate::jobs::{circuit, job, target};

fn ohms(value: f64) -> Ohms {
    Ohms::new(value).expect("an ohm")
}

fn pairs() -> impl Strategy<Value = (f64, f64)> {
    prop::sample::select(vec![
        (1.0, 1.0),
        (1.5, 1.0),
        (2.5, 1.5),
        (4.0, 1.5),
        (6.0, 2.5),
        (10.0, 4.0),
    ])
}

proptest! {
    #[test]
    fn resistance_rises_with_length_and_temperature(
        index in 0_usize..19, m in 0.1_f64..5000.0, more in 0.01_f64..1000.0,
        c in -20.0_f64..80.0, warmer in 0.1_f64..40.0,
    ) {
        let mm2 = sizes(Material::Copper, Class::Two)[index];
        let rate = of_size(mm2, Material::Copper, Class::Two).expect("in the table");
        let of = |m: f64| Metres::new(m).expect("a length").of(rate).ohm();
        prop_assert!(of(m + more) > of(m));
        for rule in [TemperatureRule::Simplified, TemperatureRule::Exact] {
            let at = |c| From20::to(rule, Material::Copper, Celsius::new(c).expect("in bounds"));
            prop_assert!(at(c + warmer) > at(c));
            let back = To20::from(rule, Material::Copper, Celsius::new(c).expect("in bounds"));
            prop_assert!((back.then(at(c)) - 1.0).abs() < 1e-12);
        }
    }

    #[test]
    fn a_ring_is_symmetric_about_its_middle_and_the_solver_agrees(
        a in 0.05_f64..3.0, b in 0.05_f64..3.0, x in 0.001_f64..0.999,
    ) {
        let here = cross(ohms(a), ohms(b), x);
        prop_assert!((here - cross(ohms(a), ohms(b), 1.0 - x)).abs() < 1e-12);
        prop_assert!(here <= (a + b) / 4.0 + 1e-12);
        prop_assert!(here >= a * b / (a + b) - 1e-12);
        for own in [false, true] {
            let mut net = Network::new();
            let n = net.nodes(6);
            net.join(n[0], n[1], a * x);
            net.join(n[1], n[2], a * (1.0 - x));
            net.join(n[3], n[4], b * x);
            net.join(n[4], n[5], b * (1.0 - x));
            let (one, two) = if own { (n[3], n[5]) } else { (n[5], n[3]) };
            net.join(n[0], one, 0.0);
            net.join(n[2], two, 0.0);
            let solved = net.between(n[1], n[4]).expect("connected");
            let closed = if own { own_leg(ohms(a), ohms(b), x) } else { here };
            prop_assert!((solved - closed).abs() < 1e-5, "{solved} {closed}");
        }
    }

    #[test]
    fn the_parallel_of_insulation_is_never_above_its_parts(
        parts in prop::collection::vec((0.001_f64..2000.0, any::<bool>()), 1..9),
    ) {
        let spans: Vec<Span> = parts
            .iter()
            .map(|(v, over)| Span { low: *v, high: if *over { f64::INFINITY } else { *v } })
            .collect();
        let all = parallel(&spans);
        let least = spans.iter().map(|s| s.low).fold(f64::INFINITY, f64::min);
        prop_assert!(all.low <= least + 1e-12);
        prop_assert!(all.low <= all.high);
        let least_high = spans.iter().map(|s| s.high).fold(f64::INFINITY, f64::min);
        prop_assert!(all.high <= least_high + 1e-9 || least_high.is_infinite());
    }

    #[test]
    fn an_expected_range_holds_its_nominal_and_widens_with_doubt(
        (line, cpc) in pairs(), m in 1.0_f64..150.0, points in 1_usize..9, ambient in 0.0_f64..35.0,
    ) {
        let mut last = 0.0;
        for basis in [LengthBasis::Measured, LengthBasis::Drawing, LengthBasis::Guess] {
            let mut circuit = circuit(1, CircuitKind::Radial, (line, cpc), m, points);
            circuit.length.basis = basis;
            let mut job = job(vec![circuit]);
            job.ambient_c = ambient;
            let far = u16::try_from(points).ok();
            let range = expected(&job, &target(TestKind::R1R2, 1, far), &Kept::new());
            let (low, nominal, high) = (range.low, range.nominal, range.high);
            prop_assert!(low <= nominal && nominal <= high, "{range:?}");
            let width: f64 = (high.expect("an end") - low.expect("an end")).try_into().expect("a number");
            prop_assert!(width >= last);
            last = width;
        }
    }

    #[test]
    fn rounding_never_narrows(value in 0.0_f64..5000.0, places in 0_u32..4) {
        let down: f64 = show(value, places, Round::Down).try_into().expect("a number");
        let up: f64 = show(value, places, Round::Up).try_into().expect("a number");
        prop_assert!(down <= value + 1e-6 && value <= up + 1e-6);
        prop_assert!(up - down <= 10_f64.powi(-i32::try_from(places).unwrap_or(0)) + 1e-9);
    }
}
