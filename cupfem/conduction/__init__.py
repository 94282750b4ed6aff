"""Heat conduction in one section: mass and stiffness on a fixed pattern, gaps whose conductivity follows the
field, and exchange of heat over named edges, wholly or between two heights.

rho c dT/dt = div(k grad T) + q, weak form over the half section with the measure of `axisymmetry` (any
textbook, e.g. Lewis, Nithiarasu, Seetharamu, Fundamentals of the Finite Element Method for Heat and Fluid
Flow, 2004, ch. 3 and 6).
"""

from cupfem.conduction.conditions import (
    NOTHING,
    Conditions,
    Conductivity,
    Exchange,
    Feeds,
    FixedFlux,
    FixedTemperature,
    GasLayer,
    Solid,
    Surroundings,
    Window,
)
from cupfem.conduction.exchange import EdgeExchange
from cupfem.conduction.operators import Conduction

__all__ = [
    "NOTHING",
    "Conditions",
    "Conduction",
    "Conductivity",
    "EdgeExchange",
    "Exchange",
    "Feeds",
    "FixedFlux",
    "FixedTemperature",
    "GasLayer",
    "Solid",
    "Surroundings",
    "Window",
]
