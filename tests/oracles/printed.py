"""Comparison with printed digits: a number in print is right to half a unit of its last digit."""

from __future__ import annotations

from decimal import Decimal

import numpy as np
from numpy.typing import ArrayLike


def last_digit(text: str) -> float:
    """One unit in the last printed digit: "18.25" -> 0.01, "2.7254e7" -> 1e3."""
    exponent = Decimal(text).as_tuple().exponent
    return float(10.0 ** int(exponent))


def assert_printed(values: ArrayLike, digits: str, units: float = 0.5) -> None:
    """Each value agrees with the printed number at its place in `digits` (separated by blanks).

    `units` is what is allowed, in units of the last printed digit: 0.5 for rounded figures, 1 for figures
    that are cut off.
    """
    texts = digits.split()
    found = np.ravel(np.asarray(values, dtype=float))
    assert len(found) == len(texts), f"{len(found)} values, {len(texts)} printed"
    for value, text in zip(found, texts, strict=True):
        assert abs(value - float(text)) <= 1.001 * units * last_digit(text), (
            f"{value:.12g} is printed as {text}"
        )
