"""What holds for the whole suite."""

from __future__ import annotations

import os

from hypothesis import settings

# as in the commands: batches of small matrices gain nothing from several threads
for threads in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(threads, "1")

# the same examples in every run; `pytest --hypothesis-profile=search` looks for new ones
settings.register_profile("suite", derandomize=True, deadline=None)
settings.register_profile("search", deadline=None)
settings.load_profile("suite")
