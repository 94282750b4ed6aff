"""Conductance of the gap between two walls: gas, radiation and the share that touches.

All conductances are referred to the inner face of the gap [W/(m2 K)], temperatures in degC. As a
conductivity of the cells between the faces, k = h r_in ln(r_out / r_in). Along the gap only the gas
conducts.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray
from scipy import constants

from cupfem.errors import InputError
from cupfem.fluids import (
    GAS_CONSTANT_AIR,
    STANDARD_PRESSURE,
    air_conductivity,
    air_density,
    air_transport,
)
from cupfem.quantities import ZERO_CELSIUS

Values: TypeAlias = float | NDArray[np.float64]

STEFAN_BOLTZMANN = constants.sigma  # W/(m2 K4); CODATA, exact since the SI of 2019
GRAVITY = constants.g  # m/s2; standard acceleration, 3rd CGPM 1901
HEAT_CAPACITY_RATIO = 1.4  # diatomic gas
CONTACT_CONDUCTANCE = (
    100.0  # W/(m2 K); dry board on board, 50 to 200, scoping estimate from paper on metal, see `Gap`
)
# air on technical surfaces, 0.87 to 0.97; Wiedmann and Trumpler, Trans. ASME 68 (1946) 57, from memory
ACCOMMODATION = 0.87
THINNEST_GAP = 0.05e-3  # m; thinner gaps are a contact; engineering choice, no source
STILL_GAS = 100.0  # Rayleigh number below which convection adds less than 1e-8 to conduction; not computed
LARGEST_RAYLEIGH = 2e7
ASPECTS = (5.0, 110.0)  # height over width


def exchange_factor(inner_emissivity: float, outer_emissivity: float, radius_ratio: Values = 1.0) -> Values:
    """Radiation between two concentric gray diffuse cylinders, per area of the inner one.

    Formula: 1/E = 1/e_in + (1 - e_out)/e_out r_in/r_out
    Parameters: emissivities of the inner and the outer face [-]; radius_ratio r_in/r_out [-], 1 for
    parallel plates.
    Returns: exchange factor E [-]; zero if either face is a perfect mirror.
    Range: long cylinders, or any gap thin against its height.
    Example: Incropera Ex. 13.5, p. 834: 0.02 inside 0.05 m tube: 0.50 W/m between 77 and 300 K.
    Reference: Incropera et al., Fundamentals of Heat and Mass Transfer, 6th ed. 2007, Eq. 13.20.
    """
    if inner_emissivity == 0.0 or outer_emissivity == 0.0:
        return 0.0 * radius_ratio
    return 1.0 / (1.0 / inner_emissivity + (1.0 - outer_emissivity) / outer_emissivity * radius_ratio)


def radiation_conductance(first: Values, second: Values, factor: Values) -> Values:
    """Radiation as a conductance [W/(m2 K)], exact: E sigma (Ta + Tb)(Ta^2 + Tb^2); temperatures in degC."""
    a, b = first + ZERO_CELSIUS, second + ZERO_CELSIUS
    return factor * STEFAN_BOLTZMANN * ((a + b) * (a * a + b * b))


def temperature_jump_length(
    temperature: Values, pressure: float, accommodation: float = ACCOMMODATION
) -> Values:
    """Distance by which a wall seems to lie farther away in a thin gas.

    Formula: g = (2 - a)/a 2 gamma/(gamma + 1) lambda/Pr, lambda = (mu/p) sqrt(pi R T/2); computed as
    lambda/Pr = k/(c p) sqrt(pi R T/2)
    Parameters: temperature [degC], pressure [Pa], thermal accommodation coefficient a [-].
    Returns: jump length [m] of one wall.
    Range: slip flow; through the whole range of pressures as the interpolation of Sherman (1963).
    Example: with a = 1 the conductance k/(d + 2 g) goes to the free-molecular value as p goes to 0.
    Reference: Smoluchowski 1898; Kennard, Kinetic Theory of Gases, 1938, sec. 178; both from memory, not
    re-checked.
    """
    ratio = 2.0 * HEAT_CAPACITY_RATIO / (HEAT_CAPACITY_RATIO + 1.0)
    speed = np.sqrt(0.5 * math.pi * GAS_CONSTANT_AIR * (temperature + ZERO_CELSIUS))
    conductivity, _, specific_heat = air_transport(temperature)
    path = conductivity / specific_heat * speed / pressure
    return (2.0 - accommodation) / accommodation * ratio * path


def free_molecular_conductance(temperature: Values, pressure: float) -> Values:
    """Conductance of a gas too thin for collisions, walls of accommodation 1 [W/(m2 K)].

    Formula: h = (gamma + 1)/(gamma - 1) sqrt(R / (8 pi M T)) p
    Parameters: temperature [degC], pressure [Pa].
    Returns: conductance [W/(m2 K)], independent of the width.
    Range: mean free path much larger than the gap.
    Example: air at 300 K: 1.17 W/(m2 K) per Pa.
    Reference: Knudsen 1911; Kennard 1938; Dushman, Scientific Foundations of Vacuum Technique; from memory,
    not re-checked.
    """
    share = (HEAT_CAPACITY_RATIO + 1.0) / (HEAT_CAPACITY_RATIO - 1.0)
    kelvin = temperature + ZERO_CELSIUS
    return share * pressure * np.sqrt(GAS_CONSTANT_AIR / (8.0 * math.pi * kelvin))


def gas_conductance(
    temperature: Values,
    inner_radius: Values,
    outer_radius: Values,
    pressure: float = STANDARD_PRESSURE,
    accommodation: float = ACCOMMODATION,
) -> Values:
    """Conduction through the gas of an annulus with a temperature jump at both faces.

    Formula: 1/h = r_in ln(r_out/r_in)/k + g/k (1 + r_in/r_out); for a thin gap h = k/(d + 2 g)
    Parameters: mean temperature [degC], radii [m], pressure [Pa], accommodation [-].
    Returns: conductance [W/(m2 K)], per area of the inner face.
    Range: any pressure from the free-molecular limit up; exact in both limits, Sherman's interpolation
    between.
    Example: air, 330 K, 3 mm, a = 1: 9.53 W/(m2 K) at 1e5 Pa, 5.15 at 10 Pa, 0.0112 at 0.01 Pa.
    Reference: see `temperature_jump_length`; Sherman 1963 (from memory, not re-checked).
    """
    if pressure == 0.0:
        return 0.0 * temperature * inner_radius
    width = inner_radius * np.log(outer_radius / inner_radius)
    jump = temperature_jump_length(temperature, pressure, accommodation) * (1.0 + inner_radius / outer_radius)
    return air_conductivity(temperature) / (width + jump)


def nusselt_tall_cavity(rayleigh: Values, aspect: Values) -> Values:
    """Natural convection across a tall vertical air gap, isothermal sides.

    Formula: the largest of 0.0605 Ra^(1/3), {1 + [0.104 Ra^0.293 / (1 + (6310/Ra)^1.36)]^3}^(1/3), 0.242
    (Ra/A)^0.272
    Parameters: rayleigh on the width [-], aspect A = height over width [-].
    Returns: Nusselt number [-], mean; 1 without convection.
    Range: A 5 to 110, Ra up to 2e7 (`LARGEST_RAYLEIGH`, `ASPECTS`); plane, air.
    Example: A = 40: 1.30 at Ra = 1e4, 3.00 at 1e5.
    Reference: ElSherbiny, Raithby and Hollands, J. Heat Transfer 104 (1982) 96-102; from memory, not
    re-checked.
    """
    if np.max(rayleigh) < STILL_GAS:
        return 1.0 + 0.0 * rayleigh
    positive = np.maximum(rayleigh, 1e-3)  # the conduction branch has Ra below the line
    conduction = 0.104 * np.power(positive, 0.293) / (1.0 + np.power(6310.0 / positive, 1.36))
    core = np.cbrt(1.0 + conduction * conduction * conduction)
    turbulent = 0.0605 * np.cbrt(positive)
    return np.maximum(np.maximum(turbulent, core), 0.242 * np.power(positive / aspect, 0.272))


def nusselt_tall_cavity_iso15099(rayleigh: Values, aspect: Values) -> Values:
    """Natural convection across a tall vertical air gap, the form of the window standard.

    Formula: the larger of 0.242 (Ra/A)^0.272 and 0.0673838 Ra^(1/3) above Ra = 5e4, 0.028154 Ra^0.4134 from
    1e4, 1 + 1.7596678e-10 Ra^2.2984755 below
    Parameters, returns: as `nusselt_tall_cavity`.
    Range: A from 5, Ra up to 2e7.
    Example: A = 40: 1.275 at Ra = 1e4, 3.13 at 1e5.
    Reference: ISO 15099:2003, sec. 5.3.3.2, as given by the open library Modelica Buildings,
    convectionVerticalCavity.
    """
    low = 1.0 + 1.7596678e-10 * np.power(rayleigh, 2.2984755)
    middle = 0.028154 * np.power(rayleigh, 0.4134)
    high = 0.0673838 * np.cbrt(rayleigh)
    core = np.where(rayleigh <= 1e4, low, np.where(rayleigh <= 5e4, middle, high))
    return np.maximum(core, 0.242 * np.power(rayleigh / aspect, 0.272))


def gap_rayleigh(inner: Values, outer: Values, width: Values, pressure: float) -> Values:
    """Rayleigh number of the gas in a gap on its width, air at the mean temperature; temperatures in degC."""
    mean = 0.5 * (inner + outer)
    density = air_density(mean, pressure)
    buoyancy = GRAVITY * np.abs(inner - outer) / (mean + ZERO_CELSIUS)
    conductivity, viscosity, specific_heat = air_transport(mean)
    heat_capacity = density * density * specific_heat
    return buoyancy * heat_capacity * (width * width * width) / (viscosity * conductivity)


@dataclass(frozen=True)
class Gap:
    """A gap between two walls of a cup: gas, radiation and the share of its area that touches.

    Formula: h = (1 - f)(Nu h_gas + h_radiation) + f h_contact, referred to the inner face, over
    `resistance_factor`.
    Parameters: emissivities of the faces [-]; contact_fraction f [-]; contact_conductance [W/(m2 K)] of the
    share that touches (dry board on board 100, 50 to 200: scoping estimate from paper on metal, 97 to 200
    at 2.3 kPa, J. Heat Transfer 114 (1992) 326, abstract); pressure of the gas [Pa]; thermal accommodation
    [-]; resistance_factor [-], below 1 when a grip presses the gap together (the mesh stays as it is);
    thinnest [m]: below it the whole gap is a contact.
    Range: `out_of_range`. Plane correlation for the convection; no moisture in the gap.
    Reference: the functions of this module.
    """

    emissivity_inner: float
    emissivity_outer: float
    contact_fraction: float = 0.0
    contact_conductance: float = CONTACT_CONDUCTANCE
    pressure: float = STANDARD_PRESSURE
    accommodation: float = ACCOMMODATION
    resistance_factor: float = 1.0
    thinnest: float = THINNEST_GAP

    def __post_init__(self) -> None:
        for what in ("emissivity_inner", "emissivity_outer", "contact_fraction"):
            require_share(what.replace("_", " "), getattr(self, what))
        if not 0.0 < self.accommodation <= 1.0:
            raise InputError("accommodation", self.accommodation, "must be above 0 and up to 1", "write 0.87")
        if not 0.0 <= self.pressure < math.inf:
            raise InputError(
                "gap pressure", f"{self.pressure:g} Pa", "must be zero or positive", 'write "0.1 Pa"'
            )
        if not 0.0 < self.resistance_factor <= 1.0:
            raise InputError(
                "resistance factor", self.resistance_factor, "must be above 0 and up to 1", "write 0.5"
            )
        if not 0.0 <= self.contact_conductance < math.inf:
            shown = f"{self.contact_conductance:g} W/(m2 K)"
            raise InputError(
                "contact conductance", shown, "must be zero or positive", 'write "100 W/(m^2 K)"'
            )

    def pressed(self, resistance_factor: float) -> Gap:
        """The same gap with its resistance scaled."""
        return replace(self, resistance_factor=resistance_factor)

    def conductance(
        self,
        inner: Values,
        outer: Values,
        inner_radius: Values,
        outer_radius: Values,
        height: Values = math.inf,
    ) -> Values:
        """Conductance [W/(m2 K)] per area of the inner face; face temperatures [degC], radii and height of
        the gap [m].

        Without a height the gap is taken as tall, which leaves out the flow that starts at the ends of a
        wide gap.
        """
        width = outer_radius - inner_radius
        mean = 0.5 * (inner + outer)
        gas = gas_conductance(mean, inner_radius, outer_radius, self.pressure, self.accommodation)
        nusselt = nusselt_tall_cavity(gap_rayleigh(inner, outer, width, self.pressure), height / width)
        factor = exchange_factor(self.emissivity_inner, self.emissivity_outer, inner_radius / outer_radius)
        open_part = nusselt * gas + radiation_conductance(inner, outer, factor)
        touching = np.where(width < self.thinnest, 1.0, self.contact_fraction)
        return ((1.0 - touching) * open_part + touching * self.contact_conductance) / self.resistance_factor

    def through_conductivity(
        self,
        inner: Values,
        outer: Values,
        inner_radius: Values,
        outer_radius: Values,
        height: Values = math.inf,
    ) -> Values:
        """Conductivity [W/(m K)] across the gap that its cells must have; arguments as `conductance`."""
        conductance = self.conductance(inner, outer, inner_radius, outer_radius, height)
        return conductance * inner_radius * np.log(outer_radius / inner_radius)

    def along_conductivity(self, temperature: Values, width: Values | None = None) -> Values:
        """Conductivity [W/(m K)] along the gap: the gas alone; with a width [m] reduced in a thin gas."""
        if self.pressure == 0.0:
            return 0.0 * temperature
        conductivity = air_conductivity(temperature)
        if width is None:
            return conductivity
        jump = temperature_jump_length(temperature, self.pressure, self.accommodation)
        return conductivity * width / (width + 2.0 * jump)

    def out_of_range(
        self, inner: Values, outer: Values, inner_radius: Values, outer_radius: Values, height: Values
    ) -> list[str]:
        """One line for each range of the convection that is left; arguments as `conductance`."""
        width = outer_radius - inner_radius
        rayleigh, aspect = np.broadcast_arrays(
            gap_rayleigh(inner, outer, width, self.pressure), height / width
        )
        counts = nusselt_tall_cavity(rayleigh, aspect) > 1.001
        lines = []
        if np.any(rayleigh > LARGEST_RAYLEIGH):
            most = float(np.max(rayleigh))
            lines.append(f"Rayleigh number (gap) reached {most:.3g}, tested up to {LARGEST_RAYLEIGH:.3g}")
        if np.any(counts & ((aspect < ASPECTS[0]) | (aspect > ASPECTS[1]))):
            low, high = float(np.min(aspect[counts])), float(np.max(aspect[counts]))
            reached = f"{low:.3g} to {high:.3g}, tested from {ASPECTS[0]:.3g} to {ASPECTS[1]:.3g}"
            lines.append(f"height over width (gap) reached {reached}")
        return lines


def require_share(what: str, value: float) -> None:
    if not 0.0 <= value <= 1.0:
        raise InputError(what, value, "must be from 0 to 1", "write 0.9")
