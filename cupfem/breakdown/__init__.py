"""Field against estimates: what each rung of the one-dimensional ladder says, and where and why it fails.

`job`: the call; `rungs`: all estimates at a station; `height`: the radial one over the whole wall; `holding`: hold
times by rung; `lateral`, `places`: heat along the wall, ends and their reach; `result`, `text`: what is read from it.
"""

from cupfem.breakdown.job import slab
from cupfem.breakdown.places import End, Flag
from cupfem.breakdown.result import Assumption, Map, RungError, Slab
from cupfem.breakdown.rungs import RUNGS, Ladder

__all__ = ["RUNGS", "Assumption", "End", "Flag", "Ladder", "Map", "RungError", "Slab", "slab"]
