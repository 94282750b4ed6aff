"""What must hold between the parts of a cup: each check refuses with one line."""

from __future__ import annotations

import math
from collections.abc import Iterator
from itertools import pairwise
from typing import TYPE_CHECKING

from cupfem.cup.layers import THICKNESS_KEYS, Layer
from cupfem.errors import InputError
from cupfem.inputs import refused
from cupfem.quantities import format_quantity

if TYPE_CHECKING:
    from cupfem.cup.model import Cup

RESERVED_NAMES = ("base",)
STEEPEST = math.radians(45.0)
STEEPEST_EMBOSSED = math.radians(30.0)
"""Flank of an embossed ridge, from the normal: layers that bend more sharply fold the mesh."""
LEAST_FIT = 15.0
"""Conductance of a loose fit with air [W/(m2 K)]: less is no contact, radiation alone gives about 6."""
_NEAR = 1e-9  # m; heights closer than this are one height


def check(cup: Cup) -> None:
    """All checks but those of names and materials."""
    _check_cells(cup)
    _check_ranges(cup)
    _check_outline(cup)
    _check_section(cup)
    _check_ridges(cup)
    cup.refuse_idle()
    _check_blends(cup)
    _check_base(cup)


def named_apart(cup: Cup, added: tuple[Layer, ...]) -> tuple[Layer, ...]:
    """The layers of a sleeve, renamed where the cup has a layer of that name."""
    names = {layer.name for layer in cup.layer}
    return tuple(
        layer.model_copy(update={"name": f"sleeve-{layer.name}"}) if layer.name in names else layer
        for layer in added
    )


def idle_keys(cup: Cup) -> dict[str, str]:
    """Keys that would change nothing, with the reason."""
    return {f"layer.{layer.name}.{key}": why for layer in cup.layer for key, why in _idle(cup, layer)}


def _idle(cup: Cup, layer: Layer) -> Iterator[tuple[str, str]]:
    if any(getattr(layer, key) for key in THICKNESS_KEYS if key != "thickness"):
        yield "thickness", "another key gives the thickness"
    if not any(cup.blends(layer)):
        for key in ("blend", "contact"):
            yield key, "nothing outside this layer moves in where it stops"
    if layer.ridge is not None:
        yield from ((key, "the ridges have places of their own") for key in ("from", "to"))
        if any(cup.blends(layer)):
            yield "blend", "the flank angle tells it"
    if cup.is_gas(layer):
        yield from ((key, "a gas lies close to what is inside it") for key in ("fit", "fit_gap"))
        yield from ((key, "a gas has no faces") for key in ("inner_emissivity", "outer_emissivity"))
        return
    if layer is cup.layer[0]:
        yield from ((key, "it is innermost: nothing lies inside it") for key in ("fit", "fit_gap"))
    for key in ("contact_fraction", "contact_conductance", "pressure"):
        yield key, "only a layer of gas has it"
    for face, is_open in zip(("inner", "outer"), _open_faces(cup, layer), strict=True):
        if not is_open:
            yield f"{face}_emissivity", "no gas, room or inside lies on this face"


def _open_faces(cup: Cup, layer: Layer) -> tuple[bool, bool]:
    """Whether the inner and the outer face of a layer look on a gas, the inside or the room somewhere."""
    inner = outer = False
    for low, high in pairwise(_ends(cup)):
        stack = cup.stack(0.5 * (low + high))
        if layer not in stack:
            continue
        place = stack.index(layer)
        inner |= place == 0 or cup.is_gas(stack[place - 1]) or layer.fit_gap is not None
        after = stack[place + 1] if place + 1 < len(stack) else None
        outer |= after is None or cup.is_gas(after) or after.fit_gap is not None
    return inner, outer


def _ends(cup: Cup) -> list[float]:
    """Heights [m] at which a layer or a ring begins or ends."""
    return sorted(
        {0.0, cup.height, *(end for layer in cup.layer for span in cup.spans(layer) for end in span)}
    )


def _mm(length: float) -> str:
    return format_quantity(length, "length", digits=4)


def check_names(cup: Cup) -> None:
    """Each layer has a name of its own."""
    if not cup.layer:
        raise refused("no layers: a cup needs a wall", "write at least one [[layer]]", "layer")
    names = [layer.name for layer in cup.layer]
    for index, name in enumerate(names):
        if name in RESERVED_NAMES:
            raise refused(
                "a name that the cup uses itself", "choose another word", f"layer.{name}.name", name
            )
        if name in names[:index]:
            raise refused("two layers have this name", "give each its own", f"layer.{name}.name", name)


