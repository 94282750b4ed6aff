"""The cup file: outline, layers from inside to outside, base, and the user's own materials.

Lengths in metres. Heights are z on the wall's inside face, above the table; a thickness is measured normal
to the wall. The inside face is a cone: straight from the foot, carried down to the table, to the brim.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from functools import cached_property
from itertools import pairwise
from pathlib import Path
from typing import Annotated, Any, ClassVar, Literal, Self

from pydantic import Field, Tag, model_validator

from cupfem.errors import InputError
from cupfem.inputs import InputFile, Name, NotNegative, Positive, Table, json_schema, refused, tag, within
from cupfem.materials import Material, get_material, material_from_table
from cupfem.quantities import FilmCoefficient, Fraction, Length, Pressure, format_quantity

RESERVED_NAMES = ("base",)
STEEPEST = math.radians(45.0)
_NEAR = 1e-9  # m; heights closer than this are one height


Size = Annotated[Length, Positive, within("5 mm", "1 m", "length")]
Thickness = Annotated[Length, Positive, within("1 um", "50 mm", "length")]


class Outline(Table):
    """The `[cup]` table: the inside face."""

    place: ClassVar[str] = "cup"

    height: Size = Field(examples=["95 mm"])
    """Table to brim."""
    inner_top_diameter: Size | None = None
    """Inside of the wall at the brim."""
    top_outside_diameter: Size | None = None
    """Outside of the wall at the brim, instead of inner_top_diameter."""
    inner_foot_diameter: Size | None = None
    """Inside of the wall carried down to the table."""
    foot_outside_diameter: Size | None = None
    """Outside of the wall carried down to the table, instead of inner_foot_diameter."""

    @model_validator(mode="after")
    def _one_diameter_per_end(self) -> Self:
        for inner, outside in (
            ("inner_top_diameter", "top_outside_diameter"),
            ("inner_foot_diameter", "foot_outside_diameter"),
        ):
            given = [key for key in (inner, outside) if getattr(self, key) is not None]
            if len(given) == 2:
                raise refused(f"given together with {inner}", "keep one of the two", outside)
            if not given:
                raise refused("missing", f"write {inner} or {outside}", inner)
        return self


class Layer(Table):
    """One `[[layer]]` of the wall."""

    place: ClassVar[str] = "layer"
    left_out: ClassVar[Mapping[str, str]] = {
        "from": "the table",
        "to": "the brim",
        "contact": "perfect",
        "fit": "glued",
        "pressure": "that of the room",
    }

    name: Name
    """A plain word, used in paths such as layer.gap.thickness."""
    material: str
    """A name from the library or of a [material."..."] table."""
    thickness: Thickness
    """Normal to the wall."""
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
    contact_fraction: Fraction = 0.0
    """Share of a gap's area where its two plies touch."""
    contact_conductance: Annotated[FilmCoefficient, Positive] = 100.0
    """Conductance where the plies of a gap touch."""
    pressure: Annotated[Pressure, NotNegative] | None = None
    """Pressure of the gas in a gap, zero for a vacuum; left out: that of the room."""


class Base(Table):
    """The `[base]` table: a disc whose underside lies `recess` above the table."""

    place: ClassVar[str] = "base"

    material: str
    """A solid from the library or of a [material."..."] table."""
    thickness: Thickness
    """Of the disc."""
    recess: Annotated[Length, Positive, within("0.1 mm", "1 m", "length")] = Field(examples=["8 mm"])
    """Underside of the base above the table."""


