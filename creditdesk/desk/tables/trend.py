"""A small line that shows how an amount went from period to period."""

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen

from creditdesk.base.palette import Palette

_CALM = 0.1
"""Share of the largest amount that the full height stands for at least, so that small moves look small."""


def trend_heights(values: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return each value's height, 0 to 1: the lowest 0, the highest 1; nearer the middle where they differ little.

    nan where there is no value, and everywhere where fewer than two have one.
    """
    known = np.isfinite(values)
    heights = np.full(values.shape, np.nan)
    if np.count_nonzero(known) > 1:
        low, high = values[known].min(), values[known].max()
        span = max(high - low, _CALM * max(abs(low), abs(high)))
        heights[known] = 0.5 + (values[known] - (low + high) / 2) / span if span > 0 else 0.5
    return heights


def paint_trend(painter: QPainter, area: QRectF, values: NDArray[np.float64], palette: Palette) -> None:
    """Paint the line into ``area``, broken where a value is missing, a dot at the last period."""
    heights = trend_heights(values)
    if not np.isfinite(heights).any():
        return
    step = area.width() / (len(values) - 1)
    points = [QPointF(area.left() + i * step, area.bottom() - h * area.height()) for i, h in enumerate(heights)]
    known = np.isfinite(heights)
    painter.setPen(QPen(QColor(palette.second_ink), 1.1))
    for first, second, both in zip(points, points[1:], known[:-1] & known[1:], strict=False):
        if both:
            painter.drawLine(first, second)
    if known[-1]:
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(palette.ink))
        painter.drawEllipse(points[-1], 2.0, 2.0)
