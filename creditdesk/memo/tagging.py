"""Flowables that say what they are: paragraphs, headings, tables, drawings, decoration, places to sign.

They draw on a ``TaggedCanvas`` (see ``structure``). Roles are the standard structure types of ISO 32000-1, 14.8.4.
"""

from collections.abc import Callable, Sequence
from typing import Any, cast

from reportlab.lib.styles import ParagraphStyle
from reportlab.platypus import Flowable, Paragraph, Table

from creditdesk.memo.fonts import register_fonts
from creditdesk.memo.structure import Element, TaggedCanvas

Draw = Callable[[TaggedCanvas, float, float, float, float], None]

DASH = "–"
"""The mark of a list's item where no other is given."""
_SIGNED = 1.35
"""How far in ems the text of a list stands in where its marks are signs."""


class TaggedParagraph(Paragraph):
    """Print a paragraph as an element: P, H1 to H6, Caption, LBody and the like."""

    def __init__(
        self,
        text: str | None,
        style: ParagraphStyle,
        element: Element | str = "P",
        **options: Any,  # noqa: ANN401
    ) -> None:
        register_fonts()
        super().__init__(cast("str", text), style, **options)  # None: reportlab makes the halves from fragments
        self.element = Element(element) if isinstance(element, str) else element

    def split(self, availWidth: float, availHeight: float) -> list[Flowable]:
        """Break the paragraph; its parts stay one element."""
        parts: list[Flowable] = super().split(availWidth, availHeight)
        for part in parts:
            cast("TaggedParagraph", part).element = self.element
        return parts

    def draw(self) -> None:
        """Draw the lines as the element's content."""
        with canvas_of(self).marked(self.element):
            super().draw()


def tagged_list(items: Sequence[str], style: ParagraphStyle, marks: Sequence[str] = ()) -> list[Flowable]:
    """Return the paragraphs of a list, each item with its mark in the style's own font, hanging.

    ``marks`` holds one for each item, or none: then each has a dash.
    """
    whole = Element("L")
    hanging = ParagraphStyle(
        f"{style.name} item",
        parent=style,
        bulletFontName=style.fontName,
        bulletFontSize=style.fontSize,
        bulletIndent=style.leftIndent,
        leftIndent=style.leftIndent + (_SIGNED if marks else 1.0) * style.fontSize,
    )
    return [
        TaggedParagraph(item, hanging, Element("LBody", Element("LI", whole)), bulletText=mark)
        for item, mark in zip(items, marks or [DASH] * len(items), strict=True)
    ]


class TaggedDrawing(Flowable):
    """Draw a figure, which is read as its alternative text; ``draw_at`` gets canvas, x, y, width and height."""

    def __init__(self, draw_at: Draw, width: float, height: float, alternative: str) -> None:
        super().__init__()
        self.width, self.height = width, height
        self.element = Element("Figure", alternative=alternative)
        self._draw_at = draw_at

    def draw(self) -> None:
        """Draw the figure at its place."""
        canvas = canvas_of(self)
        with canvas.marked(self.element, (0, 0, self.width, self.height)):
            self._draw_at(canvas, 0, 0, self.width, self.height)


class Decoration(Flowable):
    """Draw a flowable that is no content, such as a rule."""

    def __init__(self, inner: Flowable) -> None:
        super().__init__()
        self._inner = inner

    def wrap(self, availWidth: float, availHeight: float) -> tuple[float, float]:
        """Return the inner flowable's size."""
        self.width, self.height = self._inner.wrap(availWidth, availHeight)
        return self.width, self.height

    def getSpaceBefore(self) -> float:
        """Return the inner flowable's space above."""
        return self._inner.getSpaceBefore()

    def getSpaceAfter(self) -> float:
        """Return the inner flowable's space below."""
        return self._inner.getSpaceAfter()

    def draw(self) -> None:
        """Draw the inner flowable as an artifact."""
        canvas = canvas_of(self)
        with canvas.artifact():
            self._inner.drawOn(canvas, 0, 0)


