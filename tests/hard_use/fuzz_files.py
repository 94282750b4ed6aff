"""Pour random cup and serving files, good and broken; report tracebacks, hangs and nonsense.

    python tests/hard_use/fuzz_files.py --count 10000 --seed 1 --keep /tmp/fuzz

Each case is known by seed and number, so that one can be rerun alone: --only NUMBER. With --keep the files
of cases with a fault are kept. A coarse tolerance is enough here: what is looked for is not accuracy. Time is
that of the processor, so that a busy machine is not taken for a hang.
"""

from __future__ import annotations

import argparse
import random
import signal
import sys
import time
import traceback
import warnings
from collections import Counter
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from types import FrameType

import numpy as np

HERE = Path(__file__).parent
sys.path[:0] = [str(HERE), str(HERE.parent)]

from random_files import draw  # noqa: E402

import cupfem  # noqa: E402
from cupfem import fluids  # noqa: E402
from cupfem.exchange.summary import summary_json  # noqa: E402
from cupfem.inputs import resolved_toml  # noqa: E402

FINENESS, TOLERANCE = 1.0, 0.05
LONGEST = 10.0  # s of the processor
UNDERSHOOT, LEAST_UNDERSHOOT = 0.15, 0.1
"""Share of the jump at the pour, and kelvins at the least, by which the field may pass the bounds.

The projection of a jump on a mesh that cannot resolve it passes it by (2 - sqrt 3) / 2 = 13.4 % with linear
elements (solution of the tridiagonal system of their mass matrix; derived). In this search second-order ones
passed it by less at the default fineness, and by up to 20 % of the jump at half of it and below.
"""
LEDGER = 5e-4
"""Largest residual as a share of the drink's heat, on top of `JOULES`.

At this tolerance the iteration leaves up to 2e-4 (measured), at the default one ten times less; a term that
is lost makes 1e-3 and more.
"""
JOULES = 1e-2
FAULTS = (
    ArithmeticError, AssertionError, AttributeError, LookupError, MemoryError, NameError, OSError,
    RuntimeError, TypeError, ValueError, Warning,
)  # fmt: skip
"""What would show a traceback; a warning too."""


class HangError(Exception):
    """A case took longer than it may."""


@contextmanager
def at_most(seconds: float) -> Iterator[None]:
    """Stop what runs within once it has used so much time of the processor."""

    def stop(number: int, frame: FrameType | None) -> None:
        raise HangError

    before = signal.signal(signal.SIGPROF, stop)
    signal.setitimer(signal.ITIMER_PROF, seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_PROF, 0.0)
        signal.signal(signal.SIGPROF, before)


def files(seed: int, number: int) -> tuple[str, str]:
    """Cup and serving file of one case."""
    return draw(random.Random(f"{seed}/{number}"))


def outcome(cup_text: str, serving_text: str) -> tuple[str, str]:
    """What a case came to: "ran", "refused", "not converged", or a fault; and more about it."""
    try:
        with at_most(LONGEST), warnings.catch_warnings():
            warnings.simplefilter("error")
            cup, serving = cupfem.Cup.from_text(cup_text), cupfem.Serving.from_text(serving_text)
            run = cupfem.pour(cup, serving, fineness=FINENESS, tolerance=TOLERANCE, companion=False)
            wrong = nonsense(run) + [f"{name}: its resolved file reads differently" for name in _unlike(run)]
            summary_json(run), run.summary()
    except cupfem.InputError as error:
        return ("refused", str(error)) if "\n" not in str(error) else ("more than a line", str(error))
    except cupfem.ConvergenceError as error:
        return "not converged", str(error)
    except HangError:
        return "hang", f"longer than {LONGEST:g} s"
    except FAULTS:
        return "traceback", traceback.format_exc()
    return ("nonsense", "; ".join(wrong)) if wrong else ("ran", "")


def _unlike(run: cupfem.Run) -> list[str]:
    """Which of cup and serving is another one after it was written with all its defaults and read again."""
    models = {"cup": run.cup, "serving": run.serving}
    return [name for name, model in models.items()
            if type(model).from_text(resolved_toml(model)).model_dump() != model.model_dump()]  # fmt: skip


def nonsense(run: cupfem.Run) -> list[str]:
    """What of a run cannot be, in words."""
    low, high = bounds(run.serving)
    series, told = run.series, []
    slack = max(LEAST_UNDERSHOOT, UNDERSHOOT * (high - low))
    gone = np.isnan(series.drink_temperature)
    if np.any(gone[:-1] & ~gone[1:]) and not run.serving.refills() and run.serving.drink.pour is None:
        told.append("the drink comes back")
    for name, values in (
        ("drink", series.drink_temperature[~gone]),
        ("outer wall", series.outer_temperature),
        ("inner wall", series.inner_temperature),
        ("field", run.snapshots),
    ):
        if not np.all(np.isfinite(values)):
            told.append(f"{name}: not a number")
        elif values.size and not (values.min() >= low - slack and values.max() <= high + slack):
            told.append(
                f"{name}: {values.min():.2f} to {values.max():.2f} degC, bounds {low:.2f}, {high:.2f}"
            )
    if np.nanmin(series.drink_mass, initial=0.0) < 0.0:
        told.append(f"mass {np.nanmin(series.drink_mass):.3g} kg")
    if abs(run.ledger.residual) > JOULES + LEDGER * abs(run.ledger.drink):
        told.append(f"ledger open by {run.ledger.residual:.3g} J of {run.ledger.drink:.3g} J")
    return told


def bounds(serving: cupfem.Serving) -> tuple[float, float]:
    """The wet bulb of the coldest room, or a source that is colder still, and the hottest source [degC]."""
    rooms = [temperature for _, temperature in serving.room.steps]
    fixed = [getattr(serving.films, edge) for edge in type(serving.films).model_fields]
    given = [film.surroundings for film in fixed if getattr(film, "surroundings", None) is not None]
    poured = [serving.drink.temperature, *(temperature for *_, temperature in serving.refills())]
    sources = [*rooms, *given, *poured, serving.start_temperature]
    skin = [33.0, 37.0] if serving.pad else []
    wet = [float(fluids.wet_bulb(room, serving.room.humidity, serving.room.pressure)) for room in rooms]
    return min(*wet, *sources), max(sources + skin)


def main() -> int:
    """Go through the cases; 1 where one had a fault."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--count", type=int, default=200)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--first", type=int, default=0)
    parser.add_argument("--only", type=int)
    parser.add_argument("--keep", type=Path)
    given = parser.parse_args()
    numbers = range(given.first, given.first + given.count) if given.only is None else [given.only]
    kinds: Counter[str] = Counter()
    slowest = 0.0
    for number in numbers:
        texts, begun = files(given.seed, number), time.process_time()
        kind, more = outcome(*texts)
        seconds = time.process_time() - begun
        slowest = max(slowest, seconds)
        kinds[kind] += 1
        if kind not in ("ran", "refused") or given.only is not None:
            print(f"{number}: {kind} after {seconds:.1f} s: {more}", flush=True)
            _keep(given.keep, number, texts)
    print(f"{sum(kinds.values())} cases: {dict(kinds)}; slowest {slowest:.1f} s of the processor")
    return int(set(kinds) - {"ran", "refused"} != set())


def _keep(folder: Path | None, number: int, texts: tuple[str, str]) -> None:
    if folder is None:
        return
    folder.mkdir(parents=True, exist_ok=True)
    for name, text in zip(("cup", "serving"), texts, strict=True):
        (folder / f"{number}_{name}.toml").write_text(text, encoding="utf-8", errors="replace")


if __name__ == "__main__":
    sys.exit(main())
