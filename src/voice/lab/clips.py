"""Stage: the fixed read-back clips, 16 kHz mono FLAC, one word or short phrase each.

  python clips.py            writes src/voice/clips/*.flac (named by their text, spaces as dashes)

Promises: one British voice (Kokoro bf_emma, Apache-2.0), silence trimmed, equal loudness, peaks under -1 dB.
Values are read digit by digit, so there are no clips of teens, tens or hundreds.
Leaves out: tones, which the program makes itself.
"""

import numpy as np
import soundfile
from scipy.signal import butter, sosfilt

import places
import voices

VOICE = "bf_emma"
CLIPS = """
zero one two three four five six seven eight nine point decimal double niner
ohm ohms milliohms megohms volts amps milliamps kiloamps milliseconds percent
greater-than less-than over-range open-circuit full-scale
circuit board way line neutral earth ring spur socket leg end page phase radial light switch joint main live
alpha bravo charlie delta echo foxtrot golf hotel india juliett kilo lima mike november oscar papa quebec romeo sierra
tango uniform victor whiskey x-ray yankee zulu
affirm-or-negative affirm negative say-again kept dropped scrapped undone corrected noted
in-range below-range above-range out-of-range higher-than-expected lower-than-expected
re-measure-or-keep-as-found keep-as-found measure-again reason
link-in link-still-in remove-the-link link-removed fit-the-link
next previous back repeat pause resume stop
insulation-resistance continuity r-one-plus-r-two r-two end-to-end line-to-neutral line-to-earth neutral-to-earth
line-to-line polarity main-earth bonding earth-electrode loop radial-circuit ring-circuit
which-one first second third not-understood use-the-keypad digit-by-digit one-digit-at-a-time
standby listening not-listening stage read-the-reminders acknowledge warning caution
test-voltage hands-clear discharge done ready hold leads-nulled null-the-leads
open-points skipped job-complete-with-open-points nothing-open expected from to and of no yes
isolate-first prove-dead keypad-only too-quiet too-loud too-much-noise saved
""".split()

# Where the synthesiser needs help to say what is meant.
SPOKEN = {"r-one-plus-r-two": "R one plus R two", "r-two": "R two", "re-measure-or-keep-as-found": "Re-measure, or keep as found?",
          "affirm-or-negative": "Affirm, or negative?", "which-one": "Which one?", "x-ray": "x-ray", "page": "page",
          "job-complete-with-open-points": "Job complete, with open points.", "megohms": "megg-ohms", "milliohms": "milli-ohms",
          "milliamps": "milli-amps", "kiloamps": "killo-amps", "live": "live", "lima": "leema", "a": "ay", "to": "too",
          "of": "ov", "quebec": "Quebec", "juliett": "Juliet", "papa": "papa", "reason": "Reason?", "niner": "niner"}


def render(name):
    text = SPOKEN.get(name, name.replace("-", " "))
    x = voices.speak_kokoro(VOICE, text if text[-1] in ".?" else text + ".", 1.08, True, fix_live=name == "live")
    x = sosfilt(butter(2, 70 / 8000, "high", output="sos"), x)
    at = np.flatnonzero(np.abs(x) > .015 * np.abs(x).max())
    x = x[max(0, at[0] - 240):at[-1] + 480]
    n = 160
    x[:n] *= np.linspace(0, 1, n)
    x[-n:] *= np.linspace(1, 0, n)
    e = np.sort((x[:len(x) // n * n].reshape(-1, n) ** 2).mean(1))
    x = x * .11 / np.sqrt(e[len(e) // 2:].mean())  # loudness: the louder half of the frames
    return x * min(1., .88 / np.abs(x).max())


def main():
    out = places.REPO / "src" / "voice" / "clips"
    out.mkdir(exist_ok=True)
    total = 0
    for name in CLIPS:
        f = out / f"{name}.flac"
        x = render(name)
        soundfile.write(f, x, 16000, subtype="PCM_16", compression_level=1.0)
        total += f.stat().st_size
    print(len(CLIPS), "clips", total, "bytes")


if __name__ == "__main__":
    main()
