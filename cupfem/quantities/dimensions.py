"""The kinds of quantity, their usual units with factors to SI, and the units they are shown in.

Factors are exact by definition (BIPM, The International System of Units, 9th ed., 2019; NIST SP 811, 2008,
appendix B.8); Btu is the International Table Btu, the ream of basis weight has 3000 ft^2.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import Literal

ZERO_CELSIUS = 273.15  # K, exact by definition of the degree Celsius (SI brochure, 9th ed., section 2.3.1)

Units = Literal["si", "us"]

INCH, FOOT = 0.0254, 0.3048  # m
POUND = 0.45359237  # kg
FLUID_OUNCE = 231 * INCH**3 / 128  # m^3, US: the gallon is 231 cubic inches
BTU = 1055.05585262  # J, International Table
KELVIN_PER_DEGF = 5 / 9
PSI = POUND * 9.80665 / INCH**2  # Pa


@dataclass(frozen=True)
class Dimension:
    """One kind of quantity."""

    units: dict[str, float]  # unit -> factor to SI
    shown: dict[Units, str]  # "um<1e-4, mm<1, m": um below 1e-4 (in SI), mm below 1, else m
    examples: tuple[str, ...]


def _dimension(units: dict[str, float], si: str, us: str, *examples: str) -> Dimension:
    return Dimension(units, {"si": si, "us": us}, examples)


_TIME = "s<600, min<7200, h"

DIMENSIONS: dict[str, Dimension] = {
    "length": _dimension(
        {
            "mm": 1e-3, "cm": 1e-2, "m": 1.0, "um": 1e-6, "km": 1e3,
            "mil": INCH / 1000, "thou": INCH / 1000, "in": INCH, "inch": INCH, "ft": FOOT,
        },
        "um<1e-4, mm<1, m", "mil<2.54e-3, in", "0.35 mm", "18 mil",
    ),
    "area": _dimension(
        {"mm^2": 1e-6, "cm^2": 1e-4, "m^2": 1.0, "in^2": INCH**2, "ft^2": FOOT**2},
        "mm^2<1e-5, cm^2<1, m^2", "in^2", "1.2 cm^2",
    ),
    "volume": _dimension(
        {
            "ml": 1e-6, "mL": 1e-6, "cl": 1e-5, "l": 1e-3, "L": 1e-3, "mm^3": 1e-9, "cm^3": 1e-6, "m^3": 1.0,
            "fl_oz": FLUID_OUNCE, "fl oz": FLUID_OUNCE, "in^3": INCH**3,
        },
        "ml<1e-2, l<1, m^3", "fl_oz", "250 ml", "12 fl_oz",
    ),
    "time": _dimension(
        {"s": 1.0, "ms": 1e-3, "min": 60.0, "h": 3600.0, "day": 86400.0}, _TIME, _TIME, "20 min", "45 s"
    ),
    "temperature": _dimension(
        {"degC": 1.0, "degF": KELVIN_PER_DEGF, "K": 1.0}, "degC", "degF", "85 degC", "185 degF"
    ),
    "temperature_difference": _dimension(
        {"K": 1.0, "delta_degC": 1.0, "delta_degF": KELVIN_PER_DEGF}, "K", "delta_degF", "3 K"
    ),
    "speed": _dimension(
        {"m/s": 1.0, "cm/s": 1e-2, "mm/s": 1e-3, "km/h": 1 / 3.6, "ft/s": FOOT, "ft/min": FOOT / 60},
        "m/s", "ft/s", "0.1 m/s",
    ),
    "conductivity": _dimension(
        {"W/(m K)": 1.0, "mW/(m K)": 1e-3, "Btu/(h ft degF)": BTU / (3600 * FOOT * KELVIN_PER_DEGF)},
        "W/(m K)", "Btu/(h ft degF)", "0.09 W/(m K)",
    ),
    "specific_heat": _dimension(
        {
            "J/(kg K)": 1.0, "kJ/(kg K)": 1e3, "J/(g K)": 1e3,
            "Btu/(lb degF)": BTU / (POUND * KELVIN_PER_DEGF),
        },
        "J/(kg K)", "Btu/(lb degF)", "1400 J/(kg K)",
    ),
    "density": _dimension(
        {"kg/m^3": 1.0, "g/cm^3": 1e3, "g/ml": 1e3, "lb/ft^3": POUND / FOOT**3},
        "kg/m^3", "lb/ft^3", "620 kg/m^3",
    ),
    "grammage": _dimension(
        {
            "g/m^2": 1e-3, "gsm": 1e-3, "kg/m^2": 1.0,
            "lb/3000 ft^2": POUND / (3000 * FOOT**2), "lb/1000 ft^2": POUND / (1000 * FOOT**2),
        },
        "g/m^2", "lb/3000 ft^2", "300 g/m^2",
    ),
    "film_coefficient": _dimension(
        {
            "W/(m^2 K)": 1.0, "kW/(m^2 K)": 1e3,
            "Btu/(h ft^2 degF)": BTU / (3600 * FOOT**2 * KELVIN_PER_DEGF),
        },
        "W/(m^2 K)", "Btu/(h ft^2 degF)", "400 W/(m^2 K)",
    ),
    "heat_flux": _dimension(
        {"W/m^2": 1.0, "kW/m^2": 1e3, "W/cm^2": 1e4, "Btu/(h ft^2)": BTU / (3600 * FOOT**2)},
        "W/m^2", "Btu/(h ft^2)", "500 W/m^2",
    ),
    "pressure": _dimension(
        {
            "Pa": 1.0, "hPa": 100.0, "kPa": 1e3, "MPa": 1e6, "mbar": 100.0, "bar": 1e5, "atm": 101325.0,
            "psi": PSI,
        },
        "Pa<1e4, kPa", "psi", "101.325 kPa",
    ),
    "mass": _dimension(
        {"mg": 1e-6, "g": 1e-3, "kg": 1.0, "oz": POUND / 16, "lb": POUND}, "g<1, kg", "oz", "9.3 g"
    ),
    "mass_flow": _dimension(
        {"kg/s": 1.0, "g/s": 1e-3, "g/min": 1e-3 / 60, "kg/h": 1 / 3600, "lb/h": POUND / 3600},
        "g/s", "lb/h", "0.02 g/s",
    ),
    "volume_flow": _dimension(
        {
            "m^3/s": 1.0, "l/s": 1e-3, "ml/s": 1e-6, "ml/min": 1e-6 / 60, "l/min": 1e-3 / 60,
            "fl_oz/s": FLUID_OUNCE, "fl_oz/min": FLUID_OUNCE / 60,
        },
        "ml/s", "fl_oz/s", "50 ml/s",
    ),
    "viscosity": _dimension({"Pa s": 1.0, "mPa s": 1e-3, "cP": 1e-3}, "mPa s", "cP", "0.35 mPa s"),
    "energy": _dimension({"J": 1.0, "kJ": 1e3, "MJ": 1e6, "Btu": BTU}, "J<1e4, kJ", "Btu", "20 kJ"),
    "heat_flow": _dimension({"W": 1.0, "mW": 1e-3, "kW": 1e3, "Btu/h": BTU / 3600}, "W", "Btu/h", "19 W"),
    "thermal_resistance": _dimension(
        {"m^2 K/W": 1.0, "h ft^2 degF/Btu": 3600 * FOOT**2 * KELVIN_PER_DEGF / BTU},
        "m^2 K/W", "h ft^2 degF/Btu", "0.04 m^2 K/W",
    ),
    "angle": _dimension({"rad": 1.0, "deg": math.pi / 180}, "deg", "deg", "7 deg"),
    "fraction": _dimension({"": 1.0, "%": 0.01}, "%", "%", "20 %"),
}  # fmt: skip


def canonical(unit: str, dimension: str) -> str:
    """One spelling for the many of a unit: "W/(m^2 degC)" and "W/m2/K" both become "W/m^2/K".

    Outside the dimension "temperature" a degree is a difference, so degC and delta_degC become K there.
    """
    text = re.sub(r"(?<=[A-Za-z])(?=-?[0-9])", "^", unit.replace("**", "^").replace("*", " "))
    text = re.sub(r"(?<=[0-9])(?=[A-Za-z])", " ", text)
    text = re.sub(r" *([/()^]) *", r"\1", text)
    text = re.sub(r"/\(([^()/]+)\)", lambda match: "/" + match[1].strip().replace(" ", "/"), text)
    if dimension not in ("temperature", "temperature_difference"):
        text = re.sub(r"\b(delta_)?degC\b", "K", text)
        text = re.sub(r"\bdelta_degF\b", "degF", text)
    return text.strip()
