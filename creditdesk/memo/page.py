"""The memo's page: frame, running head and foot, the draft mark across the head."""

from io import BytesIO
from typing import cast

from reportlab.pdfgen.canvas import Canvas
from reportlab.platypus import BaseDocTemplate, Flowable, Frame, PageTemplate

from creditdesk.memo.blocks import MemoContent
from creditdesk.memo.fonts import register_fonts
from creditdesk.memo.structure import Element, Structure, TaggedCanvas
from creditdesk.memo.styles import (
    INKS,
    MARGIN,
    PAGE_HEIGHT,
    PAGE_WIDTH,
    SANS,
    SEMIBOLD,
    TEXT_BOTTOM,
    TEXT_HEIGHT,
    TEXT_WIDTH,
)
from creditdesk.memo.text import printable

_HEAD, _FOOT = PAGE_HEIGHT - 33.0, 27.0
_RUNNING = 7.8


class _Document(BaseDocTemplate):
    """Hold one memo's pages; ``pages`` is the number of pages found so far."""

    def __init__(self, target: BytesIO, content: MemoContent, total: int) -> None:
        super().__init__(
            target, pagesize=(PAGE_WIDTH, PAGE_HEIGHT), invariant=1, title=content.title, initialFontName=SANS,
            initialFontSize=8, pageCompression=1,
        )  # fmt: skip
        self._content, self._total = content, total
        frame = Frame(
            MARGIN, TEXT_BOTTOM, TEXT_WIDTH, TEXT_HEIGHT, leftPadding=0, rightPadding=0, topPadding=0, bottomPadding=0
        )
        self.addPageTemplates(PageTemplate("page", [frame], onPage=self._draw_running))

    def _draw_running(self, plain: Canvas, _document: BaseDocTemplate) -> None:
        """Draw head and foot; only the head of page one is content, the others repeat it."""
        canvas = cast("TaggedCanvas", plain)
        page = canvas.getPageNumber()
        canvas.saveState()
        with canvas.marked(Element("P")) if page == 1 else canvas.artifact("Pagination"):
            _draw_head(canvas, self._content, page)
        with canvas.artifact("Pagination"):
            _draw_foot(canvas, self._content, page, self._total)
        canvas.restoreState()


def print_pages(content: MemoContent, flowables: list[Flowable], structure: Structure, total: int) -> tuple[bytes, int]:
    """Draw flowables as pages that say they are so many in ``total``; return the PDF and how many they are."""
    register_fonts()
    target = BytesIO()
    document = _Document(target, content, total)
    document.build(flowables, canvasmaker=structure.canvas)
    return target.getvalue(), document.page


def _draw_head(canvas: TaggedCanvas, content: MemoContent, page: int) -> None:
    left = f"Credit memo · {content.lender}"
    if page > 1:
        left = f"{content.first.obligor} · {left}"
    right = f"case {content.case_mark} · {content.dated}"
    canvas.setFillColor(INKS.second)
    canvas.setFont(SANS, _RUNNING)
    room = TEXT_WIDTH - canvas.stringWidth(right, SANS, _RUNNING) - 12
    canvas.drawString(MARGIN, _HEAD, _shortened(canvas, printable(left), room))
    canvas.drawRightString(MARGIN + TEXT_WIDTH, _HEAD, right)
    if content.draft:
        _draw_draft(canvas, content.draft)


def _draw_draft(canvas: TaggedCanvas, words: str) -> None:
    """Draw the band across the head that says a memo is not usable."""
    canvas.setFillColor(INKS.breach)
    canvas.rect(0, PAGE_HEIGHT - 20, PAGE_WIDTH, 20, stroke=0, fill=1)
    canvas.setFillColorRGB(1, 1, 1)
    canvas.setFont(SEMIBOLD, 10)
    canvas.drawCentredString(PAGE_WIDTH / 2, PAGE_HEIGHT - 14, words)


def _draw_foot(canvas: TaggedCanvas, content: MemoContent, page: int, total: int) -> None:
    canvas.setStrokeColor(INKS.rule)
    canvas.setLineWidth(0.6)
    canvas.line(MARGIN, _FOOT + 11, MARGIN + TEXT_WIDTH, _FOOT + 11)
    canvas.setFillColor(INKS.second)
    canvas.setFont(SANS, _RUNNING)
    right = f"Page {page} of {total}"
    canvas.drawRightString(MARGIN + TEXT_WIDTH, _FOOT, right)
    room = TEXT_WIDTH - canvas.stringWidth(right, SANS, _RUNNING) - 12
    canvas.drawString(MARGIN, _FOOT, _shortened(canvas, printable(content.foot), room))


def _shortened(canvas: TaggedCanvas, text: str, room: float) -> str:
    while canvas.stringWidth(text, SANS, _RUNNING) > room:
        text = text[:-2].rstrip() + "…"
    return text
