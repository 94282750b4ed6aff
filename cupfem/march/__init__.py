"""Time integration of wall sections and drink as one bordered system."""

from cupfem.march.integrate import Counters, March, Step
from cupfem.march.system import Section, System, add_terms

__all__ = ["Counters", "March", "Section", "Step", "System", "add_terms"]
