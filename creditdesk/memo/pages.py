"""Pages of a PDF as pictures, for the preview; the one place that uses pypdfium2."""

from dataclasses import dataclass

import pypdfium2


@dataclass(frozen=True, slots=True)
class PageImage:
    """Hold one page as RGB bytes, rows from top to bottom without padding."""

    width: int
    height: int
    pixels: bytes


def page_images(pdf: bytes, width: int) -> tuple[PageImage, ...]:
    """Draw every page of ``pdf`` ``width`` pixels wide, signature fields included."""
    document = pypdfium2.PdfDocument(pdf)
    try:
        document.init_forms()  # without it the fields' appearances are left out
        return tuple(_page_image(page, width) for page in document)
    finally:
        document.close()


def _page_image(page: pypdfium2.PdfPage, width: int) -> PageImage:
    image = page.render(scale=width / page.get_width(), may_draw_forms=True).to_pil().convert("RGB")
    return PageImage(image.width, image.height, image.tobytes())