class Cup(InputFile):
    """A cup, as its drawing tells it."""

    not_yet: ClassVar[tuple[str, ...]] = ("brim", "ridge", "flute", "strut", "insert")
    never: ClassVar[Mapping[str, str]] = {"handle": "not axisymmetric: a handle cannot be modelled"}

    wanted: ClassVar[Mapping[str, str]] = {
        "cup": "write a [cup] table with height and diameters",
        "layer": "write at least one [[layer]]",
        "base": 'write a [base] table, or base = "none" above the first table',
    }

    title: str = "Cup"
    """What reports call the cup."""
    outline: Outline = Field(alias="cup")
    """Height and diameters."""
    layer: tuple[Layer, ...]
    """The wall's layers, inside to outside."""
    base: Annotated[
        Annotated[Literal["none"], Tag("<word>")] | Annotated[Base, Tag("<table>")],
        tag(lambda value: "<word>" if isinstance(value, str) else "<table>"),
    ]
    """The base, or "none" for an open tube."""
    materials: dict[str, dict[str, Any]] = Field(default_factory=dict, alias="material")
    """The user's own materials, by the keys of the library."""

    @property
    def height(self) -> float:
        """Table to brim [m]."""
        return self.outline.height

    @property
    def base_disc(self) -> Base | None:
        """The base, None for an open tube."""
        return None if self.base == "none" else self.base

    @property
    def floor(self) -> float:
        """Height of the drink's lowest point [m]."""
        return self.base_disc.recess + self.base_disc.thickness if self.base_disc else 0.0

    @property
    def half_taper_angle(self) -> float:
        """Angle of the wall from the axis [rad], positive where the cup widens upwards."""
        foot, top = self._inner_radii
        return math.atan((top - foot) / self.height)

    def inner_radius(self, height: float) -> float:
        """Radius of the inside face [m] at a height [m]."""
        foot, top = self._inner_radii
        return foot + (top - foot) * height / self.height

    def volume(self, level: float) -> float:
        """Volume of drink [m3] below a level [m]: the frustum of a cone (Euclid, Elements, XII.10)."""
        low, high = self.inner_radius(self.floor), self.inner_radius(level)
        return math.pi / 3.0 * (level - self.floor) * (low * low + low * high + high * high)

    @property
    def brimful_capacity(self) -> float:
        """Volume of drink up to the brim [m3]."""
        return self.volume(self.height)

    def layer_range(self, layer: Layer) -> tuple[float, float]:
        """Heights [m] between which a layer has its full thickness."""
        return layer.from_ or 0.0, self.height if layer.to is None else layer.to

    def wall_thickness(self, height: float) -> float:
        """Sum of the layers that reach a height [m], without their blends."""
        ranges = [(layer, self.layer_range(layer)) for layer in self.layer]
        return sum(layer.thickness for layer, (low, high) in ranges if low <= height <= high)

    def material(self, name: str) -> Material:
        """A material of the cup's own or of the library."""
        return get_material(name, self._own_materials)

    def idle(self) -> dict[str, str]:
        """Keys of this cup that would change nothing, with the reason."""
        reasons: dict[str, str] = {}
        for layer in self.layer:
            if not any(self.blends(layer)):
                why = "nothing outside this layer moves in where it stops"
                reasons |= {f"layer.{layer.name}.{key}": why for key in ("blend", "contact")}
            if self.material(layer.material).kind != "gas":
                keys = ("contact_fraction", "contact_conductance", "pressure")
                reasons |= {f"layer.{layer.name}.{key}": "only a layer of gas has it" for key in keys}
            else:
                reasons[f"layer.{layer.name}.fit"] = "a gas lies close to what is inside it"
        return reasons

    def blends(self, layer: Layer) -> tuple[float, float]:
        """Lengths [m] below and above a layer over which the layers outside it move in; zero if none does."""
        low, high = self.layer_range(layer)
        outside = [self.layer_range(other) for other in self.layer[self.layer.index(layer) + 1 :]]
        below = any(start < low - _NEAR for start, _ in outside)
        above = any(end > high + _NEAR for _, end in outside)
        return layer.blend * below, layer.blend * above

    @cached_property
    def _own_materials(self) -> dict[str, Material]:
        return {name: material_from_table(name, table) for name, table in self.materials.items()}

    @cached_property
    def _inner_radii(self) -> tuple[float, float]:
        """At the table and at the brim.

        An outside diameter is that of the outer face carried to the height of the end, so the inner radius is
        less by t / cos(a). With d the difference of the two thicknesses to take off, the taper a solves
        H sin(a) - D cos(a) = d, where D is the difference of the given radii.
        """
        outline = self.outline
        foot = (outline.inner_foot_diameter or outline.foot_outside_diameter or 0.0) / 2.0
        top = (outline.inner_top_diameter or outline.top_outside_diameter or 0.0) / 2.0
        at_foot = 0.0 if outline.inner_foot_diameter else self.wall_thickness(0.0)
        at_top = 0.0 if outline.inner_top_diameter else self.wall_thickness(outline.height)
        span = math.hypot(outline.height, top - foot)
        taper = math.atan2(top - foot, outline.height) + math.asin(
            max(-1.0, min(1.0, (at_foot - at_top) / span))
        )
        return foot - at_foot / math.cos(taper), top - at_top / math.cos(taper)

    @model_validator(mode="after")
    def _consistent(self) -> Self:
        _check_names(self)
        _check_materials(self)
        _check_ranges(self)
        _check_outline(self)
        _check_section(self)
        self.refuse_idle()
        _check_blends(self)
        _check_base(self)
        return self


def load_cup(path: str | Path) -> Cup:
    """Read a cup file; InputError, in one line, for anything that cannot be used."""
    return Cup.load(path)


def cup_schema() -> dict[str, Any]:
    """JSON Schema of a cup file."""
    return json_schema(Cup, "cupfem cup file")


def _mm(length: float) -> str:
    return format_quantity(length, "length", digits=4)


def _check_names(cup: Cup) -> None:
    if not cup.layer:
        raise refused("no layers: a cup needs a wall", "write at least one [[layer]]", "layer")
    names = [layer.name for layer in cup.layer]
    for index, name in enumerate(names):
        if name in RESERVED_NAMES:
            raise refused(
                "a name that the cup uses itself", "choose another word", f"layer.{name}.name", name
            )
        if name in names[:index]:
            raise refused("two layers have this name", "give each its own", f"layer.{name}.name", name)


