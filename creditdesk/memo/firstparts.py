"""The parts of page one: masthead with PD and grade plate, key ratios with their trends, boxes to sign in."""

from collections.abc import Sequence
from functools import partial

from matplotlib.figure import Figure
from reportlab.lib.enums import TA_RIGHT
from reportlab.lib.styles import ParagraphStyle
from reportlab.pdfbase.pdfmetrics import stringWidth
from reportlab.platypus import Flowable, Spacer, Table

from creditdesk.charts.style import PAPER
from creditdesk.charts.trends import trend_figure
from creditdesk.memo.blocks import FirstPage, KeyRatio
from creditdesk.memo.cutting import cut_to_lines
from creditdesk.memo.decision import Role
from creditdesk.memo.onpaper import draw_figure
from creditdesk.memo.structure import Element
from creditdesk.memo.styles import (
    CELL,
    GRADE,
    INKS,
    NAME,
    PD,
    PD_WORDS,
    PLATE_SECOND,
    REASON,
    RIGHT_SECOND,
    SANS,
    SECOND,
    SEMIBOLD,
    SERIF_SEMIBOLD,
    TEXT_WIDTH,
    marked_up,
)
from creditdesk.memo.tables import Command, make_table
from creditdesk.memo.tagging import Decoration, TableTags, TaggedParagraph, as_decoration, canvas_of
from creditdesk.memo.text import printable

_PLATE, _VERDICT = 84.0, 138.0
NAME_WIDTH = TEXT_WIDTH - _PLATE - _VERDICT - 18
_TREND = (42.0, 12.0)
_LABEL_LEAST, _LABEL_WITH_NUMBERS = 66.0, 54.0
"""Widths left to the labels by words in the columns, and by numbers, which do not break."""
_CELL_SIZE, _CELL_SMALLEST = 7.8, 5.4
_LINES_A_CELL = 2
_BOX_HEIGHT = 66.0
_NAME_SIZES = (21.0, 18.0, 15.5, 13.0, 11.0)
_TITLES = {Role.PREPARER: "Prepared and signed", Role.APPROVER: "Countersigned"}
_AWAITED = {Role.PREPARER: "awaiting the preparer", Role.APPROVER: "awaiting the approver and the decision"}
_PLAIN: list[Command] = [
    ("LEFTPADDING", (0, 0), (-1, -1), 0),
    ("RIGHTPADDING", (0, 0), (-1, -1), 0),
    ("TOPPADDING", (0, 0), (-1, -1), 0),
    ("BOTTOMPADDING", (0, 0), (-1, -1), 0),
    ("VALIGN", (0, 0), (-1, -1), "TOP"),
    ("FONT", (0, 0), (-1, -1), SANS, 8),
]


class Plot(Flowable):
    """Draw a small figure that repeats what is written beside it."""

    def __init__(self, figure: Figure, width: float, height: float) -> None:
        super().__init__()
        self.width, self.height = width, height
        self._figure = figure

    def draw(self) -> None:
        """Draw the figure at its place."""
        draw_figure(self._figure, self.canv, 0, 0, self.width, self.height)


class SignatureBox(Flowable):
    """Draw a box to sign in: what is awaited stands in it until the signature's own drawing covers it."""

    def __init__(self, role: Role, width: float) -> None:
        super().__init__()
        self.width, self.height = width, _BOX_HEIGHT
        self._role = role

    def draw(self) -> None:
        """Draw border and words, and set the field."""
        canvas = canvas_of(self)
        with canvas.artifact():
            canvas.setStrokeColor(INKS.ink)
            canvas.setLineWidth(0.9)
            canvas.rect(0, 0, self.width, self.height, stroke=1, fill=0)
        with canvas.marked(Element("P")):
            canvas.setFillColor(INKS.ink)
            canvas.setFont(SEMIBOLD, 8)
            canvas.drawString(8, self.height - 14, _TITLES[self._role])
            canvas.setFillColor(INKS.second)
            canvas.setFont(SANS, 7.8)
            canvas.drawString(8, self.height - 25, _AWAITED[self._role])
        tooltip = f"Signature of the {self._role.value.lower()}"
        canvas.signature_field(self._role.value, tooltip, (1, 1, self.width - 2, self.height - 2))


