"""Adaptive steps of the scheme over a system: stages by simplified Newton, embedded error control, dense
output, ledger.

Each stage solves M (Y - base) = h gamma F(Y) for walls and drink together. The ledger accumulates each power
with the scheme's own weights, so that it closes to the iteration's tolerance whatever the step.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from cupfem.errors import ConvergenceError
from cupfem.march.linearised import Linearised
from cupfem.march.scheme import EMBEDDED, GAMMA, NODES, STAGES, WEIGHTS
from cupfem.march.system import System, add_terms

Floats = NDArray[np.float64]

FIRST_STEP = 1e-3
SMALLEST_STEP = 1e-9
MOST_STEPS = 50000
MOST_ITERATIONS = 12
ITERATION_TOLERANCE = 5e-3
"""Newton changes below this share of the time tolerance end the iteration."""
DIVERGED = 150.0
"""Change of an iterate [K] with which a stage is given up; the first guess may be off by any amount."""
SLOW = 0.25
"""An iteration whose changes fall by less than this factor has its matrix formed anew, once a stage."""
EARLY = 3
"""The first changes of a stage tell nothing of the rate yet."""
STEEP = 0.05
"""Change of an iterate [K] that moves the film slopes at the level line enough to take them anew."""
SAFETY, MOST_GROWTH, LEAST_GROWTH = 0.9, 5.0, 0.2
LAST_NODE = float(NODES.max())
LINEARISE_AT = 0.6
"""Where in the step the matrix is formed: the stages stand at 0.15 to 1.04 of it, and the level moves on
meanwhile."""


@dataclass(frozen=True, eq=False)
class Step:
    """An accepted step with what dense output and the ledger need.

    `energies` are the step's heats [J] by ledger name; `error` [K] is the embedded estimate, `drink_error`
    the drink's part.
    """

    start: float
    end: float
    before: Floats
    after: Floats
    slope_before: Floats
    slope_after: Floats
    powers_before: dict[str, float]
    powers_after: dict[str, float]
    energies: dict[str, float]
    error: float
    drink_error: float

    def at(self, time: float) -> Floats:
        """State at a time within the step, by cubic Hermite interpolation."""
        h = self.end - self.start
        x = (time - self.start) / h
        rest = 1.0 - x
        out = (1.0 + 2.0 * x) * rest * rest * self.before + x * x * (3.0 - 2.0 * x) * self.after
        out += h * x * rest * rest * self.slope_before - h * x * x * rest * self.slope_after
        return out


@dataclass
class Counters:
    """What the march did."""

    steps: int = 0
    rejected: int = 0
    iterations: int = 0
    factorisations: int = 0


@dataclass(eq=False)
class March:
    """Adaptive march of a system.

    Parameters
    ----------
    tolerance:
        Largest local error of a step [K], as `System.error_size` measures it.
    fixed_step:
        Constant step [s] without error control, for measuring the scheme's order.
    """

    system: System
    tolerance: float = 5e-3
    largest_step: float = 60.0
    fixed_step: float | None = None
    counters: Counters = field(default_factory=Counters)

    def run(self, state: Floats, start: float, end: float, first_step: float = FIRST_STEP) -> Iterator[Step]:
        """Accepted steps from `start` to `end` without a break in between.

        Raises
        ------
        ConvergenceError
            If the step falls below `SMALLEST_STEP` or the number of steps passes `MOST_STEPS`.
        """
        state = self.system.with_fixed(np.array(state, dtype=float), start)
        state = self.system.consistent(state, start)
        slope, powers = self._first_slope(state, start)
        time, step = start, self.fixed_step or min(first_step, end - start)
        while time < end - 1e-12 * max(1.0, abs(end)):
            step = self._fit(step, end - time)
            self._check(time, step)
            trial = _Trial(self, state, slope, powers, time, step)
            converged = trial.attempt()
            error = trial.error / self.tolerance if converged else np.inf
            if not converged and self.fixed_step is not None:
                raise ConvergenceError(f"a stage does not converge at t = {time:.6g} s, step {step:.3g} s")
            if error > 1.0 and self.fixed_step is None:
                self.counters.rejected += 1
                step *= max(LEAST_GROWTH, SAFETY * error**-0.25) if converged else LEAST_GROWTH
                continue
            accepted = trial.step_record()
            self.counters.steps += 1
            yield accepted
            time, state, slope, powers = (
                accepted.end,
                accepted.after,
                accepted.slope_after,
                accepted.powers_after,
            )
            step *= min(MOST_GROWTH, SAFETY * max(error, 1e-4) ** -0.25)

    def _fit(self, step: float, left: float) -> float:
        """The step, or what fits: the last two steps share what is left."""
        step = self.fixed_step or min(step, self.largest_step)
        if step >= left * (1.0 - 1e-9):
            return left
        return 0.5 * left if left < 1.5 * step and self.fixed_step is None else step

    def _check(self, time: float, step: float) -> None:
        if step < SMALLEST_STEP or self.counters.steps + self.counters.rejected > MOST_STEPS:
            raise ConvergenceError(
                f"the march cannot go on at t = {time:.6g} s: "
                f"step {step:.3g} s after {self.counters.steps} steps"
            )

    def _first_slope(self, state: Floats, time: float) -> tuple[Floats, dict[str, float]]:
        """Rates at a start or after a break, from M dT/dt = F; prescribed unknowns have their own."""
        system = self.system
        loads, powers = system.loads(state, time)
        rates = loads - system.conducted(state)
        slope = rates.copy()
        if system.drink is not None:
            system.drink_state(slope)[system.drink.capacities == 0.0] = 0.0
        for section, part in zip(system.sections, system.slices, strict=True):
            conduction = section.conduction
            load = rates[part].copy()
            forced = conduction.fixed_slopes(time)
            load -= conduction.mass @ forced
            load[conduction.fixed] = forced[conduction.fixed]
            slope[part] = conduction.pattern.factor(conduction.mass.data, conduction.fixed).solve(load)
        return slope, powers


def _expected(size: float, previous: float) -> float:
    """Next change of an iteration that converges linearly (Hairer and Wanner, Solving Ordinary Differential
    Equations II, 2nd ed. 1996, sec. IV.8); the change itself where there is no rate yet."""
    if np.isfinite(previous) and size < previous:
        return size * size / (previous - size)
    return size


class _Trial:
    """One attempted step."""

    def __init__(
        self, march: March, state: Floats, slope: Floats, powers: dict[str, float], time: float, step: float
    ):
        self.march, self.system = march, march.system
        self.state, self.time, self.step, self.weight = state, time, step, GAMMA * step
        self.slopes = np.empty((6, len(state)))
        self.slopes[0] = slope
        self.powers = [powers]
        self.last = state
        self.error = self.drink_error = np.inf

    def attempt(self) -> bool:
        """Solve the stages; False if an iteration does not converge."""
        self._linearise(LINEARISE_AT)
        if not all(self._solve_stage(stage) for stage in range(1, 6)):
            return False
        self._estimate()
        return True

    def _linearise(self, share: float, state: Floats | None = None) -> None:
        """Form the matrix a share of the step ahead, at a given state or the extrapolated one."""
        self.march.counters.factorisations += 1
        times = (self.time, self.time + share * self.step, self.time + LAST_NODE * self.step)
        here = self._extrapolated(times[1]) if state is None else state
        self.matrix = Linearised(
            self.system, (self.state, here, self._extrapolated(times[2])), times, self.weight
        )

    def _extrapolated(self, time: float) -> Floats:
        """The state at a time ahead by its present slope; the drink's mass is kept from falling below
        half."""
        ahead = self.state + (time - self.time) * self.slopes[0]
        drink, old = self.system.drink_state(ahead), self.system.drink_state(self.state)
        if len(drink) and drink[0] < 0.5 * old[0]:
            drink[:] = old
        return self.system.with_fixed(ahead, time)

    def _solve_stage(self, stage: int) -> bool:
        system, tolerance = self.system, ITERATION_TOLERANCE * self.march.tolerance
        time = self.time + NODES[stage] * self.step
        base = self.state + (self.step * STAGES[stage, :stage]) @ self.slopes[:stage]
        value = system.with_fixed(base + self.weight * self.slopes[stage - 1], time)
        held = system.capacity_times(base)
        border = self.matrix.at_stage(value, time)
        previous, renewed = np.inf, False
        for iteration in range(MOST_ITERATIONS):
            residual = self.matrix.constant_times(value) - held - self.weight * system.loads(value, time)[0]
            change = self.matrix.solve(system.free(residual), border)
            value = value - change
            self.march.counters.iterations += 1
            size = system.largest(change, self.state)
            if not size < (DIVERGED if iteration else np.inf):
                return False
            if _expected(size, previous) < tolerance:
                self._keep(stage, value, base, time)
                return True
            if iteration >= EARLY and size > SLOW * previous and not renewed:
                self._linearise(NODES[stage], value)
                renewed, size = True, np.inf
            if size > STEEP:
                border = self.matrix.at_stage(value, time)
            previous = size
        return False

    def _keep(self, stage: int, value: Floats, base: Floats, time: float) -> None:
        self.slopes[stage] = (value - base) / self.weight
        self.powers.append(self.system.loads(value, time)[1])
        self.last = value

    def _estimate(self) -> None:
        """Embedded error, filtered through the step's own matrix so that stiff components do not dominate
        it."""
        error = (self.step * (WEIGHTS - EMBEDDED)) @ self.slopes
        filtered = self.matrix.solve(self.system.free(self.system.capacity_times(error)))
        self.drink_error = self.system.drink_size(filtered, self.state)
        self.error = self.system.error_size(filtered, self.state)

    def step_record(self) -> Step:
        energies: dict[str, float] = {}
        for weight, powers in zip(WEIGHTS, self.powers, strict=True):
            add_terms(energies, powers, float(weight) * self.step)
        return Step(
            start=self.time,
            end=self.time + self.step,
            before=self.state,
            after=self.last,
            slope_before=self.slopes[0],
            slope_after=self.slopes[5],
            powers_before=self.powers[0],
            powers_after=self.powers[5],
            energies=energies,
            error=self.error,
            drink_error=self.drink_error,
        )
