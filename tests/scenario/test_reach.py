"""Reach against brute force, against fine grids, and against the conditions of a cheapest point."""

from itertools import product

import msgspec
import numpy as np
import pytest

from creditdesk.base.numbers import logit
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard
from creditdesk.flow.moves import Move, MoveKind, Moves
from creditdesk.scenario.blocks import finish
from creditdesk.scenario.outcomes import Evaluate
from creditdesk.scenario.reach import Reach, ReachKind, reach
from creditdesk.scenario.specs import Lever, Range, ReachSpec
from creditdesk.statements.period import Basis
from tests.borrowers import STRETCHED, changed, demo, generated, shipped_house
from tests.scenario.worlds import SCALE, Array, lever, world

HOUSE = shipped_house()
BOARD = PencilBoard(demo(), HOUSE)
BY, BY_PCT = MoveKind.BY, MoveKind.BY_PCT
PRICES = Lever(Range("selling_prices", BY, 0.0, 2.0), 6.0)
ADMINISTRATION = Lever(Range("administrative_costs", BY_PCT, -8.0, 0.0), 2.0)
STOCK = Lever(Range("inventory_days", BY, -20.0, 0.0), 1.0)
DEBT = Lever(Range("long_term_debt", BY_PCT, -30.0, 0.0), 0.2)
SALES = Lever(Range("revenue", BY_PCT, 0.0, 5.0), 4.0)
ALL = tuple(Lever(Range(one.target, one.kind, one.low, one.high), one.cost) for one in HOUSE.flow.levers)  # type: ignore[union-attr]
CUSTOMER_LEAVES: Moves = {"revenue": Move(BY_PCT, -12.0)}
DOWN_AND_DEAR: Moves = {"revenue": Move(BY_PCT, -20.0), "interest_rate": Move(BY, 200.0)}


def stepped(one: Lever, step: float) -> Lever:
    return msgspec.structs.replace(one, step=step)


def run(grade: str, *levers: Lever, base: Moves | None = None, evaluate: Evaluate = BOARD.evaluate) -> Reach:
    return finish(reach(evaluate, base or {}, ReachSpec(grade=grade, levers=levers), SCALE))


def verified(found: Reach, base: Moves | None = None, evaluate: Evaluate = BOARD.evaluate) -> Reach:
    """Check that the plan by itself, at one point, comes to what is said of it."""
    told = evaluate({**(base or {}), **found.plan})
    assert int(told.grade) == found.grade
    assert float(told.pd) == pytest.approx(found.pd, rel=1e-9)
    assert found.kind is not ReachKind.REACHED or 0 <= found.grade <= SCALE.position(found.spec.grade)
    return found


def places(found: Reach) -> dict[str, float]:
    return {target: float(move.amount) for target, move in found.plan.items()}


# ------------------------------------------------------------------------------------------------------- brute force


