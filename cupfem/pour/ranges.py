"""Which correlations a run used, over which range each was tested, and what the run reached of it."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np
from numpy.typing import NDArray

from cupfem.drink import Lumped, surface_state
from cupfem.films import Applied, applied_range
from cupfem.problem import Problem

Floats = NDArray[np.float64]
Reached = dict[str, Applied]

LEFT = "OUTSIDE: "
"""Begins the line of a correlation whose range a run has left."""


def ranges_reached(
    problem: Problem, times: Floats, fields: Floats, drink_times: Floats, drink_states: Floats
) -> tuple[str, ...]:
    """One line for each correlation and each of its ranges; those that were left begin with `LEFT` and come
    first.

    Parameters: times `[k]` [s] and fields `[k, dof]` of the wall [degC]; times `[t]` and states
    `[t, unknown]` of the drink.
    """
    found: Reached = {}
    left: dict[str, None] = {}
    for time, field in zip(times, fields, strict=True):
        if time > 0.0:  # the jump of the pour is no state that a film sees for any time
            problem.enter(time)
            states = [np.interp(time, drink_times, column) for column in drink_states.T]
            _at_moment(problem, float(time), field, np.array(states), found, left)
    lines = [_line(name, applied) for name, applied in sorted(found.items())]
    return (*left, *sorted(lines, key=lambda line: not line.startswith(LEFT)))


def _at_moment(
    problem: Problem, time: float, field: Floats, state: Floats, found: Reached, left: dict[str, None]
) -> None:
    system = problem.system
    assert system.drink is not None
    drink = system.drink.lumped(state, system.ambient)
    for exchange in system.sections[0].conduction.exchanges:
        points = exchange.points(drink, time)
        if not len(points.weight):
            continue
        given, films = exchange.exchange.surroundings, exchange.exchange.films
        around = given(points.height, time, drink) if callable(given) else given
        surface = points.interpolate(field)
        for film in (films(drink) if callable(films) else films).values():
            _take(found, film.label, applied_range(film, surface, around))
    if drink.present:
        _surface(problem, drink, found)
    left |= dict.fromkeys(_gaps(problem, field))


def _surface(problem: Problem, drink: Lumped, found: Reached) -> None:
    node = problem.system.drink
    assert node is not None
    closure, gas = node.surface.closure, (drink.ambient.temperature, drink.ambient.vapour_pressure)
    if drink.lidded and node.headspace is not None:
        closure, gas = node.headspace.closure, (drink.headspace, drink.vapour_pressure)
    if closure is not None:
        _take(found, closure.label, closure.applied(surface_state(drink, *gas)))


def _gaps(problem: Problem, field: Floats) -> Iterable[str]:
    """Lines of gaps whose convection has left its range."""
    points = problem.mesh.points
    for name, layer in problem.gaps.items():
        faces = problem.mesh.gaps[name]
        inner, outer = (field[face].mean(axis=0) for face in (faces.inner, faces.outer))
        within, without = (points[0, face].mean(axis=0) for face in (faces.inner, faces.outer))
        heights = np.full(len(inner), layer.height)
        for line in layer.gap.out_of_range(inner, outer, within, without, heights):
            yield f"{LEFT}{name}: {line}"


def _take(found: Reached, label: str, applied: Iterable[Applied]) -> None:
    """Widen what was reached so far."""
    for entry in applied:
        name = f"{label}: {entry.validity.quantity}"
        low, high = entry.lowest, entry.highest
        if name in found:
            low, high = min(low, found[name].lowest), max(high, found[name].highest)
        found[name] = Applied(entry.validity, low, high)


def _line(name: str, applied: Applied) -> str:
    tested = f"tested from {applied.validity.low:.3g} to {applied.validity.high:.3g}"
    reached = f"{name} reached {applied.lowest:.3g} to {applied.highest:.3g}, {tested}"
    return reached if applied.inside else LEFT + reached
