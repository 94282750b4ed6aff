"""cupfem: axisymmetric finite-element simulation of cups that hold hot drinks.

files -> cup + serving -> meridian -> mesh -> operators -> march -> run -> touch -> {breakdown, fields}
-> {vary, figures} -> report -> command line

Lengths are metres, times seconds, temperatures degrees Celsius; quantities written by people are text with
a unit ("0.35 mm", "185 degF"). The public names are loaded at first use, so that ``import cupfem`` is light.
"""

from __future__ import annotations

import sys
from importlib import import_module
from types import ModuleType
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from cupfem.breakdown import slab
    from cupfem.cup import Cup, load_cup
    from cupfem.errors import ConvergenceError, CupfemError, InputError
    from cupfem.exchange import write_fields
    from cupfem.hold import hold
    from cupfem.materials import library
    from cupfem.pour import pour
    from cupfem.run import Run, load_run
    from cupfem.serving import Drink, Room, Serving, Target, load_serving
    from cupfem.vary import vary

__version__ = "0.1.0"

__all__ = [
    "ConvergenceError",
    "Cup",
    "CupfemError",
    "Drink",
    "InputError",
    "Room",
    "Run",
    "Serving",
    "Target",
    "hold",
    "library",
    "load_cup",
    "load_run",
    "load_serving",
    "pour",
    "slab",
    "vary",
    "write_fields",
]

_HOME = {
    "ConvergenceError": "errors",
    "Cup": "cup",
    "CupfemError": "errors",
    "Drink": "serving",
    "InputError": "errors",
    "Room": "serving",
    "Run": "run",
    "Serving": "serving",
    "Target": "serving",
    "hold": "hold",
    "library": "materials",
    "load_cup": "cup",
    "load_run": "run",
    "load_serving": "serving",
    "pour": "pour",
    "slab": "breakdown",
    "vary": "vary",
    "write_fields": "exchange",
}


def __getattr__(name: str) -> object:
    if name not in _HOME:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    value: object = getattr(import_module(f"{__name__}.{_HOME[name]}"), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__})


class _Package(ModuleType):
    """A package whose public names win over its submodules of the same name.

    The import system binds every imported submodule as an attribute of its package. ``cupfem.pour`` is a
    function to the user, and has to stay one after ``import cupfem.pour``.
    """

    def __setattr__(self, name: str, value: object) -> None:
        if isinstance(value, ModuleType) and _HOME.get(name) == name:
            value = getattr(value, name)
        super().__setattr__(name, value)


sys.modules[__name__].__class__ = _Package