class SignaturePlace(Flowable):
    """Keep a rectangle free for a signature field; ``tooltip`` is what is read for it."""

    def __init__(self, name: str, tooltip: str, width: float, height: float) -> None:
        super().__init__()
        self.name, self.tooltip = name, tooltip
        self.width, self.height = width, height

    def draw(self) -> None:
        """Set the field; the signature brings its own drawing."""
        canvas_of(self).signature_field(self.name, self.tooltip, (0, 0, self.width, self.height))


class TableTags:
    """Tag a table of data: pass an instance, used for one table only, as its ``renderCB``.

    The first ``header_rows`` rows head their columns and the first ``header_columns`` columns their rows. A cell of
    plain text is one stretch of content; in a cell of flowables each tagged one is an element of its own. On further
    pages the repeated head is an artifact, lines and backgrounds always are.
    """

    def __init__(self, header_rows: int = 1, header_columns: int = 0) -> None:
        self.element = Element("Table")
        self._header_rows, self._header_columns = header_rows, header_columns
        self._repeated_rows = 0
        self._cell_is_container = False

    def __call__(self, table: Table, event: str, *details: Any) -> None:  # noqa: ANN401  # reportlab's own details
        """Follow reportlab through the drawing of the table."""
        canvas = canvas_of(table)
        if event == "startTable":
            self._repeated_rows = int(table.repeatRows) if canvas.structure.knows(self.element) else 0
            canvas.structure.enter(self.element)
        elif event == "endTable":
            canvas.structure.leave()
        elif event == "startRow":
            self._start_row(canvas, details[0])
        elif event == "endRow":
            self._end_row(canvas)
        elif event == "startCell":
            self._start_cell(canvas, table, details[0], details[1], details[2])
        elif event == "endCell":
            self._end_cell(canvas)
        else:
            as_decoration(table, event)

    def _start_row(self, canvas: TaggedCanvas, row: int) -> None:
        self._row_is_repeated = row < self._repeated_rows
        if self._row_is_repeated:
            canvas.begin_artifact("Pagination")
        else:
            canvas.structure.enter(Element("TR"))

    def _end_row(self, canvas: TaggedCanvas) -> None:
        if self._row_is_repeated:
            canvas.end()
        else:
            canvas.structure.leave()

    def _start_cell(self, canvas: TaggedCanvas, table: Table, row: int, column: int, content: object) -> None:
        self._cell_is_container = _has_tagged(content) and not self._row_is_repeated
        cell = self._cell(table, row, column, content)
        if self._cell_is_container:
            canvas.structure.enter(cell)
        else:
            canvas.begin(cell)

    def _end_cell(self, canvas: TaggedCanvas) -> None:
        if self._cell_is_container:
            canvas.structure.leave()
        else:
            canvas.end()

    def _cell(self, table: Table, row: int, column: int, content: object) -> Element:
        first_column, first_row, last_column, last_row = _spans(table).get((column, row)) or (column, row, column, row)
        columns, rows = last_column - first_column + 1, last_row - first_row + 1
        heads_column, heads_row = row < self._header_rows and self._repeated_rows == 0, column < self._header_columns
        if content in ("", None) or not (heads_column or heads_row):  # an empty head would head its column in silence
            return Element("TD", columns=columns, rows=rows)
        scope = "Both" if heads_column and heads_row else "Column" if heads_column else "Row"
        return Element("TH", scope=scope, columns=columns, rows=rows)


def as_decoration(table: Table, event: str, *_details: object) -> None:
    """Tag a table that only lays things out: its lines and backgrounds are artifacts, its cells tag themselves."""
    if event in ("startBG", "startLines"):
        canvas_of(table).begin_artifact()
    elif event in ("endBG", "endLines"):
        canvas_of(table).end()


def canvas_of(flowable: Flowable) -> TaggedCanvas:
    """Return the canvas a flowable is being drawn on."""
    return cast("TaggedCanvas", flowable.canv)


def _has_tagged(content: object) -> bool:
    flowables = content if isinstance(content, list | tuple) else [content]
    return any(
        isinstance(one, TaggedParagraph | TaggedDrawing | Decoration | SignaturePlace)
        or getattr(one, "_renderCB", None) is not None
        for one in flowables
    )


def _spans(table: Table) -> dict[tuple[int, int], tuple[int, int, int, int] | None]:
    return getattr(table, "_spanRanges", {})
