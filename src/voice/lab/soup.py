"""Stage: the mean of two checkpoints of one line of training.

  python soup.py A.npz B.npz OUT.npz

Promises: plain averages of the weights. Two ends of the same training that fail differently gave a better
whole than either (README.md). Leaves out: checkpoints of different trunks, which do not average.
"""

import sys

import numpy as np

if len(sys.argv) != 4:
    raise SystemExit(__doc__)
a, b = (np.load(f) for f in sys.argv[1:3])
np.savez(sys.argv[3], cnt=a["cnt"], ce=False, **{k: (a[k] + b[k]) / 2 for k in a.files if k.startswith("p_")})
