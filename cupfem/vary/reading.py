"""Reading an outcome: main effects, interactions, indices of variance, share of failures, fronts, the best.

Everywhere a time that was not reached counts as the least that it can be; `Outcome.note` says how many do.
"""

from __future__ import annotations

import itertools
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from cupfem.errors import InputError
from cupfem.vary.outcome import FAILED, NOT_RUN, PASSED, UNDECIDED, Outcome, Row, Varied

Floats = NDArray[np.float64]
Sense = Literal["least", "most"]

MOST_LEVELS = 12
"""Up to so many distinct values a factor is read level by level, beyond in bins of equal counts."""
BINS = 8
CONFIDENCE = 0.95
RESAMPLES = 200
"""Of the bootstrap of variance indices."""


@dataclass(frozen=True, eq=False)
class Effect:
    """Means of a figure over the levels of a factor `[v]`.

    `places` are the values of the levels (means of the bins, or their numbers for words), `labels` their
    text, `counts` how many cases each mean is over, `share` the part of the variance between the levels.
    """

    varied: Varied
    places: Floats
    labels: tuple[str, ...]
    means: Floats
    counts: NDArray[np.int_]
    share: float


@dataclass(frozen=True)
class Interaction:
    """Two factors, and the part of the variance that only both together explain."""

    first: str
    second: str
    share: float


@dataclass(frozen=True)
class Bar:
    """A bar of a tornado chart: a figure at two values of a factor, whose labels tell them."""

    key: str
    base: float
    low: float
    high: float
    low_label: str
    high_label: str

    @property
    def width(self) -> float:
        """How far the figure moves."""
        ends = (self.low, self.high, self.base)
        return float(np.nanmax(ends) - np.nanmin(ends))


@dataclass(frozen=True)
class Index:
    """First-order and total index of a factor, each with its interval."""

    key: str
    first: float
    first_interval: tuple[float, float]
    total: float
    total_interval: tuple[float, float]


@dataclass(frozen=True)
class FailureShare:
    """Share of the cases that break a limit, with its interval; `undecided` cases are in neither count."""

    failed: int
    decided: int
    undecided: int
    not_run: int
    share: float
    interval: tuple[float, float]

    @property
    def text(self) -> str:
        """In words."""
        low, high = self.interval
        told = f"{self.failed} of {self.decided} fail: {self.share:.2%} ({low:.2%} to {high:.2%})"
        rest = [(self.undecided, "undecided"), (self.not_run, "not run")]
        return "; ".join([told, *(f"{count} {word}" for count, word in rest if count)])


def main_effects(outcome: Outcome, key: str) -> list[Effect]:
    """Main effect of each factor on a figure, the largest share of the variance first.

    In a balanced grid the shares are those of an analysis of variance (Montgomery, Design and Analysis of
    Experiments, 5.3); in other designs they are estimates.
    """
    values = outcome.figure(key)
    effects = [_effect(outcome, varied, values) for varied in outcome.varied]
    return sorted(effects, key=lambda effect: -effect.share)


def interactions(outcome: Outcome, key: str) -> list[Interaction]:
    """Interactions of each two factors of a grid, the largest first; empty for other designs."""
    if outcome.combine != "grid" or outcome.errors:
        return []
    values = outcome.figure(key)
    groups = {varied.key: _groups(outcome, varied)[0] for varied in outcome.varied}
    found = []
    for first, second in itertools.combinations(groups, 2):
        both = groups[first] * (groups[second].max() + 1) + groups[second]
        alone = _between(values, groups[first]) + _between(values, groups[second])
        found.append(Interaction(first, second, max(_between(values, both) - alone, 0.0)))
    return sorted(found, key=lambda interaction: -interaction.share)


