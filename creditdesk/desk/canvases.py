"""Charts on Qt canvases; this module imports matplotlib and is itself imported off the main thread."""

import matplotlib as mpl
from matplotlib.backends.backend_qtagg import FigureCanvasQTAgg
from matplotlib.figure import Figure

from creditdesk.base.palette import Palette
from creditdesk.case.standing import Standing
from creditdesk.charts.contributions import ContributionsChart, contributions_height
from creditdesk.charts.curve import CurveChart

mpl.use("agg")


class ChartCanvases:
    """Hold the two charts of the Standing column and draw them for one standing after another."""

    def __init__(self, palette: Palette) -> None:
        self._palette = palette
        self.curve = FigureCanvasQTAgg(_figure(palette))  # type: ignore[no-untyped-call]
        self.contributions = FigureCanvasQTAgg(_figure(palette))  # type: ignore[no-untyped-call]
        self.curve.setAccessibleName("Probability of default on the fitted curve")
        self.contributions.setAccessibleName("Contributions from the reference borrower to this one")
        self._curve_chart = CurveChart(self.curve.figure, palette)
        self._contributions_chart = ContributionsChart(self.contributions.figure, palette)

    def show_standing(self, standing: Standing) -> None:
        """Draw both charts for ``standing``."""
        self._curve_chart.show(standing)
        self._contributions_chart.show(standing)
        self.curve.draw_idle()  # type: ignore[no-untyped-call]
        self.contributions.draw_idle()  # type: ignore[no-untyped-call]

    def contributions_height(self, standing: Standing) -> int:
        """Return the height in pixels at which the rows stand comfortably."""
        points = contributions_height(len(standing.factors), self._palette)
        ratio: float = self.contributions.device_pixel_ratio
        return round(points * float(self.contributions.figure.dpi) / 72 / ratio)


def _figure(palette: Palette) -> Figure:
    return Figure(figsize=(4, 2.4), dpi=96, facecolor=palette.sheet)
