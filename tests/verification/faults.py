"""Planted faults: a check that still passes with one in place would be worth nothing."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import Any

import numpy as np
import pytest

from cupfem import axisymmetry
from cupfem.conduction import EdgeExchange, cells
from cupfem.drink import Drink


@contextmanager
def planted(owner: object, name: str, faulty: Any) -> Iterator[None]:
    """The code with one function replaced."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(owner, name, faulty)
        yield


@contextmanager
def noticed() -> Iterator[None]:
    """The check within must fail on a compared value, not on something else."""
    with pytest.raises(AssertionError, match=r"error .*, allowed"):
        yield


def lost_circumference() -> Any:
    """2 pi r is lost everywhere."""
    return planted(axisymmetry.Measure, "weight", lambda self, radius: np.ones_like(np.asarray(radius)))


def swapped_conductivities() -> Any:
    """Through and along the wall change places."""
    right = cells.tensor
    return planted(cells, "tensor", lambda along, through, k_along: right(along, k_along, through))


def shifted_window(distance: float) -> Any:
    """Partly wetted edges count up to a level that is off by a distance [m]."""
    right = EdgeExchange.points

    def faulty(self: EdgeExchange, lumped: Any, time: float) -> Any:
        window = self.exchange.window
        if window is None:
            return right(self, lumped, time)
        low, high = window(lumped, time)
        return self._quadrature.between(low + distance, high + distance)

    return planted(EdgeExchange, "points", faulty)


def edge_without_load(film: str) -> Any:
    """The operator forgets the edges that have a film of this ledger name; the ledger does not."""
    right = EdgeExchange.add_load

    def faulty(self: EdgeExchange, out: Any, points: Any, fluxes: Any) -> None:
        if film not in fluxes:
            right(self, out, points, fluxes)

    return planted(EdgeExchange, "add_load", faulty)


def drinking_without_loss() -> Any:
    """What is drunk is counted, but the drink keeps its mass and heat."""
    right = Drink.rates

    def faulty(self: Drink, state: Any, drink: Any, time: float, received: float) -> Any:
        rates, terms = right(self, state, drink, time, received)
        drunk = self.drinking * float(self.liquid.density(drink.temperature))
        return rates + np.array([drunk, terms.get("sips", 0.0)]), terms

    return planted(Drink, "rates", faulty)


def changed_sip(change: Callable[[Any, Any, float], tuple[Any, float]]) -> Any:
    """A sip whose result is changed: `change(before, after, heat)`."""
    right = Drink.sip

    def faulty(self: Drink, state: Any, volume: float) -> tuple[Any, float]:
        return change(state, *right(self, state, volume))

    return planted(Drink, "sip", faulty)
