"""The serving file: the drink, the room, what is drunk when, the films, and the targets.

Times in seconds from the pour, temperatures in degrees Celsius, volumes in cubic metres. `Serving()` is the
default serving: water of 85 degC, filled to 10 mm below the brim, open, ten minutes in a room of 22 degC.
"""

from cupfem.serving.films import CORRELATIONS, SURFACE_CORRELATIONS, DrinkFilm, Films, FixedFilm, NamedFilm
from cupfem.serving.model import (
    FREEBOARD,
    PRESSURE,
    Serving,
    check,
    fill_volume,
    load_serving,
    serving_schema,
)
from cupfem.serving.pads import Pad
from cupfem.serving.tables import Drink, Drinking, Room, Sip, Start, Target

__all__ = [
    "CORRELATIONS",
    "FREEBOARD",
    "PRESSURE",
    "SURFACE_CORRELATIONS",
    "Drink",
    "DrinkFilm",
    "Drinking",
    "Films",
    "FixedFilm",
    "NamedFilm",
    "Pad",
    "Room",
    "Serving",
    "Sip",
    "Start",
    "Target",
    "check",
    "fill_volume",
    "load_serving",
    "serving_schema",
]
