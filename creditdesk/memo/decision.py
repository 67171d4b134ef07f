"""Who signs a memo and what the approver decides, written so that a person reads it and the program reads it back.

The decision stands in the signature dictionary's Reason: covered by the signature, shown by every PDF viewer, and no
change to the document beyond filling in the form.
"""

from enum import StrEnum

from creditdesk.base.errors import UsageError

MOST_CHARACTERS = 2_000
PREPARED = "Prepared"


class Role(StrEnum):
    """Name who signs; the value is the signature field's name."""

    PREPARER = "Preparer"
    APPROVER = "Approver"


class Decision(StrEnum):
    """Name the approver's decision."""

    APPROVE = "approve"
    APPROVE_WITH_CONDITIONS = "approve_with_conditions"
    DECLINE = "decline"
    RETURN = "return"


DECISION_WORDS = {
    Decision.APPROVE: "Approved",
    Decision.APPROVE_WITH_CONDITIONS: "Approved with conditions",
    Decision.DECLINE: "Declined",
    Decision.RETURN: "Returned to the preparer",
}


def as_reason(decision: Decision, conditions: str) -> str:
    """Write a decision as one line of text; ``conditions`` are the grounds where it declines or returns.

    Raises UsageError: conditions missing where the decision needs them or given where it has none, or too long.
    """
    text = plain_line(conditions)
    if decision is Decision.APPROVE_WITH_CONDITIONS and not text:
        raise UsageError("decision.conditions", "An approval with conditions needs the conditions.")
    if decision is Decision.APPROVE and text:
        raise UsageError("decision.conditions", "A plain approval has no conditions: choose approve_with_conditions.")
    if len(text) > MOST_CHARACTERS:
        raise UsageError(
            "decision.conditions", f"The conditions have {len(text)} characters, at most {MOST_CHARACTERS} fit."
        )
    return f"{DECISION_WORDS[decision]}: {text}" if text else DECISION_WORDS[decision]


def read_reason(reason: str) -> tuple[Decision, str] | None:
    """Read decision and conditions back from a reason; None where it is none that ``as_reason`` writes."""
    for decision, words in DECISION_WORDS.items():
        conditions = reason.removeprefix(words + ": ") if reason.startswith(words + ": ") else ""
        try:
            if as_reason(decision, conditions) == reason:
                return decision, conditions
        except UsageError:
            continue
    return None


def plain_line(text: str) -> str:
    """Return a text as one line with single spaces, without control characters."""
    spaced = "".join(character if character.isprintable() else " " for character in text)
    return " ".join(spaced.split())
