"""The system linearised at a state: band matrices of the walls, bordered by the drink, corrected where the
level moves."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from cupfem.conduction import Conduction
from cupfem.drink import Lumped
from cupfem.linear import Factor, Operator
from cupfem.march.system import BORDER_STEP, Section, System

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]


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
        self._moving: list[MovingLevel] = []
        passed: list[Floats] = []
        for index, section in enumerate(system.sections):
            wall = system.wall(states[1], index)
            passed.append(section.share * self._add_section(section, wall, lumped[1], times[1]))
            moving = MovingLevel(
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
        here, _ = system.loads(state, time, drink_alone=True)
        columns = np.empty((len(state), len(scales)))
        for index, scale in enumerate(scales):
            moved = state.copy()
            system.drink_state(moved)[index] += scale
            there, _ = system.loads(moved, time, drink_alone=True)
            columns[:, index] = system.free((there - here) * (-self.weight / scale))
        return columns

    def _inverse(self, rows: list[Floats], answers: list[Floats]) -> Floats:
        """Inverse Schur complement; the least one where nothing drives an unknown of the headspace."""
        small = self._own - sum(row @ answer for row, answer in zip(rows, answers, strict=True))
        try:
            return np.asarray(np.linalg.inv(small))
        except np.linalg.LinAlgError:
            return np.asarray(np.linalg.pinv(small))

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


class MovingLevel:
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
