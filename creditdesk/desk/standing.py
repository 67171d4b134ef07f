"""The Standing column: where the borrower stands, why, how sure we are, and what to mind."""

import re
from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

from PySide6.QtCore import QCoreApplication, QEvent, QSize, Qt, QTimer, Signal
from PySide6.QtGui import QKeyEvent, QResizeEvent
from PySide6.QtWidgets import QBoxLayout, QFrame, QHBoxLayout, QScrollArea, QSizePolicy, QVBoxLayout, QWidget

from creditdesk.base.palette import LIGHT, Palette
from creditdesk.case.standing import Standing
from creditdesk.desk.actions import Entry
from creditdesk.desk.factorlook import FactorLook
from creditdesk.desk.findings import CautionsList, FindingsList
from creditdesk.desk.frame import STANDING_NARROWEST, STANDING_SIZE, label
from creditdesk.desk.switch import WaySwitch
from creditdesk.desk.verdict import Verdict

if TYPE_CHECKING:
    from creditdesk.case.pencil import Pencilled
    from creditdesk.desk.canvases import ChartCanvas, ChartCanvases

WIDE = 900
"""From this width in pixels on, verdict and curve stand beside contributions and findings."""
_CURVE_HEIGHTS = (202, 340)
_WIDE_CURVE_HEIGHTS = (240, 640)
_HEADINGS, _WIDE_HEADINGS = 110, 76
"""Height of the headings above the charts, two or one, with the margins around them."""
_TIGHT = 0.9
"""How much closer the rows of the contributions stand where the column is low."""
_LOW = 700
"""Below this height in pixels two columns are low."""
_MARGIN = 15
_CHART_MARGIN = 5
"""Between the frame that shows the focus and the chart; with the column's margin it lines up with the texts."""
_REFERENCE_HEADING, _MOVED_HEADING = "From the reference borrower to this one", "From last year to this one"
_MODEL = "model."
_PENCIL_PLACE = re.compile(r"^(figures|ratios)\.")

# The colours are those of the application's palette, which the theme sets.
_STYLE = """
QPushButton[role="switch"] { padding: 1px 8px; }
QPushButton[role="switch"]:checked { border-color: palette(link); font-weight: 600; }
QPushButton[role="link"] { border: 0; background: transparent; color: palette(link); padding: 1px 5px; }
QPushButton[role="link"]:hover { text-decoration: underline; }
QPushButton[role="link"]:focus { background: palette(highlight); text-decoration: underline; }
QLabel[role="place"] { color: palette(link); }
#look { background: palette(window); border: 1px solid palette(link); }
#chart { border: 1px solid transparent; }
#chart[focused="true"] { border-color: palette(link); }
"""


class ChartPlace(QFrame):
    """Hold one chart, with a frame around it while it takes the keys."""

    def __init__(self, height: int) -> None:
        super().__init__()
        self.setObjectName("chart")
        self.setFixedHeight(height)
        self.setMinimumWidth(340)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self._box = QVBoxLayout(self)
        self._box.setContentsMargins(_CHART_MARGIN, 0, _CHART_MARGIN, 0)

    def put(self, canvas: "ChartCanvas") -> None:
        """Put the chart in."""
        self._box.addWidget(canvas)
        canvas.focus_changed.connect(self.show_focus)

    def show_focus(self, focused: bool) -> None:
        """Show or hide the frame."""
        self.setProperty("focused", focused)
        self.style().unpolish(self)
        self.style().polish(self)


class _Inside(QWidget):
    """Hold what scrolls: as high as its width makes it, which broken lines would claim more than."""

    def minimumSizeHint(self) -> QSize:
        """Leave the height to the width."""
        return QSize(0, 0)


