"""The cup file: outline, layers from inside to outside, base, sleeve, and the user's own materials.

Lengths in metres. Heights are z on the wall's inside face, above the table; a thickness is measured normal
to the wall. The inside face is straight from the foot, carried down to the table, to the brim, or a curve.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from functools import cached_property
from pathlib import Path
from typing import Annotated, Any, ClassVar, Literal, Self

import numpy as np
from pydantic import Field, Tag, model_validator

from cupfem.cup import checks
from cupfem.cup.cells import Flute, stand_in
from cupfem.cup.layers import Layer, Thickness
from cupfem.cup.outline import Outline, read_points
from cupfem.cup.profile import Profile
from cupfem.cup.sleeve import Sleeve, load_sleeve, second_cup
from cupfem.inputs import InputFile, Positive, Table, json_schema, refused, tag, toml, within
from cupfem.materials import Material, get_material, material_from_table
from cupfem.quantities import Length

Span = tuple[float, float]

_NEAR = 1e-9  # m; heights closer than this are one height


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

    not_yet: ClassVar[tuple[str, ...]] = ("brim", "insert")
    never: ClassVar[Mapping[str, str]] = {"handle": "not axisymmetric: a handle cannot be modelled"}

    wanted: ClassVar[Mapping[str, str]] = {
        "cup": "write a [cup] table with height and diameters",
        "layer": "write at least one [[layer]]",
        "base": 'write a [base] table, or base = "none" above the first table',
    }

    title: str = "Cup"
    """What reports call the cup."""
    outline: Outline = Field(alias="cup")
    """Height and inside face."""
    layer: tuple[Layer, ...]
    """The wall's layers, inside to outside; those of a sleeve come last."""
    base: Annotated[
        Annotated[Literal["none"], Tag("<word>")] | Annotated[Base, Tag("<table>")],
        tag(lambda value: "<word>" if isinstance(value, str) else "<table>"),
    ]
    """The base, or "none" for an open tube."""
    sleeve: (
        Annotated[
            Annotated[str, Tag("<file>")] | Annotated[Sleeve, Tag("<table>")],
            tag(lambda value: "<file>" if isinstance(value, str) else "<table>"),
        ]
        | None
    ) = None
    """A sleeve, or the file of one or of a second cup that this one stands in. It joins the layers."""
    materials: dict[str, dict[str, Any]] = Field(default_factory=dict, alias="material")
    """The user's own materials, by the keys of the library."""

    @classmethod
    def prepared(cls, data: dict[str, Any], folder: Path) -> dict[str, Any]:
        """The tables of a file; files that they name lie in the file's folder."""
        outline, named = data.get("cup"), data.get("sleeve")
        if isinstance(outline, dict) and isinstance(outline.get("inner_profile"), str):
            data["cup"] = {**outline, "inner_profile": read_points(folder / outline["inner_profile"])}
        return {**data, "sleeve": str(folder / named)} if isinstance(named, str) else data

    def wearing(self, sleeve: Sleeve | Cup | str | Path) -> Self:
        """This cup in a sleeve or in a second cup, or in that of a file."""
        worn: object = str(sleeve) if isinstance(sleeve, Path) else sleeve
        if isinstance(sleeve, Cup):
            worn = second_cup(self, sleeve)
        values = {name: getattr(self, name) for name in type(self).model_fields}
        return type(self)(**{**values, "sleeve": worn})

    # -- shape -----------------------------------------------------------------------------------------------

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

    @cached_property
    def profile(self) -> Profile:
        """The inside face."""
        drawn = self.outline.drawn_profile()
        if drawn is not None:
            return drawn
        radii = self.outline.carried_radii(self.wall_thickness(0.0), self.wall_thickness(self.height))
        return Profile(np.array([0.0, self.height]), np.array(radii))

    @property
    def half_taper_angle(self) -> float:
        """Angle of the wall from the axis [rad], from foot to brim; positive where the cup widens upwards."""
        foot, top = self.inner_radius(0.0), self.inner_radius(self.height)
        return math.atan((top - foot) / self.height)

    def inner_radius(self, height: float) -> float:
        """Radius of the inside face [m] at a height [m]."""
        return self.profile.radius_of(height)

    def outer_radius(self, height: float) -> float:
        """Radius of the outer face [m] at a height [m], by the wall's thickness there."""
        lean = float(self.profile.angle_at(height))
        return self.inner_radius(height) + self.wall_thickness(height) / math.cos(lean)

    def volume(self, level: float) -> float:
        """Volume of drink [m3] below a level [m]."""
        return self.profile.volume_below(level) - self.profile.volume_below(self.floor)

    def level(self, volume: float) -> float:
        """Level [m] of a volume of drink [m3]; the inverse of `volume`."""
        return self.profile.height_of_volume(max(volume, 0.0) + self.profile.volume_below(self.floor))

    @property
    def brimful_capacity(self) -> float:
        """Volume of drink up to the brim [m3]."""
        return self.volume(self.height)

    # -- layers ----------------------------------------------------------------------------------------------

    def layer_range(self, layer: Layer) -> Span:
        """Heights [m] between which a layer has its full thickness; of ridges those of the whole row."""
        rings = self.rings(layer)
        if rings:
            return rings[0][0], rings[-1][1]
        return layer.from_ or 0.0, self.height if layer.to is None else layer.to

    def rings(self, layer: Layer) -> tuple[Span, ...]:
        """Heights [m] of the feet of a layer's ridges; in a gas where it has its full height."""
        ridge = layer.ridge
        if ridge is None:
            return ()
        width = ridge.crest_width if self.is_gas(layer) else ridge.foot_width
        half = [0.5 * width * math.cos(float(self.profile.angle_at(z))) for z in ridge.middles]
        return tuple((z - part, z + part) for z, part in zip(ridge.middles, half, strict=True))

    def spans(self, layer: Layer) -> tuple[Span, ...]:
        """Heights [m] between which a layer is there: its range, or each of its ridges."""
        return self.rings(layer) or (self.layer_range(layer),)

    def stack(self, height: float) -> tuple[Layer, ...]:
        """Layers that reach a height [m] on the inside face, inside to outside, without their blends."""
        return tuple(
            layer for layer in self.layer if any(low <= height <= high for low, high in self.spans(layer))
        )

    def wall_thickness(self, height: float) -> float:
        """Sum of the layers that reach a height [m], without their blends and without ridges."""
        ranges = [(layer, self.layer_range(layer)) for layer in self.layer if layer.ridge is None]
        return sum(layer.thickness_at(height) for layer, (low, high) in ranges if low <= height <= high)

    def is_gas(self, layer: Layer) -> bool:
        """Whether a layer is a gap."""
        return self.material(layer.material).kind == "gas"

    def material(self, name: str) -> Material:
        """A material of the cup's own or of the library."""
        return get_material(name, self._own_materials)

    def layer_material(self, layer: Layer) -> Material:
        """Material of a layer; of flutes and struts one that stands for board and air together."""
        board, cell = self.material(layer.material), layer.flute or layer.strut
        return board if cell is None else stand_in(board, cell)

    def emissivity(self, layer: Layer, face: Literal["inner", "outer"]) -> float:
        """Emissivity of a layer's inner or outer face [-]."""
        given = layer.inner_emissivity if face == "inner" else layer.outer_emissivity
        return self.material(layer.material).emissivity.value if given is None else given

    def blends(self, layer: Layer) -> Span:
        """Lengths [m] below and above a layer over which the layers outside it move in; zero if none does."""
        if layer.ridge is not None:
            run = layer.ridge.flank_run if self.is_gas(layer) else 0.0
            return run, run
        low, high = self.layer_range(layer)
        after = self.layer[self.layer.index(layer) + 1 :]
        outside = [self.layer_range(other) for other in after if other.ridge is None]
        below = any(start < low - _NEAR for start, _ in outside)
        above = any(end > high + _NEAR for _, end in outside)
        return layer.blend * below, layer.blend * above

    def idle(self) -> dict[str, str]:
        """Keys of this cup that would change nothing, with the reason."""
        return checks.idle_keys(self)

    @cached_property
    def _own_materials(self) -> dict[str, Material]:
        return {name: material_from_table(name, table) for name, table in self.materials.items()}

    # -- consistency -----------------------------------------------------------------------------------------

    @model_validator(mode="after")
    def _consistent(self) -> Self:
        checks.check_names(self)
        checks.check_materials(self)
        self._derive_thicknesses()
        if self.sleeve is not None:
            checks.check(self)
            self._put_on(self.sleeve)
        checks.check(self)
        return self

    def _put_on(self, sleeve: Sleeve | str) -> None:
        """Make the layers of the sleeve the outermost layers of the wall."""
        if isinstance(sleeve, str):
            sleeve = self._sleeve_of_file(sleeve)
        for name, table in sleeve.materials.items():
            if self.materials.get(name, table) != table:
                raise refused(
                    "cup and sleeve both have it, and not alike", "rename one", f'material."{name}"'
                )
        added = checks.named_apart(self, sleeve.on(self))
        self.__dict__.pop("_own_materials", None)
        self.__dict__["materials"] = {**self.materials, **sleeve.materials}
        self.__dict__["layer"] = (*self.layer, *added)
        self.__dict__["sleeve"] = None
        checks.check_names(self)
        checks.check_materials(self)
        self._derive_thicknesses()

    def _sleeve_of_file(self, path: str) -> Sleeve:
        if "cup" in toml.parse(toml.read_text(path), path):
            return second_cup(self, Cup.load(path))
        return load_sleeve(path)

    def _derive_thicknesses(self) -> None:
        self.__dict__["layer"] = tuple(self._with_thickness(layer) for layer in self.layer)

    def _with_thickness(self, layer: Layer) -> Layer:
        """The layer with the thickness that grammage, heights or ridges give."""
        if layer.grammage is not None:
            thickness = layer.grammage / self.material(layer.material).density.value
        elif layer.ridge is not None:
            thickness = layer.ridge.height
        elif (cell := layer.flute or layer.strut) is not None:
            thickness = cell.thickness if isinstance(cell, Flute) else cell.height
        elif layer.thickness_along:
            low, high = self.layer_range(layer)
            thickness = float(np.mean([layer.thickness_at(z) for z in np.linspace(low, high, 201)]))
        else:
            return layer
        found = layer.model_copy(update={"thickness": thickness})
        found.__pydantic_fields_set__.discard("thickness")
        return found


def load_cup(path: str | Path) -> Cup:
    """Read a cup file; InputError, in one line, for anything that cannot be used."""
    return Cup.load(path)


def cup_schema() -> dict[str, Any]:
    """JSON Schema of a cup file."""
    return json_schema(Cup, "cupfem cup file")
