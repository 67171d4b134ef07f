"""What a case asks beside its standing: its scenarios, the house's stress events, and the studies kept for the memo."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

from creditdesk.base.errors import UserError
from creditdesk.base.findings import Finding, Severity
from creditdesk.case.assess import assess
from creditdesk.case.comparison import Comparison, compare
from creditdesk.case.document import Case
from creditdesk.case.pencil import PencilBoard, Pencilled
from creditdesk.case.standing import Standing
from creditdesk.case.stress_table import StressRow, stress_table
from creditdesk.case.studies import StudyResult, run_study, scenario_on
from creditdesk.house.book import HouseBook
from creditdesk.scenario.marks import Scenario
from creditdesk.scenario.specs import BreakEvenSpec, GridSpec, ReachSpec, SimulationSpec, StudySpec

Step = Callable[[str, int, int], object]
"""Told what begins, how much of it is done, and of how much; it may raise to end the work."""
KINDS = {GridSpec: "grid", BreakEvenSpec: "break-even", ReachSpec: "reach", SimulationSpec: "spread of the estimate"}
_PARTS = 100


@dataclass(frozen=True, slots=True, eq=False)
class Answer:
    """Hold one scenario. ``pencilled``: None where it cannot be worked out, and then ``findings`` say why."""

    scenario: Scenario
    pencilled: Pencilled | None
    findings: tuple[Finding, ...]

    @property
    def standing(self) -> Standing | None:
        """Return the standing the scenario comes to."""
        return None if self.pencilled is None else self.pencilled.standing


@dataclass(frozen=True, slots=True, eq=False)
class StudyAnswer:
    """Hold one study. ``result``: None where it cannot be run, and then ``why`` says so.

    ``here``: where the scenario it stands on is, the ink for none.
    """

    spec: StudySpec
    result: StudyResult | None
    here: Pencilled | None
    why: str = ""


@dataclass(frozen=True, slots=True, eq=False)
class WhatIf:
    """Hold what is asked of a case beside ``ink``, its standing as the figures are.

    ``answers``: all its scenarios, in their order; ``comparison``: those that could be worked out side by side, None
    where there are none. ``stress``: every stress event of the house, the ink first. ``studies``: those chosen for the
    memo. The last two are empty where a case asks for nothing, or was asked for its scenarios alone.
    """

    ink: Standing
    answers: tuple[Answer, ...] = ()
    comparison: Comparison | None = None
    stress: tuple[StressRow, ...] = ()
    studies: tuple[StudyAnswer, ...] = ()

    @property
    def chosen(self) -> tuple[Answer, ...]:
        """Return the scenarios that the memo prints."""
        return tuple(answer for answer in self.answers if answer.scenario.in_memo)


def scenarios_of(case: Case, house: HouseBook, model: str = "") -> WhatIf:
    """Assess a case, with all its scenarios. Raises UserError as ``assess``, whose ``model`` this is."""
    return _scenarios_of(case, house, model)[0]


def work_out(case: Case, house: HouseBook, model: str = "", step: Step | None = None) -> WhatIf:
    """Assess a case with all that is asked of it; ``step`` is told how far studies are. Raises UserError as ``assess``.

    Stress events are run where the case has a scenario, or a study for the memo.
    """
    asked, board = _scenarios_of(case, house, model)
    if board is None:
        return asked
    return replace(
        asked,
        stress=stress_table(board, house, case) if house.stress is not None else (),
        studies=tuple(_studies(board, house, case, step)),
    )


def _scenarios_of(case: Case, house: HouseBook, model: str) -> tuple[WhatIf, PencilBoard | None]:
    """Return the scenarios worked out, and the board they were worked out on where there was need of one."""
    if not case.scenarios and not any(spec.in_memo for spec in case.studies):
        return WhatIf(assess(case, house, model)), None
    if house.flow is None:
        why = "The house book says nothing of how figures flow, so the scenario cannot be worked out."
        unanswered = tuple(Answer(one, None, (_finding(one, why),)) for one in case.scenarios)
        return WhatIf(assess(case, house, model), unanswered), None
    board = PencilBoard(case, house, model)
    answers = tuple(_answer(board, scenario) for scenario in case.scenarios)
    names = [answer.scenario.name for answer in answers if answer.pencilled is not None]
    return WhatIf(board.ink, answers, compare(board, house, case, names) if names else None), board


def _answer(board: PencilBoard, scenario: Scenario) -> Answer:
    try:
        pencilled = board.scenario(scenario)
    except UserError as error:  # an assumption that another house book allows
        return Answer(scenario, None, tuple(_finding(scenario, fault) for fault in error.faults))
    return Answer(scenario, pencilled, pencilled.findings)


def _finding(scenario: Scenario, text: str) -> Finding:
    return Finding("pencil.none", Severity.QUERY, f"scenarios.{scenario.name}", text)


def _studies(board: PencilBoard, house: HouseBook, case: Case, step: Step | None) -> Iterator[StudyAnswer]:
    for spec in case.studies:
        if spec.in_memo:
            yield _study(board, house, case, (spec, step))


def _study(board: PencilBoard, house: HouseBook, case: Case, asked: tuple[StudySpec, Step | None]) -> StudyAnswer:
    """Run one study, telling ``step`` after each part."""
    spec, step = asked
    words = f"Studying: {KINDS[type(spec)]}{f', {spec.scenario}' if spec.scenario else ''}"
    tell = step or _untold
    try:
        here = board.scenario(scenario_on(case, spec.scenario))
        work = run_study(board, house, case, spec)
        while True:
            tell(words, round(_PARTS * next(work)), _PARTS)
    except StopIteration as end:
        tell(words, _PARTS, _PARTS)
        return StudyAnswer(spec, end.value.result, here)
    except UserError as error:
        return StudyAnswer(spec, None, None, " ".join(error.faults))


def _untold(words: str, done: int, total: int) -> None:
    """Take no notice of how far work is."""
