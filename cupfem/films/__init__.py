"""Films: heat flux that leaves a surface, and vapour that leaves the drink, with their ranges of validity
as data.

`correlations` holds the published formulas in dimensionless numbers; `outside`, `drink_side` and
`underneath` put them on the edges of a cup; `surface` and `evaporation` are the free surface;
`condensation` is a bound.
"""

from cupfem.films.base import (
    GRAVITY,
    SMOOTHING,
    STEFAN_BOLTZMANN,
    Applied,
    Film,
    FilmSum,
    FixedFilm,
    FluxFunction,
    Radiation,
    Validity,
    Values,
    applied_range,
)
from cupfem.films.drink_side import DrinkConvection, Stirred
from cupfem.films.evaporation import (
    CLOSURES,
    DEFAULT_CLOSURE,
    BowerSaylor,
    ChiltonColburn,
    RyanHarleman,
    Shah,
    closure,
)
from cupfem.films.headspace import Condensation, HeadspaceConvection, Hole, RadiationTo, condensed
from cupfem.films.outside import (
    Convection,
    ForcedConvection,
    MixedConvection,
    NaturalConvectionCurl,
    NaturalConvectionPlate,
)
from cupfem.films.surface import (
    FREEBOARD_FACTOR,
    FREEBOARD_RANGE,
    Recessed,
    SurfaceClosure,
    SurfaceState,
)
from cupfem.films.underneath import (
    TABLE_RESISTANCE,
    CavityAir,
    HorizontalPlate,
    TableContact,
    ThickTable,
    disk_length,
)

__all__ = [
    "CLOSURES",
    "DEFAULT_CLOSURE",
    "FREEBOARD_FACTOR",
    "FREEBOARD_RANGE",
    "GRAVITY",
    "SMOOTHING",
    "STEFAN_BOLTZMANN",
    "TABLE_RESISTANCE",
    "Applied",
    "BowerSaylor",
    "CavityAir",
    "ChiltonColburn",
    "Condensation",
    "Convection",
    "DrinkConvection",
    "Film",
    "FilmSum",
    "FixedFilm",
    "FluxFunction",
    "ForcedConvection",
    "HeadspaceConvection",
    "Hole",
    "HorizontalPlate",
    "MixedConvection",
    "NaturalConvectionCurl",
    "NaturalConvectionPlate",
    "Radiation",
    "RadiationTo",
    "Recessed",
    "RyanHarleman",
    "Shah",
    "Stirred",
    "SurfaceClosure",
    "SurfaceState",
    "TableContact",
    "ThickTable",
    "Validity",
    "Values",
    "applied_range",
    "closure",
    "condensed",
    "disk_length",
]
