"""The verdict: PD in large figures, its interval, the change against last year, the grade."""

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QHBoxLayout, QVBoxLayout, QWidget

from creditdesk.base.display import format_pd
from creditdesk.base.findings import Severity
from creditdesk.case.standing import Standing
from creditdesk.case.words import long_date
from creditdesk.desk.frame import label
from creditdesk.desk.pencilline import PencilLine


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
        bands = standing.curve.bands if standing.curve is not None else ()
        criteria = next((band.criteria for band in bands if band.grade == final), "")
        self.setToolTip("\n".join(part for part in (*standing.grade.reasons, criteria) if part))


class Verdict(QWidget):
    """Show PD, interval, change and grade."""

    def __init__(self) -> None:
        super().__init__()
        self.pd = label("pd")
        self.interval = label("", wrap=True)
        self.change = label("second", wrap=True)
        self.pencil = PencilLine()
        self.plate = GradePlate()
        self.caption = label("second", wrap=True)
        left = QVBoxLayout()
        left.setSpacing(0)
        for widget in (self.caption, self.pd, self.interval, self.change, self.pencil):
            left.addWidget(widget)
        left.addStretch(1)
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.addLayout(left, 1)
        row.addWidget(self.plate, 0, Qt.AlignmentFlag.AlignTop)

    def settle(self) -> None:
        """Take the height that what is shown needs at once, not in the next turn."""
        layout = self.layout()
        if layout is not None:
            layout.activate()

    def show_standing(self, standing: Standing, grades: int) -> None:
        """Show the numbers of ``standing``, or in words why there are none."""
        known = standing.pd_final is not None and standing.usable
        role = "pd" if known else "pd-words"
        if self.pd.property("role") != role:
            self.pd.setProperty("role", role)
            self.pd.style().unpolish(self.pd)
            self.pd.style().polish(self.pd)
            self.pd.setWordWrap(not known)
        self.caption.setText(caption_words(standing) if known else "Probability of default within a year")
        self.pd.setText(format_pd(standing.pd_final or 0.0) if known else no_pd_words(standing))
        self.interval.setText(interval_words(standing) if known else why_no_pd(standing))
        self.interval.setVisible(bool(self.interval.text()))
        self.change.setText(change_words(standing))
        self.plate.show_standing(standing, grades)


def caption_words(standing: Standing) -> str:
    """Say what the figure is and from which day on it counts."""
    return f"PD within a year, from {long_date(standing.pd_runs_from)}"


def interval_words(standing: Standing) -> str:
    """Word the interval and what it covers."""
    interval = standing.pd_interval
    if standing.pd_final is None or not standing.usable:
        return ""
    if interval is None:
        return "no interval: the model states no covariance"
    bounds = f"{100 * interval.level:.0f} % interval {format_pd(interval.low)} to {format_pd(interval.high)}"
    model = f"by the model {format_pd(standing.pd_calibrated or 0.0)}, " if _moved_by_hand(standing) else ""
    return f"{model}{bounds}, uncertainty of the fitted coefficients only"


def change_words(standing: Standing) -> str:
    """Word the way from last year's PD: up from 0.86 %, grade 5; or why there is nothing to compare with."""
    last = standing.last_year
    if last is None:
        return "no period a year before to compare with"
    if last.pd is None or last.pd_calibrated is None:
        return f"{last.label}: no PD to compare with"
    then = format_pd(last.pd) if last.grade == "none" else f"{format_pd(last.pd)}, grade {last.grade}"
    now = standing.pd_calibrated
    if now is None or not standing.usable:
        return f"{last.label}: {then}"
    model = "by the model " if _moved_by_hand(standing) else ""
    if format_pd(now) == format_pd(last.pd_calibrated):
        return f"{model}as in {last.label}: {then}"
    way = "▲ up" if now > last.pd_calibrated else "▼ down"
    return f"{model}{way} from {then}, in {last.label}"


def no_pd_words(standing: Standing) -> str:
    """Say that no PD is shown."""
    return "No probability of default" if standing.pd_final is None else "Not usable yet"


def why_no_pd(standing: Standing) -> str:
    """Say why no PD is shown: for want of one, or because of findings, the first of which is named."""
    if standing.pd_final is None:
        return ". ".join(reason.rstrip(".") for reason in standing.reasons) + "."
    stops = [finding.text for finding in standing.findings if finding.severity is Severity.STOP]
    first = f"■ {stops[0]} " if stops else ""
    return (
        f"{first}{'To be resolved first.' if len(stops) < 2 else f'To be resolved first, with {len(stops) - 1} more.'}"
    )


def _moved_by_hand(standing: Standing) -> bool:
    """Say whether floor, judgement or rules moved the PD that counts, as it is read, away from the model's."""
    own, final = standing.pd_calibrated, standing.pd_final
    return own is not None and final is not None and format_pd(own) != format_pd(final)
