"""The sleeve file: a ring of layers that any cup can wear.

A sleeve becomes layers of the cup that wears it. A cup inside a second cup is the same: the second cup's wall
is the sleeve. In a sleeve file heights count from the sleeve's lower end.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any, ClassVar, Self

from pydantic import Field, model_validator

from cupfem.cup.layers import Height, Layer, Size, SleeveLayer
from cupfem.gaps import CONTACT_CONDUCTANCE
from cupfem.inputs import InputFile, Positive, json_schema, refused
from cupfem.quantities import FilmCoefficient, format_quantity, parse_quantity

if TYPE_CHECKING:
    from cupfem.cup.model import Cup

_NEAR = 1e-9  # m
_DIAMETERS = ("bottom_inside_diameter", "top_inside_diameter")


class Sleeve(InputFile):
    """A sleeve, as its drawing tells it."""

    place: ClassVar[str] = "sleeve"
    left_out: ClassVar[Mapping[str, str]] = {"bottom": "where the sleeve grips", "fit": "glued"}
    wanted: ClassVar[Mapping[str, str]] = {"layer": "write at least one [[layer]]"}

    title: str = "Sleeve"
    """What reports call the sleeve."""
    height: Size = Field(examples=["55 mm"])
    """Lower to upper end, upright."""
    bottom: Height | None = None
    """Lower end above the table, on the cup's inside face; left out, with diameters: where it grips."""
    fit: Annotated[FilmCoefficient, Positive] | None = None
    """Conductance between cup and sleeve where they touch; left out: glued, perfect."""
    bottom_inside_diameter: Size | None = None
    """Of the sleeve by itself, at its lower end; with the upper one it tells where the sleeve stands off."""
    top_inside_diameter: Size | None = None
    """Of the sleeve by itself, at its upper end."""
    layer: tuple[SleeveLayer, ...]
    """From inside to outside."""
    materials: dict[str, dict[str, Any]] = Field(default_factory=dict, alias="material")
    """The user's own materials, by the keys of the library."""

    @model_validator(mode="after")
    def _consistent(self) -> Self:
        if not self.layer:
            raise refused("no layers: a sleeve needs one", "write at least one [[layer]]", "layer")
        given = [key for key in _DIAMETERS if getattr(self, key) is not None]
        if len(given) == 1:
            missing = next(key for key in _DIAMETERS if key not in given)
            raise refused("missing", f"write it too, or leave {given[0]} out", missing)
        if given and self.fit is None:
            why = "missing: a sleeve with diameters of its own may stand off, and is not glued"
            raise refused(why, 'write fit = "350 W/(m^2 K)"', "fit")
        if not given and self.bottom is None:
            raise refused("missing", 'write bottom = "28 mm", or both inside diameters', "bottom")
        return self

    def on(self, cup: Cup) -> tuple[Layer, ...]:
        """The layers that the sleeve adds to a cup; an error where it does not fit on."""
        low = self._grip(cup) if self.bottom is None else self.bottom
        high = low + self.height
        if high > cup.height + _NEAR:
            why = f"from {_mm(low)} up it overhangs the brim by {_mm(high - cup.height)}"
            raise refused(why, "lower its bottom or its height", "sleeve.height", _mm(self.height))
        gap = self._gap(cup, low)
        if gap is not None and min(gap) < -1e-6:
            why = f"with its lower end there the sleeve overlaps the cup by {_mm(-min(gap))}"
            instead = "leave bottom out: the sleeve then stands where it grips"
            raise refused(why, instead, "sleeve.bottom", _mm(low))
        ends = _rounded(low), _rounded(min(high, cup.height))
        return tuple(self._layer(index, *ends, gap) for index in range(len(self.layer)))

    def _layer(self, index: int, low: float, high: float, gap: tuple[float, float] | None) -> Layer:
        """A layer of the cup at the place of the sleeve; values are SI already."""
        own = self.layer[index]
        given = {key: getattr(own, key) for key in own.model_fields_set} | _raised_heights(own, low)
        if own.ridge is None:
            given |= {"from_": low, "to": high}
        if index == 0 and self.fit is not None:
            given["fit"] = self.fit
            if gap is not None:
                given["fit_gap"] = tuple(_rounded(max(end, 0.0)) for end in gap)
        fields = Layer.model_fields.items()
        defaults = {name: field.get_default(call_default_factory=True) for name, field in fields}
        return Layer.model_construct(_fields_set=set(given), **{**defaults, **given})

    def _gap(self, cup: Cup, low: float) -> tuple[float, float] | None:
        """Distance from cup to sleeve along the normal at both ends [m]; None if it fits by definition."""
        if self.bottom_inside_diameter is None or self.top_inside_diameter is None:
            return None
        lean = math.cos(cup.half_taper_angle)
        lower = 0.5 * self.bottom_inside_diameter - cup.outer_radius(low)
        upper = 0.5 * self.top_inside_diameter - cup.outer_radius(min(low + self.height, cup.height))
        return lower * lean, upper * lean

    def _grip(self, cup: Cup) -> float:
        """Lower end where the sleeve, pushed up from below, touches the cup [m]."""
        low, high = 0.0, cup.height - self.height
        if high < 0.0:
            why = f"longer than the cup, {_mm(cup.height)} high"
            raise refused(why, "write a lower height", "sleeve.height", _mm(self.height))
        if self._least_gap(cup, low) < 0.0:
            why = "narrower than the foot of the cup: the sleeve does not go on"
            raise refused(why, "check its inside diameters", "sleeve.bottom_inside_diameter")
        if self._least_gap(cup, high) > 0.0:
            why = "wider than the cup: the sleeve does not grip"
            raise refused(why, "check its inside diameters", "sleeve.bottom_inside_diameter")
        for _ in range(60):
            middle = 0.5 * (low + high)
            low, high = (low, middle) if self._least_gap(cup, middle) <= 0.0 else (middle, high)
        return low

    def _least_gap(self, cup: Cup, low: float) -> float:
        return min(self._gap(cup, low) or (0.0,))


