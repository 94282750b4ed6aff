"""Walls and drink as one system of equations, and its linearisation bordered by the drink.

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
from cupfem.linear import Factor, Operator

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
            change = np.linalg.solve(slopes, here)
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

    def loads(self, state: Floats, time: float) -> tuple[Floats, dict[str, float]]:
        """All rates but the constant conduction: walls [W], drink [kg/s, W]; and the ledger's powers [W]."""
        lumped = self.lumped(state)
        powers: dict[str, float] = {}
        out = np.empty(len(state))
        received = np.zeros(len(state) - self._walls)
        for section, part in zip(self.sections, self.slices, strict=True):
            conduction, wall = section.conduction, state[part]
            load = conduction.supplied(time)
            conduction.subtract_varying(load, wall)
            for exchange in conduction.exchanges:
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


@dataclass(frozen=True, eq=False)
class Border:
    """The drink's rows and columns after elimination of the walls, at one wetted part.

    `gains` are the walls' low-rank corrections (None where there is none), `rows` how the drink answers to
    the walls, `answers` how the walls answer to the drink, `inverse` that of the Schur complement.
    """

    gains: list[Floats | None]
    rows: list[Floats]
    answers: list[Floats]
    inverse: Floats


class Linearised:
    """M + w K of each section, factorised, with the drink as a border; w is the step times the scheme's
    diagonal.

    The border couples both ways: how walls and drink answer to the drink's state (columns, by difference
    quotients) and how the drink answers to the walls (rows, from the films' slopes). The Schur complement is
    a small dense matrix. Where the level moves within the step the wetted part differs from stage to stage:
    `at_stage` corrects matrix and border by a low rank.
    """

    def __init__(
        self,
        system: System,
        states: tuple[Floats, Floats, Floats],
        times: tuple[float, float, float],
        weight: float,
    ):
        self.system, self.weight = system, weight
        self._received = len(system.drink_state(states[1]))
        lumped = tuple(system.lumped(state) for state in states)
        self.constant: list[Operator] = []
        self._factors: list[Factor] = []
        self._moving: list[_MovingLevel] = []
        passed: list[Floats] = []
        for index, section in enumerate(system.sections):
            wall = system.wall(states[1], index)
            passed.append(section.share * self._add_section(section, wall, lumped[1], times[1]))
            moving = _MovingLevel(
                section, (lumped[0], lumped[2]), (times[0], times[2]), self._factors[-1], self._received
            )
            moving.refer_to(wall, lumped[1], times[1], weight)
            self._moving.append(moving)
        self._border = self._make_border(states[1], times[1], passed)

    def _add_section(self, section: Section, wall: Floats, lumped: Lumped, time: float) -> Floats:
        """Factorise a section's matrix; returns the slopes `[unknown, dof]` of what the drink gets."""
        conduction = section.conduction
        constant = conduction.mass.data + self.weight * conduction.stiffness.data
        self.constant.append(conduction.pattern.operator(constant))
        data, passed = _film_slopes(conduction, wall, lumped, time, self._received)
        matrix = constant + self.weight * (data + conduction.varying_data(wall))
        self._factors.append(conduction.pattern.factor(matrix, conduction.fixed))
        return passed

    def _make_border(self, state: Floats, time: float, passed: list[Floats]) -> Border | None:
        system = self.system
        if system.drink is None:
            return None
        columns = self._border_columns(state, time)
        self._own = np.diag(system.drink.capacities) + columns[-columns.shape[1] :]
        answers = [
            factor.solve(columns[part]) for factor, part in zip(self._factors, system.slices, strict=True)
        ]
        rows = [-self.weight * heat for heat in passed]
        return Border([None] * len(rows), rows, answers, self._inverse(rows, answers))

    def _border_columns(self, state: Floats, time: float) -> Floats:
        system = self.system
        assert system.drink is not None
        scales = BORDER_STEP * system.drink.scales(system.drink_state(state))
        here, _ = system.loads(state, time)
        columns = np.empty((len(state), len(scales)))
        for index, scale in enumerate(scales):
            moved = state.copy()
            system.drink_state(moved)[index] += scale
            columns[:, index] = system.free((system.loads(moved, time)[0] - here) * (-self.weight / scale))
        return columns

    def _inverse(self, rows: list[Floats], answers: list[Floats]) -> Floats:
        """Inverse Schur complement."""
        small = self._own - sum(row @ answer for row, answer in zip(rows, answers, strict=True))
        return np.asarray(np.linalg.inv(small))

    def constant_times(self, state: Floats) -> Floats:
        """(M + w K) T without films and varying conductivities."""
        drink = self.system.drink
        return self.system.by_section(self.constant, state, drink.capacities if drink else 1.0)

    def at_stage(self, state: Floats, time: float) -> Border | None:
        """The border with matrix and rows corrected for the wetted part of a stage."""
        border = self._border
        if border is None or not any(moving.present for moving in self._moving):
            return border
        lumped = self.system.lumped(state)
        gains, rows, answers = [], [], []
        for index, moving in enumerate(self._moving):
            gain, heat = moving.correction(self.system.wall(state, index), lumped, time)
            share = self.system.sections[index].share
            gains.append(gain)
            answers.append(moving.corrected(border.answers[index], gain))
            rows.append(moving.add_to(border.rows[index], -self.weight * share * heat))
        return Border(gains, rows, answers, self._inverse(rows, answers))

    def solve(self, residual: Floats, border: Border | None = None) -> Floats:
        """Newton change for a residual, with the border of a stage."""
        system = self.system
        border = border or self._border
        out = np.empty(len(residual))
        for index, (factor, part) in enumerate(zip(self._factors, system.slices, strict=True)):
            change = factor.solve(residual[part])
            gain = border.gains[index] if border else None
            out[part] = change if gain is None else self._moving[index].corrected(change, gain)
        if border is not None:
            rest = system.drink_state(residual).copy()
            for row, part in zip(border.rows, system.slices, strict=True):
                rest -= row @ out[part]
            lumped = border.inverse @ rest
            for answer, part in zip(border.answers, system.slices, strict=True):
                out[part] -= answer @ lumped
            system.drink_state(out)[:] = lumped
        return out


