"""Stage: alignments -> a pool of distinct, spoilt utterances as features and labels.

  python augment.py pool SEED COUNT aligned_human.pkl aligned_speech_....pkl ...
  python augment.py dev aligned_human.pkl

Promises: seeded; every pool is fresh. Speed, reverberation, equaliser, band limit, level, saturation, noise and
babble; splices of words of one speaker into connected strings with repeats; talk and noise for the class NSN.
Noise clips whose name hashes to the test fifth are never used (evaluate.py uses those).
Leaves out: vocal tract warping beyond what a speed change brings.
"""

import hashlib
import pickle
import sys
import time

import numpy as np
from scipy.signal import butter, fftconvolve, resample_poly, sosfilt

import features
import places
from align import load
from lexicon import DIGITS, TEENS, TENS
from phones import CLASS_ID, NSN, SIL
from voices import KEPT_OUT, KOKORO, KOKORO_JA, TRAINING

NOISE_SETS = ("noise_esc10", "noise_opensfx")
SHARE_TALK_AS_NSN = .65  # the rest of the talk keeps its phones, so that own words can be added later
LONGEST = 8 * 16000


# Licences that are not open enough to train on: CC BY-SA.
NOT_OPEN = {"noise_opensfx/helicopter.wav"}


def for_test(path):
    """A fifth of the noise clips, and those whose licence keeps them out of training, serve tests only."""
    return f"{path.parts[-3]}/{path.name}" in NOT_OPEN or int(hashlib.md5(path.name.encode()).hexdigest(), 16) % 5 == 0


def noise_files(test):
    files = [f for d in NOISE_SETS for f in sorted((places.SPEECH / d / "clips").glob("*.wav"))]
    return [f for f in files if for_test(f) == test]


def unit(x):
    return x / (np.sqrt((x ** 2).mean()) + 1e-9)


def narrowed(x, how, r):
    """The telephone's band."""
    if how == "resampled":
        return resample_poly(resample_poly(x, 1, 2), 2, 1)[:len(x)]
    return sosfilt(butter(6, r.uniform(3300, 4000) / 8000, output="sos"), x)


