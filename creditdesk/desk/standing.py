"""The Standing column: where the borrower stands, why, how sure we are, and what to mind."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QFrame, QGridLayout, QHBoxLayout, QLabel, QScrollArea, QSizePolicy, QVBoxLayout, QWidget

from creditdesk.base.display import format_pd
from creditdesk.base.findings import Finding, Severity
from creditdesk.base.palette import LIGHT, Palette
from creditdesk.case.standing import Standing
from creditdesk.desk.frame import label
from creditdesk.desk.tables.figures import MARKS

if TYPE_CHECKING:
    from creditdesk.desk.canvases import ChartCanvases

_CURVE_HEIGHTS = (200, 330)
_HEADINGS = 120
"""Height of the two headings above the charts with the margins around them."""


class GradePlate(QFrame):
    """Show the grade large, with what it is out of and the model's grade where it differs."""

    def __init__(self) -> None:
        super().__init__()
        self.setObjectName("grade")
        self.setFixedWidth(96)
        self.grade = label("grade")
        self.note = label("second")
        box = QVBoxLayout(self)
        box.setContentsMargins(6, 5, 6, 6)
        box.setSpacing(0)
        for widget in (label("second", "grade"), self.grade, self.note):
            widget.setAlignment(Qt.AlignmentFlag.AlignHCenter)
            box.addWidget(widget)

    def show_standing(self, standing: Standing, grades: int) -> None:
        """Show the final grade of ``standing`` on a scale of so many grades."""
        final, model = standing.grade.final, standing.grade.model
        self.grade.setText("–" if final == "none" else final)
        self.note.setText("no grade" if final == "none" else f"of {grades}" if final == model else f"model {model}")
        self.setAccessibleName(f"Grade {final} of {grades}, by the model {model}")


class Verdict(QWidget):
    """Show PD, interval and grade."""

    def __init__(self) -> None:
        super().__init__()
        self.pd = label("pd")
        self.interval = label("", wrap=True)
        self.change = label("second", wrap=True)
        self.plate = GradePlate()
        self._caption = label("second", "Probability of default within a year")
        left = QVBoxLayout()
        left.setSpacing(0)
        for widget in (self._caption, self.pd, self.interval, self.change):
            left.addWidget(widget)
        left.addStretch(1)
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.addLayout(left, 1)
        row.addWidget(self.plate, 0, Qt.AlignmentFlag.AlignTop)

    def show_standing(self, standing: Standing, grades: int) -> None:
        """Show the numbers of ``standing``, or in words why there are none."""
        known = standing.pd_final is not None and standing.usable
        self.pd.setProperty("role", "pd" if known else "pd-words")
        self.pd.style().unpolish(self.pd)
        self.pd.style().polish(self.pd)
        self.pd.setWordWrap(not known)
        self.pd.setText(format_pd(standing.pd_final or 0.0) if known else _no_pd(standing))
        self.interval.setText(interval_words(standing))
        self.change.setText(change_words(standing))
        self.change.setVisible(bool(self.change.text()))
        self.plate.show_standing(standing, grades)


class FindingsList(QWidget):
    """List findings with their mark, the gravest first."""

    def __init__(self) -> None:
        super().__init__()
        self._grid = QGridLayout(self)
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setVerticalSpacing(4)
        self._grid.setColumnStretch(1, 1)
        self._grid.setColumnMinimumWidth(0, 14)
        self._labels: list[QLabel] = []

    def show_findings(self, findings: Sequence[Finding]) -> None:
        """Show ``findings``; a sentence says so where there are none."""
        order = list(Severity)
        ranked = sorted(findings, key=lambda finding: order.index(finding.severity))
        texts = [(MARKS[f.severity], f.severity, f.text) for f in ranked] or [("", Severity.NOTE, "No findings.")]
        while len(self._labels) < 2 * len(texts):
            self._add_row()
        for row, (mark, severity, text) in enumerate(texts):
            sign, words = self._labels[2 * row : 2 * row + 2]
            role = {Severity.STOP: "breach", Severity.QUERY: "caution"}.get(severity, "second")
            sign.setText(mark)
            if sign.property("role") != role:
                sign.setProperty("role", role)
                sign.style().unpolish(sign)
                sign.style().polish(sign)
            words.setText(text)
            words.setAccessibleName(f"{severity.value}: {text}")
        for number, widget in enumerate(self._labels):
            widget.setVisible(number < 2 * len(texts))

    def _add_row(self) -> None:
        row = len(self._labels) // 2
        sign, words = label("second"), label("", wrap=True)
        sign.setAlignment(Qt.AlignmentFlag.AlignTop)
        words.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self._grid.addWidget(sign, row, 0)
        self._grid.addWidget(words, row, 1)
        self._labels += [sign, words]


