"""What varies, ready for a design: listed levels, and the value at a share of its distribution."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from cupfem.errors import InputError
from cupfem.vary.paths import Slot
from cupfem.vary.plan import Beta, Listed, Lognormal, Normal, Plan, Range, Uniform, Vary
from cupfem.vary.values import Change, Setting, difference, is_share, number, share, written

TAIL = 0.1
"""Share of a distribution below the low and above the high value that "one at a time" takes."""


@dataclass(frozen=True)
class Factor:
    """One `[[vary]]` table.

    Attributes
    ----------
    slots:
        The values that it sets, all to the same (or by the same change).
    levels:
        Listed settings; empty for a range without a count and for a distribution.
    quantile:
        Share from 0 to 1 -> the setting.
    low, high:
        Settings of "one at a time".
    bounds:
        Of a search: values (SI) of a range, or 0 and the last number of a list.
    whole:
        Whether only whole numbers lie between the bounds.
    """

    slots: tuple[Slot, ...]
    levels: tuple[Setting, ...]
    quantile: Callable[[float], Setting]
    low: Setting
    high: Setting
    bounds: tuple[float, float] = (0.0, 1.0)
    whole: bool = False

    @property
    def name(self) -> str:
        """The first of its paths."""
        return self.slots[0].key

    def at(self, place: float) -> Setting:
        """The setting at a value between the bounds of a search."""
        if self.levels:
            return self.levels[round(place)]
        return written(place, self.slots[0].kind)


def factors_of(plan: Plan, slots: Mapping[str, Slot]) -> tuple[Factor, ...]:
    """The factors of a plan; InputError for a value that does not fit its key."""
    return tuple(_factor(varied, tuple(slots[key] for key in varied.keys)) for varied in plan.vary)


def _factor(varied: Vary, slots: tuple[Slot, ...]) -> Factor:
    kinds = {slot.kind for slot in slots}
    if len(kinds) > 1:
        why = f"its paths name different kinds of value: {', '.join(sorted(kinds))}"
        raise InputError("vary.key", slots[-1].key, why, "give each a [[vary]] of its own")
    if isinstance(varied, Listed):
        return _listed(varied, slots)
    if isinstance(varied, Range):
        return _range(varied, slots)
    quantile = _QUANTILES[type(varied)](varied, slots[0])
    return Factor(slots, (), quantile, quantile(TAIL), quantile(1.0 - TAIL))


def _listed(varied: Listed, slots: tuple[Slot, ...]) -> Factor:
    kind = slots[0].kind
    if kind != "word":
        for value in varied.list:
            number(slots[0].key, value, kind)
    values = varied.list

    def quantile(place: float) -> Setting:
        return _setting(values[min(int(place * len(values)), len(values) - 1)])

    last = float(len(values) - 1)
    levels = tuple(_setting(value) for value in values)
    return Factor(slots, levels, quantile, levels[0], levels[-1], (0.0, last), whole=True)


def _setting(value: Setting) -> Setting:
    return value


def _range(varied: Range, slots: tuple[Slot, ...]) -> Factor:
    kind = slots[0].kind
    low, high = (number(f"{slots[0].key}: {end}", value, kind) for end, value in
                 (("from", varied.from_), ("to", varied.to)))  # fmt: skip
    if low >= high:
        raise InputError(f"{slots[0].key}: from", varied.from_, "not below to", "write the lower value first")
    whole = kind == "integer"

    def quantile(place: float) -> Setting:
        if whole:
            return min(int(low + place * (high - low + 1)), int(high))
        return written(low + place * (high - low), kind)

    levels = tuple(dict.fromkeys(written(float(value), kind)
                   for value in np.linspace(low, high, varied.count or 0)))  # fmt: skip
    bounds = (0.0, float(len(levels) - 1)) if levels else (low, high)
    return Factor(slots, levels, quantile, written(low, kind), written(high, kind), bounds, whole)


def _spread_about(slot: Slot, text: object, name: str) -> Callable[[float], Change]:
    """Number of spreads -> the change of what the file has."""
    if is_share(text):
        _refuse_share(slot, text, name)
        part = share(f"{slot.key}: {name}", text)
        return lambda times: Change(scale=float(f"{1.0 + times * part:.9g}"))
    size = difference(f"{slot.key}: {name}", text, slot.kind)
    return lambda times: Change(shift=float(f"{times * size:.9g}"))


def _refuse_share(slot: Slot, text: object, name: str) -> None:
    if slot.kind in ("temperature", "fraction"):
        instead = 'write it as in "1.5 K"' if slot.kind == "temperature" else "write a number such as 0.02"
        raise InputError(
            f"{slot.key}: {name}", text, f"a share of a {slot.kind} has no clear meaning", instead
        )


def _normal(varied: Normal, slot: Slot) -> Callable[[float], Setting]:
    from scipy.special import ndtri  # the inverse of the standard normal distribution

    about = _spread_about(slot, varied.deviation, "deviation")
    if varied.mean is None:
        return lambda place: about(float(ndtri(place)))
    mean = written(number(f"{slot.key}: mean", varied.mean, slot.kind), slot.kind)
    return lambda place: about(float(ndtri(place))).of(slot.key, mean, slot.kind)


def _uniform(varied: Uniform, slot: Slot) -> Callable[[float], Setting]:
    about = _spread_about(slot, varied.plus_minus, "plus_minus")
    return lambda place: about(2.0 * place - 1.0)


def _lognormal(varied: Lognormal, slot: Slot) -> Callable[[float], Setting]:
    from scipy.special import ndtri

    def change(place: float) -> Change:
        return Change(scale=float(f"{math.exp(varied.spread * float(ndtri(place))):.9g}"))

    if varied.median is None:
        return change
    median = written(number(f"{slot.key}: median", varied.median, slot.kind), slot.kind)
    return lambda place: change(place).of(slot.key, median, slot.kind)


def _beta(varied: Beta, slot: Slot) -> Callable[[float], Setting]:
    from scipy.special import betaincinv  # the inverse of the beta distribution

    low, high = (number(slot.key, value, slot.kind) for value in (varied.from_, varied.to))
    if low >= high:
        raise InputError(f"{slot.key}: from", varied.from_, "not below to", "write the lower value first")

    def quantile(place: float) -> Setting:
        share = float(betaincinv(varied.alpha, varied.beta, place))
        return written(low + share * (high - low), slot.kind)

    return quantile


_QUANTILES: Mapping[type, Callable[..., Callable[[float], Setting]]] = {
    Normal: _normal,
    Uniform: _uniform,
    Lognormal: _lognormal,
    Beta: _beta,
}
