"""The network: a factored time-delay net, the trunk's shape with a head of our own, in JAX.

Promises: input batch x (3K + 68 frames) x 40, output batch x K x 41, one row for three input frames. Products
are taken in bfloat16 and summed in float32 (three times as fast where the processor has tile units).
Leaves out: training of the batch-norm statistics, which stay the trunk's.
"""

import jax
import jax.numpy as jnp
import numpy as np

import kaldi
import places
from phones import CLASSES

# Layer -> distance of its two taps in its own frames (the low layers run at 100, the high at 33 frames a second).
TAPS = {2: 1, 3: 1, 4: 1, 5: 0} | {i: 3 for i in range(6, 16)}
LOW = {f"{k}{i}" for i in (2, 3, 4) for k in "lab"} | {"w1", "b1"}


HALF = jnp.bfloat16  # what layers hand on: half the memory traffic, which is what training waits for


def load_trunk(seed=0):
    """(trainable, constant) arrays: the trunk with the zero i-vector folded in and a fresh last layer."""
    _, _, parts, _ = kaldi.split_model(places.trunk() / "am" / "final.mdl")
    c = {n: kaldi.component(b) for n, b in parts.items()}
    f = lambda a: jnp.asarray(np.asarray(a, "f4"))
    p, k = {}, {}
    lda, first = c["lda"], c["tdnn1.affine"]
    w = first["<LinearParams>"] @ lda["<LinearParams>"]
    p["w1"], p["b1"] = f(w[:, :120].T), f(first["<LinearParams>"] @ lda["<BiasParams>"] + first["<BiasParams>"])

    def norm(name, key):
        d = c[name]
        scale = (d["<StatsVar>"] + d["<Epsilon>"]) ** -.5 * d["<TargetRms>"]
        k["s" + key], k["o" + key] = f(scale), f(-d["<StatsMean>"] * scale)

    norm("tdnn1.batchnorm", "1")
    for i in range(2, 16):
        p[f"l{i}"] = f(c[f"tdnnf{i}.linear"]["<LinearParams>"].T)
        p[f"a{i}"], p[f"b{i}"] = (f(c[f"tdnnf{i}.affine"][t].T) for t in ("<LinearParams>", "<BiasParams>"))
        norm(f"tdnnf{i}.batchnorm", str(i))
    p["pl"] = f(c["prefinal-l"]["<Params>"].T)
    p["pa"], p["pb"] = (f(c["prefinal-chain.affine"][t].T) for t in ("<LinearParams>", "<BiasParams>"))
    norm("prefinal-chain.batchnorm1", "p1")
    p["pl2"] = f(c["prefinal-chain.linear"]["<Params>"].T)
    norm("prefinal-chain.batchnorm2", "p2")
    p["ow"] = f(np.random.default_rng(seed).normal(0, .05, (64, len(CLASSES))))
    p["ob"] = jnp.zeros(len(CLASSES))
    return p, k


def _product(a, b):
    return jnp.dot(a.astype(jnp.bfloat16), b.astype(jnp.bfloat16), preferred_element_type=jnp.float32)


@jax.custom_vjp
def _dot2(a, b):
    return _product(a, b)


_dot2.defvjp(lambda a, b: (_product(a, b), (a, b)),
             lambda ab, g: (_product(g, ab[1].T).astype(ab[0].dtype), _product(ab[0].T, g)))


def dot(x, w):
    """x @ w over the last axis."""
    return _dot2(x.reshape(-1, x.shape[-1]), w).reshape(*x.shape[:-1], w.shape[1])


def _block(p, k, h, i, key=None, drop=0.):
    l, a = p[f"l{i}"], p[f"a{i}"]
    if TAPS[i]:
        n = l.shape[1]
        z = dot(h, jnp.concatenate([l[:768], l[768:]], 1))
        z = z[:, :-1, :n] + z[:, 1:, n:]
        z, q = jnp.concatenate([z[:, :-1], z[:, 1:]], -1), h[:, 1:-1]
        if i == 4:  # the layers above look at every third frame only
            z, q = z[:, ::3], q[:, ::3]
        y = dot(z, a) + p[f"b{i}"]
    else:
        y, q = dot(dot(h, l), a) + p[f"b{i}"], h
    y = (jax.nn.relu(y) * k[f"s{i}"] + k[f"o{i}"]).astype(HALF)
    if key is not None:
        y = y * (1 + drop * jax.random.uniform(key, (y.shape[0], 1, y.shape[2]), minval=-2., maxval=2.)).astype(HALF)
    return jnp.asarray(.66, HALF) * q + y


def forward(p, k, x, key=None, drop=0., fixed_low=False):
    """Unnormalised scores; `fixed_low` keeps the low layers, near half of the work, out of the gradient."""
    h = dot(jnp.concatenate([x[:, :-2], x[:, 1:-1], x[:, 2:]], -1), p["w1"]) + p["b1"]
    h = (jax.nn.relu(h) * k["s1"] + k["o1"]).astype(HALF)
    for i in (2, 3, 4):
        h = _block(p, k, h, i)
    if fixed_low:
        h = jax.lax.stop_gradient(h)
    keys = [None] * 16 if key is None else jax.random.split(key, 16)
    for i in range(5, 16):
        h = _block(p, k, h, i, keys[i], drop)
    y = jax.nn.relu(dot(dot(h, p["pl"]), p["pa"]) + p["pb"]) * k["sp1"] + k["op1"]
    y = dot(y, p["pl2"]) * k["sp2"] + k["op2"]
    return dot(y, p["ow"]) + p["ob"]
