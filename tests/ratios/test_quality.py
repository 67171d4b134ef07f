"""Doubts about ratios."""

from datetime import date

from creditdesk.base.findings import Finding, Severity
from creditdesk.ratios.quality import ratio_findings
from creditdesk.statements.statement import StatementSet
from tests.ratios.ledger import SOUND, by_hand, changed, ratios, shipped_catalogue, year


def _findings(statements: StatementSet, period: int = 1) -> tuple[Finding, ...]:
    return ratio_findings(shipped_catalogue(), ratios(statements), statements, period)


def test_a_sound_year_raises_none() -> None:
    assert _findings(by_hand(SOUND)) == ()


def test_annualised_ratios_are_noted_once_for_the_period() -> None:
    half = by_hand({name: row[1:] for name, row in SOUND.items()}, [year(date(2025, 6, 30), 6)])
    notes = [finding for finding in _findings(half, 0) if finding.code == "ratio.annualised"]
    (note,) = notes
    assert note.severity is Severity.NOTE
    assert note.place == "periods[2025-06-30]"
    assert "debt to EBITDA, " in note.text
    assert "6 months" in note.text
    assert "interest_cover" not in note.text


def test_a_margin_above_one_is_asked_about_at_its_place() -> None:
    (finding,) = _findings(changed(ebitda=9_000.0))[:1]
    assert finding.code == "ratio.implausible"
    assert finding.severity is Severity.QUERY
    assert finding.place == "ratios.ebitda_margin[2025-12-31]"
    assert "121.6" in finding.text
    assert "above 100.0" in finding.text


def test_days_beyond_a_year_are_asked_about() -> None:
    places = [finding.place for finding in _findings(changed(trade_receivables=8_000.0))]
    assert "ratios.receivable_days[2025-12-31]" in places


def test_only_the_period_asked_for_counts() -> None:
    statements = changed(ebitda=(9_000.0, 1_030.0))
    assert _findings(statements, 1) == ()
    assert _findings(statements, 0)


def test_a_ratio_without_value_is_not_implausible() -> None:
    assert _findings(changed(revenue=0.0)) == ()
