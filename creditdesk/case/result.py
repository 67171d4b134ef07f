"""The result of an assessment as JSON: what other programs read, and what a memo carries to be re-run against."""

import json
from typing import Any

import numpy as np

from creditdesk.case.standing import FactorStanding, Interval, Standing
from creditdesk.case.what_if import WhatIf
from creditdesk.case.what_if_result import findings_result, what_if_result
from creditdesk.ratios.compute import Reason
from creditdesk.statements.period import period_ending

Json = dict[str, Any]
FORMAT = "creditdesk-standing"
VERSION = 1


def result_bytes(standing: Standing, asked: WhatIf | None = None) -> bytes:
    """Return the result as UTF-8 JSON with a line end; equal standings give equal bytes, in any locale."""
    return (json.dumps(result(standing, asked), ensure_ascii=False, allow_nan=False, indent=1) + "\n").encode()


def result(standing: Standing, asked: WhatIf | None = None) -> Json:
    """Return the result as plain data; numbers are full doubles, None where there is no value.

    ``asked``: what was asked beside the standing; the keys of what there is none of are left out.
    """
    return {
        "format": FORMAT,
        "version": VERSION,
        "obligor": standing.obligor,
        "period": standing.period.isoformat(),
        "assessed_on": standing.assessed_on.isoformat(),
        "pd_runs_from": standing.pd_runs_from.isoformat(),
        "pd_runs_to": standing.pd_runs_to.isoformat(),
        "usable": standing.usable,
        "model": _model(standing),
        "house": {"lender": standing.house.lender, "version": standing.house.version, "digest": standing.house.digest},
        "ratios": _ratios(standing),
        "reference": {
            "text": standing.reference.text,
            "score": standing.reference.score,
            "pd_model": standing.reference.pd_model,
        },
        "factors": [_factor(factor) for factor in standing.factors],
        **_chain(standing),
        "reasons": list(standing.reasons),
        "past": [
            {
                "period": past.ends.isoformat(),
                "score": past.score,
                "pd_calibrated": past.pd_calibrated,
                "pd": past.pd,
                "grade": past.grade,
            }
            for past in standing.past
        ],
        "what_moved": _what_moved(standing),
        "second_opinions": [
            {
                "name": one.name,
                "score": one.score,
                "reading": one.reading,
                "pd": one.pd,
                "in_scope": one.in_scope,
                "scope": one.scope_text,
            }
            for one in standing.second_opinions
        ],
        "findings": findings_result(standing.findings),
        "cautions": list(standing.cautions),
        **({} if asked is None else what_if_result(asked)),
    }


def _model(standing: Standing) -> Json:
    model = standing.model
    return {
        "name": model.name,
        "version": model.version,
        "digest": model.digest,
        "link": model.link,
        "reading": model.reading,
    }


def _chain(standing: Standing) -> Json:
    """Return score, PDs and grades in the order in which one follows from the other."""
    grade = standing.grade
    return {
        "score": standing.score,
        "pd_model": standing.pd_model,
        "pd_calibrated": standing.pd_calibrated,
        "pd_interval": _interval(standing.pd_interval),
        "pd_judged": standing.pd_judged,
        "pd": standing.pd,
        "pd_final": standing.pd_final,
        "grade": {
            "model": grade.model,
            "judged": grade.judged,
            "final": grade.final,
            "reasons": list(grade.reasons),
        },
    }


def _interval(interval: Interval | None) -> Json | None:
    if interval is None:
        return None
    return {"on": interval.on, "level": interval.level, "low": interval.low, "high": interval.high}


def _factor(factor: FactorStanding) -> Json:
    return {
        "key": factor.key,
        "ratio": factor.ratio,
        "value": factor.value,
        "missing": factor.reason,
        "treated": factor.treated,
        "log_odds": factor.log_odds,
        "pd_share": factor.pd_share,
        "capped": factor.capped,
        "terms": [
            {
                "name": term.name,
                "value": term.value,
                "coefficient": term.coefficient,
                "reference": term.reference,
            }
            for term in factor.terms
        ],
    }


def _what_moved(standing: Standing) -> Json:
    """Return what moved since last year; without factors where there is a ``reason``."""
    moved, last_year = standing.what_moved, standing.last_year
    return {
        "since": last_year.ends.isoformat() if moved and last_year is not None else None,
        "reason": standing.what_moved_reason,
        "factors": [
            {
                "key": move.key,
                "ratio": move.ratio,
                "before": move.before,
                "before_missing": move.before_reason,
                "after": move.after,
                "after_missing": move.after_reason,
                "log_odds": move.log_odds,
                "pd_share": move.pd_share,
            }
            for move in moved
        ],
    }


def _ratios(standing: Standing) -> Json:
    """Return the ratios by key and end of period; of two periods that end on one day the restated one counts."""
    table, periods = standing.ratios, standing.statements.periods
    columns = {period.ends.isoformat(): period_ending(periods, period.ends) for period in periods}
    return {
        key: {end: _ratio(standing, key, row, column) for end, column in columns.items() if column is not None}
        for row, key in enumerate(table.keys)
    }


def _ratio(standing: Standing, key: str, row: int, period: int) -> float | Json:
    table = standing.ratios
    code = int(table.reasons[row, period])
    if code == 0:
        return float(np.asarray(table.values)[row, period])
    answer: Json = {"missing": Reason(code).name.lower()}
    needs = table.needs.get((key, period), ())
    return {**answer, "needs": list(needs)} if needs else answer
