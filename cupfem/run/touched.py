"""The short verdict of touch that a run carries."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class HoldFigures:
    """Hold times [s] at the hottest place of a pad, infinite where not reached; the worst of all asked.

    Attributes
    ----------
    thin, thick:
        Earliest of pain at 0.1 mm (at 0.5 mm), injury, and published surface threshold.
    injury:
        Earliest release after which the damage integral reaches 1.
    at_least, thick_at_least, injury_at_least:
        What can be said where none was reached.
    thin_decided, thick_decided:
        What decided.
    height, radius, layer, place, pick_up:
        Where and when it is worst: height on the inside face and radius of the outer face [m], outermost
        layer, place on the pad, pick-up [s].
    low, high:
        Heights that were asked for [m].
    skin, conductance:
        Which skin, and the contact conductance there [W/(m2 K)].
    """

    thin: float
    thick: float
    injury: float
    at_least: float
    thick_at_least: float
    injury_at_least: float
    thin_decided: str
    thick_decided: str
    height: float
    radius: float
    layer: str
    place: str
    pick_up: float
    low: float
    high: float
    skin: str
    conductance: float

    def figures(self) -> dict[str, float | None]:
        """Keys of the summary: a time that was not reached is None, beside the time it was tried for."""
        out: dict[str, float | None] = {}
        for name, value, at_least in (
            ("hold_time", self.thin, self.at_least),
            ("hold_time_thick_skin", self.thick, self.thick_at_least),
            ("injury_time", self.injury, self.injury_at_least),
        ):
            reached = bool(np.isfinite(value))
            out[f"{name}_s"] = value if reached else None
            out[f"{name}_at_least_s"] = None if reached else at_least
        out["hold_time_height_mm"] = 1e3 * self.height
        out["hold_time_radius_mm"] = 1e3 * self.radius
        out["hold_time_pick_up_s"] = self.pick_up
        return out

    def rows(self) -> list[tuple[str, str]]:
        """Rows of the table of headline figures."""
        span = f"{1e3 * self.low:.3g} to {1e3 * self.high:.3g} mm high"
        thin = f"{told(self.thin, self.at_least)} (thin skin, {self.thin_decided})"
        thick = f"{told(self.thick, self.thick_at_least)} (thick skin, {self.thick_decided})"
        height = f"{self.place}, {1e3 * self.height:.3g} mm high"
        where = f"{height}, {self.layer}, {self.pick_up:.3g} s after the pour"
        return [
            (f"can be held, {span}", f"{thin} to {thick}"),
            ("  shortest at", where),
            ("injury in thin skin after", told(self.injury, self.injury_at_least)),
        ]


def told(time: float, at_least: float) -> str:
    """A time as text, or how long it was tried for."""
    return f"{time:.3g} s" if np.isfinite(time) else f"more than {at_least:.3g} s"
