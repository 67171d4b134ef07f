"""Findings on dates, scope and factors: when each appears, where it points, what it says."""

from datetime import date
from types import SimpleNamespace

import pytest

from creditdesk.base.findings import Finding, Severity
from creditdesk.case.assess import assess
from creditdesk.case.document import Assessment, Case, LegalForm
from creditdesk.case.doubts import case_findings
from creditdesk.case.words import long_date
from tests.borrowers import STRETCHED, case_of, demo, shipped_house
from tests.statements.books import CLEAN, without, year

HOUSE = shipped_house()
OTHER = LegalForm.OTHER


def found(case: Case, code: str) -> list[Finding]:
    return [finding for finding in assess(case, HOUSE).findings if finding.code == code]


def assessed_on(day: date | None) -> Case:
    return case_of(assessment=Assessment(day))


@pytest.mark.parametrize(
    ("day", "severities", "words"),
    [
        (None, [Severity.NOTE], "the end of the assessed period, 31\u00a0December 2025, is taken"),
        (
            date(2025, 12, 30),
            [Severity.QUERY],
            "30\u00a0December 2025 lies before the end of the assessed period, 31\u00a0December 2025",
        ),
        (date(2025, 12, 31), [], ""),
        (date(2026, 3, 1), [], ""),
    ],
)
def test_the_assessment_date_is_given_and_not_before_the_figures(
    day: date | None, severities: list[Severity], words: str
) -> None:
    findings = found(assessed_on(day), "assessment_date")
    assert [finding.severity for finding in findings] == severities
    for finding in findings:
        assert (finding.place, words in finding.text) == ("assessment.date", True)


@pytest.mark.parametrize(
    ("ends", "day", "old"),
    [
        (date(2025, 12, 31), date(2027, 6, 30), False),
        (date(2025, 12, 31), date(2027, 7, 1), True),
        (date(2025, 1, 1), date(2026, 7, 1), False),
        (date(2025, 1, 1), date(2026, 7, 2), True),  # in the same month, and past the limit all the same
        (date(2024, 8, 31), date(2026, 2, 28), False),
        (date(2024, 8, 31), date(2026, 3, 1), True),
    ],
)
def test_figures_are_old_from_the_day_after_the_house_s_limit_of_months(ends: date, day: date, *, old: bool) -> None:
    assert HOUSE.settings.stale_after_months == 18
    findings = found(case_of(periods=(year(ends),), assessment=Assessment(day)), "old_figures")
    assert bool(findings) is old
    for finding in findings:
        assert (finding.severity, finding.place) == (Severity.QUERY, "assessment.period")
        assert f"to {long_date(ends)}, are more than 18 months old on {long_date(day)}" in finding.text


def test_every_reason_to_be_out_of_scope_is_a_query_of_its_own_and_the_rule_applies() -> None:
    case = case_of({key: 10 * amount for key, amount in CLEAN.items()}, country="DE", sector="F", legal_form=OTHER)
    one = assess(case, HOUSE)
    findings = [finding for finding in one.findings if finding.code == "out_of_scope"]
    assert [finding.severity for finding in findings] == [Severity.QUERY] * 4
    assert {finding.place for finding in findings} == {"model.scope"}
    for words in (
        "legal form other",
        "country code DE",
        "sector F (ISIC4)",
        "total assets 205\u202f000\u202f000\u00a0GBP",
    ):
        assert sum(words in finding.text for finding in findings) == 1, words
    assert one.grade.final == "8"
    assert one.usable


def test_nothing_is_found_where_nothing_is_doubtful() -> None:
    assert assess(case_of(), HOUSE).findings == ()
    quiet = SimpleNamespace(settings=HOUSE.settings)
    assert case_findings(case_of(), quiet, (), date(2026, 3, 1), date(2025, 12, 31)) == ()  # type: ignore[arg-type]


def test_a_factor_at_its_cap_or_without_a_value_is_noted_with_what_the_model_does() -> None:
    capped = found(case_of(CLEAN | {"finance_costs": 1.0}), "factor_capped")
    assert [(finding.severity, finding.place) for finding in capped] == [(Severity.NOTE, "model.interest_cover")]
    assert capped[0].text == "Interest cover 2025 lies beyond the model's cap; the cap counts."
    (blank,) = found(case_of(without(CLEAN, "depreciation_amortisation")), "factor_without_value")
    assert (blank.severity, blank.place) == (Severity.NOTE, "model.debt_to_ebitda")
    assert blank.text.startswith("Debt / EBITDA 2025 has no value (not disclosed): Accounts without debt or EBITDA")


def test_a_reason_without_a_rule_is_said_to_give_no_score() -> None:
    findings = found(case_of({"cash": 1.0}), "factor_without_value")
    equity = next(finding for finding in findings if finding.place == "model.equity_ratio")
    assert equity.text.endswith("(not disclosed): the model states no rule for that and gives no score.")


def test_each_factor_is_spoken_of_once_at_most() -> None:
    places = [finding.place for finding in assess(demo(STRETCHED), HOUSE).findings if finding.code.startswith("factor")]
    assert len(places) == len(set(places)) > 0
