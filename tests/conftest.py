"""One thread for linear algebra, as in the commands: batches of small matrices only lose by more."""

from __future__ import annotations

import os

for threads in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(threads, "1")
