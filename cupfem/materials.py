"""Solids of walls with the source of each value, from the library or from the user's own tables."""

from __future__ import annotations

import math
import tomllib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from functools import cache
from importlib.resources import files
from types import MappingProxyType
from typing import Any, Literal, NamedTuple, cast, get_args

from cupfem.errors import InputError, nearest
from cupfem.quantities import DIMENSIONS, Units, format_quantity, read_quantity

Mark = Literal["confirmed", "from memory, not re-checked", "derived", "invented", "user"]
SurfaceClass = Literal["board", "plastic", "glazed", "metal"]

# property -> dimension; the required ones come first
DIMENSION_OF = {
    "conductivity_through": "conductivity",
    "density": "density",
    "specific_heat": "specific_heat",
    "emissivity": "fraction",
    "conductivity_along": "conductivity",
    "cost_per_kg": "number",
}
REQUIRED = ("conductivity_through", "density", "specific_heat", "emissivity", "surface_class")
KEYS = (*DIMENSION_OF, "surface_class", "title", "notes", "like")
ISOTROPIC = "isotropic: equal to conductivity_through"  # a source, also in the library
EXAMPLES = {"emissivity": "0.92", "cost_per_kg": "1.1"}  # the bare numbers


@dataclass(frozen=True)
class Value:
    """A property [SI] with its source, how far that is to be trusted, and its range where known."""

    value: float
    source: str
    mark: Mark
    low: float | None = None
    high: float | None = None


@dataclass(frozen=True)
class Material:
    """A material of a layer.

    Conductivities [W/(m K)] are those through and along the wall, density is in kg/m3, specific heat in
    J/(kg K), emissivity is total hemispherical, near 300 to 350 K. `surface_class` sets the contact
    conductance of a finger. The values of a gas are for tables: a gap takes those at its own temperature.
    """

    name: str
    kind: Literal["solid", "gas"]
    surface_class: SurfaceClass
    conductivity_through: Value
    conductivity_along: Value
    density: Value
    specific_heat: Value
    emissivity: Value
    cost_per_kg: Value | None = None
    title: str = ""
    notes: str = ""

    def values(self) -> dict[str, Value]:
        """Property name -> value, for those that are known."""
        known = {name: getattr(self, name) for name in DIMENSION_OF}
        return {name: value for name, value in known.items() if value is not None}


class SourceRow(NamedTuple):
    """A row of the table of sources, as text."""

    material: str
    property: str
    value: str
    range: str
    mark: str
    source: str


@cache
def library() -> Mapping[str, Material]:
    """The library's materials by name, in the order of its file."""
    text = files("cupfem").joinpath("data/materials.toml").read_text(encoding="utf-8")
    tables = tomllib.loads(text)["material"]
    return MappingProxyType({name: _from_library(name, table) for name, table in tables.items()})


def get_material(name: str, own: Mapping[str, Material] = MappingProxyType({})) -> Material:
    """Return a material by name; the user's own go before the library's.

    Raises InputError with the nearest name.
    """
    known = {**library(), **own}
    if name not in known:
        why = f"no such material.{nearest(name, known)}"
        raise InputError("material", name, why, f'see "cupfem materials", or add a table [material."{name}"]')
    return known[name]


def material_from_table(name: str, table: Mapping[str, object]) -> Material:
    """Return the user's own material from the keys of a [material."name"] table.

    A property is a text with its unit ("0.08 W/(m K)"), or a table of value, low, high, mark and source as in
    the library. What is left out comes from the library's material `like`, or from that of the same name.
    Without either all but conductivity_along are needed. Raises InputError.
    """
    what = f"material.{name}"
    _check_keys(what, table, KEYS)
    start = _inherited(what, name, table)
    given: dict[str, Any] = _values(what, table)
    given |= {key: _text(f"{what}.{key}", table[key]) for key in ("title", "notes") if key in table}
    if "surface_class" in table:
        entry = table["surface_class"]
        given["surface_class"] = _choice(f"{what}.surface_class", entry, get_args(SurfaceClass))
    if start is None:
        _check_complete(what, given)
    if start is None or start.conductivity_along.source == ISOTROPIC:
        given = _isotropic(given) | given
    return Material(name=name, kind="solid", **given) if start is None else replace(start, name=name, **given)


def sources_table(materials: Iterable[Material], units: Units = "si") -> list[SourceRow]:
    """One row for each property of each material: value and range with units, mark and source."""
    return [
        _source_row(material.name, key, value, units)
        for material in materials
        for key, value in material.values().items()
    ]


