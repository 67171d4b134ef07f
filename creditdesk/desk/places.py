"""Places, as findings name them, in words, such as "Figures: Inventories, 2025"."""

import re

from creditdesk.case.standing import Standing
from creditdesk.desk.panels.texts import BACKGROUND, TITLES
from creditdesk.ratios.words import titled
from creditdesk.statements.period import period_label

_PLACE = re.compile(r"(?P<what>[a-z_]+)(?:\.(?P<key>[^\[\]]+))?(?:\[(?P<end>[^\]]+)\])?")
_SHEETS = {
    "figures": "Figures",
    "periods": "Figures",
    "ratios": "Ratios",
    "obligor": "Obligor",
    "assessment": "Obligor",
    "texts": "Memo",
    "pencil": "Pencil",
}


def place_words(standing: Standing, place: str) -> str:
    """Name the sheet, the line or ratio and the period of a place; "" where it names none."""
    found = _PLACE.fullmatch(place)
    if found is None:
        return ""
    what, key = found["what"], found["key"] or ""
    if what == "model":
        label = _factor_label(standing, key)
        return f"Second look: {label}" if label else f"Obligor: {titled('model')}"
    if what not in _SHEETS:
        return ""
    period = _period(standing, found["end"] or "")
    where = ", ".join(part for part in (_label(standing, what, key), period) if part)
    sheet = "Obligor" if what == "texts" and key in BACKGROUND else _SHEETS[what]
    return f"{sheet}: {where}" if where else sheet


def _label(standing: Standing, what: str, key: str) -> str:
    if what in ("figures", "pencil"):
        chart = standing.statements.chart
        labels = {one.key: one.label for one in chart.subtotals} | {one.key: one.label for one in chart.lines}
        return labels.get(key, titled(key))
    if what == "ratios":
        return next((one.label for one in standing.factors if one.ratio == key), titled(key))
    if what == "texts":
        return TITLES.get(key, titled(key))
    return titled(key)


def _factor_label(standing: Standing, key: str) -> str:
    return next((one.label for one in standing.factors if one.key == key), "")


def _period(standing: Standing, end: str) -> str:
    return next((period_label(one) for one in standing.statements.periods if one.ends.isoformat() == end), end)
