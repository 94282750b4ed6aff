"""The search for the best design within the limits: differential evolution, then a polish by COBYQA.

Both work on the true model; every design that they ask for is a case of the outcome and is kept in the store.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from importlib import import_module
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cupfem.vary.cases import Case, Model
from cupfem.vary.engine import Engine
from cupfem.vary.factors import Factor
from cupfem.vary.outcome import Goal, at_least_key
from cupfem.vary.paths import Slot
from cupfem.vary.plan import Best, Plan
from cupfem.vary.store import Result
from cupfem.vary.values import Setting

Floats = NDArray[np.float64]

PER_FACTOR = 5
"""Designs of a generation, for each factor."""
HOPELESS = 1e6
"""How far a design that cannot be run is said to break each limit."""
RADIUS, FINEST = 0.05, 1e-4
"""First and last step of the polish, as a share of each range."""


class Trials:
    """All designs asked for so far, in order, with what they gave."""

    def __init__(
        self, plan: Plan, model: Model, factors: tuple[Factor, ...], goals: tuple[Goal, ...], engine: Engine
    ) -> None:
        assert plan.best is not None
        self._model, self._factors, self._goals, self._engine = model, factors, goals, engine
        self._best: Best = plan.best
        self._known: dict[str, tuple[Case, Result]] = {}
        self._cases: dict[tuple[float, ...], Case] = {}

    @property
    def finished(self) -> list[tuple[Case, Result]]:
        """All of them."""
        return list(self._known.values())

    def results(self, places: Floats) -> list[Result]:
        """What designs give; those not asked for before are run side by side. `places[f, p]`, f factors."""
        cases = [self._case(tuple(float(value) for value in place)) for place in places.T]
        new = {_name(case): case for case in cases if _name(case) not in self._known}
        for case, result in self._engine.run(new.values(), len(new)):
            self._known[_name(case)] = (case, result)
        return [self._known[_name(case)][1] for case in cases]

    def cost(self, places: Floats) -> Floats:
        """What is to be made small, `[p]`; infinite where a design cannot be run."""
        key, sense = self._best.aim
        sign = 1.0 if sense == "least" else -1.0
        values = [_value(result, key) for result in self.results(places)]
        return np.array([sign * value if np.isfinite(value) else np.inf for value in values])

    def margins(self, places: Floats) -> Floats:
        """How far designs keep each limit, `[goal, p]`."""
        results = self.results(places)
        return np.array([[_margin(result, goal) for result in results] for goal in self._goals])

    def best_place(self) -> Floats | None:
        """The best design that keeps the limits, `[f]`; None if there is none."""
        best, least = None, np.inf
        for place in self._cases:
            column = np.array(place)[:, None]
            cost = float(self.cost(column)[0])
            if cost < least and (self.margins(column) >= 0.0).all():
                best, least = np.array(place), cost
        return best

    def _case(self, place: tuple[float, ...]) -> Case:
        if place not in self._cases:
            settings: dict[Slot, Setting] = {}
            for factor, value in zip(self._factors, place, strict=True):
                settings |= dict.fromkeys(factor.slots, factor.at(value))
            self._cases[place] = self._model.case(settings)
        return self._cases[place]


def search(
    plan: Plan, model: Model, factors: tuple[Factor, ...], goals: tuple[Goal, ...], engine: Engine
) -> list[tuple[Case, Result]]:
    """All designs that the search tried."""
    trials = Trials(plan, model, factors, goals, engine)
    assert plan.best is not None
    _evolve(trials, factors, goals, plan.best.generations, plan.seed)
    start = trials.best_place()
    if start is not None and plan.best.polish and not all(factor.whole for factor in factors):
        _polish(trials, factors, goals, start, plan.best.polish)
    return trials.finished


def _evolve(
    trials: Trials, factors: Sequence[Factor], goals: Sequence[Goal], generations: int, seed: int
) -> None:
    """Storn and Price, Journal of Global Optimization 11 (1997) 341, as in scipy, a generation at a time."""
    optimize: Any = import_module("scipy.optimize")  # a third of a second, which only a search needs
    limits = [optimize.NonlinearConstraint(_of_columns(trials.margins), 0.0, np.inf)] if goals else []
    optimize.differential_evolution(
        _of_columns(trials.cost),
        [factor.bounds for factor in factors],
        maxiter=generations,
        popsize=PER_FACTOR,
        seed=seed,
        polish=False,
        constraints=tuple(limits),
        integrality=[factor.whole for factor in factors],
        updating="deferred",
        vectorized=True,
    )


def _of_columns(function: Callable[[Floats], Floats]) -> Callable[[Floats], Floats]:
    """The function for one design `[f]` as well as for many `[f, p]`."""

    def both(places: Floats) -> Floats:
        places = np.asarray(places, dtype=float)
        many = function(places if places.ndim == 2 else places[:, None])
        return np.asarray(many if places.ndim == 2 else many[..., 0])

    return both


def _polish(
    trials: Trials, factors: Sequence[Factor], goals: Sequence[Goal], start: Floats, evaluations: int
) -> None:
    """COBYQA (Ragonneau, thesis, Hong Kong Polytechnic, 2022) in scipy, on what is not whole numbers."""
    optimize: Any = import_module("scipy.optimize")
    free = [index for index, factor in enumerate(factors) if not factor.whole]
    low = np.array([factors[index].bounds[0] for index in free])
    width = np.array([factors[index].bounds[1] for index in free]) - low

    def place(shares: Floats) -> Floats:
        full = start.copy()
        full[free] = low + width * np.clip(shares, 0.0, 1.0)
        return full[:, None]

    limits = [optimize.NonlinearConstraint(lambda x: trials.margins(place(x))[:, 0], 0.0, np.inf)]
    optimize.minimize(
        lambda shares: float(trials.cost(place(shares))[0]),
        (start[free] - low) / width,
        method="COBYQA",
        bounds=[(0.0, 1.0)] * len(free),
        constraints=limits if goals else (),
        options={"maxfev": evaluations, "initial_tr_radius": RADIUS, "final_tr_radius": FINEST},
    )


def _name(case: Case) -> str:
    """The case's key, or for one that cannot be run its error."""
    return case.key or case.error


def _value(result: Result, key: str) -> float:
    value = result.figures.get(key)
    if value is None:
        value = result.figures.get(at_least_key(key))
    return float("nan") if value is None else value


def _margin(result: Result, goal: Goal) -> float:
    margin = float(goal.margins(np.array([_value(result, goal.key)]))[0])
    return margin if np.isfinite(margin) else -HOPELESS