def cheapest_by_trying(grade: str, levers: tuple[Lever, ...], base: Moves) -> float:
    """Try every combination of steps, one evaluation for all; return the least cost that reaches the grade."""
    sides = [
        np.arange(round((one.range.high - one.range.low) / one.step) + 1) * one.step + one.range.low for one in levers
    ]
    rows = np.array(list(product(*sides)))
    least = np.inf
    for part in np.array_split(rows, 1 + len(rows) // 8000):
        moves = {one.range.target: Move(one.range.kind, column) for one, column in zip(levers, part.T, strict=True)}
        told = BOARD.evaluate({**base, **moves})
        costs = np.abs(part) @ np.array([one.cost for one in levers])
        least = min(
            least, float(np.min(costs, where=(told.grade >= 0) & (told.grade <= SCALE.position(grade)), initial=np.inf))
        )
    return least


@pytest.mark.parametrize(
    ("grade", "base", "levers"),
    [
        ("3", {}, (stepped(PRICES, 0.05), stepped(ADMINISTRATION, 0.25))),
        ("5", CUSTOMER_LEAVES, (stepped(PRICES, 0.05), stepped(STOCK, 1.0))),
        ("5", CUSTOMER_LEAVES, (stepped(ADMINISTRATION, 0.1), stepped(DEBT, 0.5))),
        ("3", {}, (stepped(PRICES, 0.1), stepped(ADMINISTRATION, 0.5), stepped(STOCK, 1.0))),
        ("5", CUSTOMER_LEAVES, (stepped(ADMINISTRATION, 0.5), stepped(DEBT, 2.0), stepped(STOCK, 1.0))),
        ("6", DOWN_AND_DEAR, (stepped(PRICES, 0.1), stepped(ADMINISTRATION, 0.4), stepped(DEBT, 3.0))),
    ],
)
def test_steps_are_those_of_brute_force(grade: str, base: Moves, levers: tuple[Lever, ...]) -> None:
    """Two and three named levers with step and bounds: not one combination is cheaper."""
    found = verified(run(grade, *levers, base=base), base)
    least = cheapest_by_trying(grade, levers, base)
    assert found.all_tried
    if np.isfinite(least):
        assert found.kind is ReachKind.REACHED
        assert found.cost == pytest.approx(least, abs=1e-9)
        for one in levers:
            count = places(found).get(one.range.target, 0.0) / one.step
            assert count == pytest.approx(round(count), abs=1e-6)
    else:
        assert found.kind is ReachKind.NOT_REACHED


def solved_last(grade: str, levers: tuple[Lever, ...], base: Moves, rungs: int) -> float:
    """Set all levers but the last on a fine grid, solve the last by bisection; return the least cost."""
    *first, last = levers
    sides = [np.linspace(one.range.low, one.range.high, rungs) for one in first]
    rows = np.stack(np.meshgrid(*sides), axis=-1).reshape(-1, len(first))
    place = SCALE.position(grade)

    def reached(ends: Array) -> Array:
        parts = []
        for part, own in zip(np.array_split(rows, 4), np.array_split(ends, 4), strict=True):
            moves = {one.range.target: Move(one.range.kind, column) for one, column in zip(first, part.T, strict=True)}
            told = BOARD.evaluate({**base, **moves, last.range.target: Move(last.range.kind, own)})
            parts.append((told.grade >= 0) & (told.grade <= place))
        return np.concatenate(parts)

    far = last.range.low if last.range.low < 0.0 else last.range.high
    outer, inner = np.full(len(rows), far), np.zeros(len(rows))
    possible, done = reached(outer), reached(inner)
    for _ in range(50):
        middle = (outer + inner) / 2.0
        ok = reached(middle)
        outer, inner = np.where(ok, middle, outer), np.where(ok, inner, middle)
    costs = np.abs(rows) @ np.array([one.cost for one in first]) + last.cost * np.abs(np.where(done, 0.0, outer))
    return float(np.min(costs, where=possible, initial=np.inf))


@pytest.mark.parametrize(
    ("grade", "base", "levers", "rungs"),
    [
        ("3", {}, (PRICES, ADMINISTRATION), 4001),
        ("5", CUSTOMER_LEAVES, (DEBT, ADMINISTRATION), 4001),
        ("5", CUSTOMER_LEAVES, (STOCK, PRICES), 4001),
        ("3", {}, (DEBT, PRICES, ADMINISTRATION), 81),
        ("6", DOWN_AND_DEAR, (DEBT, PRICES, ADMINISTRATION), 81),
    ],
)
def test_smooth_levers_are_as_cheap_as_on_a_fine_grid(
    grade: str, base: Moves, levers: tuple[Lever, ...], rungs: int
) -> None:
    """Never dearer than any point of the grid, cheaper by no more than a step of the grid can make."""
    found, least = verified(run(grade, *levers, base=base), base), solved_last(grade, levers, base, rungs)
    assert found.kind is ReachKind.REACHED
    room = sum(one.cost * (one.range.high - one.range.low) / (rungs - 1) for one in levers[:-1])
    assert least - 2.0 * room <= found.cost <= least * (1 + 1e-6)


# ------------------------------------------------------------------------------------- conditions of a cheapest point


def prices_of_score(found: Reach, levers: tuple[Lever, ...], base: Moves) -> dict[str, float]:
    """Return cost per unit over what a unit takes off the log-odds, by central differences around the plan."""
    ratios = {}
    for one in levers:
        target, kind = one.range.target, one.range.kind
        at = places(found).get(target, 0.0)
        step = 1e-4 * (one.range.high - one.range.low)
        moves = {**base, **found.plan, target: Move(kind, at + np.array([-step, step]))}
        odds = logit(BOARD.evaluate(moves).pd_calibrated)
        slope = float(odds[1] - odds[0]) / (2 * step)
        gain = -slope if one.range.high > 0.0 else slope
        ratios[target] = one.cost / gain if gain > 0.0 else np.inf
    return ratios


@pytest.mark.parametrize(
    ("grade", "base", "levers"),
    [
        ("3", {}, (ADMINISTRATION, PRICES, STOCK)),
        ("5", CUSTOMER_LEAVES, (ADMINISTRATION, PRICES, STOCK, DEBT)),
        ("6", DOWN_AND_DEAR, (ADMINISTRATION, PRICES, STOCK)),
    ],
)
def test_levers_are_worth_the_same_where_they_stand_between(grade: str, base: Moves, levers: tuple[Lever, ...]) -> None:
    """The conditions of Karush, Kuhn and Tucker: a lever at rest is at least as dear, one at its end at most."""
    found = verified(run(grade, *levers, base=base), base)
    worth = prices_of_score(found, levers, base)
    between = [target for target in found.plan if target not in found.active]
    assert found.kind is ReachKind.REACHED
    assert between
    price = worth[between[0]]
    for target, own in worth.items():
        if target in between:
            assert own == pytest.approx(price, rel=1e-3)
        elif target in found.active:
            assert own <= price * (1 + 1e-3)
        else:
            assert own >= price * (1 - 1e-3)


def test_two_levers_between_share_by_lagranges_rule() -> None:
    """Log-odds -1 - 4 ln(1+x) - 2 ln(1+y): with equal costs 1+x = 2 (1+y), and 6 ln(1+y) = distance - 4 ln 2."""
    evaluate = world(lambda at: -1.0 - 4.0 * np.log1p(at["x"]) - 2.0 * np.log1p(at["y"]))
    found = verified(run("4", lever("x", 0, 9, 1), lever("y", 0, 9, 1), evaluate=evaluate), evaluate=evaluate)
    need = -1.0 - logit(SCALE.upper("4"))
    y = np.exp((need - 4.0 * np.log(2.0)) / 6.0) - 1.0
    assert y > 0.1
    assert found.cost == pytest.approx(2.0 * (1 + y) - 1.0 + y, rel=1e-7)
    assert places(found) == pytest.approx({"x": 2.0 * (1 + y) - 1.0, "y": y}, rel=1e-3)


def test_of_two_valleys_the_deeper_one_is_found() -> None:
    """Near a narrow gap right by rest the grade is reached at less cost than in the broad valley beyond."""
    evaluate = world(lambda at: -3.0 - 3.0 * (np.abs(at["x"] - 0.7) < 0.02) - 0.6 * np.maximum(at["x"] - 4.0, 0.0))
    found = run("4", lever("x", 0, 10, 1), lever("y", 0, 1, 1), evaluate=evaluate)
    assert found.cost == pytest.approx(0.68, abs=1e-6)


# --------------------------------------------------------------------------------------------------------- many levers


def test_more_levers_are_never_dearer() -> None:
    few = run("5", ADMINISTRATION, DEBT, base=CUSTOMER_LEAVES)
    more = run("5", ADMINISTRATION, DEBT, STOCK, base=CUSTOMER_LEAVES)
    everything = verified(run("5", *ALL, base=CUSTOMER_LEAVES), CUSTOMER_LEAVES)
    assert everything.cost <= more.cost * (1 + 1e-9)
    assert more.cost <= few.cost * (1 + 1e-9)


def test_the_levers_of_the_house_meet_a_kink() -> None:
    """Cash runs down to its minimum on the way: the plan stands on that kink, which takes several levers at once."""
    found = verified(run("5", *ALL, base=DOWN_AND_DEAR), DOWN_AND_DEAR)
    assert found.kind is ReachKind.REACHED
    assert found.cost <= 57.2159
    assert set(found.active) == {"administrative_costs", "revenue", "selling_prices"}


def test_the_same_question_has_the_same_answer() -> None:
    one, other = (run("5", *ALL, base=CUSTOMER_LEAVES) for _ in range(2))
    assert (one.cost, places(one), one.tried) == (other.cost, places(other), other.tried)


def test_steps_and_smooth_levers_together() -> None:
    levers = (stepped(PRICES, 0.5), ADMINISTRATION, STOCK)
    found = verified(run("3", *levers))
    least = min(
        price * PRICES.cost + solved_last("3", (STOCK, ADMINISTRATION), {"selling_prices": Move(BY, price)}, 401)
        for price in (0.0, 0.5, 1.0, 1.5, 2.0)
    )
    room = STOCK.cost * 20.0 / 400
    assert least - 2.0 * room <= found.cost <= least * (1 + 1e-6)
    assert places(found).get("selling_prices", 0.0) in (0.0, 0.5, 1.0, 1.5, 2.0)


def test_a_line_that_follows_prices_is_left_alone_where_that_is_cheaper() -> None:
    """Prices move sales by themselves; a sales lever that were always marked would hold them."""
    alone, both = run("3", PRICES, ADMINISTRATION), verified(run("3", PRICES, ADMINISTRATION, SALES))
    assert both.cost <= alone.cost * (1 + 1e-9)
    assert "revenue" not in both.plan


def test_a_line_is_held_where_following_would_cost_more() -> None:
    """Here y follows x, to its own harm, unless it is marked: a plan that moves x has to hold y where it rests."""
    followed = world(lambda at: -3.0 - at["x"] + (0.9 * at["x"] if "y" not in at else 0.0))
    found = run("5", lever("x", 0, 9, 1), lever("y", -1, 1, 1), evaluate=followed)
    assert found.held == ("y",)
    assert places(found) == {"x": pytest.approx(-3.0 - logit(SCALE.upper("5"))), "y": 0.0}
    verified(found, evaluate=followed)


# ----------------------------------------------------------------------------------------------------------- no plan


def unaudited() -> Case:
    case = demo()
    periods = tuple(msgspec.structs.replace(period, basis=Basis.UNAUDITED, opinion=None) for period in case.periods)
    return msgspec.structs.replace(case, periods=periods)


def test_a_rule_may_cap() -> None:
    board = PencilBoard(unaudited(), HOUSE)
    found = verified(run("5", PRICES, ADMINISTRATION, evaluate=board.evaluate), evaluate=board.evaluate)
    assert found.kind is ReachKind.RULES
    assert found.grade == found.best_grade == SCALE.position("6")
    assert found.pd < SCALE.upper("5")


def test_a_rule_may_be_lifted() -> None:
    """Equity below nil caps at grade 10; fresh equity cures it, and just as much as that is raised."""
    case = changed(
        demo(),
        retained_earnings=(8720.0, 9660.0, -3200.0),
        other_non_current_liabilities=(0.0, 0.0, 14830.0),
        equity_raised=(0.0, 0.0, 0.0),
    )
    board = PencilBoard(case, HOUSE)
    assert board.ink.grade.final == "10"
    assert board.ink.grade.judged != "10"
    equity = Lever(Range("equity_raised", BY, 0.0, 1000.0), 0.03)
    found = verified(run("9", equity, ADMINISTRATION, evaluate=board.evaluate), evaluate=board.evaluate)
    assert found.kind is ReachKind.REACHED
    short = -float(board.ink.statements.row("total_equity")[board.ink.period_index])
    assert short == 390.0
    assert places(found) == {"equity_raised": pytest.approx(390.0, abs=1e-5)}
    small = Lever(Range("equity_raised", BY, 0.0, 300.0), 0.03)
    assert run("9", small, evaluate=board.evaluate).kind is ReachKind.RULES
    helped = verified(run("9", small, ADMINISTRATION, evaluate=board.evaluate), evaluate=board.evaluate)
    assert helped.kind is ReachKind.REACHED
    assert "equity_raised" in helped.active


def test_what_the_ranges_do_not_hold_is_not_reached() -> None:
    found = verified(run("1", PRICES, ADMINISTRATION, STOCK))
    assert found.kind is ReachKind.NOT_REACHED
    assert found.grade == found.best_grade
    assert found.pd >= SCALE.upper("1")
    lowest = BOARD.evaluate({"selling_prices": Move(BY, 2.0), "administrative_costs": Move(BY_PCT, -8.0)})
    assert found.pd <= float(lowest.pd)
    assert set(found.active) >= {"selling_prices", "administrative_costs"}


def test_levers_that_do_nothing_stay_at_rest_where_nothing_helps() -> None:
    evaluate = world(lambda at: -1.0 - 0.1 * at["x"] + 0.0 * at["idle"])
    found = run("1", lever("x", 0, 3, 1), lever("idle", -5, 5, 1), evaluate=evaluate)
    assert (found.kind, places(found)) == (ReachKind.NOT_REACHED, {"x": 3.0})


def test_already_there() -> None:
    found = run("4", PRICES)
    assert (found.kind, found.plan, found.cost, found.grade) == (ReachKind.ALREADY, {}, 0.0, SCALE.position("4"))
    assert found.pd == BOARD.ink.pd


def test_without_a_pd_there_is_nothing_to_reach() -> None:
    evaluate = world(lambda at: np.nan * at["x"])
    assert run("4", lever("x", 0, 1, 1), evaluate=evaluate).kind is ReachKind.NO_PD


def test_levers_marked_in_another_unit_are_named() -> None:
    base = {"administrative_costs": Move(MoveKind.TO, 3000.0)}
    found = run("1", PRICES, ADMINISTRATION, base=base)
    assert found.left_out == ("administrative_costs",)
    only = run("1", ADMINISTRATION, base=base)
    assert (only.kind, only.left_out, only.plan) == (ReachKind.NOT_REACHED, ("administrative_costs",), {})


def test_ranges_count_from_where_the_scenario_stands() -> None:
    found = verified(run("1", SALES, base=CUSTOMER_LEAVES), CUSTOMER_LEAVES)
    assert places(found) == {"revenue": -7.0}
    assert found.cost == pytest.approx(20.0)


def test_a_search_can_be_stopped_anywhere() -> None:
    spec = ReachSpec(grade="3", levers=ALL)
    for count in (1, 5, 20, 60):
        work = reach(BOARD.evaluate, {}, spec, SCALE)
        shares = [next(work) for _ in range(count)]
        work.close()
        assert all(0.0 < share <= 1.0 for share in shares)
        with pytest.raises(StopIteration):
            next(work)


def test_too_many_steps_are_searched_not_enumerated() -> None:
    levers = (stepped(PRICES, 0.001), stepped(ADMINISTRATION, 0.001), stepped(STOCK, 0.01))
    found, smooth = verified(run("3", *levers)), run("3", PRICES, ADMINISTRATION, STOCK)
    assert not found.all_tried
    assert smooth.cost * (1 - 1e-9) <= found.cost <= smooth.cost + 0.01


@pytest.mark.long
@pytest.mark.parametrize("seed", range(6))
def test_levers_drawn_at_random_are_never_dearer_than_a_grid(monkeypatch: pytest.MonkeyPatch, seed: int) -> None:
    """Two or three levers of the house with wider bounds, on demonstration and drawn borrowers, one grade better."""
    draw = np.random.default_rng(seed)
    cases, tried = [demo(), demo(STRETCHED), *generated(20, seed=4)], 0
    while tried < 8:
        monkeypatch.setattr(f"{__name__}.BOARD", board := PencilBoard(cases[draw.integers(len(cases))], HOUSE))
        base = ({}, CUSTOMER_LEAVES, {"interest_rate": Move(BY, 200.0)})[draw.integers(3)]
        chosen = [ALL[place] for place in draw.choice(len(ALL), int(draw.integers(2, 4)), replace=False)]
        place, width = int(board.evaluate(base).grade), float(draw.choice([1.0, 2.0]))
        if place < 1 or any(one.range.target in base for one in chosen):
            continue
        levers = tuple(
            Lever(
                Range(one.range.target, one.range.kind, max(one.range.low * width, -99.0), one.range.high * width),
                one.cost,
            )
            for one in chosen
        )
        grade = SCALE.keys[place - 1]
        found = verified(run(grade, *levers, base=base, evaluate=board.evaluate), base, board.evaluate)
        least = solved_last(grade, levers, base, 101 if len(levers) == 2 else 31)
        if np.isfinite(least):
            tried += 1
            assert found.kind is ReachKind.REACHED
            assert found.cost <= least * (1 + 1e-6) + 1e-9
