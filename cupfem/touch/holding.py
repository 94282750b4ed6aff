"""Hold time over heights and pick-ups: the map, the band that cannot be held, the first comfortable moment.

The map comes from columns; the excess of section solves brings it to the hottest place of each pad. Heights
near an end of a layer, of a blend or of a ridge get section solves of their own, as many as are allowed.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from html import escape

import numpy as np
from numpy.typing import NDArray

from cupfem.errors import InputError
from cupfem.problem import Problem
from cupfem.run import CAUTION, MOISTURE, HoldFigures, Run
from cupfem.serving import Pad
from cupfem.skin import THRESHOLD_SOURCE, get_skin
from cupfem.touch.contact import Contact, hotter, problem_of, touch
from cupfem.touch.criteria import HoldTimes, judge
from cupfem.touch.rim import Rim, at_hottest, no_excess, rim_at
from cupfem.touch.section import PadContact, on_solid_ridges
from cupfem.touch.wall import repeating

Floats = NDArray[np.float64]
Flags = NDArray[np.bool_]

PICK_UPS = (5.0, 10.0, 20.0, 30.0, 45.0, 60.0, 90.0, 120.0, 180.0, 240.0, 300.0, 450.0)
"""Pick-ups of a map [s], as far as they lie within the serving."""
HEIGHTS = 40
LONGEST = 300.0
"""Longest hold that is tried [s]."""
SECTIONS = 5
"""Most section solves of a map."""
BESIDE = (-0.5, -0.375, -0.25, -0.125, 0.125, 0.25, 0.375, 0.5)
"""Where further columns of a pad on an uneven wall stand, in widths from its middle."""
JUDGED_AT = 30.0
"""Time of touching [s] at which the hottest column under such a pad is chosen."""
END_MARGIN = 2e-3
"""A pad nearer to an end than this [m] is not on an even wall."""
DEFAULT_PAD = Pad(height="50 mm")


@dataclass(frozen=True, eq=False)
class Hold:
    """Hold times of a run over heights `[h]` [m] and pick-ups `[p]` [s].

    Attributes
    ----------
    times, middle:
        At the pad's hottest place, and at its middle as the columns have it; each `[p, h]`.
    contact:
        What the skin felt at the hottest places.
    solved:
        `[h]` heights whose excess comes from a section solve at the height itself.
    near_end:
        `[h]` heights where a pad reaches an end of a layer.
    columns:
        `[p, h]` heights [m] of the columns that stand for the pads.
    """

    run: Run
    pad: Pad
    heights: Floats
    pick_ups: Floats
    times: HoldTimes
    middle: HoldTimes
    contact: Contact
    rims: tuple[Rim, ...]
    solved: Flags
    near_end: Flags
    columns: Floats

    def held_for(self, seconds: float, thick_skin: bool = False) -> Flags:
        """Whether `[p, h]` the cup can be held for so long."""
        times = self.times.thick if thick_skin else self.times.thin
        known = np.where(np.isfinite(times), times, self.times.at_least)
        return np.asarray(known >= seconds)

    def first_comfortable(self, seconds: float, thick_skin: bool = False) -> list[float | None]:
        """For each height the first pick-up [s] from which on the cup can be held so long; None: none."""
        held = self.held_for(seconds, thick_skin)
        tried = (self.run.serving.duration - self.pick_ups) >= seconds
        out: list[float | None] = []
        for column in held.T:
            good = [bool(column[p:][tried[p:]].all()) and tried[p] for p in range(len(column))]
            out.append(float(self.pick_ups[good.index(True)]) if any(good) else None)
        return out

    def band_not_held(self, seconds: float) -> list[tuple[float, float, float] | None]:
        """For each pick-up (pick-up, lowest, highest height) that cannot be held so long; None: all can."""
        out: list[tuple[float, float, float] | None] = []
        for pick_up, held in zip(self.pick_ups, self.held_for(seconds), strict=True):
            bad = self.heights[~held]
            out.append((float(pick_up), float(bad.min()), float(bad.max())) if len(bad) else None)
        return out

    def figures(self) -> HoldFigures:
        """The worst of the map."""
        times = self.times
        thin = _place_of_least(times.thin, times.at_least, self.contact.thin)
        thick = _place_of_least(times.thick, times.at_least, self.contact.thick)
        injury = _place_of_least(times.injury, times.at_least, self.contact.thin)
        rim = self.rims[thin[1]]
        column, middle = float(self.columns[thin]), float(self.heights[thin[1]])
        shift = rim.hottest - rim.height if column == middle else column - middle
        height = middle + shift
        return HoldFigures(
            thin=float(times.thin[thin]),
            thick=float(times.thick[thick]),
            injury=float(times.injury[injury]),
            at_least=float(times.at_least[thin]),
            thick_at_least=float(times.at_least[thick]),
            injury_at_least=float(times.at_least[injury]),
            thin_decided=str(times.thin_decided[thin]),
            thick_decided=str(times.thick_decided[thick]),
            height=height,
            radius=float(self.run.meridian.outer_radius_at(height)),
            layer=self.run.meridian.outer_layer_at(height).name,
            place=self._place(height, shift),
            pick_up=float(self.pick_ups[thin[0]]),
            low=float(self.heights.min()),
            high=float(self.heights.max()),
            skin=self.pad.skin,
            conductance=float(self.contact.conductance[thin[1]]),
        )

    @cached_property
    def contact_range(self) -> list[tuple[float, float]]:
        """Shortest hold time of thin skin [s] at half and at twice the contact conductance, each with the
        time for which it was tried."""
        place = _place_of_least(self.times.thin, self.times.at_least, self.contact.thin)
        usual = float(self.contact.conductance[place[1]])
        out = []
        for factor in (0.5, 2.0):
            contact = touch(
                self.run,
                np.array([self.columns[place]]),
                np.array([self.pick_ups[place[0]]]),
                float(self.contact.time[-1]),
                skin=self.contact.skin,
                conductance=factor * usual,
                gap_resistance=self.pad.gap_resistance,
            )
            times = judge(at_hottest(contact, [self.rims[place[1]]]))
            out.append((float(times.thin[0, 0]), float(times.at_least[0, 0])))
        return out

    def _place(self, height: float, shift: float) -> str:
        """Where on a pad: its rim or within; on a ridged wall also crest or valley."""
        reach = 0.5 * self.pad.width
        name = "pad rim" if abs(abs(shift) - reach) < END_MARGIN else "within the pad"
        if all(layer.ridge is None for layer in self.run.cup.layer):
            return name
        around = PadContact(self.run.meridian, self.pad, height - shift - reach, height - shift + reach)
        return f"{name}, {'crest' if float(around.valley(np.array(height))) <= self.pad.sag else 'valley'}"

    def table(self, thick_skin: bool = False) -> str:
        """Hold time by height (rows) and pick-up (columns) as text, with the cautions."""
        times = self.times.thick if thick_skin else self.times.thin
        skin = "thick skin: 43 degC at 0.5 mm" if thick_skin else "thin skin: 43 degC at 0.1 mm"
        lines = [f"hold time [s], {skin}; rows heights [mm], columns pick-up [s after the pour]"]
        lines.append("        " + "".join(f"{pick_up:>8g}" for pick_up in self.pick_ups))
        for index in np.argsort(self.heights)[::-1]:
            mark = "*" if self.solved[index] else "~" if self.near_end[index] else " "
            cells = [
                _cell(*pair) for pair in zip(times[:, index], self.times.at_least[:, index], strict=True)
            ]
            lines.append(f"{1e3 * self.heights[index]:>7.4g}{mark}" + "".join(cells))
        lines += ["", *self.notes()]
        return "\n".join(lines)

    def _repr_html_(self) -> str:
        return f"<pre>{escape(self.table())}</pre>"

    def notes(self) -> list[str]:
        """What the figures rest on."""
        worst = self.figures()
        out = ["* section solve at this height; > not reached within that time"]
        out.append("~ pad across an end of a layer, a ridge or the level: the hottest column under it")
        out += [f"{name.strip()}: {value}" for name, value in worst.rows()]
        out.append("numerical: below 1 %, by a finer mesh and half the tolerance")
        contact = f"contact conductance {worst.conductance:.4g} W/(m2 K), within half to twice"
        low, high = (_shown(*each) for each in self.contact_range)
        out.append(f"model: skin {self.pad.skin}; {contact}: {high} to {low} (thin skin)")
        out.append(f"surface thresholds: {THRESHOLD_SOURCE}")
        if any(layer.material.surface_class == "board" for layer in self.run.meridian.layers):
            out.append(f"model: {MOISTURE}")
        return [*out, CAUTION]


def _cell(time: float, at_least: float) -> str:
    return f"{_shown(time, at_least, ''):>8}"


def _shown(time: float, at_least: float, unit: str = " s") -> str:
    return f"{time:.3g}{unit}" if np.isfinite(time) else f">{at_least:.3g}{unit}"


def _place_of_least(times: Floats, at_least: Floats, felt: Floats) -> tuple[int, int]:
    """`(p, h)` of the shortest time; where none was reached, of the hottest skin."""
    reached = bool(np.isfinite(times).any())
    flat = np.argmin(times) if reached else np.argmax(felt.max(axis=0))
    pick_up, height = np.unravel_index(int(flat), times.shape)
    return int(pick_up), int(height)


def hold_map(
    run: Run,
    heights: Floats,
    pick_ups: Floats,
    *,
    pad: Pad = DEFAULT_PAD,
    longest: float = LONGEST,
    sections: int = SECTIONS,
    problem: Problem | None = None,
) -> Hold:
    """Hold times at heights [m] and pick-ups [s] of a run.

    Parameters
    ----------
    pad:
        The finger; its height, pick-up and release do not count here.
    longest:
        Longest hold that is tried [s].
    sections:
        Most section solves; at least one for each kind of wall.
    """
    _check_fit(run, heights, pad)
    problem = problem or problem_of(run)
    near_end = np.array([_near_end(run, float(height), pad.width, pick_ups) for height in heights])
    rims, solved = _rims(run, problem, pad, heights, float(np.median(pick_ups)), near_end, sections)
    tried = np.unique(np.concatenate([heights, *_beside(run, heights[near_end & ~solved], pad.width)]))
    columns, even = _columns(run, problem, pad, tried, pick_ups, longest)
    chosen = _under_pads(columns, heights, np.where(near_end & ~solved, 0.5 * pad.width, 0.0))
    contact = columns.chosen(chosen, heights)
    hottest = at_hottest(contact, rims, even.chosen(chosen, heights))
    return Hold(
        run=run,
        pad=pad,
        heights=heights,
        pick_ups=pick_ups,
        times=judge(hottest),
        middle=judge(contact),
        contact=hottest,
        rims=tuple(rims),
        solved=solved,
        near_end=near_end,
        columns=tried[chosen],
    )


def _columns(
    run: Run, problem: Problem, pad: Pad, heights: Floats, pick_ups: Floats, longest: float
) -> tuple[Contact, Contact]:
    """Columns of a map, on flutes and struts the hotter of the even layer and of what is under a crest; and
    those of the even layer."""

    def touched(crest: bool) -> Contact:
        return touch(
            run,
            heights,
            pick_ups,
            longest,
            skin=get_skin(pad.skin),
            conductance=_conductances(problem, pad, heights),
            gap_resistance=pad.gap_resistance,
            problem=problem,
            crest=crest,
        )

    even = touched(False)
    return (hotter(even, touched(True), JUDGED_AT) if repeating(run.cup) else even), even


def _conductances(problem: Problem, pad: Pad, heights: Floats) -> Floats:
    """Contact conductance `[h]` [W/(m2 K)] of pads around heights: full on crests, through air in valleys."""
    reach = 0.5 * pad.width
    low, high = problem.meridian.floor, problem.meridian.height
    return np.array(
        [
            float(PadContact(problem.meridian, pad, max(z - reach, low), min(z + reach, high))(np.array(z)))
            for z in heights
        ]
    )


def _beside(run: Run, heights: Floats, width: float) -> list[Floats]:
    """Heights of the columns beside the middles of pads on an uneven wall [m]."""
    low, high = run.meridian.floor, run.meridian.height
    return [np.clip(heights + share * width, low, high) for share in BESIDE]


def _under_pads(columns: Contact, heights: Floats, reach: Floats) -> NDArray[np.int_]:
    """For each pad the hottest of the columns within its reach `[h]` [m]: `[p, h]`."""
    chosen = np.empty((len(columns.pick_ups), len(heights)), dtype=int)
    warmth = columns.thin[int(np.searchsorted(columns.time, JUDGED_AT)) - 1]
    for index, (height, span) in enumerate(zip(heights, reach, strict=True)):
        within = np.flatnonzero(np.abs(columns.heights - height) <= span + 1e-9)
        chosen[:, index] = within[np.argmax(warmth[:, within], axis=1)]
    return chosen


def fitting(run: Run, width: float) -> tuple[float, float]:
    """Heights [m] between which a pad of a width [m] lies on the wall beside the drink."""
    return run.meridian.floor + 0.5 * width, run.meridian.height - 0.5 * width


def _check_fit(run: Run, heights: Floats, pad: Pad) -> None:
    low, high = fitting(run, pad.width)
    for height in heights:
        if not low - 1e-9 <= height <= high + 1e-9:
            raise InputError(
                "height",
                f"{1e3 * height:.4g} mm",
                f"a pad of {1e3 * pad.width:.3g} mm there reaches beyond the wall beside the drink",
                f'write a height from "{1e3 * low:.4g} mm" to "{1e3 * high:.4g} mm", or a narrower pad',
            )


def _rims(
    run: Run, problem: Problem, pad: Pad, heights: Floats, pick_up: float, near_end: Flags, most: int
) -> tuple[list[Rim], Flags]:
    """Excess for each height, and which heights were solved themselves."""
    kinds = [(_kind(run, float(height)), bool(end)) for height, end in zip(heights, near_end, strict=True)]
    pads = [pad.model_copy(update={"height": float(height), "pick_up": pick_up}) for height in heights]
    ridged = np.array([on_solid_ridges(problem, each) for each in pads])
    chosen = [index for index in _chosen(kinds, most) if not ridged[index]]
    found: dict[int, Rim] = {}
    for index in chosen:
        found[index] = rim_at(run, problem, pads[index])
    rims = []
    for index in range(len(heights)):
        same = [each for each in found if not near_end[each]] if index not in found else [index]
        same = same or list(found)
        if ridged[index] or not same:
            rims.append(no_excess(float(heights[index])))
        else:
            rims.append(found[min(same, key=lambda each: abs(heights[each] - heights[index]))])
    return rims, np.isin(np.arange(len(heights)), chosen)


def _chosen(kinds: Sequence[tuple[tuple[str, ...], bool]], most: int) -> list[int]:
    """Heights to solve: the middle one of each kind, then further ones near ends."""
    chosen = []
    for kind in dict.fromkeys(kinds):
        places = [index for index, each in enumerate(kinds) if each == kind]
        chosen.append(places[len(places) // 2])
    rest = [index for index, kind in enumerate(kinds) if kind[1] and index not in chosen]
    left = max(0, most - len(chosen))
    return sorted(chosen + rest[:: max(1, -(-len(rest) // max(1, left)))][:left])


def _kind(run: Run, height: float) -> tuple[str, ...]:
    return tuple(layer.name for layer in run.meridian.layers if float(layer.thickness_at(height)) > 1e-9)


def _near_end(run: Run, height: float, width: float, pick_ups: Floats) -> bool:
    """Whether a pad at a height reaches an end of a layer within the wall, a ridge, or the drink's level."""
    reach = 0.5 * width + END_MARGIN
    ends = [end for layer in run.meridian.layers for end in (*layer.reach, layer.low, layer.high)]
    ends = [end for end in ends if 1e-6 < end < run.meridian.height - 1e-6]
    ends += [float(level) for level in np.interp(pick_ups, run.time, run.series.drink_level)]
    for layer in run.cup.layer:
        ends += layer.ridge.middles if layer.ridge is not None else ()
    return any(abs(end - height) < reach for end in ends)


def default_heights(run: Run, width: float, count: int = HEIGHTS) -> Floats:
    """Even heights [m] at which a pad of a width [m] lies on the wall beside the drink."""
    return np.linspace(*fitting(run, width), count)


def default_pick_ups(duration: float) -> Floats:
    """Pick-ups [s] within the first two thirds of a serving."""
    given = np.array([pick_up for pick_up in PICK_UPS if pick_up <= 0.67 * duration])
    return given if len(given) else np.array([0.5 * duration])
