"""The tube job: a straight three-layer tube from which a hot drink is drunk at a steady rate in ten minutes.

Inner radius 35 mm, board 0.30 / air 0.80 / board 0.30 mm, height 92 mm, no base, ends insulated, all at
22 degC. Inside 400 W/(m2 K) to the drink below the level, 8 to 40 degC above; the level falls from 78 to
30 mm in 600 s. Outside, local: 1.42 (|Ts - Ta| / 0.092 m)^(1/4) and radiation of emissivity
0.9, to 22 degC. Invented.

REFERENCE holds times [s], the outer face at z = 20, 46 and 85 mm and the drink [degC], from an independent
computation with fourth-order elements and 1,241 steps, good to about 0.003 K.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

import cupfem
from cupfem.films import FluxFunction

HEIGHTS = (0.020, 0.046, 0.085)
REFERENCE = np.array(
    [
        [5, 43.4071, 43.4071, 22.4301, 84.57271],
        [10, 57.5295, 57.5295, 23.1950, 84.40859],
        [20, 66.3030, 66.3030, 24.6676, 84.16576],
        [60, 67.7545, 67.7545, 28.4232, 83.33463],
        [300, 64.1234, 64.1232, 29.2707, 78.16017],
        [600, 58.7072, 29.8979, 29.2505, 70.49388],
    ]
)
BOUNDS = np.array([0.05, 0.05, 0.03, 0.03, 0.03, 0.03])
"""Allowed error at each time [K]."""

CUP = """
title = "Tube of board, air and board (invented)"
base = "none"
[cup]
height = "92 mm"
inner_top_diameter = "70 mm"
inner_foot_diameter = "70 mm"
[[layer]]
name = "inner"
material = "tube board"
thickness = "0.30 mm"
[[layer]]
name = "gap"
material = "tube gap"
thickness = "0.80 mm"
[[layer]]
name = "outer"
material = "tube board"
thickness = "0.30 mm"
[material."tube board"]
conductivity_through = "0.12 W/(m K)"
density = "700 kg/m^3"
specific_heat = "1600 J/(kg K)"
emissivity = "0.9"
surface_class = "board"
[material."tube gap"]
conductivity_through = "0.045 W/(m K)"
density = "1 kg/m^3"
specific_heat = "1107 J/(kg K)"
emissivity = "0.9"
surface_class = "board"
"""

SERVING = """
title = "Drunk in ten minutes (invented)"
duration = "600 s"
[drink]
density = "1000 kg/m^3"
specific_heat = "4180 J/(kg K)"
temperature = "85 degC"
level = "78 mm"
[room]
temperature = "22 degC"
[[event]]
drinking = "184.72565 ml"
from = "0 s"
to = "600 s"
[films]
wetted = { coefficient = "400 W/(m^2 K)" }
dry = { coefficient = "8 W/(m^2 K)", surroundings = "40 degC" }
surface = { coefficient = "60 W/(m^2 K)", surroundings = "22 degC" }
"""


def outside(surface: NDArray, surroundings: float, height: NDArray, time: float) -> NDArray:
    """Heat flux leaving the outer face [W/m2]; the difference is rounded over 0.1 mK at zero."""
    hot, cold = surface + 273.15, surroundings + 273.15
    difference = surface - surroundings
    natural = 1.42 * (np.hypot(difference, 1e-4) / 0.092) ** 0.25 * difference
    return natural + 0.9 * 5.670374419e-8 * (hot**4 - cold**4)


def tube_run(**options: object) -> cupfem.Run:
    """Pour the tube job by the public API."""
    cup, serving = cupfem.Cup.from_text(CUP), cupfem.Serving.from_text(SERVING)
    films = {"outside": FluxFunction(outside)}
    return cupfem.pour(cup, serving, films=films, companion=False, **options)


def errors(run: cupfem.Run) -> NDArray:
    """Deviation from the reference, `[time, place]` [K]."""
    places = [run.outer_temperature_at(height) for height in HEIGHTS] + [run.series.drink_temperature]
    found = np.array([[np.interp(time, run.time, place) for place in places] for time in REFERENCE[:, 0]])
    return found - REFERENCE[:, 1:]
