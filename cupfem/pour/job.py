"""Pour a serving into a cup and march it to its end."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from cupfem.cup import Cup
from cupfem.films import Film
from cupfem.inputs import defaults_used
from cupfem.march import March
from cupfem.pour.grip import Grip
from cupfem.pour.ranges import ranges_reached
from cupfem.pour.record import Recorder, series_times, snapshot_times
from cupfem.problem import Problem, build
from cupfem.run import Run, faces_of
from cupfem.serving import Serving
from cupfem.touch.verdict import verdict

Floats = NDArray[np.float64]

TOLERANCE = 5e-3
"""Local error of a time step [K]; the largest error of the tube job's tabulated temperatures is then about
0.01 K."""
COMPANION = 0.5
"""Fineness of the companion run that estimates the space error, relative to the run's."""
COMPANION_GAIN = 3.0
"""Factor by which the error falls from the companion to the run at the least (second order; the elements'
own is higher)."""
TEMPERATURES = ("drink_end_degC", "outer_max_degC", "outer_end_max_degC")


def pour(
    cup: Cup,
    serving: Serving | None = None,
    *,
    fineness: float = 1.0,
    tolerance: float = TOLERANCE,
    films: Mapping[str, Film] | None = None,
    companion: bool = True,
    hold: bool | None = None,
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
    run = _march(cup, serving, films, fineness, tolerance, progress)
    coarse = _march(cup, serving, films, fineness * COMPANION, tolerance, None) if companion else None
    asked = serving.target is not None and serving.target.hold_time is not None
    if companion or serving.pad or asked if hold is None else hold:
        run = replace(run, touch=verdict(run, coarse))
    return run if coarse is None else run.with_space_errors(_space_errors(run, coarse))


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


def _space_errors(run: Run, coarse: Run) -> dict[str, float]:
    fine, other = run.figures(), coarse.figures()
    errors = {}
    for name in TEMPERATURES:
        a, b = fine[name], other[name]
        if a is not None and b is not None:
            errors[name] = abs(a - b) / COMPANION_GAIN
    return errors
