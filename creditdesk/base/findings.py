"""Findings: faults and doubts in data, as values."""

from dataclasses import dataclass
from enum import StrEnum


class Severity(StrEnum):
    """Say how much a finding weighs.

    STOP: the figures cannot carry a grade. QUERY: to be accepted with a reason. NOTE: information.
    """

    STOP = "stop"
    QUERY = "query"
    NOTE = "note"


@dataclass(frozen=True, slots=True)
class Finding:
    """State one fault or doubt in data.

    ``code`` is stable; ``place`` names where it is, as ``figures.<line>[<period end>]``, ``periods[<period end>]``
    or ``model.<factor>``; ``text`` is a sentence for the user, with the amounts in it.
    """

    code: str
    severity: Severity
    place: str
    text: str
