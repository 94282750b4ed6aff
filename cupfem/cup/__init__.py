"""The cup file: outline, layers from inside to outside, base, sleeve, and the user's own materials.

`outline` and `profile` are the inside face, `layers` the layers with their ridges, `sleeve` the sleeve file,
`model` the cup, `checks` what must hold between its parts.
"""

from cupfem.cup.cells import Flute, Strut
from cupfem.cup.checks import RESERVED_NAMES
from cupfem.cup.layers import Layer, Ridge, SleeveLayer
from cupfem.cup.model import Base, Cup, cup_schema, load_cup
from cupfem.cup.outline import Outline
from cupfem.cup.profile import Profile, spline
from cupfem.cup.sleeve import Sleeve, load_sleeve, sleeve_schema

__all__ = [
    "RESERVED_NAMES",
    "Base",
    "Cup",
    "Flute",
    "Layer",
    "Outline",
    "Profile",
    "Ridge",
    "Sleeve",
    "SleeveLayer",
    "Strut",
    "cup_schema",
    "load_cup",
    "load_sleeve",
    "sleeve_schema",
    "spline",
]
