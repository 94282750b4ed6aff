"""The points of a plan: which setting of each factor goes with which of the others."""

from __future__ import annotations

import itertools
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from cupfem.errors import InputError
from cupfem.vary.factors import Factor
from cupfem.vary.plan import Plan
from cupfem.vary.values import Setting

Floats = NDArray[np.float64]
Point = tuple[Setting | None, ...]
"""One setting for each factor; None leaves what the file has."""

EDGE = 2.0**-33
"""A share drawn is kept this far from 0 and 1, where a distribution may have no value."""


@dataclass(frozen=True)
class Design:
    """The points of a plan, in order, and how they were made."""

    combine: str
    samples: int
    points: tuple[Point, ...]

    def __len__(self) -> int:
        return len(self.points)


def design_of(plan: Plan, factors: tuple[Factor, ...]) -> Design:
    """Make the points of a plan.

    "sobol indices" makes the points of Saltelli and others, Computer Physics Communications 181 (2010) 259:
    first A, then B, then for each factor A with that factor taken from B.

    Raises
    ------
    InputError
        If "zip" has lists of different lengths.
    """
    return Design(plan.combine, plan.samples or 0, tuple(_points(plan, factors)))


def _points(plan: Plan, factors: tuple[Factor, ...]) -> Iterator[Point]:
    levels = [factor.levels for factor in factors]
    if plan.combine == "grid":
        return itertools.product(*levels)
    if plan.combine == "zip":
        _check_lengths(factors)
        return zip(*levels, strict=True)
    if plan.combine == "one at a time":
        return _one_at_a_time(factors)
    shares = shares_of(plan, len(factors))
    return (tuple(f.quantile(float(u)) for f, u in zip(factors, row, strict=True)) for row in shares)


def _check_lengths(factors: tuple[Factor, ...]) -> None:
    first = factors[0]
    for factor in factors:
        if len(factor.levels) != len(first.levels):
            why = f"{len(factor.levels)} values, but {len(first.levels)} for {first.name}"
            instead = 'write as many for each, or combine = "grid"'
            raise InputError(f"vary.{factor.name}", None, why, instead)


def _one_at_a_time(factors: tuple[Factor, ...]) -> Iterator[Point]:
    """The file as it is, then each factor low and high."""
    yield (None,) * len(factors)
    for place, factor in enumerate(factors):
        for setting in (factor.low, factor.high):
            yield tuple(setting if index == place else None for index in range(len(factors)))


def shares_of(plan: Plan, count: int) -> Floats:
    """Shares from 0 to 1 of the points that a plan draws `[p, f]`, p points, f factors."""
    from scipy.stats import qmc  # takes half a second to import, which only a plan that draws needs

    samples = plan.samples or 0
    if plan.combine == "sobol indices":
        both = qmc.Sobol(2 * count, bits=64, seed=plan.seed).random(samples)
        return _clipped(_pick_freeze(both[:, :count], both[:, count:]))
    if plan.combine == "sobol":
        return _clipped(qmc.Sobol(count, bits=64, seed=plan.seed).random(samples))
    if plan.combine == "latin hypercube":
        return _clipped(qmc.LatinHypercube(count, seed=plan.seed).random(samples))
    return _clipped(np.random.default_rng(plan.seed).random((samples, count)))


def _pick_freeze(first: Floats, second: Floats) -> Floats:
    mixed = []
    for place in range(first.shape[1]):
        page = first.copy()
        page[:, place] = second[:, place]
        mixed.append(page)
    return np.concatenate([first, second, *mixed])


def _clipped(shares: Floats) -> Floats:
    return np.clip(shares, EDGE, 1.0 - EDGE)
