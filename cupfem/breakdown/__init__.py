"""Field against estimates: what each rung of the one-dimensional ladder says, and where and why it fails.

`job`: the call; `rungs`: all estimates at a station; `height`, `map`: the radial one over the whole wall;
`holding`: hold times by rung; `lateral`, `places`: heat along the wall, ends and their reach; `errors`,
`result`, `text`, `files`: what is read from it.
"""

from cupfem.breakdown.errors import RungError
from cupfem.breakdown.job import Slab, slab
from cupfem.breakdown.map import Map
from cupfem.breakdown.places import End, Flag
from cupfem.breakdown.result import Assumption, Comparison
from cupfem.breakdown.rungs import RUNGS, Ladder

__all__ = ["RUNGS", "Assumption", "Comparison", "End", "Flag", "Ladder", "Map", "RungError", "Slab", "slab"]
