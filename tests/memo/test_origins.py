import pytest
from msgspec.structs import replace

from creditdesk.case.assess import assess
from creditdesk.case.convert import load_any
from creditdesk.case.document import Case
from creditdesk.desk.window import SHEETS, STANDING
from creditdesk.house.book import HouseBook
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder
from creditdesk.memo.content import memo_content
from creditdesk.memo.issue import draft_memo
from creditdesk.memo.origins import ORIGINS
from creditdesk.memo.pages import page_parts

DEMO = resources_folder() / "demo"


@pytest.fixture(scope="module")
def house() -> HouseBook:
    return load_house_book(resources_folder() / "housebook")


def _cases(house: HouseBook) -> list[Case]:
    plain = [load_any(path, house.chart) for path in sorted(DEMO.glob("*.case.toml"))]
    odd = replace(plain[0], obligor=replace(plain[0].obligor, name="Ørsted 木 Ltd"), texts={"request": "word " * 900})
    return [*plain, replace(plain[0], figures={}, printed={}), odd]


def test_every_section_of_every_memo_says_where_it_comes_from(house: HouseBook) -> None:
    for case in _cases(house):
        content = memo_content(case, assess(case, house), house)
        unknown = [section.heading for section in content.sections if section.heading not in ORIGINS]
        assert unknown == [], "a section without an origin"


def test_every_part_of_every_page_leads_to_a_sheet_that_exists(house: HouseBook) -> None:
    for case in _cases(house):
        for page in page_parts(draft_memo(case, house)):
            for part in page:
                assert part.origins, part.heading
                assert set(part.origins) <= {*SHEETS, STANDING}, part.heading


def test_origins_are_no_more_than_the_headings_in_use(house: HouseBook) -> None:
    used = {part.heading for case in _cases(house) for page in page_parts(draft_memo(case, house)) for part in page}
    assert set(ORIGINS) - used <= {"Second opinions"}
