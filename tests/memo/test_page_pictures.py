"""What is on the pictures of pages: not a pixel too many, upright, in true colours, signatures where they were made."""

import numpy as np
import pypdfium2

from creditdesk.memo.pages import PageImage, page_images
from tests.memos import finished, ratio_table, small_story


def pixels(image: PageImage) -> np.ndarray:
    return np.frombuffer(image.pixels, dtype=np.uint8).reshape(image.height, image.width, 3)


def test_no_width_is_missed_by_a_pixel(unsigned_memo: bytes) -> None:
    document = pypdfium2.PdfDocument(unsigned_memo)
    page_width = document[0].get_width()
    document.close()
    awkward = [width for width in range(50, 2_000) if -(-page_width * (width / page_width) // 1) != width]
    assert awkward  # a plain quotient would miss these
    assert [page_images(unsigned_memo, width)[0].width for width in awkward[:12]] == awkward[:12]


def test_every_page_is_drawn_in_order_and_upright() -> None:
    pages = page_images(finished([*small_story(), ratio_table(90)]), 400)
    assert len(pages) > 2
    ink = [float((pixels(page) < 128).mean()) for page in pages]
    assert all(share > 0.002 for share in ink)
    for page in map(pixels, pages):
        assert (page[:30] < 128).any()  # the running head stands at the top
        assert (page[-30:] > 250).all()


def test_a_signature_is_seen_where_it_was_made(unsigned_memo: bytes, prepared_memo: bytes) -> None:
    (before,), (after,) = page_images(unsigned_memo, 800), page_images(prepared_memo, 800)
    changed = (pixels(before) != pixels(after)).any(axis=2)
    rows, columns = np.nonzero(changed)
    assert changed.any()
    assert rows.max() - rows.min() < 200  # within the preparer's field, and nowhere else
    assert columns.max() - columns.min() < 400


def test_a_picture_s_colours_are_red_green_blue_in_this_order() -> None:
    figure_ink = pixels(page_images(finished(small_story()), 800)[0]).reshape(-1, 3)
    blue = figure_ink[(figure_ink[:, 2].astype(int) - figure_ink[:, 0]) > 60]
    assert len(blue) > 100  # the small chart's line is matplotlib's blue
