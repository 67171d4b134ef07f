"""Standings made by hand for tests of charts and memo: invented, plausible, and bent where a test wants it."""

from dataclasses import replace
from datetime import date
from itertools import pairwise
from types import SimpleNamespace

import numpy as np

from creditdesk.base.findings import Finding, Severity
from creditdesk.base.numbers import sigmoid
from creditdesk.case.standing import (
    Curve,
    FactorStanding,
    GradeBand,
    GradeStanding,
    HouseIdentity,
    Interval,
    ModelIdentity,
    PeriodStanding,
    Reference,
    SampleBin,
    SecondOpinion,
    Standing,
    Term,
)
from creditdesk.statements.chart import Chart
from creditdesk.statements.period import Basis, Period, Presentation
from creditdesk.statements.statement import StatementSet

# label, ratio, unit, value, contribution
FACTORS = (
    ("Operating profit / assets", "ebit_to_assets", "percent", 0.126, -0.34),
    ("Equity ratio", "equity_ratio", "percent", 0.50, -0.29),
    ("Interest cover", "interest_cover", "times", 5.92, 0.27),
    ("Size (log of assets)", "log_assets", "log", 17.2, -0.22),
    ("Debt / EBITDA", "debt_to_ebitda", "times", 1.61, -0.11),
    ("Quick ratio", "quick_ratio", "number", 0.97, 0.08),
    ("Revenue growth", "revenue_growth", "percent", 0.064, -0.06),
)
REFERENCE_SCORE = -3.38
EDGES = (0.0, 0.0008, 0.0018, 0.0035, 0.0065, 0.0115, 0.02, 0.035, 0.06, 0.10, 0.17, 0.28, 1.0)


PERIODS = tuple(Period(date(year, 12, 31), 12, Basis.AUDITED, Presentation.BY_FUNCTION) for year in (2023, 2024, 2025))
EMPTY = StatementSet(
    chart=Chart((), (), ()),
    periods=PERIODS,
    keys=(),
    values=np.empty((0, 3)),
    states=np.empty((0, 3), dtype=np.uint8),
    printed={},
    not_divided={},
    needs={},
)
QUERY = Finding("inventories.slow", Severity.QUERY, "figures.inventories[2025-12-31]", "Inventories turn in 74 days.")


def factor(
    label: str, ratio: str, unit: str, value: float | None, log_odds: float, **changes: object
) -> FactorStanding:
    made = FactorStanding(
        key=ratio,
        label=label,
        ratio=ratio,
        unit=unit,
        value=value,
        reason=None,
        reason_text="",
        treated=value,
        log_odds=log_odds,
        pd_share=log_odds * 0.02,
        capped=False,
        terms=(Term(ratio, value or 0.0, -2.0, 0.2),),
        reference_value=(value or 0.0) * 0.9,
        place=0.6,
    )
    return replace(made, **changes)


def factors() -> tuple[FactorStanding, ...]:
    return tuple(factor(*row) for row in FACTORS)


BIN_SCORES = (-6.2, -5.5, -4.8, -4.1, -3.4, -2.7, -2.0, -1.3, -0.6)


def curve(low: float = -11.0, high: float = 5.0) -> Curve:
    scores = np.linspace(low, high, 161)
    spread = 0.16 + 0.035 * np.abs(scores - REFERENCE_SCORE)
    bins = tuple(_bin(score, number) for number, score in enumerate(BIN_SCORES))
    bands = tuple(
        GradeBand(str(number), lower, upper, f"criteria of grade {number}")
        for number, (lower, upper) in enumerate(pairwise(EDGES), start=1)
    )
    return Curve(scores, sigmoid(scores), sigmoid(scores - 1.64 * spread), sigmoid(scores + 1.64 * spread), bins, bands)


def _bin(score: float, number: int) -> SampleBin:
    rate = float(sigmoid(score)) * (1.7, 0.6, 1.1, 0.9, 1.0, 1.05, 0.92, 1.02, 0.97)[number]
    spread = (1.0, 0.7, 0.5, 0.4, 0.35, 0.28, 0.25, 0.22, 0.3)[number]
    return SampleBin(score, rate, rate * np.exp(-spread), min(rate * np.exp(spread), 1.0), 660, max(int(rate * 660), 1))


def grade_of(pd: float) -> str:
    return str(int(np.searchsorted(EDGES, pd, side="right")))


def year(ends: date, score: float) -> PeriodStanding:
    pd = float(sigmoid(score))
    return PeriodStanding(ends, str(ends.year), score, pd, pd, grade_of(pd), factors())


def standing(**changes: object) -> Standing:
    """Make the standing of an invented borrower whose score is reference plus contributions."""
    own = changes.pop("factors", factors())
    score = REFERENCE_SCORE + sum(part.log_odds or 0.0 for part in own)
    pd = float(sigmoid(score))
    grade = grade_of(pd)
    past = (year(date(2023, 12, 31), -3.25), year(date(2024, 12, 31), -3.7))
    values: dict[str, object] = {
        "obligor": "Brackwater Millworks Ltd",
        "period": date(2025, 12, 31),
        "period_index": 2,
        "assessed_on": date(2026, 12, 1),
        "pd_runs_from": date(2025, 12, 31),
        "pd_runs_to": date(2026, 12, 31),
        "model": ModelIdentity(
            "northlight-sme",
            "Northlight small companies",
            "2.1",
            "sha256:" + "3f" * 32,
            "logit",
            "Log-odds of default within twelve months.",
            True,
        ),
        "statements": EMPTY,
        "received": EMPTY,
        "ratios": SimpleNamespace(),  # neither charts nor the memo's layout read it
        "reference": Reference("the median borrower of the development sample", REFERENCE_SCORE, 0.0329),
        "factors": own,
        "score": score,
        "pd_model": pd,
        "pd_calibrated": pd,
        "pd_interval": Interval("pd_calibrated", 0.90, float(sigmoid(score - 0.45)), float(sigmoid(score + 0.45))),
        "pd_judged": pd,
        "pd": pd,
        "pd_final": pd,
        "grade": GradeStanding(grade, grade, grade, ()),
        "reasons": (),
        "usable": True,
        "curve": curve(),
        "past": past,
        "last_year": past[-1],
        "second_opinions": (
            SecondOpinion("altman-1983-z1", "Altman 1983, private firms", 2.42, "grey zone", None, True, "in scope"),
        ),
        "findings": (QUERY,),
        "cautions": ("An estimate from a configured model, not a decision.",),
        "house": HouseIdentity("Lantern Quay Finance (fictional)", "demonstration", "1", "sha256:" + "c9" * 32, True),
    }
    return Standing(**{**values, **changes})


def without_pd(**changes: object) -> Standing:
    """Make a standing whose model gives no PD because too many factors are missing."""
    blank: dict[str, object] = {"value": None, "treated": None, "log_odds": None, "pd_share": None, "terms": ()}
    gone = tuple(
        replace(part, reason="not_disclosed", reason_text="Needs depreciation.", **blank) for part in factors()
    )
    return standing(
        factors=gone,
        score=None,
        pd_model=None,
        pd_calibrated=None,
        pd_interval=None,
        pd_judged=None,
        pd=None,
        pd_final=None,
        grade=GradeStanding("none", "none", "none", ()),
        reasons=("5 of 7 factors are missing; the model allows 3.",),
        **changes,
    )
