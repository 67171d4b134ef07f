"""Grids on paper: tables that break between rows, tell their heads to readers, and never let a number touch another."""

from collections.abc import Sequence
from functools import partial

from reportlab.lib.colors import Color
from reportlab.lib.enums import TA_LEFT, TA_RIGHT
from reportlab.lib.styles import ParagraphStyle
from reportlab.pdfbase.pdfmetrics import stringWidth
from reportlab.platypus import Flowable, Table

from creditdesk.memo.blocks import Cell, Grid, Pairs, Row, RowKind, Tone
from creditdesk.memo.cutting import cut_to_lines
from creditdesk.memo.structure import Element
from creditdesk.memo.styles import CELL, CELL_SECOND, INKS, ITALIC, NOTE, SANS, SEMIBOLD, SEMIBOLD_ITALIC, marked_up
from creditdesk.memo.tables import Command, make_table
from creditdesk.memo.tagging import TableTags, TaggedParagraph
from creditdesk.memo.text import printable

_PADDING = 3.0
_AFTER_NUMBERS = 14.0
_WIDEST_WORDS = 330.0
_SIZE = 7.8
_SMALLEST = 5.4
_COMPANY = 3
_LINES_A_CELL = 16
"""Lines of one cell; as many rows as are kept together still stand on a page with that."""
_CUT = " … cut here, in full in the attached case"
_TONES = {
    Tone.PLAIN: (SANS, INKS.ink),
    Tone.STRONG: (SEMIBOLD, INKS.ink),
    Tone.SECOND: (SANS, INKS.second),
    Tone.WORDS: (ITALIC, INKS.second),
    Tone.ASSUMED: (ITALIC, INKS.ink),
    Tone.CAUTION: (SANS, INKS.caution),
    Tone.BREACH: (SEMIBOLD, INKS.breach),
}


class _GridTags(TableTags):
    """Let heads head: a text across the whole row, such as a group's name, is a cell and heads no row."""

    def __init__(self) -> None:
        super().__init__(header_rows=1, header_columns=1)

    def _cell(self, table: Table, row: int, column: int, content: object) -> Element:
        cell = super()._cell(table, row, column, content)
        return Element("TD", columns=cell.columns) if cell.columns > 1 else cell


def grid_flowables(grid: Grid, width: float) -> list[Flowable]:
    """Return the table of a grid, and its note below it."""
    widths = _widths(grid, width)
    size = _fitting_size(grid, widths)
    heads = [_head(grid, column, widths[column], size) for column in range(len(grid.heads))]
    body = [_cells(row, grid, widths, size) for row in grid.rows]
    table = make_table(
        [heads, *body],
        widths,
        [*_frame_commands(grid, size), *_row_commands(grid, size), *_no_row_alone(len(body) + 1)],
        _GridTags(),
        repeated_rows=1,
        space=(2, 4),
    )
    return [table, *([TaggedParagraph(marked_up(grid.note), NOTE)] if grid.note else [])]


def pairs_flowables(pairs: Pairs, width: float) -> list[Flowable]:
    """Return facts with their names as a table of two columns."""
    widths = [0.24 * width, 0.76 * width]
    rows = [[_words(name, CELL_SECOND, widths[0]), _words(text, CELL, widths[1])] for name, text in pairs.facts]
    style: list[Command] = [
        ("FONT", (0, 0), (-1, -1), SANS, _SIZE),
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        ("TOPPADDING", (0, 0), (-1, -1), 1.8),
        ("BOTTOMPADDING", (0, 0), (-1, -1), 2.4),
        ("LEFTPADDING", (0, 0), (-1, -1), _PADDING),
        ("RIGHTPADDING", (0, 0), (-1, -1), _PADDING),
        ("LINEBELOW", (0, 0), (-1, -1), 0.4, INKS.rule),
        *_no_row_alone(len(rows)),
    ]
    return [make_table(rows, widths, style, TableTags(0, 1), space=(2, 4))]


