"""How much hotter than a column a pad's hottest place gets: its rim, or a wall that is not one-dimensional.

Under a pad the wall cools, around it it stays hot: heat comes along the wall to the pad's rim. A column knows
nothing of it. One section solve at a place gives the ratio

    excess(t) = (T_hottest(t) - T_start) / (T_column(t) - T_start)

at each judged depth; since the heat flow is linear but for films and gaps, the ratio serves for other
pick-ups and for other heights of the same wall. Array shapes: t times, q places along the pad.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from cupfem.march import March, Section, System
from cupfem.problem import Problem, ambient_at
from cupfem.run import PadField, Run
from cupfem.serving import Pad
from cupfem.skin import THIN_DEPTH, damage
from cupfem.touch.columns import step_times
from cupfem.touch.contact import Contact, touch
from cupfem.touch.felt import felt
from cupfem.touch.finger import SkinColumn
from cupfem.touch.section import build_section

Floats = NDArray[np.float64]

LONGEST_SOLVE = 150.0
"""Length of a section solve [s]; the ratio stays as it is then."""
LEAST_RISE = 0.05
"""Below this rise [K] of the column the ratio is one."""


@dataclass(frozen=True, eq=False)
class Rim:
    """Excess at the hottest place of a pad `[t]` at 0.1 and 0.5 mm, and where that place is.

    `middle` and `middle_thick` are the same for the pad's middle: one where the column is right.
    """

    height: float
    time: Floats
    thin: Floats
    thick: Floats
    middle: Floats
    middle_thick: Floats
    hottest: float


def no_excess(height: float) -> Rim:
    """The column as it is, where no section can be meshed: on solid ridges."""
    one = np.ones(1)
    return Rim(height, np.zeros(1), one, one, one, one, height)


def rim_at(run: Run, problem: Problem, pad: Pad, column: Contact | None = None) -> Rim:
    """Excess of a pad on the wall of a run, by one section solve from the last snapshot before its pick-up.

    The section takes the whole circumference meanwhile, and no sip, lid or room changes: this moves the drink
    by tenths of a kelvin and the ratio by less than a hundredth.
    """
    field = solve(run, problem, pad)
    contact = felt(run, field)
    if column is None:
        column = touch(
            run,
            np.array([pad.height]),
            np.array([field.pad.pick_up]),
            float(field.time[-1]),
            skin=contact.skin,
            conductance=pad.contact,
            gap_resistance=pad.gap_resistance,
            problem=problem,
        )
    middle = int(np.argmin(np.abs(field.heights - pad.height)))
    excesses = []
    for found, known in ((contact.thin, column.thin), (contact.thick, column.thick)):
        excesses += [
            _excess(found[:, 0].max(axis=1), known[:, 0, 0]),
            _excess(found[:, 0, middle], known[:, 0, 0]),
        ]
    hottest = int(np.argmax(contact.thin[:, 0].max(axis=0)))
    thin, middle_thin, thick, middle_thick = excesses
    return Rim(pad.height, field.time, thin, thick, middle_thin, middle_thick, float(field.heights[hottest]))


def _excess(found: Floats, known: Floats) -> Floats:
    rise = known - known[0]
    return np.where(rise > LEAST_RISE, (found - known[0]) / np.maximum(rise, LEAST_RISE), 1.0)


def solve(run: Run, problem: Problem, pad: Pad) -> PadField:
    """A pad's section alone from the nearest snapshot before its pick-up on; its pick-up is moved there."""
    start, index = _snapshot_before(run, pad.pick_up)
    pad = pad.model_copy(update={"pick_up": start, "release": None})
    section = build_section(problem, pad, run.fineness, run.films)
    ambient = ambient_at(run.serving, start)
    system = System([Section(section.conduction)], problem.system.drink, ambient)
    drink = run.drink_states[int(np.argmin(np.abs(run.series.time - start)))]
    state = system.state([section.start(run.snapshots[index], ambient.temperature)], drink)
    times = step_times(min(LONGEST_SOLVE, run.serving.duration - start))
    skin, wall = np.empty((len(times), *section.lines.shape)), np.empty((len(times), len(section.heights)))
    skin[0], wall[0] = state[section.lines], state[section.under]
    for step in March(system, run.tolerance).run(state, start, start + times[-1]):
        first, last = np.searchsorted(start + times, [step.start + 1e-9, step.end + 1e-9])
        for place in range(int(first), int(last)):
            now = step.at(start + float(times[place]))
            skin[place], wall[place] = now[section.lines], now[section.under]
    none = np.zeros(0)
    return PadField(
        pad, section.mesh, section.heights, section.depths, times, skin, wall, none, np.zeros((0, 0))
    )


def _snapshot_before(run: Run, pick_up: float) -> tuple[float, int]:
    """Time [s] and number of the last snapshot not after a pick-up (nor at the very end)."""
    last = run.serving.duration - 1.0
    index = int(np.searchsorted(run.snapshot_times, min(pick_up, last) + 1e-9)) - 1
    return float(run.snapshot_times[index]), index


def at_hottest(contact: Contact, rims: list[Rim], even: Contact | None = None) -> Contact:
    """The contact at the hottest places of pads, by the excess of each height `[h]`.

    `even` are the columns that the excess belongs to, where the contact is of others (crests of flutes).
    """
    even = even or contact
    thin = np.array([np.interp(contact.time, rim.time, rim.thin) for rim in rims]).T - 1.0
    thick = np.array([np.interp(contact.time, rim.time, rim.thick) for rim in rims]).T - 1.0
    spread = np.broadcast_to(thin[:, None, :], contact.thin.shape).reshape(contact.skins.shape[:2])
    skins = contact.skins + spread[:, :, None] * (even.skins - even.skins[:1])
    basal = skins[:, :, SkinColumn.of(contact.skin, np.ones(1)).index(THIN_DEPTH)]
    return replace(
        contact,
        thin=basal.reshape(contact.thin.shape),
        thick=contact.thick + thick[:, None, :] * (even.thick - even.thick[:1]),
        damage=damage(contact.time, basal).reshape(contact.thin.shape),
        skins=skins,
    )