def _source_row(name: str, key: str, value: Value, units: Units) -> SourceRow:
    def shown(number: float | None) -> str:
        if number is None:
            return ""
        return f"{number:g}" if key in EXAMPLES else format_quantity(number, DIMENSION_OF[key], units)

    low, high = shown(value.low), shown(value.high)
    spread = f"{low.partition(' ')[0]} to {high}" if low and high else low or high
    return SourceRow(name, key, shown(value.value), spread, value.mark, value.source)


def _from_library(name: str, table: Mapping[str, Any]) -> Material:
    what = f"material.{name}"
    words = {key: table[key] for key in ("kind", "surface_class", "title", "notes") if key in table}
    return Material(name=name, **words, **_values(what, table))


def _values(what: str, table: Mapping[str, object]) -> dict[str, Any]:
    return {key: _value(f"{what}.{key}", table[key], key) for key in DIMENSION_OF if key in table}


def _inherited(what: str, name: str, table: Mapping[str, object]) -> Material | None:
    if "like" not in table and name not in library():
        return None
    like = _text(f"{what}.like", table.get("like", name))
    if like not in library():
        instead = "name a material of the library"
        raise InputError(f"{what}.like", like, f"not in the library.{nearest(like, library())}", instead)
    if library()[like].kind == "gas":
        raise InputError(f"{what}.like", like, "a gas, and own materials are solids", "name a solid")
    return library()[like]


def _check_complete(what: str, given: Mapping[str, object]) -> None:
    missing = ", ".join(key for key in REQUIRED if key not in given)
    if missing:
        instead = 'give them, or write like = "cupstock board" to inherit'
        raise InputError(what, None, f"no {missing}", instead)


def _isotropic(given: Mapping[str, Value]) -> dict[str, Any]:
    through = given.get("conductivity_through")
    return {"conductivity_along": replace(through, source=ISOTROPIC, mark="derived")} if through else {}


def _check_keys(what: str, table: Mapping[str, object], keys: Iterable[str]) -> None:
    for key in table:
        if key == "kind":
            instead = 'leave it out; a gap is of the material "air"'
            raise InputError(f"{what}.kind", table[key], "own materials are solids", instead)
        if key not in keys:
            why, instead = f"unknown key.{nearest(key, keys)}", f"use {', '.join(keys)}"
            raise InputError(f"{what}.{key}", None, why, instead)


def _value(what: str, entry: object, key: str) -> Value:
    """Read a property: a bare quantity (of the user) or a table with its source."""
    if not isinstance(entry, Mapping):
        return Value(_number(what, entry, key), "given by the user", "user")
    _check_keys(what, entry, ("value", "low", "high", "mark", "source"))
    if "value" not in entry:
        raise InputError(what, None, "no value", f"write value = {_example(key)}")
    numbers = {part: _number(what, entry[part], key) for part in ("value", "low", "high") if part in entry}
    value, low, high = numbers["value"], numbers.get("low"), numbers.get("high")
    if not (low or value) <= value <= (high or value):
        raise InputError(what, None, "the value lies outside low and high", "correct low, value or high")
    mark = cast(Mark, _choice(f"{what}.mark", entry.get("mark", "user"), get_args(Mark)))
    return Value(value, _text(f"{what}.source", entry.get("source", "given by the user")), mark, low, high)


def _number(what: str, entry: object, key: str) -> float:
    try:
        number = _bare(entry) if key == "cost_per_kg" else read_quantity(entry, DIMENSION_OF[key])
    except InputError as error:
        raise InputError(what, error.value, error.why, error.instead) from None
    if number <= 0.0 and key != "emissivity":
        raise InputError(what, entry, "must be positive", f"write it as in {_example(key)}")
    return number


def _bare(entry: object) -> float:
    if isinstance(entry, int | float) and not isinstance(entry, bool) and math.isfinite(entry):
        return float(entry)
    raise InputError("cost", entry, "not a number", "write a bare number, in the currency of your choice")


def _text(what: str, entry: object) -> str:
    if isinstance(entry, str) and entry.strip():
        return entry
    raise InputError(what, entry, "not a text", "write a text in quotation marks")


def _choice(what: str, entry: object, choices: tuple[str, ...]) -> str:
    if entry not in choices:
        raise InputError(what, entry, "no such choice", f"use one of {', '.join(choices)}")
    return str(entry)


def _example(key: str) -> str:
    return EXAMPLES.get(key) or f'"{DIMENSIONS[DIMENSION_OF[key]].examples[0]}"'
