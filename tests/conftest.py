"""Settings for every test: figures without a screen, one BLAS thread (the matrices are narrow bands, which
more threads only slow down), and the same examples on every run."""

import os

os.environ["MPLBACKEND"] = "Agg"
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

from hypothesis import settings

settings.register_profile("repeatable", derandomize=True, deadline=None)
settings.load_profile("repeatable")
