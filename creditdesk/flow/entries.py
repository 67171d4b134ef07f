"""Entries of a flow: by how much each line moves by itself, and why a part of it is no cash."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from creditdesk.base.jets import NIL, Jet


@dataclass(slots=True, eq=False)
class Entries:
    """Collect what moves while a flow runs, in its order.

    ``moved``: pencil less ink by line. ``off_cash``: by balance line, the part of its change that income booked without
    cash. ``on_currency``: the part that exchange differences on cash booked. ``by_mark``: the part of a change that
    cash flow lines booked, which show it already.
    """

    moved: dict[str, Jet] = field(default_factory=dict)
    off_cash: dict[str, Jet] = field(default_factory=dict)
    on_currency: dict[str, Jet] = field(default_factory=dict)
    by_mark: dict[str, Jet] = field(default_factory=dict)

    def change(self, line: str) -> Jet:
        """Return by how much a line moves by itself."""
        return self.moved.get(line, NIL)

    def add(self, line: str, amount: Jet) -> None:
        """Move a line by so much more."""
        self.moved[line] = self.moved[line] + amount if line in self.moved else amount


def weighted(amounts: Mapping[str, Jet], weights: Mapping[str, float]) -> Jet:
    """Add up amounts times their weights, in the order of the weights; what has no weight does not count."""
    return total(amounts[line] * weight for line, weight in weights.items() if line in amounts)


def total(amounts: Iterable[Jet]) -> Jet:
    """Add up amounts one after the other, so that draws and single points give the same bits."""
    result = NIL
    for amount in amounts:
        result = result + amount
    return result
