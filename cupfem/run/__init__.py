"""The immutable result of a run; its headline figures; load and save."""

from cupfem.run.headline import CAUTION, COMFORT, FREE_WALL, MOISTURE
from cupfem.run.pads import PadField
from cupfem.run.result import Faces, Ledger, Run, Series, faces_of
from cupfem.run.store import load_run, save_run
from cupfem.run.touched import HoldFigures

__all__ = [
    "CAUTION",
    "COMFORT",
    "FREE_WALL",
    "MOISTURE",
    "Faces",
    "HoldFigures",
    "Ledger",
    "PadField",
    "Run",
    "Series",
    "faces_of",
    "load_run",
    "save_run",
]
