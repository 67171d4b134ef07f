"""Pencil on one case: marks run through its statements and assessed like the ink, which stays as it is."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import msgspec
import numpy as np
from numpy.typing import NDArray

from creditdesk.base.errors import BugError, UserError
from creditdesk.base.findings import Finding, Severity
from creditdesk.case.assess import assess_statements
from creditdesk.case.document import Case
from creditdesk.case.opinions import RatioTables, borrower
from creditdesk.case.pencil_chain import Chain, Ground, Slopes, chain_of, filled, outcomes, slopes
from creditdesk.case.standing import Standing
from creditdesk.case.statements import case_statements
from creditdesk.flow.assumptions import Overrides
from creditdesk.flow.moves import Moves
from creditdesk.flow.pencil import pencil_statements
from creditdesk.flow.run import Flow, run_flow
from creditdesk.flow.steps import FlowStep, steps
from creditdesk.house.book import HouseBook
from creditdesk.model.scope import out_of_scope
from creditdesk.ratios.compute import HELD
from creditdesk.scenario.marks import Scenario, moves_of
from creditdesk.scenario.outcomes import COEFFICIENTS, DRAWS_MOST, Outcomes

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Pencilled:
    """Hold a scenario worked out.

    ``flow``: what lines move by, and the numbers behind interest, tax and balancing. ``steps``: how the marks ran
    through the statements, in order. ``findings``: what was refused, and what a reader should know of the marks; those
    of the figures stand in ``standing``. ``held``: ratios held at a value.
    """

    scenario: Scenario
    moves: Moves
    standing: Standing
    flow: Flow
    steps: tuple[FlowStep, ...]
    findings: tuple[Finding, ...]
    held: Mapping[str, float]


class PencilBoard:
    """Answer marks on one case: prepared once, asked many times.

    ``ink``: the standing without any mark. ``model``: one to apply in place of the lead model. Raises UserError where
    the house book says nothing of how figures flow, and as ``assess``.
    """

    def __init__(self, case: Case, house: HouseBook, model: str = "") -> None:
        if house.flow is None:
            raise UserError("pencil", "flow.toml: the house book has none, so marks cannot run through the statements")
        self._case, self._house, self._model = case, house, model
        self._book = house.flow
        self._statements = case_statements(case, house.chart)
        self.ink = assess_statements(case, house, self._statements, model)
        self._ground = _ground(case, house, self.ink, model)
        self._chains: dict[tuple[tuple[str, ...], frozenset[str]], Chain] = {}

    def scenario(self, scenario: Scenario, *, opinions: bool = True) -> Pencilled:
        """Work out a scenario: its standing, by the same pipeline as the ink. Raises UserError ``assumptions``.

        ``opinions`` False leaves out what other models say, which nobody reads while a slider moves.
        """
        moves = moves_of(scenario.marks)
        flow = run_flow(self._book, self.ink.statements, self.ink.period_index, moves, scenario.assumptions)
        held, findings = self._held(flow)
        marked = {key: float(value) for key, value in held.items()}
        pencilled = replace(self._statements, adjusted=pencil_statements(self.ink.statements, flow), held=marked)
        over = None if opinions else self.ink
        return Pencilled(
            scenario=scenario,
            moves=moves,
            standing=assess_statements(self._case, self._house, pencilled, self._model, over=over),
            flow=flow,
            steps=steps(self._book, self.ink.statements, flow),
            findings=(*flow.findings, *findings),
            held=marked,
        )

    def findings(self, moves: Moves, overrides: Overrides | None = None) -> tuple[Finding, ...]:
        """Say what is refused of moves of one point, and what is to be known of them, without working them out."""
        flow = run_flow(self._book, self.ink.statements, self.ink.period_index, moves, overrides)
        return (*flow.findings, *self._held(flow)[1])

    def evaluate(self, moves: Moves, overrides: Overrides | None = None, watch: Sequence[str] = ()) -> Outcomes:
        """Say what moves come to, for one point or for up to ``DRAWS_MOST`` draws at once.

        ``watch``: lines, sums and ratios to be told as well. The same numbers as ``scenario`` gives of each draw; the
        target ``COEFFICIENTS`` beside them puts the score off by as many of its standard errors.
        """
        shape = np.broadcast_shapes(*(np.shape(move.amount) for move in moves.values()))
        if np.prod(shape) > DRAWS_MOST:
            raise BugError(f"{np.prod(shape):.0f} draws in one call, at most {DRAWS_MOST} are allowed")
        marks = {target: move for target, move in moves.items() if target != COEFFICIENTS}
        flow = run_flow(self._book, self.ink.statements, self.ink.period_index, marks, overrides)
        held, _ = self._held(flow)
        off = moves[COEFFICIENTS].amount if COEFFICIENTS in moves else None
        return outcomes(self._chain(watch, flow), flow, held, shape, off)

    def slopes(
        self,
        moves: Moves,
        overrides: Overrides | None,
        targets: Sequence[str],
        side: int = 1,
        watch: Sequence[str] = (),
    ) -> Slopes:
        """Differentiate where moves of one point stand, per unit of each target; at a kink to the right of it.

        ``side``: -1 for the left of it. A target that is a ratio moves by itself, its statement does not.
        """
        units = {target: side * np.array([one == target for one in targets], dtype=np.float64) for target in targets}
        flow = run_flow(self._book, self.ink.statements, self.ink.period_index, moves, overrides, units)
        pushed = {key: unit for key, unit in units.items() if key in flow.elsewhere}
        held, _ = self._held(flow)
        found = slopes(self._chain(watch, flow), flow, held, pushed, tuple(targets))
        return Slopes(
            targets=found.targets,
            score=side * found.score,
            pd_calibrated=side * found.pd_calibrated,
            amounts={key: side * slope for key, slope in found.amounts.items()},
        )

    def _chain(self, watch: Sequence[str], flow: Flow) -> Chain:
        """Return the chain for what is watched and filled; kept, as every study asks for one many times."""
        kind = (tuple(watch), filled(self._ground, flow))
        if kind not in self._chains:
            self._chains[kind] = chain_of(self._ground, tuple(watch), flow)
        return self._chains[kind]

    def _held(self, flow: Flow) -> tuple[dict[str, FloatArray], tuple[Finding, ...]]:
        """Return the ratios that are held at a value, and a finding for each mark on what the flow does not know."""
        held, findings = {}, []
        for key in sorted(set(flow.elsewhere) & flow.moves.keys()):
            place = f"ratios.{key}[{self.ink.period.isoformat()}]"
            if key not in self._house.catalogue.index:
                text = f"{key} is neither a line of this layout, a ratio nor a driver: the mark changes nothing."
                findings.append(Finding("pencil.refused", Severity.QUERY, place, text))
                continue
            value = flow.moves[key].moved(self.ink.ratios.value(key, self.ink.period_index))
            label = self._house.catalogue.spec(key).label
            if np.isnan(value).any():
                text = f"{label} has no value to move from: the mark changes nothing, save one that sets it to a value."
                findings.append(Finding("pencil.refused", Severity.QUERY, place, text))
            else:
                held[key] = value
                findings.append(Finding("pencil.held", Severity.NOTE, place, f"{label} is {HELD}."))
        return held, tuple(findings)


def _ground(case: Case, house: HouseBook, ink: Standing, model: str) -> Ground:
    spec, period = house.models[model or case.model.lead or house.settings.lead_model].spec, ink.period_index
    tables = RatioTables(case, house.catalogue, ink.statements)
    unsized = msgspec.structs.replace(spec.scope, total_assets_low=None, total_assets_high=None)
    who = borrower(case, spec, ink.statements, tables, period)
    return Ground(
        house=house,
        spec=spec,
        ink=ink.statements,
        period=period,
        constants=tables.constants(spec.currency),
        currency=case.obligor.unit * tables.rate(spec.currency),
        outside=bool(out_of_scope(msgspec.structs.replace(spec, scope=unsized), who)),
        usable=ink.usable,
    )
