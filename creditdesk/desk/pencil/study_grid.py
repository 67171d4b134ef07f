"""The PD over two things that move: shades, lines between grades, where ink and pencil stand, and the way there."""

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt

from creditdesk.base.errors import UserError
from creditdesk.base.palette import Palette
from creditdesk.case.study_words import position_words
from creditdesk.desk.pencil.draft import PencilDraft
from creditdesk.desk.pencil.study_canvases import StudyChart, grid_chart
from creditdesk.desk.pencil.study_forms import RangeForm
from creditdesk.desk.pencil.study_marks import found_mark, put_marks, stands_at
from creditdesk.desk.pencil.study_page import Asked, KeptPage
from creditdesk.scenario.grid import Grid
from creditdesk.scenario.specs import GridSpec, Range

if TYPE_CHECKING:
    from creditdesk.charts.pdgrid import Axis, GridPicture

_LOW = 150
Dot = tuple[float, float] | None


class GridPage(KeptPage[GridSpec]):
    """Show the grid; a click, or Enter on the point the keys came to, puts the pencil there."""

    kind = GridSpec
    title, short = "Grid", "Grid"
    hint = "The PD over any two things that move, with the lines where the grade changes."

    def __init__(self, draft: PencilDraft) -> None:
        super().__init__(draft)
        self.across, self.up = RangeForm("Across"), RangeForm("Up")
        self.chart: StudyChart[GridPicture] | None = None
        self._grid: Grid | None = None
        for form in (self.across, self.up):
            self.form.addWidget(form)
            form.changed.connect(self.touched)
            form.faulted.connect(self.fault)

    def offer_choices(self) -> None:
        """Offer the targets of the case."""
        self.across.offer(self.draft.targets)
        self.up.offer(self.draft.targets)

    def spec(self) -> GridSpec:
        """Return the grid in the form."""
        return GridSpec(across=self.across.range, up=self.up.range)

    def put_spec(self, spec: GridSpec) -> None:
        """Show a grid in the form."""
        self.across.put(spec.across)
        self.up.put(spec.up)

    def show_result(self, asked: Asked, result: Grid) -> None:
        """Draw the grid."""
        self._grid = result
        if self.chart is None or self.chart.palette is not self.palette_shown:
            self._put_chart()
        if self.chart is not None:
            picture = grid_picture(self.draft, asked, result)
            self.chart.show(picture, lambda: grid_numbers(picture))

    def show_draft(self) -> None:
        """Show the draft as it stands; the dot of the pencil goes along."""
        super().show_draft()
        if self.answered is None or self._grid is None or self.chart is None or self.chart.shown is None:
            return
        if grid_dots(self.draft, self.answered, self._grid) != self.chart.shown.dots:
            self.show_result(self.answered, self._grid)

    def beside(self) -> frozenset[str]:
        """Name what the grid itself moves: where it stands changes nothing but the dot."""
        try:
            spec = self.spec()
        except UserError:
            return frozenset()
        return frozenset((spec.across.target, spec.up.target))

    def recolour(self, palette: Palette) -> None:
        """Draw in another palette."""
        super().recolour(palette)
        if self.answered is not None and self._grid is not None:
            self.show_result(self.answered, self._grid)

    def _put_chart(self) -> None:
        if self.chart is not None:
            self.answer.removeWidget(self.chart.canvas)
            self.chart.canvas.deleteLater()
        self.chart = grid_chart(self.palette_shown)
        self.chart.canvas.setMinimumHeight(_LOW)
        self.chart.canvas.setCursor(Qt.CursorShape.CrossCursor)
        self.chart.canvas.chosen.connect(lambda key, _target: self._put_pencil(key))
        self.answer.addWidget(self.chart.canvas, 1)

    def _put_pencil(self, key: str) -> None:
        """Mark both targets where the point of the grid stands."""
        if self._grid is None:
            return
        row, column = map(int, key.split(","))
        grid = self._grid
        sides = ((grid.spec.across, grid.across[column]), (grid.spec.up, grid.up[row]))
        put_marks(self.draft, [found_mark(one.target, one.kind, float(at)) for one, at in sides])


def grid_picture(draft: PencilDraft, asked: Asked, found: Grid) -> "GridPicture":
    """Return a grid with its words; the ink's dot only where the scenario marks nothing else."""
    from creditdesk.charts.pdgrid import GridPicture

    house, spec = draft.session.house, found.spec
    grades = house.scale.keys
    return GridPicture(
        grid=found,
        across=_axis(draft, spec.across),
        up=_axis(draft, spec.up),
        grades=grades,
        upper=[house.scale.upper(key) for key in grades],
        dots=grid_dots(draft, asked, found),
    )


def grid_dots(draft: PencilDraft, asked: Asked, found: Grid) -> tuple[Dot, Dot]:
    """Return where ink and scenario stand on a grid: the ink only where the scenario marks nothing else."""
    sides = (found.spec.across, found.spec.up)
    marked = {mark.target for mark in asked.scenario.marks} if asked.scenario is not None else set[str]()
    moved, recorded = marked - {side.target for side in sides}, draft.recorded
    ink = None if moved else stands_at(draft, sides, None)
    return ink, None if recorded is None else stands_at(draft, sides, recorded)


def grid_numbers(picture: "GridPicture") -> str:
    """Return the PDs of a grid as a table, the positions across at its head."""
    found = picture.grid
    head = [f"{picture.up.title} \\ {picture.across.title}", *(f"{at:.12g}" for at in found.across)]
    rows = ([f"{at:.12g}", *map(repr, row)] for at, row in zip(found.up.tolist(), found.pd.tolist(), strict=True))
    return "\n".join("\t".join(cells) for cells in (head, *rows))


def _axis(draft: PencilDraft, along: Range) -> "Axis":
    from creditdesk.charts.pdgrid import Axis

    target = draft.targets.find(along.target)
    if target is None:
        return Axis(along.target, lambda at: f"{at:g}")
    return Axis(target.label, lambda at: position_words(target, along.kind, at))
