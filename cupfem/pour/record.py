"""What is kept of a march: series at given times, snapshots, and the ledger."""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from cupfem.edges import INTERNAL, TO_DRINK
from cupfem.march import Step, System, add_terms
from cupfem.run import Faces, Ledger, Series

Floats = NDArray[np.float64]

MEMORY = 120.0
"""How long a wall keeps what a step added to its error [s]: 4 mm of stoneware follow a drink within a fifth
of that; the drink keeps all of it."""


class Recorder:
    """Samples accepted steps at the times of the series and of the snapshots."""

    def __init__(self, system: System, faces: Faces, times: Floats, snapshot_times: Floats, unknowns: int):
        self._faces, self._times, self.snapshot_times = faces, times, snapshot_times
        self._size = system.sections[0].conduction.mesh.size
        self._kept = np.full((len(times), 3), np.nan)
        self._outer = np.empty((len(times), len(faces.outer)))
        self._inner = np.empty((len(times), len(faces.inner)))
        self.drink_states = np.empty((len(times), unknowns))
        self._powers: dict[str, Floats] = {}
        self.snapshots = np.empty((len(snapshot_times), self._size))
        self._energies: dict[str, float] = {}
        self.time_error = self._wall_error = self._drink_error = 0.0

    def start(self, system: System, state: Floats, time: float) -> None:
        """Keep a state as it is, for all times of series and snapshots that equal `time`."""
        for index in np.flatnonzero(np.isclose(self._times, time, rtol=0.0, atol=1e-9)):
            self._keep(int(index), system, state)
            powers = system.loads(state, time)[1]
            self._keep_powers(int(index), powers)
        for index in np.flatnonzero(np.isclose(self.snapshot_times, time, rtol=0.0, atol=1e-9)):
            self.snapshots[index] = state[: self._size]

    def add(self, system: System, step: Step) -> None:
        """Sample a step, both for the ledger and for the times that fall into it."""
        add_terms(self._energies, step.energies)
        self._drink_error += step.drink_error
        self._wall_error *= math.exp((step.start - step.end) / MEMORY)
        self._wall_error += step.error
        self.time_error = max(self.time_error, self._wall_error, self._drink_error)
        for index in _within(self._times, step):
            time = self._times[index]
            self._keep(index, system, step.at(time))
            share = (time - step.start) / (step.end - step.start)
            mixed: dict[str, float] = {}
            add_terms(mixed, step.powers_before, 1.0 - share)
            add_terms(mixed, step.powers_after, share)
            self._keep_powers(index, mixed)
        for index in _within(self.snapshot_times, step):
            self.snapshots[index] = step.at(self.snapshot_times[index])[: self._size]

    def add_heat(self, terms: Mapping[str, float]) -> None:
        """Heats of a jump, such as a sip [J]."""
        add_terms(self._energies, terms)

    def series(self) -> Series:
        """The series."""
        temperature, level, mass = self._kept.T
        return Series(self._times, temperature, level, mass, self._outer, self._inner, self._powers)

    def ledger(self, before: Mapping[str, float], after: Mapping[str, float]) -> Ledger:
        """The balance between two states' stored heats."""
        stored = {name: after[name] - before[name] for name in before if name != "drink"}
        out = {name: value for name, value in self._energies.items() if name not in INTERNAL}
        drink = after.get("drink", 0.0) - before.get("drink", 0.0)
        return Ledger(out, stored, drink, self._energies.get(TO_DRINK, 0.0))

    def _keep(self, index: int, system: System, state: Floats) -> None:
        drink = system.lumped(state)
        self._kept[index] = drink.temperature, drink.level, drink.mass
        self.drink_states[index] = system.drink_state(state)
        wall = state[: self._size]
        self._outer[index] = wall[self._faces.outer]
        self._inner[index] = wall[self._faces.inner]

    def _keep_powers(self, index: int, powers: Mapping[str, float]) -> None:
        for name, value in powers.items():
            self._powers.setdefault(name, np.zeros(len(self._times)))[index] = value


def _within(times: Floats, step: Step) -> range:
    """Indices of the times in (start, end]."""
    first, last = np.searchsorted(times, [step.start + 1e-9, step.end + 1e-9])
    return range(int(first), int(last))


def series_times(duration: float, breaks: tuple[float, ...]) -> Floats:
    """Times of the series: dense at first, 300 even ones, and each break."""
    early = np.array([0.1, 0.2, 0.5, 1, 2, 3, 4, 5, 6, 8, 10, 12, 15, 20, 25, 30, 40, 50, 60, 75, 90])
    times = np.concatenate([[0.0], early[early < duration], np.linspace(0.0, duration, 301)[1:], breaks])
    return _distinct(times)


def snapshot_times(duration: float) -> Floats:
    """Times of the field snapshots: about even on a logarithmic scale, at round numbers."""
    round_times = np.array(
        [
            0,
            1,
            2,
            5,
            10,
            20,
            30,
            60,
            90,
            120,
            180,
            240,
            300,
            420,
            600,
            900,
            1200,
            1800,
            2700,
            3600,
            5400,
            7200,
        ]
    )
    return _distinct(np.concatenate([round_times[round_times < duration], [duration]]))


def _distinct(times: Floats) -> Floats:
    ordered = np.sort(times)
    return np.asarray(ordered[np.concatenate([[True], np.diff(ordered) > 1e-6])])
