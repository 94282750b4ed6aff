"""Fingers on the wall at many heights from many pick-ups on, all at once: columns from drink to hand.

The wall comes from the run; a contact conductance lies between it and the skin. Films inside and
conductances of gaps follow the field from step to step. Array shapes: t times since touching, h heights, p
pick-ups, c = p x h columns (pick-ups outermost), n nodes.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from cupfem.conduction import Exchange
from cupfem.drink import Lumped
from cupfem.errors import InputError
from cupfem.materials import SurfaceClass
from cupfem.meridian import MINIMUM_THICKNESS
from cupfem.problem import Problem, ambient_at, build
from cupfem.run import Run
from cupfem.skin import RESTING_FILM, THICK_DEPTH, THIN_DEPTH, Skin, damage, damage_rate
from cupfem.touch.columns import GAMMA, Columns, join, step_times
from cupfem.touch.finger import FLAT, SkinColumn, contact_conductance, resting_profile
from cupfem.touch.wall import Wall, free_outer, free_profiles

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

LEAST_DIFFERENCE = 0.05
"""Difference of temperature [K] below which a film's coefficient is taken at this difference."""


@dataclass(frozen=True, eq=False)
class Contact:
    """What fingers felt.

    Attributes
    ----------
    time:
        `[t]` since touching [s].
    thin, thick, surface, wall:
        `[t, p, h]` [degC]: skin at 0.1 and 0.5 mm, its surface, and the wall's outer face under it.
    free:
        `[t, p, h]` free outer wall at the same moments [degC].
    damage:
        `[t, p, h]` damage integral at 0.1 mm.
    possible:
        `[p]` longest contact before the serving ends [s].
    """

    heights: Floats
    pick_ups: Floats
    time: Floats
    thin: Floats
    thick: Floats
    surface: Floats
    wall: Floats
    free: Floats
    damage: Floats
    possible: Floats
    classes: tuple[SurfaceClass, ...]
    conductance: Floats
    skin: Skin
    skins: Floats
    room: Floats

    def chosen(self, columns: Ints, heights: Floats) -> Contact:
        """The contact of chosen columns `[p, h]`, told under heights `[h]` [m] of their own."""
        count = len(self.heights)
        flat = (columns + count * np.arange(len(self.pick_ups))[:, None]).ravel()
        place = columns[0]

        def taken(values: Floats) -> Floats:
            return np.take_along_axis(values, columns[None], axis=2)

        return replace(
            self,
            heights=heights,
            thin=taken(self.thin),
            thick=taken(self.thick),
            surface=taken(self.surface),
            wall=taken(self.wall),
            free=taken(self.free),
            damage=taken(self.damage),
            classes=tuple(self.classes[each] for each in place),
            conductance=self.conductance[place],
            skins=self.skins[:, flat],
            room=self.room[flat],
        )


def hotter(one: Contact, other: Contact, moment: float) -> Contact:
    """The hotter of two contacts of the same places, place by place, by the skin after a moment [s]."""
    index = int(np.searchsorted(one.time, moment)) - 1
    chosen = other.thin[index] > one.thin[index]
    flat = chosen.ravel()
    names = ("thin", "thick", "surface", "wall", "damage")
    mixed = {name: np.where(chosen, getattr(other, name), getattr(one, name)) for name in names}
    return replace(one, **mixed, skins=np.where(flat[:, None], other.skins, one.skins))


