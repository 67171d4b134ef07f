"""The findings as a list that leads: each one is a link to the place it speaks of."""

from collections.abc import Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QEnterEvent, QFocusEvent, QKeyEvent, QPainter, QPaintEvent, QPalette
from PySide6.QtWidgets import QAbstractButton, QGridLayout, QHBoxLayout, QLabel, QSizePolicy, QVBoxLayout, QWidget

from creditdesk.base.findings import Finding, Severity
from creditdesk.case.standing import Standing
from creditdesk.desk.frame import label
from creditdesk.desk.places import place_words
from creditdesk.desk.tables.cells import MARKS
from creditdesk.ratios.words import with_full_stop

_ROLES = {Severity.STOP: "breach", Severity.QUERY: "caution", Severity.NOTE: "second"}
_STEPS = {Qt.Key.Key_Up: -1, Qt.Key.Key_Down: 1}


class FindingLink(QAbstractButton):
    """Show one finding with its mark and where it leads; a click or Enter follows it."""

    walked = Signal(int)
    focused = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.finding: Finding | None = None
        self._sign, self._words, self._place = label("second"), label("", wrap=True), label("place", wrap=True)
        self._sign.setFixedWidth(14)
        self._sign.setAlignment(Qt.AlignmentFlag.AlignTop)
        right = QVBoxLayout()
        right.setSpacing(0)
        row = QHBoxLayout(self)
        row.setContentsMargins(4, 2, 4, 2)
        row.setSpacing(6)
        row.addWidget(self._sign, 0, Qt.AlignmentFlag.AlignTop)
        row.addLayout(right, 1)
        for widget in (self._words, self._place):
            right.addWidget(widget)
        for widget in (self._sign, self._words, self._place):
            widget.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        policy = QSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Minimum)
        policy.setHeightForWidth(True)
        self.setSizePolicy(policy)

    def show_finding(self, finding: Finding, place: str) -> None:
        """Show ``finding``; ``place`` is where it leads, in words."""
        self.finding = finding
        self._sign.setText(MARKS[finding.severity])
        _give_role(self._sign, _ROLES[finding.severity])
        self._words.setText(with_full_stop(finding.text))
        self._place.setText(place)
        self.setAccessibleName(f"{finding.severity.value}: {finding.text} {place}")

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Follow with Enter too, walk the list with the arrows."""
        step = _STEPS.get(Qt.Key(event.key()))
        if step is not None:
            self.walked.emit(step)
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.click()
        else:
            super().keyPressEvent(event)

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Tell the list where the keys are."""
        super().focusInEvent(event)
        self.focused.emit()

    def enterEvent(self, event: QEnterEvent) -> None:
        """Look alive under the pointer."""
        super().enterEvent(event)
        self.update()

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Tint the ground under pointer and focus; frame it where the keys are."""
        if not (self.hasFocus() or self.underMouse()):
            return
        painter, colours = QPainter(self), self.palette()
        painter.fillRect(self.rect(), colours.color(QPalette.ColorRole.Highlight))
        if self.hasFocus():
            painter.setPen(colours.color(QPalette.ColorRole.Link))
            painter.drawRect(self.rect().adjusted(0, 0, -1, -1))


class FindingsList(QWidget):
    """List findings, the gravest first; one stop for Tab, the arrows walk it. ``followed``: the place of one."""

    followed = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self._none = label("second", "No findings.")
        self._links: list[FindingLink] = []
        self._here = 0
        self._box = QVBoxLayout(self)
        self._box.setContentsMargins(0, 0, 0, 0)
        self._box.setSpacing(2)
        self._box.addWidget(self._none)
        self.setAccessibleName("Findings")

    @property
    def links(self) -> Sequence[FindingLink]:
        """Return the links that are shown."""
        return [link for link in self._links if link.finding is not None]

    def show_standing(self, standing: Standing) -> None:
        """Show the findings of ``standing``; a sentence says so where there are none."""
        order = list(Severity)
        ranked = sorted(standing.findings, key=lambda finding: order.index(finding.severity))
        while len(self._links) < len(ranked):
            self._add_link()
        for number, link in enumerate(self._links):
            if number < len(ranked):
                if link.finding != ranked[number]:
                    link.show_finding(ranked[number], place_words(standing, ranked[number].place))
            else:
                link.finding = None
            link.setVisible(number < len(ranked))
        self._none.setVisible(not ranked)
        self._mark(min(self._here, max(len(ranked) - 1, 0)))

    def _add_link(self) -> None:
        link, number = FindingLink(), len(self._links)
        link.clicked.connect(lambda: self._follow(link))
        link.walked.connect(lambda step: self._walk(number + step))
        link.focused.connect(lambda: self._mark(number))
        self._links.append(link)
        self._box.addWidget(link)

    def _follow(self, link: FindingLink) -> None:
        if link.finding is not None:
            self.followed.emit(link.finding.place)

    def _walk(self, number: int) -> None:
        if 0 <= number < len(self.links):
            self._links[number].setFocus(Qt.FocusReason.TabFocusReason)

    def _mark(self, number: int) -> None:
        """Let Tab stop at one link only."""
        self._here = number
        for other, link in enumerate(self._links):
            link.setFocusPolicy(Qt.FocusPolicy.StrongFocus if other == number else Qt.FocusPolicy.ClickFocus)


class CautionsList(QWidget):
    """List cautions, each with the mark of one."""

    def __init__(self) -> None:
        super().__init__()
        self._shown: tuple[str, ...] = ()
        self._rows: list[QLabel] = []
        self._grid = QGridLayout(self)
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setHorizontalSpacing(6)
        self._grid.setVerticalSpacing(1)
        self._grid.setColumnStretch(1, 1)

    def show_cautions(self, cautions: Sequence[str]) -> None:
        """Show these cautions in place of those before."""
        if tuple(cautions) == self._shown:
            return
        self._shown = tuple(cautions)
        for row in self._rows:
            row.setParent(None)
            row.deleteLater()
        self._rows = []
        for number, caution in enumerate(cautions):
            for column, words in enumerate((MARKS[Severity.QUERY], caution)):
                row = label("second", words, wrap=column > 0)
                row.setAlignment(Qt.AlignmentFlag.AlignTop)
                self._grid.addWidget(row, number, column)
                self._rows.append(row)


def _give_role(widget: QLabel, role: str) -> None:
    if widget.property("role") != role:
        widget.setProperty("role", role)
        widget.style().unpolish(widget)
        widget.style().polish(widget)
