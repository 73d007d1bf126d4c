//! The read-back clips, built in, and decoded when they are said.
//!
//! The list is made by `build.rs` from `src/voice/clips/*.flac`, in order of their names. Promises:
//! every clip is 16 kHz mono (a test decodes all). How they were made: `src/voice/clips/README.md`.

include!(concat!(env!("OUT_DIR"), "/clips.rs"));

/// Samples a second of every clip.
pub const RATE: u32 = 16_000;

/// A clip's samples, from -1 to 1; empty when it cannot be decoded.
#[must_use]
pub fn samples(flac: &[u8]) -> Vec<f32> {
    decode(flac)
        .unwrap_or_default()
        .into_iter()
        .map(|s| f32::from(s) / 32_768.0)
        .collect()
}

/// Decodes a FLAC of 16 kHz, mono, 16 bits.
///
/// # Errors
/// What is wrong with it, in words.
pub fn decode(flac: &[u8]) -> Result<Vec<i16>, String> {
    let mut reader = claxon::FlacReader::new(flac).map_err(|e| format!("not FLAC: {e}"))?;
    let info = reader.streaminfo();
    if (info.sample_rate, info.channels, info.bits_per_sample) != (RATE, 1, 16) {
        return Err(format!(
            "{} Hz, {} channels, {} bits; a clip is 16000 Hz, mono, 16 bits",
            info.sample_rate, info.channels, info.bits_per_sample
        ));
    }
    reader
        .samples()
        .map(|s| {
            let s = s.map_err(|e| format!("broken FLAC: {e}"))?;
            i16::try_from(s).map_err(|_| format!("a sample of {s} in 16 bits"))
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_clip_decodes_and_is_neither_silent_nor_long() {
        assert!(CLIPS.len() > 100, "{} clips", CLIPS.len());
        for (name, flac) in CLIPS {
            let samples = decode(flac).unwrap_or_else(|e| panic!("{name}: {e}"));
            let seconds = samples.len() as f32 / RATE as f32;
            assert!((0.1..4.0).contains(&seconds), "{name}: {seconds} s");
            let loudest = samples.iter().map(|s| s.unsigned_abs()).max();
            assert!(loudest > Some(3_000), "{name}: {loudest:?}");
        }
    }

    #[test]
    fn all_clips_together_stay_small() {
        let bytes: usize = CLIPS.iter().map(|(_, flac)| flac.len()).sum();
        assert!(bytes <= 3_000_000, "{bytes} bytes");
    }

    #[test]
    fn the_list_of_phrases_and_the_clips_are_the_same() {
        let mut listed: Vec<String> = include_str!("../clips/phrases.txt")
            .lines()
            .map(|l| l.split(['#', '=']).next().unwrap_or_default().trim())
            .filter(|l| !l.is_empty())
            .map(|l| l.replace(' ', "-"))
            .collect();
        listed.sort();
        let made: Vec<&str> = CLIPS.iter().map(|(name, _)| *name).collect();
        assert_eq!(listed, made);
    }
}