def touch(
    run: Run,
    heights: Floats,
    pick_ups: Floats,
    longest: float,
    *,
    skin: Skin,
    conductance: float | Floats | None = None,
    gap_resistance: float = 1.0,
    problem: Problem | None = None,
    crest: bool = False,
) -> Contact:
    """Touch the wall of a run.

    Parameters
    ----------
    heights, pick_ups:
        `[h]` on the inside face [m], `[p]` [s].
    longest:
        Longest contact [s].
    conductance:
        Contact conductance [W/(m2 K)], one or `[h]`; left out: by the class of the outer layer's surface.
    gap_resistance:
        Share of each gap's resistance that is left under the grip.
    problem:
        That of the run, if it is there already.
    crest:
        Take flutes as they are under a crest, and struts as in a strut, not as even layers.

    Raises
    ------
    InputError
        If a height does not lie between floor and brim, or a pick-up not within the serving.
    """
    _check(run, heights, pick_ups)
    layers = [run.meridian.outer_layer_at(float(height)) for height in heights]
    by_class = np.array([contact_conductance(layer.material) for layer in layers])
    chosen = by_class if conductance is None else np.broadcast_to(conductance, heights.shape).astype(float)
    problem = problem or problem_of(run)
    wall = Wall.at(run, heights, gap_resistance, crest)
    march = _March(run, problem, heights, pick_ups, skin, chosen, wall)
    time = step_times(longest)
    shape = (len(time), len(pick_ups), len(heights))
    kept = march.run(time)
    basal = kept[:, :, march.skin.index(THIN_DEPTH)]
    moments = pick_ups[None, :] + time[:, None]
    free = free_outer(run, heights, moments.ravel()).reshape(shape)
    return Contact(
        heights=heights,
        pick_ups=pick_ups,
        time=time,
        thin=basal.reshape(shape),
        thick=kept[:, :, march.skin.index(THICK_DEPTH)].reshape(shape),
        surface=kept[:, :, 0].reshape(shape),
        wall=march.outer.reshape(shape),
        free=free,
        damage=damage(time, basal).reshape(shape),
        possible=run.serving.duration - pick_ups,
        classes=tuple(layer.material.surface_class for layer in layers),
        conductance=chosen,
        skin=skin,
        skins=kept,
        room=march.room,
    )


def problem_of(run: Run) -> Problem:
    """The problem that a run solved, from its cup, serving and films."""
    return build(run.cup, run.serving, run.fineness, run.films)


def _check(run: Run, heights: Floats, pick_ups: Floats) -> None:
    low, high = run.meridian.floor, run.meridian.height
    for height in heights:
        if not low <= height <= high:
            raise InputError(
                "height",
                f"{1e3 * height:g} mm",
                "not on the wall beside the drink",
                f'write a height from "{1e3 * low:g} mm" to "{1e3 * high:g} mm"',
            )
    for pick_up in pick_ups:
        if not 0.0 <= pick_up < run.serving.duration:
            raise InputError(
                "pick_up",
                f"{pick_up:g} s",
                "not within the serving",
                f'write a time before "{run.serving.duration:g} s", or a longer duration',
            )


class _March:
    """The columns of one call, and their march."""

    def __init__(
        self,
        run: Run,
        problem: Problem,
        heights: Floats,
        pick_ups: Floats,
        skin: Skin,
        conductance: Floats,
        wall: Wall,
    ):
        free = Wall.at(run, heights)
        start = free_profiles(run, free, heights, pick_ups)
        self.wall = wall.repeated(len(pick_ups))
        self.skin = SkinColumn.of(skin, self.wall.outer_radius)
        contact = np.tile(conductance, len(pick_ups)) * self.wall.outer_radius
        capacity, link = join(
            [(self.wall.capacity, self.wall.link), (self.skin.capacity, self.skin.link)], [contact]
        )
        sink = np.concatenate([np.zeros_like(self.wall.capacity), self.skin.sink], axis=1)
        self.columns = Columns(capacity, link, sink, skin.core)
        self.room = np.repeat(run.serving.room.temperature_at(pick_ups), len(heights))
        nodes = start.reshape(-1, start.shape[2])
        self.field = np.concatenate([nodes, resting_profile(skin, self.room)], axis=1)
        places = np.tile(heights, len(pick_ups)), np.repeat(pick_ups, len(heights))
        self.inside = InsideFilm(problem, run, *places)
        self.first_of_skin = nodes.shape[1]

    def run(self, time: Floats) -> Floats:
        """Skin `[t, c, n]` at the times; keeps the wall's outer face `[t, c]` too."""
        skins = np.empty((len(time), len(self.field), self.field.shape[1] - self.first_of_skin))
        self.outer = np.empty(skins.shape[:2])
        self._keep(0, skins)
        for index, (start, end) in enumerate(pairwise(time)):
            self._step(float(start), float(end))
            self._keep(index + 1, skins)
        return skins

    def _keep(self, index: int, skins: Floats) -> None:
        skins[index] = self.field[:, self.first_of_skin :]
        self.outer[index] = self.field[:, self.first_of_skin - 1]

    def _step(self, start: float, end: float) -> None:
        for gap in self.wall.gaps:
            gap.update(self.columns.link, self.field)
        film = self.inside.conductance(self.field[:, 0], start) * self.wall.inner_radius
        early = self.inside.surroundings(start + GAMMA * (end - start))
        late = self.inside.surroundings(end)
        core = np.full(len(film), self.skin.skin.core)
        below = (self.skin.below, core, core)
        self.field = self.columns.advance(self.field, end - start, (film, early, late), below)


