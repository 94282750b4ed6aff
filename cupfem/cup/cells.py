"""Flutes and struts: what repeats around the cup between two faces of a layer."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace
from typing import Annotated, ClassVar, Literal, Self

import numpy as np
from pydantic import Field, model_validator

from cupfem.fluids import air_conductivity
from cupfem.gaps import Values, exchange_factor, radiation_conductance
from cupfem.inputs import Positive, Table, refused, within
from cupfem.materials import Material, Value
from cupfem.quantities import Length

CellLength = Annotated[Length, Positive, within("0.1 mm", "50 mm", "length")]
Ply = Annotated[Length, Positive, within("10 um", "5 mm", "length")]

TEMPERATURE = 50.0
"""Temperature [degC] of the closed forms."""
LETTERS: Mapping[str, tuple[float, float]] = {"E": (1.2e-3, 3.4e-3)}
"""Height without liners and pitch [m] of flutes by their trade letter. Only E is confirmed: 1.2 mm, 92 to
98 a foot (trade pages, firms not named); makers differ, and other letters stand for ranges."""


class Flute(Table):
    """The `[layer.flute]` table: a medium bent to waves along the circumference, between the layers on both
    sides, which are its liners."""

    place: ClassVar[str] = "layer.flute"

    letter: Literal["E"] | None = None
    """Trade letter, instead of height and pitch."""
    height: CellLength | None = Field(default=None, examples=["1.2 mm"])
    """From liner to liner."""
    pitch: CellLength | None = Field(default=None, examples=["3.4 mm"])
    """From crest to crest."""
    medium_thickness: Ply = Field(examples=["0.15 mm"])
    """Of the bent board."""

    @model_validator(mode="after")
    def _sized(self) -> Self:
        for key in ("height", "pitch"):
            if self.letter is not None and getattr(self, key) is not None:
                raise refused("given together with letter", "keep one of the two", key)
            if self.letter is None and getattr(self, key) is None:
                raise refused("missing", 'write height and pitch, or letter = "E"', key)
        if self.medium_thickness >= 2.0 * self.bend_radius or self.medium_thickness >= 0.5 * self.wave_height:
            why = "too thick to be bent to these waves"
            raise refused(why, "write a thinner medium, a larger pitch or height", "medium_thickness")
        return self

    @property
    def wave_height(self) -> float:
        """From liner to liner [m]."""
        return LETTERS[self.letter][0] if self.letter else self.height or 0.0

    @property
    def wave_length(self) -> float:
        """From crest to crest [m]."""
        return LETTERS[self.letter][1] if self.letter else self.pitch or 0.0

    @property
    def amplitude(self) -> float:
        """Of the medium's middle [m]."""
        return 0.5 * (self.wave_height - self.medium_thickness)

    @property
    def bend_radius(self) -> float:
        """Radius of the medium's middle at a crest [m]."""
        return (self.wave_length / (2.0 * math.pi)) ** 2 / max(self.amplitude, 1e-9)

    @property
    def take_up(self) -> float:
        """Length of the medium over that of the board: a sinusoid, by quadrature [-]."""
        x = np.linspace(0.0, 2.0 * math.pi, 2001)
        slope = self.amplitude * 2.0 * math.pi / self.wave_length * np.sin(x)
        return float(np.mean(np.hypot(1.0, slope)[:-1]))

    @property
    def share(self) -> float:
        """Share of the layer's volume that the medium takes [-]."""
        return self.take_up * self.medium_thickness / self.wave_height

    @property
    def thickness(self) -> float:
        """Of the layer [m]."""
        return self.wave_height


class Strut(Table):
    """The `[layer.strut]` table: straight struts along the wall's normal, with air between them."""

    place: ClassVar[str] = "layer.strut"

    height: CellLength = Field(examples=["2 mm"])
    """Of the air chambers, along the normal: the layer's thickness."""
    pitch: CellLength = Field(examples=["8 mm"])
    """From strut to strut."""
    thickness: Ply = Field(examples=["0.3 mm"])
    """Of a strut."""

    @model_validator(mode="after")
    def _room_between(self) -> Self:
        if self.thickness >= 0.9 * self.pitch:
            raise refused("leaves no air between the struts", "write a thinner strut", "thickness")
        return self

    @property
    def share(self) -> float:
        """Share of the area that the struts take [-]."""
        return self.thickness / self.pitch


def stand_in(board: Material, cell: Flute | Strut) -> Material:
    """A homogeneous material for a layer of flutes or struts, by closed forms at 50 degC: for hand estimates.

    Across: columns in series of board and air (k_gas + h_rad d), all columns and the medium as a strip from
    face to face in parallel. Along the wall: the mean over the area. Wiener's bounds of a laminate
    (Incropera et al., 6th ed. 2007, sec. 3.1.3); the strip: common practice, no source. The march solves
    the cell instead.
    """
    share = cell.share
    density = share * board.density.value
    along = share * board.conductivity_along.value + (1.0 - share) * float(air_conductivity(TEMPERATURE))
    across = _across_strut(board, cell) if isinstance(cell, Strut) else _across_flute(board, cell)
    return replace(
        board,
        conductivity_through=_derived(across),
        conductivity_along=_derived(along),
        density=_derived(density),
    )


def _derived(value: float) -> Value:
    return Value(value, "mixture rule over the cell, at 50 degC", "derived", None, None)


def _cavity(height: Values, emissivity: float) -> Values:
    factor = exchange_factor(emissivity, emissivity)
    radiation = radiation_conductance(TEMPERATURE, TEMPERATURE, factor)
    return air_conductivity(TEMPERATURE) + radiation * height


def _across_strut(board: Material, strut: Strut) -> float:
    air = float(_cavity(strut.height, board.emissivity.value))
    return strut.share * board.conductivity_along.value + (1.0 - strut.share) * air


def _across_flute(board: Material, flute: Flute) -> float:
    x = np.linspace(0.0, math.pi, 401)
    air = flute.amplitude * (1.0 - np.cos(x)), flute.amplitude * (1.0 + np.cos(x))
    lower, upper = (height / _cavity(height, board.emissivity.value) for height in air)
    resistance = lower + upper + flute.medium_thickness / board.conductivity_through.value
    half = 0.5 * flute.wave_length
    strip = board.conductivity_along.value * flute.medium_thickness / (flute.take_up * half * half)
    return float(flute.wave_height * (np.mean(1.0 / resistance) + strip))
