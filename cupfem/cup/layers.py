"""Layers of the wall and of a sleeve, and the ring-shaped ridges that a layer may consist of."""

from __future__ import annotations

import math
from collections.abc import Mapping
from itertools import pairwise
from typing import Annotated, ClassVar, Literal, Self

from pydantic import Field, model_validator

from cupfem.cup.cells import Flute, Strut
from cupfem.inputs import Name, NotNegative, Positive, Table, refused, within
from cupfem.quantities import Angle, FilmCoefficient, Fraction, Grammage, Length, Pressure, format_quantity

Size = Annotated[Length, Positive, within("5 mm", "1 m", "length")]
Thickness = Annotated[Length, Positive, within("1 um", "50 mm", "length")]
Height = Annotated[Length, NotNegative, within("0 mm", "1 m", "length")]

THICKNESS_KEYS = ("thickness", "grammage", "thickness_along", "ridge", "flute", "strut")
"""Keys of which a layer has one."""


class Ridge(Table):
    """The `[layer.ridge]` table: the layer is there only as rings, of one cross-section.

    On a solid, rings stand on what is inside; in a gas, rings are hollow and what is outside bends over them.
    """

    place: ClassVar[str] = "layer.ridge"

    height: Annotated[Length, Positive, within("20 um", "50 mm", "length")] = Field(examples=["2 mm"])
    """Normal to the wall."""
    crest_width: Annotated[Length, Positive, within("50 um", "100 mm", "length")] = Field(examples=["1 mm"])
    """Along the wall, between the flanks."""
    flank_angle: Annotated[Angle, NotNegative, within("0 deg", "60 deg", "angle")] = 0.0
    """Of a flank from the wall's normal; zero: square."""
    crest: Literal["flat", "rounded"] = "flat"
    """Rounded: an arc over the crest width, tangent to both flanks."""
    at: tuple[Height, ...] = ()
    """Heights of the rings' middles on the inside face; or first, pitch and count."""
    first: Height | None = None
    """Height of the lowest ring."""
    pitch: Annotated[Length, Positive, within("0.1 mm", "1 m", "length")] | None = None
    """Distance in height from ring to ring."""
    count: Annotated[int, Field(ge=1, le=500)] | None = None
    """Number of rings."""

    @model_validator(mode="after")
    def _placed(self) -> Self:
        row = {"first": self.first, "pitch": self.pitch, "count": self.count}
        given = [key for key, value in row.items() if value is not None]
        if self.at and given:
            raise refused("given together with at", "keep one of the two", given[0])
        if not self.at and len(given) < 3:
            missing = next(key for key in row if key not in given)
            raise refused("missing", "write at, or first, pitch and count", missing)
        if any(high <= low for low, high in pairwise(self.at)):
            raise refused("the heights do not rise", "list the rings from the table up", "at")
        if self.crest == "rounded" and self._arc_height > self.height:
            why = f"the arc over the crest alone is {format_quantity(self._arc_height, 'length')} high"
            raise refused(why, "make the ridge higher, its crest narrower or its flanks less steep", "height")
        return self

    @property
    def middles(self) -> tuple[float, ...]:
        """Heights of the rings' middles on the inside face [m]."""
        if self.at or self.first is None or self.pitch is None or self.count is None:
            return self.at
        return tuple(self.first + self.pitch * number for number in range(self.count))

    @property
    def flank_run(self) -> float:
        """Length along the wall that one flank takes [m]."""
        shoulder = self.height - (self._arc_height if self.crest == "rounded" else 0.0)
        return shoulder * math.tan(self.flank_angle)

    @property
    def foot_width(self) -> float:
        """Width along the wall where the ridge stands on it [m]."""
        return self.crest_width + 2.0 * self.flank_run

    @property
    def crest_radius(self) -> float:
        """Radius of the arc of a rounded crest [m]."""
        return 0.5 * self.crest_width / math.cos(self.flank_angle)

    @property
    def _arc_height(self) -> float:
        return self.crest_radius * (1.0 - math.sin(self.flank_angle))


