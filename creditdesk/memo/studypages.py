"""Studies in the memo: the PD over two things that move, how far until it breaks, reach, the spread of the estimate."""

from collections.abc import Iterator
from functools import partial
from math import isnan, nan

from creditdesk.base.display import format_number, format_percent
from creditdesk.case.amounts import amount_of
from creditdesk.case.reach_words import reach_words
from creditdesk.case.standing import Standing
from creditdesk.case.studies import ReachAnswer
from creditdesk.case.study_words import amount_words, limit_words, pd_words, position_words, side_words
from creditdesk.case.targets import TargetBook
from creditdesk.case.what_if import StudyAnswer
from creditdesk.charts.pdgrid import Axis, GridPicture, grid_figure
from creditdesk.charts.spread import TITLES, SpreadPicture, spread_figure
from creditdesk.charts.style import PAPER
from creditdesk.flow.book import DRIVERS
from creditdesk.house.book import HouseBook
from creditdesk.memo.blocks import Block, Cell, Chart, Grid, Prose, Row, Subheading, Tone
from creditdesk.ratios.words import within
from creditdesk.scenario.breakeven import Break, BreakEven
from creditdesk.scenario.grid import Grid as PdGrid
from creditdesk.scenario.simulate import LEVELS, Spread
from creditdesk.scenario.specs import BreakEvenSpec, GridSpec, LimitKind, Range, ReachSpec, Shape, SimulationSpec

AS_IT_IS, WHAT_IF = "as it is", "what-if"
_GRID_HEIGHT, _SPREAD_HEIGHT = 270.0, 190.0
_RARE = 0.0005
"""Shares of draws below it would read as nil."""
_SHAPES = {Shape.NORMAL: "normal, nine draws in ten", Shape.LOG_NORMAL: "log-normal, nine draws in ten",
           Shape.UNIFORM: "uniform"}  # fmt: skip


def study_blocks(answer: StudyAnswer, ink: Standing, house: HouseBook, targets: TargetBook) -> Iterator[Block]:
    """Yield a study under its heading, or why it could not be run."""
    on = f", on “{answer.spec.scenario}”" if answer.spec.scenario else ", on the figures as they are"
    yield Subheading(f"{_title(answer, targets)}{on}")
    match answer.result:
        case PdGrid() as found:
            yield from _grid(answer, found, ink, (house, targets))
        case BreakEven() as found:
            yield from _break_even(found, house, targets)
        case ReachAnswer() as found:
            yield from _reach(answer, found, ink, targets)
        case Spread() as found:
            yield from _spread(answer, found, house, targets)
        case None:
            yield Prose(f"It could not be run: {answer.why}", Tone.CAUTION)


def _title(answer: StudyAnswer, targets: TargetBook) -> str:
    """Name a study with what moves in it."""
    match answer.spec:
        case GridSpec(across=across, up=up):
            return f"PD over {within(targets.label(across.target))} and {within(targets.label(up.target))}"
        case BreakEvenSpec(along=along):
            return f"How far {within(targets.label(along.target))} may move until it breaks"
        case ReachSpec(grade=grade):
            return f"The smallest change to grade {grade}"
        case SimulationSpec():
            return TITLES[0]


def _standing(answer: StudyAnswer, ink: Standing) -> Standing:
    return answer.here.standing if answer.here is not None else ink


def _grid(answer: StudyAnswer, grid: PdGrid, ink: Standing, books: tuple[HouseBook, TargetBook]) -> Iterator[Block]:
    house, targets = books
    spec, keys = grid.spec, house.scale.keys
    moved = {mark.target for mark in answer.here.scenario.marks} if answer.here is not None else set()
    alone = moved <= {spec.across.target, spec.up.target}
    as_it_is = (_rest(spec.across, ink), _rest(spec.up, ink))
    picture = GridPicture(
        grid=grid,
        across=_axis(spec.across, targets),
        up=_axis(spec.up, targets),
        grades=keys,
        upper=[house.scale.upper(key) for key in keys],
        dots=(_known(as_it_is) if alone else None, _known(grid.at) if spec.scenario else None),
        names=(AS_IT_IS, WHAT_IF),
    )
    words = _grid_words(picture)
    yield Chart(words, _GRID_HEIGHT, partial(grid_figure, picture, PAPER))
    yield Prose(f"{words} Lines divide the final grades, after house rules; shades show the PD.", Tone.SECOND)


def _axis(along: Range, targets: TargetBook) -> Axis:
    target = targets.find(along.target)
    if target is None:
        return Axis(along.target, lambda at: f"{at:g}")
    return Axis(target.label, lambda at: position_words(target, along.kind, at))


def _rest(along: Range, ink: Standing) -> float:
    """Say where the figures as they are stand in a range."""
    if along.kind.relative or along.target in DRIVERS:
        return 0.0
    return amount_of(ink, along.target)


def _known(at: tuple[float, float]) -> tuple[float, float] | None:
    return None if any(map(isnan, at)) else at


