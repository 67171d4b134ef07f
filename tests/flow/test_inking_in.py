"""The entries of a flow as an adjustment: inked in, they give the statements that stood in pencil."""

from collections.abc import Mapping
from datetime import date

import numpy as np
import pytest

from creditdesk.flow.moves import Move
from creditdesk.flow.pencil import pencil_statements
from creditdesk.statements.adjust import Adjustment, AdjustmentKind, Entry, adjusted_printed, apply_adjustments
from creditdesk.statements.subtotals import build_statements
from tests.flow.borrowers import BY_FUNCTION, PERIODS, by, by_function, pct, run, to
from tests.statements.books import arrays, shipped_chart

PRINTED = {"total_assets": (1070, 1200), "net_profit": (43, 60), "total_equity": (450, 500), "change_in_cash": (0, 20)}
MARKS: dict[str, Mapping[str, Move]] = {
    "sales and rate": {"revenue": pct(-30), "interest_rate": by(200)},
    "a section total": {"investing_cash_flow": to(-100), "property_plant_equipment": by(20)},
    "a line for which a sum stands": {"interest_expense": to(44), "interest_rate": by(100)},
    "what was nil": {"equity_raised": by(30), "shareholder_loans": to(12), "fx_on_cash": by(3)},
    "owners and cash": {"retained_earnings": by(-40), "cash": to(75), "dividends_paid": to(0)},
}


@pytest.mark.parametrize("name", sorted(MARKS))
def test_entries_inked_in_are_the_pencil(name: str) -> None:
    ink = by_function(PRINTED)
    flow = run(ink, MARKS[name])
    pencil = pencil_statements(ink, flow)
    entries = tuple(Entry(line, float(change.value)) for line, change in flow.entries.items())
    adjustment = Adjustment(AdjustmentKind.RESTATE, date(2025, 12, 31), entries, "Taken from pencil")
    figures, _ = apply_adjustments(shipped_chart(), PERIODS, arrays(BY_FUNCTION, 2), (adjustment,))
    printed = adjusted_printed(shipped_chart(), PERIODS, arrays(PRINTED, 2), (adjustment,))
    inked = build_statements(shipped_chart(), PERIODS, figures, printed)
    shown = ~np.isnan(inked.values) & ~np.isnan(pencil.values)
    assert shown.sum() > 150
    np.testing.assert_allclose(pencil.values[shown], inked.values[shown], rtol=1e-12, atol=1e-9)
    for key, row in printed.items():
        assert pencil.printed[key] == pytest.approx(row, rel=1e-12, abs=1e-9), key


def test_a_printed_total_moves_with_a_deficit_it_shows_as_an_asset() -> None:
    # equity of -20 is printed as nil, with the 20 as the last asset: total assets are printed as 1220
    printed = {"total_assets": (1070, 1220), "total_equity": (450, 0)}
    deficit, capital, debt = (0, 20), (200, 0), (180, 870)
    ink = by_function(
        printed,
        equity_deficit_shown_as_asset=deficit,
        share_capital=capital,
        retained_earnings=(250, 0),
        long_term_debt=debt,
    )
    assert ink.row("total_assets").tolist() == [1070, 1200]
    pencil = pencil_statements(ink, run(ink, {"equity_deficit_shown_as_asset": by(5)}))
    # the deficit is 5 deeper and cash 5 less: assets 1195, printed with the deficit 1195 + 25
    assert pencil.row("total_assets")[1] == 1195
    assert pencil.printed["total_assets"].tolist() == [1070, 1220]
    assert pencil.row("total_equity")[1] == -25
    assert pencil.printed["total_equity"].tolist() == [450, 0]
