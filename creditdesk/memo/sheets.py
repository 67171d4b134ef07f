"""The pages after the first: sections as flowables."""

from collections.abc import Sequence

from reportlab.platypus import CondPageBreak, Flowable, HRFlowable, KeepTogether, Spacer

from creditdesk.memo.blocks import Block, Chart, Grid, Listing, Pairs, Prose, Section, Subheading
from creditdesk.memo.drawings import chart
from creditdesk.memo.grids import grid_flowables, pairs_flowables
from creditdesk.memo.styles import BY_TONE, HEADING, INKS, ITEM, SUBHEADING, TEXT_WIDTH, marked_up
from creditdesk.memo.tagging import Decoration, TaggedParagraph, tagged_list

_ROOM_FOR_A_BEGINNING = 96.0
_SHORT = 16
"""Rows of a table that is never broken."""


class Bookmark(Flowable):
    """Enter a place into the document's outline."""

    def __init__(self, title: str) -> None:
        super().__init__()
        self.width = self.height = 0
        self._title = title

    def draw(self) -> None:
        """Mark the place; sections have headings of their own, so the title names it."""
        self.canv.bookmarkHorizontal(self._title, 0, HEADING.leading + 6)
        self.canv.addOutlineEntry(self._title, self._title, level=0)


def section_flowables(section: Section) -> list[Flowable]:
    """Return heading and blocks of a section; no heading stands alone at a page's end, no short table is broken."""
    flowables: list[Flowable] = []
    heads: list[Flowable] = [Bookmark(section.heading), *heading(section.heading)]
    for block in section.blocks:
        if isinstance(block, Subheading):
            heads += _block_flowables(block)
            continue
        body = _block_flowables(block)
        if _kept_together(block):
            flowables.append(KeepTogether([*heads, *body]))
        else:
            flowables += [*([CondPageBreak(_ROOM_FOR_A_BEGINNING)] if heads else []), *heads, *body]
        heads = []
    return [*flowables, *heads, Spacer(1, 12)]


def _kept_together(block: Block) -> bool:
    """Say whether a block stays on one page with its heading."""
    return isinstance(block, Chart) or (isinstance(block, Grid) and (block.whole or len(block.rows) <= _SHORT))


def heading(text: str, level: str = "H2", width: float | str = "100%") -> list[Flowable]:
    """Return a heading with the rule below it."""
    rule = HRFlowable(width=width, thickness=0.6, color=INKS.rule, spaceBefore=2, spaceAfter=4, lineCap="butt")
    return [TaggedParagraph(marked_up(text), HEADING, level), Decoration(rule)]


def _block_flowables(block: Block) -> Sequence[Flowable]:
    if isinstance(block, Grid):
        return grid_flowables(block, TEXT_WIDTH)
    if isinstance(block, Chart):
        return [Spacer(1, 4), chart(block.draw, (TEXT_WIDTH, block.height), block.words), Spacer(1, 6)]
    if isinstance(block, Subheading):
        return [TaggedParagraph(marked_up(block.text), SUBHEADING, "H3")]
    if isinstance(block, Pairs):
        return pairs_flowables(block, TEXT_WIDTH)
    if isinstance(block, Listing):
        return tagged_list([marked_up(item) for item in block.items], ITEM)
    return _prose_flowables(block)


def _prose_flowables(prose: Prose) -> list[Flowable]:
    style = BY_TONE[prose.tone]
    paragraphs = [part for part in prose.text.split("\n\n") if part.strip()]
    spaced: list[Flowable] = []
    for part in paragraphs:
        spaced += [TaggedParagraph(marked_up(part), style), Spacer(1, 4)]
    return spaced
