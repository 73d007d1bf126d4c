"""Stage: the read-back clips, 16 kHz mono FLAC, one word or short phrase each.

  python clips.py [OUT_DIR]      writes every phrase of src/voice/clips/phrases.txt (default src/voice/clips)

Promises: one British voice (Kokoro bf_emma, Apache-2.0), silence trimmed, equal loudness, peaks under -1 dB, the
three lowest bits cleared (noise 78 dB under full scale; a third smaller). A file is named by its phrase with dashes.
Leaves out: tones, which the program makes itself.
"""

import sys
from pathlib import Path

import numpy as np
import soundfile
from scipy.signal import butter, sosfilt

import places
import voices

VOICE = "bf_emma"
FOLDER = places.REPO / "src" / "voice" / "clips"


def phrases():
    """Name and spelling for the synthesiser; a line is `phrase` or `phrase = how it is spelled`."""
    for line in (FOLDER / "phrases.txt").read_text().splitlines():
        line = line.split("#")[0].strip()
        if line:
            phrase, _, spelled = (p.strip() for p in line.partition("="))
            yield phrase.replace(" ", "-"), spelled or phrase


def render(text):
    x = voices.speak_kokoro(VOICE, text if text[-1] in ".?" else text + ".", 1.12, True)
    x = sosfilt(butter(2, 70 / 8000, "high", output="sos"), x)
    at = np.flatnonzero(np.abs(x) > .015 * np.abs(x).max())
    x = x[max(0, at[0] - 240):at[-1] + 480]
    n = 160
    x[:n] *= np.linspace(0, 1, n)
    x[-n:] *= np.linspace(1, 0, n)
    e = np.sort((x[:len(x) // n * n].reshape(-1, n) ** 2).mean(1))
    x = x * .11 / np.sqrt(e[len(e) // 2:].mean())  # loudness: the louder half of the frames
    x = x * min(1., .88 / np.abs(x).max())
    return (np.round(x * 4095).astype(np.int16) * 8).astype(np.int16)


def main():
    out = Path(sys.argv[1]) if len(sys.argv) > 1 else FOLDER
    out.mkdir(exist_ok=True)
    total = count = 0
    for name, text in phrases():
        f = out / f"{name}.flac"
        if not f.exists():
            soundfile.write(f, render(text), 16000, subtype="PCM_16", compression_level=1.0)
        total += f.stat().st_size
        count += 1
    print(count, "clips", total, "bytes")


if __name__ == "__main__":
    main()
