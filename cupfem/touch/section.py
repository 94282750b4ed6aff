"""A share of the circumference with a finger on it: the wall's section with the skin as further layers.

The pad covers the wall between two heights; there the skin stands behind a contact conductance instead of the
outside film. Blood and the tissue below the fat take heat to the core: the ledger's term "hand".
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from cupfem.axisymmetry import AXISYMMETRIC, EdgePoints, Measure, source_load
from cupfem.conduction import Conditions, Conduction, EdgeExchange, Exchange, GasLayer, Solid
from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.films import Film, FixedFilm
from cupfem.fluids import air_conductivity
from cupfem.materials import Material, Value
from cupfem.meridian import LayerBand, Meridian
from cupfem.mesh import SectionMesh, default_fractions, default_stations
from cupfem.mesh import build as build_mesh
from cupfem.problem import Problem, exchanges, properties
from cupfem.serving.pads import Pad
from cupfem.skin import THICK_DEPTH, THIN_DEPTH, Skin, Tissue, get_skin
from cupfem.touch.finger import contact_conductance, resting_profile, skin_nodes
from cupfem.touch.transfer import transfer
from cupfem.touch.wall import pressed

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

HAND = "hand"
"""Name of the heat that goes to the hand, in the ledger."""
RIM_STEPS = np.array([0.12, 0.3, 0.6, 1.0, 1.6]) * 1e-3
"""Distances of stations from a pad's rims [m]; the finest is that of the skin's upper layers."""
LEAST_STATION = 0.04e-3
"""Stations nearer to each other [m] than this are one."""
FIRST_CELL, CELL_GROWTH = 25e-6, 0.45
"""Width of the skin's first cell across [m], and how a cell's width grows with depth."""
SAME_PLACE = 1e-7
"""Unknowns nearer to each other along the wall [m] than this stand on one line."""


@dataclass(frozen=True, eq=False)
class PadSection:
    """A pad on the wall of a problem: mesh, operators, and where its skin lies.

    Attributes
    ----------
    lines:
        `[q, d]` unknowns of the skin by place along the wall and by depth.
    under:
        `[q]` unknowns of the wall's outer face under the skin.
    heights:
        `[q]` heights on the inside face [m].
    depths:
        `[d]` [m].
    """

    pad: Pad
    skin: Skin
    mesh: SectionMesh
    conduction: Conduction
    lines: Ints
    under: Ints
    heights: Floats
    depths: Floats
    parent: SectionMesh
    name: str

    def start(self, wall: Floats, room: float) -> Floats:
        """Field `[dof]` at the pick-up, from the free wall's `[dof]` and the room [degC]."""
        out = np.zeros(self.mesh.size)
        nodes = skin_nodes(self.skin)
        at_rest = resting_profile(self.skin, np.array([room]))[0]
        skin = np.unique(np.concatenate([self.mesh.element_dofs[:, e].ravel() for e in self.skin_regions]))
        out[skin] = np.interp(self._depth[skin], nodes, at_rest)
        return transfer(self.parent, wall, self.mesh, out)

    def wall(self, field: Floats, like: Floats) -> Floats:
        """The wall of a field `[dof]` on the parent's mesh; `like` is the parent's own field."""
        return transfer(self.mesh, field, self.parent, like.copy())

    @property
    def skin_regions(self) -> list[Ints]:
        """Elements of the tissues."""
        return [self.mesh.regions[tissue.name] for tissue in self.skin.layers]

    @cached_property
    def _depth(self) -> Floats:
        """Depth below the skin's surface of each unknown [m] (meaningless in the wall)."""
        n = self.mesh.wall_coordinates[1]
        out = np.zeros(self.mesh.size)
        order = np.argsort(self.mesh.wall_coordinates[0, self.lines[:, 0]])
        s = self.mesh.wall_coordinates[0, self.lines[order, 0]]
        out[:] = n - np.interp(np.nan_to_num(self.mesh.wall_coordinates[0]), s, n[self.lines[order, 0]])
        return out

    def skin_heat(self, field: Floats) -> float:
        """Heat stored in the skin above 0 degC [J], whole circumference."""
        stored = self.conduction.stored_heat(field)
        return sum(stored[tissue.name] for tissue in self.skin.layers)


