"""What a memo consists of: strings ready to print, with the numbers behind them, and no layout."""

from collections.abc import Callable, Sequence
from dataclasses import asdict, dataclass
from enum import StrEnum
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from matplotlib.figure import Figure


Draw = Callable[[tuple[float, float]], "Figure"]


class Tone(StrEnum):
    """Say how a text weighs; WORDS stand in a column of numbers, ASSUMED marks a number by its slant."""

    PLAIN = "plain"
    STRONG = "strong"
    SECOND = "second"
    WORDS = "words"
    ASSUMED = "assumed"
    CAUTION = "caution"
    BREACH = "breach"


class RowKind(StrEnum):
    """Say what a row of a grid is: ``NOTE`` is one text across all columns that belongs to the row above it."""

    LINE = "line"
    TOTAL = "total"
    GROUP = "group"
    UNDER = "under"
    NOTE = "note"


@dataclass(frozen=True, slots=True)
class Cell:
    """Hold one cell: its text, and the number it was written from where there is one."""

    text: str
    number: float | None = None
    tone: Tone = Tone.PLAIN


@dataclass(frozen=True, slots=True)
class Row:
    """Hold one row; a group's heading or a note has one cell."""

    cells: tuple[Cell, ...]
    kind: RowKind = RowKind.LINE


@dataclass(frozen=True, slots=True)
class Grid:
    """Hold a table: ``heads`` of all columns, ``shares`` of the width; columns of ``words`` stand left, numbers right.

    ``note`` explains marks below the table. ``name`` is what the table shows, for readers that hear it. ``whole``: not
    broken where a page holds it.
    """

    name: str
    heads: tuple[str, ...]
    rows: tuple[Row, ...]
    shares: tuple[float, ...]
    words: tuple[int, ...] = (0,)
    note: str = ""
    whole: bool = False


@dataclass(frozen=True, slots=True)
class Prose:
    """Hold a paragraph."""

    text: str
    tone: Tone = Tone.PLAIN


@dataclass(frozen=True, slots=True)
class Listing:
    """Hold a list of sentences."""

    items: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Pairs:
    """Hold facts with their names."""

    name: str
    facts: tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True)
class Subheading:
    """Hold a heading within a section."""

    text: str


@dataclass(frozen=True, slots=True)
class Chart:
    """Hold a chart: ``words`` are read in its place, ``draw`` makes it at a width and height in points."""

    words: str
    height: float
    draw: Draw


Block = Grid | Chart | Prose | Listing | Pairs | Subheading


@dataclass(frozen=True, slots=True)
class Section:
    """Hold one section after the first page."""

    heading: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True, slots=True)
class KeyRatio:
    """Hold one key ratio of the first page: texts per period shown, and the values for the trend line."""

    label: str
    texts: tuple[str, ...]
    values: tuple[float | None, ...]


@dataclass(frozen=True, slots=True)
class Spot:
    """Hold one weak spot of the first page: its sentence, and the mark of a finding, "" for a factor."""

    text: str
    mark: str = ""


@dataclass(frozen=True, slots=True)
class FirstPage:
    """Hold the decision on one page.

    ``pd``: None where there is no usable PD, and ``pd_text`` says so. ``grade_note``: what the grade is out of, and the
    model's own where it differs. ``key_heads``: the periods of the key ratios. ``spots_found``: what weighs against the
    borrower by its figures alone. An officer's text that was not written is empty; the page says so.
    """

    obligor: str
    description: str
    request: str
    pd: float | None
    pd_text: str
    pd_notes: tuple[str, ...]
    grade: str
    grade_note: str
    key_heads: tuple[str, ...]
    key_ratios: tuple[KeyRatio, ...]
    spots_found: tuple[Spot, ...]
    weak_spots: str
    recommendation: str
    conditions: str
    caution: str


@dataclass(frozen=True, slots=True)
class MemoContent:
    """Hold a whole memo; ``draft`` is empty, or the words across every page's head while it is not usable.

    ``foot`` stands at every page's foot. ``curve_words`` and ``contribution_words`` are what is read in place of the
    two charts.
    """

    title: str
    lender: str
    dated: str
    case_mark: str
    draft: str
    foot: str
    curve_words: str
    contribution_words: str
    first: FirstPage
    sections: tuple[Section, ...]

    def plain(self) -> dict[str, object]:
        """Return the content as plain data that JSON can hold; of a chart its words."""
        return asdict(self, dict_factory=_without_drawing)


def _without_drawing(fields: list[tuple[str, object]]) -> dict[str, object]:
    return {name: value for name, value in fields if not callable(value)}


def text_row(*texts: str, kind: RowKind = RowKind.LINE, tone: Tone = Tone.PLAIN) -> Row:
    """Make a row of texts."""
    return Row(tuple(Cell(text, tone=tone) for text in texts), kind)


def group_row(text: str) -> Row:
    """Make the heading of a group of rows."""
    return Row((Cell(text, tone=Tone.STRONG),), RowKind.GROUP)


def note_row(text: str) -> Row:
    """Make a note below a row."""
    return Row((Cell(text, tone=Tone.SECOND),), RowKind.NOTE)


def without_empty(blocks: Sequence[Block]) -> tuple[Block, ...]:
    """Drop tables, lists and facts that hold nothing, and headings that then head nothing."""
    kept: list[Block] = []
    for block in blocks:
        if isinstance(block, Grid) and not block.rows:
            continue
        if (isinstance(block, Listing) and not block.items) or (isinstance(block, Pairs) and not block.facts):
            continue
        if isinstance(block, Subheading) and kept and isinstance(kept[-1], Subheading):
            kept.pop()
        kept.append(block)
    if kept and isinstance(kept[-1], Subheading):
        kept.pop()
    return tuple(kept)
