"""A plan from its file to its outcome, as one call."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path

from cupfem.errors import InputError
from cupfem.serving import Serving
from cupfem.vary.best import search
from cupfem.vary.cases import Case, CupModel, Model, cup_model, digest
from cupfem.vary.design import Point, design_of
from cupfem.vary.engine import Engine, Progress
from cupfem.vary.factors import Factor, factors_of
from cupfem.vary.outcome import Goal, Outcome, Row, goal_of, varied_of
from cupfem.vary.paths import Slot
from cupfem.vary.plan import Plan, load_plan
from cupfem.vary.pools import ClusterPool, LocalPool, Pool
from cupfem.vary.recorded import check_recorded, pour_case, target_keys
from cupfem.vary.store import Result, Store
from cupfem.vary.values import Setting

Report = Callable[[Progress], None]


def vary(
    plan: Plan | str | Path,
    *,
    folder: str | Path | None = None,
    store: str | Path | None = None,
    workers: int | None = None,
    scheduler: str | None = None,
    model: Model | None = None,
    progress: Report | None = None,
) -> Outcome:
    """Run all cases of a plan.

    Parameters
    ----------
    plan:
        The plan, or the path of its file.
    folder:
        From where the plan names its files; left out: that of the plan's file, or the current one.
    store:
        File that keeps finished cases; the same plan goes on from there. Left out: nothing is kept.
    workers:
        Processes; left out: one for each core.
    scheduler:
        Address of a Dask scheduler, to run there instead.
    model:
        What the keys of the plan belong to, instead of its cup and serving.
    progress:
        Called as cases finish.

    Raises
    ------
    InputError
        If the plan cannot be used. A case that fails is a row with its error instead.
    """
    plan, model = prepared(plan, folder, model)
    factors = factors_of(plan, _slots(plan, model))
    with opened(model, store, workers, scheduler, progress) as (engine, kept):
        _check_recorded(model, kept)
        if plan.best is not None:
            finished = search(plan, model, factors, goals_of(plan, model), engine)
        else:
            design = design_of(plan, factors)
            cases = (case_of(model, factors, point) for point in design.points)
            finished = engine.run(cases, len(design))
    return outcome_of(plan, model, factors, finished)


def prepared(
    plan: Plan | str | Path, folder: str | Path | None = None, model: Model | None = None
) -> tuple[Plan, Model]:
    """A plan and what its keys belong to; InputError if they cannot be used."""
    if not isinstance(plan, Plan):
        folder = Path(plan).parent if folder is None else folder
        plan = load_plan(plan)
    for goal in plan.limits:
        goal_of(goal, plan.limits[goal])
    return plan, model or cup_model(plan, Path(folder or "."), pour_case)


def _check_recorded(model: Model, kept: Store) -> None:
    """Refuse a key that is no figure before hours are spent; once for a store."""
    if not isinstance(model, CupModel):
        return
    base = model.case({})
    probe = digest(["figures are there", base.key])
    if probe in kept:
        return
    if base.error:
        raise InputError("plan", None, f"its cup and serving do not go together: {base.error}")
    check_recorded(base.payload)
    kept.add([(probe, Result({}))])


def _slots(plan: Plan, model: Model) -> Mapping[str, Slot]:
    return {key: model.slot(key) for varied in plan.vary for key in varied.keys}


@contextmanager
def opened(
    model: Model,
    store: str | Path | None,
    workers: int | None,
    scheduler: str | None,
    progress: Report | None,
) -> Iterator[tuple[Engine, Store]]:
    """An engine and its store; store and pool are closed at the end."""
    if scheduler is not None and workers is not None:
        raise InputError("workers", workers, "the cluster has its own", "leave workers or scheduler out")
    pool: Pool = LocalPool(workers) if scheduler is None else ClusterPool(scheduler)
    try:
        with Store(store) as kept:
            yield Engine(model.evaluate, kept, pool, progress), kept
    finally:
        pool.close()


def case_of(model: Model, factors: tuple[Factor, ...], point: Point) -> Case:
    """The case at a point of a design."""
    settings: dict[Slot, Setting] = {}
    for factor, setting in zip(factors, point, strict=True):
        if setting is not None:
            settings |= dict.fromkeys(factor.slots, setting)
    return model.case(settings)


def goals_of(plan: Plan, model: Model) -> tuple[Goal, ...]:
    """The limits of a plan; without any, the target of its serving."""
    if plan.limits:
        return tuple(goal_of(key, limit) for key, limit in plan.limits.items())
    if not isinstance(model, CupModel):
        return ()
    return tuple(Goal(key, at_least=0.0) for key in target_keys(Serving.from_data(model.serving)))


def outcome_of(
    plan: Plan, model: Model, factors: tuple[Factor, ...], finished: list[tuple[Case, Result]]
) -> Outcome:
    """The outcome of finished cases."""
    rows = tuple(
        Row(number, case.inputs, result.figures, result.error, case.text, case.key)
        for number, (case, result) in enumerate(finished, 1)
    )
    inputs = [row.inputs for row in rows]
    varied = tuple(
        varied_of(factor.name, factor.slots[0].kind, inputs, tuple(slot.key for slot in factor.slots[1:]))
        for factor in factors
    )
    recorded = plan.recorded if isinstance(model, CupModel) else _told(rows)
    return Outcome(plan.title, plan.combine, plan.samples or 0, varied, recorded, goals_of(plan, model), rows)


def _told(rows: tuple[Row, ...]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(key for row in rows for key in row.figures if "_at_least_" not in key))
