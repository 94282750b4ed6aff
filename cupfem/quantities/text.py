"""Quantities as text: a strict pattern splits number and unit; the table, or else pint, knows the unit.

pint never sees the number, nor the unit before it has passed the pattern: given the whole text it would
evaluate "9**9**9" and read "0,5 mm" as zero.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from functools import cache, lru_cache
from typing import Any

from cupfem.errors import InputError, nearest
from cupfem.quantities.dimensions import (
    DIMENSIONS,
    KELVIN_PER_DEGF,
    ZERO_CELSIUS,
    Dimension,
    Units,
    canonical,
)

_LONGEST = 80  # characters of a quantity
_NUMBER = r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?"
_QUANTITY = re.compile(rf"({_NUMBER})(?! ?[0-9.,])(.*)")
_COMMA = re.compile(r"([+-]?[0-9]+),([0-9]+)( ?[^0-9,.]*)")
_TOKEN = r"[A-Za-z][A-Za-z_]*(?:\^-?[1-9])?"
_UNIT = re.compile(rf"{_TOKEN}(?: {_TOKEN})*(?:/{_TOKEN})*")
_UNBRACKETED = re.compile(r"/([^ /()]+(?: [^ /()]+)+)")
# signs of typography -> the plain text they stand for
_PLAIN = {
    "\u00b0C": "degC", "\u00b0F": "degF", "\u2103": "degC", "\u2109": "degF", "\u00b0": "deg",
    "\u00b5": "u", "\u03bc": "u", "\u00b2": "^2", "\u00b3": "^3", "\u00b7": " ", "\u22c5": " ", "\u2212": "-",
}  # fmt: skip
# what people write for a unit that pint and the SI read as another (C is the coulomb) or not at all
_MEANT = {
    "C": ("degC", "K"), "c": ("degC", "K"), "F": ("degF", "delta_degF"), "f": ("degF",), "k": ("K",),
    "degC": ("K",), "degF": ("delta_degF",), "deg": ("degC", "K"), "M": ("m",), "oz": ("fl_oz",),
    "pt": ("mil",), "cc": ("cm^3",), "sec": ("s",), "hr": ("h",),
}  # fmt: skip


def parse_quantity(text: str, dimension: str) -> float:
    """Read "0.35 mm" as an SI float; temperatures become degrees Celsius.

    Parameters: `text`, a number and a unit; `dimension`, a key of DIMENSIONS such as "length".
    Raises InputError, with the dimension as its `what`, for anything but a number and such a unit.
    """
    example = _known(dimension).examples[0]
    number, unit = _split(text, dimension, example)
    factor = _factor(unit, dimension)
    if factor is None:
        raise _refused(dimension, text, *_unit_problem(number, unit, dimension, example))
    value = _celsius(float(number), unit) if dimension == "temperature" else float(number) * factor
    if not math.isfinite(value) or (float(number) == 0.0 and re.match(r"[^eE]*[1-9]", number)):
        raise _refused(dimension, text, "not a number that can be stored", f'write it as in "{example}"')
    if dimension == "temperature" and value < -ZERO_CELSIUS:
        raise _refused(dimension, text, "below absolute zero", f'write it as in "{example}"')
    return value


def read_quantity(value: object, dimension: str) -> float:
    """Read a value of a file as an SI float (temperature: degC).

    It must be a text with a unit; for the dimension "fraction" it may be a bare number, and lies from 0 to 1.
    Raises InputError as `parse_quantity` does.
    """
    if isinstance(value, str):
        number = parse_quantity(value, dimension)
    elif dimension == "fraction" and isinstance(value, int | float) and not isinstance(value, bool):
        number = float(value)
    else:
        raise InputError(_words(dimension), value, "not a text with a unit", _with_unit(value, dimension))
    if dimension == "fraction" and not 0.0 <= number <= 1.0:
        raise InputError(_words(dimension), value, "not a share from 0 to 1", 'write 0.2 or "20 %"')
    return number


def format_quantity(value: float, dimension: str, units: Units = "si", digits: int = 3) -> str:
    """Write an SI float (temperature: degC) in a handy unit with `digits` significant digits: "0.35 mm"."""
    unit = shown_unit(value, dimension, units)
    number = in_unit(value, unit, dimension)
    magnitude = math.floor(math.log10(abs(number))) if number and math.isfinite(number) else 0
    if not -5 < magnitude < 9:
        return f"{number:.{digits}g} {unit}"
    shown = f"{number:.{max(digits - 1 - magnitude, 0)}f}"
    return f"{shown.rstrip('0').rstrip('.') if '.' in shown else shown} {unit}"


def shown_unit(value: float, dimension: str, units: Units) -> str:
    """Return the unit in which a value is shown; zero takes the unit of the dimension's first example."""
    size = abs(value) or abs(parse_quantity(_known(dimension).examples[0], dimension))
    parts = [part.partition("<") for part in DIMENSIONS[dimension].shown[units].split(", ")]
    return next(unit for unit, _, limit in parts if size < float(limit or "inf") or not limit)


