//! The microphone as a source of sound.
//!
//! The callback of the sound system does nothing but hand pieces over; when nobody fetches them in
//! time they are dropped and counted, never waited for. It promises one line for every trouble and
//! silence on standard error. It leaves out choosing among sound systems (cpal's default).

use std::{
    sync::{
        Arc,
        atomic::{AtomicBool, AtomicU64, Ordering},
        mpsc::{Receiver, RecvTimeoutError, SyncSender, sync_channel},
    },
    time::Duration,
};

use cpal::{
    Device, DeviceId, ErrorKind, FromSample, SampleFormat, SizedSample, Stream, StreamConfig,
    traits::{DeviceTrait, HostTrait, StreamTrait},
};

use super::{Piece, Source};
use crate::voice::{front::resample::RATES, quiet::quietly};

/// Pieces that may wait; a piece is some ten milliseconds, so this is seconds.
const WAITING: usize = 400;

/// Why there is no microphone.
#[derive(Debug, thiserror::Error)]
pub enum MicrophoneError {
    /// None at all.
    #[error("no microphone was found")]
    None,
    /// The one that was named is not there.
    #[error("there is no microphone `{name}`")]
    NotThere {
        /// Its name.
        name: String,
    },
    /// It cannot be used.
    #[error("the microphone cannot be used: {0}")]
    Unusable(String),
    /// It delivers sound nobody here understands.
    #[error("the microphone offers only {rate} samples a second as {format}")]
    Format {
        /// Its rate.
        rate: u32,
        /// Its samples.
        format: String,
    },
}

/// A running microphone.
pub struct Microphone {
    name: String,
    rate: u32,
    pieces: Receiver<Vec<f32>>,
    dropped: Arc<AtomicU64>,
    gone: Arc<AtomicBool>,
    _stream: Stream,
}

impl Microphone {
    /// Opens the microphone named (such as `alsa:hw:1`), or the default one, and starts it.
    ///
    /// # Errors
    /// [`MicrophoneError`], one line.
    pub fn open(name: Option<&str>) -> Result<Self, MicrophoneError> {
        quietly(|| Self::opened(name))
    }

    fn opened(name: Option<&str>) -> Result<Self, MicrophoneError> {
        let unusable = |e: cpal::Error| MicrophoneError::Unusable(e.to_string());
        let host = cpal::default_host();
        let device = match name {
            None => host.default_input_device().ok_or(MicrophoneError::None)?,
            Some(name) => name
                .parse::<DeviceId>()
                .ok()
                .and_then(|id| host.device_by_id(&id))
                .ok_or_else(|| MicrophoneError::NotThere { name: name.into() })?,
        };
        let config = device.default_input_config().map_err(unusable)?;
        let format = config.sample_format();
        let config: StreamConfig = config.into();
        let refused = || MicrophoneError::Format {
            rate: config.sample_rate,
            format: format.to_string(),
        };
        if !RATES.contains(&config.sample_rate) {
            return Err(refused());
        }
        let (give, pieces) = sync_channel(WAITING);
        let dropped = Arc::new(AtomicU64::new(0));
        let gone = Arc::new(AtomicBool::new(false));
        let wires = Wires {
            give,
            dropped: Arc::clone(&dropped),
            gone: Arc::clone(&gone),
            channels: usize::from(config.channels.max(1)),
        };
        let stream = match format {
            SampleFormat::I8 => wires.run::<i8>(&device, config),
            SampleFormat::I16 => wires.run::<i16>(&device, config),
            SampleFormat::I24 => wires.run::<cpal::I24>(&device, config),
            SampleFormat::I32 => wires.run::<i32>(&device, config),
            SampleFormat::U8 => wires.run::<u8>(&device, config),
            SampleFormat::U16 => wires.run::<u16>(&device, config),
            SampleFormat::F32 => wires.run::<f32>(&device, config),
            SampleFormat::F64 => wires.run::<f64>(&device, config),
            _ => return Err(refused()),
        }
        .map_err(unusable)?;
        stream.play().map_err(unusable)?;
        Ok(Self {
            name: device.to_string(),
            rate: config.sample_rate,
            pieces,
            dropped,
            gone,
            _stream: stream,
        })
    }
}

/// What the callback holds.
struct Wires {
    give: SyncSender<Vec<f32>>,
    dropped: Arc<AtomicU64>,
    gone: Arc<AtomicBool>,
    channels: usize,
}

impl Wires {
    fn run<T>(self, device: &Device, config: StreamConfig) -> Result<Stream, cpal::Error>
    where
        T: SizedSample,
        f32: FromSample<T>,
    {
        let Wires {
            give,
            dropped,
            gone,
            channels,
        } = self;
        device.build_input_stream(
            config,
            move |data: &[T], _| {
                let mono: Vec<f32> = data
                    .chunks_exact(channels)
                    .map(|frame| {
                        let sum: f32 = frame.iter().map(|s| f32::from_sample_(*s)).sum();
                        sum / channels as f32
                    })
                    .collect();
                let length = mono.len() as u64;
                if give.try_send(mono).is_err() {
                    dropped.fetch_add(length, Ordering::Relaxed);
                }
            },
            move |error| {
                // An overrun is counted by what is missing; a change of route goes on.
                let passing = matches!(
                    error.kind(),
                    ErrorKind::Xrun | ErrorKind::DeviceChanged | ErrorKind::RealtimeDenied
                );
                if !passing {
                    gone.store(true, Ordering::Relaxed);
                }
            },
            Some(Duration::from_secs(2)),
        )
    }
}

impl Source for Microphone {
    fn rate(&self) -> u32 {
        self.rate
    }

    fn read(&mut self) -> Piece {
        match self.pieces.recv_timeout(Duration::from_millis(100)) {
            Ok(sound) => Piece::Sound(sound),
            Err(RecvTimeoutError::Timeout) if self.gone.load(Ordering::Relaxed) => {
                Piece::Lost("the microphone is gone".into())
            }
            Err(RecvTimeoutError::Timeout) => Piece::Nothing,
            Err(RecvTimeoutError::Disconnected) => Piece::Lost("the microphone is gone".into()),
        }
    }

    fn dropped(&mut self) -> u64 {
        self.dropped.swap(0, Ordering::Relaxed)
    }

    fn name(&self) -> String {
        self.name.clone()
    }
}
