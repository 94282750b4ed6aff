"""Pour a serving into a cup and march it to its end."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.films import Film
from cupfem.inputs import defaults_used
from cupfem.march import March
from cupfem.pour.grip import Grip
from cupfem.pour.ranges import ranges_reached
from cupfem.pour.record import Recorder, series_times, snapshot_times
from cupfem.problem import Problem, build
from cupfem.run import Run, faces_of
from cupfem.run.error_bars import LEAST, space_errors, worst_temperature
from cupfem.serving import Serving
from cupfem.touch.verdict import verdict

Floats = NDArray[np.float64]

TOLERANCE = 5e-3
"""Local error of a time step [K]; the largest error of the tube job's tabulated temperatures is then about
0.01 K."""
COMPANION = 0.5
"""Fineness of the companion run that estimates the space error, relative to the run's."""
MOST_FINER, LEAST_TOLERANCE = 4.0, 1e-5
"""How far an asked accuracy is pursued: four times the fineness is sixteen times the cells."""
LESS = 0.1
"""Factor on the tolerance where the time error is too large."""


def pour(
    cup: Cup,
    serving: Serving | None = None,
    *,
    fineness: float = 1.0,
    tolerance: float = TOLERANCE,
    films: Mapping[str, Film] | None = None,
    companion: bool = True,
    hold: bool | None = None,
    accuracy: float | None = None,
    progress: Callable[[float], None] | None = None,
) -> Run:
    """Run a serving.

    Parameters
    ----------
    fineness:
        Cells per length relative to the default.
    tolerance:
        Local error of a time step [K].
    films:
        Edge ("wetted", "dry", "outside", "underside", "heel", "brim") -> a film that replaces the serving's,
        for instance `FluxFunction(f)`; it sees the drink on "wetted", elsewhere the room.
    companion:
        Run a coarser companion too, from which the space error is told.
    hold:
        Judge how long the cup can be held; left out: with a companion, with pads, or with a target for it.
    accuracy:
        Largest numerical error of the temperatures among the headline figures [K]. Fineness and tolerance are
        then the first ones to be tried, and made finer until it is met; the run says if it could not.
    progress:
        Called with the time [s] after each step.

    Raises
    ------
    InputError
        If cup and serving do not go together.
    ConvergenceError
        If the march cannot go on.
    """
    serving = serving or Serving()
    films = dict(films or {})

    def march(fineness: float, tolerance: float, tell: Callable[[float], None] | None = None) -> Run:
        return _march(cup, serving, films, fineness, tolerance, tell)

    coarse: Run | None
    if accuracy is not None:
        run, coarse = _to_accuracy(march, fineness, tolerance, _positive(accuracy))
    else:
        run = march(fineness, tolerance, progress)
        coarse = march(fineness * COMPANION, tolerance) if companion else None
    asked = serving.target is not None and serving.target.hold_time is not None
    if companion or serving.pad or asked if hold is None else hold:
        run = replace(run, touch=verdict(run, coarse))
    return run if coarse is None else _with_space_errors(run, coarse)


def _positive(accuracy: float) -> float:
    if not 0.0 < accuracy < np.inf:
        raise InputError("accuracy", f"{accuracy:g} K", "must be more than zero", "write for example 0.1")
    return accuracy


def _to_accuracy(
    march: Callable[[float, float], Run], fineness: float, tolerance: float, accuracy: float
) -> tuple[Run, Run]:
    """The first run whose temperatures are as exact as asked, or the finest that was tried; its companion."""
    finest = MOST_FINER * fineness
    coarse, run = march(fineness * COMPANION, tolerance), march(fineness, tolerance)
    while True:
        space, time = worst_temperature(_with_space_errors(run, coarse))
        if space + time <= accuracy or accuracy <= LEAST:
            break
        if time > max(0.5 * accuracy, LEAST) and tolerance > LEAST_TOLERANCE:
            tolerance *= LESS
            coarse, run = march(fineness * COMPANION, tolerance), march(fineness, tolerance)
        elif fineness < finest:
            fineness /= COMPANION
            coarse, run = run, march(fineness, tolerance)
        else:
            break
    return replace(run, accuracy=accuracy), coarse


def _march(
    cup: Cup,
    serving: Serving,
    films: Mapping[str, Film],
    fineness: float,
    tolerance: float,
    progress: Callable[[float], None] | None,
) -> Run:
    problem = build(cup, serving, fineness, films)
    grip = Grip(problem, fineness, films)
    faces = faces_of(problem.mesh, problem.meridian)
    times = series_times(serving.duration, serving.breaks())
    state = problem.start
    unknowns = len(problem.system.drink_state(state))
    recorder = Recorder(problem.system, faces, times, snapshot_times(serving.duration), unknowns)
    march = March(problem.system, tolerance)
    before = problem.system.stored(state)
    time = 0.0
    for end in [*serving.breaks(), serving.duration]:
        problem.enter(time)
        state = _regrip(grip, state, time, recorder)
        march.system = problem.system
        recorder.start(problem.system, state, time)
        grip.start(state, time, recorder.snapshot_times)
        for step in march.run(state, time, end):
            recorder.add(problem.system, step)
            grip.add(step, recorder.snapshot_times)
            state = step.after
            if progress is not None:
                progress(step.end)
        state = _sip(problem, state, end, recorder)
        time = end
    state = _regrip(grip, state, time, recorder)
    return Run(
        cup=problem.cup,
        serving=serving,
        fineness=fineness,
        tolerance=tolerance,
        meridian=problem.meridian,
        mesh=problem.mesh,
        faces=faces,
        series=recorder.series(),
        snapshot_times=snapshot_times(serving.duration),
        snapshots=recorder.snapshots,
        ledger=recorder.ledger(before, problem.system.stored(state)),
        counters=vars(march.counters),
        time_error=recorder.time_error,
        defaults=(*defaults_used(problem.cup), *defaults_used(serving)),
        final_state=state,
        drink_states=recorder.drink_states,
        films=films,
        pads=grip.results(),
        ranges=_ranges(problem, recorder),
    )


def _ranges(problem: Problem, recorder: Recorder) -> tuple[str, ...]:
    drink = (recorder.series().time, recorder.drink_states)
    return ranges_reached(problem, recorder.snapshot_times, recorder.snapshots, *drink)


def _regrip(grip: Grip, state: Floats, time: float, recorder: Recorder) -> Floats:
    """The state after fingers let go and touch at a break."""
    state, heat = grip.change(state, time)
    recorder.add_heat(heat)
    return state


def _sip(problem: Problem, state: Floats, time: float, recorder: Recorder) -> Floats:
    """The state after all that happens at a moment: sips, refills, the lid."""
    state, heats = problem.jump(state, time)
    recorder.add_heat(heats)
    return state


def _with_space_errors(run: Run, coarse: Run) -> Run:
    return run.with_space_errors(space_errors(run.figures(), coarse.figures(), run.serving.duration))