def check_materials(cup: Cup) -> None:
    """Each material is known."""
    used = {}
    for layer in cup.layer:
        used[f"layer.{layer.name}.material"] = layer.material
    if cup.base_disc:
        used["base.material"] = cup.base_disc.material
    for path, name in used.items():
        try:
            cup.material(name)
        except InputError as error:
            if error.what.startswith("material."):  # a table of the user's own, which has a place of its own
                raise
            raise refused(error.why, error.instead, path, name) from None


def _check_cells(cup: Cup) -> None:
    """Flutes and struts are of board, and stand between boards."""
    for layer in cup.layer:
        key = "flute" if layer.flute is not None else "strut"
        if getattr(layer, key) is None:
            continue
        if cup.is_gas(layer):
            why = "it tells the board, and a gas is none"
            raise refused(why, "choose a solid", f"layer.{layer.name}.material", layer.material)
        for low, high in pairwise(_ends(cup)):
            stack = cup.stack(0.5 * (low + high))
            place = stack.index(layer) if layer in stack else 1
            beside = [*stack[max(place - 1, 0) : place], *stack[place + 1 : place + 2]]
            if layer in stack and (len(beside) < 2 or any(map(cup.is_gas, beside))):
                why = f"from {_mm(low)} to {_mm(high)} its air lies open"
                raise refused(why, "put a solid on both sides of it", f"layer.{layer.name}.{key}")


def _check_ranges(cup: Cup) -> None:
    for layer in cup.layer:
        if layer.ridge is not None:
            _check_rings(cup, layer)
        else:
            _check_range(cup, layer)


def _check_range(cup: Cup, layer: Layer) -> None:
    low, high = cup.layer_range(layer)
    path = f"layer.{layer.name}"
    for key, end in (("to", high), ("from", low)):
        if end > cup.height + _NEAR:
            why = f"above the brim at {_mm(cup.height)}: the layer leaves the cup"
            raise refused(why, f'write at most "{_mm(cup.height)}"', f"{path}.{key}", _mm(end))
    if low >= high:
        raise refused(f"not below the layer's upper end at {_mm(high)}", "", f"{path}.from", _mm(low))
    if layer.thickness_along:
        first, last = layer.thickness_along[0][0], layer.thickness_along[-1][0]
        if first > low + _NEAR or last < high - _NEAR:
            why = f"reaches from {_mm(first)} to {_mm(last)}, and the layer from {_mm(low)} to {_mm(high)}"
            raise refused(why, "let it reach over the whole layer", f"{path}.thickness_along")
    if layer.fit_gap is not None and (layer.fit is None or layer.fit < LEAST_FIT):
        why = "air between the faces needs the conductance where they touch"
        instead = f"write fit, at least {LEAST_FIT:g} W/(m^2 K)"
        raise refused(why, instead, f"{path}.fit_gap")


def _check_rings(cup: Cup, layer: Layer) -> None:
    path, (below, above) = f"layer.{layer.name}.ridge", cup.blends(layer)
    spans = [(low - below, high + above) for low, high in cup.rings(layer)]
    for low, high in spans:
        if low < _NEAR or high > cup.height - _NEAR:
            why = f"a ring with its foot from {_mm(low)} to {_mm(high)} leaves the wall"
            raise refused(why, f"keep between the table and the brim at {_mm(cup.height)}", path)
    for (first, end), (start, _) in pairwise(spans):
        if start - end < 1e-5:
            why = f"rings meet at {_mm(start)}: a foot is {_mm(end - first)} wide"
            raise refused(why, "write a larger pitch, or narrower ridges", path)


def _check_outline(cup: Cup) -> None:
    profile = cup.profile
    angles = profile.angle_at(0.5 * (profile.height[:-1] + profile.height[1:]))
    angle = math.degrees(max(angles.tolist(), key=abs))
    if abs(angle) >= math.degrees(STEEPEST):
        why = f"the wall leans by {angle:.1f} degrees from the axis, and 45 is the limit"
        raise refused(why, "check height and diameters", "cup")
    thickest = max(cup.wall_thickness(height) for height in _ends(cup))
    if profile.sharpest() * thickest > 0.25:
        why = f"it turns too sharply for a wall of {_mm(thickest)}"
        raise refused(why, 'write inner_curve = "spline", or more points', "cup.inner_profile")
    inside = [(f"at {_mm(height)}", height) for height, _ in cup.outline.inner_profile[1:-1]]
    for end, height in [("at the foot", 0.0), ("at the brim", cup.height), *inside]:
        radius, wall = cup.inner_radius(height), cup.wall_thickness(height)
        if radius <= wall:
            why = f"{end} the wall ({_mm(wall)}) is thicker than the inside radius ({_mm(radius)})"
            raise refused(why, "check diameters and thicknesses", "cup")


def _check_section(cup: Cup) -> None:
    """At each height there is a wall, solid on both faces, and between two gases a solid."""
    for low, high in pairwise(_ends(cup)):
        if high - low > _NEAR:
            _check_stack(cup, low, high)


