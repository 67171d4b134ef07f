"""Edits of scenarios, marks and studies, and the one that turns pencil into ink."""

from collections.abc import Collection, Iterable
from datetime import date

import msgspec

from creditdesk.case.document import Case
from creditdesk.case.edits import Edit, check_index, label_of, refused, written
from creditdesk.case.pencil_checks import INK, NAME_MOST
from creditdesk.flow.moves import MoveKind
from creditdesk.house.decode import Fault, nearest_name, show, unknown_name
from creditdesk.scenario.marks import Mark, Scenario
from creditdesk.scenario.specs import StudySpec
from creditdesk.statements.adjust import Adjustment, AdjustmentKind, Entry
from creditdesk.statements.chart import Chart

_TEXTS = ("event", "rationale", "judgement")
_STUDIES = {"grid": "Grid", "break_even": "Break-even", "reach": "Reach", "simulation": "Simulation"}


class AddScenario(Edit, frozen=True, tag="add_scenario"):
    """Add a scenario at the end: blank, begun from a stress event, or another one's copy under its own name."""

    scenario: Scenario
    copied_from: str = ""

    def applied(self, case: Case) -> Case:
        """Append it."""
        return msgspec.structs.replace(case, scenarios=(*case.scenarios, self.scenario))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name it, and the one it is copied from."""
        source = f" copied from “{self.copied_from}”" if self.copied_from else " added"
        return f"Scenario “{self.scenario.name}”{source}"


class RemoveScenario(Edit, frozen=True, tag="remove_scenario"):
    """Remove a scenario with the studies that stand on it."""

    name: str

    def applied(self, case: Case) -> Case:
        """Take it out, and what would hang in the air without it."""
        _place(case, self.name)
        scenarios = tuple(scenario for scenario in case.scenarios if scenario.name != self.name)
        studies = tuple(study for study in case.studies if study.scenario != self.name)
        return msgspec.structs.replace(case, scenarios=scenarios, studies=studies)

    def describe(self, chart: Chart, case: Case) -> str:
        """Name it and count its studies."""
        count = sum(study.scenario == self.name for study in case.studies)
        studies = f" with {count} {'study' if count == 1 else 'studies'}" if count else ""
        return f"Scenario “{self.name}” removed{studies}"


class RenameScenario(Edit, frozen=True, tag="rename_scenario"):
    """Give a scenario another name; its studies follow."""

    name: str
    to: str

    def applied(self, case: Case) -> Case:
        """Change the name wherever it stands."""
        studies = tuple(
            msgspec.structs.replace(study, scenario=self.to) if study.scenario == self.name else study
            for study in case.studies
        )
        return msgspec.structs.replace(_with_scenario(case, self.name, name=self.to), studies=studies)

    def describe(self, chart: Chart, case: Case) -> str:
        """Name both."""
        return f"Scenario “{self.name}” renamed “{self.to}”"


class MoveScenario(Edit, frozen=True, tag="move_scenario"):
    """Move a scenario to another place in the list."""

    name: str
    to: int

    def applied(self, case: Case) -> Case:
        """Take it out and put it in again."""
        place = _place(case, self.name)
        check_index("to", self.to, len(case.scenarios))
        others = [*case.scenarios[:place], *case.scenarios[place + 1 :]]
        others.insert(self.to, case.scenarios[place])
        return msgspec.structs.replace(case, scenarios=tuple(others))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name it and its new place."""
        return f"Scenario “{self.name}” moved to place {self.to + 1}"


