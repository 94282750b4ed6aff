"""Drink and headspace as lumped nodes, balanced term by term.

`lumped` is what the walls see of them; `surface` the open surface; `headspace` gas, vapour and lid; `node`
the drink itself with its unknowns.
"""

from cupfem.drink.headspace import Headspace, Lid
from cupfem.drink.lumped import Ambient, Lumped
from cupfem.drink.node import MINIMUM_MASS, Drink
from cupfem.drink.surface import Surface, surface_state

__all__ = ["MINIMUM_MASS", "Ambient", "Drink", "Headspace", "Lid", "Lumped", "Surface", "surface_state"]
