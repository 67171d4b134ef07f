"""Keep a study in the case, change what is kept, choose whether the memo prints it, take it out again."""

from collections.abc import Callable

import msgspec
from PySide6.QtCore import Signal
from PySide6.QtWidgets import QCheckBox, QHBoxLayout, QPushButton, QVBoxLayout, QWidget

from creditdesk.base.errors import UserError
from creditdesk.case.pencil_commands import AddStudy, RemoveStudy, SetStudy
from creditdesk.desk.fields import set_role
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.study_forms import Choice
from creditdesk.scenario.specs import StudySpec

_NEW = -1


class Keeper(QWidget):
    """Hold the studies of one kind that stand on the scenario at hand; each edit is one command.

    ``wanted``: another kept study was chosen and is to be shown. ``question``: gives the study in the form.
    """

    wanted = Signal(object)
    fault = Signal(str)

    def __init__(
        self, draft: PencilDraft, kind: type, question: Callable[[], StudySpec], *, wide: bool = False
    ) -> None:
        super().__init__()
        self._draft, self._kind, self._question = draft, kind, question
        self._at = _NEW
        self._shown: object = None
        self.kept = Choice("Studies kept in the case", 10)
        self.keep, self.remove = QPushButton("Keep in the case"), QPushButton("Take out")
        self.in_memo = QCheckBox("in the memo")
        self.in_memo.setToolTip("Keep the study in the case and print it in the memo")
        for button in (self.keep, self.remove):
            set_role(button, "small")
        self._lay_out(wide=wide)
        self.kept.changed.connect(self._on_chosen)
        self.keep.clicked.connect(lambda: self._put(in_memo=self.in_memo.isChecked()))
        self.in_memo.clicked.connect(lambda wanted: self._put(in_memo=wanted))
        self.remove.clicked.connect(self._take_out)

    @property
    def chosen(self) -> StudySpec | None:
        """Return the kept study at hand."""
        return self._draft.case.studies[self._at] if self._at in self._places() else None

    def show_kept(self) -> None:
        """Show what the case keeps; where the study at hand was changed or is gone, ask for another one to be shown."""
        places = self._places()
        if self._at not in places:
            self._at = places[0] if places else _NEW
        self.kept.offer([(place, f"Kept {number}") for number, place in enumerate(places, 1)] + [(_NEW, "Another one")])
        self.kept.put(self._at)
        self.kept.setVisible(bool(places))
        now = (self._draft.active, self._at, self.chosen)
        if now != self._shown:
            self._shown = now
            if self.chosen is not None:
                self.wanted.emit(self.chosen)

    def show_state(self) -> None:
        """Show whether the form is what is kept."""
        kept, asked = self.chosen, self._asked()
        same = kept is not None and asked is not None and asked == msgspec.structs.replace(kept, in_memo=False)
        open_ = asked is not None and not self._draft.session.read_only and self._draft.board is not None
        self.keep.setText("Keep in the case" if kept is None else "Kept" if same else "Keep the change")
        self.keep.setEnabled(open_ and not same)
        self.in_memo.setEnabled(open_)
        self.in_memo.setChecked(kept is not None and kept.in_memo)
        self.remove.setVisible(kept is not None)
        self.remove.setEnabled(not self._draft.session.read_only)

    def _places(self) -> list[int]:
        """Return where in the case's list the studies of this kind on this scenario stand."""
        studies = enumerate(self._draft.case.studies)
        return [place for place, one in studies if isinstance(one, self._kind) and one.scenario == self._draft.active]

    def _asked(self) -> StudySpec | None:
        try:
            return self._question()
        except UserError:
            return None

    def _put(self, *, in_memo: bool) -> None:
        asked = self._asked()
        if asked is None:
            self.fault.emit("The form has to be filled before the study can be kept.")
            self.show_state()
            return
        study = msgspec.structs.replace(asked, in_memo=in_memo)
        if self.chosen is None:
            self._at = len(self._draft.case.studies)
            self._shown = (self._draft.active, self._at, study)
            self._draft.do(AddStudy(study))
        else:
            self._shown = (self._draft.active, self._at, study)
            self._draft.do(SetStudy(self._at, study))

    def _take_out(self) -> None:
        if self.chosen is not None:
            self._draft.do(RemoveStudy(self._at))

    def _on_chosen(self) -> None:
        self._at = int(str(self.kept.value))
        self._shown = (self._draft.active, self._at, self.chosen)
        if self.chosen is not None:
            self.wanted.emit(self.chosen)
        self.show_state()

    def _lay_out(self, *, wide: bool) -> None:
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(4)
        lines = ((self.keep, self.in_memo), (self.kept, self.remove))
        for widgets in ((*lines[0], *lines[1]),) if wide else lines:
            row = QHBoxLayout()
            row.setSpacing(8)
            for widget in widgets:
                row.addWidget(widget)
            row.addStretch(1)
            box.addLayout(row)
