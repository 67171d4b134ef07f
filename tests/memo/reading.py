"""Read a memo back: the text of its pages, and where on the page each line of it stands."""

from dataclasses import dataclass
from datetime import date

import pypdfium2

from creditdesk.case.standing import Standing
from creditdesk.memo.blocks import MemoContent
from creditdesk.memo.finish import finish
from creditdesk.memo.layout import write_memo


@dataclass(frozen=True)
class Line:
    text: str
    left: float
    bottom: float
    right: float
    top: float


def memo_bytes(content: MemoContent, standing: Standing) -> bytes:
    pdf, structure = write_memo(content, standing)
    return finish(pdf, structure, title=content.title, language="en-GB", written_on=date(2026, 12, 1))


def page_texts(pdf: bytes) -> list[str]:
    """Return each page's text as one line with single spaces."""
    document = pypdfium2.PdfDocument(pdf)
    try:
        return [" ".join(page.get_textpage().get_text_bounded().split()) for page in document]
    finally:
        document.close()


def page_lines(pdf: bytes, page: int) -> list[Line]:
    """Return the stretches of text of one page with their boxes in points from the lower left corner."""
    document = pypdfium2.PdfDocument(pdf)
    try:
        text = document[page].get_textpage()
        boxes = [text.get_rect(number) for number in range(text.count_rects())]
        return [Line(text.get_text_bounded(*box).strip(), *box) for box in boxes]
    finally:
        document.close()
