"""How fast score, PD and ratios move: against central differences where all is smooth, on both sides of each kink."""

from collections.abc import Sequence

import msgspec
import numpy as np
import pytest
from numpy.typing import NDArray

from creditdesk.case.document import Case, ModelChoice
from creditdesk.case.pencil import PencilBoard
from creditdesk.case.pencil_chain import Slopes
from creditdesk.flow.book import DRIVERS, targets
from creditdesk.flow.moves import Move, MoveKind, Moves
from creditdesk.house.book import HouseBook
from creditdesk.model.spec import Calibration, Caps, Link, Transform
from creditdesk.scenario.outcomes import Outcomes
from tests.borrowers import LEAD, changed, demo, generated, model_of, shipped_house, with_spec

Array = NDArray[np.float64]
HOUSE = shipped_house()
GIVING_A_PD = [name for name, model in HOUSE.models.items() if model.spec.link is not Link.NONE]
WATCH = ("debt_service_cover", "cash", "ebitda", "equity_ratio", "revenue_growth", "cash_conversion_days")
BY, TO = MoveKind.BY, MoveKind.TO


def board_of(house: HouseBook = HOUSE, name: str = LEAD, case: Case | None = None) -> PencilBoard:
    chosen = msgspec.structs.replace(demo() if case is None else case, model=ModelChoice(name))
    return PencilBoard(chosen, with_spec(house, name, lead=True))


def movable(board: PencilBoard, name: str = LEAD) -> list[str]:
    """List all the flow can move in this case, and the model's ratios."""
    statements, at = board.ink.statements, board.ink.period_index
    assert HOUSE.flow is not None
    of_flow = sorted(targets(HOUSE.flow, HOUSE.chart, statements.periods[at].presentation))
    disclosed = [key for key in of_flow if key not in statements.index or not np.isnan(statements.row(key)[at])]
    ratios = [factor.ratio for factor in model_of(HOUSE, name).factors]
    return [*disclosed, *(key for key in dict.fromkeys([*ratios, "current_ratio"]) if key not in disclosed)]


def step_of(board: PencilBoard, target: str) -> float:
    """Return a step that is small against what is moved."""
    statements, at = board.ink.statements, board.ink.period_index
    if target in statements.index:
        return 1e-4 * max(1.0, abs(float(statements.row(target)[at])))
    return 1e-5 if target in HOUSE.catalogue.index else 1e-3


def moved_by(moves: Moves, target: str, steps: Array, board: PencilBoard) -> Moves:
    """Move one target on from where ``moves`` have left it."""
    if target in DRIVERS:
        before = moves[target].amount if target in moves else 0.0
        return {**moves, target: Move(BY, before + steps)}
    level = board.evaluate(moves, None, (target,)).amounts[target]
    return {**moves, target: Move(TO, level + steps)}


def quotients(board: PencilBoard, moves: Moves, target: str) -> tuple[dict[str, float], dict[str, float]]:
    """Return central differences of the fourth order, and how far rounding may have moved them."""
    step = step_of(board, target)
    found = board.evaluate(moved_by(moves, target, step * np.array([-2.0, -1.0, 1.0, 2.0]), board), None, WATCH)
    rows = {"score": found.score, "pd": found.pd_calibrated, **found.amounts}
    central = {key: float(8 * (row[2] - row[1]) - (row[3] - row[0])) / (12 * step) for key, row in rows.items()}
    return central, {key: 1e-14 * float(np.abs(row).max()) / step for key, row in rows.items()}


def agree(board: PencilBoard, moves: Moves, wanted: Sequence[str]) -> int:
    """Hold the slopes against central differences to 1e-6; return how many move at all."""
    slopes, moving = board.slopes(moves, None, wanted, watch=WATCH), 0
    for place, target in enumerate(wanted):
        central, noise = quotients(board, moves, target)
        for key, expected in central.items():
            found = float(of(slopes, key)[place])
            if np.isnan(expected) and key in WATCH:
                assert found == 0.0, (target, key)  # there is no value that could move
                continue
            assert found == pytest.approx(expected, rel=1e-6, abs=noise[key]), (target, key)
            moving += abs(found) > noise[key]
    return moving


def of(slopes: Slopes, key: str) -> Array:
    return {"score": slopes.score, "pd": slopes.pd_calibrated, **slopes.amounts}[key]


# ------------------------------------------------------------------------------------------------------- where smooth


@pytest.mark.parametrize("name", GIVING_A_PD)
def test_slopes_agree_with_central_differences_on_every_model_that_gives_a_pd(name: str) -> None:
    board = board_of(name=name)
    assert board.ink.pd_calibrated is not None
    assert agree(board, {}, movable(board, name)) > 200