class StandingColumn(QWidget):
    """Hold verdict, curve, contributions, findings and cautions; charts are put in when their library is there.

    ``jump_asked``: a place, as findings name it, to be shown by the sheet it belongs to. Wider than ``WIDE`` it lays
    itself out in two columns, which ``wide_changed`` tells. ``put_away_asked``: the pencil is to go.
    """

    jump_asked = Signal(str)
    wide_changed = Signal(bool)
    put_away_asked = Signal()

    def __init__(self, grades: int) -> None:
        super().__init__()
        self.setObjectName("standing")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self.setStyleSheet(_STYLE)
        self.setMinimumWidth(STANDING_NARROWEST)
        self._grades = grades
        self._standing: Standing | None = None
        self._palette = LIGHT
        self._canvases: ChartCanvases | None = None
        self.verdict, self.findings, self.look = Verdict(), FindingsList(), FactorLook()
        self.pencil_findings, self.pencil_heading = FindingsList(), label("heading", "In pencil")
        self._pencil: Pencilled | None = None
        self._spread: Sequence[float] = ()
        self.switch, self.switch_note = WaySwitch(), label("second", wrap=True)
        self.heading = label("heading", _REFERENCE_HEADING, wrap=True)
        self.cautions = CautionsList()
        self.curve_place, self.contributions_place = ChartPlace(262), ChartPlace(190)
        self._lay_out()
        self._connect()

    def sizeHint(self) -> QSize:
        """Ask for the width the charts read well at."""
        return STANDING_SIZE

    @property
    def wide(self) -> bool:
        """Say whether the column stands in two."""
        return self._columns.direction() is QBoxLayout.Direction.LeftToRight

    def show_standing(self, standing: Standing) -> None:
        """Show another standing, everything at once."""
        self._standing = standing
        self.verdict.show_standing(standing, self._grades)
        self.findings.show_standing(standing)
        self.cautions.show_cautions(standing.cautions)
        self.switch.allow(standing.what_moved_reason)
        self.switch_note.setText(_in_short(standing.what_moved_reason))
        self.switch_note.setToolTip(standing.what_moved_reason)
        self.switch_note.setVisible(bool(standing.what_moved_reason))
        self._show_charts()
        if self.isVisible():  # what everyone looks at first comes before the sheets
            QCoreApplication.sendPostedEvents(None, QEvent.Type.LayoutRequest)
            self.view.viewport().repaint()

    def show_pencil(self, pencilled: "Pencilled | None", name: str, *, held: bool = False) -> None:
        """Show over the ink what a scenario comes to; None takes it away. ``held``: no scale moves meanwhile."""
        turned = (pencilled is None) != (self._pencil is None)
        self._pencil = pencilled
        standing = pencilled.standing if pencilled is not None else None
        self.verdict.pencil.show_pencil(standing, name)
        self._show_pencil_findings(pencilled)
        if self._canvases is not None:
            self._canvases.show_pencil(standing, held=held)
        if turned:
            self.verdict.settle()
            self._fit_curve()

    def show_spread(self, scores: Sequence[float]) -> None:
        """Show on the curve how far the estimate spreads, by quantiles of its score; none take it away."""
        self._spread = scores
        if self._canvases is not None:
            self._canvases.show_spread(scores)

    def _show_pencil_findings(self, pencilled: "Pencilled | None") -> None:
        """List what the marks meet, each leading to its row in pencil."""
        shown = pencilled is not None and bool(pencilled.findings)
        self.pencil_heading.setVisible(shown)
        self.pencil_findings.setVisible(shown)
        if pencilled is not None and shown:
            found = tuple(replace(one, place=_PENCIL_PLACE.sub("pencil.", one.place)) for one in pencilled.findings)
            self.pencil_findings.show_standing(replace(pencilled.standing, findings=found))

    def entries(self) -> Sequence[Entry | None]:
        """Return what can be done here, for menu and palette."""
        return (
            ("&Reference or last year", "Ctrl+Shift+Y", self.switch.turn),
            None,
            ("Copy the &curve as a picture", None, lambda: self._copy("curve", picture=True)),
            ("Copy the curve's &numbers", None, lambda: self._copy("curve", picture=False)),
            ("Copy the c&ontributions as a picture", None, lambda: self._copy("contributions", picture=True)),
            ("Copy the contributions' n&umbers", None, lambda: self._copy("contributions", picture=False)),
        )

    def show_factor(self, key: str) -> None:
        """Open the second look at a factor; nothing happens where the model has none of that key."""
        look = None if self._canvases is None else self._canvases.look(key)
        if look is not None:
            self.look.show_look(look)
            QTimer.singleShot(0, self._scroll_to_look)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Share the new width and height."""
        super().resizeEvent(event)
        wide = self.width() >= WIDE
        if wide != self.wide:
            self._lay_out_wide(wide=wide)
            self.wide_changed.emit(wide)
        self._fit_curve()

    def event(self, event: QEvent) -> bool:
        """Keep Escape while there is a second look to close."""
        if event.type() is QEvent.Type.ShortcutOverride and self._closes(event):
            event.accept()
            return True
        return super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Close the second look with Escape."""
        if self._closes(event):
            self._on_look_closed()
        else:
            super().keyPressEvent(event)

    def put_charts(self, canvases: "ChartCanvases", palette: Palette) -> None:
        """Put the chart canvases in their places; they follow every standing from now on."""
        self._take_charts_out()
        self._canvases, self._palette = canvases, palette
        self.verdict.pencil.words.recolour(palette)
        self.curve_place.put(canvases.curve)
        self.contributions_place.put(canvases.contributions)
        canvases.curve.chosen.connect(self._on_curve_chosen)
        canvases.contributions.chosen.connect(self._on_factor_chosen)
        canvases.contributions.walked.connect(self._on_factor_walked)
        self.setFocusProxy(canvases.curve)
        QWidget.setTabOrder(canvases.curve, self.switch.reference)
        QWidget.setTabOrder(self.switch.reference, self.switch.last_year)
        QWidget.setTabOrder(self.switch.last_year, canvases.contributions)
        QWidget.setTabOrder(canvases.contributions, self.look.link)
        self._show_charts()

    def _take_charts_out(self) -> None:
        if self._canvases is not None:
            self.setFocusProxy(self.view)
            for canvas in (self._canvases.curve, self._canvases.contributions):
                canvas.setParent(None)
                canvas.deleteLater()

    def _show_charts(self) -> None:
        moved = self.switch.since_last_year
        self.heading.setText(_MOVED_HEADING if moved else _REFERENCE_HEADING)
        if self._canvases is not None and self._standing is not None:
            if self._canvases.moved != moved:
                self._canvases.show_moved(moved=moved)
            self._canvases.show_standing(self._standing)
            self._canvases.show_spread(self._spread)
            self._canvases.show_pencil(self._pencil.standing if self._pencil is not None else None)
            if self.look.look is not None:
                self.look.show_look(self._canvases.look(self.look.look.key))
            self._fit_curve()

    def _fit_curve(self) -> None:
        """Give the curve what the column has left beside what else stands in it, within what it reads well at."""
        lowest, highest = _WIDE_CURVE_HEIGHTS if self.wide else _CURVE_HEIGHTS
        left = self.height() - self.verdict.sizeHint().height() - (_WIDE_HEADINGS if self.wide else _HEADINGS)
        if self._canvases is not None and self._standing is not None:
            rows = self._canvases.contributions_height(self._standing)
            roomy = self.height() >= _LOW if self.wide else left - rows >= lowest
            rows = rows if roomy else round(_TIGHT * rows)
            self.contributions_place.setFixedHeight(rows)
        left -= 0 if self.wide else self.contributions_place.height()
        self.curve_place.setFixedHeight(min(max(left, lowest), highest))
        self._put_cautions()

    def _put_cautions(self) -> None:
        """Let the cautions stand last, or where two columns leave more room."""
        where = self._left if self.wide and self._room_on_the_left() else self._right
        if self._minded.parentWidget() is not where:
            box = where.layout()
            assert isinstance(box, QVBoxLayout)
            box.insertWidget(box.count() - 1, self._minded)

    def _room_on_the_left(self) -> bool:
        """Say whether verdict and curve end above the findings; what is open at the moment does not count."""
        left = self.verdict.sizeHint().height() + self.curve_place.height()
        findings = self.findings.heightForWidth(self.findings.width())
        return left < self.contributions_place.height() + findings

    def _closes(self, event: QEvent) -> bool:
        return isinstance(event, QKeyEvent) and event.key() == Qt.Key.Key_Escape and self.look.look is not None

    def _scroll_to_look(self) -> None:
        self.view.ensureWidgetVisible(self.look, 0, 8)

    def _copy(self, chart: str, *, picture: bool) -> None:
        if self._canvases is not None:
            canvas = self._canvases.curve if chart == "curve" else self._canvases.contributions
            (canvas.copy_picture if picture else canvas.copy_numbers)()

    def _on_way(self) -> None:
        self._show_charts()

    def _on_curve_chosen(self, _key: str, place: str) -> None:
        if place:
            self.jump_asked.emit(place)

    def _on_factor_chosen(self, key: str, _place: str) -> None:
        self.show_factor(key)

    def _on_factor_walked(self, key: str) -> None:
        """Let an open second look go along with the keys."""
        if self.look.look is not None and self._canvases is not None:
            self.look.show_look(self._canvases.look(key) or self.look.look)

    def _on_look_closed(self) -> None:
        self.look.show_look(None)
        if self._canvases is not None:
            self._canvases.contributions.setFocus(Qt.FocusReason.TabFocusReason)

    def _on_finding(self, place: str) -> None:
        """Follow a finding; what concerns a factor of the model is laid open here."""
        if place.startswith(_MODEL):
            self.show_factor(place.removeprefix(_MODEL))
        self.jump_asked.emit(place)

    def _connect(self) -> None:
        self.switch.chosen.connect(self._on_way)
        self.look.jump_asked.connect(self.jump_asked)
        self.look.closed.connect(self._on_look_closed)
        self.findings.followed.connect(self._on_finding)
        self.pencil_findings.followed.connect(self.jump_asked)
        self.verdict.pencil.away_asked.connect(self.put_away_asked)

    def _lay_out_wide(self, *, wide: bool) -> None:
        """Put the two columns beside each other or below each other."""
        way = QBoxLayout.Direction
        self._columns.setDirection(way.LeftToRight if wide else way.TopToBottom)
        self._columns.setSpacing(24 if wide else 9)
        self._columns.setStretch(0, 1 if wide else 0)
        self._put_cautions()

    def _lay_out(self) -> None:
        way, heading = QHBoxLayout(), label("heading", "On the fitted curve")
        way.setContentsMargins(0, 0, _CHART_MARGIN, 0)
        way.addWidget(self.heading, 1)
        way.addWidget(self.switch)
        findings, cautions = label("heading", "Findings"), label("heading", "Cautions")
        self._left = _column((self.verdict, 10, heading, self.curve_place))
        pencil = (self.pencil_heading, self.pencil_findings)
        found = (self.look, findings, self.findings, *pencil)
        self._right = _column((way, self.switch_note, self.contributions_place, *found))
        self.pencil_heading.hide()
        self.pencil_findings.hide()
        self._minded = _column((cautions, self.cautions))
        for widget in (
            self.verdict,
            heading,
            self.heading,
            self.switch_note,
            findings,
            cautions,
            self.cautions,
            *pencil[:1],
        ):
            widget.setContentsMargins(_CHART_MARGIN, 0, _CHART_MARGIN, 0)
        inside = _Inside()
        self._columns = QBoxLayout(QBoxLayout.Direction.TopToBottom, inside)
        self._columns.setContentsMargins(_MARGIN, 14, _MARGIN, 14)
        for part in (self._left, self._right):
            self._columns.addWidget(part, 1)
        self._lay_out_wide(wide=False)
        self.view = QScrollArea()
        self.view.setWidgetResizable(True)
        self.view.setFrameShape(QFrame.Shape.NoFrame)
        self.view.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.view.setAccessibleName("Standing")
        self.view.setWidget(inside)
        whole = QVBoxLayout(self)
        whole.setContentsMargins(0, 0, 0, 0)
        whole.addWidget(self.view)


def _in_short(reason: str) -> str:
    """Keep what a reason against last year says first; the factors it goes on to list stand in the chart."""
    return f"Last year cannot be shown. {reason.partition(':')[0].rstrip('.')}." if reason else ""


def _column(parts: Sequence[QWidget | QHBoxLayout | int]) -> QWidget:
    """Stack widgets and layouts from the top; a number is a space in pixels."""
    result = QWidget()
    box = QVBoxLayout(result)
    box.setContentsMargins(0, 0, 0, 0)
    box.setSpacing(6)
    for part in parts:
        if isinstance(part, int):
            box.addSpacing(part)
        elif isinstance(part, QHBoxLayout):
            box.addLayout(part)
        else:
            box.addWidget(part)
    box.addStretch(1)
    return result
