"""What is asked of a case beside its standing, as JSON: scenarios, stress events, and the studies of the memo."""

from collections.abc import Mapping, Sequence
from math import isnan
from typing import Any

import msgspec

from creditdesk.base.findings import Finding
from creditdesk.case.stress_table import StressRow
from creditdesk.case.studies import ReachAnswer
from creditdesk.case.what_if import Answer, StudyAnswer, WhatIf
from creditdesk.flow.steps import FlowStep
from creditdesk.scenario.breakeven import Break, BreakEven, Side
from creditdesk.scenario.grid import Grid
from creditdesk.scenario.marks import Mark
from creditdesk.scenario.simulate import LEVELS, Spread

Json = dict[str, Any]
KEYS = ("scenarios", "stress", "studies")
_EVERY = 10
"""Of a grid's points along each side, every how many are told: all of them would outweigh the rest of the result."""


def what_if_result(asked: WhatIf) -> Json:
    """Return what there is to tell, each key only where there is anything; None stands where there is no value."""
    parts = {
        "scenarios": [_scenario(answer) for answer in asked.answers],
        "stress": [_event(row) for row in asked.stress],
        "studies": [_study(answer) for answer in asked.studies],
    }
    return {key: part for key, part in parts.items() if part}


def findings_result(findings: Sequence[Finding]) -> list[Json]:
    """Return findings as plain data."""
    return [
        {"code": one.code, "severity": one.severity.value, "place": one.place, "text": one.text} for one in findings
    ]


def _scenario(answer: Answer) -> Json:
    """Return a scenario with what it comes to; nothing of the latter where it could not be worked out."""
    scenario, pencilled, standing = answer.scenario, answer.pencilled, answer.standing
    return {
        "name": scenario.name,
        "marks": _marks(scenario.marks),
        "assumptions": dict(scenario.assumptions),
        "event": scenario.event,
        "rationale": scenario.rationale,
        "judgement": scenario.judgement,
        "in_memo": scenario.in_memo,
        "score": standing.score if standing else None,
        "pd": standing.pd if standing else None,
        "pd_final": standing.pd_final if standing else None,
        "grade": standing.grade.final if standing else None,
        "usable": standing.usable if standing else None,
        "steps": [] if pencilled is None else [_step(step) for step in pencilled.steps],
        "held": {} if pencilled is None else dict(pencilled.held),
        "findings": findings_result(answer.findings),
    }


def _marks(marks: Sequence[Mark]) -> list[Json]:
    return [{"target": mark.target, "kind": mark.kind.value, "amount": mark.amount} for mark in marks]


def _step(step: FlowStep) -> Json:
    return {"key": step.key, "before": _known(step.before), "after": _known(step.after), "why": step.why}


def _event(row: StressRow) -> Json:
    """Return a stress event; the first is the ink, which has no key."""
    return {
        "event": row.event.key if row.event is not None else None,
        "slot": row.slot.value if row.slot is not None else None,
        "own": row.own,
        "scenario": row.scenario.name if row.own else None,
        "marks": _marks(row.scenario.marks),
        "judgement": row.judgement,
        "question": row.question,
        "pd": _known(row.pd),
        "pd_final": _known(row.pd_final),
        "grade": row.grade,
        "interest_cover": _known(row.interest_cover),
        "debt_service_cover": _known(row.debt_service_cover),
        "ebitda": _known(row.ebitda),
        "cash": _known(row.cash),
        "drawn": _known(row.drawn),
        "findings": findings_result(row.findings),
    }


def _study(answer: StudyAnswer) -> Json:
    """Return a study as it was asked for, with its result under the name of its kind."""
    kind = str(answer.spec.__struct_config__.tag)
    found: Mapping[str, Any] | None
    match answer.result:
        case Grid() as grid:
            found = _grid(grid)
        case BreakEven() as ends:
            found = {"start": ends.start, "breaks": [_break(one) for one in ends.breaks]}
        case ReachAnswer() as answered:
            found = _reach(answered)
        case Spread() as spread:
            found = _spread(spread)
        case None:
            found = None
    return {"study": kind, **_plain(answer.spec), kind: found, "why_none": answer.why}


def _plain(value: Any) -> Any:  # noqa: ANN401  any part of a specification
    """Return a specification with every setting, the default ones too."""
    if isinstance(value, msgspec.Struct):
        return {name: _plain(getattr(value, name)) for name in value.__struct_fields__}
    return [_plain(one) for one in value] if isinstance(value, tuple) else value


def _grid(grid: Grid) -> Json:
    return {
        "every": _EVERY,
        "across": grid.across[::_EVERY].tolist(),
        "up": grid.up[::_EVERY].tolist(),
        "pd": [[_known(pd) for pd in row] for row in grid.pd[::_EVERY, ::_EVERY].tolist()],
        "grade": grid.grade[::_EVERY, ::_EVERY].tolist(),
    }


def _break(one: Break) -> Json:
    limit = {"kind": one.limit.kind.value, "key": one.limit.key, "at": one.limit.at}
    sides = {"down": _side(one.down), "up": _side(one.up)}
    return {"limit": limit, "broken": one.broken, "at_start": _known(one.at_start), **sides}


def _side(side: Side) -> Json:
    return {"ending": side.ending.value, "position": side.position}


def _reach(answered: ReachAnswer) -> Json:
    found = answered.found
    return {
        "kind": found.kind.value,
        "plan": _marks(answered.marks),
        "held": list(found.held),
        "cost": _known(found.cost),
        "active": list(found.active),
        "left_out": [{"target": one.target, "why": one.why} for one in answered.left_out],
        "pd": _known(found.pd),
        "grade": answered.grade,
        "best_grade": answered.best_grade,
        "rules": [rule.reason for rule in answered.caps],
    }


def _spread(spread: Spread) -> Json:
    return {
        "quantiles": {f"{level:g}": _known(pd) for level, pd in zip(LEVELS, spread.quantiles.tolist(), strict=True)},
        "mean": _known(spread.mean),
        "error": _known(spread.error),
        "grades": {str(place): share for place, share in spread.grades.items()},
        "without": spread.without,
    }


def _known(amount: float) -> float | None:
    return None if isnan(amount) else float(amount)
