"""What a film is, how far its correlation was tested, and the films without a flow in them.

A film answers the heat flux that leaves a surface [W/m2] from the temperatures of surface and surroundings.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import ClassVar, NamedTuple, Protocol, TypeAlias, runtime_checkable

import numpy as np
from numpy.typing import NDArray
from scipy import constants

from cupfem.errors import InputError
from cupfem.quantities import ZERO_CELSIUS

Values: TypeAlias = float | NDArray[np.float64]

STEFAN_BOLTZMANN = constants.sigma  # W/(m2 K4); CODATA, exact since the SI of 2019
GRAVITY = constants.g  # m/s2; standard acceleration, 3rd CGPM 1901
SMOOTHING = 0.05  # K; see `rounded_difference`


@runtime_checkable
class Film(Protocol):
    """Anything that answers the heat flux leaving a surface."""

    @property
    def label(self) -> str: ...

    @property
    def source(self) -> str: ...

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        """Heat flux [W/m2] that leaves the surface.

        Temperatures [degC], height above the table [m], time [s].
        """
        ...


@dataclass(frozen=True)
class Validity:
    """The range in which a correlation was tested, as data; unknown ends are infinite."""

    quantity: str
    low: float
    high: float

    def complaint(self, reached_low: float, reached_high: float) -> str:
        """One line if the reached range leaves the tested one, else an empty string."""
        if reached_low >= self.low and reached_high <= self.high:
            return ""
        reached = f"{reached_low:.3g} to {reached_high:.3g}"
        return f"{self.quantity} reached {reached}, tested from {self.low:.3g} to {self.high:.3g}"


class Applied(NamedTuple):
    """A range of validity and what was reached of it."""

    validity: Validity
    lowest: float
    highest: float

    @property
    def inside(self) -> bool:
        return not self.complaint

    @property
    def complaint(self) -> str:
        return self.validity.complaint(self.lowest, self.highest)


@runtime_checkable
class Ranged(Protocol):
    """A film whose correlation has a range."""

    def applied(self, surface: Values, surroundings: Values) -> list[Applied]: ...


def applied_range(film: Film, surface: Values, surroundings: Values) -> list[Applied]:
    """What these temperatures [degC] reach of the ranges of `film`; an empty list where it has none."""
    return film.applied(surface, surroundings) if isinstance(film, Ranged) else []


def reached(validity: Validity, values: Values) -> Applied:
    return Applied(validity, float(np.min(values)), float(np.max(values)))


def rounded_difference(difference: Values, width: float = SMOOTHING) -> Values:
    """Absolute value of a difference, rounded at zero: sqrt(d^2 + width^2).

    Natural convection goes as d^1.25, and its coefficient has no slope at d = 0. With the rounded
    difference the coefficient is smooth and even in d, so the flux is smooth and odd. For a coefficient
    that goes as d^n the error is n/2 (width/d)^2: with width 0.05 K and n = 1/4, 3e-4 of the coefficient at
    1 K and 3e-6 at 10 K; at d = width it is 9 %, of a flux near 0.1 W/m2.
    """
    rounded: Values = np.hypot(difference, width)
    return rounded


def upward_share(difference: Values, width: float) -> Values:
    """Smooth step from 0 (difference << -width) to 1 (difference >> width), 1/2 at zero."""
    return 0.5 + 0.5 * difference / rounded_difference(difference, width)


def smooth_maximum(first: Values, second: Values, width: Values) -> Values:
    """The larger of two, rounded over `width` where they cross; too high by width/2 there, less elsewhere."""
    larger: Values = 0.5 * (first + second + np.hypot(first - second, width))
    return larger


def require_positive(what: str, value: float, unit: str) -> None:
    if not 0.0 < value < math.inf:
        raise InputError(what, f"{value:g} {unit}", "must be positive and finite", "use a measured length")


def require_share(what: str, value: float) -> None:
    if not 0.0 <= value <= 1.0:
        raise InputError(what, value, "must be from 0 to 1", "write 0.9")


@dataclass(frozen=True)
class FixedFilm:
    """A film with one given coefficient: heat flux = coefficient (surface - surroundings).

    Parameters: coefficient [W/(m2 K)]. Newton's law of cooling; the number is the user's own.
    """

    coefficient: float
    label: str = "fixed film"
    source: str = "given by the user"

    def __post_init__(self) -> None:
        if not 0.0 <= self.coefficient < math.inf:
            shown = f"{self.coefficient:g} W/(m2 K)"
            raise InputError("film coefficient", shown, "must be zero or positive", 'write "10 W/(m^2 K)"')

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        return self.coefficient * (surface - surroundings)


@dataclass(frozen=True)
class FluxFunction:
    """A film from a Python function of (surface, surroundings, height, time).

    The function returns the heat flux that leaves the surface [W/m2], for scalars and arrays alike, from
    temperatures in degC, the height above the table [m] and the time [s]. It should have a continuous slope.
    """

    function: Callable[[Values, Values, Values, float], Values]
    label: str = "function"
    source: str = "given by the user"

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        return self.function(surface, surroundings, height, time)


@dataclass(frozen=True)
class FilmSum:
    """Films side by side on one surface with the same surroundings, such as convection and radiation."""

    films: tuple[Film, ...]

    @property
    def label(self) -> str:
        return " + ".join(film.label for film in self.films)

    @property
    def source(self) -> str:
        return "; ".join(film.source for film in self.films)

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        first, *others = self.films
        total = first.heat_flux(surface, surroundings, height, time)
        for film in others:
            total = total + film.heat_flux(surface, surroundings, height, time)
        return total

    def applied(self, surface: Values, surroundings: Values) -> list[Applied]:
        return [entry for film in self.films for entry in applied_range(film, surface, surroundings)]


@dataclass(frozen=True)
class Radiation:
    """Radiation from a small gray convex surface to large surroundings at one temperature.

    Formula: heat flux = emissivity sigma (Ts^4 - Tsur^4), temperatures in kelvin.
    Parameters: emissivity [-], total hemispherical, 0 to 1.
    Returns: net flux that leaves the surface [W/m2]; exact, not linearised.
    Range: gray, diffuse, surroundings much larger than the cup; no range in temperature.
    Example: Incropera, 6th ed., Example 9.4: 0.85, 165 degC in 23 degC, D = 0.1 m, 441 W per metre of tube.
    Reference: Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass Transfer, 6th ed., 2007,
    Eq. 1.7.
    """

    emissivity: float
    label: ClassVar[str] = "radiation"
    source: ClassVar[str] = "Incropera et al., Fundamentals of Heat and Mass Transfer, 6th ed. 2007, Eq. 1.7"

    def __post_init__(self) -> None:
        require_share("emissivity", self.emissivity)

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        return self.emissivity * STEFAN_BOLTZMANN * fourth_power_difference(surface, surroundings)


def fourth_power_difference(first: Values, second: Values) -> Values:
    """Ta^4 - Tb^4 [K4] from temperatures in degC, factored so that small differences keep their digits."""
    a, b = first + ZERO_CELSIUS, second + ZERO_CELSIUS
    return (first - second) * (a + b) * (a * a + b * b)
