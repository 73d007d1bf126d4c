//! Utterance clips beside the log: 16 kHz mono, lossless (FLAC), named after their digest.
//!
//! Promises: a clip appears whole or not at all, readable by its owner only; what is loaded is
//! sample for sample what was saved; the digest that goes into the log is BLAKE3 of the file. Old
//! clips go when they are over age or over size, the oldest first; the log keeps their digests.
//! It leaves out recording and playing.

use std::{
    collections::BTreeSet,
    fs::{self, DirBuilder},
    io::{self, Cursor},
    os::unix::fs::DirBuilderExt,
    path::{Path, PathBuf},
    time::{Duration, SystemTime},
};

use flacenc::{component::BitRepr, error::Verify};

use super::recover;

/// Samples a second of every clip.
pub const RATE: u32 = 16_000;
/// The longest clip that is saved or loaded: ten minutes.
const MOST_SAMPLES: usize = 600 * RATE as usize;

/// Which clips are kept, and how long.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Keeping {
    /// False: none is kept.
    pub any: bool,
    /// Kept no longer than this.
    pub age: Duration,
    /// All together at most this many bytes.
    pub bytes: u64,
}

impl Default for Keeping {
    /// 90 days and 500 MB: some weeks of jobs on a small card (own choice).
    fn default() -> Self {
        Self {
            any: true,
            age: Duration::from_secs(90 * 24 * 3600),
            bytes: 500_000_000,
        }
    }
}

impl Keeping {
    /// No clip at all.
    pub const NONE: Keeping = Keeping {
        any: false,
        age: Duration::ZERO,
        bytes: 0,
    };
}

/// A clip that was saved: both go into the log.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Saved {
    /// File name within the clips folder.
    pub file: String,
    /// BLAKE3 of the file, in hexadecimal.
    pub digest: String,
}

/// Why a clip could not be saved or loaded.
#[derive(Debug, thiserror::Error)]
#[allow(missing_docs)] // the fields are named in the messages
pub enum ClipError {
    #[error("{path}: cannot {doing}: {source}", path = path.display())]
    Io {
        doing: &'static str,
        path: PathBuf,
        source: io::Error,
    },
    #[error("a clip of {seconds} s is longer than the ten minutes one may be")]
    TooLong { seconds: usize },
    #[error("the clip could not be compressed: {why}")]
    NotCompressed { why: String },
    #[error("{path}: is not a clip of ours ({why})", path = path.display())]
    NotAClip { path: PathBuf, why: String },
    #[error(
        "{path}: is not the clip named in the log (its digest differs)",
        path = path.display()
    )]
    OtherDigest { path: PathBuf },
    #[error("`{file}` is not the name of a clip")]
    NotAName { file: String },
}

/// The clips of one job.
#[derive(Debug, Clone)]
pub struct Clips {
    folder: PathBuf,
    keeping: Keeping,
}

impl Clips {
    /// The clips in `folder` (see [`super::Places::clips`]); it is made when the first is saved.
    #[must_use]
    pub fn new(folder: PathBuf, keeping: Keeping) -> Self {
        Self { folder, keeping }
    }

    /// Saves a clip of mono samples at 16 kHz. `None` when none are kept or there is no sample.
    ///
    /// # Errors
    /// [`ClipError`]; a clip that cannot be saved is no reason to lose a reading.
    pub fn save(&self, samples: &[i16]) -> Result<Option<Saved>, ClipError> {
        if !self.keeping.any || samples.is_empty() {
            return Ok(None);
        }
        if samples.len() > MOST_SAMPLES {
            return Err(ClipError::TooLong {
                seconds: samples.len() / RATE as usize,
            });
        }
        let bytes = compress(samples)?;
        let digest = blake3::hash(&bytes).to_hex().to_string();
        // Named after its digest, so that handhelds can be joined without two clips of one name.
        let file = format!("{}.flac", &digest[..16]);
        let io = |doing| {
            let path = self.folder.join(&file);
            move |source| ClipError::Io {
                doing,
                path,
                source,
            }
        };
        DirBuilder::new()
            .recursive(true)
            .mode(0o700)
            .create(&self.folder)
            .map_err(io("make the folder of"))?;
        recover::whole(&self.folder.join(&file), &self.folder, &bytes).map_err(io("save"))?;
        Ok(Some(Saved { file, digest }))
    }

    /// Loads a clip; when `digest` is given it must match.
    ///
    /// # Errors
    /// [`ClipError`].
    pub fn load(&self, file: &str, digest: Option<&str>) -> Result<Vec<i16>, ClipError> {
        let (path, bytes) = self.bytes(file)?;
        if digest.is_some_and(|d| d != blake3::hash(&bytes).to_hex().as_str()) {
            return Err(ClipError::OtherDigest { path });
        }
        expand(&bytes).map_err(|why| ClipError::NotAClip { path, why })
    }

    /// Whether a clip is there and is the one the log means; `None` when it is not there.
    ///
    /// # Errors
    /// [`ClipError`] when it cannot be read or has no clip's name.
    pub fn holds(&self, file: &str, digest: &str) -> Result<Option<bool>, ClipError> {
        match self.bytes(file) {
            Ok((_, bytes)) => Ok(Some(blake3::hash(&bytes).to_hex().as_str() == digest)),
            Err(ClipError::Io { source, .. }) if source.kind() == io::ErrorKind::NotFound => {
                Ok(None)
            }
            Err(e) => Err(e),
        }
    }