@pytest.mark.parametrize("transform", list(Transform))
@pytest.mark.parametrize("scale", [1.0, 2.5])
def test_slopes_agree_on_every_transform(transform: Transform, scale: float) -> None:
    factors = tuple(
        msgspec.structs.replace(factor, transform=transform, scale=scale, caps=Caps(low=1e-3))
        for factor in model_of(HOUSE).factors
    )
    assert agree(board_of(with_spec(HOUSE, factors=factors)), {}, ("revenue", "equity_ratio", "long_term_debt")) > 12


@pytest.mark.parametrize("link", [Link.LOGIT, Link.PROBIT])
@pytest.mark.parametrize(
    "calibration",
    [
        Calibration(method="prior_shift", base_rate=0.01, sample_rate=0.05),
        Calibration(method="intercept_and_slope", intercept=-0.3, slope=0.8),
    ],
    ids=lambda one: one.method,
)
def test_slopes_agree_through_every_link_and_calibration(link: Link, calibration: Calibration) -> None:
    house = with_spec(HOUSE, link=link, calibration=calibration, intercept=-0.5)
    agree(board_of(house), {}, ("revenue", "selling_prices", "equity_ratio", "long_term_debt"))


def test_slopes_agree_where_marks_already_stand() -> None:
    moves = {
        "revenue": Move(TO, 38_000.0),
        "interest_rate": Move(BY, 150.0),
        "receivable_days": Move(TO, 55.0),
        "quick_ratio": Move(TO, 0.9),
        "operating_result": Move(BY, 300.0),
    }
    board = board_of()
    # receivables are marked by their days; a mark on the other two, even where they stand, leaves nothing to be drawn
    taken = {"trade_receivables", "debt_raised", "financing_cash_flow"}
    agree(board, moves, [target for target in movable(board) if target not in taken])


@pytest.mark.parametrize("number", range(8))
def test_slopes_agree_on_drawn_borrowers_by_function_and_by_nature(number: int) -> None:
    board = PencilBoard(DRAWN[number], HOUSE)
    agree(board, {}, ("revenue", "cost_of_sales", "staff_costs", "long_term_debt", "inventory_days", "equity_ratio"))


LOOKED_AT = ("profit_before_tax", "cash", "revenue", "long_term_debt")


def _smooth(case: Case) -> bool:
    """Say whether a borrower has a PD, a profit, and cash above the minimum: it stands on no kink."""
    ink = PencilBoard(case, HOUSE).ink
    last = {key: float(ink.statements.row(key)[ink.period_index]) for key in LOOKED_AT}
    return (
        ink.score is not None
        and last["profit_before_tax"] > 100
        and last["cash"] > 0.02 * last["revenue"]
        and last["long_term_debt"] > 100
        and not any(factor.capped for factor in ink.factors)
    )


DRAWN = [case for case in generated(120, seed=21) if _smooth(case)][:8]


# ---------------------------------------------------------------------------------------------------------- at a kink


def one_sided(board: PencilBoard, moves: Moves, target: str, side: int, step: float) -> Outcomes:
    return board.evaluate(moved_by(moves, target, side * step * np.array([0.0, 1.0, 2.0]), board), None, WATCH)


def both_sides(board: PencilBoard, moves: Moves, target: str, step: float) -> tuple[float, float]:
    """Hold left and right slope of the score against one-sided differences of the second order; return both."""
    found = []
    for side in (-1, 1):
        row = one_sided(board, moves, target, side, step).score
        expected = side * float(-3 * row[0] + 4 * row[1] - row[2]) / (2 * step)
        slope = float(board.slopes(moves, None, (target,), side).score[0])
        assert slope == pytest.approx(expected, rel=1e-5, abs=1e-13 / step)
        found.append(slope)
    return found[0], found[1]


def with_caps(ratio: str, caps: Caps) -> HouseBook:
    factors = tuple(
        msgspec.structs.replace(factor, caps=caps) if factor.ratio == ratio else factor
        for factor in model_of(HOUSE).factors
    )
    return with_spec(HOUSE, factors=factors)


@pytest.mark.parametrize("side", ["low", "high"])
def test_at_a_cap_one_side_moves_and_the_other_does_not(side: str) -> None:
    ink = board_of().ink
    here = ink.ratios.value("equity_ratio", ink.period_index)
    caps = Caps(low=here, high=0.9) if side == "low" else Caps(low=-0.1, high=here)
    left, right = both_sides(board_of(with_caps("equity_ratio", caps)), {}, "equity_ratio", 1e-4)
    moving = right if side == "low" else left
    assert (left if side == "low" else right) == 0.0
    assert moving == pytest.approx(model_of(HOUSE).factors[1].coefficient)