class StandingColumn(QWidget):
    """Hold verdict, curve, contributions, findings and cautions; charts are put in when their library is there."""

    def __init__(self, grades: int) -> None:
        super().__init__()
        self.setObjectName("standing")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self._grades = grades
        self._standing: Standing | None = None
        self._palette = LIGHT
        self._canvases: ChartCanvases | None = None
        self.verdict = Verdict()
        self.findings = FindingsList()
        self.cautions = label("second", wrap=True)
        self.curve_place = _place(QSize(400, 262))
        self.contributions_place = _place(QSize(400, 190))
        self._lay_out()

    def sizeHint(self) -> QSize:
        """Ask for the width the charts read well at."""
        return QSize(490, 700)

    def show_standing(self, standing: Standing) -> None:
        """Show another standing, everything at once."""
        self._standing = standing
        self.verdict.show_standing(standing, self._grades)
        self.findings.show_findings(standing.findings)
        self.cautions.setText("\n".join(f"▲ {caution}" for caution in standing.cautions))
        self._show_charts()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Share the new height."""
        super().resizeEvent(event)
        self._fit_curve()

    def put_charts(self, canvases: "ChartCanvases", palette: Palette) -> None:
        """Put the chart canvases in their places; they follow every standing from now on."""
        self._take_charts_out()
        self._canvases, self._palette = canvases, palette
        for place, canvas in ((self.curve_place, canvases.curve), (self.contributions_place, canvases.contributions)):
            layout = place.layout()
            assert layout is not None
            layout.addWidget(canvas)
        self._show_charts()

    def _take_charts_out(self) -> None:
        if self._canvases is not None:
            for canvas in (self._canvases.curve, self._canvases.contributions):
                canvas.setParent(None)
                canvas.deleteLater()

    def _show_charts(self) -> None:
        if self._canvases is not None and self._standing is not None:
            self._canvases.show_standing(self._standing)
            self.contributions_place.setFixedHeight(self._canvases.contributions_height(self._standing))
            self._fit_curve()

    def _fit_curve(self) -> None:
        """Give the curve what the column has left beside verdict and contributions, within what it reads well at."""
        taken = self.verdict.sizeHint().height() + self.contributions_place.height() + _HEADINGS
        lowest, highest = _CURVE_HEIGHTS
        self.curve_place.setFixedHeight(min(max(self.height() - taken, lowest), highest))

    def _lay_out(self) -> None:
        inside = QWidget()
        box = QVBoxLayout(inside)
        box.setContentsMargins(20, 14, 20, 14)
        box.setSpacing(6)
        box.addWidget(self.verdict)
        for heading, widget in (
            ("On the fitted curve", self.curve_place),
            ("From the reference borrower to this one", self.contributions_place),
            ("Findings", self.findings),
            ("Cautions", self.cautions),
        ):
            box.addSpacing(6)
            box.addWidget(label("heading", heading))
            box.addWidget(widget)
        box.addStretch(1)
        scroll = QScrollArea()
        scroll.setWidgetResizable(True)
        scroll.setFrameShape(QFrame.Shape.NoFrame)
        scroll.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        scroll.setAccessibleName("Standing")
        scroll.setWidget(inside)
        whole = QVBoxLayout(self)
        whole.setContentsMargins(0, 0, 0, 0)
        whole.addWidget(scroll)


def interval_words(standing: Standing) -> str:
    """Word the interval and what it covers."""
    interval = standing.pd_interval
    if standing.pd_final is None or not standing.usable:
        return ""
    if interval is None:
        return "no interval: the model states no covariance"
    bounds = f"{100 * interval.level:.0f} % interval {format_pd(interval.low)} to {format_pd(interval.high)}"
    moved = standing.pd_calibrated is not None and standing.pd_final != standing.pd_calibrated
    model = f"by the model {format_pd(standing.pd_calibrated or 0.0)}, " if moved else ""
    return f"{model}{bounds}, uncertainty of the fitted coefficients only"


def change_words(standing: Standing) -> str:
    """Word PD and grade of the year before."""
    before = standing.last_year
    if before is None or before.pd is None:
        return ""
    return f"{before.label}: {format_pd(before.pd)}, grade {before.grade}"


def _no_pd(standing: Standing) -> str:
    if standing.pd_final is not None:
        return "Not usable until the findings marked ■ are resolved"
    return "No probability of default: " + "; ".join(standing.reasons)


def _place(size: QSize) -> QWidget:
    place = QWidget()
    place.setFixedHeight(size.height())
    place.setMinimumWidth(size.width() - 60)
    place.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
    layout = QVBoxLayout(place)
    layout.setContentsMargins(0, 0, 0, 0)
    return place
