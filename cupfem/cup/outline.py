"""The `[cup]` table: height and inside face."""

from __future__ import annotations

import csv
import math
from itertools import pairwise
from pathlib import Path
from typing import Annotated, ClassVar, Literal, Self

import numpy as np
from pydantic import Field, model_validator

from cupfem.cup.layers import Height, Size
from cupfem.cup.profile import Profile, spline
from cupfem.errors import InputError
from cupfem.inputs import Positive, Table, refused
from cupfem.quantities import Length, format_quantity

_NEAR = 1e-9  # m; heights closer than this are one height
_DIAMETERS = ("inner_top_diameter", "top_outside_diameter", "inner_foot_diameter", "foot_outside_diameter")


class Outline(Table):
    """The `[cup]` table: the inside face."""

    place: ClassVar[str] = "cup"

    height: Size = Field(examples=["95 mm"])
    """Table to brim."""
    inner_top_diameter: Size | None = None
    """Inside of the wall at the brim."""
    top_outside_diameter: Size | None = None
    """Outside of the wall at the brim, instead of inner_top_diameter."""
    inner_foot_diameter: Size | None = None
    """Inside of the wall carried down to the table."""
    foot_outside_diameter: Size | None = None
    """Outside of the wall carried down to the table, instead of inner_foot_diameter."""
    inner_profile: tuple[tuple[Height, Annotated[Length, Positive]], ...] = ()
    """Inside diameters at rising heights, table to brim, instead of the diameters at both ends."""
    inner_curve: Literal["straight", "spline"] | None = None
    """What lies between the points of inner_profile: straight (left out), or a natural cubic spline."""

    @model_validator(mode="after")
    def _one_shape(self) -> Self:
        if self.inner_profile:
            self._check_profile()
            return self
        if self.inner_curve is not None:
            raise refused("would change nothing without inner_profile", "leave it out", "inner_curve")
        for inner, outside in (_DIAMETERS[:2], _DIAMETERS[2:]):
            given = [key for key in (inner, outside) if getattr(self, key) is not None]
            if len(given) == 2:
                raise refused(f"given together with {inner}", "keep one of the two", outside)
            if not given:
                raise refused("missing", f"write {inner} or {outside}", inner)
        return self

    def _check_profile(self) -> None:
        for key in _DIAMETERS:
            if getattr(self, key) is not None:
                raise refused("given together with inner_profile", "keep one of the two", key)
        heights = [height for height, _ in self.inner_profile]
        if len(heights) < 2 or any(high - low < 1e-6 for low, high in pairwise(heights)):
            why = "needs two or more heights that rise"
            raise refused(why, 'write [["0 mm", "55 mm"], ["95 mm", "78 mm"]]', "inner_profile")
        if heights[0] > _NEAR or abs(heights[-1] - self.height) > _NEAR:
            reach = f"reaches from {_mm(heights[0])} to {_mm(heights[-1])}"
            why = f"{reach}, and the wall from 0 mm to {_mm(self.height)}"
            raise refused(why, "let it begin at the table and end at the brim", "inner_profile")

    def drawn_profile(self) -> Profile | None:
        """The inside face where it is given by points."""
        if not self.inner_profile:
            return None
        height, diameter = np.array(self.inner_profile).T
        height[0], height[-1] = 0.0, self.height
        curve = spline if self.inner_curve == "spline" else Profile
        return curve(height, diameter / 2.0)

    def carried_radii(self, at_foot: float, at_top: float) -> tuple[float, float]:
        """Inside radii at table and brim [m] of a straight face, from the wall's thickness at both ends [m].

        An outside diameter is that of the outer face carried to the height of the end, so the inner radius is
        less by t / cos(a). With d the difference of the two thicknesses to take off, the taper a solves
        H sin(a) - D cos(a) = d, where D is the difference of the given radii.
        """
        foot = (self.inner_foot_diameter or self.foot_outside_diameter or 0.0) / 2.0
        top = (self.inner_top_diameter or self.top_outside_diameter or 0.0) / 2.0
        at_foot = 0.0 if self.inner_foot_diameter else at_foot
        at_top = 0.0 if self.inner_top_diameter else at_top
        share = (at_foot - at_top) / math.hypot(self.height, top - foot)
        taper = math.atan2(top - foot, self.height) + math.asin(max(-1.0, min(1.0, share)))
        return foot - at_foot / math.cos(taper), top - at_top / math.cos(taper)


def read_points(path: Path) -> list[list[str]]:
    """Points of an inside profile from a file of two columns, height and inside diameter, as quantities.

    The heading tells the unit: `height_mm,diameter_mm`.
    """
    rows = [row for row in csv.reader(_lines(path)) if row]
    units = [name.strip().rpartition("_") for name in rows[0]] if rows else []
    what = "cup.inner_profile"
    if [name for name, _, _ in units] != ["height", "diameter"]:
        why = "its first line does not name the columns"
        raise InputError(what, str(path), why, "write height_mm,diameter_mm above the numbers")
    for number, row in enumerate(rows, 1):
        if len(row) != 2:
            raise InputError(what, str(path), f"row {number} has not two columns", "write two numbers a row")
    return [
        [f"{value.strip()} {unit}" for value, (_, _, unit) in zip(row, units, strict=True)]
        for row in rows[1:]
    ]


def _lines(path: Path) -> list[str]:
    try:
        return path.read_text(encoding="utf-8-sig").splitlines()
    except (OSError, ValueError) as error:
        why = f"cannot be read ({getattr(error, 'strerror', None) or error})"
        raise InputError("cup.inner_profile", str(path), why, "check the file's name") from None


def _mm(length: float) -> str:
    return format_quantity(length, "length", digits=4)