def _widths(grid: Grid, width: float) -> list[float]:
    """Share the width; where numbers follow one column of words, that one is not stretched away from them."""
    widths = [share / sum(grid.shares) * width for share in grid.shares]
    if grid.words == (0,) and widths[0] > _WIDEST_WORDS:
        spare = (widths[0] - _WIDEST_WORDS) / (len(widths) - 1)
        widths = [_WIDEST_WORDS, *(one + spare for one in widths[1:])]
    return widths


def _fitting_size(grid: Grid, widths: Sequence[float]) -> float:
    """Return the type size at which every number fits its column, not below ``_SMALLEST``."""
    size = _SIZE
    for row in grid.rows:
        for column, cell in _number_cells(row, grid):
            needed = stringWidth(printable(cell.text), SEMIBOLD, 1.0)
            if needed > 0:
                size = min(size, (widths[column] - 2 * _PADDING) / needed)
    return max(size, _SMALLEST)


def _number_cells(row: Row, grid: Grid) -> list[tuple[int, Cell]]:
    if row.kind in (RowKind.GROUP, RowKind.NOTE):
        return []
    return [
        (column, cell) for column, cell in enumerate(row.cells) if column not in grid.words and cell.tone != Tone.WORDS
    ]


def _head(grid: Grid, column: int, width: float, size: float) -> object:
    """Return a head as plain text where it fits on one line, else as a paragraph that stands as its column does."""
    text = grid.heads[column]
    if stringWidth(text, SEMIBOLD, size) <= width - 2 * _PADDING:
        return printable(text)
    style = ParagraphStyle("head", parent=CELL, fontName=SEMIBOLD, fontSize=size, leading=size * 1.2)
    style.alignment = TA_LEFT if column in grid.words else TA_RIGHT
    return _words(text, style, width)


def _cells(row: Row, grid: Grid, widths: Sequence[float], size: float) -> list[object]:
    empty = [""] * len(grid.heads)
    if row.kind is RowKind.NOTE:
        return [_words(row.cells[0].text, CELL_SECOND, sum(widths)), *empty[1:]]
    if row.kind is RowKind.GROUP:
        return [printable(row.cells[0].text), *empty[1:]]
    make = partial(_cell, row=row, grid=grid, widths=widths, size=size)
    made = [make(cell, column) for column, cell in enumerate(row.cells)]
    return [*made, *empty[len(made) :]]


def _cell(cell: Cell, column: int, *, row: Row, grid: Grid, widths: Sequence[float], size: float) -> object:
    """Return a cell as plain text where it fits on one line, else as a paragraph that breaks."""
    font, colour = _look(cell, row)
    indent = 8.0 if row.kind is RowKind.UNDER and column == 0 else 0.0
    indent += _AFTER_NUMBERS - _PADDING if column in _words_after_numbers(grid) else 0.0
    room = widths[column] - 2 * _PADDING - indent
    text = printable(cell.text)
    if "\n" not in text and stringWidth(text, font, size) <= room:
        return text
    longest = max((stringWidth(word, font, size) for word in text.split()), default=0.0)
    if longest > room and column not in grid.words:  # a word is set smaller rather than broken
        size = max(0.97 * size * room / longest, _SMALLEST)
    style = ParagraphStyle("cell", parent=CELL, fontName=font, textColor=colour, fontSize=size, leading=size * 1.22)
    style.alignment = TA_LEFT if column in grid.words else TA_RIGHT
    return _words(cell.text, style, widths[column] - indent)


def _look(cell: Cell, row: Row) -> tuple[str, Color]:
    font, colour = _TONES[cell.tone]
    if cell.tone is Tone.ASSUMED and row.kind is RowKind.TOTAL:
        return SEMIBOLD_ITALIC, colour
    if cell.tone is Tone.PLAIN and row.kind is RowKind.TOTAL:
        return SEMIBOLD, colour
    if cell.tone is Tone.PLAIN and row.kind is RowKind.UNDER:
        return font, INKS.second
    return font, colour


