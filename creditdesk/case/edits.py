"""What every command is built on: its shape, its refusals, and how it words places and amounts."""

import math

import msgspec

from creditdesk.base.display import format_amount
from creditdesk.base.errors import UserError
from creditdesk.case.document import Case
from creditdesk.house.decode import Fault
from creditdesk.statements.adjust import Adjustment
from creditdesk.statements.chart import Chart, LineItem, Subtotal


class Edit(msgspec.Struct, frozen=True, forbid_unknown_fields=True, tag_field="edit"):
    """Ground for every command."""

    def applied(self, case: Case) -> Case:
        """Make the next case, unchecked; ``commands.apply`` checks it."""
        raise NotImplementedError

    def describe(self, chart: Chart, case: Case) -> str:
        """Say what the command does to ``case``, the one before it, for undo and trail."""
        raise NotImplementedError


def refused(*faults: Fault) -> UserError:
    """Word faults of an edit as the error that refuses it."""
    return UserError("edit", list(dict.fromkeys(fault.sentence for fault in faults)))


def check_index(name: str, index: int, count: int) -> None:
    """Refuse an index outside a list of ``count``."""
    if not 0 <= index < count:
        raise refused(Fault(name, str(index), f"0 to {count - 1}" if count else "nothing: the list is empty"))


def label_of(chart: Chart, key: str, otherwise: str = "") -> str:
    """Name a line or total; ``otherwise``, or the key itself, where the chart does not hold it."""
    items: tuple[LineItem | Subtotal, ...] = (*chart.lines, *chart.subtotals)
    return next((item.label for item in items if item.key == key), otherwise or key)


def written(amount: float) -> str:
    """Write an amount with the decimals it has, up to three; blank in words."""
    if math.isnan(amount):
        return "not disclosed"
    return format_amount(amount, next((places for places in range(3) if round(amount, places) == amount), 3))


def describe_adjustment(adjustment: Adjustment, chart: Chart) -> str:
    """Name the lines and the reason of an adjustment."""
    lines = ", ".join(label_of(chart, entry.line) for entry in adjustment.entries)
    return f"{lines} ({adjustment.reason})"
