import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.errors import UsageError
from creditdesk.memo.decision import MOST_CHARACTERS, Decision, as_reason, plain_line, read_reason

TEXTS = st.text(max_size=200).filter(lambda text: bool(plain_line(text)))


@given(TEXTS, st.sampled_from([Decision.APPROVE_WITH_CONDITIONS, Decision.DECLINE, Decision.RETURN]))
def test_a_decision_comes_back_with_its_text(text: str, decision: Decision) -> None:
    assert read_reason(as_reason(decision, text)) == (decision, plain_line(text))


@pytest.mark.parametrize("decision", [Decision.APPROVE, Decision.DECLINE, Decision.RETURN])
def test_a_decision_may_stand_alone(decision: Decision) -> None:
    assert read_reason(as_reason(decision, " \n ")) == (decision, "")


def test_conditions_must_fit_the_decision() -> None:
    for decision, conditions in (
        (Decision.APPROVE_WITH_CONDITIONS, " "),
        (Decision.APPROVE, "monthly stock list"),
        (Decision.DECLINE, "x" * (MOST_CHARACTERS + 1)),
    ):
        with pytest.raises(UsageError):
            as_reason(decision, conditions)


@pytest.mark.parametrize(
    "reason",
    ["", "Prepared", "approve", "Approved: so be it", "Approved with conditions", "Declined:  two", "Declined. "],
)
def test_anything_else_is_no_decision(reason: str) -> None:
    assert read_reason(reason) is None


def test_words_are_plain() -> None:
    assert as_reason(Decision.APPROVE_WITH_CONDITIONS, "a\n\tb") == "Approved with conditions: a b"