def _check_stack(cup: Cup, low: float, high: float) -> None:
    stack = cup.stack(0.5 * (low + high))
    where = f"from {_mm(low)} to {_mm(high)}"
    if not stack:
        raise refused(f"the wall has no layer {where}", "let a layer reach over it", "layer")
    gas = [cup.is_gas(layer) for layer in stack]
    if gas[0]:
        raise _misplaced(
            stack[0], f"{where} it is innermost: the drink would touch the gas", "put a solid inside it"
        )
    if gas[-1]:
        raise _misplaced(
            stack[-1], f"{where} it is outermost: nothing holds the gas", "put a solid outside it"
        )
    if stack[0].fit is not None:
        raise _loose(stack[0], f"{where} it is innermost: nothing lies inside it")
    for (inside, inner_gas), (outside, outer_gas) in pairwise(zip(stack, gas, strict=True)):
        if inner_gas and outside.fit is not None:
            raise _loose(outside, f'{where} it lies on "{inside.name}", a gas, which has no contact')
        if inner_gas and outer_gas:
            why = f'{where} it lies on "{inside.name}", another layer of gas'
            raise _misplaced(outside, why, "make them one layer, or put a solid between them")


def _loose(layer: Layer, why: str) -> Exception:
    return refused(why, "leave it out", f"layer.{layer.name}.fit", f"{layer.fit:g} W/(m^2 K)")


def _misplaced(layer: Layer, why: str, instead: str) -> Exception:
    return refused(why, instead, f"layer.{layer.name}", layer.material)


def _check_ridges(cup: Cup) -> None:
    for layer in cup.layer:
        if layer.ridge is None:
            continue
        path = f"layer.{layer.name}.ridge"
        if not cup.is_gas(layer):
            _check_solid_ridges(cup, layer, path)
        elif layer.ridge.crest != "flat":
            raise refused("layers bend over a flat crest only", "leave it out", f"{path}.crest", "rounded")
        elif layer.ridge.flank_angle < STEEPEST_EMBOSSED:
            least, given = math.degrees(STEEPEST_EMBOSSED), math.degrees(layer.ridge.flank_angle)
            why = f"an embossed flank steeper than {least:g} degrees from the normal folds the mesh"
            raise refused(why, f'write at least "{least:g} deg"', f"{path}.flank_angle", f"{given:g} deg")


def _check_solid_ridges(cup: Cup, layer: Layer, path: str) -> None:
    """Rings stand outermost, on a wall that does not change under their feet."""
    after = cup.layer[cup.layer.index(layer) + 1 :]
    for low, high in cup.rings(layer):
        where = f"the ring from {_mm(low)} to {_mm(high)}"
        if any(low < corner < high for corner in cup.profile.corners):
            raise refused(f"{where} stands across a corner of the inside face", "move it up or down", path)
        for other in cup.layer:
            below, above = cup.blends(other)
            for start, end in cup.spans(other):
                apart = start - below > high - _NEAR or end + above < low + _NEAR
                if other is layer or apart:
                    continue
                if other in after:
                    why = f'{where} is not outermost: "{other.name}" lies over it'
                    raise refused(why, "let that layer stop before, or place the rings elsewhere", path)
                if start > low + _NEAR or end < high - _NEAR:
                    why = f'{where} stands where "{other.name}" ends'
                    raise refused(why, "place the rings where the wall below is even", path)


def _check_blends(cup: Cup) -> None:
    for layer in cup.layer:
        for low, high in cup.spans(layer):
            _check_blend(cup, layer, low, high)


def _check_blend(cup: Cup, layer: Layer, low: float, high: float) -> None:
    below, above = cup.blends(layer)
    for outer in cup.layer[cup.layer.index(layer) + 1 :]:
        start, end = cup.layer_range(outer)
        ends_within = _NEAR < end - high < above - _NEAR or _NEAR < low - start < below - _NEAR
        if outer.ridge is None and ends_within:
            why = f'"{outer.name}" ends within this length, over which it moves in'
            instead = f'let "{outer.name}" reach further, stop where "{layer.name}" stops, or shorten blend'
            key = "blend" if layer.ridge is None else "ridge"
            raise refused(why, instead, f"layer.{layer.name}.{key}", _mm(below or above))


def _check_base(cup: Cup) -> None:
    base = cup.base_disc
    if base is None:
        return
    if cup.material(base.material).kind == "gas":
        raise refused("a gas cannot hold the drink", "choose a solid", "base.material", base.material)
    if cup.floor >= cup.height - _NEAR:
        why = f"with its thickness the base reaches {_mm(cup.floor)}, not below the brim at {_mm(cup.height)}"
        raise refused(why, "check recess and thickness", "base.recess", _mm(base.recess))
