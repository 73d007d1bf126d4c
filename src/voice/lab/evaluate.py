"""Stage: how well a base hears, on people and voices never trained on, through libvosk with strict grammars.

  python evaluate.py speak                              render the readings of the kept-out voices once
  python evaluate.py BASE [BASE ...] [--sets a,b] [--conds clean,n10,n5,quiet] [--misses]
  python evaluate.py BASE --reject                      false accepts against readings lost, by the price of [unk]

Promises: the same clips, seeds, lexicon and grammars for every base. n10 and n5 are recorded noise at 10 and 5 dB
(clips kept out of training), quiet is -20 dB; 0.4 s of faint white noise goes before and after each clip.
Leaves out: the tool's own front end and grammars; those are measured by the tool.
"""

import argparse
import collections
import csv
import json
import random
import shutil
import tempfile
import time

import numpy as np
import soundfile

import graphs
import places
import voices
from align import load, set_aside
from augment import noise_files, unit
from lexicon import ALIASES, DIGITS, NATO

READINGS_EACH = 60
COSTS = (-4., -2., 0., 2., 4., 6., 8., 12.)  # prices of [unk] tried by --reject


def rows(d):
    with open(places.SPEECH / d / "manifest.tsv") as f:
        for r in csv.DictReader(f, delimiter="\t", quoting=csv.QUOTE_NONE):
            if r["transcript"]:
                text = " ".join(ALIASES.get(w, w) for w in r["transcript"].lower().split())
                yield places.SPEECH / d / r["path"], text, r["speaker"]


def reading_texts(voice):
    g, r, out = graphs.grammar("readings"), random.Random("readings " + voice), []
    while len(out) < READINGS_EACH:
        t = g.sample(r)
        if len(t.split()) >= 2 or r.random() < .3:
            out.append(t)
    return out


def speak():
    out = places.LAB / "readings"
    out.mkdir(exist_ok=True)
    for v in ["joe", "rms"] + [v for v in voices.KEPT_OUT if v not in ("joe", "rms")]:
        r = random.Random(v)
        for i, t in enumerate(reading_texts(v)):
            f = out / f"{v}_{i:03d}.flac"
            if not f.exists():
                soundfile.write(f, voices.speak(v, t, r.uniform(.9, 1.15), i + 1), 16000, subtype="PCM_16")


def clip(path):
    x = load(path)
    return x / max(1e-6, np.abs(x).max()) * .5


def strings(items, seed, count=100):
    """Digit strings of one speaker each, spliced from that speaker's single digits; a third repeat."""
    r = np.random.default_rng(seed)
    by = collections.defaultdict(list)
    for p, t, s in items:
        by[s].append((clip(p), t))
    speakers = [s for s in sorted(by) if len(by[s]) >= 6]
    out = []
    for _ in range(count if speakers else 0):
        v, xs, ts = by[speakers[r.integers(len(speakers))]], [], []
        for _ in range(int(r.integers(3, 6))):
            x, t = v[r.integers(len(v))] if not ts or r.random() > .33 else (xs[-2], ts[-1])
            e = np.flatnonzero(np.abs(x) > .03 * np.abs(x).max())
            x = x[max(0, e[0] - 320):e[-1] + 320] if len(ts) == 0 or x is not xs[-2] else x
            xs += [x, np.zeros(int(r.uniform(.0, .12) * 16000))]
            ts.append(t)
        out.append((np.concatenate(xs), " ".join(ts)))
    return out


def all_sets():
    only = lambda items, vocabulary: [(p, t, s) for p, t, s in items if all(w in vocabulary for w in t.split())]
    aside = lambda d: [x for x in rows(d) if set_aside(d, x[2])]
    fsdd = list(rows("fsdd_subset"))
    simple = {
        "crowd digits": ("digit", only(aside("speech_commands"), DIGITS)),
        "crowd commands": ("command", only(aside("speech_commands"), graphs.COMMANDS)),
        "fsdd digits": ("digit", only(fsdd, DIGITS)),
        "qspi digits": ("digit", only(rows("audio_qspi_nato"), DIGITS)),
        "qspi nato": ("nato", only(rows("audio_qspi_nato"), NATO)),
        "an4 numbers": ("numbers", only(aside("an4"), graphs.NUMS)),
    }
    out = {n: (k, [(clip(p), t) for p, t, _ in items]) for n, (k, items) in simple.items()}
    out["fsdd strings"] = ("digits", strings(only(fsdd, DIGITS), 3))
    for v in voices.KEPT_OUT:
        fs = [(places.LAB / "readings" / f"{v}_{i:03d}.flac", t) for i, t in enumerate(reading_texts(v))]
        out[f"readings {v}"] = ("readings", [(clip(f), t) for f, t in fs if f.exists()])
    return out


def condition(x, cond, r, noises):
    if cond == "quiet":
        x = x * .1
    y = np.concatenate([np.zeros(6400), x, np.zeros(6400)])
    if cond[0] == "n":
        loud = x[np.abs(x) > .02 * np.abs(x).max()]
        z = noises[r.integers(len(noises))]
        z = np.resize(z, max(len(z), len(y) + 1))
        o = r.integers(len(z) - len(y))
        y = y + unit(z[o:o + len(y)]) * np.sqrt((loud ** 2).mean()) * 10 ** (-float(cond[1:]) / 20)
        y = y / max(1., np.abs(y).max() / .95)
    return np.clip(np.round(y * 32767 + r.normal(0, 15, len(y))), -32768, 32767).astype("<i2").tobytes()