def _check_materials(cup: Cup) -> None:
    used = {f"layer.{layer.name}.material": layer.material for layer in cup.layer}
    if cup.base_disc:
        used["base.material"] = cup.base_disc.material
    for path, name in used.items():
        try:
            cup.material(name)
        except InputError as error:
            if error.what.startswith("material."):  # a table of the user's own, which has a place of its own
                raise
            raise refused(error.why, error.instead, path, name) from None


def _check_ranges(cup: Cup) -> None:
    for layer in cup.layer:
        low, high = cup.layer_range(layer)
        path = f"layer.{layer.name}"
        for key, end in (("to", high), ("from", low)):
            if end > cup.height + _NEAR:
                why = f"above the brim at {_mm(cup.height)}: the layer leaves the cup"
                raise refused(why, f'write at most "{_mm(cup.height)}"', f"{path}.{key}", _mm(end))
        if low >= high:
            raise refused(f"not below the layer's upper end at {_mm(high)}", "", f"{path}.from", _mm(low))


def _check_outline(cup: Cup) -> None:
    angle = math.degrees(cup.half_taper_angle)
    if abs(angle) >= math.degrees(STEEPEST):
        why = f"the wall leans by {angle:.1f} degrees from the axis, and 45 is the limit"
        raise refused(why, "check height and diameters", "cup")
    for end, height in (("foot", 0.0), ("brim", cup.height)):
        radius, wall = cup.inner_radius(height), cup.wall_thickness(height)
        if radius <= wall:
            why = f"at the {end} the wall ({_mm(wall)}) is thicker than the inside radius ({_mm(radius)})"
            raise refused(why, "check diameters and thicknesses", "cup")


def _check_section(cup: Cup) -> None:
    """At each height there is a wall, solid on both faces, and between two gases a solid."""
    ends = sorted({0.0, cup.height, *(end for layer in cup.layer for end in cup.layer_range(layer))})
    for low, high in pairwise(ends):
        if high - low > _NEAR:
            _check_stack(cup, low, high)


def _check_stack(cup: Cup, low: float, high: float) -> None:
    middle = (low + high) / 2.0
    stack = [layer for layer in cup.layer if cup.layer_range(layer)[0] < middle < cup.layer_range(layer)[1]]
    where = f"from {_mm(low)} to {_mm(high)}"
    if not stack:
        raise refused(f"the wall has no layer {where}", "let a layer reach over it", "layer")
    gas = [cup.material(layer.material).kind == "gas" for layer in stack]
    if gas[0]:
        raise _misplaced(
            stack[0], f"{where} it is innermost: the drink would touch the gas", "put a solid inside it"
        )
    if gas[-1]:
        raise _misplaced(
            stack[-1], f"{where} it is outermost: nothing holds the gas", "put a solid outside it"
        )
    if stack[0].fit is not None:
        raise _loose(stack[0], f"{where} it is innermost: nothing lies inside it")
    for (inside, inner_gas), (outside, outer_gas) in pairwise(zip(stack, gas, strict=True)):
        if inner_gas and outside.fit is not None:
            raise _loose(outside, f'{where} it lies on "{inside.name}", a gas, which has no contact')
        if inner_gas and outer_gas:
            why = f'{where} it lies on "{inside.name}", another layer of gas'
            raise _misplaced(outside, why, "make them one layer, or put a solid between them")


def _loose(layer: Layer, why: str) -> Exception:
    return refused(why, "leave it out", f"layer.{layer.name}.fit", f"{layer.fit:g} W/(m^2 K)")


def _misplaced(layer: Layer, why: str, instead: str) -> Exception:
    return refused(why, instead, f"layer.{layer.name}", layer.material)


def _check_blends(cup: Cup) -> None:
    for index, layer in enumerate(cup.layer):
        (low, high), (below, above) = cup.layer_range(layer), cup.blends(layer)
        for outer in cup.layer[index + 1 :]:
            start, end = cup.layer_range(outer)
            if _NEAR < end - high < above - _NEAR or _NEAR < low - start < below - _NEAR:
                why = f'"{outer.name}" ends within this length, over which it moves in'
                instead = (
                    f'let "{outer.name}" reach further, stop where "{layer.name}" stops, or shorten blend'
                )
                raise refused(why, instead, f"layer.{layer.name}.blend", _mm(layer.blend))


def _check_base(cup: Cup) -> None:
    base = cup.base_disc
    if base is None:
        return
    if cup.material(base.material).kind == "gas":
        raise refused("a gas cannot hold the drink", "choose a solid", "base.material", base.material)
    if cup.floor >= cup.height - _NEAR:
        why = f"with its thickness the base reaches {_mm(cup.floor)}, not below the brim at {_mm(cup.height)}"
        raise refused(why, "check recess and thickness", "base.recess", _mm(base.recess))
