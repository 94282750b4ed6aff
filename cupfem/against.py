"""Hold times as rows of a table, and several cups in the same serving side by side."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from cupfem.drawing import survey
from cupfem.errors import InputError
from cupfem.quantities import Units, format_quantity
from cupfem.run import CAUTION, MOISTURE, Run, headline
from cupfem.run.touched import told
from cupfem.touch.holding import Hold
from cupfem.touch.verdict import grip_band

MOST = 5
"""Cups that one cup is set against at the most: more columns do not fit a page."""
ASKED = 30.0
"""Hold time [s] that is asked for where neither a command nor a target says one: from counter to table."""
COARSE = 0.5
"""Fineness of the survey for the mass: volumes of a mesh do not depend on it."""
PICK_UPS = (10.0, 60.0, 240.0)
"""Pick-ups [s] whose hold times stand in the table."""
ROWS, COLUMNS = 10, 6
"""Heights and pick-ups of the table on a terminal; `hold.csv` has all."""


@dataclass(frozen=True)
class Candidate:
    """One cup of the comparison, and its map of hold times where one was made."""

    run: Run
    hold: Hold | None = None

    @property
    def title(self) -> str:
        """The cup's title."""
        return self.run.cup.title


Row = tuple[str, list[str]]


def check_number(cups: Sequence[object]) -> None:
    """InputError for more cups than fit side by side."""
    if len(cups) > MOST:
        raise InputError(
            "--against", len(cups), f"at most {MOST} cups fit side by side", "leave some out, or use a plan"
        )


def side_by_side(candidates: Sequence[Candidate], asked: float, units: Units = "si") -> list[Row]:
    """Rows of the table: what, and one cell for each cup; `asked` is the hold time [s] of the last rows."""
    rows: list[tuple[str, Callable[[Candidate], str]]] = [
        ("mass of the solids", lambda each: _mass(each, units)),
        *_headlines(candidates[0], units),
        ("can be held, thin skin", lambda each: _held(each, "thin")),
        ("  thick skin", lambda each: _held(each, "thick")),
        ("  decided by", lambda each: "" if each.run.touch is None else each.run.touch.thin_decided),
    ]
    if all(each.hold is not None for each in candidates):
        rows += _from_maps(asked)
    for index in range(len(headline.verdicts(candidates[0].run))):
        rows.append(_verdict_row(candidates[0], index, units))
    return [(what, [tell(each) for each in candidates]) for what, tell in rows]


def first_comfortable_in_grip(hold: Hold, asked: float) -> float | None:
    """First pick-up [s] from which on the whole grip band can be held for `asked` seconds; None: none."""
    low, high = grip_band(hold.run)
    inside = (hold.heights >= low - 1e-9) & (hold.heights <= high + 1e-9)
    moments = [moment for moment, in_it in zip(hold.first_comfortable(asked), inside, strict=True) if in_it]
    known = [moment for moment in moments if moment is not None]
    return max(known) if moments and len(known) == len(moments) else None


def in_grip(hold: Hold, pick_up: float) -> str:
    """Shortest hold time of the grip band at the pick-up of the map that is nearest, thin to thick skin."""
    row = int(np.argmin(np.abs(hold.pick_ups - pick_up)))
    low, high = grip_band(hold.run)
    inside = (hold.heights >= low - 1e-9) & (hold.heights <= high + 1e-9)
    if not inside.any():
        return "-"
    at_least = float(hold.times.at_least[row, inside].max())
    thin, thick = (float(times[row, inside].min()) for times in (hold.times.thin, hold.times.thick))
    return f"{told(thin, at_least)} to {told(thick, at_least)}"


def hold_heads(hold: Hold, units: Units) -> list[str]:
    """Heads of the table of hold times: the height and the pick-ups that are shown."""
    return ["height", *(f"{hold.pick_ups[p]:g} s" for p in _spaced(len(hold.pick_ups), COLUMNS))]


def hold_rows(hold: Hold, units: Units) -> list[list[str]]:
    """Rows of the table from the brim down: hold times, thin to thick skin, of some heights and pick-ups."""
    rows = []
    for h in _spaced(len(hold.heights), ROWS)[::-1]:
        mark = "*" if hold.solved[h] else "~" if hold.near_end[h] else ""
        height = format_quantity(float(hold.heights[h]), "length", units) + mark
        rows.append([height, *(_cell(hold, p, h) for p in _spaced(len(hold.pick_ups), COLUMNS))])
    return rows