def build_section(
    problem: Problem,
    pad: Pad,
    fineness: float,
    films: Mapping[str, Film],
    name: str = "pad",
    measure: Measure = AXISYMMETRIC,
) -> PadSection:
    """Mesh a pad on the wall of a problem and put films on it.

    In the plane measure the wall's height stands for the circumference rolled out: a cross-section with the
    finger resolved on it.
    """
    if on_solid_ridges(problem, pad):
        raise InputError(
            "pad",
            f"{1e3 * pad.height:.4g} mm",
            "lies on solid ridges, where a section with a finger cannot be meshed",
            "leave the pad out and use hold, which judges crests by columns",
        )
    skin = get_skin(pad.skin)
    low, high = snapped(problem, pad, fineness)
    bands = skin_bands(problem.meridian, pad, skin, low, high)
    meridian = replace(problem.meridian, layers=(*problem.meridian.layers, *bands))
    stations = stations_with(problem, low, high, fineness)
    mesh = build_mesh(meridian, fineness, stations=stations, fractions=fractions(problem, skin, fineness))
    mesh = _with_core_edge(mesh, skin)
    conduction = _conduction(problem, pad, skin, mesh, films, measure)
    lines, depths = _skin_lines(mesh, skin)
    heights = np.interp(
        mesh.wall_coordinates[0, lines[:, 0]],
        meridian.profile.arc_length_at(meridian.profile.height),
        meridian.profile.height,
    )
    return PadSection(
        pad, skin, mesh, conduction, lines, _facing(mesh, lines[:, 0]), heights, depths, problem.mesh, name
    )


def on_solid_ridges(problem: Problem, pad: Pad) -> bool:
    """Whether a pad reaches rings of a solid: there the skin does not follow the outer face."""
    for layer in problem.cup.layer:
        if layer.ridge is None or problem.cup.material(layer.material).kind == "gas":
            continue
        reach = 0.5 * layer.ridge.foot_width
        if any(pad.low < middle + reach and pad.high > middle - reach for middle in layer.ridge.middles):
            return True
    return False


# -- mesh ----------------------------------------------------------------------------------------------------


def snapped(problem: Problem, pad: Pad, fineness: float) -> tuple[float, float]:
    """Heights of the pad's rims [m], at near stations, so that no sliver of a cell arises.

    Where an outer layer ends under the pad with a step, the finger lies on the higher side and hangs free
    beyond: the pad ends at the step.
    """
    known = default_stations(problem.meridian, fineness)
    low, high = pad.low, pad.high
    for layer in problem.meridian.layers:
        if low < layer.low < high and not layer.blend_low:
            low = layer.low
        if low < layer.high < high and not layer.blend_high:
            high = layer.high
    return _near(known, low), _near(known, high)


def _near(known: Floats, rim: float) -> float:
    nearest = float(known[np.argmin(np.abs(known - rim))])
    return nearest if abs(nearest - rim) < LEAST_STATION else rim


def stations_with(problem: Problem, low: float, high: float, fineness: float) -> Floats:
    """The wall's stations with those of a pad: its rims, and finer ones around them."""
    known = default_stations(problem.meridian, fineness)
    steps = _rim_distances(fineness)
    around = np.concatenate([[rim - steps, rim + steps] for rim in (low, high)]).ravel()
    around = around[(around > known[0]) & (around < known[-1])]
    if problem.meridian.base is not None:
        around = around[around > problem.meridian.base.top]
    fixed = np.concatenate([known, [low, high]])
    far = np.min(np.abs(around[:, None] - fixed), axis=1) > LEAST_STATION / fineness
    merged = np.sort(np.concatenate([fixed, around[far]]))
    return np.asarray(merged[np.concatenate([[True], np.diff(merged) > 1e-9])])


