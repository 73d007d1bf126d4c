"""Decoding graphs for the lab's own measurements (the tool builds its graphs in Rust, not here).

Promises: a model folder that libvosk loads, from a base, a word list and one strict grammar; [unk] is the class
NSN for one or more frames, or a loop of phones at a price.
Leaves out: determinisation and minimisation; these graphs are small.
"""

import math
import os
import struct
from pathlib import Path

from lexicon import DIGITS, NATO, NONZERO, TEENS, TENS, pronunciations
from phones import CMU, PHONE_ID, PHONES, forward, positions, self_loop

ZERO = ["zero", "nought", "oh"]
D0 = NONZERO + ZERO
NUMS = DIGITS + ["oh"] + TEENS + TENS + ["hundred", "thousand", "and"]
COMMANDS = ("confirm correct wrong scrap undo repeat next back skip stop pause resume note yes no on off pass fail "
            "affirm negative correction disregard standby continuity polarity insulation bonding go up down left "
            "right").split()


def write_fst(path, arcs, finals):
    """OpenFst vector/standard; arcs: one list a state of (in, out, weight, next); start is state 0."""
    with open(path, "wb") as f:
        f.write(struct.pack("<i", 2125659606))
        for s in (b"vector", b"standard"):
            f.write(struct.pack("<i", len(s)) + s)
        f.write(struct.pack("<iiQqqq", 2, 0, 3, 0, len(arcs), sum(map(len, arcs))))
        for s, a in enumerate(arcs):
            f.write(struct.pack("<fq", finals.get(s, float("inf")), len(a)))
            for x in a:
                f.write(struct.pack("<iifi", *x))


def write_lexicon(path, words, wid, unk_cost, loop_cost):
    """HCLr.fst: a linear lexicon with optional silence between words, output-sorted."""
    arcs = []

    def new():
        arcs.append([])
        return len(arcs) - 1

    def enter(src, phone, out=0, w=0.):
        s = new()
        arcs[src].append((forward(phone), out, w, s))
        arcs[s].append((self_loop(phone), 0, 0., s))
        return s

    start, hub, end = new(), new(), new()
    for s in (start, end):
        q = enter(s, 1, 0, math.log(2))
        arcs[q].append((0, 0, 0., hub))
        arcs[s].append((0, 0, math.log(2), hub))
    for w in words:
        for form in dict.fromkeys(pronunciations(w)):
            q, cur = form.split(), hub
            for i, (name, pos) in enumerate(zip(q, positions(len(q)))):
                cur = enter(cur, PHONE_ID[name, pos], wid[w] if i == 0 else 0)
            arcs[cur].append((0, 0, 0., end))
    unk = new()
    arcs[hub].append((0, wid["[unk]"], 0., unk))
    q = enter(unk, PHONE_ID["NSN", "nonword"], 0, unk_cost)
    arcs[q].append((0, 0, 0., end))
    if loop_cost is not None:
        loop, out = new(), new()
        for name in CMU:
            q = enter(unk, PHONE_ID[name, "begin"], 0, loop_cost)
            arcs[q].append((0, 0, 0., loop))
            q = enter(loop, PHONE_ID[name, "internal"], 0, loop_cost)
            arcs[q].append((0, 0, 0., loop))
            q = enter(loop, PHONE_ID[name, "end"], 0, loop_cost)
            arcs[q].append((0, 0, 0., out))
        arcs[out].append((0, 0, 0., end))
    for a in arcs:
        a.sort(key=lambda x: (x[1], x[0], x[3]))
    write_fst(path, arcs, {hub: 0.})


class Grammar:
    """A word acceptor being drawn; state 0 is the start, 1 the end."""

    def __init__(self):
        self.arcs, self.n = [], 1

    def new(self):
        self.n += 1
        return self.n

    def step(self, a, b, word=None, cost=0.):
        self.arcs.append((a, b, word, cost))

    def any(self, a, b, words, cost=0.):
        for w in words:
            self.step(a, b, w, cost + math.log(len(words)))

    def write(self, path, wid):
        """Remove the empty steps and write."""
        out = [[] for _ in range(self.n + 1)]
        for a, b, w, c in self.arcs:
            out[a].append((b, w, c))
        arcs, finals = [[] for _ in out], {}
        for s in range(len(out)):
            best, todo = {s: 0.}, [s]
            while todo:
                x = todo.pop()
                for b, w, c in out[x]:
                    if w is None and best[x] + c < best.get(b, math.inf):
                        best[b] = best[x] + c
                        todo.append(b)
            if 1 in best:
                finals[s] = best[1]
            for x, c0 in best.items():
                arcs[s] += [(wid[w], wid[w], c0 + c, b) for b, w, c in out[x] if w is not None]
        for a in arcs:
            a.sort()
        write_fst(path, arcs, finals)

    def sample(self, r):
        """One sentence of the grammar, each way on equally likely save that dear ones are rarer."""
        s, words = 0, []
        while s != 1:
            ways = [(b, w, math.exp(-.5 * c)) for a, b, w, c in self.arcs if a == s]
            b, w, _ = r.choices(ways, [x[2] for x in ways])[0]
            words += [w] if w else []
            s = b
        return " ".join(words)


