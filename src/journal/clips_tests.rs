//! Clips come back sample for sample, and old ones go.

use std::os::unix::fs::PermissionsExt;

use proptest::prelude::*;

use super::*;

fn clips(folder: &tempfile::TempDir, keeping: Keeping) -> Clips {
    Clips::new(folder.path().join("mill.clips"), keeping)
}

/// A second of something voice-like: a swept tone with noise on it.
fn second(seed: i32) -> Vec<i16> {
    (0_i32..16_000)
        .map(|i| {
            let t = f64::from(i) / 16_000.0;
            let tone = (t * (900.0 + 400.0 * t) * std::f64::consts::TAU).sin() * 8000.0;
            let noise = (i.wrapping_mul(1_103_515_245).wrapping_add(seed) >> 16) % 300;
            tone as i16 + noise as i16
        })
        .collect()
}

#[test]
fn a_clip_comes_back_sample_for_sample_and_smaller() {
    let folder = tempfile::tempdir().expect("a folder");
    let clips = clips(&folder, Keeping::default());
    let samples = second(1);
    let saved = clips.save(&samples).expect("saved").expect("kept");
    assert_eq!(
        clips.load(&saved.file, Some(&saved.digest)).expect("there"),
        samples
    );
    assert_eq!(
        clips.holds(&saved.file, &saved.digest).expect("read"),
        Some(true)
    );
    let about = fs::metadata(folder.path().join("mill.clips").join(&saved.file)).expect("there");
    assert!(about.len() < 32_000, "{} bytes", about.len());
    assert_eq!(about.permissions().mode() & 0o777, 0o600);
}

#[test]
fn a_changed_clip_is_not_taken_for_the_one_in_the_log() {
    let folder = tempfile::tempdir().expect("a folder");
    let clips = clips(&folder, Keeping::default());
    let saved = clips.save(&second(1)).expect("saved").expect("kept");
    let path = folder.path().join("mill.clips").join(&saved.file);
    fs::write(&path, b"fLaC and nothing else").expect("written");
    assert_eq!(
        clips.holds(&saved.file, &saved.digest).expect("read"),
        Some(false)
    );
    let load = |digest| clips.load(&saved.file, digest);
    assert!(matches!(
        load(Some(&saved.digest)),
        Err(ClipError::OtherDigest { .. })
    ));
    assert!(matches!(load(None), Err(ClipError::NotAClip { .. })));
    fs::remove_file(&path).expect("there");
    assert_eq!(clips.holds(&saved.file, &saved.digest).expect("read"), None);
}

#[test]
fn a_name_out_of_a_log_does_not_lead_out_of_the_folder() {
    let folder = tempfile::tempdir().expect("a folder");
    let clips = clips(&folder, Keeping::default());
    for file in ["../mill.log.toml", "/etc/hostname", "..", "", "a/b.flac"] {
        let error = clips.load(file, None).expect_err(file);
        assert!(
            matches!(error, ClipError::NotAName { .. }),
            "{file}: {error}"
        );
    }
}

#[test]
fn none_is_kept_when_none_is_wanted() {
    let folder = tempfile::tempdir().expect("a folder");
    assert_eq!(
        clips(&folder, Keeping::NONE)
            .save(&second(1))
            .expect("fine"),
        None
    );
    assert!(!folder.path().join("mill.clips").exists());
}

#[test]
fn clips_over_age_go_and_then_the_oldest_over_size() {
    let folder = tempfile::tempdir().expect("a folder");
    let clips = clips(&folder, Keeping::default());
    let now = SystemTime::now();
    let mut sizes = vec![];
    for (seed, days) in [(1, 100), (2, 30), (3, 1)] {
        let saved = clips.save(&second(seed)).expect("saved").expect("kept");
        let path = folder.path().join("mill.clips").join(saved.file);
        let file = fs::File::options().write(true).open(&path).expect("there");
        sizes.push(file.metadata().expect("there").len());
        file.set_modified(now - Duration::from_secs(days * 86_400))
            .expect("set");
    }
    assert_eq!(clips.prune(now).expect("pruned"), 1);
    let tight = Keeping {
        bytes: sizes[2],
        ..Keeping::default()
    };
    let clips = Clips::new(folder.path().join("mill.clips"), tight);
    assert_eq!(clips.prune(now).expect("pruned"), 1);
    assert_eq!(clips.prune(now).expect("pruned"), 0, "the newest stays");
}

#[test]
fn a_clip_may_end_in_a_block_of_a_few_samples() {
    for n in [1, 15, 16, 4096 + 1, 4096 + 15] {
        let samples: Vec<i16> = (0..n).map(|i| (i % 700) as i16).collect();
        let bytes = compress(&samples).expect("compressed");
        assert_eq!(expand(&bytes), Ok(samples), "{n}");
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 64, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn any_samples_come_back(samples in prop::collection::vec(any::<i16>(), 1..9000)) {
        let bytes = compress(&samples).expect("compressed");
        prop_assert_eq!(expand(&bytes).expect("expanded"), samples);
    }

    #[test]
    fn no_bytes_make_the_reader_of_clips_panic(
        at in any::<prop::sample::Index>(),
        with in any::<u8>(),
        noise in prop::collection::vec(any::<u8>(), 0..200),
    ) {
        let mut bytes = compress(&second(4)[..2000]).expect("compressed");
        let n = bytes.len();
        bytes[at.index(n)] ^= with;
        let _ = expand(&bytes);
        let _ = expand(&noise);
    }
}
