"""The principal reasons: the applied model's own, the largest first, and none where nothing raises a PD."""

from dataclasses import replace

import pytest

from creditdesk.case.assess import assess
from creditdesk.case.reasons import MOST, raising_factors
from creditdesk.case.standing import FactorStanding, Standing
from tests.borrowers import STRETCHED, case_of, changed, demo, shipped_house
from tests.standings import factor
from tests.statements.books import CLEAN, without

HOUSE = shipped_house()


def reasons_of(standing: Standing) -> list[str]:
    """Take the sentences about factors, which come before those about rules."""
    return [reason for reason in standing.reasons if "to the score, which raises the PD" in reason]


def test_four_at_most_the_largest_first_as_the_contributions_say() -> None:
    one = assess(demo(STRETCHED), HOUSE)
    raising = sorted((f for f in one.factors if (f.log_odds or 0) > 0), key=lambda f: -(f.log_odds or 0))
    assert len(raising) > MOST
    assert len(reasons_of(one)) == MOST
    for reason, expected in zip(reasons_of(one), raising, strict=False):
        assert reason.startswith(expected.label)
        assert f"contributes {expected.log_odds:+.2f} to the score" in reason


def test_a_reason_states_the_value_and_the_reference_borrower_s() -> None:
    one = assess(changed(demo(), finance_costs=(548.0, 702.0, 3_000.0)), HOUSE)
    assert "Interest cover of 1.21×, against 3.93× of the reference borrower, contributes +0.18" in reasons_of(one)[0]


def test_a_blank_that_raises_the_pd_is_named_with_what_is_missing() -> None:
    one = assess(case_of(without(CLEAN, "depreciation_amortisation")), HOUSE)
    assert reasons_of(one)[0] == (
        "Debt / EBITDA has no value, and that contributes +0.63 to the score, which raises the PD. "
        "EBITDA not disclosed: needs depreciation and amortisation"
    )


def test_what_lowers_the_pd_is_no_reason() -> None:
    one = assess(demo(), HOUSE)
    lowering = [f.label for f in one.factors if f.log_odds is not None and f.log_odds <= 0]
    assert lowering
    assert not any(reason.startswith(label) for reason in one.reasons for label in lowering)


@pytest.mark.parametrize("name", ["altman-1983-z1", "altman-1995-z2", "springate-1978"])
@pytest.mark.parametrize("case", [demo(), demo(STRETCHED)], ids=["sound", "stretched"])
def test_a_score_without_a_pd_has_no_reason_that_raises_a_pd(name: str, case: object) -> None:
    """A high discriminant score speaks for a borrower: what raises it is no reason against him."""
    one = assess(case, HOUSE, name)  # type: ignore[arg-type]
    assert one.score is not None
    assert reasons_of(one) == []
    assert not any("raises" in reason for reason in one.reasons)


def raised(*amounts: float | None) -> list[tuple[FactorStanding, float]]:
    made = [factor(f"Factor {index}", "quick_ratio", "number", 1.0, 0.0) for index in range(len(amounts))]
    return raising_factors([replace(one, log_odds=amount) for one, amount in zip(made, amounts, strict=True)])


def test_ties_keep_the_model_s_order_and_blanks_stay_out() -> None:
    assert [one.label for one, _ in raised(0.2, 0.5, None, 0.2, -1.0, 0.0)] == ["Factor 1", "Factor 0", "Factor 3"]
    assert raised(None, None) == []