class Maker:
    def __init__(self, seed, utterances):
        self.r = np.random.default_rng(seed)
        train = [u for u in utterances if not u["dev"] and len(u["x"]) < LONGEST]
        self.human = [u for u in train if u["src"] != "synthetic"]
        self.human_phrase = [u for u in self.human if u["kind"] == "phrase"]
        voice = lambda u: u["spk"].split("-")[0]
        self.kokoro = [u for u in train if voice(u) in KOKORO + KOKORO_JA]
        self.quick = [u for u in train if voice(u) in TRAINING and voice(u) not in KOKORO + KOKORO_JA]
        if any(voice(u) in KEPT_OUT for u in train):
            raise SystemExit("a voice kept out for tests is among the training material")
        self.noise = [z for z in (load(f) for f in noise_files(False)) if len(z) > 8000 and np.abs(z).max() > 1e-3]
        self.pieces = self._pieces(train)

    def _pieces(self, train):
        """speaker -> words cut from aligned utterances: (word, samples, [(class, start, end)] from 0)."""
        by = {}
        for u in train:
            if u["bad"]:
                continue
            ph = [p for p in u["ph"] if p[0] != "SIL"]
            i, ws = 0, u["text"].split()
            # Only words with breath on both sides or inside digit strings splice well enough.
            for w, chosen in zip(ws, u["words"]):
                q = ph[i:i + len(chosen)]
                i += len(chosen)
                if u["kind"] == "talk" and u["src"] == "synthetic":
                    continue
                s, e = max(0, q[0][1] - 2), q[-1][2] + 2
                x = u["x"][s * 160:e * 160]
                if len(x) < 1200 or len(x) > 16000:
                    continue
                cls = [NSN] * len(q) if u["kind"] == "talk" else chosen
                lab = [(c, p[1] - s, p[2] - s) for c, p in zip(cls, q)]
                by.setdefault(u["spk"], []).append((w if u["kind"] != "talk" else "[unk]", unit(x), lab,
                                                    [NSN] if u["kind"] == "talk" else chosen))
        return {k: v for k, v in by.items() if len(v) > 2}

    # -- noise ---------------------------------------------------------------------------------
    def a_noise(self, n, babble=True):
        r, k = self.r, self.r.random()
        if k < .25:
            f = np.maximum(np.arange(n // 2 + 1), 1.) / n
            y = np.fft.irfft(np.fft.rfft(r.normal(size=n)) * f ** (-r.uniform(0, 2) / 2), n)
        elif k < .36:  # hum and motors: harmonics, slowly modulated, with grit
            t, f = np.arange(n) / 16000, r.choice([50, 100, 60, 120]) * r.choice([1, 1, r.uniform(.7, 6)])
            y = sum(r.uniform(0, 1) / h ** r.uniform(.3, 1.2) * np.sin(2 * np.pi * f * h * t + r.uniform(0, 6))
                    for h in range(1, 14) if f * h < 7500)
            y = y * (1 + r.uniform(0, .8) * np.sin(2 * np.pi * r.uniform(.5, 25) * t)) + r.uniform(.05, .6) * r.normal(size=n)
        elif k < .46 and babble:
            y = np.zeros(n)
            for _ in range(r.integers(3, 7)):
                pool = self.human if r.random() < .5 or not self.kokoro else self.kokoro
                z = pool[r.integers(len(pool))]["x"][4000:-4000]
                if len(z) > 2000:
                    y += np.roll(np.resize(z, n), r.integers(n)) / (np.abs(z).max() + 1e-9)
        else:
            z = self.noise[r.integers(len(self.noise))]
            if r.random() < .4:
                q = int(r.integers(28, 56))
                z = resample_poly(z, 40, q)
            z = np.resize(z, max(len(z), n + 1))
            o = r.integers(len(z) - n)
            y = z[o:o + n]
        return unit(np.asarray(y, "f8"))

    # -- one utterance ---------------------------------------------------------------------------
    def spoil(self, x, lab, speech):
        """Samples, [(class, start, end)] in frames, (first, last) sample of speech -> (mfcc, labels)."""
        r = self.r
        x = x.astype("f8") / (np.abs(x).max() + 1e-9)
        sp = 1.0
        if r.random() < .75:
            sp = float(np.exp(r.uniform(np.log(.8), np.log(1.27)))) if r.random() < .5 else r.uniform(.9, 1.12)
            q = int(round(sp * 40))
            sp = q / 40
            if q != 40:
                x = resample_poly(x, 40, q)
        s0, s1 = (int(v / sp) for v in speech)
        s0, s1 = min(s0, len(x) - 800), min(max(s1, s0 + 400), len(x))
        a = int(r.uniform(-min(s0, 3000), 9000))
        b = int(r.uniform(-min(2500, max(0, len(x) - s1 - 800)), 9000))
        x = x[-a:] if a < 0 else np.concatenate([np.zeros(a), x])
        x = x[:b] if b < 0 else np.concatenate([x, np.zeros(b)])
        s0, s1 = max(0, s0 + a), min(len(x), s1 + a)
        if r.random() < .35:
            n = int(r.uniform(.08, .5) * 16000)
            h = r.normal(size=n) * np.exp(-6.9 * np.arange(n) / n)
            h *= 10 ** (-r.uniform(0, 14) / 20) / np.sqrt((h ** 2).sum())
            h[:int(r.uniform(10, 80))] = 0
            h[0] = 1
            x = fftconvolve(x, h)[:len(x)]
        if r.random() < .5:
            spectrum = np.fft.rfft(x)
            f = np.arange(len(spectrum)) / len(spectrum) * 8000
            g = np.interp(f, [0, 150, 500, 1000, 2000, 4000, 8000.], r.uniform(-7, 7, 7))
            x = np.fft.irfft(spectrum * 10 ** (g / 20), len(x))
        # Narrow headsets and old recordings: "two" and "six" lose their hiss. The band is cut before or after the noise
        # comes in, and the noise of a narrow channel has nothing above it either.
        k = r.random()
        narrow = "resampled" if k < .20 else "filtered" if k < .30 else None
        late = r.random() < .7
        if narrow and not late:
            x = narrowed(x, narrow, r)
        elif k > .92:
            x = sosfilt(butter(4, r.uniform(200, 400) / 8000, "high", output="sos"), x)
        if r.random() < .25:  # cut close, as a key pressed late or a trimmed recording gives it
            c = s0 + int(r.uniform(-.03, .02) * 16000)
            x[:max(0, c)] = 0
            c = s1 + int(r.uniform(-.02, .04) * 16000)
            x[max(0, c):] = 0
        x /= np.abs(x).max() + 1e-9
        if r.random() < .15:
            x = np.tanh(x * r.uniform(1.5, 6))
            x /= np.abs(x).max()
        x = x * 10 ** ((r.uniform(-32, -1) if r.random() < .6 else r.uniform(-14, -3)) / 20)
        if r.random() < .68:
            rms = np.sqrt((x[s0:s1] ** 2).mean()) + 1e-9
            x = x + self.a_noise(len(x)) * rms * 10 ** (-(r.uniform(0, 26) if r.random() < .6 else r.uniform(2, 13)) / 20)
        if narrow and late:
            x = narrowed(x, narrow, r)
            if r.random() < .3:  # the eight bits of a telephone line, logarithmic
                top = np.abs(x).max() + 1e-9
                y = np.sign(x) * np.log1p(255 * np.abs(x / top)) / np.log(256)
                y = np.round(y * 128) / 128
                x = np.sign(y) * np.expm1(np.abs(y) * np.log(256)) / 255 * top
        x = x * 32767 + r.normal(size=len(x)) * np.exp(r.uniform(0, np.log(40)))
        m = features.mfcc(np.clip(np.round(x), -32768, 32767))
        t = len(m)
        if lab is None:
            return m.astype("f4"), np.full((t + 2) // 3, -1, "i1")
        frames = np.zeros(t, "i1")
        for c, s, e in lab:
            frames[max(0, int(round(s / sp + a / 160))):max(0, int(round(e / sp + a / 160)))] = c
        return m.astype("f4"), frames[np.minimum(np.arange((t + 2) // 3) * 3 + 1, t - 1)]

    def item(self, u):
        """An utterance as it is (spoilt). Bad alignments keep their words and lose their frame labels."""
        ph = u["ph"]
        s0 = ph[0][2] * 160 if ph[0][0] == "SIL" else 0
        s1 = ph[-1][1] * 160 if ph[-1][0] == "SIL" else len(u["x"])
        if u["kind"] == "talk" and self.r.random() < SHARE_TALK_AS_NSN:
            lab = [(SIL if p[0] == "SIL" else NSN, p[1], p[2]) for p in ph]
            return self.spoil(u["x"], None if u["bad"] else lab, (s0, s1)) + ("[unk]", [[NSN]], u["src"])
        lab = [(CLASS_ID[p[0]], p[1], p[2]) for p in ph]
        return self.spoil(u["x"], None if u["bad"] else lab, (s0, s1)) + (u["text"], u["words"], u["src"])

    def noise_only(self):
        n = int(self.r.uniform(.6, 3.5) * 16000)
        x = self.a_noise(n)
        if self.r.random() < .4:  # knocks and claps stand out of silence
            x = x * np.interp(np.arange(n), np.linspace(0, n, 12), self.r.random(12) ** 4)
        e = np.sqrt((x[:n // 160 * 160].reshape(-1, 160) ** 2).mean(1))
        loud = e > .5 * e.max()
        lab = [(NSN, i, i + 1) for i in np.flatnonzero(loud)]
        return self.spoil(x, lab, (0, n)) + ("[unk]", [[NSN]], "noise")

    def splice(self):
        r = self.r
        human = r.random() < .6
        speakers = [k for k in self.pieces if (k.split("-")[0] not in TRAINING) == human] or list(self.pieces)
        v = self.pieces[speakers[r.integers(len(speakers))]]
        numbers = [p for p in v if p[0] in DIGITS + TEENS + TENS + ["oh", "nought", "point"]]
        if human and r.random() < .35:  # several people: digits of the crowd, whose own sets are small
            numbers = [p for s in r.choice(len(speakers), 4) for p in self.pieces[speakers[s]] if p[0] in DIGITS] or numbers
        pool = numbers if numbers and r.random() < .75 else v
        xs, lab, text, words, n0 = [np.zeros(4000)], [], [], [], 25
        prev = None
        tight = r.random() < .6
        for _ in range(int(r.integers(2, 7))):
            p = prev if prev is not None and r.random() < .3 else pool[r.integers(len(pool))]
            if r.random() < .04:
                y = self.a_noise(int(r.uniform(.15, .8) * 16000) // 160 * 160, False)
                p = ("[unk]", y, [(NSN, 0, len(y) // 160)], [NSN])
            prev = p if p[0] != "[unk]" else prev
            w, x, q, chosen = p
            k = len(x) // 160
            x = x[:k * 160] * r.uniform(.7, 1.3)
            f = min(100, len(x) // 4)
            x = x.copy()
            x[:f] *= np.linspace(0, 1, f)
            x[-f:] *= np.linspace(1, 0, f)
            xs.append(x)
            lab += [(c, s + n0, min(e, k) + n0) for c, s, e in q]
            n0 += k
            gap = int(r.integers(0, 5)) if tight else int(r.integers(3, 40))
            xs.append(np.zeros(gap * 160))
            n0 += gap
            text.append(w)
            words.append(chosen)
        xs.append(np.zeros(4000))
        x = np.concatenate(xs)
        if len(x) > LONGEST:
            return None
        return self.spoil(x, lab, (4000, len(x) - 4000)) + (" ".join(text), words, "splice")

    def draw(self):
        k, r = self.r.random(), self.r
        if k < .05:
            return self.noise_only()
        if k < .28:
            return self.splice()
        pool = self.human if k < .58 or not self.kokoro else self.kokoro if k < .90 else self.quick
        return self.item(pool[r.integers(len(pool))])


def dev_pool(utterances):
    """The speakers set aside: as they are, and once in noise at 10 dB."""
    out, m = [], Maker(5, utterances)
    for u in utterances:
        if not u["dev"] or len(u["x"]) > LONGEST:
            continue
        talk = u["kind"] == "talk"
        x0 = u["x"] / (np.abs(u["x"]).max() + 1e-9) * 16000
        for noisy in (False, True):
            x = x0 + m.r.normal(size=len(x0)) * 10
            if noisy:
                x = x + m.a_noise(len(x)) * np.sqrt((x0[4000:-4000] ** 2).mean()) * 10 ** -.5
            f = features.mfcc(x).astype("f4")
            lab = np.zeros(len(f), "i1")
            for p in u["ph"]:
                lab[p[1]:p[2]] = CLASS_ID[p[0]] if not talk or p[0] == "SIL" else NSN
            lab = lab[np.minimum(np.arange((len(f) + 2) // 3) * 3 + 1, len(f) - 1)]
            if u["bad"]:
                lab = lab * 0 - 1
            out.append((f, lab, "[unk]" if talk else u["text"], [[NSN]] if talk else u["words"], u["src"]))
    return out


if __name__ == "__main__":
    if len(sys.argv) < 3:
        raise SystemExit(__doc__)
    t0 = time.time()
    read = lambda f: pickle.load(open(places.LAB / f, "rb"))
    if sys.argv[1] == "dev":
        out, name = dev_pool(read(sys.argv[2])), "dev.pkl"
    else:
        seed, count = int(sys.argv[2]), int(sys.argv[3])
        maker = Maker(seed, [u for f in sys.argv[4:] for u in read(f)])
        out, name = [], f"pool_{seed}.pkl"
        while len(out) < count:
            z = maker.draw()
            if z is not None and np.isfinite(z[0]).all():  # a stretch of pure zeros has no level to set
                out.append(z)
    tmp = places.LAB / (name + ".part")
    with open(tmp, "wb") as f:
        pickle.dump(out, f, protocol=4)
    tmp.rename(places.LAB / name)
    by = {}
    for z in out:
        by[z[4]] = by.get(z[4], 0) + 1
    print(name, len(out), f"{sum(len(z[0]) for z in out) / 360000:.2f} h", by, f"{time.time() - t0:.0f} s")
