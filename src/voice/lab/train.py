"""Stage: pools -> checkpoint. Two modes, run one after the other.

  python train.py ce  OUT.npz MINUTES                       from the trunk; cross-entropy on frame labels
  python train.py mmi OUT.npz MINUTES --init CE.npz         lattice-free maximum mutual information on words

Promises: takes every pool_*.pkl there is, in order, each a few times, and picks up new ones as they appear;
the rate follows a cosine over the time given; the weights kept are a running average. Seeds are fixed, but
the clock decides how many steps are made, so two runs agree in kind and not in bytes.
Leaves out: speakers set aside (they are in dev.pkl only).
"""

import argparse
import os
import pickle
import time

import jax
import jax.numpy as jnp
import numpy as np

import features
import places
from lexicon import VOCABULARY, pronunciations
from network import LOW, forward, load_trunk
from phones import CLASS_ID, CLASSES, CMU, NSN

QUANTUM, LONGEST, BATCH = 48, 288, int(64 / .03)  # label frames
NEVER = -1e4
HALF, QUARTER = np.log(.5), np.log(.25)
N = len(CLASSES)


def bucket(u):
    return -(-len(u[1]) // QUANTUM) * QUANTUM


def usable(u):
    return np.isfinite(u[0]).all() and len(u[1]) <= LONGEST and len(u[1]) > sum(map(len, u[3])) + 2


def pack(u):
    m, labels, size = features.normalised(u[0]), u[1], bucket(u)
    x = features.padded(m)
    need = 3 * size + 68
    if len(x) < need:
        x = np.concatenate([x, np.repeat(x[-1:], need - len(x), 0)])
    full = np.full(size, -1, "i4")
    full[:len(labels)] = labels
    return x[:need], full, len(labels)


def states(u):
    """Left-to-right states of the words with optional silence around each: class, log step, log skip, start, end."""
    cls, step, skip = [0], [NEVER], [NEVER]
    for wi, word in enumerate(u[3]):
        for i, c in enumerate(word):
            cls.append(c)
            step.append(HALF)
            skip.append(QUARTER if i == 0 and wi else NEVER)
        cls.append(0)
        step.append(QUARTER)
        skip.append(NEVER)
    start, end = [NEVER] * len(cls), [NEVER] * len(cls)
    start[0] = start[1] = HALF
    end[-1] = end[-2] = 0.
    return cls, step, skip, start, end


def batch(us):
    size = bucket(us[0])
    width = size // 3 + 32  # states; longer transcripts are left out
    z = [pack(u) for u in us]
    h = [states(u) for u in us]
    fill = (0, NEVER, NEVER, NEVER, NEVER)
    cols = [np.array([list(s[i]) + [fill[i]] * (width - len(s[i])) for s in h], "i4" if i == 0 else "f4") for i in range(5)]
    return (np.stack([q[0] for q in z]), np.stack([q[1] for q in z]), np.array([q[2] for q in z], "i4"), *cols)


class Denominator:
    """A loop over words and single phones: what the numerator has to beat."""

    def __init__(self, counts):
        words = list(VOCABULARY) + [w for w in counts if w not in VOCABULARY and counts[w] >= 6 and pronunciations(w)]
        total = sum((counts.get(w, 0) + 50) ** .5 for w in words)
        cls, first, last = [], [], []

        def add(phones, prob):
            for i, c in enumerate(phones):
                cls.append(c)
                first.append(prob if i == 0 else 0.)
                last.append(float(i == len(phones) - 1))

        for w in words:
            forms = list(dict.fromkeys(pronunciations(w)))
            for q in forms:
                add([CLASS_ID[c] for c in q.split()], .88 * (counts.get(w, 0) + 50) ** .5 / total / len(forms))
        add([NSN], .08)
        for c in CMU:
            add([CLASS_ID[c]], .04 / len(CMU))
        self.first, self.last = jnp.asarray(first, "f4"), jnp.asarray(last, "f4")
        self.inside = 1. - (self.first > 0)
        self.pick = jnp.asarray(np.eye(N, dtype="f4")[:, cls])
        print("denominator:", len(words), "words,", len(cls), "states", flush=True)

    def __call__(self, y, lengths):
        m = jax.lax.stop_gradient(y.max(-1, keepdims=True))
        b = jnp.exp(y - m)
        n, t = y.shape[:2]
        # Every class's likelihood spread over the states at once: a product is cheaper than a gather here.
        def f(carry, x):
            al, sil, z = carry
            bt, mt, i = x
            shifted = jnp.pad(al[:, :-1], ((0, 0), (1, 0))) * self.inside
            into = jnp.where(i == 0, .5, .25 * (al @ self.last) + .5 * sil)
            na = (.5 * al + .5 * shifted + into[:, None] * self.first) * (bt @ self.pick)
            ns = into * bt[:, 0]
            s = na.sum(1) + ns + 1e-30
            ok = i < lengths
            return (jnp.where(ok[:, None], na / s[:, None], al), jnp.where(ok, ns / s, sil),
                    jnp.where(ok, z + jnp.log(s) + mt[:, 0], z)), None

        init = (jnp.zeros((n, self.first.shape[0])), jnp.zeros(n), jnp.zeros(n))
        (al, sil, z), _ = jax.lax.scan(f, init, (b.transpose(1, 0, 2), m.transpose(1, 0, 2), jnp.arange(t)))
        return z + jnp.log(al @ self.last + sil + 1e-30)


def numerator(y, lengths, cls, step, skip, start, end):
    n, s = cls.shape
    hot = jax.nn.one_hot(cls, N, axis=1)                       # batch x classes x states
    e = jnp.einsum("btc,bcs->tbs", y, hot)

    def f(al, x):
        et, i = x
        one = jnp.pad(al[:, :-1], ((0, 0), (1, 0)), constant_values=NEVER) + step
        two = jnp.pad(al[:, :-2], ((0, 0), (2, 0)), constant_values=NEVER) + skip
        new = jnp.logaddexp(jnp.logaddexp(al + HALF, one), two)
        return jnp.where((i < lengths)[:, None], jnp.where(i == 0, start, new) + et, al), None

    al, _ = jax.lax.scan(f, jnp.full((n, s), NEVER), (e, jnp.arange(y.shape[1])))
    return jax.nn.logsumexp(al + end, -1)


class Pools:
    """Batches from the pools there are; each pool is walked `reuse` times before it gives way to newer ones."""

    def __init__(self, r, hold=2):
        self.r, self.hold, self.seen, self.items, self.queue = r, hold, [], [], []

    def refresh(self):
        there = sorted((f for f in places.LAB.glob("pool_*.pkl")), key=lambda f: f.stat().st_mtime)
        fresh = [f for f in there if f not in self.seen]
        for f in fresh[:1] if self.seen else there[:self.hold]:
            self.seen.append(f)
            self.items.append([u for u in pickle.load(open(f, "rb")) if usable(u)])
        self.items = self.items[-self.hold:]
        by = {}
        for u in (u for items in self.items for u in items):
            if len(states(u)[0]) <= bucket(u) // 3 + 32:
                by.setdefault(bucket(u), []).append(u)
        out = []
        for size, us in by.items():
            n = max(1, BATCH // size)
            ix = list(self.r.permutation(len(us)))
            ix += list(self.r.integers(0, len(us), -len(ix) % n))
            out += [[us[i] for i in ix[j:j + n]] for j in range(0, len(ix), n)]
        self.r.shuffle(out)
        self.queue = out
        print("pools", [f.stem for f in self.seen[-self.hold:]], sum(map(len, self.items)), "utterances", len(out), "batches", flush=True)

    def next(self):
        if not self.queue:
            self.refresh()
        return self.queue.pop()


def main():
    ap = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    ap.add_argument("mode", choices=["ce", "mmi"])
    ap.add_argument("out")
    ap.add_argument("minutes", type=float)
    ap.add_argument("--init")
    ap.add_argument("--lr", type=float)
    ap.add_argument("--head", type=int, default=100, help="steps on the last layer alone (ce from the trunk)")
    ap.add_argument("--drop", type=float, default=.15)
    ap.add_argument("--scale", type=float, default=.35, help="acoustic scale folded in when mmi starts from ce")
    ap.add_argument("--priors", type=float, default=.3, help="share of the class priors taken out at that moment")
    ap.add_argument("--ce-weight", type=float, default=.1)
    ap.add_argument("--fixed-low", action="store_true", help="leave the low layers as they are: a third faster")
    ap.add_argument("--seed", type=int, default=1)
    a = ap.parse_args()
    jax.config.update("jax_compilation_cache_dir", str(places.LAB / "compiled"))  # six shapes, a minute in all
    p, k = load_trunk()
    counts_of_class, from_ce = np.ones(N), False
    if a.init:
        z = np.load(a.init)
        p = {n[2:]: jnp.asarray(z[n]) for n in z.files if n.startswith("p_")}
        counts_of_class, from_ce = z["cnt"].astype(float), bool(z["ce"])
    lr = a.lr or (5e-4 if a.mode == "ce" else 3e-4)
    if a.mode == "mmi" and from_ce:
        prior = np.log((counts_of_class + 20) / (counts_of_class + 20).sum())
        p["ob"], p["ow"] = (p["ob"] - a.priors * prior) * a.scale, p["ow"] * a.scale
    r, key = np.random.default_rng(a.seed), jax.random.PRNGKey(a.seed)
    pools = Pools(r)
    pools.refresh()
    counts = {}
    for items in pools.items:
        for u in items:
            for w in u[2].split():
                counts[w] = counts.get(w, 0) + 1
    counts_of_class = np.bincount(np.concatenate([u[1].astype(int) + 1 for i in pools.items for u in i]), minlength=N + 1)[1:]
    den = Denominator(counts) if a.mode == "mmi" else None
    dev = [u for u in pickle.load(open(places.LAB / "dev.pkl", "rb")) if usable(u)]

    def loss(p, b, key, drop):
        x, labels, lengths = b[:3]
        y = forward(p, k, x, key, drop, a.fixed_low)[:, :labels.shape[1]]
        ok, total = labels >= 0, lengths.sum()
        lp = jax.nn.log_softmax(y / (a.scale if a.mode == "mmi" else 1.), -1)
        own = jnp.take_along_axis(lp, jnp.maximum(labels, 0)[..., None], -1)[..., 0]
        right = ((lp.argmax(-1) == labels) & ok).sum() / ok.sum()
        if a.mode == "ce":
            l = -((.95 * own + .05 * lp.mean(-1)) * ok).sum() / ok.sum()
            return l, (l, right)
        ce = -(own * ok).sum() / total
        live = jnp.arange(y.shape[1])[None] < lengths[:, None]
        mmi = (den(y, lengths) - numerator(y, lengths, *b[3:])).sum() / total
        return mmi + a.ce_weight * ce + 1e-4 * ((y ** 2).mean(-1) * live).sum() / total, (mmi, right)

    @jax.jit
    def step(p, mo, ve, avg, b, key, lr, t, head, keep):
        (l, aux), g = jax.value_and_grad(lambda p: loss(p, b, key, a.drop), has_aux=True)(p)
        norm = jnp.sqrt(sum((v ** 2).sum() for v in g.values()))
        g = {n: v * jnp.minimum(1, 1. / (norm + 1e-6)) for n, v in g.items()}
        mo = {n: .9 * mo[n] + .1 * g[n] for n in p}
        ve = {n: .99 * ve[n] + .01 * g[n] ** 2 for n in p}
        rate = lambda n: lr * jnp.where(head, 1. if n in ("ow", "ob") else 0., .5 if a.mode == "mmi" and n in LOW else 1.)
        p = {n: p[n] - rate(n) * (mo[n] / (1 - .9 ** t)) / (jnp.sqrt(ve[n] / (1 - .99 ** t)) + 1e-8) for n in p}
        return p, mo, ve, {n: keep * avg[n] + (1 - keep) * p[n] for n in p}, l, aux, norm

    judge = jax.jit(lambda p, b: loss(p, b, None, 0.)[1])

    def on_dev(p):
        by, out = {}, np.zeros(3)
        for u in dev:
            by.setdefault(bucket(u), []).append(u)
        for us in by.values():
            l, right = judge(p, batch(us))
            out += np.array([float(l), float(right), 1]) * sum(len(u[1]) for u in us)
        return np.round(out[:2] / out[2], 4)

    def save(p):
        tmp = a.out + ".part.npz"
        np.savez(tmp, cnt=counts_of_class, ce=a.mode == "ce", **{"p_" + n: np.asarray(v) for n, v in p.items()})
        os.replace(tmp, a.out)

    zero = lambda: {n: jnp.zeros_like(v) for n, v in p.items()}
    mo, ve, avg = zero(), zero(), p
    log, t, t0, heads = [], 0, time.time(), (a.head if a.mode == "ce" and not a.init else 0)
    start = None
    while True:
        t += 1
        head = t <= heads
        if t == heads + 1:
            mo, ve, start, adam0 = zero(), zero(), time.time(), t - 1
        done = 0. if head else (time.time() - start) / (60 * a.minutes)
        if done >= 1:
            break
        now = 3e-3 if head else lr * min(1, (t - heads) / 30) * (.5 + .5 * np.cos(np.pi * done)) + 1e-6
        key, sub = jax.random.split(key)
        p, mo, ve, avg, l, aux, norm = step(p, mo, ve, avg, batch(pools.next()), sub, now,
                                            float(t if head else t - adam0), head, 0. if t < heads + 30 else .98)
        log.append([float(l), float(aux[0]), float(aux[1]), float(norm)])
        if t % 50 == 0:
            print(f"step {t} done {done:.2f} loss/main/right/norm {np.mean(log[-50:], 0).round(4)} dev {on_dev(avg)} "
                  f"{time.time() - t0:.0f} s", flush=True)
            save(avg)
    save(avg)
    print("dev at the end", on_dev(avg), "steps", t, flush=True)


if __name__ == "__main__":
    main()
