"""Read the charts as a person does: the axis by its labels, a bar by its length."""

import math
import re
from typing import Any

import numpy as np

Json = dict[str, Any]
MINUS = "−"


def number(text: str) -> float:
    """Return the number that begins a text as people write it: −1 234.5, 10 %."""
    plain = re.sub("[\\s\u202f\u00a0]", "", text).replace(MINUS, "-")
    found = re.match(r"[+-]?\d+(\.\d+)?", plain)
    assert found, text
    return float(found[0])


def marker(curve: Json) -> tuple[float, float]:
    """Return score and PD at which the borrower's dot stands, read against the labels of both axes."""
    percents = [(x, y, number(text) / 100) for text, x, y in curve["texts"] if text.endswith("%")]
    bottom = min(y for text, _, y in curve["texts"] if re.fullmatch(f"{MINUS}?\\d+", text))
    scores = [(x, number(text)) for text, x, y in curve["texts"] if y == bottom]
    assert len(percents) >= 3
    assert len(scores) >= 3
    dots = [mark for mark in curve["marks"] if mark[0] == "round"]
    _, left, low, right, high, _ = max(dots, key=lambda mark: mark[3] - mark[1])  # the borrower's is the largest
    per_pixel, start = np.polyfit(*zip(*scores, strict=True), 1)
    decades, level = np.polyfit([y for _, y, _ in percents], [math.log10(pd) for *_, pd in percents], 1)
    return per_pixel * (left + right) / 2 + start, 10 ** (decades * (low + high) / 2 + level)


def bars(chart: Json) -> dict[str, tuple[float, float]]:
    """Return for each factor the contribution as written, and its bar's length in pixels with the sign of its side."""
    found, zero = {}, _zero(chart)
    for text, _, y in chart["texts"]:
        row = [other for other, _, height in chart["texts"] if abs(height - y) < 2]
        bar = [mark for mark in _bars(chart) if abs((mark[2] + mark[4]) / 2 - y) < 2]
        if bar and text == row[0]:
            length = bar[0][3] - bar[0][1]
            found[text] = (number(row[-1]), length if bar[0][1] >= zero - 0.01 else -length)
    return found


def _bars(chart: Json) -> list[Any]:
    return [mark for mark in chart["marks"] if mark[0] == "4 corners"]


def _zero(chart: Json) -> float:
    """Return where all bars begin: the right end of those to the left, the left end of those to the right."""
    lefts, rights = ([mark[side] for mark in _bars(chart)] for side in (1, 3))
    common = [left for left in lefts if any(abs(left - right) < 0.01 for right in rights)]
    return common[0] if common else min(lefts)
