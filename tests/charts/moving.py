"""A standing with its way from last year's borrower, made by hand."""

from dataclasses import replace

from creditdesk.case.standing import FactorMove, Standing
from tests.standings import standing

BEFORE = {"ebit_to_assets": 0.097, "interest_cover": None}


def moving(**changes: object) -> Standing:
    """Return a standing whose moves sum to its score less last year's, which is -3.70."""
    shown = standing(**changes)
    last = shown.last_year
    assert last is not None
    assert last.score is not None
    assert shown.score is not None
    part = (shown.score - last.score) / len(shown.factors)
    moves = tuple(
        FactorMove(
            key=one.key,
            label=one.label,
            ratio=one.ratio,
            unit=one.unit,
            before=BEFORE.get(one.key, one.value),
            before_reason="no_debt" if one.key == "interest_cover" else None,
            after=one.value,
            after_reason=None,
            log_odds=part + (0.3 if number == 0 else -0.3 if number == 1 else 0.0),
            pd_share=0.001 * (number - 2),
        )
        for number, one in enumerate(shown.factors)
    )
    return replace(shown, what_moved=moves)