def tornado(outcome: Outcome, key: str) -> list[Bar]:
    """A figure at the low and high value of each factor, the widest bar first.

    From "one at a time" the others are as in the file; from other designs these are the lowest and the
    highest mean over the others.
    """
    if outcome.combine == "one at a time":
        bars = _bars_one_at_a_time(outcome, outcome.figure(key))
    else:
        mean = float(np.nanmean(outcome.figure(key)))
        bars = [_bar_of_means(effect, mean) for effect in main_effects(outcome, key)]
    return sorted(bars, key=lambda bar: -bar.width)


def sobol_indices(outcome: Outcome, key: str, resamples: int = RESAMPLES) -> list[Index]:
    """First-order and total indices of variance of a plan that combines by "sobol indices".

    Saltelli and others, Computer Physics Communications 181 (2010) 259, as in `scipy.stats.sobol_indices`;
    percentile intervals from a bootstrap over the points.

    Raises
    ------
    InputError
        If the plan was another, or a case failed.
    """
    from scipy import stats  # half a second to import, which only this needs

    pages = _pages(outcome, key)
    best = stats.sobol_indices(func=_named(pages), n=outcome.samples)
    draws = np.random.default_rng(0)
    first, total = [], []
    for _ in range(resamples):
        chosen = draws.integers(outcome.samples, size=outcome.samples)
        again = stats.sobol_indices(func=_named(pages[:, chosen]), n=outcome.samples)
        first.append(np.atleast_1d(again.first_order))
        total.append(np.atleast_1d(again.total_order))
    return [
        Index(
            varied.key,
            float(np.atleast_1d(best.first_order)[place]),
            _interval([draw[place] for draw in first]),
            float(np.atleast_1d(best.total_order)[place]),
            _interval([draw[place] for draw in total]),
        )
        for place, varied in enumerate(outcome.varied)
    ]


def failure_share(outcome: Outcome, confidence: float = CONFIDENCE) -> FailureShare:
    """Share of cases that break a limit, with the interval of Wilson, JASA 22 (1927) 209.

    It estimates the share of cups only where the cases are drawn from distributions. Raises InputError
    without limits.
    """
    from scipy import stats

    if not outcome.goals:
        raise InputError("limits", None, "the plan has none", "write a [limits] table, or a [target]")
    verdicts = outcome.verdicts()
    counts = {word: verdicts.count(word) for word in (PASSED, FAILED, UNDECIDED, NOT_RUN)}
    decided = counts[PASSED] + counts[FAILED]
    if decided == 0:
        return FailureShare(0, 0, counts[UNDECIDED], counts[NOT_RUN], float("nan"), (0.0, 1.0))
    interval = stats.binomtest(counts[FAILED], decided).proportion_ci(confidence, method="wilson")
    share = counts[FAILED] / decided
    ends = (float(interval.low), float(interval.high))
    return FailureShare(counts[FAILED], decided, counts[UNDECIDED], counts[NOT_RUN], share, ends)


def pareto_front(outcome: Outcome, senses: Mapping[str, Sense]) -> list[Row]:
    """Cases that no other case beats in all figures at once, in the order of the plan.

    Parameters
    ----------
    senses:
        Figure -> "least" or "most", whichever is good.
    """
    signed = [outcome.figure(key) * (1.0 if sense == "least" else -1.0) for key, sense in senses.items()]
    cost = np.stack(signed, axis=1)
    known = np.isfinite(cost.sum(axis=1))
    front = []
    for row, mine, usable in zip(outcome.rows, cost, known, strict=True):
        if usable and not ((cost <= mine).all(axis=1) & (cost < mine).any(axis=1)).any():
            front.append(row)
    return front


def best_rows(outcome: Outcome, key: str, sense: Sense, count: int = 10) -> list[Row]:
    """The cases with the least or the most of a figure, the best first; only those that keep the limits."""
    values, verdicts = outcome.figure(key), outcome.verdicts()
    good = [place for place in np.flatnonzero(~np.isnan(values)) if verdicts[place] == PASSED]
    order = sorted(good, key=lambda place: values[place] if sense == "least" else -values[place])
    return [outcome.rows[place] for place in order[:count]]


