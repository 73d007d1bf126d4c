"""Reading and writing the few Kaldi binary formats the lab needs.

Promises: an nnet3 file is read into named components and written back with other weights, byte for
byte the same elsewhere; the transition model and the mean statistics are written as libvosk reads them.
Leaves out: text formats, other model types, decoding graphs (those are built in Rust).
"""

import re
import struct

import numpy as np

from phones import PHONES


def _matrix(b: bytes, i: int):
    """A matrix or vector at offset i and the offset behind it, or (None, i)."""
    t = b[i:i + 3]
    if t in (b"FM ", b"DM "):
        rows, = struct.unpack("<i", b[i + 4:i + 8])
        cols, = struct.unpack("<i", b[i + 9:i + 13])
        d = "<f4" if t[:1] == b"F" else "<f8"
        n = int(d[2]) * rows * cols
        return np.frombuffer(b, d, rows * cols, i + 13).reshape(rows, cols).astype("f8"), i + 13 + n
    if t in (b"FV ", b"DV "):
        n, = struct.unpack("<i", b[i + 4:i + 8])
        d = "<f4" if t[:1] == b"F" else "<f8"
        return np.frombuffer(b, d, n, i + 8).astype("f8"), i + 8 + int(d[2]) * n
    return None, i


def split_model(path):
    """(head before <Nnet3>, config text, {component name: its bytes}, tail) of a final.mdl."""
    b = open(path, "rb").read()
    i0 = b.index(b"<Nnet3>")
    j = b.index(b"<NumComponents>", i0)
    at = [m.start() for m in re.finditer(rb"<ComponentName> \S+ <", b)] + [b.rindex(b"</Nnet3>")]
    parts = {}
    for p, q in zip(at, at[1:]):
        c = b[p:q]
        parts[re.match(rb"<ComponentName> (\S+) ", c).group(1).decode()] = c
    return b[:i0], b[i0 + 8:j].decode(), parts, b[at[-1]:]


def component(c: bytes) -> dict:
    """Tag -> value (array, float or list) of one component's bytes."""
    m = re.match(rb"<ComponentName> (\S+) (<\w+>) ", c)
    d, i, tag = {}, m.end(), None
    while i < len(c):
        if c[i:i + 1] == b"<":
            k = c.index(b">", i)
            tag, i = c[i:k + 1].decode(), k + 2
            d.setdefault(tag, None)
            continue
        mat, i2 = _matrix(c, i)
        if mat is not None:
            d[tag], i = mat, i2
        elif c[i] == 4:
            d[tag] = struct.unpack("<f", c[i + 1:i + 5])[0]
            n, = struct.unpack("<i", c[i + 1:i + 5])
            i += 5
            if tag == "<TimeOffsets>":
                d[tag] = list(struct.unpack(f"<{n}i", c[i:i + 4 * n]))
                i += 4 * n
        elif c[i] == 8:
            d[tag], i = struct.unpack("<d", c[i + 1:i + 9])[0], i + 9
        elif c[i:i + 1] in b"TF":
            d[tag], i = c[i:i + 1] == b"T", i + 1
        else:
            raise ValueError(f"unknown value in {m.group(1).decode()} after {tag}: {c[i:i + 20]!r}")
    return d


def float_matrix(m) -> bytes:
    m = np.ascontiguousarray(m, "<f4")
    return b"FM \4" + struct.pack("<i", m.shape[0]) + b"\4" + struct.pack("<i", m.shape[1]) + m.tobytes()


def float_vector(v) -> bytes:
    v = np.asarray(v, "<f4")
    return b"FV \4" + struct.pack("<i", len(v)) + v.tobytes()


def replaced(c: bytes, tag: str, new: bytes) -> bytes:
    """The component's bytes with the matrix after `tag` replaced."""
    t = tag.encode() + b" "
    i = c.index(t) + len(t)
    old, end = _matrix(c, i)
    if old is None:
        raise ValueError(f"no matrix after {tag}")
    return c[:i] + new + c[end:]


def transition_model(classes_of_phone=None) -> bytes:
    """One shared one-state topology, all probabilities one half (the graph carries its own)."""
    cls = classes_of_phone or [c for _, _, c in PHONES]
    n = len(cls)
    out = bytearray(b"\0B")

    def tok(t):
        out.extend(t.encode() + b" ")

    def i32(v):
        out.extend(b"\4" + struct.pack("<i", v))

    def f32(v):
        out.extend(b"\4" + struct.pack("<f", v))

    def ints(v):
        out.extend(b"\4" + struct.pack("<i", len(v)) + np.asarray(v, "<i4").tobytes())

    tok("<TransitionModel>"), tok("<Topology>")
    ints(list(range(1, n + 1))), ints([-1] + [0] * n)
    i32(1), i32(2)
    i32(0), i32(2), i32(0), f32(.5), i32(1), f32(.5)
    i32(-1), i32(0)
    tok("</Topology>"), tok("<Triples>"), i32(n)
    for p, c in enumerate(cls):
        i32(p + 1), i32(0), i32(c)
    tok("</Triples>"), tok("<LogProbs>")
    out.extend(float_vector([0.0] + [float(np.log(.5))] * (2 * n)))
    tok("</LogProbs>"), tok("</TransitionModel>")
    return bytes(out)


def mean_statistics(mean, weight=1000.) -> bytes:
    """global_cmvn.stats: sums and squares of `weight` frames around the given mean."""
    d = len(mean)
    g = np.zeros((2, d + 1))
    g[0, :d], g[0, d], g[1, :d] = np.asarray(mean) * weight, weight, (np.asarray(mean) ** 2 + 100) * weight
    return (b"\0BDM \4" + struct.pack("<i", 2) + b"\4" + struct.pack("<i", d + 1)
            + g.astype("<f8").tobytes())
