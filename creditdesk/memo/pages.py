"""Pages of a PDF as pictures and in parts, for preview and print; the one place that uses pypdfium2."""

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from threading import Lock

import pypdfium2

from creditdesk.memo.origins import ORIGINS

_ONE_AT_A_TIME = Lock()
"""PDFium may not be entered by two threads at once."""
_A4_WIDTH_INCHES = 210 / 25.4
_NEAR_THE_TOP = 0.08
_SLACK = 1e-3
"""Taken off a width in pixels: the library rounds up, and a last bit too many would make a picture a pixel wider."""


@dataclass(frozen=True, slots=True)
class PageImage:
    """Hold one page as RGB bytes, rows from top to bottom without padding."""

    width: int
    height: int
    pixels: bytes


@dataclass(frozen=True, slots=True)
class PagePart:
    """Hold a section's share of a page: its heading, where it begins from the page's top (0) to its foot (1).

    ``origins``: the sheets it comes from.
    """

    heading: str
    top: float
    origins: tuple[str, ...]


def page_images(pdf: bytes, width: int) -> tuple[PageImage, ...]:
    """Draw every page of ``pdf`` ``width`` pixels wide, signature fields included."""
    return tuple(image for _, _, image in draw_pages(pdf, width))


def draw_pages(pdf: bytes, width: int, first: int = 1, last: int = 0) -> Iterator[tuple[int, int, PageImage]]:
    """Draw the pages ``first`` to ``last`` (0: the last there is), counted from 1, one at a time.

    Yields each page's number, how many pages ``pdf`` has, and the page ``width`` pixels wide.
    """
    with _opened(pdf) as document:
        with _ONE_AT_A_TIME:
            document.init_forms()  # without it the fields' appearances are left out
            total = len(document)
        for number in range(first, (last or total) + 1):
            with _ONE_AT_A_TIME:
                image = _page_image(document, number - 1, width)
            yield number, total, image


def paper_width(dots_per_inch: int) -> int:
    """Return the width of an A4 page in pixels."""
    return round(_A4_WIDTH_INCHES * dots_per_inch)


def page_parts(pdf: bytes) -> tuple[tuple[PagePart, ...], ...]:
    """Return for each page the sections on it, from the top down, as the outline of ``pdf`` has them."""
    with _opened(pdf) as document, _ONE_AT_A_TIME:
        pages: list[list[PagePart]] = [[] for _ in range(len(document))]
        for entry in document.get_toc():
            target = entry.get_dest()
            page, (_, place) = target.get_index(), target.get_view()
            heading = entry.get_title()
            top = 1 - float(place[1]) / float(document.get_page_size(page)[1])
            pages[page].append(PagePart(heading, min(max(top, 0.0), 1.0), ORIGINS.get(heading, ())))
    return tuple(_with_what_goes_on(pages))


def _with_what_goes_on(pages: list[list[PagePart]]) -> Iterator[tuple[PagePart, ...]]:
    """Put the last section of the page before at the top of a page that begins within it."""
    before: PagePart | None = None
    for parts in pages:
        goes_on = before is not None and not (parts and parts[0].top < _NEAR_THE_TOP)
        whole = [PagePart(before.heading, 0.0, before.origins), *parts] if before and goes_on else parts
        before = whole[-1] if whole else before
        yield tuple(whole)


@contextmanager
def _opened(pdf: bytes) -> Iterator[pypdfium2.PdfDocument]:
    with _ONE_AT_A_TIME:
        document = pypdfium2.PdfDocument(pdf)
    try:
        yield document
    finally:
        with _ONE_AT_A_TIME:
            document.close()


def _page_image(document: pypdfium2.PdfDocument, index: int, width: int) -> PageImage:
    page = document[index]
    try:
        scale = (width - _SLACK) / page.get_width()
        image = page.render(scale=scale, may_draw_forms=True).to_pil().convert("RGB")
    finally:
        page.close()
    return PageImage(image.width, image.height, image.tobytes())
