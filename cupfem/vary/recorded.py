"""The figures of a case: those of the run's summary, masses and cost, and the margins of the target."""

from __future__ import annotations

import math

from cupfem.axisymmetry import AXISYMMETRIC, volume_moments
from cupfem.breakdown import slab
from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.inputs.messages import did_you_mean
from cupfem.materials import Material
from cupfem.pour import pour
from cupfem.quantities import format_quantity
from cupfem.run import Run
from cupfem.run.headline import verdicts
from cupfem.serving import Serving
from cupfem.vary.cases import CupJob, Figures

TARGET = {"drink_above": "K", "wall_below": "K", "hold_time": "s"}
"""Key of a [target] that asks for something -> unit of its margin, in the order of the verdicts."""
TOUCHED = ("hold_", "injury_")
"""How figures begin that only a run with a finger has, which takes about twice as long."""
ESTIMATED = "slab_"
"""How figures begin that set the one-dimensional estimates beside the run, at half the height of the wall."""
DIGITS = 9
"""Significant digits that are kept. What differs between linear-algebra libraries lies in later ones."""
PROBE = 0.5
"""Fineness of the run that tells which figures there are."""


def pour_case(job: CupJob) -> Figures:
    """Pour a case and return its recorded figures; InputError for a key that is not among them."""
    told = _told(job, job.fineness)
    kept: dict[str, float | None] = {}
    for key in job.recorded:
        if key not in told:
            raise _unknown(key, told)
        kept[key] = _rounded(told[key])
        if told[key] is None and (least := at_least_key(key)) in told:
            kept[least] = _rounded(told[least])
    return kept | {key: _rounded(value) for key, value in told.items() if key.startswith("target_")}


def target_keys(serving: Serving) -> list[str]:
    """Keys of the margins of a serving's target."""
    asked = [key for key in TARGET if getattr(serving.target, key, None) is not None]
    return [f"target_{key}_margin_{TARGET[key]}" for key in asked]


def check_recorded(job: CupJob) -> None:
    """InputError for a key that a run has no figure of, told from a coarse run."""
    told = _told(job, PROBE * job.fineness)
    for key in job.recorded:
        if key not in told:
            raise _unknown(key, told)


def at_least_key(key: str) -> str:
    """The key that tells how long at least, where the time of `key` was not reached."""
    return f"{key.removesuffix('_s')}_at_least_s"


def _told(job: CupJob, fineness: float) -> dict[str, float | None]:
    cup, serving = Cup.from_data(job.cup), Serving.from_data(job.serving)
    touched = any(key.startswith(TOUCHED) for key in job.recorded)
    run = pour(cup, serving, fineness=fineness, companion=False, hold=touched or None)
    told = dict(run.figures())
    for key, value in list(told.items()):
        if value is None and key.endswith("_s"):
            told.setdefault(at_least_key(key), run.serving.duration)
    masses = _masses(run)
    told["mass_g"] = 1e3 * math.fsum(masses.values())
    board = [mass for material, mass in masses.items() if material.surface_class == "board"]
    told["board_mass_g"] = 1e3 * math.fsum(board)
    costs = [None if m.cost_per_kg is None else mass * m.cost_per_kg.value for m, mass in masses.items()]
    told["cost"] = None if None in costs else math.fsum(cost for cost in costs if cost is not None)
    if any(key.startswith(ESTIMATED) for key in job.recorded):
        told |= _estimated(run)
    return told | _margins(run, told)


def _estimated(run: Run) -> dict[str, float | None]:
    """Largest and last error of each rung at mid-wall [K], as slab_a_error_K and slab_a_error_end_K."""
    comparison = slab(run, heights=[format_quantity(0.5 * run.cup.height, "length", digits=DIGITS)])
    told: dict[str, float | None] = {}
    for error in comparison.errors[0]:
        told |= {f"slab_{error.rung}_error_K": error.worst, f"slab_{error.rung}_error_end_K": error.end}
    return told


def _margins(run: Run, told: dict[str, float | None]) -> dict[str, float | None]:
    """How far the target is kept; for a hold time that was not reached only how far at least."""
    margins: dict[str, float | None] = {}
    for key, verdict in zip(target_keys(run.serving), verdicts(run), strict=True):
        margins[key] = verdict.margin
        if verdict.dimension == "time" and told["hold_time_s"] is None:
            margins |= {key: None, at_least_key(key): verdict.margin}
    return margins


def _masses(run: Run) -> dict[Material, float]:
    """Mass of each solid [kg]."""
    mesh, meridian = run.mesh, run.meridian
    parts = [(layer.name, layer.material) for layer in meridian.layers]
    if meridian.base is not None:
        parts.append(("base", meridian.base.material))
    masses: dict[Material, float] = {}
    for name, material in parts:
        if material.kind == "solid":
            volume = volume_moments(mesh, mesh.regions[name], AXISYMMETRIC)[0]
            masses[material] = masses.get(material, 0.0) + volume * material.density.value
    return masses


def _rounded(value: float | None) -> float | None:
    if value is None or not math.isfinite(value):
        return None
    return float(f"{value:.{DIGITS}g}")


def _unknown(key: str, told: dict[str, float | None]) -> InputError:
    known = [name for name in told if not name.startswith("target_")]
    return InputError("record", key, "a run has no such figure", did_you_mean(key, known) or _all(known))


def _all(known: list[str]) -> str:
    return f"the figures are {', '.join(known)}"
