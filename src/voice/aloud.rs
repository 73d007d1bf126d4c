//! Sounds of a word read aloud by a general synthesiser, espeak-ng, where that program is there.
//!
//! Promises: what is spoken is exactly the sounds given, as its phonemes, never a spelling; without
//! the program one line names the package. It leaves out what is worth hearing (`commands`), and
//! the recogniser and the read-back of readings, which never come here.

use std::{
    io::{Cursor, ErrorKind},
    process::{Command, Stdio},
};

use hound::WavReader;

use super::front::resample::Resampler;
use crate::speech::lexicon::{Phone, Pronunciation};

/// The program, looked for on the PATH.
pub const PROGRAM: &str = "espeak-ng";

/// Its British voice.
const VOICE: &str = "en-gb";
/// Words a minute; it speaks 175 when not told, slowed here so that a
/// name can be judged (common practice, no source).
const PACE: &str = "130";

/// Our sounds and espeak-ng's names of phonemes.
///
/// Sources: espeak-ng 1.51, docs/languages/gmw/en.md, column `en`, for vowels by their lexical set
/// (CMU's AA is PALM, AO is THOUGHT, AH is STRUT, ER is NURSE), and docs/phonemes/kirshenbaum.md for
/// consonants. `tS` and `dZ` join two of the latter; a test compares all with its IPA output.
const PHONEMES: [(&str, &str); 39] = [
    ("AA", "A:"),
    ("AE", "a"),
    ("AH", "V"),
    ("AO", "O:"),
    ("AW", "aU"),
    ("AY", "aI"),
    ("B", "b"),
    ("CH", "tS"),
    ("D", "d"),
    ("DH", "D"),
    ("EH", "E"),
    ("ER", "3:"),
    ("EY", "eI"),
    ("F", "f"),
    ("G", "g"),
    ("HH", "h"),
    ("IH", "I"),
    ("IY", "i:"),
    ("JH", "dZ"),
    ("K", "k"),
    ("L", "l"),
    ("M", "m"),
    ("N", "n"),
    ("NG", "N"),
    ("OW", "oU"),
    ("OY", "OI"),
    ("P", "p"),
    ("R", "r"),
    ("S", "s"),
    ("SH", "S"),
    ("T", "t"),
    ("TH", "T"),
    ("UH", "U"),
    ("UW", "u:"),
    ("V", "v"),
    ("W", "w"),
    ("Y", "j"),
    ("Z", "z"),
    ("ZH", "Z"),
];

/// CMU's AH without stress is the vowel of COMMA (the same table, reduced vowels).
const COMMA: &str = "@";

/// Why nothing could be read aloud.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum AloudError {
    /// The program is not on the PATH.
    #[error("{PROGRAM} is not there to read sounds aloud (Debian package {PROGRAM})")]
    Missing,
    /// It ran, but gave no sound.
    #[error("{PROGRAM} gave no sound for `{phonemes}`: {why}")]
    Failed {
        /// What it was given.
        phonemes: String,
        /// What it, or the system, says.
        why: String,
    },
}

/// Sound, mono.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Spoken {
    /// Samples a second.
    pub rate: u32,
    /// The samples.
    pub samples: Vec<i16>,
}

impl Spoken {
    /// The same at the rate of the loudspeaker's queue, from -1 to 1; empty at a rate no sound has.
    #[must_use]
    pub fn for_speaker(&self) -> Vec<f32> {
        let sound: Vec<f32> = self
            .samples
            .iter()
            .map(|s| f32::from(*s) / 32_768.0)
            .collect();
        let mut out = Vec::new();
        if let Some(mut resampler) = Resampler::new(self.rate) {
            resampler.push(&sound, &mut out);
            resampler.finish(&mut out);
        }
        out
    }
}

/// Words as espeak-ng's phoneme input.
///
/// Our sounds carry no stress, and without any it mumbles: the first vowel of each word is stressed,
/// as in most English nouns of two syllables (common practice, no source). An AH after it is that
/// of COMMA.
#[must_use]
pub fn phonemes(words: &[Pronunciation]) -> String {
    let words: Vec<String> = words.iter().map(word).filter(|w| !w.is_empty()).collect();
    format!("[[{}]]", words.join(" "))
}

fn word(sounds: &Pronunciation) -> String {
    let mut stressed = false;
    let parts: Vec<String> = sounds
        .iter()
        .map(|phone| match (phone.is_vowel(), stressed) {
            (true, false) => {
                stressed = true;
                format!("'{}", phoneme(*phone))
            }
            (true, true) if phone.name() == "AH" => COMMA.to_owned(),
            _ => phoneme(*phone).to_owned(),
        })
        .collect();
    // The bar keeps T and SH apart, which would be read as CH.
    parts.join("|")
}

fn phoneme(phone: Phone) -> &'static str {
    PHONEMES
        .iter()
        .find(|(ours, _)| *ours == phone.name())
        .map_or("", |(_, theirs)| theirs)
}