class SetMarks(Edit, frozen=True, tag="set_marks"):
    """Mark targets in a scenario, one or many at once; a mark that a target has already is replaced in its place."""

    name: str
    marks: tuple[Mark, ...]

    def applied(self, case: Case) -> Case:
        """Set each mark."""
        marks = {mark.target: mark for mark in _scenario(case, self.name).marks}
        return _with_scenario(case, self.name, marks=(*(marks | {mark.target: mark for mark in self.marks}).values(),))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the first mark and count the others."""
        marks = [f"{_target(chart, mark.target)} {_moved(mark)}" for mark in self.marks]
        return f"Mark {_first_of(marks)} in “{self.name}”"


class RubOut(Edit, frozen=True, tag="rub_out"):
    """Rub out the marks of some targets; one that is not marked is no fault."""

    name: str
    targets: tuple[str, ...]

    def applied(self, case: Case) -> Case:
        """Leave the other marks as they are."""
        return _with_scenario(case, self.name, marks=_unmarked(case, self.name, self.targets))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the first target and count the others."""
        marked = [mark.target for mark in _scenario(case, self.name).marks]
        every = len(marked) > 1 and set(marked) <= set(self.targets)
        what = "all marks" if every else _first_of([_target(chart, target) for target in self.targets])
        return f"Rub out {what} in “{self.name}”"


class SetAssumption(Edit, frozen=True, tag="set_assumption"):
    """Set an assumption of the flow for one scenario; None: as the house book says."""

    name: str
    key: str
    value: float | str | None

    def applied(self, case: Case) -> Case:
        """Set or take away."""
        kept = {key: value for key, value in _scenario(case, self.name).assumptions.items() if key != self.key}
        changed = kept if self.value is None else {**kept, self.key: self.value}
        return _with_scenario(case, self.name, assumptions=changed)

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the assumption and its value."""
        value = written(self.value) if isinstance(self.value, float | int) else (self.value or "").replace("_", " ")
        what = f"{_target(chart, self.key.replace('.', ' '))} {f'to {value}' if value else 'as the house says'}"
        return f"Assumption {what} in “{self.name}”"


class SetScenarioText(Edit, frozen=True, tag="set_scenario_text"):
    """Set what a scenario says of itself: ``field`` is event (a key of the house book), rationale or judgement."""

    name: str
    field: str
    text: str

    def applied(self, case: Case) -> Case:
        """Set the text."""
        if self.field not in _TEXTS:
            raise refused(Fault("field", show(self.field), f"one of {', '.join(_TEXTS)}"))
        return _with_scenario(case, self.name, **{self.field: self.text})

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the field."""
        return f"{self.field.capitalize()} of “{self.name}”{'' if self.text else ' removed'}"


class SetScenarioInMemo(Edit, frozen=True, tag="set_scenario_in_memo"):
    """Choose whether the memo prints a scenario."""

    name: str
    in_memo: bool

    def applied(self, case: Case) -> Case:
        """Set the choice."""
        return _with_scenario(case, self.name, in_memo=self.in_memo)

    def describe(self, chart: Chart, case: Case) -> str:
        """Say which way."""
        return f"Scenario “{self.name}” {'into' if self.in_memo else 'out of'} the memo"


class InkIn(Edit, frozen=True, tag="ink_in"):
    """Turn marks of a scenario into an adjustment, and rub them out.

    ``targets``: the marks that go. ``adjustment``: what they come to, line by line, as the flow gives it;
    ``inked_adjustment`` makes it.
    """

    name: str
    targets: tuple[str, ...]
    adjustment: Adjustment

    def applied(self, case: Case) -> Case:
        """Append the adjustment and take the marks out."""
        marked = [mark.target for mark in _scenario(case, self.name).marks]
        faults = [unknown_name("targets", target, marked, "mark") for target in self.targets if target not in marked]
        if not self.targets:
            faults.append(Fault("targets", "an empty list", "at least one mark"))
        if faults:
            raise refused(*faults)
        after = _with_scenario(case, self.name, marks=_unmarked(case, self.name, self.targets))
        return msgspec.structs.replace(after, adjustments=(*case.adjustments, self.adjustment))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name the first target, count the others, and give the reason."""
        what = _first_of([_target(chart, target) for target in self.targets])
        return f"Ink in {what} from “{self.name}” ({self.adjustment.reason})"


class AddStudy(Edit, frozen=True, tag="add_study"):
    """Add a study at the end of the list."""

    study: StudySpec

    def applied(self, case: Case) -> Case:
        """Append it."""
        return msgspec.structs.replace(case, studies=(*case.studies, self.study))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name its kind and what it stands on."""
        return f"{_study(self.study)} added"


