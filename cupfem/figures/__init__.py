"""Pictures: functions that take results and return a matplotlib Figure.

No figure is shown or kept by this module, no global setting of matplotlib is changed, and pyplot is not
imported. Every function takes ``units="us"`` too.
"""

from matplotlib.figure import Figure

from cupfem.figures.against import against_figure
from cupfem.figures.field import field_figure, field_frames, field_times
from cupfem.figures.files import png, svg, write_drawing, write_figures
from cupfem.figures.heat import drink_figure, grouped_heats, heat_figure
from cupfem.figures.hold import hold_figure
from cupfem.figures.log import log_figure
from cupfem.figures.section import section_figure
from cupfem.figures.wall import wall_history, wall_map, wall_profile

__all__ = [
    "Figure",
    "against_figure",
    "drink_figure",
    "field_figure",
    "field_frames",
    "field_times",
    "grouped_heats",
    "heat_figure",
    "hold_figure",
    "log_figure",
    "png",
    "section_figure",
    "svg",
    "wall_history",
    "wall_map",
    "wall_profile",
    "write_drawing",
    "write_figures",
]
