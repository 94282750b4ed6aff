"""Exact solutions that the tests compare with, each with its source; NumPy, SciPy and SymPy only.

Nothing here imports cupfem. Where a source prints a rounded figure and the formula behind it, the functions
give the formula's value ("recomputed") and the test names the printed figure beside it.

- convective: slab, cylinder, sphere with a film; short cylinders and bars by products
- semi_infinite: half-spaces with film, step, flux; two that touch
- stirred: slab against a well-stirred fluid
- planar: plane bars and rectangles, NAFEMS T2, T3, T4
- radial: steady cylinder walls, functions of r
- meridional: steady fields in (r, z)
- hollow_transient: hollow cylinder in time
- lumped: bodies without inner gradients, falling level
- walls: cones, laminates, flat wall
- manufactured: manufactured transient in (r, z)
"""
