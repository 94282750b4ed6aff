"""The serving file: the drink, the room, the lid, what happens when, the films, and the targets.

Times in seconds from the pour, temperatures in degrees Celsius, volumes in cubic metres. `Serving()` is the
default serving: water of 85 degC, filled to 10 mm below the brim, open, ten minutes in a room of 22 degC.
"""

from cupfem.serving.checks import FREEBOARD, check, fill_volume
from cupfem.serving.events import Drinking, LidMove, Refill, Sip, Stand, Stir
from cupfem.serving.films import (
    CORRELATIONS,
    SURFACE_CORRELATIONS,
    DrinkFilm,
    Films,
    FixedFilm,
    NamedFilm,
    SurfaceFilm,
)
from cupfem.serving.model import COINCIDENT, PRESSURE, Serving, load_serving, serving_schema
from cupfem.serving.pads import Pad
from cupfem.serving.tables import Carrier, Drink, Lid, Room, Start, Tabletop, Target

__all__ = [
    "COINCIDENT",
    "CORRELATIONS",
    "FREEBOARD",
    "PRESSURE",
    "SURFACE_CORRELATIONS",
    "Carrier",
    "Drink",
    "DrinkFilm",
    "Drinking",
    "Films",
    "FixedFilm",
    "Lid",
    "LidMove",
    "NamedFilm",
    "Pad",
    "Refill",
    "Room",
    "Serving",
    "Sip",
    "Stand",
    "Start",
    "Stir",
    "SurfaceFilm",
    "Tabletop",
    "Target",
    "check",
    "fill_volume",
    "load_serving",
    "serving_schema",
]
