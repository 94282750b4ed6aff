"""A run in a folder: arrays in `run.npz`, the inputs as resolved beside it."""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass
from pathlib import Path
from typing import ClassVar

import numpy as np
from numpy.typing import NDArray

from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.films import Values
from cupfem.inputs import resolved_toml
from cupfem.meridian import build as build_meridian
from cupfem.mesh import build as build_mesh
from cupfem.run.pad_store import pad_arrays, pads_from
from cupfem.run.result import Ledger, Run, Series, faces_of
from cupfem.run.touched import HoldFigures
from cupfem.serving import Serving

Floats = NDArray[np.float64]

SERIES = ("time", "drink_temperature", "drink_level", "drink_mass", "outer_temperature", "inner_temperature")
TOLD = ("fineness", "tolerance", "time_error")


@dataclass(frozen=True)
class LostFilm:
    """A film that Python gave to the run; a folder cannot keep it."""

    edge: str
    label: ClassVar[str] = "own film"
    source: ClassVar[str] = "given in Python"

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        """Refuse: InputError."""
        raise InputError(
            f"films.{self.edge}",
            None,
            "given in Python, and a run folder cannot keep it",
            "pour again with the same film and use that run",
        )


def save_run(run: Run, folder: str | Path) -> None:
    """Write arrays and inputs so that `load_run` gives the run back."""
    folder = Path(folder)
    with (folder / "run.npz").open("wb") as file:
        np.savez_compressed(file, allow_pickle=False, **_arrays(run))
    (folder / "cup.toml").write_text(resolved_toml(run.cup), encoding="utf-8")
    (folder / "serving.toml").write_text(resolved_toml(run.serving), encoding="utf-8")


def load_run(folder: str | Path) -> Run:
    """Read a run folder back; InputError if it is none."""
    folder = Path(folder)
    if not (folder / "run.npz").is_file():
        raise InputError(
            "run folder", str(folder), "it holds no run.npz", "name a folder that `cupfem pour` wrote"
        )
    cup, serving = Cup.load(folder / "cup.toml"), Serving.load(folder / "serving.toml")
    with np.load(folder / "run.npz", allow_pickle=False) as stored:
        arrays = dict(stored)
    told = json.loads(str(arrays.pop("told")))
    meridian = build_meridian(cup)
    mesh = build_mesh(meridian, told["fineness"])
    powers = {name.removeprefix("power/"): arrays[name] for name in arrays if name.startswith("power/")}
    return Run(
        cup=cup,
        serving=serving,
        meridian=meridian,
        mesh=mesh,
        faces=faces_of(mesh, meridian),
        series=Series(powers=powers, **{name: arrays[name] for name in SERIES}),
        snapshot_times=arrays["snapshot_times"],
        snapshots=arrays["snapshots"],
        final_state=arrays["final_state"],
        drink_states=arrays["drink_states"],
        ledger=Ledger(**told["ledger"]),
        counters=told["counters"],
        space_errors=told["space_errors"],
        defaults=tuple(told["defaults"]),
        ranges=tuple(told["ranges"]),
        accuracy=told.get("accuracy"),
        touch=None if told["touch"] is None else HoldFigures(**told["touch"]),
        pads=pads_from(arrays, serving.pad),
        films={edge: LostFilm(edge) for edge in told["films"]},
        **{name: told[name] for name in TOLD},
    )


def _arrays(run: Run) -> dict[str, Floats]:
    arrays = {name: getattr(run.series, name) for name in SERIES}
    arrays |= {f"power/{name}": values for name, values in run.series.powers.items()}
    arrays |= {
        "snapshot_times": run.snapshot_times,
        "snapshots": run.snapshots,
        "final_state": run.final_state,
        "drink_states": run.drink_states,
    }
    ledger = run.ledger
    told = {name: getattr(run, name) for name in TOLD}
    told["ledger"] = {
        "out": dict(ledger.out),
        "stored": dict(ledger.stored),
        "drink": ledger.drink,
        "to_drink": ledger.to_drink,
    }
    told |= {"counters": dict(run.counters), "space_errors": dict(run.space_errors)}
    told["accuracy"] = run.accuracy
    told |= {"defaults": list(run.defaults), "ranges": list(run.ranges), "films": list(run.films)}
    told["touch"] = None if run.touch is None else asdict(run.touch)
    return arrays | pad_arrays(run.pads) | {"told": np.array(json.dumps(told))}