def grammar(kind, unk=None):
    g = Grammar()
    e = 1
    if unk is not None:
        g.step(0, e, "[unk]", unk)
    if kind == "digit":
        g.any(0, e, DIGITS)
    elif kind == "nato":
        g.any(0, e, NATO)
    elif kind == "command":
        g.any(0, e, COMMANDS)
    elif kind in ("numbers", "digits"):
        words = NUMS if kind == "numbers" else DIGITS
        s = g.new()
        g.any(0, s, words, .7)
        g.any(s, s, words, .7)
        g.step(s, e, None, .7)
    elif kind == "readings":
        _readings(g)
    return g


def _readings(g):
    new, step, some, end = g.new, g.step, g.any, 1
    q = new()
    step(0, q, None, .3)
    a, b = new(), new()
    some(0, a, ["greater", "more", "less"], 1.5)
    step(a, b, "than"), step(b, q), step(0, q, "over", 3.)
    whole, value = new(), new()
    d = [q]
    for cost in (0., 0., 0., 1.):
        d.append(new())
        some(d[-2], d[-1], D0, cost)
        step(d[-1], whole)
    some(q, whole, TEENS, .5)
    t = new()
    some(q, t, TENS, .5), step(t, whole), some(t, whole, NONZERO)
    f = new()
    some(d[1], f, TENS, .7), step(f, whole), some(f, whole, NONZERO)
    h, ha, h3 = new(), new(), new()
    step(d[1], h, "hundred", .5), step(h, whole), step(h, ha, "and"), step(h, ha)
    some(ha, whole, NONZERO), some(ha, whole, TEENS), some(ha, h3, TENS), step(h3, whole), some(h3, whole, NONZERO)
    m = new()
    some(q, m, ["double", "triple"], 1.5), some(m, whole, D0)
    step(whole, value, None, .5)
    p = new()
    some(whole, p, ["point", "decimal"]), some(q, p, ["point", "decimal"], 1.)
    k = [p]
    for cost in (1., .3, 1.):
        k.append(new())
        some(k[-2], k[-1], D0)
        step(k[-1], value, None, cost)
    k4 = new()
    step(p, k4, "double", 1.5), some(k4, value, D0)
    step(value, end, None, .7)
    some(value, end, ["ohm", "ohms", "megohm", "megohms", "meg", "milliohm", "milliohms", "volts"])
    o = new()
    step(0, o, "open", 3.), step(o, end, "circuit")
    o = new()
    step(0, o, "over", 3.), step(o, end, "range")
    c = new()
    step(0, c, "circuit", 1.)
    c1, ct = new(), new()
    some(c, c1, D0), step(c1, end), some(c1, end, D0), some(c, end, TEENS)
    some(c, ct, TENS), step(ct, end), some(ct, end, NONZERO)
    bb, n1, n2 = new(), new(), new()
    step(0, bb, "board", 1.5), some(bb, n1, NATO), some(n1, n2, NATO), step(n1, n2), some(n2, end, NONZERO), step(n2, end)
    w, w1, w2 = new(), new(), new()
    step(0, w, "way", 1.5), some(w, w1, NONZERO), step(w1, end), step(w1, w2, "line"), some(w2, end, NONZERO[:3])
    some(0, end, ("confirm correct wrong repeat undo next back yes no stop pause resume affirm negative correction "
                  "disregard standby").split(), 2.)
    s = new()
    step(0, s, "say", 3.), step(s, end, "again")


def model_folder(base, out, kind, unk=None, unk_cost=0., loop_cost=None):
    """`unk` is the price of [unk] in the grammar (None: not there)."""
    out = Path(out)
    g = grammar(kind, unk)
    words = sorted({w for _, _, w, _ in g.arcs if w and w != "[unk]"})
    wid = {w: i + 1 for i, w in enumerate(words)} | {"[unk]": len(words) + 1}
    (out / "graph" / "phones").mkdir(parents=True, exist_ok=True)
    for d in ("am", "conf"):
        link = out / d
        if not link.is_symlink():
            os.symlink(Path(base).resolve() / d, link)
    write_lexicon(out / "graph" / "HCLr.fst", words, wid, unk_cost, loop_cost)
    g.write(out / "graph" / "Gr.fst", wid)
    (out / "graph" / "words.txt").write_text("<eps> 0\n" + "".join(f"{w} {i}\n" for w, i in wid.items()))
    (out / "graph" / "disambig_tid.int").write_text(f"{2 * len(PHONES) + 1}\n")
    (out / "graph" / "phones" / "word_boundary.int").write_text(
        "".join(f"{i + 1} {p}\n" for i, (_, p, _) in enumerate(PHONES)))
    return out