def load_sleeve(path: str | Path) -> Sleeve:
    """Read a sleeve file; InputError, in one line, for anything that cannot be used."""
    return Sleeve.load(path)


def sleeve_schema() -> dict[str, Any]:
    """JSON Schema of a sleeve file."""
    return json_schema(Sleeve, "cupfem sleeve file")


def second_cup(cup: Cup, outer: Cup) -> Sleeve:
    """The wall of a second cup as the sleeve of a cup that stands in it.

    The cup sinks until the walls touch or its heel stands on the second cup's base. What of the second cup
    lies lower than the first one's heel is left out.
    """
    if any(layer.from_ is not None or layer.to is not None or layer.ridge for layer in outer.layer):
        why = "a layer of the second cup covers part of its wall"
        raise refused(why, "use a cup whose layers reach from table to brim", "sleeve", outer.title)
    raised = _raised(cup, outer)
    height = min(outer.height - raised, cup.height)
    if height < 5e-3:
        why = f"the cup does not go in: it would stand {_mm(raised)} high"
        raise refused(why, "use a wider second cup", "sleeve", outer.title)
    given: dict[str, Any] = {
        "title": outer.title,
        "height": height,
        "bottom": 0.0,
        "fit": CONTACT_CONDUCTANCE,
        "bottom_inside_diameter": 2.0 * outer.inner_radius(raised),
        "top_inside_diameter": 2.0 * outer.inner_radius(raised + height),
        "layer": tuple(_without_place(layer) for layer in outer.layer),
        "materials": outer.materials,
    }
    return Sleeve.model_construct(_fields_set=set(given), **given)


def _without_place(layer: Layer) -> SleeveLayer:
    given = {name: getattr(layer, name) for name in SleeveLayer.model_fields}
    return SleeveLayer.model_construct(layer.model_fields_set & set(given), **given)


def _raised(cup: Cup, outer: Cup) -> float:
    """Height of the cup's table over that of the second cup it stands in [m]."""

    def gap(raised: float) -> float:
        ends = (0.0, min(outer.height - raised, cup.height))
        return min(outer.inner_radius(raised + z) - cup.outer_radius(z) for z in ends)

    low, high = outer.floor, outer.height
    if gap(low) >= 0.0:
        return low
    for _ in range(60):
        middle = 0.5 * (low + high)
        low, high = (low, middle) if gap(middle) >= 0.0 else (middle, high)
    return high


def _raised_heights(layer: SleeveLayer, low: float) -> dict[str, Any]:
    """Heights of a sleeve count from its lower end."""
    raised: dict[str, Any] = {}
    if layer.thickness_along:
        raised["thickness_along"] = tuple(
            (_rounded(low + height), value) for height, value in layer.thickness_along
        )
    if layer.ridge is not None:
        ridge = layer.ridge
        at = tuple(_rounded(low + height) for height in ridge.at)
        first = None if ridge.first is None else _rounded(low + ridge.first)
        raised["ridge"] = ridge.model_copy(update={"at": at, "first": first})
    return raised


def _rounded(length: float) -> float:
    """A length to the picometre, as it is read again from a resolved file."""
    return parse_quantity(f"{round(length * 1e3, 9):.15g} mm", "length")


def _mm(length: float) -> str:
    return format_quantity(length, "length", digits=4)
