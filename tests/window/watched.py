"""The real window with an eye in it: each line on standard input asks what it shows, the answer is a line of JSON.

``look`` and ``stare`` ask for the window on a case, ``scene`` for whatever is to be answered now: menu, dialog, window.

Nothing of the program is replaced. What is read are the widgets themselves and the marks on the charts, in pixels.
"""

import hashlib
import json
import sys
from pathlib import Path
from typing import Any

from PySide6.QtCore import QPoint, QSocketNotifier
from PySide6.QtWidgets import (
    QAbstractButton,
    QAbstractSpinBox,
    QApplication,
    QComboBox,
    QLineEdit,
    QMenu,
    QMenuBar,
    QPushButton,
    QWidget,
)

from creditdesk.desk.app import make_application, run
from creditdesk.desk.tables.rows import RowKind
from creditdesk.desk.window import Window

Json = dict[str, Any]


def seen(*, with_pixels: bool) -> Json:
    """Return everything a test wants to know of the open window, or that there is none yet, or no case in it."""
    windows = [widget for widget in QApplication.topLevelWidgets() if isinstance(widget, Window)]
    if not windows or not windows[0].isVisible() or windows[0]._view is None:
        return {"settled": False}
    window = windows[0]
    verdict = window.standing.verdict
    return {
        "settled": window.settled,
        "obligor": window.header.obligor.text(),
        "state": window.header.state.text(),
        "notice": window.header.notice.accessibleName(),
        "recorded": window.recorded.text(),
        "message": window.statusBar().currentMessage(),
        "standing": {
            "pd": verdict.pd.text(),
            "interval": verdict.interval.text(),
            "grade": verdict.plate.grade.text(),
            "counts": window.counts.text(),
            "cells": cells(window),
            **charts(window),
            "pixels": [pixels(window.standing), pixels(window.figures)] if with_pixels else [],
        },
        "current": current(window),
        "rows": {row.key: number for number, row in enumerate(window.figures.model.rows)},
        "places": places(window, window.figures.model.periods - 1),
        "firsts": places(window, 0),
        "sheet": sheet(window),
        "pencil": pencil(window, with_pixels=with_pixels),
        "standing width": window.standing.width(),
        "focus": focused(),
        "ratios": ratios(window),
        "buttons": {one.text(): middle(one) for one in window.findChildren(QPushButton) if one.isVisible()},
        "dialog": dialog(),
    }


def cells(window: Window) -> dict[str, list[str]]:
    """Return the amounts shown of each line and sum, period by period."""
    model = window.figures.model
    shown = (RowKind.LINE, RowKind.SUBTOTAL)
    return {
        row.key: [str(model.place(row.key, period).data() or "") for period in range(model.periods)]
        for row in model.rows
        if row.kind in shown
    }


def current(window: Window) -> list[object]:
    """Return key and period of the cell the cursor stands on, its row's number first."""
    index = window.figures.table.currentIndex()
    if not index.isValid():
        return [-1, "", -1]
    return [index.row(), window.figures.model.rows[index.row()].key, index.column() - 1]


def focused() -> str:
    """Return the name of what has the keyboard."""
    widget = QApplication.focusWidget()
    return widget.accessibleName() if widget is not None else ""


def sheet(window: Window) -> str:
    """Return the title of the sheet in front."""
    return str(getattr(window.stack.currentWidget(), "title", ""))


def pencil(window: Window, *, with_pixels: bool) -> Json:
    """Return what stands in pencil: in the Standing, and on its sheet while that is in front."""
    line = window.standing.verdict.pencil
    shown: Json = {"words": line.words.words if line.isVisible() else "", "key": "", "cells": {}, "pixels": []}
    if sheet(window) == "Pencil":
        model = window.pencil.model
        shown["key"] = window.pencil.table.key
        shown["active"] = window.pencil.draft.active
        shown["cells"] = {row.key: model.cell(row).pencil for row in model.rows if row.key}
        shown["pixels"] = [pixels(window.standing), pixels(window.stack)] if with_pixels else []
    return shown


def ratios(window: Window) -> dict[str, list[str]]:
    """Return what the sheet Ratios shows of each ratio, period by period; nothing while it is not in front."""
    if sheet(window) != "Ratios":
        return {}
    model = window.ratios.model
    return {
        row.key: [str(model.cell(row.key, period).data() or "") for period in range(model.periods)]
        for row in model.rows
        if row.key
    }


def places(window: Window, period: int) -> dict[str, list[Any]]:
    """Return row number and the screen position of a period's cell, for the rows in sight."""
    table, model = window.figures.table, window.figures.model
    found = {}
    for row in model.rows:
        index = model.place(row.key, period)
        rect = table.visualRect(index)
        if row.kind is RowKind.LINE and table.viewport().rect().contains(rect.center()):
            at = table.viewport().mapToGlobal(rect.center())
            found[row.key] = [index.row(), at.x(), at.y()]
    return found


def charts(window: Window) -> Json:
    """Return texts and marks of both charts, each with where it stands in pixels from the lower left corner."""
    canvases = window.standing._canvases
    if canvases is None:
        return {}
    return {"curve": drawn(canvases.curve), "contributions": drawn(canvases.contributions)}


