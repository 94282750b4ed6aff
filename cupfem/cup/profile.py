"""The inside face as a curve that rises from the table to the brim, and the volume within it.

Volumes of straight pieces are exact sums over frusta (Pappus-Guldin theorem; any handbook of geometry, e.g.
Bronshtein and Semendyayev, Handbook of Mathematics, section on bodies of revolution).
"""

from __future__ import annotations

import math
from bisect import bisect_right
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cupfem.errors import InputError

Floats = NDArray[np.float64]

CURVE_PIECES = 4000
"""Straight pieces that stand for a curve: its volume is then exact to 1e-7."""


@dataclass(frozen=True, eq=False)
class Profile:
    """Inside face of the wall as a polyline that rises: `height[p]` and `radius[p]`, both in metres.

    `smooth`: the points stand for a curve, so that none of them is a corner of the drawing.
    """

    height: Floats
    radius: Floats
    smooth: bool = False

    def __post_init__(self) -> None:
        if np.any(np.diff(self.height) <= 0):
            raise InputError(
                "inside profile", None, "its heights must rise", "list the points from the table up"
            )

    @property
    def corners(self) -> Floats:
        """Heights [m] of both ends and of the corners between straight pieces."""
        return self.height[[0, -1]] if self.smooth else self.height

    def radius_at(self, height: ArrayLike) -> Floats:
        """Inside radius [m] at heights [m]."""
        return np.asarray(np.interp(np.asarray(height, dtype=float), self.height, self.radius))

    def arc_length_at(self, height: ArrayLike) -> Floats:
        """Length along the inside face from the table [m]."""
        return np.asarray(np.interp(np.asarray(height, dtype=float), self.height, self._arc_lengths))

    def angle_at(self, height: ArrayLike) -> Floats:
        """Angle of the inside face from the axis [rad]; at a corner the mean of both sides."""
        z = np.asarray(height, dtype=float)
        if self.smooth:
            return np.asarray(np.interp(z, self.height, self._angles))
        below, above = self._sides(z)
        return np.asarray(0.5 * (below + above))

    def normal_at(self, height: ArrayLike) -> Floats:
        """Directions `[2, p]` (r, z) outwards, normal to the face; at a corner halfway between both sides.

        Of length one, but longer at a corner, where both sides of a layer keep their thickness.
        """
        z = np.asarray(height, dtype=float)
        angle = self.angle_at(z)
        normal = np.array([np.cos(angle), -np.sin(angle)])
        if self.smooth:
            return normal
        below, above = self._sides(z)
        return np.asarray(normal / np.cos(0.5 * (above - below)))

    def fan_at(self, height: ArrayLike, reach: float) -> Floats:
        """Share of its distance from the face by which a point moves along the wall, near a corner `[p]`.

        At a corner the outer face is met on the line halfway between both sides, up or down from the normals
        beside it; the columns of a wall that reaches `reach` [m] fan out towards that line, so that none
        crosses it. The distance from the face stays as it is.
        """
        z = np.asarray(height, dtype=float)
        fan = np.zeros(z.shape)
        if self.smooth:
            return fan
        for corner, low, high in zip(self.height[1:-1], self.height[:-2], self.height[2:], strict=True):
            below, above = self._sides(corner)
            turn = float(np.tan(0.5 * (above - below)))
            apart = z - corner
            length = np.where(apart < 0.0, corner - low, high - corner)
            length = np.maximum(np.minimum(4.0 * reach * abs(turn), 0.5 * length), 1e-12)
            near = np.maximum(1.0 - np.abs(apart) / length, 0.0)
            fan += np.where(np.abs(apart) > 1e-12, np.sign(apart) * turn * near, 0.0)
        return fan

    def sharpest(self) -> float:
        """Largest share of a piece's length over a distance from the face that a corner takes [1/m]."""
        if self.smooth or len(self.height) < 3:
            return 0.0
        below, above = self._sides(self.height[1:-1])
        pieces = np.minimum(np.diff(self.height)[:-1], np.diff(self.height)[1:])
        return float(np.max(np.abs(np.tan(0.5 * (above - below))) / pieces))

    @cached_property
    def _pieces(self) -> tuple[list[float], list[float], list[float], list[float]]:
        """Heights, radii, slopes of the straight pieces, and volumes below their lower ends, as plain floats:
        the level is asked thousands of times in a run."""
        slopes = np.diff(self.radius) / np.diff(self.height)
        volumes = np.cumsum(_frustum(np.diff(self.height), self.radius[:-1], self.radius[1:]))
        return self.height.tolist(), self.radius.tolist(), slopes.tolist(), [0.0, *volumes.tolist()]

    def radius_of(self, height: float) -> float:
        """Inside radius [m] at one height [m]."""
        heights, radii, slopes, _ = self._pieces
        z = min(max(height, heights[0]), heights[-1])
        piece = min(bisect_right(heights, z) - 1, len(slopes) - 1)
        return radii[piece] + slopes[piece] * (z - heights[piece])

    def volume_below(self, height: float) -> float:
        """Inside volume [m3] between the table and a height [m]."""
        heights, radii, slopes, volumes = self._pieces
        z = min(max(height, heights[0]), heights[-1])
        piece = min(bisect_right(heights, z) - 1, len(slopes) - 1)
        rise, radius = z - heights[piece], radii[piece]
        upper = radius + slopes[piece] * rise
        return volumes[piece] + math.pi / 3.0 * rise * (radius * radius + radius * upper + upper * upper)

    def height_of_volume(self, volume: float) -> float:
        """Height [m] below which the inside volume [m3] is found; the inverse of `volume_below` to rounding.

        In a frustum r_upper^3 = r^3 + 3 m V / pi, and V = pi/3 x (r^2 + r r_upper + r_upper^2) gives x
        without the difference of the two radii, so that it holds for a cylinder (m = 0) too.
        """
        heights, radii, slopes, volumes = self._pieces
        piece = min(max(bisect_right(volumes, volume) - 1, 0), len(slopes) - 1)
        radius, part = radii[piece], 3.0 / math.pi * (volume - volumes[piece])
        upper = math.cbrt(radius**3 + slopes[piece] * part)
        squares = radius * radius + radius * upper + upper * upper
        return heights[piece] + (part / squares if squares > 0.0 else 0.0)

    def _sides(self, z: Floats) -> tuple[Floats, Floats]:
        """Angles of the pieces below and above heights."""
        angles = np.arctan(np.diff(self.radius) / np.diff(self.height))
        last = len(angles) - 1
        above = np.clip(np.searchsorted(self.height, z + 1e-12, side="right") - 1, 0, last)
        below = np.clip(np.searchsorted(self.height, z - 1e-12, side="right") - 1, 0, last)
        return angles[below], angles[above]

    @cached_property
    def _angles(self) -> Floats:
        return np.asarray(np.arctan(np.gradient(self.radius, self.height, edge_order=2)))

    @cached_property
    def _arc_lengths(self) -> Floats:
        pieces = np.hypot(np.diff(self.height), np.diff(self.radius))
        return np.concatenate([[0.0], np.cumsum(pieces)])


def spline(height: ArrayLike, radius: ArrayLike) -> Profile:
    """Natural cubic spline through points, as a fine polyline; heights and radii in metres.

    C. de Boor, A Practical Guide to Splines, 1978, ch. IV, from memory.
    """
    from scipy.interpolate import CubicSpline  # slow to import, and only curved profiles need it

    curve = CubicSpline(np.asarray(height, dtype=float), np.asarray(radius, dtype=float), bc_type="natural")
    z = np.linspace(float(np.min(height)), float(np.max(height)), CURVE_PIECES + 1)
    return Profile(z, np.asarray(curve(z)), smooth=True)


def _frustum(height: Floats, lower: Floats, upper: Floats) -> Floats:
    return np.asarray(np.pi / 3.0 * height * (lower * lower + lower * upper + upper * upper))