def hold_answers(hold: Hold, asked: float, units: Units) -> list[tuple[str, str]]:
    """What the map says: the band that cannot be held, the first comfortable moment, the worst place."""
    return [
        *_bands(hold, asked, units),
        (f"grip band can be held {asked:g} s from", _first(Candidate(hold.run, hold), asked)),
        *hold.figures().rows(),
    ]


def hold_grounds(hold: Hold) -> list[str]:
    """What the hold times rest on: the notes of the map without what stands elsewhere."""
    told_elsewhere = {f"{name.strip()}: {value}" for name, value in hold.figures().rows()}
    return [note for note in hold.notes() if note not in {*told_elsewhere, CAUTION, f"model: {MOISTURE}"}]


def _bands(hold: Hold, asked: float, units: Units) -> list[tuple[str, str]]:
    """The band that cannot be held, with one row for pick-ups that share it."""
    rows: list[tuple[str, str]] = []
    for pick_up, band in zip(hold.pick_ups, hold.band_not_held(asked), strict=True):
        ends = [] if band is None else [format_quantity(end, "length", units) for end in band[1:]]
        shown = "none" if band is None else " to ".join(ends)
        if not rows or rows[-1][1] != shown:
            rows.append((f"cannot be held {asked:g} s, picked up from {pick_up:g} s on", shown))
    return rows


def _cell(hold: Hold, p: int, h: int) -> str:
    times = hold.times
    bound = float(times.at_least[p, h])
    thin, thick = (
        f"{time:.3g}" if np.isfinite(time) else f">{bound:.3g}"
        for time in (times.thin[p, h], times.thick[p, h])
    )
    return thin if thin == thick else f"{thin}..{thick}"


def _spaced(count: int, most: int) -> list[int]:
    """At most `most` of `count` places, evenly spread, with the first and the last."""
    return sorted({round(place) for place in np.linspace(0, count - 1, min(count, most))})


def _headlines(first: Candidate, units: Units) -> list[tuple[str, Callable[[Candidate], str]]]:
    """The rows of the headline figures, without those of touch, whose words differ from cup to cup."""
    count = len(headline.rows(first.run, first.run.figures(), units))
    count -= 0 if first.run.touch is None else len(first.run.touch.rows())

    def tell(index: int) -> Callable[[Candidate], str]:
        return lambda each: headline.rows(each.run, each.run.figures(), units)[index][1]

    names = [name for name, _ in headline.rows(first.run, first.run.figures(), units)[:count]]
    return [(name, tell(index)) for index, name in enumerate(names)]


def _from_maps(asked: float) -> list[tuple[str, Callable[[Candidate], str]]]:
    def at(pick_up: float) -> Callable[[Candidate], str]:
        return lambda each: "" if each.hold is None else in_grip(each.hold, pick_up)

    rows: list[tuple[str, Callable[[Candidate], str]]] = [
        (f"grip band, picked up after {pick_up:g} s", at(pick_up)) for pick_up in PICK_UPS
    ]
    return [*rows, (f"grip band can be held {asked:g} s from", lambda each: _first(each, asked))]


def _first(each: Candidate, asked: float) -> str:
    if each.hold is None:
        return ""
    moment = first_comfortable_in_grip(each.hold, asked)
    return f"not within {each.hold.pick_ups[-1]:g} s" if moment is None else f"{moment:g} s after the pour"


def _mass(each: Candidate, units: Units) -> str:
    return format_quantity(survey(each.run.cup, COARSE).mass, "mass", units)


def _held(each: Candidate, skin: str) -> str:
    touch = each.run.touch
    if touch is None:
        return ""
    return told(touch.thin, touch.at_least) if skin == "thin" else told(touch.thick, touch.thick_at_least)


def _verdict_row(first: Candidate, index: int, units: Units) -> tuple[str, Callable[[Candidate], str]]:
    asked = headline.verdicts(first.run)[index].asked

    def tell(each: Candidate) -> str:
        line = headline.verdict_line(headline.verdicts(each.run)[index], units)
        return f"{line[:4]} {line.rpartition('margin ')[2]}"

    return asked.partition(", shortest")[0], tell
