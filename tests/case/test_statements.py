"""The statements of a case: as received, and after its adjustments."""

from datetime import date

import msgspec
import numpy as np
import pytest

from creditdesk.base.errors import UserError
from creditdesk.case.assess import assess
from creditdesk.case.document import Case
from creditdesk.case.statements import case_statements
from creditdesk.statements.adjust import Adjustment, AdjustmentKind, Entry
from tests.borrowers import STRETCHED, case_of, demo, shipped_house
from tests.statements.books import CLEAN

HOUSE = shipped_house()
SUBORDINATED = (Entry("shareholder_loans", -300.0), Entry("other_reserves", 300.0))


def adjusted(*entries: Entry, kind: AdjustmentKind = AdjustmentKind.RESTATE, **printed: float) -> Case:
    case = case_of(CLEAN, printed)
    adjustment = Adjustment(kind, date(2025, 12, 31), entries, "Subordinated by deed, treated as equity", "A. Clerk")
    return msgspec.structs.replace(case, adjustments=(adjustment,))


def test_without_adjustments_both_are_one() -> None:
    found = case_statements(case_of(), HOUSE.chart)
    assert found.received is found.adjusted
    assert found.findings == ()


def test_an_adjustment_moves_its_period_alone_and_what_was_received_stays() -> None:
    found = case_statements(adjusted(*SUBORDINATED), HOUSE.chart)
    assert found.received.row("total_equity").tolist() == [7_050, 7_050]
    assert found.adjusted.row("total_equity").tolist() == [7_050, 7_350]
    assert found.adjusted.row("shareholder_loans").tolist() == [300, 0]
    assert found.adjusted.row("total_assets").tolist() == found.received.row("total_assets").tolist()
    assert found.adjusted.imbalance.tolist() == [0, 0]


def test_printed_totals_move_along_and_still_tie() -> None:
    case = adjusted(*SUBORDINATED, total_equity=7_050.0, non_current_liabilities=6_650.0)
    found = case_statements(case, HOUSE.chart)
    assert found.received.differences == {}
    assert found.adjusted.differences == {}
    assert found.adjusted.printed["total_equity"].tolist() == [7_050, 7_350]
    assert found.adjusted.printed["non_current_liabilities"].tolist() == [6_650, 6_350]


def test_the_pd_is_that_of_the_adjusted_statements_and_the_standing_holds_both() -> None:
    one, other = assess(adjusted(*SUBORDINATED), HOUSE), assess(case_of(), HOUSE)
    assert one.statements.row("total_equity")[1] - one.received.row("total_equity")[1] == 300
    assert np.array_equal(one.received.values, other.received.values, equal_nan=True)
    assert one.pd_model is not None
    assert other.pd_model is not None
    assert one.pd_model < other.pd_model
    assert one.past[0].score == other.past[0].score


def test_normalising_leaves_the_balance_sheet_and_is_marked() -> None:
    case = adjusted(Entry("administrative_costs", -500.0), kind=AdjustmentKind.NORMALISE)
    found = case_statements(case, HOUSE.chart)
    assert found.adjusted.row("operating_profit")[1] - found.received.row("operating_profit")[1] == 500
    assert found.adjusted.row("total_equity").tolist() == found.received.row("total_equity").tolist()
    codes = [finding.code for finding in assess(case, HOUSE).findings]
    assert codes.count("adjustments.normalised") == 1


def test_an_adjustment_that_breaks_the_balance_is_refused() -> None:
    with pytest.raises(UserError, match=r"adjustments\[0\]\.entries.*keep assets = liabilities \+ equity"):
        case_statements(adjusted(SUBORDINATED[0]), HOUSE.chart)


def test_the_demonstration_s_adjustment_is_in_force() -> None:
    found = case_statements(demo(STRETCHED), HOUSE.chart)
    assert not np.array_equal(found.received.values, found.adjusted.values, equal_nan=True)
    assert (np.nan_to_num(found.adjusted.imbalance) == 0).all()