def _rim_distances(fineness: float) -> Floats:
    """Distances from the rim [m]: each step of `RIM_STEPS` in as many parts as the fineness asks for."""
    marks = np.concatenate([[0.0], RIM_STEPS])
    parts = max(1, round(fineness))
    return np.unique(np.concatenate([np.linspace(a, b, parts + 1)[1:] for a, b in pairwise(marks)]))


def fractions(problem: Problem, skin: Skin, fineness: float) -> dict[str, Floats]:
    """Lines across: the wall's own, and those of the skin."""
    lines = default_fractions(problem.meridian, fineness)
    top = 0.0
    for tissue in skin.layers:
        marks = [top, top + tissue.thickness]
        marks += [depth for depth in (THIN_DEPTH, THICK_DEPTH) if marks[0] + 1e-9 < depth < marks[1] - 1e-9]
        lines[tissue.name] = (_graded(np.sort(marks), fineness) - top) / tissue.thickness
        top += tissue.thickness
    return lines


def _graded(marks: Floats, fineness: float) -> Floats:
    pieces = [marks[:1]]
    for low, high in pairwise(marks):
        depths = [low]
        while depths[-1] < high - 1e-12:
            depths.append(depths[-1] + (FIRST_CELL + CELL_GROWTH * depths[-1]) / fineness)
        pieces.append(low + (np.array(depths[1:]) - low) * (high - low) / (depths[-1] - low))
    return np.concatenate(pieces)


def skin_bands(meridian: Meridian, pad: Pad, skin: Skin, low: float, high: float) -> tuple[LayerBand, ...]:
    """The skin as further layers of the wall; the innermost lies behind the contact conductance."""
    bands = [LayerBand(tissue.name, _material(tissue), tissue.thickness, low, high) for tissue in skin.layers]
    bands[0] = replace(bands[0], inner_conductance=PadContact(meridian, pad, low, high))
    return tuple(bands)


@dataclass(frozen=True)
class PadContact:
    """Contact conductance of a pad along the wall [W/(m2 K)]: full on crests, through air in valleys.

    The pad spans from crest to crest (the convex hull of the outer face) and sags a stated depth; what is
    left of a valley below it is air.
    """

    meridian: Meridian
    pad: Pad
    low: float
    high: float

    def __call__(self, height: Floats) -> Floats:
        z = np.asarray(height, dtype=float)
        materials = [self.meridian.outer_layer_at(float(each)).material for each in z.ravel()]
        by_class = np.array([contact_conductance(material) for material in materials]).reshape(z.shape)
        full = by_class if self.pad.contact is None else np.full(z.shape, self.pad.contact)
        left = np.maximum(self.valley(z) - self.pad.sag, 0.0)
        return np.asarray(1.0 / (1.0 / full + left / float(air_conductivity(45.0))))

    def valley(self, height: Floats) -> Floats:
        """Depth of the outer face below the line from crest to crest [m]."""
        z = np.unique(np.concatenate([np.linspace(self.low, self.high, 201), np.ravel(height)]))
        r = np.asarray(self.meridian.outer_radius_at(z))
        return np.asarray(np.interp(height, z, _hull(z, r) - r))


def _hull(z: Floats, r: Floats) -> Floats:
    """Least concave function above the points (z, r), at z."""
    if np.ptp(r - np.interp(z, z[[0, -1]], r[[0, -1]])) < 1e-9:
        return r
    from scipy.spatial import ConvexHull  # slow to import, and only pads on steps need it

    corners = np.sort(ConvexHull(np.array([z, 1e3 * r]).T).vertices)
    chord = np.interp(z[corners], z[[0, -1]], r[[0, -1]])
    upper = corners[r[corners] >= chord - 1e-12]
    return np.asarray(np.interp(z, z[upper], r[upper]))


def _material(tissue: Tissue) -> Material:
    def value(number: float) -> Value:
        return Value(number, tissue.source, tissue.mark)

    return Material(
        name=tissue.name,
        kind="solid",
        surface_class="plastic",
        conductivity_through=value(tissue.conductivity),
        conductivity_along=value(tissue.conductivity),
        density=value(tissue.density),
        specific_heat=value(tissue.specific_heat),
        emissivity=value(0.98),
    )


