"""Stage: recordings and synthetic speech -> phone alignments (pickle of utterances).

  python align.py human                    the open recordings that may be trained on
  python align.py speech_KIND_SEED         a manifest of synthesise.py

Promises: each utterance carries samples, text, source, speaker, whether it is set aside, its kind (phrase or
talk), phones with 10 ms frames, and the phones of each word as chosen. What does not align keeps its text only.
Leaves out: the share-alike and GPL sets (fsdd_subset, audio_qspi_nato) and mycroft_precise: for testing only.
"""

import csv
import hashlib
import pickle
import sys
from pathlib import Path

import numpy as np
import soundfile

import places
from lexicon import VOCABULARY, pronunciations
from phones import CLASS_ID
from voices import to16k

HUMAN = ("an4", "speech_commands", "natospell_timkahn")
EDGE = 4000  # samples of silence put before and after


def load(path):
    x, rate = soundfile.read(path)
    return to16k(x if x.ndim == 1 else x[:, 0], rate)


def set_aside(source, speaker):
    """A tenth of the crowd's and of AN4's speakers is never trained on."""
    return source in ("an4", "speech_commands") and int(hashlib.md5(speaker.encode()).hexdigest(), 16) % 10 == 0


def human_rows():
    for d in HUMAN:
        with open(places.SPEECH / d / "manifest.tsv") as f:
            for row in csv.DictReader(f, delimiter="\t", quoting=csv.QUOTE_NONE):
                text, speaker = row["transcript"].lower(), row["speaker"] or d
                if not text or row["path"].endswith("capital.wav"):
                    continue
                known = d == "an4" or all(w in VOCABULARY or w in ("start", "enter", "erase") for w in text.split())
                yield dict(path=str(places.SPEECH / d / row["path"]), text=text, src=d, spk=speaker,
                           dev=set_aside(d, speaker), kind="phrase" if known else "talk")


def synthetic_rows(name):
    for line in open(places.LAB / f"{name}.tsv"):
        path, text, voice, kind = line.rstrip("\n").split("\t")
        yield dict(path=str(places.LAB / "speech" / path), text=text, src="synthetic", spk=voice, dev=False, kind=kind)


def word_phones(text, phones):
    """The phones of each word as aligned, or None when they fit no pronunciation."""
    out, i = [], 0
    names = [p[0] for p in phones if p[0] in CLASS_ID and p[0] != "SIL"]
    for w in text.split():
        for form in sorted(set(pronunciations(w)), key=lambda s: -len(s.split())):
            q = form.split()
            if names[i:i + len(q)] == q:
                out.append([CLASS_ID[p] for p in q])
                i += len(q)
                break
        else:
            return None
    return out if i == len(names) else None


def main(part):
    from pocketsphinx import Decoder
    rows = list(human_rows() if part == "human" else synthetic_rows(part))
    words = sorted({w for r in rows for w in r["text"].split()})
    missing = {w for w in words if not pronunciations(w)}
    rows = [r for r in rows if not missing & set(r["text"].split())]
    dictionary = places.LAB / f"align_{part}.dict"
    with open(dictionary, "w") as f:
        for w in words:
            for i, p in enumerate(dict.fromkeys(pronunciations(w) or [])):
                f.write(f"{w}{f'({i + 1})' if i else ''} {p}\n")
    d = Decoder(hmm=str(places.english() / "en-us"), dict=str(dictionary), lm=None, loglevel="FATAL", dither=False)
    rng, out, bad = np.random.default_rng(0), [], 0
    for r in rows:
        x = load(r["path"])
        x = x / max(1e-6, np.abs(x).max()) * .5
        x = np.concatenate([np.zeros(EDGE), x, np.zeros(EDGE)]) * 32767
        pcm = np.clip(np.round(x + rng.normal(0, 10, len(x))), -32768, 32767).astype("<i2").tobytes()
        phones = None
        try:
            d.set_align_text(r["text"])
            d.start_utt(), d.process_raw(pcm, full_utt=True), d.end_utt()
            d.set_alignment()
            d.start_utt(), d.process_raw(pcm, full_utt=True), d.end_utt()
            phones = [(q.name if q.name in CLASS_ID else "SIL", q.start, q.start + q.duration)
                      for w in d.get_alignment() for q in w]
        except Exception:
            pass
        chosen = word_phones(r["text"], phones) if phones else None
        r["bad"] = chosen is None
        if chosen is None:
            bad += 1
            n = len(x) // 160
            chosen = [[CLASS_ID[p] for p in pronunciations(w)[0].split()] for w in r["text"].split()]
            phones = [("SIL", 0, 25), ("AH", 25, n - 25), ("SIL", n - 25, n)]
        r.update(x=x.astype("f4"), ph=phones, words=chosen)
        out.append(r)
    with open(places.LAB / f"aligned_{part}.pkl", "wb") as f:
        pickle.dump(out, f, protocol=4)
    print(part, len(out), "utterances", f"{sum(len(r['x']) for r in out) / 960000:.1f} min", "transcript only:", bad,
          "no pronunciation:", sorted(missing)[:20], "set aside:", sum(r["dev"] for r in out),
          "talk:", sum(r["kind"] == "talk" for r in out))


if __name__ == "__main__":
    if len(sys.argv) != 2:
        raise SystemExit(__doc__)
    main(sys.argv[1])
