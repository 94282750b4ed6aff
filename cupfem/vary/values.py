"""Values of a plan: text with a unit or a number in the file, a float for the arithmetic of a design."""

from __future__ import annotations

from dataclasses import dataclass

from cupfem.errors import InputError
from cupfem.quantities import DIMENSIONS, parse_quantity, read_quantity
from cupfem.quantities.text import in_unit, shown_unit

DIGITS = 9
"""Significant digits of a value that a design makes, far beyond those of any drawing."""

Value = str | int | float | bool
"""A value as a file has it."""


@dataclass(frozen=True)
class Change:
    """A change of whatever the file has: its value times `scale`, plus `shift` (SI)."""

    scale: float = 1.0
    shift: float = 0.0

    def of(self, what: str, value: object, kind: str) -> Value:
        """The changed value; InputError if the file has none that can be changed."""
        if value is None:
            why = "not in the file, so that nothing can be changed by a share or difference"
            raise InputError(what, None, why, "write the middle value in the plan, or the key in the file")
        return written(self.scale * number(what, value, kind) + self.shift, kind)


Setting = Value | Change
"""What a case sets a key to."""


def number(what: str, value: object, kind: str) -> float:
    """A value as a float (SI, temperature: degC); InputError if it is none of this kind."""
    if kind in DIMENSIONS:
        try:
            return read_quantity(value, kind)
        except InputError as error:
            raise InputError(what, error.value, error.why, error.instead) from None
    if kind == "word" or isinstance(value, bool) or not isinstance(value, int | float):
        raise InputError(what, value, "not a number", "write a number, or a list of the values to try")
    return float(value)


def written(value: float, kind: str) -> Value:
    """A float as a file has it, at nine significant digits."""
    if kind == "integer":
        return round(value)
    if kind not in DIMENSIONS or kind == "fraction":
        return float(f"{value:.{DIGITS}g}")
    unit = shown_unit(value, kind, "si")
    return f"{in_unit(value, unit, kind):.{DIGITS}g} {unit}"


def is_share(text: object) -> bool:
    """Whether a spread is told relative to the value, as in "3 %"."""
    return isinstance(text, str) and text.strip().endswith("%")


def share(what: str, text: object) -> float:
    """A spread such as "3 %"; InputError if it cannot be read."""
    try:
        return parse_quantity(str(text), "fraction")
    except InputError as error:
        raise InputError(what, error.value, error.why, error.instead) from None


def difference(what: str, text: object, kind: str) -> float:
    """A spread in the unit of the value; that of a temperature is a difference in K."""
    return number(what, text, "temperature_difference" if kind == "temperature" else kind)


def column_unit(values: list[float], kind: str) -> str:
    """The unit of a column: the one in which the largest of its values is shown."""
    if kind not in DIMENSIONS or kind == "fraction":
        return ""
    return shown_unit(max((abs(value) for value in values), default=0.0), kind, "si")
