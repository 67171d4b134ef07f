"""What can be found besides actions: lines, ratios and findings of the open case, each with the place it leads to."""

from collections.abc import Callable, Iterator

from PySide6.QtWidgets import QMenuBar

from creditdesk.case.standing import Standing
from creditdesk.desk.actions import keys_of, placed_actions, plain, reason_of
from creditdesk.desk.palette import Find
from creditdesk.house.book import HouseBook

GoTo = Callable[[str], object]


def action_finds(bar: QMenuBar) -> Iterator[Find]:
    """Yield every action of the menus, as it can be done now."""
    for placed in placed_actions(bar):
        action = placed.action
        yield Find(
            title=plain(action.text()).removesuffix("…"),
            where=placed.menu,
            do=action.trigger,
            keys=keys_of(action),
            enabled=action.isEnabled(),
            reason=reason_of(action),
        )


def case_finds(house: HouseBook, standing: Standing, go_to: GoTo) -> Iterator[Find]:
    """Yield findings, lines and ratios; ``go_to`` takes the place as findings name it."""
    for finding in standing.findings:
        if finding.place:
            yield _find(finding.text, f"Finding, {finding.severity.value}", go_to, finding.place)
    end = standing.period.isoformat()
    lines = {line.key: line.label for line in house.chart.lines}
    sums = {subtotal.key: subtotal.label for subtotal in house.chart.subtotals}
    for key, label in (lines | sums).items():
        yield _find(label, "Line of the figures", go_to, f"figures.{key}[{end}]")
    for ratio in house.catalogue.specs:
        yield _find(ratio.label, "Ratio", go_to, f"ratios.{ratio.key}")


def _find(title: str, where: str, go_to: GoTo, place: str) -> Find:
    return Find(title, where, lambda: go_to(place), searched_only=True, more=place)
