"""Stage: checkpoint -> the committed base (am/, conf/, phones.txt).

  python export.py CHECKPOINT.npz OUT_DIR

Promises: the layout in phones.py whatever the checkpoint; a checkpoint without the NSN class (40 outputs)
gets NSN mapped to the class of SIL. The priors are not divided out: the last training stage (MMI) needs none.
Leaves out: every graph; words are no business of the base.
"""

import re
import struct
import sys
from pathlib import Path

import numpy as np

import features
import kaldi
import places
from phones import NSN, PHONES, SIL, phones_txt

MFCC_CONF = """--use-energy=false
--num-mel-bins=40
--num-ceps=40
--low-freq=20
--high-freq=7600
--dither=0
"""
MODEL_CONF = """--min-active=200
--max-active=3000
--beam=13.0
--lattice-beam=6.0
--acoustic-scale=1.0
--frame-subsampling-factor=3
--endpoint.silence-phones=1
--endpoint.rule2.min-trailing-silence=0.5
--endpoint.rule3.min-trailing-silence=0.75
--endpoint.rule4.min-trailing-silence=1.0
"""


def network_bytes(p: dict) -> bytes:
    """The trunk's nnet3 with our weights: no i-vector input, no second output, a new last layer."""
    _, config, parts, tail = kaldi.split_model(places.trunk() / "am" / "final.mdl")
    lines = []
    for line in config.split("\n"):
        if "xent" in line or "name=ivector" in line or "name=lda " in line:
            continue
        if "name=tdnn1.affine " in line:
            line = ("component-node name=tdnn1.affine component=tdnn1.affine "
                    "input=Append(Offset(input, -1), input, Offset(input, 1))")
        lines.append(line)
    config = "\n".join(lines)
    parts = {k: v for k, v in parts.items() if "xent" not in k and k != "lda"}
    put = kaldi.replaced

    def affine(name, w, b):
        parts[name] = put(put(parts[name], "<LinearParams>", kaldi.float_matrix(w.T)),
                          "<BiasParams>", kaldi.float_vector(b))

    affine("tdnn1.affine", p["w1"], p["b1"])
    for i in range(2, 16):
        k = f"tdnnf{i}.linear"
        parts[k] = put(parts[k], "<LinearParams>", kaldi.float_matrix(p[f"l{i}"].T))
        affine(f"tdnnf{i}.affine", p[f"a{i}"], p[f"b{i}"])
    parts["prefinal-l"] = put(parts["prefinal-l"], "<Params>", kaldi.float_matrix(p["pl"].T))
    affine("prefinal-chain.affine", p["pa"], p["pb"])
    k = "prefinal-chain.linear"
    parts[k] = put(parts[k], "<Params>", kaldi.float_matrix(p["pl2"].T))
    affine("output.affine", p["ow"], p["ob"])
    head = b"<Nnet3>" if config.startswith(" ") else b"<Nnet3> "
    return (head + config.encode() + b"<NumComponents> \4" + struct.pack("<i", len(parts))
            + b"".join(parts.values()) + tail)


def export(checkpoint, out):
    z = np.load(checkpoint)
    p = {k[2:]: z[k].astype("f8") for k in z.files if k.startswith("p_")}
    # libvosk subtracts the running mean; training saw it with the trunk's mean added back.
    p["b1"] = p["b1"] + np.concatenate([features.trunk_mean()] * 3) @ p["w1"]
    n_out = len(p["ob"])
    classes = [c if c < n_out else SIL for _, _, c in PHONES]
    out = Path(out)
    (out / "am").mkdir(parents=True, exist_ok=True)
    (out / "conf").mkdir(exist_ok=True)
    (out / "am" / "final.mdl").write_bytes(kaldi.transition_model(classes) + network_bytes(p))
    (out / "am" / "global_cmvn.stats").write_bytes(kaldi.mean_statistics(features.trunk_mean()))
    (out / "conf" / "mfcc.conf").write_text(MFCC_CONF)
    (out / "conf" / "model.conf").write_text(MODEL_CONF)
    (out / "phones.txt").write_text(phones_txt())
    nsn = "class of its own" if n_out > NSN else "mapped to SIL"
    print(f"{out}: {len(PHONES)} phones, {n_out} classes, NSN {nsn}")


if __name__ == "__main__":
    if len(sys.argv) != 3:
        raise SystemExit(__doc__)
    export(sys.argv[1], sys.argv[2])
