"""The studies of the scenario at hand, below the table."""

from PySide6.QtWidgets import QWidget

from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.session import Session


class StudiesPanel(QWidget):
    """Stand where the studies will be."""

    def __init__(self, session: Session, draft: PencilDraft) -> None:
        super().__init__()
        self._session, self._draft = session, draft
        self.setAccessibleName("Studies")

    def show_draft(self) -> None:
        """Show the draft as it stands."""