class InsideFilm:
    """Film between the inside face of columns and what is inside the cup, as the problem has it there.

    Drink and headspace are those of the run, `[c]` columns at their own moments; after the end of the serving
    everything stays as it was.
    """

    def __init__(self, problem: Problem, run: Run, heights: Floats, pick_ups: Floats):
        self._run, self._heights, self._pick_ups = run, heights, pick_ups
        self._drink = problem.system.drink
        within = [_innermost(run, float(height)) for height in heights]
        groups = sorted({(pick_up, name) for pick_up, name in zip(pick_ups, within, strict=True)})
        inside = problem.system.sections[0].conduction.conditions.exchanges
        names = np.array(within)
        self._groups = [
            (
                np.flatnonzero((pick_ups == pick_up) & (names == name)),
                [exchange for exchange in inside if exchange.edge == f"inside.{name}"],
            )
            for pick_up, name in groups
        ]

    def surroundings(self, time: float) -> Floats:
        """Temperature `[c]` [degC] beyond the film at a time since touching [s]."""
        return self._each(time, lambda exchange, columns, drink, moment: _around(
            exchange, self._heights[columns], drink, moment))  # fmt: skip

    def conductance(self, surface: Floats, time: float) -> Floats:
        """Film coefficient `[c]` [W/(m2 K)] at surface temperatures `[c]` [degC]."""

        def coefficient(exchange: Exchange, columns: Ints, drink: Lumped, moment: float) -> Floats:
            heights = self._heights[columns]
            around = _around(exchange, heights, drink, moment)
            difference = surface[columns] - around
            small = np.abs(difference) < LEAST_DIFFERENCE
            difference = np.where(small, np.copysign(LEAST_DIFFERENCE, difference), difference)
            films = exchange.films(drink) if callable(exchange.films) else exchange.films
            fluxes = [film.heat_flux(around + difference, around, heights, moment) for film in films.values()]
            return np.maximum(np.asarray(sum(fluxes)) / difference, 0.0)

        return self._each(time, coefficient)

    def _each(self, time: float, values: Callable[[Exchange, Ints, Lumped, float], Floats]) -> Floats:
        """Values `[c]`, asked for the columns that each exchange acts on."""
        out = np.zeros(len(self._heights))
        for columns, exchanges in self._groups:
            moment = min(float(self._pick_ups[columns[0]]) + time, self._run.serving.duration)
            drink = self._lumped(moment)
            for exchange in exchanges:
                low, high = exchange.window(drink, moment) if exchange.window else (-np.inf, np.inf)
                here = self._heights[columns]
                chosen = columns[(here >= low) & (here < high)]
                if len(chosen):
                    out[chosen] = values(exchange, chosen, drink, moment)
        return out

    def _lumped(self, moment: float) -> Lumped:
        assert self._drink is not None
        times, states = self._run.series.time, self._run.drink_states
        place = int(np.clip(np.searchsorted(times, moment, side="right") - 1, 0, len(times) - 2))
        share = (moment - times[place]) / (times[place + 1] - times[place])
        state = (1.0 - share) * states[place] + share * states[place + 1]
        return self._drink.lumped(state, ambient_at(self._run.serving, moment))


