"""Stage: texts -> synthetic speech with a manifest (path, text, voice, talk or phrase).

  python synthesise.py kokoro SEED MINUTES     about real time on one core; stops after MINUTES of clock time
  python synthesise.py accents SEED MINUTES    the same, said as people with other first languages say English
  python synthesise.py quick SEED COUNT        hibari and flite, COUNT utterances each, many times real time

Promises: seeded texts; half of Kokoro's utterances use a blend of two training voices. The first COUNT texts
of a seed do not depend on the clock, only how many are made does. Voices kept out are never used here.
"""

import random
import sys
import time

import numpy as np
import soundfile

import places
import voices
from phrases import stream


def main(kind, seed, amount):
    out = places.LAB / "speech"
    out.mkdir(parents=True, exist_ok=True)
    r = random.Random(seed)
    with open(places.LAB / f"speech_{kind}_{seed}.tsv", "w") as manifest:
        def keep(x, name, text, voice, talk):
            f = out / f"{name}.flac"
            soundfile.write(f, x / max(1e-9, np.abs(x).max()) * .5, 16000, subtype="PCM_16")
            manifest.write(f"{f.name}\t{text}\t{voice}\t{'talk' if talk else 'phrase'}\n")
            manifest.flush()

        def said(text):
            return text.replace(" ", ", ") if r.random() < .08 else text + r.choice(["", ".", ".", "?"])

        if kind in ("kokoro", "accents"):
            texts, end, k = stream(f"{kind}{seed}", .14), time.time() + 60 * float(amount), 0
            known = voices.KOKORO if kind == "kokoro" else voices.KOKORO + voices.KOKORO_JA
            while time.time() < end:
                text, talk = next(texts)
                a, b = r.sample(known, 2)
                w = r.uniform(.25, .75)
                mix = a if r.random() < .5 else [(a, w), (b, 1 - w)]
                british = a[0] == "b" or r.random() < .35
                name = r.choice(sorted(voices.ACCENTS)) if kind == "accents" else None
                accent = (lambda ps: voices.accented(ps, name, r)) if name else None
                x = voices.speak_kokoro(mix, said(text), r.uniform(.85, 1.4), british, accent=accent)
                keep(x, f"{kind[0]}{seed}_{k:05d}", text, f"{a}-{name}" if name else a, talk)
                k += 1
        else:
            for v in ["hibari"] + voices.FLITE:
                texts = stream(f"{v}{seed}", .3)
                for k in range(int(amount)):
                    text, talk = next(texts)
                    try:
                        x = voices.speak(v, said(text), r.uniform(.85, 1.35), r.randrange(1, 10 ** 6))
                    except Exception as e:  # one odd text must not end the stage
                        print("left out", v, text, repr(e)[:80])
                        continue
                    keep(x, f"{v}{seed}_{k:05d}", text, v, talk)


if __name__ == "__main__":
    if len(sys.argv) != 4:
        raise SystemExit(__doc__)
    main(sys.argv[1], int(sys.argv[2]), sys.argv[3])
