"""The Runge-Kutta scheme ESDIRK4(3)6L[2]SA.

Kennedy and Carpenter, "Diagonally Implicit Runge-Kutta Methods for Ordinary Differential Equations. A
Review",
NASA/TM-2016-219173 (2016), sec. 7.1.1: six stages (the first explicit), order four, L-stable, stiffly
accurate, embedded order three. The coefficients are held to their order conditions by a test.
"""

from __future__ import annotations

import numpy as np

ROOT = np.sqrt(2.0)
GAMMA = 0.25
NODES = np.array([0.0, 0.5, (2.0 - ROOT) / 4.0, 0.625, 1.04, 1.0])

_A3 = (1.0 - ROOT) / 8.0
_A4 = (5.0 - 7.0 * ROOT) / 64.0
_A5 = (-13796.0 - 54539.0 * ROOT) / 125000.0
_B1 = (1181.0 - 987.0 * ROOT) / 13782.0

WEIGHTS = np.array(
    [
        _B1,
        _B1,
        47.0 * (-267.0 + 1783.0 * ROOT) / 273343.0,
        -16.0 * (-22922.0 + 3525.0 * ROOT) / 571953.0,
        -15625.0 * (97.0 + 376.0 * ROOT) / 90749876.0,
        0.25,
    ]
)

STAGES = np.zeros((6, 6))
STAGES[1, :2] = 0.25
STAGES[2, :3] = _A3, _A3, 0.25
STAGES[3, :4] = _A4, _A4, 7.0 * (1.0 + ROOT) / 32.0, 0.25
STAGES[4, :3] = _A5, _A5, (506605.0 + 132109.0 * ROOT) / 437500.0
STAGES[4, 3:5] = 166.0 * (-97.0 + 376.0 * ROOT) / 109375.0, 0.25
STAGES[5] = WEIGHTS

EMBEDDED = np.array(
    [
        -480923228411.0 / 4982971448372.0,
        -480923228411.0 / 4982971448372.0,
        6709447293961.0 / 12833189095359.0,
        3513175791894.0 / 6748737351361.0,
        -498863281070.0 / 6042575550617.0,
        2077005547802.0 / 8945017530137.0,
    ]
)
"""Third-order weights; the error estimate is h sum (WEIGHTS - EMBEDDED) k."""
