"""The charts of the studies, each on a canvas of its own; their library is fetched by a worker before it is needed."""

from collections.abc import Callable
from typing import TYPE_CHECKING, Generic, Protocol, TypeVar

from creditdesk.base.palette import Palette

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from creditdesk.charts.board import Board
    from creditdesk.charts.pdgrid import GridPicture
    from creditdesk.charts.pointing import Marks
    from creditdesk.charts.sensitivity import SensitivityPicture
    from creditdesk.charts.spread import SpreadPicture

LIBRARY = (
    "creditdesk.desk.canvases", "creditdesk.charts.pdgrid", "creditdesk.charts.sensitivity", "creditdesk.charts.spread",
)  # fmt: skip
"""What a worker imports before the first chart is drawn."""

Shown_contra = TypeVar("Shown_contra", contravariant=True)
Shown = TypeVar("Shown")


class _Chart(Protocol[Shown_contra]):
    @property
    def board(self) -> "Board": ...

    def show(self, picture: Shown_contra) -> None: ...

    def marks(self) -> "Marks": ...


class StudyChart(Generic[Shown]):
    """Show one study on ``canvas``, in one palette; ``kept``: the layer that stays when the others move."""

    def __init__(
        self, make: Callable[["Figure", Palette], _Chart[Shown]], palette: Palette, name: str, kept: str = ""
    ) -> None:
        from creditdesk.charts.painting import Painter
        from creditdesk.desk.canvases import ChartCanvas, Showing

        self.palette = palette
        self.canvas = ChartCanvas(palette, name)
        self._make = make
        self._chart = make(self.canvas.figure, palette)
        self._shown: Shown | None = None
        self._numbers: Callable[[], str] = str
        showing = Showing(
            painter=Painter(self._chart.board, kept),
            marks=self._chart.marks,
            foot=lambda: 0.0,
            numbers=self._localised,
            picture=self._alone,
        )
        self.canvas.put(showing)

    def show(self, shown: Shown, numbers: Callable[[], str]) -> None:
        """Draw a study; ``numbers``: gives what is copied of it, tab-separated, with points as decimal marks."""
        self._shown, self._numbers = shown, numbers
        self._take_place()
        self._chart.show(shown)
        self.canvas.refresh()

    @property
    def shown(self) -> Shown | None:
        """Return what is drawn."""
        return self._shown

    def _take_place(self) -> None:
        """Take the size there is before drawing: to draw at another and then again would be twice the work."""
        parent = self.canvas.parentWidget()
        layout = parent.layout() if parent is not None else None
        if layout is not None:
            layout.activate()

    def _localised(self, decimal: str) -> str:
        return self._numbers().replace(".", decimal)

    def _alone(self) -> "Figure":
        """Return the chart on a figure of its own, on the ground it has in the window."""
        from creditdesk.charts.style import new_figure

        figure = new_figure(self._chart.board.size)
        if self._shown is not None:
            self._make(figure, self.palette).show(self._shown)
        figure.patch.set_visible(True)
        figure.patch.set_facecolor(self.palette.sheet)
        return figure


def grid_chart(palette: Palette) -> "StudyChart[GridPicture]":
    """Make the chart of a grid."""
    from creditdesk.charts.pdgrid import GROUND, PdGridChart

    return StudyChart(PdGridChart, palette, "PD over two things that move", GROUND)


def sensitivity_chart(palette: Palette) -> "StudyChart[SensitivityPicture]":
    """Make the chart of what moves the PD."""
    from creditdesk.charts.sensitivity import SensitivityChart

    return StudyChart(SensitivityChart, palette, "What moves the PD")


def spread_chart(palette: Palette) -> "StudyChart[SpreadPicture]":
    """Make the chart of a simulation."""
    from creditdesk.charts.spread import SpreadChart

    return StudyChart(SpreadChart, palette, "Spread of the estimate, not of defaults")