def test_at_a_cap_the_direction_of_the_ratio_decides_and_not_that_of_the_line() -> None:
    ink = board_of().ink
    here = ink.ratios.value("equity_ratio", ink.period_index)
    board = board_of(with_caps("equity_ratio", Caps(low=-0.1, high=here)))
    free = board_of()
    for target in ("long_term_debt", "equity_raised"):
        left, right = both_sides(board, {}, target, 1.0)
        assert left != right
        open_left, open_right = both_sides(free, {}, target, 1.0)
        assert open_left == pytest.approx(open_right, rel=1e-9)
        more_debt = target == "long_term_debt"
        assert (left if not more_debt else right) == pytest.approx(open_left, rel=1e-9)


def test_at_the_cash_floor_a_shortfall_is_borrowed_and_a_surplus_is_kept() -> None:
    """With the minimum at the ink's own cash, one pound less is drawn on the revolving debt, one pound more is cash."""
    board = board_of()
    cash = float(board.ink.statements.row("cash")[board.ink.period_index])
    overrides = {"minimum_cash": cash}
    kept = {}
    for side in (-1, 1):
        found = board.slopes({}, overrides, ("operating_result",), side, ("cash", "short_term_debt"))
        steps = side * np.array([0.0, 1.0, 2.0])
        rows = board.evaluate({"operating_result": Move(BY, steps)}, overrides, ("cash", "short_term_debt"))
        for key, row in {"score": rows.score, **rows.amounts}.items():
            expected = side * float(-3 * row[0] + 4 * row[1] - row[2]) / 2
            slope = float((found.score if key == "score" else found.amounts[key])[0])
            assert slope == pytest.approx(expected, rel=1e-5, abs=1e-10), key
            kept[side, key] = slope
    assert kept[-1, "cash"] == pytest.approx(0.0, abs=1e-12)
    assert kept[-1, "short_term_debt"] < -0.5
    assert kept[1, "cash"] > 0.5
    assert kept[1, "short_term_debt"] == 0.0


def test_where_profit_is_nil_tax_is_paid_on_one_side_only() -> None:
    """With the result moved so that profit before tax is exactly nil; the tax rate is stated."""
    figures = {key: list(row) for key, row in demo().figures.items()}
    profit = float(board_of().ink.statements.row("profit_before_tax")[2])
    figures["administrative_costs"][2] += profit
    figures["income_tax"][2] = 0.0
    figures["retained_earnings"][2] -= profit - 762.0
    figures["cash"][2] -= profit - 762.0
    board = board_of(case=changed(demo(), **{key: tuple(row) for key, row in figures.items()}))
    assert float(board.ink.statements.row("profit_before_tax")[2]) == 0.0
    overrides, watch = {"tax_rate": 0.25, "balancing_debt": "none"}, ("income_tax", "net_profit")
    slopes = {side: board.slopes({}, overrides, ("operating_result",), side, watch).amounts for side in (-1, 1)}
    assert float(slopes[-1]["income_tax"][0]) == 0.0
    assert float(slopes[-1]["net_profit"][0]) == pytest.approx(1.0)
    assert float(slopes[1]["income_tax"][0]) == pytest.approx(0.25)
    assert float(slopes[1]["net_profit"][0]) == pytest.approx(0.75)
    for side in (-1, 1):
        rows = board.evaluate({"operating_result": Move(BY, side * np.array([0.0, 1.0]))}, overrides, watch).amounts
        for key, row in rows.items():
            assert float(slopes[side][key][0]) == pytest.approx(side * float(row[1] - row[0]), abs=1e-9)


def test_a_target_named_twice_and_none_at_all() -> None:
    board = board_of()
    twice = board.slopes({}, None, ("revenue", "equity_ratio", "revenue", "equity_ratio"))
    assert twice.score[0] == twice.score[2] != 0.0
    assert twice.score[1] == twice.score[3] != 0.0
    none = board.slopes({}, None, ())
    assert none.score.shape == none.pd_calibrated.shape == (0,)


def test_a_held_ratio_feels_no_line() -> None:
    board = board_of()
    names = [factor.ratio for factor in model_of(HOUSE).factors]
    at = board.ink.period_index
    held = {name: Move(TO, board.ink.ratios.value(name, at)) for name in names}
    slopes = board.slopes(held, None, ("revenue", "long_term_debt", "equity_ratio"))
    assert slopes.score[:2].tolist() == [0.0, 0.0]
    assert slopes.score[2] == pytest.approx(model_of(HOUSE).factors[1].coefficient)
