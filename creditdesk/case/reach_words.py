"""The answer of reach in words: the change lever by lever, what it comes to, what bounds it, and why not."""

from collections.abc import Sequence
from math import isnan, nan

from creditdesk.case.standing import Standing
from creditdesk.case.studies import ReachAnswer
from creditdesk.case.study_words import pd_words
from creditdesk.case.targets import Target, TargetBook, TargetKind, mark_words
from creditdesk.grading.scale import NO_GRADE
from creditdesk.ratios.words import within
from creditdesk.scenario.marks import Mark
from creditdesk.scenario.reach import ReachKind

_COUNTS = ("no levers", "one lever", "two levers", "three levers", "four levers", "five levers", "six levers",
           "seven levers", "eight levers", "nine levers", "ten levers")  # fmt: skip


def moved_words(targets: TargetBook, marks: Sequence[Mark], sides: tuple[Standing, Standing]) -> dict[str, str]:
    """Write what each mark of a plan does, by target: Inventory days 74 → 61 days; ``sides``: before and under it."""
    found = ((mark, targets.find(mark.target)) for mark in marks)
    return {mark.target: _moved(mark, target, sides) for mark, target in found if target is not None}


def reach_words(targets: TargetBook, answer: ReachAnswer, before: Standing) -> str:
    """Say what was found, in sentences."""
    found, goal = answer.found, f"grade {answer.found.spec.grade}"
    comes_to = f"PD {pd_words(found.pd)}, grade {answer.grade}"
    match found.kind:
        case ReachKind.NO_PD:
            return "There is no PD to move: the model gives none for these figures."
        case ReachKind.ALREADY:
            return f"Nothing has to move for {goal}: {comes_to}."
        case ReachKind.REACHED:
            count = _COUNTS[len(found.spec.levers)] if len(found.spec.levers) < len(_COUNTS) else "the levers ticked"
            first = f"Smallest plausible change over {count}: {_plan(targets, answer, before)}. It comes to {comes_to}."
        case ReachKind.RULES:
            rules = "; ".join(rule.reason.rstrip(".") for rule in answer.caps) or "a house rule"
            first = f"Not reachable: the PD alone would get to {goal}, but the house caps: {rules}."
        case ReachKind.NOT_REACHED:
            first = f"Not reachable: within these ranges the PD does not get to {goal}."
    return " ".join(filter(None, (first, _best(targets, answer, before), *_notes(targets, answer))))


def _best(targets: TargetBook, answer: ReachAnswer, before: Standing) -> str:
    if answer.found.kind is ReachKind.REACHED:
        return ""
    if answer.best_grade == NO_GRADE:
        return "No grade is met within them."
    plan = _plan(targets, answer, before)
    way = f", by {plan}" if plan else ""
    return f"Best within them: grade {answer.best_grade}, PD {pd_words(answer.found.pd)}{way}."


def _plan(targets: TargetBook, answer: ReachAnswer, before: Standing) -> str:
    held = set(answer.found.held)
    moving = [mark for mark in answer.marks if mark.target not in held]
    words = moved_words(targets, moving, (before, answer.plan.standing))
    return ", ".join(map(within, words.values()))


def _notes(targets: TargetBook, answer: ReachAnswer) -> list[str]:
    found, name = answer.found, targets.label
    notes = []
    if found.active and found.kind is ReachKind.REACHED:
        word = "Active bound" if len(found.active) == 1 else "Active bounds"
        notes.append(f"{word}: {', '.join(map(name, found.active))}.")
    if found.held:
        notes.append(f"Held where it stands: {', '.join(map(name, found.held))}.")
    notes += [f"Left out: {name(one.target)}, as {one.why[:1].lower()}{one.why[1:]}" for one in answer.left_out]
    return notes


def _moved(mark: Mark, target: Target, sides: tuple[Standing, Standing]) -> str:
    """Write a lever from where it stands to where it goes; a driver by how far it goes."""
    before, after = (_value(target, one) for one in sides)
    if isnan(before) or isnan(after):
        return f"{target.label} {mark_words(mark, target)}"
    start, end = target.text(before), target.text(after)
    return f"{target.label} {start.removesuffix(target.unit) if target.unit else start} → {end}"


def _value(target: Target, standing: Standing) -> float:
    period = standing.period_index
    if target.kind is TargetKind.LINE:
        return float(standing.statements.row(target.key)[period])
    return nan if target.kind is TargetKind.DRIVER else standing.ratios.value(target.key, period)
