//! A WAV recording as a source of sound.
//!
//! Integer samples of 8 to 32 bits and floats, any number of channels (they are averaged). It is
//! read as it is needed, so length costs no memory. Optionally paced like a microphone.

use std::{
    fs::File,
    io::BufReader,
    path::{Path, PathBuf},
    thread,
    time::{Duration, Instant},
};

use hound::{SampleFormat, WavReader, WavSpec};

use super::{Piece, Source};
use crate::voice::front::resample::RATES;

/// Why a recording cannot be heard.
#[derive(Debug, thiserror::Error)]
pub enum WavError {
    /// It cannot be opened.
    #[error("{}: {source}", path.display())]
    Open {
        /// Which file.
        path: PathBuf,
        /// What the system said.
        source: std::io::Error,
    },
    /// It is something else.
    #[error("{}: not a WAV recording ({reason})", path.display())]
    NotWav {
        /// Which file.
        path: PathBuf,
        /// What is wrong with it.
        reason: String,
    },
    /// It holds no sound.
    #[error("{}: the recording is empty", path.display())]
    Empty {
        /// Which file.
        path: PathBuf,
    },
    /// Its rate is no microphone's.
    #[error("{}: {rate} samples a second; 8000 to 192000 can be heard", path.display())]
    Rate {
        /// Which file.
        path: PathBuf,
        /// Its rate.
        rate: u32,
    },
}

/// A recording being read.
pub struct Wav {
    path: PathBuf,
    reader: WavReader<BufReader<File>>,
    spec: WavSpec,
    pace: Option<Instant>,
    given: u64,
    broken: bool,
}

impl Wav {
    /// Opens a recording.
    ///
    /// # Errors
    /// [`WavError`], one line that names the file.
    pub fn open(path: &Path) -> Result<Self, WavError> {
        let file = File::open(path).map_err(|source| WavError::Open {
            path: path.to_owned(),
            source,
        })?;
        let not_wav = |reason: String| WavError::NotWav {
            path: path.to_owned(),
            reason,
        };
        if file.metadata().is_ok_and(|m| m.is_dir()) {
            return Err(not_wav("it is a folder".into()));
        }
        if file.metadata().is_ok_and(|m| m.len() == 0) {
            return Err(WavError::Empty {
                path: path.to_owned(),
            });
        }
        let reader = WavReader::new(BufReader::new(file)).map_err(|e| not_wav(e.to_string()))?;
        let spec = reader.spec();
        if spec.channels == 0 {
            return Err(not_wav("no channels".into()));
        }
        if !RATES.contains(&spec.sample_rate) {
            return Err(WavError::Rate {
                path: path.to_owned(),
                rate: spec.sample_rate,
            });
        }
        if reader.duration() == 0 {
            return Err(WavError::Empty {
                path: path.to_owned(),
            });
        }
        Ok(Self {
            path: path.to_owned(),
            reader,
            spec,
            pace: None,
            given: 0,
            broken: false,
        })
    }

    /// Delivers it as slowly as a microphone would.
    #[must_use]
    pub fn paced(mut self) -> Self {
        self.pace = Some(Instant::now());
        self
    }

    /// Its length in seconds, as its header says.
    #[must_use]
    pub fn seconds(&self) -> f64 {
        f64::from(self.reader.duration()) / f64::from(self.spec.sample_rate)
    }

    /// Up to a tenth of a second, and whether the file broke off.
    fn piece(&mut self) -> (Vec<f32>, bool) {
        let channels = usize::from(self.spec.channels);
        let wanted = (self.spec.sample_rate as usize / 10) * channels;
        let full = (1_i64 << (self.spec.bits_per_sample.clamp(1, 32) - 1)) as f32;
        let mut raw = Vec::with_capacity(wanted);
        let mut take = |sample: Result<f32, hound::Error>| match sample {
            Ok(sample) => {
                raw.push(sample);
                true
            }
            Err(_) => false,
        };
        let whole = match self.spec.sample_format {
            SampleFormat::Float => self.reader.samples::<f32>().take(wanted).all(&mut take),
            SampleFormat::Int => self
                .reader
                .samples::<i32>()
                .take(wanted)
                .all(|s| take(s.map(|s| s as f32 / full))),
        };
        let mono = raw
            .chunks_exact(channels)
            .map(|frame| frame.iter().sum::<f32>() / channels as f32)
            .collect();
        (mono, !whole)
    }

    fn end_of_broken(&self) -> Piece {
        if self.length_is_unknown() {
            return Piece::End;
        }
        Piece::Lost(format!(
            "{}: the recording is cut short after {:.1} of {:.1} seconds",
            self.path.display(),
            self.given as f64 / f64::from(self.spec.sample_rate),
            self.seconds()
        ))
    }

    /// A program that wrote into a pipe could not know the length and wrote the largest there is.
    fn length_is_unknown(&self) -> bool {
        let bytes = u64::from(self.reader.len()) * u64::from(self.spec.bits_per_sample / 8);
        bytes >= u64::from(u32::MAX / 2) - 4_096
    }
}

