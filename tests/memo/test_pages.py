import threading
from itertools import pairwise

import pypdfium2
import pytest

from creditdesk.case.convert import load_any
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from creditdesk.memo.issue import draft_memo
from creditdesk.memo.origins import ORIGINS
from creditdesk.memo.pages import PagePart, draw_pages, page_images, page_parts, paper_width


@pytest.fixture(scope="module")
def memo() -> bytes:
    house = load_house_book(resources_folder() / "housebook")
    return draft_memo(load_any(resources_folder() / "demo" / "tarnside-castings.case.toml", house.chart), house)


def test_pages_come_in_the_width_and_the_shape_of_the_paper(memo: bytes) -> None:
    images = page_images(memo, 400)
    assert len(images) >= 4
    for image in images:
        assert image.width == 400
        assert image.height == pytest.approx(400 * 297 / 210, abs=1)
        assert len(image.pixels) == 3 * image.width * image.height


def test_a_range_of_pages_is_drawn_one_at_a_time(memo: bytes) -> None:
    whole = page_images(memo, 200)
    some = list(draw_pages(memo, 200, 2, 3))
    assert [(number, total) for number, total, _ in some] == [(2, len(whole)), (3, len(whole))]
    assert [image for _, _, image in some] == list(whole[1:3])


def test_paper_of_three_hundred_dots_per_inch() -> None:
    assert paper_width(300) == 2480  # 210 mm of ISO 216 at 25.4 mm per inch


def test_two_threads_may_draw_at_the_same_time(memo: bytes) -> None:
    alone = page_images(memo, 300)
    drawn: list[object] = []
    threads = [threading.Thread(target=lambda: drawn.append(page_images(memo, 300))) for _ in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert drawn == [alone] * 4


def test_every_page_says_which_sections_are_on_it(memo: bytes) -> None:
    parts = page_parts(memo)
    assert len(parts) == len(page_images(memo, 50))
    assert parts[0] == (PagePart("The decision on one page", parts[0][0].top, ORIGINS["The decision on one page"]),)
    headings = [part.heading for page in parts for part in page]
    assert headings.index("Figures") < headings.index("Ratios") < headings.index("Cautions")
    for page in parts:
        assert page, "a page without a section"
        assert [part.top for part in page] == sorted(part.top for part in page)
        assert all(0 <= part.top <= 1 for part in page)


def test_a_section_that_runs_over_stands_at_the_top_of_the_next_page(memo: bytes) -> None:
    parts = page_parts(memo)
    later = [page for before, page in pairwise(parts) if page[0].heading == before[-1].heading]
    assert later, "the demonstration has a section of more than one page"
    assert all(page[0].top == 0 for page in later)


def test_a_part_begins_where_its_heading_stands(memo: bytes) -> None:
    document = pypdfium2.PdfDocument(memo)
    checked = 0
    for number, page in enumerate(page_parts(memo)):
        for part in page:
            if part.top > 0 and number > 0:
                tops = _tops(document[number], part.heading)
                assert any(top == pytest.approx(part.top, abs=0.04) for top in tops), (part, tops)
                checked += 1
    document.close()
    assert checked >= 8


def _tops(page: pypdfium2.PdfPage, words: str) -> list[float]:
    """Return how far down a page, from 0 to 1, each occurrence of ``words`` stands."""
    text = page.get_textpage()
    search, found = text.search(words), []
    while (place := search.get_next()) is not None:
        *_, top = text.get_charbox(place[0])
        found.append(1 - top / page.get_height())
    return found
