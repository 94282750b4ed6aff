"""What the finger pads of a run felt: skin and wall under each of them.

Array shapes: t times since touching, q places along the pad, d depths in the skin, k snapshots, n unknowns.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from cupfem.mesh import SectionMesh
from cupfem.serving import Pad

Floats = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class PadField:
    """A pad of a serving and what it felt.

    Attributes
    ----------
    mesh:
        Wall and skin, the skin's layers as regions of their names.
    heights, depths:
        `[q]` on the inside face [m], `[d]` below the skin's surface [m].
    time:
        `[t]` since touching [s].
    skin:
        `[t, q, d]` [degC].
    wall:
        `[t, q]` outer face of the wall under the pad [degC].
    snapshot_times, snapshots:
        `[k]` [s since the pour], `[k, n]` fields of the mesh [degC].
    """

    pad: Pad
    mesh: SectionMesh
    heights: Floats
    depths: Floats
    time: Floats
    skin: Floats
    wall: Floats
    snapshot_times: Floats
    snapshots: Floats
