"""Skin of a hand: tissue layers with their sources, blood perfusion, damage integral, and surface thresholds.

Heat in tissue by the bioheat equation rho c dT/dt = div(k grad T) + w (T_core - T) with w = perfusion rate x
density x specific heat of blood (H.H. Pennes, J. Appl. Physiol. 1 (1948) 93-122). Metabolic heat is left out:
700 W/m3 (Incropera et al., Fundamentals of Heat and Mass Transfer, 6th ed. 2007, Ex. 3.12) warms insulated
tissue by 0.01 K in a minute. Sweat is left out too.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from types import MappingProxyType
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cupfem.errors import InputError, nearest
from cupfem.quantities import ZERO_CELSIUS

Floats = NDArray[np.float64]
Mark = Literal["confirmed", "from memory, not re-checked", "derived", "invented", "user"]
SurfaceClass = Literal["board", "plastic", "glazed", "metal"]

PAIN = 43.0
"""Temperature [degC] at which pain begins: the heat-gated channel TRPV1 opens above it (Dirler, Winkler,
Lachenmeier, Foods 7(6) (2018) 83)."""
THIN_DEPTH, THICK_DEPTH = 0.1e-3, 0.5e-3
"""Depths [m] of the base of the epidermis in thin and in thick skin: 0.075 to 0.15 mm (Ye and De, Burns 43
(2017) 909-932, Table 1); the finger pad's horny layer alone has 0.3 to 0.6 mm (from memory, not
re-checked)."""
BLOOD_RATE = 5e-4 * 1060.0 * 3770.0
"""Perfusion [W/(m3 K)]: 5e-4 1/s (Incropera et al., 6th ed. 2007, Ex. 3.12) of blood of 1060 kg/m3 and 3770
J/(kg K) (from memory, not re-checked). A warm finger may have ten times as much."""
CORE = 36.0
"""Temperature [degC] of the tissue below the fat and of the blood; from memory, not re-checked."""
RESTING_FILM = 8.0
"""Film coefficient [W/(m2 K)] of a hand in still air, convection 2 and radiation 5.9 (Incropera et al., 6th
ed. 2007, Ex. 3.12)."""
TISSUE_BELOW = 25.0
"""Film coefficient [W/(m2 K)] from the deep face of the fat to the core: 8 mm of tissue of 0.2 W/(m K);
engineering choice, no source."""


@dataclass(frozen=True)
class Tissue:
    """A layer of skin: thickness [m], conductivity [W/(m K)], density [kg/m3], specific heat [J/(kg K)],
    perfusion [W/(m3 K)]."""

    name: str
    thickness: float
    conductivity: float
    density: float
    specific_heat: float
    perfusion: float
    source: str
    mark: Mark = "confirmed"

    @property
    def heat_capacity(self) -> float:
        """rho c [J/(m3 K)]."""
        return self.density * self.specific_heat


@dataclass(frozen=True)
class Skin:
    """Layers of a place on the hand, from the surface inwards, and what lies below.

    `core` [degC] is the temperature of blood and deep tissue, `below` [W/(m2 K)] the way from the deepest
    layer to it.
    """

    name: str
    layers: tuple[Tissue, ...]
    core: float = CORE
    below: float = TISSUE_BELOW
    source: str = ""

    @property
    def thickness(self) -> float:
        """Of all layers [m]."""
        return sum(layer.thickness for layer in self.layers)

    def with_core(self, core: float) -> Skin:
        """The same skin on a hand of another core temperature [degC]."""
        return replace(self, core=core)


_YE_DE = "H. Ye and S. De, Burns 43(5) (2017) 909-932, Tables 1 and 3, human"


def _layers(epidermis: float, dermis: float, fat: float) -> tuple[Tissue, ...]:
    """Thicknesses [m]."""
    return (
        Tissue("epidermis", epidermis, 0.21, 1150.0, 3600.0, 0.0, f"{_YE_DE}; density 1110 to 1190"),
        Tissue("dermis", dermis, 0.29, 1116.0, 3224.0, BLOOD_RATE, _YE_DE),
        Tissue("subcutis", fat, 0.20, 971.0, 2303.0, BLOOD_RATE, _YE_DE),
    )


_MEMORY = "thicknesses from memory, not re-checked"
SKINS: Mapping[str, Skin] = MappingProxyType(
    {
        "finger pad": Skin("finger pad", _layers(0.5e-3, 1.2e-3, 6e-3), source=_MEMORY),
        "thumb": Skin("thumb", _layers(0.6e-3, 1.3e-3, 7e-3), source=_MEMORY),
        "palm": Skin("palm", _layers(0.4e-3, 1.5e-3, 8e-3), source=_MEMORY),
        "thin": Skin("thin", _layers(0.1e-3, 1.5e-3, 8e-3), source=f"epidermis and dermis: {_YE_DE}"),
    }
)
FINGER_PAD = SKINS["finger pad"]


def get_skin(name: str) -> Skin:
    """Return a skin by name; InputError with the nearest name."""
    if name not in SKINS:
        raise InputError("skin", name, f"no such skin.{nearest(name, SKINS)}", f"one of: {', '.join(SKINS)}")
    return SKINS[name]


# -- damage --------------------------------------------------------------------------------------------------

FREQUENCY = 3.1e98
"""Frequency factor [1/s]; F.C. Henriques, Arch. Pathol. 43 (1947) 489-502, after public code comments that
give the same set; the paper itself not seen."""
ACTIVATION = 75000.0
"""E/R [K]: 150 kcal/mol over R = 2 cal/(mol K), as in 1947. The usual conversion to 6.28e5 J/mol over 8.314
gives 75531 K and times five times too long against the table of Moritz and Henriques, Am. J. Pathol. 23
(1947)
695-720 (as printed by others: 45 degC 2 h, 47 degC 20 min, 48 degC 15 min, 49 degC 8 min, 51 degC 2 min)."""
DAMAGE_FROM = 44.0
"""Below this temperature [degC] of the basal layer no damage is counted; Henriques 1947, from memory."""


def damage_rate(temperature: ArrayLike) -> Floats:
    """Rate of the damage integral.

    Formula: dOmega/dt = P exp(-E/(R T)), zero below 44 degC
    Parameters: temperature [degC] of the basal layer.
    Returns: rate [1/s]; Omega of 0.53, 1 and 1e4 are told for first, second and third degree.
    Range: 44 to about 53 degC at the basal layer.
    Example: Omega = 1 at 47 degC in 1773 s.
    Reference: Henriques 1947; Moritz and Henriques 1947; see `ACTIVATION`.
    """
    celsius = np.asarray(temperature, dtype=float)
    rate = FREQUENCY * np.exp(-ACTIVATION / (celsius + ZERO_CELSIUS))
    return np.asarray(np.where(celsius >= DAMAGE_FROM, rate, 0.0))


def damage(time: ArrayLike, temperature: ArrayLike) -> Floats:
    """Damage integral Omega `[t, ...]` of temperature histories `[t, ...]` [degC] at times `[t]` [s].

    Between two times the rate is taken to change exponentially, which is exact for small linear changes of
    temperature.
    """
    rate = damage_rate(temperature)
    step = np.diff(np.asarray(time, dtype=float)).reshape(-1, *([1] * (rate.ndim - 1)))
    return np.concatenate([np.zeros((1, *rate.shape[1:])), np.cumsum(step * log_mean(rate), axis=0)])


def log_mean(rate: Floats) -> Floats:
    """Logarithmic mean of neighbours along the first axis; the arithmetic mean where one is zero."""
    first, second = rate[:-1], rate[1:]
    near = (np.minimum(first, second) <= 0.0) | (np.abs(second - first) <= 1e-6 * first)
    ratio = np.where(near, 2.0, second / np.where(near, 1.0, first))
    return np.asarray(np.where(near, 0.5 * (first + second), (second - first) / np.log(ratio)))


def time_to_damage(temperature: float, omega: float = 1.0) -> float:
    """Time [s] until the damage integral reaches `omega` at a constant basal temperature [degC]."""
    rate = float(damage_rate(temperature))
    return omega / rate if rate > 0.0 else np.inf


# -- published thresholds of touched surfaces ----------------------------------------------------------------

THRESHOLD_SOURCE = (
    "ISO 13732-1:2006, burn thresholds for contact of 1 s to 8 h; from memory, not re-checked, "
    "+-3 K at 1 and 10 s (lower ends of the bands)"
)
THRESHOLD_TIMES = (1.0, 10.0, 60.0, 600.0, 28800.0)
"""Contact times [s] of `THRESHOLDS`."""
THRESHOLDS: Mapping[SurfaceClass, tuple[float, ...]] = MappingProxyType(
    {
        "metal": (65.0, 55.0, 51.0, 48.0, 43.0),
        "glazed": (80.0, 66.0, 56.0, 48.0, 43.0),
        "plastic": (85.0, 71.0, 60.0, 48.0, 43.0),
        "board": (110.0, 88.0, 60.0, 48.0, 43.0),
    }
)
"""Surface temperatures [degC] of a touched body below which no burn is expected, by class of its surface
(board: the figures for wood) and by `THRESHOLD_TIMES`. See `THRESHOLD_SOURCE`."""


def surface_threshold(surface: SurfaceClass, contact_time: ArrayLike) -> Floats:
    """Threshold [degC] of a surface touched for a time [s], linear over the logarithm of time.

    Shorter contacts than 1 s take the threshold of 1 s: nothing shorter is judged.
    """
    times = np.log(np.maximum(np.asarray(contact_time, dtype=float), THRESHOLD_TIMES[0]))
    return np.asarray(np.interp(times, np.log(THRESHOLD_TIMES), THRESHOLDS[surface]))
