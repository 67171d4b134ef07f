"""What is shown where no case was named: open one, begin one, or look at the demonstration."""

from pathlib import Path

from PySide6.QtCore import Signal
from PySide6.QtGui import QDragEnterEvent, QDropEvent
from PySide6.QtWidgets import QPushButton, QVBoxLayout, QWidget

from creditdesk.desk import files
from creditdesk.desk.frame import label
from creditdesk.house.shipped import resources_folder


class Start(QWidget):
    """Offer the first step; a case that is dropped here is opened."""

    open_asked = Signal(Path)
    new_asked = Signal(Path, object)

    def __init__(self) -> None:
        super().__init__()
        self.setWindowTitle("creditdesk")
        self.setObjectName("desk")
        self.setMinimumWidth(420)
        self.setAcceptDrops(True)
        box = QVBoxLayout(self)
        box.setContentsMargins(28, 22, 28, 24)
        box.setSpacing(10)
        box.addWidget(label("obligor", "creditdesk"))
        box.addWidget(
            label(
                "second", "One borrower at a time: figures in, a grade with its reasons, a signed memo out.", wrap=True
            )
        )
        for title, do in (
            ("New case…", lambda: files.new_case(self, self.new_asked.emit)),
            ("Open a case…", lambda: files.open_case(self, self.open_asked.emit)),
            ("Look at the demonstration (invented)", self._on_demo),
        ):
            button = QPushButton(title)
            button.clicked.connect(lambda _=False, do=do: do())
            box.addWidget(button)

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        """Take one file that is a case."""
        if _dropped_case(event) is not None:
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        """Open the case that is dropped."""
        path = _dropped_case(event)
        if path is not None:
            event.acceptProposedAction()
            self.open_asked.emit(path)

    def _on_demo(self) -> None:
        self.open_asked.emit(resources_folder() / "demo" / "brackwater-millworks.case.toml")


def _dropped_case(event: QDropEvent) -> Path | None:
    path = files.dropped_path(event.mimeData())
    return None if path is None or path.suffix.lower() == ".pdf" else path
