"""Walls and drink as one system of equations.

The state is one flat vector: the temperatures of each section in turn, then the drink's mass and enthalpy.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from cupfem.conduction import Conduction
from cupfem.drink import Ambient, Drink, Lumped
from cupfem.errors import ConvergenceError
from cupfem.linear import Operator

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

ROOM = Ambient()
PEAK_SHARE = 0.05
"""A local error counts by a twentieth of its peak where that exceeds its mean over the wall: the level line
moves over few cells."""
BORDER_STEP = 1e-5
"""Step, in scales of the drink's state, of the difference quotients that fill the border."""
MOST_CONSISTENT, MOST_HALVINGS, LARGEST_CORRECTION, CONSISTENT = 60, 12, 40.0, 1e-9
"""Of `System.consistent`: steps, halvings of one, and the largest and the last step in kelvins."""


@dataclass(frozen=True, eq=False)
class Section:
    """A share of the circumference with its own wall state."""

    conduction: Conduction
    share: float = 1.0
    name: str = "wall"


@dataclass(eq=False)
class System:
    """Right-hand sides of walls and drink.

    Parameters
    ----------
    sections:
        Their shares add to 1.
    ambient:
        The room, constant between two breaks of the march.
    """

    sections: Sequence[Section]
    drink: Drink | None = None
    ambient: Ambient = ROOM
    slices: list[slice] = field(init=False)
    _last: tuple[object, Lumped] = field(init=False, repr=False, default=(None, Lumped(ROOM)))

    def __post_init__(self) -> None:
        ends = np.cumsum([0, *(section.conduction.mesh.size for section in self.sections)])
        self.slices = [slice(int(a), int(b)) for a, b in pairwise(ends)]
        self._walls = int(ends[-1])
        self.constrained = any(len(section.conduction.fixed) for section in self.sections)
        weights = [section.conduction.capacity_weights() for section in self.sections]
        self._error_weights = [w / w.sum() for w in weights]

    # -- the state -------------------------------------------------------------------------------------------

    def state(self, walls: Sequence[Floats], drink: Floats | None = None) -> Floats:
        """Flat state of given temperatures and drink."""
        return np.concatenate([*walls, [] if drink is None else drink]).astype(float)

    def wall(self, state: Floats, index: int = 0) -> Floats:
        """Temperatures of a section [degC]."""
        return state[self.slices[index]]

    def drink_state(self, state: Floats) -> Floats:
        """The drink's unknowns: mass [kg], enthalpy [J], and those of a headspace; empty without a drink."""
        return state[self._walls :]

    def lumped(self, state: Floats) -> Lumped:
        """Drink and room as the walls see them; the last one is kept, as it is asked for several times."""
        if self.drink is None:
            return Lumped(self.ambient)
        drink = self.drink_state(state)
        key = (drink.tobytes(), self.ambient, self.drink)
        if key != self._last[0]:
            self._last = key, self.drink.lumped(drink, self.ambient)
        return self._last[1]

    def stored(self, state: Floats) -> dict[str, float]:
        """Heat stored above 0 degC [J]: each region (all sections, by share) and the drink."""
        heat: dict[str, float] = {}
        for index, section in enumerate(self.sections):
            add_terms(heat, section.conduction.stored_heat(self.wall(state, index)), section.share)
        if self.drink is not None:
            heat["drink"] = float(self.drink_state(state)[1])
        return heat

    def with_fixed(self, state: Floats, time: float) -> Floats:
        """The state with the prescribed temperatures of a time written in (in place)."""
        if self.constrained:
            for section, part in zip(self.sections, self.slices, strict=True):
                state[part][section.conduction.fixed] = section.conduction.fixed_values(time)
        return state

    def consistent(self, state: Floats, time: float) -> Floats:
        """The state with its algebraic unknowns solved for, as after a start or a break.

        Newton steps with difference quotients, halved until the residual falls.

        Raises
        ------
        ConvergenceError
            If they do not settle.
        """
        if self.drink is None or self.drink.capacities.all():
            return state
        places = self._walls + np.flatnonzero(self.drink.capacities == 0.0)
        scales = self.drink.scales(self.drink_state(state))[places - self._walls]
        state, here = state.copy(), self.loads(state, time)[0][places]
        for _ in range(MOST_CONSISTENT):
            slopes = np.empty((len(places), len(places)))
            for column, scale in enumerate(BORDER_STEP * scales):
                moved = state.copy()
                moved[places[column]] += scale
                slopes[:, column] = (self.loads(moved, time)[0][places] - here) / scale
            # Least squares: an unknown that nothing drives (a lid that passes no heat) stays where it is.
            change = np.linalg.lstsq(slopes, here, rcond=None)[0]
            size = float(np.max(np.abs(change) / scales))
            change *= LARGEST_CORRECTION / max(size, LARGEST_CORRECTION)
            state, here = self._lower(state, here, places, np.asarray(change), time)
            if size < CONSISTENT:
                return state
        raise ConvergenceError(f"the headspace does not settle at t = {time:.6g} s")

    def _lower(
        self, state: Floats, here: Floats, places: Ints, change: Floats, time: float
    ) -> tuple[Floats, Floats]:
        """A state with a smaller residual on the way of a change, and the residual."""
        for _ in range(MOST_HALVINGS):
            trial = state.copy()
            trial[places] -= change
            residual = self.loads(trial, time)[0][places]
            if not np.max(np.abs(residual)) > np.max(np.abs(here)):
                break
            change = 0.5 * change
        return trial, residual

    def free(self, residual: Floats) -> Floats:
        """A residual with the rows of prescribed temperatures cleared (in place)."""
        if self.constrained:
            for section, part in zip(self.sections, self.slices, strict=True):
                residual[part][section.conduction.fixed] = 0.0
        return residual

    # -- right-hand sides ------------------------------------------------------------------------------------

    def loads(self, state: Floats, time: float, drink_alone: bool = False) -> tuple[Floats, dict[str, float]]:
        """All rates but the constant conduction: walls [W], drink [kg/s, W]; and the ledger's powers [W].

        With `drink_alone` what does not change with the drink's state is left out: enough for differences.
        """
        lumped = self.lumped(state)
        powers: dict[str, float] = {}
        out = np.empty(len(state))
        received = np.zeros(len(state) - self._walls)
        for section, part in zip(self.sections, self.slices, strict=True):
            conduction, wall = section.conduction, state[part]
            load = conduction.supplied(time)
            if not drink_alone:
                conduction.subtract_varying(load, wall)
            for exchange in conduction.exchanges:
                if drink_alone and not exchange.exchange.follows_drink:
                    continue
                points = exchange.points(lumped, time)
                if len(points.weight):
                    surface = points.interpolate(wall)
                    fluxes = exchange.fluxes(points, surface, lumped, time)
                    fed = exchange.fed(fluxes, surface, lumped)
                    if fed is not None:
                        received[: len(fed)] += section.share * (fed @ points.weight)
                    exchange.add_load(load, points, fluxes)
                    add_terms(powers, exchange.powers(points, fluxes), section.share)
            add_terms(powers, conduction.supplied_power(time), -section.share)
            out[part] = load
        if self.drink is not None:
            rates, terms = self.drink.rates(self.drink_state(state), lumped, time, received)
            out[self._walls :] = rates
            add_terms(powers, terms, 1.0)
        return out, powers

    def conducted(self, state: Floats) -> Floats:
        """Constant conduction K T of the walls [W]; zero for the drink."""
        return self.by_section([section.conduction.stiffness for section in self.sections], state, 0.0)

    def capacity_times(self, state: Floats) -> Floats:
        """M T of the walls; the drink's state itself, zero for its algebraic unknowns."""
        capacities = self.drink.capacities if self.drink else 1.0
        return self.by_section([section.conduction.mass for section in self.sections], state, capacities)

    def by_section(self, operators: Sequence[Operator], state: Floats, drink: float | Floats) -> Floats:
        """Operators applied to their sections; the drink's own state times a factor for each unknown."""
        out = np.empty(len(state))
        for operator, part in zip(operators, self.slices, strict=True):
            out[part] = operator @ state[part]
        out[self._walls :] = drink * state[self._walls :]
        return out

    # -- sizes -----------------------------------------------------------------------------------------------

    def largest(self, change: Floats, at: Floats) -> float:
        """Largest change of a wall temperature or of the drink [K]."""
        wall = float(np.max(np.abs(change[: self._walls])))
        return max(wall, self.drink_size(change, at))

    def error_size(self, error: Floats, at: Floats) -> float:
        """Size of a local error [K]: mean square over each wall's heat capacity, or a twentieth of the peak,
        or the drink's."""
        size = self.drink_size(error, at)
        for weights, part in zip(self._error_weights, self.slices, strict=True):
            square = error[part] ** 2
            size = max(size, float(np.sqrt(weights @ square)), PEAK_SHARE * float(np.sqrt(square.max())))
        return size

    def drink_size(self, change: Floats, at: Floats) -> float:
        """Change of the drink in kelvins (or the mass that weighs as much)."""
        if self.drink is None:
            return 0.0
        scales = self.drink.scales(self.drink_state(at))
        return float(np.max(np.abs(self.drink_state(change)) / scales))


def add_terms(total: dict[str, float], terms: Mapping[str, float], factor: float = 1.0) -> None:
    """total += factor * terms, name by name."""
    for name, value in terms.items():
        total[name] = total.get(name, 0.0) + factor * value