def _with_core_edge(mesh: SectionMesh, skin: Skin) -> SectionMesh:
    """The mesh with the edge "core": the skin's deep face."""
    deepest = f"outside.{skin.layers[-1].name}"
    facets = mesh.edges[deepest]
    s = mesh.wall_coordinates[0, facets[:2]]
    core = facets[:, np.abs(s[1] - s[0]) > 1e-9]
    return replace(mesh, edges={**mesh.edges, "core": core})


def _skin_lines(mesh: SectionMesh, skin: Skin) -> tuple[Ints, Floats]:
    """Unknowns of the skin `[place, depth]` and their depths [m]."""
    elements = np.concatenate([mesh.regions[tissue.name] for tissue in skin.layers])
    dofs = np.unique(mesh.element_dofs[:, elements])
    dofs = dofs[np.argsort(mesh.wall_coordinates[0, dofs], kind="stable")]
    s, n = mesh.wall_coordinates[:, dofs]
    place = np.concatenate([[0], np.cumsum(np.diff(s) > SAME_PLACE)])
    lines = dofs[np.lexsort((n, place))].reshape(place[-1] + 1, -1)
    n = mesh.wall_coordinates[1, lines]
    return lines, np.asarray((n - n[:, :1]).mean(axis=0))


def _facing(mesh: SectionMesh, surface: Ints) -> Ints:
    """Unknowns of the wall that lie under unknowns of the skin's surface."""
    under = np.full(mesh.size, -1)
    for contact in mesh.contacts:
        under[contact.outer] = contact.inner
    return under[surface]


# -- operators -----------------------------------------------------------------------------------------------


def _conduction(
    problem: Problem,
    pad: Pad,
    skin: Skin,
    mesh: SectionMesh,
    films: Mapping[str, Film],
    measure: Measure,
) -> Conduction:
    given = pad_properties(problem.cup, pad, skin, mesh)
    below = Exchange("core", {HAND: FixedFilm(skin.below)}, skin.core)
    drink = problem.system.drink
    headspace = None if drink is None else drink.headspace
    around = exchanges(problem.cup, problem.serving, mesh, films, headspace)
    conduction = Conduction(mesh, given, Conditions((*around, below)), measure)
    conduction.exchanges.append(Perfusion(conduction, skin))
    return conduction


def pad_properties(cup: Cup, pad: Pad, skin: Skin, mesh: SectionMesh) -> dict[str, Solid | GasLayer]:
    """Properties of each region of a pad's mesh: the wall with its gaps pressed together, and the tissues."""
    tissues = {tissue.name for tissue in skin.layers}
    wall = replace(mesh, regions={name: e for name, e in mesh.regions.items() if name not in tissues})
    given = properties(cup, wall)
    for name, layer in given.items():
        given[name] = pressed(layer, pad.gap_resistance) if isinstance(layer, GasLayer) else layer
    for tissue in skin.layers:
        given[tissue.name] = Solid(tissue.conductivity, tissue.conductivity, tissue.heat_capacity)
    return given


class Perfusion(EdgeExchange):
    """Heat that blood takes from the tissues to the core: w (T - T_core) per volume, lumped at unknowns."""

    def __init__(self, conduction: Conduction, skin: Skin):
        mesh = conduction.mesh
        super().__init__(
            mesh,
            Exchange("core", {HAND: FixedFilm(1.0)}, skin.core),
            conduction.measure,
            conduction.pattern,
        )
        weight = sum(
            source_load(mesh, mesh.regions[tissue.name], tissue.perfusion, conduction.measure)
            for tissue in skin.layers
        )
        dofs = np.flatnonzero(np.asarray(weight) > 0.0)
        r, z = mesh.points[:, dofs]
        self._points = EdgePoints(dofs[:, None], np.ones((len(dofs), 1)), np.asarray(weight)[dofs], z, r)