class _MovingLevel:
    """Low-rank correction where the bounds of partly wetted edges move over the step.

    With E the columns of the identity at the unknowns that a bound passes, and C the change of the film
    matrix there, (A + E C E^T)^-1 r = x - Z G x_E with x = A^-1 r, Z = A^-1 E, G = (I + C Z_E)^-1 C
    (Sherman-Morrison-Woodbury formula; Golub and Van Loan, Matrix Computations, 4th ed. 2013, sec. 2.1.4).
    """

    def __init__(
        self,
        section: Section,
        lumped: tuple[Lumped, Lumped],
        times: tuple[float, float],
        factor: Factor,
        received: int,
    ):
        self._received = received
        self._exchanges = []
        unknowns = [np.zeros(0, dtype=int)]
        for exchange in section.conduction.exchanges:
            for low, high in exchange.moved_bounds(lumped, times):
                dofs, span = exchange.facets_between(low, high)
                self._exchanges.append((exchange, span))
                unknowns.append(dofs)
        self._unknowns = np.setdiff1d(np.concatenate(unknowns), section.conduction.fixed)
        self.present = len(self._unknowns) > 0
        if self.present:
            unit = np.zeros((section.conduction.mesh.size, len(self._unknowns)))
            unit[self._unknowns, np.arange(len(self._unknowns))] = 1.0
            self._answers = factor.solve(unit)
            self._own = self._answers[self._unknowns]

    def refer_to(self, wall: Floats, lumped: Lumped, time: float, weight: float) -> None:
        """Take the film matrix at this state as the reference."""
        self._weight = weight
        if self.present:
            self._reference = self._films(wall, lumped, time)

    def correction(self, wall: Floats, lumped: Lumped, time: float) -> tuple[Floats | None, Floats]:
        """G for a state, and the change of the slopes of what the drink receives at the unknowns E."""
        if not self.present:
            return None, np.zeros((self._received, 0))
        films, heat = self._films(wall, lumped, time)
        change = self._weight * (films - self._reference[0])
        gain = np.linalg.solve(np.eye(len(change)) + change @ self._own, change)
        return np.asarray(gain), heat - self._reference[1]

    def corrected(self, solution: Floats, gain: Floats | None) -> Floats:
        """A solution of the uncorrected system, corrected."""
        if gain is None:
            return solution
        return np.asarray(solution - self._answers @ (gain @ solution[self._unknowns]))

    def add_to(self, row: Floats, values: Floats) -> Floats:
        """Rows with values added at the unknowns E."""
        row = row.copy()
        row[:, self._unknowns] += values
        return row

    def _films(self, wall: Floats, lumped: Lumped, time: float) -> tuple[Floats, Floats]:
        size = len(self._unknowns)
        matrix, heat = np.zeros((size, size)), np.zeros((self._received, size))
        for exchange, span in self._exchanges:
            points = exchange.points_within(span, lumped, time)
            if len(points.weight):
                slope, fed = exchange.slopes(points, points.interpolate(wall), lumped, time)
                slope = points.weight * slope
                place = np.minimum(np.searchsorted(self._unknowns, points.dofs), size - 1)
                shape = points.shape * (self._unknowns[place] == points.dofs)
                local = shape[:, :, None] * shape[:, None, :] * slope[:, None, None]
                np.add.at(matrix, (place[:, :, None], place[:, None, :]), local)
                _add_received(heat, place, shape * points.weight[:, None], fed)
        return matrix, heat


def _film_slopes(
    conduction: Conduction, wall: Floats, lumped: Lumped, time: float, unknowns: int
) -> tuple[Floats, Floats]:
    """Film slopes as stored entries, and the derivatives `[unknown, dof]` of what the drink receives over the
    wall's unknowns."""
    data = np.zeros(conduction.pattern.entries)
    passed = np.zeros((unknowns, conduction.mesh.size))
    for exchange in conduction.exchanges:
        points = exchange.points(lumped, time)
        if len(points.weight):
            slope, fed = exchange.slopes(points, points.interpolate(wall), lumped, time)
            exchange.add_slope(data, points, points.weight * slope)
            _add_received(passed, points.dofs, points.shape * points.weight[:, None], fed)
    return data, passed


def _add_received(out: Floats, place: Ints, shape: Floats, fed: Floats | None) -> None:
    """Add slopes `[unknown, point]` of what the drink receives to its rows (in place)."""
    for row, rates in zip(out, [] if fed is None else fed, strict=False):
        if rates.any():
            np.add.at(row, place, shape * rates[:, None])


def add_terms(total: dict[str, float], terms: Mapping[str, float], factor: float = 1.0) -> None:
    """total += factor * terms, name by name."""
    for name, value in terms.items():
        total[name] = total.get(name, 0.0) + factor * value
