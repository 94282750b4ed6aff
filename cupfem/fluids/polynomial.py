"""Polynomials in the temperature [degC] by Horner's rule, lowest power first; floats or arrays.

A property is asked for thousands of times in a run, mostly for one float: numpy's own polynomials are slower
there by an order of magnitude.
"""

from __future__ import annotations

from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

Coefficients = tuple[float, ...]
Array = NDArray[np.float64]
# what goes in comes out: a float, an array, or what may be either
Value = TypeVar("Value", float, Array, float | Array)


def horner(coefficients: Coefficients, x: Value) -> Value:
    """Return c0 + c1 x + c2 x^2 + ..., of the shape of `x`."""
    result = 0.0 * x + coefficients[-1]
    for coefficient in coefficients[-2::-1]:
        result = result * x + coefficient
    return result


def stacked(*polynomials: Coefficients) -> Array:
    """Several polynomials as one table `[polynomial, power]` for `values_of`."""
    table = np.zeros((len(polynomials), max(len(coefficients) for coefficients in polynomials)))
    for row, coefficients in zip(table, polynomials, strict=True):
        row[: len(coefficients)] = coefficients
    return table


def values_of(table: Array, x: Array) -> Array:
    """Values `[polynomial, point]` at points `[point]`: one pass for all is faster than one each."""
    powers = np.empty((table.shape[1], len(x)))
    powers[0] = 1.0
    for power in range(1, len(powers)):
        np.multiply(powers[power - 1], x, out=powers[power])
    return np.asarray(table @ powers)


def derivative(coefficients: Coefficients) -> Coefficients:
    """Coefficients of the derivative."""
    return tuple(power * c for power, c in enumerate(coefficients))[1:] or (0.0,)


def integral(coefficients: Coefficients) -> Coefficients:
    """Coefficients of the integral from zero."""
    return (0.0, *(c / (power + 1) for power, c in enumerate(coefficients)))


def scaled(coefficients: Coefficients, factor: float) -> Coefficients:
    """Coefficients of the polynomial times a factor."""
    return tuple(factor * c for c in coefficients)