def _innermost(run: Run, height: float) -> str:
    layers = run.meridian.layers
    return next(layer.name for layer in layers if float(layer.thickness_at(height)) > MINIMUM_THICKNESS)


def _around(exchange: Exchange, heights: Floats, drink: Lumped, moment: float) -> Floats:
    given = exchange.surroundings
    around = given(heights, moment, drink) if callable(given) else given
    return np.broadcast_to(np.asarray(around, dtype=float), heights.shape)


# -- after the release ---------------------------------------------------------------------------------------

COOLING_TIME = 30.0
"""How long damage is counted after a release [s]: by then the basal layer is below 44 degC."""
BISECTIONS = 9


def injury_times(contact: Contact) -> Floats:
    """Earliest release `[p, h]` [s] after which the damage integral, counted on in cooling, reaches 1.

    Infinite where no release within the kept times does.
    """
    flat = contact.damage.reshape(len(contact.time), -1)
    column = SkinColumn.of(contact.skin, np.full(flat.shape[1], FLAT))
    out = np.full(flat.shape[1], np.inf)
    risky = np.flatnonzero(flat[-1] > 0.0)
    if len(risky):
        whole = flat[-1, risky] + _cooling_damage(
            contact, column, risky, np.full(len(risky), contact.time[-1])
        )
        risky = risky[whole >= 1.0]
    if len(risky):
        out[risky] = _bisect(contact, column, flat, risky)
    return out.reshape(contact.damage.shape[1:])


def _bisect(contact: Contact, column: SkinColumn, flat: Floats, risky: NDArray[np.int_]) -> Floats:
    low, high = np.zeros(len(risky)), np.full(len(risky), contact.time[-1])
    reached = flat[:, risky] >= 1.0
    high = np.where(reached.any(axis=0), contact.time[np.argmax(reached, axis=0)], high)
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        before = _between(contact.time, flat[:, risky], middle)
        enough = before + _cooling_damage(contact, column, risky, middle) >= 1.0
        low, high = np.where(enough, low, middle), np.where(enough, middle, high)
    return np.asarray(0.5 * (low + high))


def _cooling_damage(
    contact: Contact, column: SkinColumn, chosen: NDArray[np.int_], release: Floats
) -> Floats:
    """Damage `[chosen]` after releases [s] of chosen columns, in the air of the room."""
    field = _between(contact.time, contact.skins[:, chosen], release)
    part = Columns(column.capacity[chosen], column.link[chosen], column.sink[chosen], contact.skin.core)
    room = contact.room[chosen]
    film = (np.full(len(chosen), RESTING_FILM * FLAT), room, room)
    core = np.full(len(chosen), contact.skin.core)
    basal = column.index(THIN_DEPTH)
    times = step_times(COOLING_TIME, first=5e-3, share=0.12)
    kept = [field[:, basal]]
    for start, end in pairwise(times):
        field = part.advance(field, end - start, film, (column.below[chosen], core, core))
        kept.append(field[:, basal])
        if not np.any(damage_rate(kept[-1])):
            break
    return np.asarray(damage(times[: len(kept)], np.array(kept))[-1])


def _between(times: Floats, values: Floats, moments: Floats) -> Floats:
    """Values `[c, ...]` of `[t, c, ...]` at a time of each column, linear between two."""
    place = np.clip(np.searchsorted(times, moments) - 1, 0, len(times) - 2)
    share = (moments - times[place]) / (times[place + 1] - times[place])
    columns = np.arange(len(moments))
    share = share.reshape(-1, *[1] * (values.ndim - 2))
    return np.asarray((1.0 - share) * values[place, columns] + share * values[place + 1, columns])