    /// How many clips are there beside those the log names (commands, hearings that were refused),
    /// and which of them are not what their names say.
    ///
    /// # Errors
    /// [`ClipError`] when the folder or a clip cannot be read.
    pub fn others(&self, named: &BTreeSet<&str>) -> Result<(usize, Vec<String>), ClipError> {
        let (mut count, mut changed) = (0, Vec::new());
        for path in self.listed()? {
            let file = path
                .file_name()
                .and_then(|n| n.to_str())
                .unwrap_or_default();
            if named.contains(file) {
                continue;
            }
            let (_, bytes) = self.bytes(file)?;
            let digest = blake3::hash(&bytes).to_hex();
            if file.strip_suffix(".flac") == digest.as_str().get(..16) {
                count += 1;
            } else {
                changed.push(file.to_owned());
            }
        }
        Ok((count, changed))
    }

    /// Every clip in the folder, by name.
    fn listed(&self) -> Result<Vec<PathBuf>, ClipError> {
        let io = |source| ClipError::Io {
            doing: "look through",
            path: self.folder.clone(),
            source,
        };
        let listing = match fs::read_dir(&self.folder) {
            Err(e) if e.kind() == io::ErrorKind::NotFound => return Ok(Vec::new()),
            listing => listing.map_err(io)?,
        };
        let mut clips = Vec::new();
        for item in listing {
            let path = item.map_err(io)?.path();
            if path.extension().is_some_and(|e| e == "flac") {
                clips.push(path);
            }
        }
        clips.sort();
        Ok(clips)
    }

    fn bytes(&self, file: &str) -> Result<(PathBuf, Vec<u8>), ClipError> {
        // The name comes out of a log: it must not lead out of the folder.
        let plain = Path::new(file).file_name().and_then(|n| n.to_str()) == Some(file);
        if !plain {
            return Err(ClipError::NotAName { file: file.into() });
        }
        let path = self.folder.join(file);
        match fs::read(&path) {
            Ok(bytes) => Ok((path, bytes)),
            Err(source) => Err(ClipError::Io {
                doing: "read",
                path,
                source,
            }),
        }
    }

    /// Removes clips over age, then the oldest while all together are over size. Gives how many
    /// went.
    ///
    /// # Errors
    /// [`ClipError::Io`].
    pub fn prune(&self, now: SystemTime) -> Result<usize, ClipError> {
        let io = |source| ClipError::Io {
            doing: "look through",
            path: self.folder.clone(),
            source,
        };
        let mut clips = Vec::new();
        for path in self.listed()? {
            let about = path.metadata().map_err(io)?;
            clips.push((about.modified().map_err(io)?, about.len(), path));
        }
        clips.sort();
        let mut total: u64 = clips.iter().map(|(_, length, _)| length).sum();
        let mut gone = 0;
        for (saved, length, path) in clips {
            // A clip from the future (the clock was wrong) has no age.
            let age = now.duration_since(saved).unwrap_or_default();
            if age <= self.keeping.age && total <= self.keeping.bytes {
                break;
            }
            fs::remove_file(&path).map_err(io)?;
            total -= length;
            gone += 1;
        }
        Ok(gone)
    }
}

fn compress(samples: &[i16]) -> Result<Vec<u8>, ClipError> {
    let failed = |why: String| ClipError::NotCompressed { why };
    let mut config = flacenc::config::Encoder::default();
    // A clip takes milliseconds; threads would only get in the recogniser's way.
    config.multithread = false;
    let config = config
        .into_verified()
        .map_err(|(_, e)| failed(e.to_string()))?;
    let wide: Vec<i32> = samples.iter().map(|s| i32::from(*s)).collect();
    let source = flacenc::source::MemSource::from_samples(&wide, 1, 16, RATE as usize);
    let stream = flacenc::encode_with_fixed_block_size(&config, source, config.block_size)
        .map_err(|e| failed(e.to_string()))?;
    let mut sink = flacenc::bitsink::ByteSink::new();
    stream.write(&mut sink).map_err(|e| failed(e.to_string()))?;
    let mut bytes = sink.into_inner();
    // The block sizes of the stream's head leave its last block out (RFC 9639, 8.2); the encoder
    // counts it in, and a clip that ends in a block under 16 samples would be refused.
    if let (Ok(size), Some(sizes)) = (u16::try_from(config.block_size), bytes.get_mut(8..12)) {
        sizes[..2].copy_from_slice(&size.to_be_bytes());
        sizes[2..].copy_from_slice(&size.to_be_bytes());
    }
    Ok(bytes)
}

/// Mono 16-bit samples out of FLAC bytes.
fn expand(bytes: &[u8]) -> Result<Vec<i16>, String> {
    let mut reader = claxon::FlacReader::new(Cursor::new(bytes)).map_err(|e| e.to_string())?;
    let info = reader.streaminfo();
    if info.channels != 1 || info.bits_per_sample != 16 || info.sample_rate != RATE {
        return Err(format!(
            "{} channels, {} bits, {} Hz",
            info.channels, info.bits_per_sample, info.sample_rate
        ));
    }
    let mut samples = Vec::new();
    for sample in reader.samples() {
        let sample = sample.map_err(|e| e.to_string())?;
        samples.push(i16::try_from(sample).map_err(|_| "sample out of range".to_owned())?);
        if samples.len() > MOST_SAMPLES {
            return Err("longer than ten minutes".into());
        }
    }
    Ok(samples)
}

#[cfg(test)]
#[path = "clips_tests.rs"]
mod tests;
