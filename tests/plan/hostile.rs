//! Text that is no job file, or was one before it was mangled: an answer, never a panic.

use handsfull::plan::{self, PlanError};
use proptest::prelude::*;

use super::fixtures;

/// Loading must answer; a refusal must hold at least one mistake, each with a real place.
fn answers(text: &str) {
    if let Err(wrong) = plan::examine(text, "x.toml") {
        let PlanError::Wrong { mistakes, .. } = &wrong else {
            panic!("{wrong}");
        };
        assert!(!mistakes.is_empty());
        let lines = text.split('\n').count();
        for m in mistakes {
            assert!((1..=lines).contains(&m.line), "{m:?} in {lines} lines");
            assert!(m.column >= 1 && !m.what.is_empty() && !m.right.is_empty());
        }
        let _ = wrong.to_string();
    }
}

#[test]
fn deep_and_long_files_are_answered() {
    answers(&"[".repeat(20_000));
    answers(&format!("a = {}", "[".repeat(20_000)));
    answers(&format!("a = {}", "{a=".repeat(5_000)));
    answers(&"[[board]]\n".repeat(3_000));
    answers(&format!("[job]\ntitle = \"{}\"\n", "x".repeat(1_000_000)));
    answers("\u{feff}[job]\n");
    answers("[job]\r\nreference = \"X\"\r\n");
    answers("[job]\nambient-c = 99999999999999999999999999999999999999999\n");
    answers("[job]\nambient-c = nan\n[supply]\nze-ohm = inf\nu0-v = 0x10\n");
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(256))]

    #[test]
    fn any_bytes_read_as_text_are_answered(bytes in prop::collection::vec(any::<u8>(), 0..400)) {
        answers(&String::from_utf8_lossy(&bytes));
    }

    #[test]
    fn toml_like_noise_is_answered(text in "[\\[\\]{}=\"'.,#a-z0-9\\- \n]{0,200}") {
        answers(&text);
    }

    /// A real file with a stretch cut out, doubled or replaced.
    #[test]
    fn a_mangled_file_is_answered(
        which in 0..4_usize,
        from in 0.0..1.0_f64,
        size in 0..60_usize,
        filler in "[\\[\\]{}=\"0-9a-zü\n]{0,8}",
        doubled: bool,
    ) {
        let text = std::fs::read_to_string(fixtures::path(fixtures::ALL[which])).expect("a fixture");
        let chars: Vec<char> = text.chars().collect();
        let start = ((chars.len() as f64) * from) as usize;
        let end = (start + size).min(chars.len());
        let mut mangled: String = chars[..start].iter().collect();
        mangled.push_str(&filler);
        if doubled {
            mangled.extend(&chars[start..end]);
            mangled.extend(&chars[start..end]);
        }
        mangled.extend(&chars[end..]);
        answers(&mangled);
    }
}
