"""From amounts of the assessed period in pencil to score, PD and grade: many draws at once, and slopes at one."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import BugError
from creditdesk.case.grades import OUT_OF_SCOPE, facts_of
from creditdesk.flow.pencil import pencil_statements
from creditdesk.flow.run import Flow
from creditdesk.formula.values import Env
from creditdesk.grading.rules import FLAGS, TEXTS, grades_after
from creditdesk.grading.scale import final_pds, positions
from creditdesk.house.book import HouseBook
from creditdesk.model.calibrate import calibrated_derivative, calibrated_pd
from creditdesk.model.interval import standard_error
from creditdesk.model.scope import size_outside
from creditdesk.model.score import model_pd, score, score_derivative
from creditdesk.model.spec import ModelSpec
from creditdesk.model.treat import treat, treat_derivative
from creditdesk.ratios.catalogue import part_of
from creditdesk.ratios.column import Column, column_of, column_ratios, column_slopes
from creditdesk.scenario.outcomes import Outcomes
from creditdesk.statements.chart import TOTAL_ASSETS
from creditdesk.statements.plan import compile_plan
from creditdesk.statements.statement import StatementSet

FloatArray = NDArray[np.float64]
Draws = Mapping[str, FloatArray]


@dataclass(frozen=True, slots=True, eq=False)
class Ground:
    """Hold what stays the same under every mark.

    ``outside``: kind or branch put the borrower outside the model's scope. ``usable``: no finding of severity stop
    stands, and marks make none. ``constants``: of the ratio formulas. ``currency``: units of the model's currency, in
    single units, for one of the case's unit.
    """

    house: HouseBook
    spec: ModelSpec
    ink: StatementSet
    period: int
    constants: Mapping[str, float]
    currency: float
    outside: bool
    usable: bool


@dataclass(frozen=True, slots=True, eq=False)
class Chain:
    """Hold the part of the catalogue that model, rules and ``watch`` need, and the amounts behind it, by key.

    ``added``: sums that are known only because marks fill blanks beneath them, with their parts and signs, parts first.
    """

    ground: Ground
    column: Column
    watch: tuple[str, ...]
    amounts: tuple[str, ...]
    added: tuple[tuple[str, tuple[tuple[str, float], ...]], ...] = ()


@dataclass(frozen=True, slots=True, eq=False)
class Slopes:
    """Hold how fast things move per unit of each target, in the target's own unit; one entry per target.

    ``score`` and ``pd_calibrated``: nan where there is none. ``amounts``: what was watched, by key; what is not known,
    and what stands still, does not move.
    """

    targets: tuple[str, ...]
    score: FloatArray
    pd_calibrated: FloatArray
    amounts: Draws


def chain_of(ground: Ground, watch: tuple[str, ...], flow: Flow) -> Chain:
    """Prepare a chain for what is watched, and for the blank lines that ``flow`` fills."""
    catalogue, ink = ground.house.catalogue, ground.ink
    named = {name for one in ground.house.rules.rules for name in one.condition.names} - {*FLAGS, *TEXTS}
    wanted = {*named, *watch}
    if unknown := sorted(wanted - catalogue.index.keys() - ink.index.keys()):
        raise BugError(f"neither line, sum nor ratio: {', '.join(unknown)}")
    ratios = [factor.ratio for factor in ground.spec.factors] + [key for key in wanted if key in catalogue.index]
    disclosing = _disclosing(ground, flow) if filled(ground, flow) else ink
    column = column_of(part_of(catalogue, ratios), disclosing, ground.period, ground.constants)
    added = tuple(_added(ground, disclosing))
    lines = ink.keys if added else sorted(key for key in wanted if key in ink.index)
    return Chain(ground, column, watch, tuple(dict.fromkeys([TOTAL_ASSETS, *column.names, *lines])), added)


def filled(ground: Ground, flow: Flow) -> frozenset[str]:
    """Name the blank lines that marks fill."""
    return frozenset(key for key in flow.levels if np.isnan(ground.ink.row(key)[ground.period]))


def _disclosing(ground: Ground, flow: Flow) -> StatementSet:
    """Return the ink with nil in place of what is blank there and known under the marks."""
    known = pencil_statements(ground.ink, flow).values
    first = known if known.ndim == 2 else known[..., 0]
    return replace(ground.ink, values=np.where(np.isnan(ground.ink.values) & ~np.isnan(first), 0.0, ground.ink.values))


def _added(ground: Ground, disclosing: StatementSet) -> Iterator[tuple[str, tuple[tuple[str, float], ...]]]:
    """List the sums that ``disclosing`` knows and the ink does not."""
    plan = compile_plan(ground.ink.chart, ground.ink.periods[ground.period].presentation)
    new = np.isnan(ground.ink.values[:, ground.period]) & ~np.isnan(disclosing.values[:, ground.period])
    for total in plan.sums:
        if new[total.row]:
            yield plan.keys[total.row], tuple((plan.keys[row], sign) for row, sign in total.parts)


def outcomes(
    chain: Chain, flow: Flow, held: Draws, shape: tuple[int, ...], off: FloatArray | float | None = None
) -> Outcomes:
    """Follow the chain for every draw; ``held``: ratios that are given, ``shape``: that of the draws.

    ``off``: by how many of its standard errors the score is off, None for not at all; nan results where the model
    states no covariance.
    """
    ground, spec = chain.ground, chain.ground.spec
    catalogue, amounts = chain.column.catalogue, amounts_of(chain, flow)
    values, reasons = column_ratios(chain.column, amounts, _known(chain, held))
    rows = [catalogue.index[factor.ratio] for factor in spec.factors]
    design = treat(spec, values[rows], reasons[rows])
    scores = score(spec, design) + (0.0 if off is None else off * standard_error(spec, design))
    ratios = dict(zip(catalogue.keys, values, strict=True))
    pd_calibrated = calibrated_pd(spec, scores)
    pd = np.maximum(ground.house.settings.pd_floor, pd_calibrated)
    judged = positions(ground.house.scale, pd)
    final = grades_after(ground.house.rules, ground.house.scale, _env(ground, ratios, amounts), judged)
    final = final if ground.usable else np.full_like(final, -1)
    watched = {key: np.broadcast_to(ratios[key] if key in ratios else amounts[key], shape) for key in chain.watch}
    return Outcomes(
        score=np.broadcast_to(scores, shape),
        pd_model=np.broadcast_to(model_pd(spec.link, scores), shape),
        pd_calibrated=np.broadcast_to(pd_calibrated, shape),
        pd=np.broadcast_to(pd, shape),
        pd_final=np.broadcast_to(final_pds(ground.house.scale, pd, judged, final), shape),
        grade=np.broadcast_to(final, shape),
        amounts=watched,
    )


def amounts_of(chain: Chain, flow: Flow) -> dict[str, FloatArray]:
    """Return the amounts of the period in pencil: one per draw where they move, else one for all."""
    found = {key: _amount(chain.ground, flow, key) for key in chain.amounts}
    for key, parts in chain.added:
        if key not in flow.levels:
            terms = [sign * np.nan_to_num(found[part]) for part, sign in parts]
            found[key] = sum(terms[1:], terms[0])
    return found


def _amount(ground: Ground, flow: Flow, key: str) -> FloatArray:
    if key in flow.levels:
        return flow.levels[key].value
    before: FloatArray = ground.ink.values[ground.ink.index[key], ground.period]
    return before + flow.changes[key].value if key in flow.changes else before


def _moving(chain: Chain, flow: Flow, count: int) -> dict[str, FloatArray]:
    """Say how fast the amounts of the period move along each direction; those left out stand still."""
    found = {key: flow.changes[key].along(count) for key in chain.amounts if key in flow.changes}
    for key, parts in chain.added:
        if key not in flow.levels:
            found[key] = sum((sign * found[part] for part, sign in parts if part in found), np.zeros(count))
    return found


def _known(chain: Chain, held: Draws) -> Draws:
    return {key: value for key, value in held.items() if key in chain.column.catalogue.index}


def _env(ground: Ground, ratios: Draws, amounts: Draws) -> Env:
    """Return what the house rules may name."""
    facts = facts_of(ground.ink.periods[ground.period])
    outside = ground.outside | size_outside(ground.spec, amounts[TOTAL_ASSETS] * ground.currency)
    return {**ratios, **amounts, **facts, OUT_OF_SCOPE: outside.astype(np.float64)}


def slopes(chain: Chain, flow: Flow, held: Draws, pushed: Draws, targets: tuple[str, ...]) -> Slopes:
    """Differentiate the chain at one point along the directions of ``flow`` and of the ratios ``pushed``."""
    spec, catalogue, count = chain.ground.spec, chain.column.catalogue, len(targets)
    amounts = amounts_of(chain, flow)
    moving = _moving(chain, flow, count)
    given = {key: float(value) for key, value in _known(chain, held).items()}
    values, reasons = column_ratios(chain.column, amounts, _known(chain, held))
    moved = column_slopes(chain.column, amounts, moving, given, _known(chain, pushed), count)
    rows = [catalogue.index[factor.ratio] for factor in spec.factors]
    here, why, along = values[rows, None], reasons[rows, None], moved[rows]
    points = np.asarray(score(spec, treat(spec, values[rows], reasons[rows])))
    scored = np.sum(score_derivative(spec, treat_derivative(spec, here, why, along)) * along, axis=0)
    scored = np.where(np.isnan(points), np.nan, scored)
    ratios = dict(zip(catalogue.keys, moved, strict=True))
    watched = {key: ratios[key] if key in ratios else moving.get(key, np.zeros(count)) for key in chain.watch}
    return Slopes(targets, scored, calibrated_derivative(spec, points) * scored, watched)
