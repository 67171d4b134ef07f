"""What is shown of long work: its words, how far it is, and a way to stop it."""

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QHBoxLayout, QProgressBar, QPushButton, QWidget

from creditdesk.desk.frame import label
from creditdesk.desk.worker import Progress

_SHORT_MILLISECONDS = 150


class Busy(QWidget):
    """Show one piece of work at a time; what is over in a moment is not shown at all."""

    def __init__(self, what: str) -> None:
        super().__init__()
        self._progress: Progress | None = None
        self.words, self.bar, self.stop = label("second"), QProgressBar(), QPushButton("Stop")
        self.bar.setTextVisible(False)
        self.bar.setFixedSize(90, 6)
        self.bar.setAccessibleName(f"{what}: how far it is")
        self.stop.setAccessibleName(f"Stop: {what}")
        self.stop.setProperty("role", "small")
        self.stop.clicked.connect(self._on_stop)
        self._wait = QTimer(self, singleShot=True, interval=_SHORT_MILLISECONDS)
        self._wait.timeout.connect(self.show)
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(8)
        row.addWidget(self.words, 1)
        row.addWidget(self.bar)
        row.addWidget(self.stop)
        kept = self.sizePolicy()
        kept.setRetainSizeWhenHidden(True)
        self.setSizePolicy(kept)
        self.hide()

    def watch(self, progress: Progress, words: str) -> None:
        """Follow work that begins now."""
        self._progress = progress
        progress.told.connect(self._on_told)
        self.stop.setEnabled(True)
        self._on_told(words, 0, 0)
        self._wait.start()

    def done(self, progress: Progress) -> None:
        """Take the work away again that ``progress`` belongs to."""
        if progress is self._progress:
            self._progress = None
            self._wait.stop()
            self.hide()

    def _on_told(self, words: str, done: int, total: int) -> None:
        self.words.setText(words)
        self.words.setAccessibleName(words)
        self.bar.setRange(0, max(total, 1))
        self.bar.setValue(done)

    def _on_stop(self) -> None:
        if self._progress is not None:
            self._progress.stop()
            self.stop.setEnabled(False)
            self.words.setText("Stopping after this step")
