"""A measured log drawn over a run."""

from __future__ import annotations

from matplotlib.figure import Figure

from cupfem.figures import style
from cupfem.quantities import Units
from cupfem.run import Run
from cupfem.run.log import MeasuredLog, curve_of, misfits


def log_figure(run: Run, log: MeasuredLog, units: Units = "si") -> Figure:
    """Each column of a log as points over the run's line, with its root mean square error."""
    figure = style.new_figure(8.0, 4.4, f"{run.cup.title}: measured and computed, {run.serving.title}")
    axes = style.add_axes(figure, 0.75, 0.6, 0.35, 0.6)
    for misfit in misfits(run, log):
        line = style.shown(curve_of(run, misfit.column), "temperature", units)
        points = style.shown(log.columns[misfit.column], "temperature", units)
        (drawn,) = axes.plot(run.time, line, linewidth=1.6, label=misfit.line())
        axes.plot(log.time, points, ".", color=drawn.get_color(), markersize=4.0)
    style.label_axes(axes, "time after the pour", f"temperature [{style.unit_sign('temperature', units)}]")
    style.even_time(axes, run.serving.duration)
    axes.legend(fontsize=style.SMALL, frameon=False)
    return figure
