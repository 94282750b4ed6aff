"""Settings for every test: figures without a screen, and the same examples on every run."""

import os

from hypothesis import settings

os.environ["MPLBACKEND"] = "Agg"
settings.register_profile("repeatable", derandomize=True, deadline=None)
settings.load_profile("repeatable")