def _words(text: str, style: ParagraphStyle, width: float) -> TaggedParagraph:
    """Set a text as a cell of ``width``; one so long that its row could not stand on a page with others is cut."""

    def set_as(words: str) -> TaggedParagraph:
        return TaggedParagraph(marked_up(words), style)

    return set_as(cut_to_lines(set_as, text, width - 2 * _PADDING, _LINES_A_CELL, _CUT)[0])


def _frame_commands(grid: Grid, size: float) -> list[Command]:
    return [
        ("FONT", (0, 0), (-1, -1), SANS, size, size * 1.22),
        ("FONT", (0, 0), (-1, 0), SEMIBOLD, size, size * 1.22),
        ("TEXTCOLOR", (0, 0), (-1, -1), INKS.ink),
        ("LEFTPADDING", (0, 0), (-1, -1), _PADDING),
        ("RIGHTPADDING", (0, 0), (-1, -1), _PADDING),
        ("ALIGN", (0, 0), (-1, -1), "RIGHT"),
        *(("ALIGN", (column, 0), (column, -1), "LEFT") for column in grid.words),
        *(("LEFTPADDING", (column, 0), (column, -1), _AFTER_NUMBERS) for column in _words_after_numbers(grid)),
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        ("VALIGN", (0, 0), (-1, 0), "BOTTOM"),
        ("TOPPADDING", (0, 0), (-1, -1), 1.6),
        ("BOTTOMPADDING", (0, 0), (-1, -1), 2.4),
        ("LINEBELOW", (0, 0), (-1, 0), 0.8, INKS.ink),
    ]


def _words_after_numbers(grid: Grid) -> list[int]:
    return [column for column in grid.words if column > 0 and column - 1 not in grid.words]


def _row_commands(grid: Grid, size: float) -> list[Command]:
    commands: list[Command] = []
    for number, row in enumerate(grid.rows, start=1):
        commands += _kind_commands(row, number, size)
        following = grid.rows[number].kind if number < len(grid.rows) else None
        belongs = following in (RowKind.UNDER, RowKind.NOTE)
        if belongs or (row.kind is RowKind.GROUP and following is not None):
            commands.append(("NOSPLIT", (0, number), (-1, number + 1)))
        if not belongs:
            commands.append(("LINEBELOW", (0, number), (-1, number), 0.4, INKS.rule))
        for column, cell in enumerate(row.cells):
            if row.kind not in (RowKind.GROUP, RowKind.NOTE):
                font, colour = _look(cell, row)
                commands.append(("FONT", (column, number), (column, number), font, size, size * 1.22))
                commands.append(("TEXTCOLOR", (column, number), (column, number), colour))
    return commands


def _no_row_alone(rows: int) -> list[Command]:
    """Keep a table's first and last rows in company where a page ends within it."""
    ends = ((0, _COMPANY - 1), (rows - _COMPANY, rows - 1)) if rows > _COMPANY else ((0, rows - 1),)
    return [("NOSPLIT", (0, first), (-1, last)) for first, last in ends]


def _kind_commands(row: Row, number: int, size: float) -> list[Command]:
    whole = ((0, number), (-1, number))
    if row.kind is RowKind.GROUP:
        return [
            ("SPAN", *whole),
            ("FONT", *whole, SEMIBOLD, size, size * 1.22),
            ("TEXTCOLOR", *whole, INKS.accent),
            ("BACKGROUND", *whole, INKS.band),
        ]
    if row.kind is RowKind.NOTE:
        return [("SPAN", *whole), ("TOPPADDING", *whole, 0)]
    if row.kind is RowKind.UNDER:
        return [("LEFTPADDING", (0, number), (0, number), _PADDING + 8)]
    if row.kind is RowKind.TOTAL:
        return [("LINEABOVE", *whole, 0.6, INKS.second)]
    return []