def columns(parts: Sequence[Sequence[Flowable]], widths: Sequence[float]) -> Table:
    """Set lists of flowables side by side; a table only for the eye."""
    return make_table([[list(part) for part in parts]], widths, _PLAIN, as_decoration)


def masthead(first: FirstPage, request: Flowable, lines_a_note: int) -> Table:
    """Return name, description and request beside PD and grade; each note on the PD is cut to its lines."""
    name = _name(first.obligor)
    description, _ = cut_to_lines(_described, first.description, NAME_WIDTH - 8, 3)
    facts: list[Flowable] = [name, Spacer(1, 2), _described(description), Spacer(1, 4), request]
    return columns((facts, _verdict(first, lines_a_note), (), (_plate(first),)), (NAME_WIDTH, _VERDICT, 18, _PLATE))


def key_ratio_table(first: FirstPage, width: float, most: int) -> Flowable:
    """Return the key ratios over the last periods, ``most`` of them, each with its trend; no cell runs over."""
    numbers = _number_width(first, width)
    label = width - numbers * len(first.key_heads) - _TREND[0]
    rows: list[list[object]] = [["", *(_cell(head, numbers, _HEAD_CELL) for head in first.key_heads), ""]]
    for ratio in first.key_ratios[:most]:
        trend = Decoration(Plot(trend_figure(ratio.values, PAPER, _TREND), *_TREND))
        cells = [_cell(text, numbers, _NUMBER_CELL if there else REASON) for text, there in _with_presence(ratio)]
        rows.append([_cut(ratio.label, label, CELL), *cells, trend])
    widths = [label, *([numbers] * len(first.key_heads)), _TREND[0]]
    return make_table(rows, widths, _RATIO_STYLE, TableTags(1, 1))


def signature_boxes(width: float, gap: float) -> Table:
    """Return both boxes side by side."""
    half = (width - gap) / 2
    return columns(([SignatureBox(Role.PREPARER, half)], (), [SignatureBox(Role.APPROVER, half)]), (half, gap, half))


_PADDING = 5.0
_NUMBER_CELL = ParagraphStyle("number", parent=CELL, alignment=TA_RIGHT)
_HEAD_CELL = ParagraphStyle("head", parent=_NUMBER_CELL, fontName=SEMIBOLD)
_RATIO_STYLE: list[Command] = [
    ("FONT", (0, 0), (-1, -1), SANS, 7.8, 9.6),
    ("FONT", (0, 0), (-1, 0), SEMIBOLD, 7.8, 9.6),
    ("TEXTCOLOR", (0, 0), (-1, -1), INKS.ink),
    ("ALIGN", (1, 0), (-1, -1), "RIGHT"),
    ("VALIGN", (0, 0), (-1, -1), "MIDDLE"),
    ("LEFTPADDING", (0, 0), (-1, -1), 2),
    ("RIGHTPADDING", (0, 0), (-1, -1), 3),
    ("RIGHTPADDING", (-1, 0), (-1, -1), 0),
    ("TOPPADDING", (0, 0), (-1, -1), 3.0),
    ("BOTTOMPADDING", (0, 0), (-1, -1), 4.0),
    ("LINEBELOW", (0, 0), (-1, 0), 0.8, INKS.ink),
    ("LINEBELOW", (0, 1), (-1, -1), 0.4, INKS.rule),
]


def _name(obligor: str) -> Flowable:
    """Set the name as large as lets it stand on two lines."""
    for size in _NAME_SIZES:
        text, cut = cut_to_lines(partial(_named, size), obligor, NAME_WIDTH, 2)
        if not cut:
            return _named(size, text)
    smallest = _NAME_SIZES[-1]
    return _named(smallest, cut_to_lines(partial(_named, smallest), obligor, NAME_WIDTH, 4)[0])


