"""The drink against time, and where the heat went."""

from __future__ import annotations

from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from cupfem.edges import INTERNAL
from cupfem.figures import style
from cupfem.quantities import Units
from cupfem.run import Run
from cupfem.run.headline import WARM

Floats = NDArray[np.float64]

GROUPS = {
    "vapour": "evaporation",
    "surface convection": "surface: convection",
    "surface radiation": "surface: radiation",
    "outside convection": "outer wall: convection",
    "outside radiation": "outer wall: radiation",
    "dry wall convection": "dry wall inside",
    "dry wall radiation": "dry wall inside",
    "underside": "underside and table",
    "lid convection": "lid: convection",
    "lid radiation": "lid: radiation",
}
"""Term of the ledger -> what a picture calls it; another term keeps its name."""
COLOURS = {
    "evaporation": "#0b6e99",
    "surface: convection": "#4aa3c7",
    "surface: radiation": "#7b6bb3",
    "outer wall: convection": "#b3541e",
    "outer wall: radiation": "#d98b2b",
    "dry wall inside": "#5f8f4e",
    "underside and table": "#7a6a58",
    "lid: convection": "#8a3a6b",
    "lid: radiation": "#c26aa0",
    "air through the lid": "#3f7f7a",
    "hand": "#c0392b",
}
OTHER = "#444b54"
LIQUID = ("sips", "refills")
"""Terms that go with drink that is taken out or poured in."""
NOT_LOST = frozenset({*LIQUID, *INTERNAL})
"""Terms that are no loss of heat to the room: liquid, and flows between parts of the cup."""
FIRST = 1.0
"""Start of the time axis of the heat flows [s]; before it the jump of the pour goes off the scale."""


def drink_figure(run: Run, units: Units = "si") -> Figure:
    """Temperature of the drink, and below it what is left of it, on the same time axis."""
    series = run.series
    figure = style.new_figure(8.0, 4.8, f"{run.cup.title}: drink, {run.serving.title}")
    upper = style.add_axes(figure, 0.75, 2.15, 0.35, 0.6)
    lower = style.add_axes(figure, 0.75, 0.6, 0.35, 2.85)
    temperature = style.shown(series.drink_temperature, "temperature", units)
    upper.plot(run.time, temperature, color=style.DRINK, linewidth=1.9)
    style.label_axes(upper, "", f"drink [{style.unit_sign('temperature', units)}]")
    _end_labels(upper, run.time, temperature, style.unit_sign("temperature", units))
    _mark_crossings(upper, run, units)
    level = style.shown(series.drink_level, "length", units)
    lower.plot(run.time, level, color=style.DRINK, linewidth=1.9)
    style.label_axes(lower, "time after the pour", f"level [{style.unit_sign('length', units)}]")
    lower.set_ylim(
        style.shown(run.meridian.floor, "length", units), style.shown(run.meridian.height, "length", units)
    )
    volume = style.quantity(run.meridian.volume(float(series.drink_level[0])), "volume", units)
    lower.set_title(
        f"{volume} poured; bottom: floor, top: brim", size=style.SMALL, loc="right", color=style.QUIET
    )
    for axes in (upper, lower):
        style.even_time(axes, run.serving.duration)
    upper.tick_params(labelbottom=False)
    return figure


def _end_labels(axes: Axes, time: Floats, values: Floats, unit: str) -> None:
    known = np.flatnonzero(~np.isnan(values))
    if not len(known):
        return
    low, high = axes.get_ylim()
    axes.set_ylim(low - 0.16 * (high - low), high + 0.12 * (high - low))
    for index, shift, align, side in ((known[0], 6, "left", "bottom"), (known[-1], -6, "right", "top")):
        axes.annotate(
            f"{values[index]:.1f} {unit}", (time[index], values[index]), (shift, shift),
            textcoords="offset points", size=style.NORMAL, ha=align, va=side, color=style.DRINK,
        )  # fmt: skip


def _mark_crossings(axes: Axes, run: Run, units: Units) -> None:
    """When the drink falls below the temperatures that the table tells."""
    told = run.figures()
    for limit in WARM:
        time = told[f"drink_below_{limit:.0f}_degC_s"]
        if time is None or time <= 0.0:
            continue
        value = style.shown(limit, "temperature", units)
        axes.plot([time], [value], "o", color=style.DRINK, markersize=5)
        text = f"below {style.degrees(limit, units)} after {style.clock(float(f'{time:.3g}'))}"
        late = time > 0.6 * run.serving.duration
        place: dict[str, Any] = {"ha": "right", "va": "top"} if late else {"ha": "left", "va": "bottom"}
        shift = (-6, -4) if late else (6, 4)
        axes.annotate(text, (time, value), shift, textcoords="offset points", size=style.SMALL, **place)


