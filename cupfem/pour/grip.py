"""The pads of a serving during its march: sections that come and go, and what they felt.

A section starts as a copy of the free wall; when its finger lets go the free wall becomes the share-weighted
enthalpy mean of both. The skin brings its heat and takes it away again, under the ledger's term "hand".
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from cupfem.films import Film
from cupfem.march import Section, Step, System
from cupfem.problem import Problem
from cupfem.run import PadField
from cupfem.touch.columns import step_times
from cupfem.touch.section import HAND, PadSection, build_section

Floats = NDArray[np.float64]

SAME_TIME = 1e-9


@dataclass(eq=False)
class Held:
    """A pad's section and what is kept of it."""

    section: PadSection
    end: float
    times: Floats = field(init=False)
    skin: Floats = field(init=False)
    wall: Floats = field(init=False)
    snapshots: list[tuple[float, Floats]] = field(default_factory=list)
    brought: float = 0.0
    taken: float = 0.0

    def __post_init__(self) -> None:
        self.times = step_times(self.end - self.section.pad.pick_up)
        self.skin = np.empty((len(self.times), *self.section.lines.shape))
        self.wall = np.empty((len(self.times), len(self.section.heights)))

    def keep(self, moment: float, field_: Floats) -> None:
        """Keep a state if the moment is one of the kept times."""
        place = int(np.searchsorted(self.times, moment - self.section.pad.pick_up - SAME_TIME))
        if place < len(self.times) and abs(self.times[place] + self.section.pad.pick_up - moment) < SAME_TIME:
            self.skin[place] = field_[self.section.lines]
            self.wall[place] = field_[self.section.under]

    def moments_within(self, step: Step) -> Floats:
        """Kept times that fall into a step [s since the pour]."""
        moments = self.times + self.section.pad.pick_up
        first, last = np.searchsorted(moments, [step.start + SAME_TIME, step.end + SAME_TIME])
        return moments[first:last]

    def result(self) -> PadField:
        section = self.section
        return PadField(
            pad=section.pad,
            mesh=section.mesh,
            heights=section.heights,
            depths=section.depths,
            time=self.times,
            skin=self.skin,
            wall=self.wall,
            snapshot_times=np.array([time for time, _ in self.snapshots]),
            snapshots=np.array([snapshot for _, snapshot in self.snapshots]),
        )


class Grip:
    """All pads of a problem's serving."""

    def __init__(self, problem: Problem, fineness: float, films: Mapping[str, Film]):
        self._problem = problem
        serving = problem.serving
        self._free = problem.system.sections[0].conduction
        self._size = problem.mesh.size
        self._held = [
            Held(build_section(problem, pad, fineness, films, f"pad {number}"), pad.until(serving.duration))
            for number, pad in enumerate(serving.pad, 1)
        ]
        self.active: list[Held] = []

    def change(self, state: Floats, time: float) -> tuple[Floats, dict[str, float]]:
        """Let go and pick up at a break; sets the problem's system and returns the state for it.

        Also returns the heat that hands took away [J], by ledger name.
        """
        released = [held for held in self.active if abs(held.end - time) < SAME_TIME]
        picked = [held for held in self._held if abs(held.section.pad.pick_up - time) < SAME_TIME]
        if not released and not picked:
            return state, {}
        system = self._problem.system
        walls = {id(held): system.wall(state, index + 1) for index, held in enumerate(self.active)}
        free = self._let_go(system.wall(state, 0), released, walls)
        drink = system.drink_state(state)
        self.active = [held for held in self.active if held not in released] + picked
        heat = sum(held.section.pad.share * held.taken for held in released)
        for held in picked:
            walls[id(held)] = held.section.start(free, system.ambient.temperature)
            held.brought = held.section.skin_heat(walls[id(held)])
            heat -= held.section.pad.share * held.brought
        self._problem.system = self._system(system)
        sections = [free, *(walls[id(held)] for held in self.active)]
        return self._problem.system.state(sections, drink), {HAND: heat}

    def _let_go(self, free: Floats, released: Sequence[Held], walls: Mapping[int, Floats]) -> Floats:
        share = self.free_share
        total = share * free
        for held in released:
            field_ = walls[id(held)]
            held.taken = held.section.skin_heat(field_)
            total = total + held.section.pad.share * held.section.wall(field_, free)
            share += held.section.pad.share
        return np.asarray(total / share) if released else free

    @property
    def free_share(self) -> float:
        """Share of the circumference without a finger."""
        return max(0.0, 1.0 - sum(held.section.pad.share for held in self.active))

    def _system(self, old: System) -> System:
        pads = [
            Section(held.section.conduction, held.section.pad.share, held.section.name)
            for held in self.active
        ]
        return System([Section(self._free, self.free_share), *pads], old.drink, old.ambient)

    # -- keeping ---------------------------------------------------------------------------------------------

    def start(self, state: Floats, time: float, snapshot_times: Floats) -> None:
        """Keep a state at a break."""
        for held, wall in self._walls(state):
            held.keep(time, wall)
        self._snapshots(state, time, snapshot_times)

    def add(self, step: Step, snapshot_times: Floats) -> None:
        """Sample a step."""
        for index, held in enumerate(self.active):
            for moment in held.moments_within(step):
                held.keep(float(moment), self._problem.system.wall(step.at(float(moment)), index + 1))
        for time in snapshot_times[(snapshot_times > step.start + SAME_TIME) & (snapshot_times <= step.end)]:
            self._snapshots(step.at(float(time)), float(time), snapshot_times)

    def results(self) -> tuple[PadField, ...]:
        """What the pads felt."""
        return tuple(held.result() for held in self._held)

    def _walls(self, state: Floats) -> list[tuple[Held, Floats]]:
        return [(held, self._problem.system.wall(state, index + 1)) for index, held in enumerate(self.active)]

    def _snapshots(self, state: Floats, time: float, snapshot_times: Floats) -> None:
        if np.any(np.abs(snapshot_times - time) < SAME_TIME):
            for held, wall in self._walls(state):
                held.snapshots.append((time, wall.copy()))
