"""Command: say one text with one voice into a file, for rehearsals and try-outs.

  python utterances.py "zero point two five ohms" bm_daniel out.flac [SPEED] [SEED]
  python utterances.py --list LIST.tsv OUT_DIR        lines of NAME<TAB>VOICE<TAB>TEXT[<TAB>SPEED]

Voices: hibari (American, quick), bf_emma, bm_daniel, am_michael and the other Kokoro names (natural, about real
time), joe, slt, awb, rms, kal16. Those in voices.KEPT_OUT were never trained on: the fairest rehearsal.
Promises: 16 kHz mono FLAC, peak one half, 0.3 s of silence before and after.
"""

import sys
from pathlib import Path

import numpy as np
import soundfile

import voices


def say(text, voice, out, speed=1.0, seed=1):
    x = voices.speak(voice, text, speed, seed)
    soundfile.write(out, np.concatenate([np.zeros(4800), x, np.zeros(4800)]), 16000, subtype="PCM_16")


if __name__ == "__main__":
    a = sys.argv[1:]
    if len(a) == 3 and a[0] == "--list":
        Path(a[2]).mkdir(parents=True, exist_ok=True)
        for line in open(a[1]):
            name, voice, text, *speed = line.rstrip("\n").split("\t")
            say(text, voice, f"{a[2]}/{name}.flac", float(speed[0]) if speed else 1.0)
    elif len(a) >= 3:
        say(a[0], a[1], a[2], *(float(x) for x in a[3:4]), *(int(x) for x in a[4:5]))
    else:
        raise SystemExit(__doc__)