def in_unit(value: float, unit: str, dimension: str) -> float:
    """Convert an SI value (temperature: degC) to a unit of the table."""
    if dimension == "temperature":
        return value / KELVIN_PER_DEGF + 32 if unit == "degF" else value
    return value / DIMENSIONS[dimension].units[unit]


def _known(dimension: str) -> Dimension:
    if dimension not in DIMENSIONS:
        raise ValueError(f'unknown dimension "{dimension}".{nearest(dimension, DIMENSIONS)}')
    return DIMENSIONS[dimension]


def _refused(dimension: str, text: str, why: str, instead: str) -> InputError:
    return InputError(_words(dimension), text, why, instead)


def _with_unit(value: object, dimension: str) -> str:
    example = _known(dimension).examples[0]
    bare = isinstance(value, int | float) and not isinstance(value, bool)
    return f'write it as in "{value} {example.partition(" ")[2]}"' if bare else f'write it as in "{example}"'


def _words(dimension: str) -> str:
    return dimension.replace("_", " ")


def _split(text: str, dimension: str, example: str) -> tuple[str, str]:
    plain = " ".join(text[: _LONGEST + 1].split())
    for sign, meaning in _PLAIN.items():
        plain = plain.replace(sign, meaning)
    if comma := _COMMA.fullmatch(plain):
        whole, decimals, unit = comma.groups()
        raise _refused(dimension, text, "decimal comma", f'write "{whole}.{decimals}{unit}"')
    match = _QUANTITY.fullmatch(plain)
    if len(text) > _LONGEST or match is None:
        raise _refused(dimension, text, "not a number followed by a unit", f'write it as in "{example}"')
    return match[1], " ".join(match[2].split())


def _celsius(number: float, unit: str) -> float:
    if unit == "degF":
        return (number - 32) * KELVIN_PER_DEGF
    return number - ZERO_CELSIUS if unit == "K" else number


@cache
def _table(dimension: str) -> dict[str, float]:
    return {canonical(unit, dimension): factor for unit, factor in DIMENSIONS[dimension].units.items()}


@lru_cache(maxsize=1024)
def _factor(unit: str, dimension: str) -> float | None:
    """Factor of a unit to SI, or None if it is not a unit of this dimension."""
    spelled = canonical(unit, dimension)
    if spelled in _table(dimension):
        return _table(dimension)[spelled]
    if dimension in ("temperature", "fraction") or _home(unit) or not _UNIT.fullmatch(spelled):
        return None
    return _pint_factor(spelled, dimension)


def _home(unit: str) -> str:
    """The dimension whose table holds this unit ("mil" is a length here, an angle in pint), or ""."""
    return next((name for name in DIMENSIONS if canonical(unit, name) in _table(name)), "")


def _pint_factor(spelled: str, dimension: str) -> float | None:
    registry, errors = _pint()
    si = next(unit for unit, factor in _table(dimension).items() if factor == 1.0)
    try:
        unit = registry.parse_units(re.sub(r"\bdegF\b", "delta_degF", spelled))
        return float(registry.Quantity(1.0, unit).to(registry.parse_units(si)).magnitude)
    except (errors.PintError, ValueError, TypeError, AssertionError):
        return None


@cache
def _pint() -> tuple[Any, Any]:
    # imported at the first unusual unit: it takes 0.4 s, which a run with usual units need not pay
    import pint
    import pint.errors

    registry: Any = pint.UnitRegistry()
    registry.define("fl_oz = fluid_ounce")
    return registry, pint.errors


def _unit_problem(number: str, unit: str, dimension: str, example: str) -> tuple[str, str]:
    words = _words(dimension)
    if not unit:
        return "no unit", f'write the unit too, as in "{number} {example.partition(" ")[2]}"'
    home = _home(unit).replace("_", " ")
    why = f'"{unit}" is a unit of {home}, not of {words}' if home else f'"{unit}" is not a unit of {words}'
    if _UNBRACKETED.search(canonical(unit, dimension)):
        why = "more than one unit after / needs brackets"
    meant = next(_repairs(unit, dimension), "")
    return why, f'write "{number} {meant}"' if meant else f'write it as in "{example}"'


def _repairs(unit: str, dimension: str) -> Iterator[str]:
    """Units of this dimension that may have been meant."""
    bracketed = _UNBRACKETED.sub(r"/(\1)", canonical(unit, dimension))
    for start in (unit, bracketed):
        tokens = [token for token in re.findall(r"[A-Za-z_]+", start) if token in _MEANT]
        swaps = [re.sub(rf"\b{token}\b", meant, start) for token in tokens for meant in _MEANT[token]]
        guesses = (start, start.lower(), *swaps)
        yield from (guess for guess in guesses if _factor(guess, dimension) is not None)
