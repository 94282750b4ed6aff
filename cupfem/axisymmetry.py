"""The measure of the half section: 2 pi r, or unit depth in the plane variant. Nowhere else.

Integrals over the section and over its edges come from here, so results are whole-cup watts and joules (per
metre of depth in the plane variant). Element matrices are scikit-fem forms; edges are integrated exactly
between two heights, because the drink's level cuts them anywhere.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray
from skfem import BilinearForm, LinearForm
from skfem.helpers import dot, grad, mul

from cupfem.mesh import SectionMesh

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

_GAUSS_POINTS, _GAUSS_WEIGHTS = np.polynomial.legendre.leggauss(3)
_GAUSS_POINTS = 0.5 * (_GAUSS_POINTS + 1.0)
_GAUSS_WEIGHTS = 0.5 * _GAUSS_WEIGHTS
STRIP = 20000
"""Elements assembled at once: bounds the memory of a large mesh."""


@dataclass(frozen=True)
class Measure:
    """Weight of an area element: 2 pi r (axisymmetric) or 1 (plane, unit depth)."""

    plane: bool = False

    def weight(self, radius: Any) -> Any:
        """Circumference at a radius [m], or 1."""
        return np.ones_like(radius) if self.plane else 2.0 * np.pi * radius


def _conduction(u: Any, v: Any, w: Any) -> Any:
    return w.weight * dot(mul(w.tensor, grad(u)), grad(v))


def _capacity(u: Any, v: Any, w: Any) -> Any:
    return w.weight * w.density * u * v


def _source(v: Any, w: Any) -> Any:
    return w.weight * w.density * v


AXISYMMETRIC = Measure()


def conduction_matrices(mesh: SectionMesh, elements: Ints, tensor: Floats, measure: Measure) -> Floats:
    """Element matrices `[element, local, local]` of div(k grad T) for a tensor `[2, 2, element]` [W/K]."""
    return _by_strips(BilinearForm(_conduction), mesh, elements, measure, tensor=tensor)


def capacity_matrices(mesh: SectionMesh, elements: Ints, heat_capacity: Floats, measure: Measure) -> Floats:
    """Element matrices `[element, local, local]` of rho c dT/dt for rho c `[element]` [J/K]."""
    return _by_strips(BilinearForm(_capacity), mesh, elements, measure, density=heat_capacity)


def _by_strips(form: Any, mesh: SectionMesh, elements: Ints, measure: Measure, **fields: Floats) -> Floats:
    out = []
    for start in range(0, len(elements), STRIP):
        strip = elements[start : start + STRIP]
        basis = mesh.basis(strip)
        given = {name: value[..., start : start + STRIP, None] for name, value in fields.items()}
        weight = measure.weight(np.asarray(basis.global_coordinates())[0])
        out.append(form.elemental(basis, weight=weight, **given).tolocal())
    return np.concatenate(out) if out else np.zeros((0, len(mesh.element_dofs), len(mesh.element_dofs)))


def source_load(mesh: SectionMesh, elements: Ints, density: Any, measure: Measure) -> Floats:
    """Load `[dof]` [W] of a volumetric source [W/m3]: a number or a function of r and z."""
    basis = mesh.basis(elements)
    r, z = np.asarray(basis.global_coordinates())
    values = density(r, z) if callable(density) else np.full(r.shape, float(density))
    local = LinearForm(_source).elemental(basis, weight=measure.weight(r), density=values)
    dofs = mesh.element_dofs[:, elements]
    weights = local.data.reshape(len(dofs), -1).T.ravel()
    return np.asarray(np.bincount(dofs.T.ravel(), weights=weights, minlength=mesh.size), dtype=float)


def volume_moments(mesh: SectionMesh, elements: Ints, measure: Measure) -> tuple[float, Floats]:
    """Volume [m3] and centroid (r, z) [m] of a region, weighted by the measure."""
    basis = mesh.basis(elements)
    r, z = np.asarray(basis.global_coordinates())
    weights = basis.dx * measure.weight(r)
    volume = float(weights.sum())
    return volume, np.array([float((weights * r).sum()), float((weights * z).sum())]) / volume


@dataclass(frozen=True, eq=False)
class EdgePoints:
    """Integration points on a part of an edge.

    Attributes
    ----------
    dofs:
        `[point, local]`, unknowns of the facet that each point lies on.
    shape:
        `[point, local]`, shape functions there.
    weight:
        `[point]`, area that each point stands for [m2].
    height, radius:
        `[point]` [m].
    """

    dofs: Ints
    shape: Floats
    weight: Floats
    height: Floats
    radius: Floats

    def interpolate(self, field: Floats) -> Floats:
        """Values of a field `[dof]` at the points."""
        return np.asarray(np.einsum("pl,pl->p", self.shape, field[self.dofs]))

    @property
    def area(self) -> float:
        """Area of this part of the edge [m2]."""
        return float(self.weight.sum())


class EdgeQuadrature:
    """Exact integration over the part of an edge between two heights.

    Facets are straight, so that height and radius are linear along each; the part of a facet between two
    heights gets its own Gauss points. Facets at one height (a floor) count whole where they lie at or above
    the lower bound and below the upper one.
    """

    def __init__(self, mesh: SectionMesh, dofs: Ints, measure: Measure):
        start, end = mesh.points[:, dofs[0]], mesh.points[:, dofs[1]]
        order = np.argsort(0.5 * (start[1] + end[1]), kind="stable")
        self._dofs, self._start, self._end = dofs[:, order], start[:, order], end[:, order]
        self._measure = measure
        self._quadratic = len(dofs) == 3
        self._length = np.hypot(*(self._end - self._start))
        self._low = np.minimum(self._start[1], self._end[1])
        self._high = np.maximum(self._start[1], self._end[1])
        self._level = self._low == self._high
        every = np.arange(len(self._low))
        self._whole = self._points(every, np.zeros(len(every)), np.ones(len(every)))
        # Facets in rising order without overlap: the whole ones between two heights are then one slice.
        self._rising = bool(np.all(self._high[:-1] <= self._low[1:]) and not self._level.any())

    def whole(self) -> EdgePoints:
        """The whole edge."""
        return self._whole

    def between(self, low: float = -np.inf, high: float = np.inf) -> EdgePoints:
        """The part of the edge with low <= z < high [m]; nothing where high is not above low."""
        if not low < high:
            return _part(self._whole, slice(0, 0))
        if self._rising:
            return self._slice(low, high)
        inside = (self._low >= low) & (self._high <= high) & ~(self._level & (self._high == high))
        cut = np.flatnonzero(~inside & (self._low < high) & (self._high > low) & ~self._level)
        whole = _part(self._whole, np.repeat(inside, len(_GAUSS_POINTS)))
        return _join([whole, self._cut_many(cut, low, high)]) if len(cut) else whole

    def _slice(self, low: float, high: float) -> EdgePoints:
        first = int(self._low.searchsorted(low))
        last = int(self._high.searchsorted(high, side="right"))
        count = len(_GAUSS_POINTS)
        parts = [_part(self._whole, slice(count * first, count * last))] if last > first else []
        for place in {first - 1, last}:
            if 0 <= place < len(self._low) and self._low[place] < high and self._high[place] > low:
                parts.append(self._cut_one(place, low, high))
        if not parts:
            return _part(self._whole, slice(0, 0))
        return parts[0] if len(parts) == 1 else _join(parts)

    def _cut_one(self, place: int, low: float, high: float) -> EdgePoints:
        start, end = float(self._start[1, place]), float(self._end[1, place])
        bounds = sorted(((low - start) / (end - start), (high - start) / (end - start)))
        first, last = max(bounds[0], 0.0), min(bounds[1], 1.0)
        x = first + (last - first) * _GAUSS_POINTS
        r_start, r_end = float(self._start[0, place]), float(self._end[0, place])
        radius = r_start + x * (r_end - r_start)
        fraction = (last - first) * float(self._length[place]) * _GAUSS_WEIGHTS
        dofs = np.broadcast_to(self._dofs[:, place], (len(x), len(self._dofs)))
        weight = fraction * self._measure.weight(radius)
        return EdgePoints(dofs, self._shape(x), weight, start + x * (end - start), radius)

    def _cut_many(self, cut: Ints, low: float, high: float) -> EdgePoints:
        start, rise = self._start[1, cut], self._end[1, cut] - self._start[1, cut]
        ends = np.array([(low - start) / rise, (high - start) / rise])
        ends = np.minimum(np.maximum(np.sort(ends, axis=0), 0.0), 1.0)
        return self._points(cut, ends[0], ends[1])

    def _shape(self, x: Floats) -> Floats:
        """Shape functions `[point, local]` at places 0 to 1 along a facet."""
        rest = 1.0 - x
        if self._quadratic:
            return np.array([rest * (rest - x), x * (x - rest), 4.0 * x * rest]).T
        return np.array([rest, x]).T

    def facets_between(self, low: float, high: float) -> tuple[Ints, tuple[float, float]]:
        """Unknowns of the facets that a range of heights touches, and the span of heights that they
        cover [m]."""
        touched = np.flatnonzero((self._low <= high) & (self._high >= low) & ~self._level)
        if not len(touched):
            return np.zeros(0, dtype=int), (low, low)
        span = float(self._low[touched].min()), float(self._high[touched].max())
        return np.unique(self._dofs[:, touched]), span

    def _points(self, facets: Ints, first: Floats, last: Floats) -> EdgePoints:
        share = last - first
        x = (first[:, None] + share[:, None] * _GAUSS_POINTS).ravel()
        fraction = (share[:, None] * _GAUSS_WEIGHTS).ravel()
        facet = np.repeat(facets, len(_GAUSS_POINTS))
        start = self._start[:, facet]
        radius, height = start + x * (self._end[:, facet] - start)
        weight = fraction * self._length[facet] * self._measure.weight(radius)
        return EdgePoints(self._dofs[:, facet].T, self._shape(x), weight, height, radius)


def _part(points: EdgePoints, chosen: slice | NDArray[np.bool_]) -> EdgePoints:
    return EdgePoints(
        points.dofs[chosen],
        points.shape[chosen],
        points.weight[chosen],
        points.height[chosen],
        points.radius[chosen],
    )


def _join(parts: list[EdgePoints]) -> EdgePoints:
    return EdgePoints(
        np.concatenate([part.dofs for part in parts]),
        np.concatenate([part.shape for part in parts]),
        np.concatenate([part.weight for part in parts]),
        np.concatenate([part.height for part in parts]),
        np.concatenate([part.radius for part in parts]),
    )