class SetStudy(Edit, frozen=True, tag="set_study"):
    """Put another study in the place of the one at ``index``."""

    index: int
    study: StudySpec

    def applied(self, case: Case) -> Case:
        """Replace it."""
        check_index("index", self.index, len(case.studies))
        studies = [*case.studies]
        studies[self.index] = self.study
        return msgspec.structs.replace(case, studies=tuple(studies))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name its kind and what it stands on."""
        return f"{_study(self.study)} changed"


class RemoveStudy(Edit, frozen=True, tag="remove_study"):
    """Remove the study at ``index``."""

    index: int

    def applied(self, case: Case) -> Case:
        """Take it out."""
        check_index("index", self.index, len(case.studies))
        return msgspec.structs.replace(case, studies=(*case.studies[: self.index], *case.studies[self.index + 1 :]))

    def describe(self, chart: Chart, case: Case) -> str:
        """Name its kind and what it stood on."""
        return f"{_study(case.studies[self.index])} removed"


def inked_adjustment(changes: Iterable[tuple[str, float]], period: date, *, reason: str, author: str) -> Adjustment:
    """Return the restatement that changes lines by the amounts the flow gives; lines that do not change are left out.

    ``changes``: line and amount in the case's unit, together keeping assets = liabilities + equity, as ``Flow.entries``
    does for the marks inked in. Marks that the flow refused, and ratios held at a value, have none.
    """
    entries = tuple(Entry(line, float(amount)) for line, amount in changes if amount)
    return Adjustment(AdjustmentKind.RESTATE, period, entries, reason, author)


def free_name(case: Case, wanted: str) -> str:
    """Return a name no scenario has: the one wanted, or the same with a number behind it."""
    taken = {INK.casefold(), *(scenario.name.casefold() for scenario in case.scenarios)}
    tries = (
        wanted[:NAME_MOST].strip(),
        *(f"{wanted[: NAME_MOST - 5].strip()} ({number})" for number in range(2, 1000)),
    )
    return next(name for name in tries if name and name.casefold() not in taken)


def _place(case: Case, name: str) -> int:
    names = [scenario.name for scenario in case.scenarios]
    if name not in names:
        allowed = "the name of a scenario of this case"
        raise refused(Fault("name", f"unknown scenario {show(name)}", allowed, nearest_name(name, names)))
    return names.index(name)


def _scenario(case: Case, name: str) -> Scenario:
    return case.scenarios[_place(case, name)]


def _with_scenario(case: Case, name: str, /, **fields: object) -> Case:
    place = _place(case, name)
    changed = msgspec.structs.replace(case.scenarios[place], **fields)
    return msgspec.structs.replace(case, scenarios=(*case.scenarios[:place], changed, *case.scenarios[place + 1 :]))


def _unmarked(case: Case, name: str, targets: Collection[str]) -> tuple[Mark, ...]:
    return tuple(mark for mark in _scenario(case, name).marks if mark.target not in targets)


def _target(chart: Chart, key: str) -> str:
    return label_of(chart, key, key.replace("_", " ").capitalize())


def _moved(mark: Mark) -> str:
    amount = written(mark.amount)
    if mark.kind is MoveKind.TO:
        return f"to {amount}"
    return f"{'+' if mark.amount > 0 else ''}{amount}{' %' if mark.kind is MoveKind.BY_PCT else ''}"


def _first_of(words: list[str]) -> str:
    more = f" and {len(words) - 1} more" if len(words) > 1 else ""
    return f"{words[0]}{more}" if words else "nothing"


def _study(study: StudySpec) -> str:
    return f"{_STUDIES[str(study.__struct_config__.tag)]} on {f'“{study.scenario}”' if study.scenario else INK.lower()}"
