"""Everything that can be used has a name that is read aloud, and can be reached by keys."""

from collections.abc import Callable

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QAbstractButton,
    QAbstractItemView,
    QAbstractSpinBox,
    QComboBox,
    QHeaderView,
    QLineEdit,
    QPlainTextEdit,
    QScrollArea,
    QWidget,
)
from pytestqt.qtbot import QtBot

from creditdesk.desk.about import About, Keys, key_sections
from creditdesk.desk.actions import placed_actions
from creditdesk.desk.newcase import NewCase
from creditdesk.desk.revert import RevertDialog
from creditdesk.desk.signdialogs import CountersignDialog, NewIdentity, SignDialog
from creditdesk.desk.start import Start
from creditdesk.desk.window import Window

USED = (QAbstractButton, QLineEdit, QPlainTextEdit, QAbstractItemView, QComboBox, QAbstractSpinBox, QScrollArea)
DIALOGS: dict[str, Callable[[Window], QWidget]] = {
    "sign": lambda window: SignDialog(window, "memo.pdf"),
    "countersign": lambda window: CountersignDialog(window, window.issuer._look),
    "identity": NewIdentity,
    "keys": lambda window: Keys(window, key_sections(placed_actions(window.menuBar()))),
    "about": lambda window: About(window, window.session.standing),
    "revert": lambda window: RevertDialog(window, window.session.trail()),
    "new case": NewCase,
    "start": lambda _window: Start(),
}


def _used(widget: QWidget) -> list[QWidget]:
    """Return what can be used in a widget, without the parts that Qt makes of one control."""
    return [
        child
        for child in widget.findChildren(QWidget)
        if isinstance(child, USED)
        and not isinstance(child, QHeaderView)
        and not child.objectName().startswith("qt_")
        and not _is_part(child)
    ]


def _is_part(widget: QWidget) -> bool:
    """Say whether a widget belongs to a control that is named as a whole: the list of a combo box, a table's corner."""
    above = widget.parentWidget()
    while above is not None:
        if isinstance(above, QAbstractSpinBox | QComboBox | QHeaderView | QAbstractItemView):
            return True
        above = above.parentWidget()
    return False


def _nameless(widget: QWidget) -> list[str]:
    return [
        f"{type(child).__name__} in {type(child.parentWidget()).__name__}"
        for child in _used(widget)
        if not (child.accessibleName() or (isinstance(child, QAbstractButton) and child.text()))
    ]


def test_every_control_of_the_window_has_a_name(window: Window) -> None:
    assert len(_used(window)) > 40
    assert _nameless(window) == []


@pytest.mark.parametrize("name", DIALOGS)
def test_every_control_of_a_dialog_has_a_name_and_takes_the_keyboard(qtbot: QtBot, window: Window, name: str) -> None:
    dialog = DIALOGS[name](window)
    qtbot.addWidget(dialog)
    dialog.show()
    controls = _used(dialog)
    assert controls
    assert _nameless(dialog) == []
    deaf = [child for child in controls if not isinstance(child, QScrollArea) and not _listens(child)]
    assert deaf == []


def _listens(widget: QWidget) -> bool:
    return bool(widget.focusPolicy() & Qt.FocusPolicy.TabFocus) or not widget.isEnabled()
