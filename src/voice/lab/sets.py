"""Stage: the sets of the table that `handsfull voice measure --table` prints, besides the open recordings.

  python sets.py OUT_DIR [--debian DIR]     DIR: unpacked packages asterisk-core-sounds-en-wav, -fr-wav and
                                            asterisk-moh-opsound-wav (CC BY-SA, tests only); without: left out

Promises: folders with a manifest.tsv (path, transcript, speaker), the same texts, seeds and splices every time;
only voices and people no training ever heard (voices.KEPT_OUT; align.set_aside). What exists is not made again.
  readings_VOICE   what evaluate.py speak rendered
  pairs            teens and tens, alone and with a unit
  oh               "oh" in a number, before and after the point
  repeats          the same digit twice or thrice in a row
  strings_PEOPLE   three to five digits spliced from one speaker's single ones
  prompts          Debian's numbers and ICAO words
  talk             site talk of kept-out voices; prompts_talk, prompts_french, music: Debian's
What nobody said to us has no transcript. Leaves out: measuring; that is the program's.
"""

import argparse
import random
from pathlib import Path

import numpy as np
import soundfile

import evaluate
import places
import voices
from align import load
from lexicon import DIGITS, NATO, TEENS, TENS
from utterances import say

UNITS = ("ohms", "megohms", "volts")
PAIRS = "thirteen thirty fourteen forty fifteen fifty sixteen sixty seventeen seventy eighteen eighty nineteen ninety".split()
OH = ("oh point oh seven;oh point oh five ohms;oh point three oh;zero point oh seven ohms;nought point oh four;"
      "one point oh two;point oh nine ohms;two oh seven;one oh four megohms;oh point two oh ohms;three oh one volts;"
      "one point two oh;oh point one oh eight;nought point oh six ohms").split(";")
REPEATS = ("zero point three three ohms;one point one one;nought point double five;two two two megohms;"
           "nine nine nine megohms;greater than nine nine nine megohms;zero point one one one;four point four four ohms;"
           "greater than two hundred megohms;six point six ohms;one one one five ohms;zero point two two five;"
           "eight eight volts;oh point double four").split(";")
# Not the sentences the filler class was trained on (phrases.TALK).
TALK = ("did you bring the sandwiches today;the lift is out of order until tuesday;careful that floor is wet;"
        "somebody left the tap running downstairs;my phone battery died on the train;they moved the skip round the back;"
        "could you hold this for a moment;it rained all the way from leeds;the painter wants to start in the hall;"
        "where did you put the small screwdriver;that window will not shut properly;the client is coming at lunch;"
        "have you met the new apprentice;mind the cable on the stairs;we ran out of plasterboard again;"
        "i told him to park in the street;the coffee here is terrible;is this the right drawing;"
        "she is on holiday next week;pull the door behind you please;that hammer belongs to the carpenter;"
        "there was a queue at the merchant;you need to sign for the parcel;the alarm went off in the night;"
        "grab me a bag of fixings;what did the inspector say;the scaffold comes down on friday;"
        "this wall is thicker than it looks;let me know when you are finished;my back hurts from all this kneeling").split(";")
NUMBERS = DIGITS + TEENS


class Set:
    """A folder under `out`; lines are added, the manifest is written at the end."""

    def __init__(self, out, name):
        self.folder, self.lines = out / name, []
        self.folder.mkdir(parents=True, exist_ok=True)

    def add(self, name, text, speaker, make):
        f = self.folder / f"{name}.flac"
        if not f.exists():
            make(f)
        self.lines.append(f"{f.name}\t{text}\t{speaker}")

    def close(self):
        (self.folder / "manifest.tsv").write_text("\n".join(["path\ttranscript\tspeaker", *self.lines]) + "\n")
        print(self.folder.name, len(self.lines), flush=True)


def write(x):
    return lambda f: soundfile.write(f, x, 16000, subtype="PCM_16")


def spoken(out, name, texts, ours=True):
    s = Set(out, name)
    for v in ("rms", "joe", "bm_george", "af_bella"):  # quick ones first
        r = random.Random(f"{name} {v}")
        for i, t in enumerate(texts(v)):
            speed = r.uniform(.9, 1.15)
            s.add(f"{v}_{i:03d}", t if ours else "", v, lambda f, t=t, v=v, speed=speed, i=i: say(t, v, f, speed, i + 1))
    s.close()


def pairs(v):
    r = random.Random("pairs " + v)
    return PAIRS + [f"{w} {r.choice(UNITS)}" for w in PAIRS]


def strings(out, name, items, seed, count):
    s = Set(out, f"strings_{name}")
    for i, (x, t) in enumerate(evaluate.strings(items, seed, count)):
        s.add(f"{name}_{i:03d}", t, name, write(x))
    s.close()


def debian(out, folder):
    sounds = next(folder.rglob("en_US*"))
    french, music = next(folder.rglob("fr_*"), None), next(folder.rglob("moh"), None)
    files = [(sounds / f"digits/{n}.wav", w) for n, w in enumerate(NUMBERS)]
    files += [(sounds / f"digits/{10 * n + 20}.wav", w) for n, w in enumerate(TENS)]
    files += [(sounds / f"phonetic/{w[0]}_p.wav", w) for w in NATO]
    s = Set(out, "prompts")
    for f, w in files:
        if f.exists():
            s.add(f.stem, w, "debian", write(load(f)))
    s.close()
    strings(out, "debian", [(f, w, "debian") for f, w in files[:10]], 5, 40)
    for name, where in (("prompts_talk", sounds), ("prompts_french", french)):
        if where:
            s = Set(out, name)
            for f in sorted(where.glob("*.wav")):
                x = load(f)
                # Single words among the English ones ("seconds", "first") may be ours.
                if len(x) > (2 if where == sounds else .7) * 16000 and np.abs(x).max() > .01:
                    s.add(f.stem, "", where.name, write(x))
            s.close()
    if music:
        s = Set(out, "music")
        for f in sorted(music.glob("*.wav")):
            x = load(f)
            for k in range(0, min(len(x), 90 * 16000) - 15 * 16000 + 1, 15 * 16000):
                s.add(f"{f.stem}_{k // 16000:03d}", "", "", write(x[k:k + 15 * 16000]))
        s.close()


if __name__ == "__main__":
    ap = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    ap.add_argument("out", type=Path)
    ap.add_argument("--debian", type=Path)
    a = ap.parse_args()
    for v in voices.KEPT_OUT:
        s = Set(a.out, f"readings_{v}")
        for i, t in enumerate(evaluate.reading_texts(v)):
            f = places.LAB / "readings" / f"{v}_{i:03d}.flac"
            if f.exists():
                s.add(f"{v}_{i:03d}", t, v, write(load(f)))
        s.close()
    digits = lambda d: [x for x in evaluate.rows(d) if x[1] in DIGITS]
    strings(a.out, "fsdd", digits("fsdd_subset"), 3, 100)
    strings(a.out, "qspi", digits("audio_qspi_nato"), 4, 20)
    if a.debian:
        debian(a.out, a.debian)
    spoken(a.out, "oh", lambda v: OH)
    spoken(a.out, "repeats", lambda v: REPEATS)
    spoken(a.out, "pairs", pairs)
    spoken(a.out, "talk", lambda v: TALK, ours=False)