def drawn(canvas: Any) -> Json:  # noqa: ANN401  a matplotlib canvas, which is not imported here
    """Return what is on a canvas: [text, x, y] of words, [kind, left, bottom, right, top, colour] of filled marks."""
    texts, marks = [], []
    renderer = canvas.get_renderer()
    for artist in canvas.figure.get_children():
        kind = type(artist).__name__
        if kind not in ("Text", "PathPatch"):
            continue
        box = artist.get_window_extent(renderer)
        if kind == "Text":
            texts.append([artist.get_text(), (box.x0 + box.x1) / 2, (box.y0 + box.y1) / 2])
        elif artist.get_fill():
            path = artist.get_path()
            corners = artist.get_transform().transform_path(path).get_extents()
            shape = "round" if path.codes is not None and 4 in path.codes else f"{len(path.vertices) - 1} corners"
            marks.append([shape, *corners.extents.tolist(), list(artist.get_facecolor())])
    return {"texts": texts, "marks": marks}


def pixels(widget: QWidget) -> str:
    """Return a digest of what the display itself shows where ``widget`` is, once all of it is painted anew.

    What is painted bit by bit may leave half-covered pixels at its edges, and those are no part of a state.
    """
    for part in (widget, *widget.findChildren(QWidget)):
        part.repaint()
    corner = widget.mapToGlobal(QPoint(0, 0))
    image = widget.screen().grabWindow(0, corner.x(), corner.y(), widget.width(), widget.height()).toImage()
    return hashlib.sha256(bytes(image.constBits())).hexdigest()


def middle(widget: QWidget) -> list[int]:
    """Return where to click a widget."""
    at = widget.mapToGlobal(widget.rect().center())
    return [at.x(), at.y()]


def dialog() -> Json | None:
    """Return the title, the fields and the focus of the dialog that is open."""
    box = QApplication.activeModalWidget()
    if box is None:
        return None
    focus = QApplication.focusWidget()
    return {
        "title": box.windowTitle(),
        "text": box.text() if hasattr(box, "text") else "",
        "fields": {field.accessibleName(): field.text() for field in box.findChildren(QLineEdit)},
        "focus": focus.accessibleName() if focus is not None else "",
    }


def scene() -> Json:
    """Return title, focus, fields, buttons and menu entries of what is to be answered now, with where to click them."""
    over = QApplication.activePopupWidget() or QApplication.activeModalWidget()
    roots = [over] if over is not None else [one for one in QApplication.topLevelWidgets() if one.isVisible()]
    inside = [widget for root in roots for widget in (root, *root.findChildren(QWidget)) if widget.isVisible()]
    focus = QApplication.focusWidget()
    things: dict[str, Json] = {}
    for widget in inside:
        if isinstance(widget, (QAbstractButton, QLineEdit, QComboBox, QAbstractSpinBox)) and name_of(widget):
            things.setdefault(name_of(widget), thing(widget))
    return {
        "settled": True,
        "title": roots[0].windowTitle() if roots else "",
        "focus": name_of(focus) if focus is not None else "",
        "chosen": chosen_in(focus),
        "things": things,
        "menu": {name: at for widget in inside for name, at in entries(widget)},
    }


def name_of(widget: QWidget) -> str:
    """Return what a person who hears the screen is told, else what is written on it, else its name in the code."""
    written = widget.text().replace("&", "") if isinstance(widget, QAbstractButton) else ""
    return widget.accessibleName() or written or widget.objectName()


def chosen_in(widget: QWidget | None) -> list[object]:
    """Return what is selected in a field and where the cursor stands: Tab goes through the parts of a date."""
    lines = [widget] if isinstance(widget, QLineEdit) else widget.findChildren(QLineEdit) if widget is not None else []
    return [(line.selectedText(), line.cursorPosition()) for line in lines]


def thing(widget: QWidget) -> Json:
    """Return where a field or button is, what it holds, and where its lower arrow would be if it has one."""
    text = widget.currentText() if isinstance(widget, QComboBox) else widget.text()  # type: ignore[attr-defined]
    corner = widget.mapToGlobal(QPoint(widget.width() - 8, 3 * widget.height() // 4))
    return {"at": middle(widget), "text": text, "enabled": widget.isEnabled(), "lower": [corner.x(), corner.y()]}


def entries(widget: QWidget) -> list[tuple[str, list[int]]]:
    """Return the entries of a menu or menu bar with where to click them."""
    if not isinstance(widget, (QMenu, QMenuBar)):
        return []
    shown = [(action, widget.actionGeometry(action)) for action in widget.actions() if action.isVisible()]
    places = [(action.text(), widget.mapToGlobal(rect.center())) for action, rect in shown]
    return [(text.partition("\t")[0].replace("&", ""), [at.x(), at.y()]) for text, at in places]


def answer() -> None:
    """Answer one question, or end with the one who asks."""
    question = sys.stdin.readline()
    if not question:
        QApplication.quit()
        return
    shown = scene() if question == "scene\n" else seen(with_pixels=question == "stare\n")
    sys.stdout.write(json.dumps(shown) + "\n")
    sys.stdout.flush()


if __name__ == "__main__":
    make_application()
    notifier = QSocketNotifier(sys.stdin.fileno(), QSocketNotifier.Type.Read)
    notifier.activated.connect(answer)
    case = Path(sys.argv[1]) if len(sys.argv) > 1 else None
    sys.exit(run(case))
