"""What practitioners compute by hand in one dimension, as pure functions, without a mesh.

`effective`: L^2/alpha with series and parallel properties; `network`: steady resistances; `slab`, `ladder`:
series of the convective slab; `radial`, `course`: layered transient on the radius; `lumped`: two time scales;
`touching`: skin by effusivities. A `Station` is the wall at one height; `station(cup, serving, height)`
builds it. These share films and gaps with the field, and nothing else.
"""

from cupfem.estimates.course import DrinkCourse, drink_course, follow, wetted_station
from cupfem.estimates.drink import LumpedDrink, lumped_drink, surface_loss, volume_at, wetted_area
from cupfem.estimates.effective import (
    Effective,
    effective,
    parallel_conductivity,
    series_conductivity,
    volume_mean,
    wiener_bounds,
)
from cupfem.estimates.ladder import SlabEstimate, slab_estimate
from cupfem.estimates.lumped import (
    TimeScales,
    TwoNode,
    lumped_cooling,
    lumped_time,
    time_scales,
    two_node,
)
from cupfem.estimates.network import Steady, steady
from cupfem.estimates.radial import RadialWall, Transient, transient
from cupfem.estimates.slab import ONE_TERM_FOURIER, Heated, Quenched, time_to
from cupfem.estimates.station import Face, Station, WallLayer, station
from cupfem.estimates.touching import (
    SKIN_EFFUSIVITY,
    HalfSpace,
    contact_temperature,
    effusivity,
    effusivity_of,
    touched_surface,
)

__all__ = [
    "ONE_TERM_FOURIER",
    "SKIN_EFFUSIVITY",
    "DrinkCourse",
    "Effective",
    "Face",
    "HalfSpace",
    "Heated",
    "LumpedDrink",
    "Quenched",
    "RadialWall",
    "SlabEstimate",
    "Station",
    "Steady",
    "TimeScales",
    "Transient",
    "TwoNode",
    "WallLayer",
    "contact_temperature",
    "drink_course",
    "effective",
    "effusivity",
    "effusivity_of",
    "follow",
    "lumped_cooling",
    "lumped_drink",
    "lumped_time",
    "parallel_conductivity",
    "series_conductivity",
    "slab_estimate",
    "station",
    "steady",
    "surface_loss",
    "time_scales",
    "time_to",
    "touched_surface",
    "transient",
    "two_node",
    "volume_at",
    "volume_mean",
    "wetted_area",
    "wetted_station",
    "wiener_bounds",
]