/// Reads words aloud into samples.
///
/// # Errors
/// [`AloudError`]: the program is missing, or gave no sound.
pub fn spoken(words: &[Pronunciation]) -> Result<Spoken, AloudError> {
    let phonemes = phonemes(words);
    let failed = |why: String| AloudError::Failed {
        phonemes: phonemes.clone(),
        why,
    };
    let done = Command::new(PROGRAM)
        .args(["-v", VOICE, "-s", PACE, "--stdout", &phonemes])
        .stdin(Stdio::null())
        .output()
        .map_err(|e| match e.kind() {
            ErrorKind::NotFound => AloudError::Missing,
            _ => failed(e.to_string()),
        })?;
    if !done.status.success() {
        let said = String::from_utf8_lossy(&done.stderr);
        return Err(failed(said.lines().next().unwrap_or("it failed").into()));
    }
    let spoken = samples(&done.stdout).map_err(failed)?;
    if spoken.samples.iter().all(|s| *s == 0) {
        return Err(failed("it is silent".into()));
    }
    Ok(spoken)
}

fn samples(wav: &[u8]) -> Result<Spoken, String> {
    let mut reader = WavReader::new(Cursor::new(wav)).map_err(|e| e.to_string())?;
    let spec = reader.spec();
    if spec.channels != 1 || spec.bits_per_sample != 16 {
        return Err(format!(
            "{} channels of {} bits came",
            spec.channels, spec.bits_per_sample
        ));
    }
    // On a pipe its length in the head is a guess, far too long: the sound ends with the bytes.
    let samples = reader.samples::<i16>().map_while(Result::ok).collect();
    Ok(Spoken {
        rate: spec.sample_rate,
        samples,
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::speech::{guess::guess, lexicon::PHONES};

    fn sounds(text: &str) -> Pronunciation {
        text.split(' ').filter_map(Phone::named).collect()
    }

    /// What espeak-ng makes of phoneme input, without sound; nothing where it is absent.
    fn told_by_espeak(how: &str, phonemes: &str) -> Option<String> {
        let done = Command::new(PROGRAM)
            .args(["-v", VOICE, "-q", how, phonemes])
            .output();
        match done {
            Ok(done) => Some(String::from_utf8_lossy(&done.stdout).trim().to_owned()),
            Err(why) => {
                eprintln!("SKIPPED: {PROGRAM} did not run ({why}); Debian package {PROGRAM}");
                None
            }
        }
    }

    #[test]
    fn every_sound_has_a_phoneme_of_its_own() {
        let ours: Vec<&str> = PHONEMES.iter().map(|(ours, _)| *ours).collect();
        assert_eq!(ours, PHONES);
        let mut theirs: Vec<&str> = PHONEMES.iter().map(|(_, theirs)| *theirs).collect();
        theirs.sort_unstable();
        theirs.dedup();
        assert_eq!(theirs.len(), PHONES.len());
    }

    #[test]
    fn words_become_phoneme_input() {
        let words = [sounds("K W ER N"), sounds("B AH NG K AH")];
        assert_eq!(phonemes(&words), "[[k|w|'3:|n b|'V|N|k|@]]");
    }

    // IPA of the CMU Pronouncing Dictionary's sounds in British English: J. C. Wells, Longman
    // Pronunciation Dictionary, from memory, where `a` is TRAP and `ɛ` is DRESS as espeak-ng writes.
    #[test]
    fn espeak_understands_every_phoneme_as_the_sound_that_was_meant() {
        let ipa = "AA ɑː, AE a, AH ʌ, AO ɔː, AW aʊ, AY aɪ, B b, CH tʃ, D d, DH ð, EH ɛ, ER ɜː, \
                   EY eɪ, F f, G ɡ, HH h, IH ɪ, IY iː, JH dʒ, K k, L l, M m, N n, NG ŋ, OW əʊ, \
                   OY ɔɪ, P p, R ɹ, S s, SH ʃ, T t, TH θ, UH ʊ, UW uː, V v, W w, Y j, Z z, ZH ʒ";
        let mut seen = 0;
        for entry in ipa.split(", ") {
            let (name, meant) = entry.split_once(' ').expect("a sound and its IPA");
            let phone = Phone::named(name).expect("a sound");
            // Between vowels a consonant is not changed by the end of a word.
            let (input, meant) = if phone.is_vowel() {
                (sounds(&format!("B {name} B")), format!("bˈ{meant}b"))
            } else {
                (sounds(&format!("EH {name} IY")), format!("ˈɛ{meant}iː"))
            };
            let Some(heard) = told_by_espeak("--ipa", &phonemes(&[input])) else {
                return;
            };
            assert_eq!(heard, meant, "{name}");
            seen += 1;
        }
        assert_eq!(seen, PHONES.len());
    }

    #[test]
    fn a_guess_has_sound_and_comes_back_as_phonemes() {
        let words = [guess("quern"), guess("loft")];
        let Some(back) = told_by_espeak("-x", &phonemes(&words)) else {
            return;
        };
        assert!(back.starts_with("kw'3:") && back.ends_with("ft"), "{back}");
        let spoken = spoken(&words).expect("sound");
        let seconds = spoken.samples.len() as f32 / spoken.rate as f32;
        assert!((0.4..4.0).contains(&seconds), "{seconds} s");
        let loudest = spoken.samples.iter().map(|s| s.unsigned_abs()).max();
        assert!(loudest > Some(3_000), "{loudest:?}");
        let played = spoken.for_speaker().len() as f32 / 16_000.0;
        assert!((played - seconds).abs() < 0.01, "{played} {seconds}");
        // Other sounds are another sound: it is the guess that is read, not something fixed.
        assert_ne!(super::spoken(&[guess("bothy")]), Ok(spoken));
    }
}