class SleeveLayer(Table):
    """One `[[layer]]` of a sleeve: it reaches over the whole sleeve."""

    place: ClassVar[str] = "layer"
    left_out: ClassVar[Mapping[str, str]] = {"pressure": "that of the room"}

    name: Name
    """A plain word, used in paths such as layer.gap.thickness."""
    material: str
    """A name from the library or of a [material."..."] table."""
    thickness: Thickness = Field(default_factory=float, examples=["0.35 mm", "18 mil"])
    """Normal to the wall; or grammage, thickness_along, ridge, flute or strut."""
    grammage: Annotated[Grammage, Positive] | None = None
    """Mass per area, instead of thickness; the density of the material makes it a thickness."""
    thickness_along: tuple[tuple[Height, Thickness], ...] = ()
    """Thickness at rising heights on the inside face, straight between them, instead of thickness."""
    ridge: Ridge | None = None
    """The layer consists of rings of this cross-section, instead of thickness."""
    flute: Flute | None = None
    """The layer is fluted board, its waves along the circumference, instead of thickness."""
    strut: Strut | None = None
    """The layer is air with straight struts of its material, instead of thickness."""
    contact_fraction: Fraction = 0.0
    """Share of a gap's area where its two plies touch."""
    contact_conductance: Annotated[FilmCoefficient, Positive] = 100.0
    """Conductance where the plies of a gap touch."""
    pressure: Annotated[Pressure, NotNegative] | None = None
    """Pressure of the gas in a gap, zero for a vacuum; left out: that of the room."""
    inner_emissivity: Fraction | None = None
    """Of the layer's inner face where it faces a gap or the inside; left out: that of the material."""
    outer_emissivity: Fraction | None = None
    """Of the layer's outer face where it faces a gap or the room; left out: that of the material."""

    @model_validator(mode="after")
    def _one_thickness(self) -> Self:
        given = [key for key in THICKNESS_KEYS if key in self.model_fields_set and getattr(self, key)]
        if not given:
            raise refused("missing", 'write thickness = "0.35 mm"', "thickness")
        if len(given) > 1:
            raise refused(f"given together with {given[0]}", "keep one of the two", given[1])
        heights = [height for height, _ in self.thickness_along]
        if len(heights) == 1 or any(high - low < 1e-6 for low, high in pairwise(heights)):
            why = "needs two or more heights that rise"
            raise refused(why, 'write [["0 mm", "0.4 mm"], ["95 mm", "0.3 mm"]]', "thickness_along")
        return self

    def thickness_at(self, height: float) -> float:
        """Thickness [m] at a height [m] that the layer reaches."""
        for (low, first), (high, last) in pairwise(self.thickness_along):
            if height <= high:
                return first + max(height - low, 0.0) / (high - low) * (last - first)
        return self.thickness_along[-1][1] if self.thickness_along else self.thickness


class Layer(SleeveLayer):
    """One `[[layer]]` of the wall."""

    left_out: ClassVar[Mapping[str, str]] = {
        "from": "the table",
        "to": "the brim",
        "contact": "perfect",
        "fit": "glued",
        "pressure": "that of the room",
    }

    from_: Annotated[Length, NotNegative] | None = Field(default=None, alias="from")
    """Lower end, height on the inside face; left out: the table."""
    to: Annotated[Length, Positive] | None = None
    """Upper end, height on the inside face; left out: the brim."""
    blend: Annotated[Length, Positive, within("0.1 mm", "100 mm", "length")] = 3e-3
    """Length over which the layers outside move in where this one stops."""
    contact: Annotated[FilmCoefficient, Positive] | None = None
    """Conductance between what is outside and what is inside where this layer stops; left out: perfect."""
    fit: Annotated[FilmCoefficient, Positive] | None = None
    """Conductance of a loose fit to what is inside, over the whole layer; left out: glued, perfect."""
    fit_gap: tuple[Height, Height] | None = None
    """Air between a loose layer and what is inside it, at its lower and its upper end, straight between."""
