"""The measure of the half section: 2 pi r, or unit depth in the plane variant. Nowhere else.

Integrals over the section and over its edges come from here, so results are whole-cup watts and joules (per
metre of depth in
the plane variant). Element matrices are scikit-fem forms; edges are integrated exactly between two heights,
because the drink's level cuts them anywhere.
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
    heights gets its own
    Gauss points. Facets at one height (a floor) count whole where they lie at or below the upper bound.
    """

    def __init__(self, mesh: SectionMesh, dofs: Ints, measure: Measure):
        self._dofs = dofs
        self._start = mesh.points[:, dofs[0]]
        self._end = mesh.points[:, dofs[1]]
        self._measure = measure
        self._quadratic = len(dofs) == 3
        self._length = np.hypot(*(self._end - self._start))
        self._low = np.minimum(self._start[1], self._end[1])
        self._high = np.maximum(self._start[1], self._end[1])
        self._whole = self._points(np.arange(dofs.shape[1]), np.zeros(dofs.shape[1]), np.ones(dofs.shape[1]))

    def whole(self) -> EdgePoints:
        """The whole edge."""
        return self._whole

    def between(self, low: float = -np.inf, high: float = np.inf) -> EdgePoints:
        """The part of the edge with low <= z < high [m]."""
        inside = (self._low >= low) & (self._high <= high)
        inside &= ~((self._high == self._low) & (self._high == high))
        if inside.all():
            return self._whole
        cut = np.flatnonzero(~inside & (self._low < high) & (self._high > low) & (self._high > self._low))
        whole = np.repeat(inside, len(_GAUSS_POINTS))
        parts = [_take(self._whole, whole)]
        if len(cut):
            parts.append(self._cut(cut, low, high))
        return parts[0] if len(parts) == 1 else _join(parts)

    def facets_between(self, low: float, high: float) -> tuple[Ints, tuple[float, float]]:
        """Unknowns of the facets that a range of heights touches, and the span of heights that they cover
        [m]."""
        touched = np.flatnonzero((self._low <= high) & (self._high >= low) & (self._high > self._low))
        if not len(touched):
            return np.zeros(0, dtype=int), (low, low)
        span = float(self._low[touched].min()), float(self._high[touched].max())
        return np.unique(self._dofs[:, touched]), span

    def _cut(self, facets: Ints, low: float, high: float) -> EdgePoints:
        start, rise = self._start[1, facets], self._end[1, facets] - self._start[1, facets]
        ends = np.sort(np.array([(low - start) / rise, (high - start) / rise]), axis=0)
        ends = np.clip(ends, 0.0, 1.0)
        return self._points(facets, ends[0], ends[1])

    def _points(self, facets: Ints, first: Floats, last: Floats) -> EdgePoints:
        x = (first[:, None] + (last - first)[:, None] * _GAUSS_POINTS).ravel()
        fraction = ((last - first)[:, None] * _GAUSS_WEIGHTS).ravel()
        facet = np.repeat(facets, len(_GAUSS_POINTS))
        place = self._start[:, facet] + x * (self._end - self._start)[:, facet]
        shape = [(1 - x) * (1 - 2 * x), x * (2 * x - 1), 4 * x * (1 - x)] if self._quadratic else [1 - x, x]
        weight = fraction * self._length[facet] * self._measure.weight(place[0])
        return EdgePoints(self._dofs[:, facet].T, np.array(shape).T, weight, place[1], place[0])


def _take(points: EdgePoints, chosen: NDArray[np.bool_]) -> EdgePoints:
    return EdgePoints(
        points.dofs[chosen],
        points.shape[chosen],
        points.weight[chosen],
        points.height[chosen],
        points.radius[chosen],
    )


def _join(parts: list[EdgePoints]) -> EdgePoints:
    names = ("dofs", "shape", "weight", "height", "radius")
    return EdgePoints(*(np.concatenate([getattr(part, name) for part in parts]) for name in names))
