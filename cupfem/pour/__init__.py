"""The main job as one call: pour a serving into a cup."""

from cupfem.pour.job import pour

__all__ = ["pour"]
