"""The steady resistance network: inner film, layers and gaps, outer film, plane or cylindrical.

The network of area resistances is that of Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass
Transfer, 6th ed. 2007, secs. 3.1 (plane) and 3.3 (cylinder). Films and gaps depend on the temperatures that
they set, so the balance of every interface is solved by Newton's method.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from cupfem.errors import ConvergenceError
from cupfem.estimates.station import Face, Station

Floats = NDArray[np.float64]

STEP = 1e-4  # K, of the difference quotients
TOLERANCE = 1e-10  # K, last change of an interface
LONGEST_CHANGE = 30.0  # K, of an interface in one step
MOST_STEPS = 60


@dataclass(frozen=True)
class Steady:
    """A steady wall between two sides, n layers.

    temperature[n + 1] of the interfaces from inside to outside [degC]; resistance[n + 2] of inner film,
    layers and outer film [m2 K/W], and heat_flux [W/m2], both per area of the inner face; radii[n + 1] [m],
    all equal for a plane wall; inside, outside: what the films lead to [degC].
    """

    temperature: Floats
    resistance: Floats
    heat_flux: float
    radii: Floats
    inside: float
    outside: float

    @property
    def overall_coefficient(self) -> float:
        """U [W/(m2 K)], per area of the inner face."""
        return float(1.0 / self.resistance.sum())

    @property
    def outer_heat_flux(self) -> float:
        """Heat flux that leaves the outer face [W/m2]."""
        return self.heat_flux * float(self.radii[0] / self.radii[-1])

    @property
    def outer_coefficient(self) -> float:
        """Film coefficient of the outer face at its temperature [W/(m2 K)]."""
        return float(self.radii[0] / self.radii[-1] / self.resistance[-1])

    @property
    def inner_coefficient(self) -> float:
        """Film coefficient of the inner face at its temperature [W/(m2 K)]."""
        return float(1.0 / self.resistance[0])

    @property
    def heat_flow_per_length(self) -> float:
        """Heat flow through the wall around the cup, per length along it [W/m]; of a cylinder."""
        return 2.0 * np.pi * float(self.radii[0]) * self.heat_flux


def steady(station: Station, inside: float | None = None, plane: bool = False, time: float = 0.0) -> Steady:
    """Steady state of a station with the drink, or the room where dry, held at `inside` [degC].

    Left out: the drink's temperature at the pour. `plane` takes all areas as equal. Raises ConvergenceError
    if Newton's method does not settle.
    """
    held = station.inside if inside is None else inside
    areas = np.ones(len(station.radii)) if plane else np.array(station.radii) / station.radii[0]
    flows = _flows(station, held, areas, plane, time)
    temperature = _balanced(flows, np.linspace(held, station.outside, len(areas) + 2)[1:-1])
    resistance = _resistances(station, held, temperature, areas, plane, time)
    flux = float(flows(temperature)[0])
    return Steady(temperature, resistance, flux, station.radii[0] * areas, held, station.outside)


def _flows(
    station: Station, inside: float, areas: Floats, plane: bool, time: float
) -> Callable[[Floats], Floats]:
    """Heat through inner film, layers and outer film, per area of the inner face, of the interfaces."""

    def flows(temperature: Floats) -> Floats:
        faces = temperature.tolist()
        entering = -station.inner.heat_flux(faces[0], inside, station.height, time)
        leaving = station.outer.heat_flux(faces[-1], station.outside, station.height, time)
        through = [
            areas[n]
            * layer.conductance(faces[n], faces[n + 1], station.radii[n], plane)
            * (faces[n] - faces[n + 1])
            for n, layer in enumerate(station.layers)
        ]
        return np.array([entering, *through, leaving * areas[-1]], dtype=float)

    return flows


def _balanced(flows: Callable[[Floats], Floats], temperature: Floats) -> Floats:
    """Interfaces at which as much heat arrives as leaves, by Newton's method with a limited step."""
    for _ in range(MOST_STEPS):
        here = flows(temperature)
        slopes = np.empty((len(here), len(temperature)))
        for column in range(len(temperature)):
            moved = temperature.copy()
            moved[column] += STEP
            slopes[:, column] = (flows(moved) - here) / STEP
        change = _solved(np.diff(slopes, axis=0), -np.diff(here))
        change *= min(1.0, LONGEST_CHANGE / max(float(np.abs(change).max()), 1e-300))
        temperature = temperature + change
        if float(np.abs(change).max()) < TOLERANCE:
            return temperature
    raise ConvergenceError(f"the steady network has not settled after {MOST_STEPS} steps")


def _solved(matrix: Floats, right_hand_side: Floats) -> Floats:
    try:
        return np.asarray(np.linalg.solve(matrix, right_hand_side))
    except np.linalg.LinAlgError:
        raise ConvergenceError("the steady network has no film on either side") from None


def _resistances(
    station: Station, inside: float, temperature: Floats, areas: Floats, plane: bool, time: float
) -> Floats:
    """Of inner film, layers and outer film, per area of the inner face; infinite where insulated."""
    faces = temperature.tolist()
    layers = [
        areas[n] * layer.conductance(faces[n], faces[n + 1], station.radii[n], plane)
        for n, layer in enumerate(station.layers)
    ]
    inner = _coefficient(station.inner, faces[0], inside, station.height, time)
    outer = areas[-1] * _coefficient(station.outer, faces[-1], station.outside, station.height, time)
    with np.errstate(divide="ignore"):
        return 1.0 / np.array([inner, *layers, outer], dtype=float)


def _coefficient(face: Face, surface: float, around: float, height: float, time: float) -> float:
    """Heat flux over temperature difference [W/(m2 K)]; its slope where the difference vanishes."""
    difference = surface - around
    if abs(difference) < STEP:
        difference = STEP
    return float(face.heat_flux(around + difference, around, height, time)) / difference
