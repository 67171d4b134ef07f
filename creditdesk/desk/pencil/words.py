"""What is to be known of a draft in words: what was refused, what is not consistent, what is still asked."""

from creditdesk.base.findings import Severity
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.tables.cells import MARKS
from creditdesk.scenario.stress import asks_for_judgement

_IN_SIGHT = 2


def doubt_words(draft: PencilDraft) -> tuple[str, str]:
    """Return the gravest doubts in a few lines, and all of them for a tooltip."""
    every = _doubts(draft)
    more = len(every) - _IN_SIGHT
    shown = every if more <= 1 else [*every[:_IN_SIGHT], f"and {more} more: point here"]
    return "\n".join(shown), "\n".join(every) if more > 1 else ""


def _doubts(draft: PencilDraft) -> list[str]:
    if draft.why_none:
        return [f"{MARKS[Severity.QUERY]} Nothing can be marked: {draft.why_none}"]
    scenario, stress, pencilled = draft.scenario, draft.session.house.stress, draft.pencilled
    words = []
    if scenario is not None and stress is not None and (asked := asks_for_judgement(stress, scenario)):
        words.append(f"{MARKS[Severity.QUERY]} A judgement in words is asked for, under About: {asked}")
    order = list(Severity)
    findings = sorted(pencilled.findings if pencilled is not None else (), key=lambda one: order.index(one.severity))
    return [*words, *(f"{MARKS[finding.severity]} {finding.text}" for finding in findings)]