def _grid_words(picture: GridPicture) -> str:
    """Say the corners of a grid, and where it stands."""
    rows, columns = picture.grid.pd.shape
    corners = [picture.words(row, column) for row in (0, rows - 1) for column in (0, columns - 1)]
    return f"The PD over {picture.across.title} and {picture.up.title}. At the corners: {'; '.join(corners)}."


def _break_even(found: BreakEven, house: HouseBook, targets: TargetBook) -> Iterator[Block]:
    spec: BreakEvenSpec = found.spec
    target = targets.find(spec.along.target)
    label = target.label if target is not None else spec.along.target
    span = _span(spec.along, targets)
    grid = Grid(
        name=f"Break-even of {label}",
        heads=("Limit", "Now", "Downwards", "Upwards"),
        rows=tuple(_limit_row(found, one, house, targets) for one in found.breaks),
        shares=(2.2, 0.9, 1.9, 1.9),
        words=(0, 2, 3),
        note=f"{label} moves {span}, alone, from where the figures above stand. Nothing found within is an answer too.",
    )
    yield grid


def _limit_row(found: BreakEven, one: Break, house: HouseBook, targets: TargetBook) -> Row:
    target, along = targets.find(found.spec.along.target), (found.spec.along, found.start)
    now = "" if one.limit.kind is LimitKind.GRADE else amount_words(one.limit.key, one.at_start, house, targets)
    state = f"{now} broken".strip() if one.broken else now or "holds"
    sides = [
        Cell("" if target is None else side_words(one, side, target, along), side.position)
        for side in (one.down, one.up)
    ]
    name = limit_words(one.limit, house, targets)
    if one.limit.kind is LimitKind.GRADE:
        name = f"{name} or better"
    start = None if isnan(one.at_start) else one.at_start
    return Row((Cell(name), Cell(state, start, Tone.BREACH if one.broken else Tone.PLAIN), *sides))


def _span(along: Range, targets: TargetBook) -> str:
    target = targets.find(along.target)
    if target is None:
        return f"from {along.low:g} to {along.high:g}"
    low, high = (position_words(target, along.kind, end).removeprefix("to ") for end in (along.low, along.high))
    return f"from {low} to {high}"


def _reach(answer: StudyAnswer, found: ReachAnswer, ink: Standing, targets: TargetBook) -> Iterator[Block]:
    yield Prose(reach_words(targets, found, _standing(answer, ink)))
    spec: ReachSpec = found.found.spec
    levers = [f"{targets.label(one.range.target)} {_span(one.range, targets)}" for one in spec.levers]
    yield Prose(f"Levers: {'; '.join(levers)}; each counted from where the figures above stand.", Tone.SECOND)


def _spread(answer: StudyAnswer, found: Spread, house: HouseBook, targets: TargetBook) -> Iterator[Block]:
    here = answer.here.standing.pd if answer.here is not None else None
    name = WHAT_IF if answer.spec.scenario else AS_IT_IS
    picture = SpreadPicture(found, house.scale.keys, nan if here is None else here, name)
    words = _spread_words(picture)
    yield Chart(words, _SPREAD_HEIGHT, partial(spread_figure, picture, PAPER))
    yield Prose(f"{words} {_grade_words(picture)}", Tone.SECOND)
    yield Prose(f"{_inputs(found.spec, targets)} {picture.drawn[:1].upper()}{picture.drawn[1:]}.", Tone.SECOND)


def _spread_words(picture: SpreadPicture) -> str:
    """Say what a simulation comes to."""
    found = picture.spread
    if isnan(found.mean):
        return f"{TITLES[0]}. No draw has a PD."
    low, _, middle, _, high = (pd_words(float(pd)) for pd in found.quantiles)
    bounds = f"{format_number(100 * (LEVELS[-1] - LEVELS[0]), 0)} % of all draws lie between {low} and {high}"
    return f"{TITLES[0]}. {bounds}, and half of them lie below {middle}; the mean is {pd_words(found.mean)}."


def _grade_words(picture: SpreadPicture) -> str:
    """Say how the draws share among the grades."""
    shares = [f"{name} {format_percent(share, 1)}" for name, share in picture.shares if share >= _RARE]
    return f"Final grades of the draws: {', '.join(shares)}."


def _inputs(spec: SimulationSpec, targets: TargetBook) -> str:
    """Say what was drawn."""
    drawn = [
        f"{targets.label(one.range.target)}, {_SHAPES[one.shape]}, {_span(one.range, targets)}" for one in spec.inputs
    ]
    drawn += ["the fitted coefficients"] if spec.coefficients else []
    together = "; ".join(
        f"{targets.label(one.one)} with {targets.label(one.other)} {format_number(one.value, 2)}"
        for one in spec.correlations
    )
    return f"Drawn: {'; '.join(drawn)}.{f' Correlated: {together}.' if together else ''}"