impl Source for Wav {
    fn rate(&self) -> u32 {
        self.spec.sample_rate
    }

    fn read(&mut self) -> Piece {
        if let Some(start) = self.pace {
            let due = Duration::from_secs_f64(self.given as f64 / f64::from(self.spec.sample_rate));
            if let Some(early) = due.checked_sub(start.elapsed()) {
                thread::sleep(early);
            }
        }
        if self.broken {
            return self.end_of_broken();
        }
        let (sound, broken) = self.piece();
        self.broken = broken;
        self.given += sound.len() as u64;
        match (sound.is_empty(), broken) {
            (true, true) => self.end_of_broken(),
            (true, false) => Piece::End,
            (false, _) => Piece::Sound(sound),
        }
    }

    fn name(&self) -> String {
        self.path.display().to_string()
    }
}

/// Nothing but silence, paced: a microphone that is not there.
#[derive(Debug)]
pub struct Silence;

impl Source for Silence {
    fn rate(&self) -> u32 {
        16_000
    }

    fn read(&mut self) -> Piece {
        thread::sleep(Duration::from_millis(100));
        Piece::Sound(vec![0.0; 1_600])
    }

    fn name(&self) -> String {
        "silence".into()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use hound::WavWriter;
    use std::fs;

    fn folder() -> tempfile::TempDir {
        tempfile::tempdir().expect("a folder")
    }

    fn spec(bits: u16, format: SampleFormat, channels: u16) -> WavSpec {
        WavSpec {
            channels,
            sample_rate: 22_050,
            bits_per_sample: bits,
            sample_format: format,
        }
    }

    fn all(path: &Path) -> (Vec<f32>, Piece) {
        let mut wav = Wav::open(path).expect("a recording");
        let mut sound = Vec::new();
        loop {
            match wav.read() {
                Piece::Sound(piece) => sound.extend(piece),
                other => return (sound, other),
            }
        }
    }

    #[track_caller]
    fn half(bits: u16, format: SampleFormat, channels: u16) {
        let folder = folder();
        let path = folder.path().join("half.wav");
        let mut writer = WavWriter::create(&path, spec(bits, format, channels)).expect("created");
        for _ in 0..5_000 * usize::from(channels) {
            match format {
                SampleFormat::Float => writer.write_sample(0.5_f32),
                SampleFormat::Int => writer.write_sample(((1_i64 << (bits - 1)) / 2) as i32),
            }
            .expect("written");
        }
        writer.finalize().expect("finished");
        let (sound, end) = all(&path);
        assert_eq!(end, Piece::End);
        assert_eq!(sound.len(), 5_000);
        assert!(
            sound.iter().all(|x| (x - 0.5).abs() < 0.01),
            "{bits} {format:?}"
        );
    }

    #[test]
    fn every_usual_kind_of_sample_is_read_to_the_same_scale() {
        for channels in [1, 2] {
            for bits in [8, 16, 24, 32] {
                half(bits, SampleFormat::Int, channels);
            }
            half(32, SampleFormat::Float, channels);
        }
    }

    #[track_caller]
    fn refused(bytes: &[u8], part: &str) {
        let folder = folder();
        let path = folder.path().join("bad.wav");
        fs::write(&path, bytes).expect("written");
        let error = Wav::open(&path).err().expect("it is bad").to_string();
        assert!(error.contains(part), "{error}");
        assert!(error.contains("bad.wav"), "{error}");
        assert_eq!(error.lines().count(), 1);
    }

    fn header(rate: u32, samples: usize) -> Vec<u8> {
        let mut bytes = std::io::Cursor::new(Vec::new());
        let spec = WavSpec {
            sample_rate: rate,
            ..spec(16, SampleFormat::Int, 1)
        };
        let mut writer = WavWriter::new(&mut bytes, spec).expect("created");
        for _ in 0..samples {
            writer.write_sample(100_i16).expect("written");
        }
        writer.finalize().expect("finished");
        bytes.into_inner()
    }

    #[test]
    fn what_is_no_recording_is_told_in_one_line() {
        refused(b"", "is empty");
        refused(b"hello", "not a WAV");
        refused(&header(16_000, 0), "is empty");
        refused(&header(4_000, 100), "4000 samples a second");
        let error = Wav::open(Path::new("no/such.wav")).err().expect("missing");
        assert!(error.to_string().starts_with("no/such.wav: "), "{error}");
        let error = Wav::open(Path::new("/")).err().expect("a folder");
        assert!(error.to_string().contains("folder"), "{error}");
    }

    #[test]
    fn a_recording_cut_short_gives_what_it_has_and_says_so() {
        let folder = folder();
        let path = folder.path().join("short.wav");
        let mut bytes = header(16_000, 16_000);
        bytes.truncate(20_000);
        fs::write(&path, bytes).expect("written");
        let (sound, end) = all(&path);
        assert_eq!(sound.len(), (20_000 - 44) / 2);
        let Piece::Lost(why) = end else {
            panic!("{end:?}");
        };
        assert!(why.contains("cut short"), "{why}");
    }
}