def _effect(outcome: Outcome, varied: Varied, values: Floats) -> Effect:
    group, places, labels = _groups(outcome, varied)
    known = ~np.isnan(values)
    means = np.array([_mean(values[known & (group == level)]) for level in range(len(places))])
    counts = np.array([int((known & (group == level)).sum()) for level in range(len(places))])
    return Effect(varied, places, labels, means, counts, _between(values, group))


def _mean(values: Floats) -> float:
    return float(values.mean()) if len(values) else float("nan")


def _groups(outcome: Outcome, varied: Varied) -> tuple[NDArray[np.int_], Floats, tuple[str, ...]]:
    """Level number of each case `[c]`, and places and labels of the levels."""
    if not varied.is_number:
        words = outcome.words(varied.key)
        names = list(dict.fromkeys(words))
        group = np.array([names.index(word) for word in words])
        return group, np.arange(len(names), dtype=float), tuple(names)
    given = outcome.inputs(varied.key)
    distinct = np.unique(given[~np.isnan(given)])
    if len(distinct) <= MOST_LEVELS:
        group = np.searchsorted(distinct, given)
        return group, distinct, tuple(f"{value:.4g} {varied.unit}".strip() for value in distinct)
    group = np.argsort(np.argsort(given, kind="stable")) * BINS // len(given)
    places = np.array([given[group == level].mean() for level in range(BINS)])
    return group, places, tuple(f"about {place:.3g} {varied.unit}".strip() for place in places)


def _between(values: Floats, group: NDArray[np.int_]) -> float:
    """Part of the variance that lies between groups."""
    known = ~np.isnan(values)
    values, group = values[known], group[known]
    total = float(((values - values.mean()) ** 2).sum()) if len(values) else 0.0
    if total == 0.0:
        return 0.0
    parts = [values[group == level] for level in np.unique(group)]
    return float(sum(len(part) * (part.mean() - values.mean()) ** 2 for part in parts)) / total


def _bars_one_at_a_time(outcome: Outcome, values: Floats) -> list[Bar]:
    bars = []
    for place, varied in enumerate(outcome.varied):
        low, high = 1 + 2 * place, 2 + 2 * place
        labels = [_label(outcome.rows[row], varied, outcome.inputs(varied.key)[row]) for row in (low, high)]
        bars.append(Bar(varied.key, values[0], values[low], values[high], *labels))
    return bars


def _bar_of_means(effect: Effect, mean: float) -> Bar:
    low, high = int(np.nanargmin(effect.means)), int(np.nanargmax(effect.means))
    ends = float(effect.means[low]), float(effect.means[high])
    return Bar(effect.varied.key, mean, *ends, effect.labels[low], effect.labels[high])


def _label(row: Row, varied: Varied, value: float) -> str:
    return f"{value:.4g} {varied.unit}".strip() if varied.is_number else str(row.inputs.get(varied.key, ""))


def _pages(outcome: Outcome, key: str) -> Floats:
    """The figure at the points of A, of B, and of A with each factor from B, `[page, point]`."""
    if outcome.combine != "sobol indices":
        why = f'the plan combines by "{outcome.combine}"'
        raise InputError("Sobol indices", None, why, 'write combine = "sobol indices"')
    values = outcome.figure(key)
    if np.isnan(values).any():
        bad = next(row for row, value in zip(outcome.rows, values, strict=True) if np.isnan(value))
        why = f"{int(np.isnan(values).sum())} cases have none; the first is case {bad.number}: {bad.error}"
        raise InputError(f"Sobol indices of {key}", None, why, "narrow what varies")
    return values.reshape(len(outcome.varied) + 2, outcome.samples)


def _named(pages: Floats) -> Any:
    return {"f_A": pages[None, 0], "f_B": pages[None, 1], "f_AB": pages[2:, None]}


def _interval(draws: list[float]) -> tuple[float, float]:
    low, high = np.quantile(draws, [(1.0 - CONFIDENCE) / 2.0, (1.0 + CONFIDENCE) / 2.0])
    return float(low), float(high)