def hear(model, pcm):
    import vosk
    rec = vosk.KaldiRecognizer(model, 16000)
    for i in range(0, len(pcm), 6400):
        if rec.AcceptWaveform(pcm[i:i + 6400]):
            first = json.loads(rec.Result())["text"].strip()
            if first:  # an endpoint inside the clip: what is left over is silence
                return first
    return json.loads(rec.FinalResult())["text"].strip()


def measure(bases, only, conds, misses):
    import vosk
    sets = {n: s for n, s in all_sets().items() if s[1] and (not only or any(o in n for o in only))}
    noises = [clip(f) for f in noise_files(True)]
    print("base | condition | " + " | ".join(f"{n} ({len(s[1])})" for n, s in sets.items()) + " | RTF")
    work = tempfile.mkdtemp()
    for base in bases:
        models = {}
        for cond in conds:
            line, wrong, cpu, secs = [], collections.Counter(), 0., 0.
            for n, (kind, items) in sets.items():
                if kind not in models:
                    models[kind] = vosk.Model(str(graphs.model_folder(base, f"{work}/{len(models)}_{abs(hash(base))}", kind)))
                ok = 0
                for j, (x, t) in enumerate(items):
                    pcm = condition(x, cond, np.random.default_rng([j, 7]), noises)
                    t0 = time.process_time()
                    h = hear(models[kind], pcm)
                    cpu, secs = cpu + time.process_time() - t0, secs + len(pcm) / 32000
                    ok += h == t
                    if h != t:
                        wrong[n, t, h] += 1
                line.append(f"{100 * ok / len(items):.1f}")
            print(base, "|", cond, "|", " | ".join(line), f"| {cpu / secs:.3f}", flush=True)
            if misses:
                for (n, t, h), c in wrong.most_common(80):
                    print("   ", n, "| said", t, "| heard", h, "|", c)
    shutil.rmtree(work)


def reject(base, loop_cost, costs=None):
    """One line a price: readings lost (clean, n10) and false accepts in talk, noise kept out, all noise."""
    import vosk
    sets = all_sets()
    noises = [clip(f) for f in noise_files(True)]
    good = [x for v in voices.KEPT_OUT for x in sets[f"readings {v}"][1]]
    talk = [clip(p) for p, _, _ in rows("mycroft_precise")]
    work = tempfile.mkdtemp()
    kept_out = list(noises)
    minutes = lambda xs: sum(len(x) + 12800 for x in xs) / 960000
    print(f"{base}: talk {len(talk)} clips {minutes(talk):.1f} min, noise kept out {len(kept_out)} clips {minutes(kept_out):.1f} min")
    for cost in (costs or COSTS):
        m = vosk.Model(str(graphs.model_folder(base, f"{work}/{cost}", "readings", unk=cost, loop_cost=loop_cost)))
        row = []
        for cond in ("clean", "n10"):
            right = wrong = none = 0
            for j, (x, t) in enumerate(good):
                h = hear(m, condition(x, cond, np.random.default_rng([j, 7]), noises))
                right, none, wrong = right + (h == t), none + (h in ("", "[unk]")), wrong + (h not in ("", "[unk]", t))
            row.append(f"{cond} right {100 * right / len(good):.1f} nothing {100 * none / len(good):.1f} wrong {100 * wrong / len(good):.1f}")
        for name, xs in (("talk", talk), ("noise", kept_out)):
            bad = collections.Counter()
            for j, x in enumerate(xs):
                for part in range(0, max(1, len(x)), 16000 * 8):
                    h = hear(m, condition(x[part:part + 16000 * 8], "clean", np.random.default_rng([j, 9]), noises))
                    if h not in ("", "[unk]"):
                        bad[h] += 1
            row.append(f"{name} accepted {sum(bad.values())} ({sum(bad.values()) / minutes(xs):.2f}/min) {[w for w, _ in bad.most_common(4)]}")
        print(f"unk {cost:+.0f} | " + " | ".join(row), flush=True)
    shutil.rmtree(work)


if __name__ == "__main__":
    ap = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    ap.add_argument("bases", nargs="+")
    ap.add_argument("--sets", default="")
    ap.add_argument("--conds", default="clean")
    ap.add_argument("--misses", action="store_true")
    ap.add_argument("--reject", action="store_true")
    ap.add_argument("--costs", default="", help="prices of [unk], comma between")
    ap.add_argument("--loop-cost", type=float, help="add a loop of phones to [unk] at this price a phone")
    a = ap.parse_args()
    if a.bases == ["speak"]:
        speak()
    else:
        import vosk
        vosk.SetLogLevel(-100)
        if a.reject:
            for b in a.bases:
                reject(b, a.loop_cost, [float(c) for c in a.costs.split(",") if c])
        else:
            measure(a.bases, [s for s in a.sets.split(",") if s], a.conds.split(","), a.misses)