def _named(size: float, obligor: str) -> TaggedParagraph:
    style = ParagraphStyle("name", parent=NAME, fontSize=size, leading=size * 1.14, spaceAfter=2)
    return TaggedParagraph(marked_up(obligor), style, "H1")


def _verdict(first: FirstPage, lines_a_note: int) -> list[Flowable]:
    style = PD if first.pd is not None else PD_WORDS
    notes = [_noted(cut_to_lines(_noted, note, _VERDICT, lines_a_note)[0]) for note in first.pd_notes]
    pd = TaggedParagraph(marked_up(first.pd_text), style)
    return [TaggedParagraph("probability of default", RIGHT_SECOND), pd, Spacer(1, 3), *notes]


def _noted(text: str) -> TaggedParagraph:
    return TaggedParagraph(marked_up(text), RIGHT_SECOND)


def _described(text: str) -> TaggedParagraph:
    return TaggedParagraph(marked_up(text), SECOND)


def _plate(first: FirstPage) -> Table:
    size = GRADE.fontSize if stringWidth(first.grade, SERIF_SEMIBOLD, GRADE.fontSize) < _PLATE - 12 else 16
    grade = ParagraphStyle("grade", parent=GRADE, fontSize=size)
    cells = [
        [TaggedParagraph("grade", PLATE_SECOND)],
        [TaggedParagraph(marked_up(first.grade), grade)],
        [TaggedParagraph(marked_up(first.grade_note), PLATE_SECOND)],
    ]
    style: list[Command] = [
        *_PLAIN,
        ("BACKGROUND", (0, 0), (-1, -1), INKS.band),
        ("BOX", (0, 0), (-1, -1), 1.1, INKS.ink),
        ("TOPPADDING", (0, 0), (0, 0), 6),
        ("BOTTOMPADDING", (0, -1), (0, -1), 7),
    ]
    return make_table(cells, [_PLATE], style, as_decoration)


def _number_width(first: FirstPage, width: float) -> float:
    """Return a column's width: enough for any number, and for the words where labels and trends leave that much."""
    texts = [pair for ratio in first.key_ratios for pair in _with_presence(ratio)]
    heads = [word for head in first.key_heads for word in head.split(" ")]
    numbers = [stringWidth(text, SEMIBOLD, _CELL_SIZE) for text in (*(text for text, there in texts if there), *heads)]
    words = [stringWidth(text, REASON.fontName, REASON.fontSize) for text, there in texts if not there]
    room, count = width - _TREND[0], max(len(first.key_heads), 1)
    least = min(max(max(numbers, default=30.0) + 7, 36.0), (room - _LABEL_WITH_NUMBERS) / count)
    return max(least, min(max(words, default=0.0) + 7, (room - _LABEL_LEAST) / count))


def _cell(text: str, width: float, style: ParagraphStyle) -> object:
    """Return a text on one line where it fits one; words break, a long number is set smaller."""
    room = width - _PADDING
    if style is not REASON and stringWidth(printable(text), style.fontName, style.fontSize) <= room:
        return printable(text)
    longest = max(stringWidth(printable(word), style.fontName, 1.0) for word in (*text.split(" "), "0"))
    size = max(min(style.fontSize, 0.98 * room / longest), _CELL_SMALLEST)
    fitting = ParagraphStyle(style.name, parent=style, fontSize=size, leading=size * style.leading / style.fontSize)
    return _cut(text, room, fitting)


def _cut(text: str, width: float, style: ParagraphStyle) -> TaggedParagraph:
    """Set a text in its lines of a cell."""

    def set_as(words: str) -> TaggedParagraph:
        return TaggedParagraph(marked_up(words), style)

    return set_as(cut_to_lines(set_as, text, width - _PADDING, _LINES_A_CELL)[0])


def _with_presence(ratio: KeyRatio) -> list[tuple[str, bool]]:
    """Return the texts shown, each with whether it is a value and no reason."""
    shown = ratio.values[len(ratio.values) - len(ratio.texts) :]
    return [(text, value is not None) for text, value in zip(ratio.texts, shown, strict=True)]