def heat_figure(run: Run, units: Units = "si") -> Figure:
    """Heat flows against time at the left, heats over the whole run at the right."""
    figure = style.new_figure(11.4, 4.9, f"{run.cup.title}: where the heat goes", _drunk_note(run, units))
    _flows(style.add_axes(figure, 0.75, 0.8, 5.95, 0.75), run, units)
    _totals(style.add_axes(figure, 8.35, 0.8, 0.75, 0.75), run, units)
    return figure


def grouped_flows(run: Run) -> dict[str, Floats]:
    """Heat flows `[t]` [W] that leave cup and drink, as a picture calls them."""
    flows: dict[str, Floats] = {}
    for name, power in run.series.powers.items():
        if name not in NOT_LOST:
            group = GROUPS.get(name, name)
            flows[group] = flows[group] + power if group in flows else power
    return flows


def grouped_heats(run: Run) -> dict[str, float]:
    """Heats [J] that left cup and drink over the run, and what the cup took up; largest first."""
    heats: dict[str, float] = {}
    for name, heat in run.ledger.out.items():
        if name not in NOT_LOST:
            heats[GROUPS.get(name, name)] = heats.get(GROUPS.get(name, name), 0.0) + heat
    heats["stored in the cup"] = float(sum(run.ledger.stored.values()))
    return dict(sorted(heats.items(), key=lambda item: -item[1]))


def _flows(axes: Axes, run: Run, units: Units) -> None:
    late = run.time >= min(FIRST, 0.1 * run.serving.duration) * (1 - 1e-9)
    flows = {name: style.shown(flow, "heat_flow", units) for name, flow in grouped_flows(run).items()}
    colours = [COLOURS.get(name, OTHER) for name in flows]
    for flow, colour in zip(flows.values(), colours, strict=True):
        axes.plot(run.time[late], flow[late], color=colour, linewidth=1.7)
    style.log_time(axes, float(run.time[late][0]), run.serving.duration)
    highest = max((float(flow[late].max()) for flow in flows.values()), default=1.0)
    lowest = min((float(flow[late].min()) for flow in flows.values()), default=0.0)
    axes.set_ylim(min(0.0, 1.05 * lowest), 1.05 * highest)
    style.label_axes(axes, "time after the pour", f"heat flow [{style.unit_sign('heat_flow', units)}]")
    axes.set_title("against time", y=1.0, size=style.NORMAL, loc="left")
    style.label_right(axes, [float(flow[-1]) for flow in flows.values()], list(flows), colours)


def _totals(axes: Axes, run: Run, units: Units) -> None:
    heats = grouped_heats(run)
    total = sum(heats.values())
    rows = np.arange(len(heats))[::-1]
    widths = [style.shown(heat, "energy", units) for heat in heats.values()]
    axes.barh(rows, widths, color=[COLOURS.get(name, OTHER) for name in heats], height=0.62)
    axes.set_yticks(rows, list(heats), size=style.SMALL)
    axes.grid(False, axis="y")
    for row, width, heat in zip(rows, widths, heats.values(), strict=True):
        text = f" {width:.2f}, {_percent(heat / total)}" if total else f" {width:.2f}"
        axes.text(max(width, 0.0), row, text, size=style.SMALL, va="center", color=style.INK)
    axes.set_xlim(min(0.0, 1.1 * min(widths)), 1.3 * max(widths))
    axes.set_xlabel(f"heat over the run [{style.unit_sign('energy', units)}]", size=style.NORMAL)
    axes.set_title(
        f"over {style.clock(run.serving.duration)}, without what was drunk", size=style.NORMAL, loc="left"
    )


def _percent(share: float) -> str:
    return f"{100 * share:.0f} %" if abs(share) >= 0.01 else f"{100 * share:.1f} %"


def _drunk_note(run: Run, units: Units) -> str:
    words = ("went with what was drunk", "came with refills")
    heats = [abs(run.ledger.out.get(name, 0.0)) for name in LIQUID]
    told = [f"{shown_energy(heat, units)} {what}" for heat, what in zip(heats, words, strict=True) if heat]
    return f"{', '.join(told)} (counted from 0 °C)." if told else "Nothing was drunk."


def shown_energy(heat: float, units: Units) -> str:
    """A heat [J] with three digits in the unit of the pictures."""
    return f"{style.shown(heat, 'energy', units):.3g} {style.unit_sign('energy', units)}"
