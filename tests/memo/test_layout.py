import os
import subprocess
import sys
from io import BytesIO
from itertools import combinations
from pathlib import Path

import pikepdf
import pytest

from creditdesk.case.standing import GradeStanding
from creditdesk.memo.blocks import Cell, Grid, MemoContent, Pairs, Row, Section, Spot, note_row
from creditdesk.memo.grids import grid_flowables
from creditdesk.memo.styles import MARGIN, PAGE_HEIGHT, PAGE_WIDTH, TEXT_WIDTH
from tests.contents import WORDS, content, figures, first_page
from tests.memo.reading import Line, memo_bytes, page_lines, page_texts
from tests.standings import factor, standing, without_pd

LONG_NAME = (
    "The Very Long and Winding Brackwater Millworks, Foundries and Galvanising Works of the Northern Estuary Ltd"
)
LONG_LABEL = "Operating profit before depreciation and exceptional items to average total assets"
TWELVE = tuple(
    factor(f"{LONG_LABEL} {number}", f"r{number}", "times", 1234.5, 0.4 - number / 10) for number in range(12)
)
FIRST_PAGES = {
    "usual": first_page(),
    "nothing written": first_page(request="", weak_spots="", recommendation="", conditions=""),
    "all texts long": first_page(
        request=WORDS * 8, weak_spots=WORDS * 8, recommendation=WORDS * 12, conditions=WORDS * 12
    ),
    "long name": first_page(obligor=LONG_NAME * 2, description=LONG_NAME * 2),
    "name without spaces": first_page(obligor="B" * 120),
    "many weak spots": first_page(spots_found=(Spot(WORDS),) * 30),
    "everything long": first_page(
        obligor=LONG_NAME * 2,
        request="word " * 2000,
        recommendation="line\n" * 200,
        weak_spots="spot " * 900,
        conditions=WORDS * 40,
        spots_found=(Spot(WORDS),) * 30,
        caution=WORDS * 2,
    ),
    "endless": first_page(
        obligor="Millworks " * 500,
        description="B" * 5000,
        pd=None,
        pd_text="no PD",
        pd_notes=("reason " * 700, "reason " * 700),
        grade="–",
        spots_found=(Spot("finding " * 900, "■"), Spot("F" * 5000)),
    ),
    "no ratios": first_page(key_heads=(), key_ratios=()),
    "no PD": first_page(pd=None, pd_text="no PD", pd_notes=(WORDS,), grade="–", grade_note="no grade"),
    "default": first_page(grade="D", grade_note="in default, model 6"),
}
STANDINGS = {
    "usual": standing(),
    "twelve factors": standing(factors=TWELVE),
    "no PD": without_pd(),
    "no curve": standing(curve=None),
    "not usable": standing(usable=False, grade=GradeStanding("none", "none", "none", ())),
}


def _draft(**changes: object) -> MemoContent:
    return content(draft="DRAFT — not usable until resolved", **changes)


@pytest.mark.parametrize("name", FIRST_PAGES)
def test_the_decision_fits_one_page_however_long_its_texts_are(name: str) -> None:
    first = FIRST_PAGES[name]
    texts = page_texts(memo_bytes(content(first), standing(factors=TWELVE)))
    for words in ("Recommendation.", "Prepared and signed", "Countersigned", "Page 1 of"):
        assert words in texts[0]
    assert not any("Countersigned" in text for text in texts[1:])
    assert " ".join(first.caution.split())[:60] in texts[0]


@pytest.mark.parametrize("name", STANDINGS)
def test_any_standing_fits_the_first_page(name: str) -> None:
    texts = page_texts(memo_bytes(content(), STANDINGS[name]))
    assert "Countersigned" in texts[0]


@pytest.mark.parametrize("name", FIRST_PAGES)
def test_nothing_leaves_the_page_and_no_line_covers_another(name: str) -> None:
    pdf = memo_bytes(_draft(first=FIRST_PAGES[name]), standing(factors=TWELVE))
    for page in range(len(page_texts(pdf))):
        lines = page_lines(pdf, page)
        outside = [line.text for line in lines if not _inside(line)]
        assert not outside
        covering = [(one.text, two.text) for one, two in combinations(lines, 2) if _overlap(one, two)]
        assert not covering


def _inside(line: Line) -> bool:
    return (
        line.left >= MARGIN - 1 and line.right <= PAGE_WIDTH - MARGIN + 1 and 15 < line.bottom < line.top < PAGE_HEIGHT
    )


def _overlap(one: Line, two: Line) -> bool:
    across = min(one.right, two.right) - max(one.left, two.left)
    up = min(one.top, two.top) - max(one.bottom, two.bottom)
    return across > 1 and up > 2.5  # descenders may reach into the next line's ascenders


def test_a_text_that_was_cut_points_to_the_page_where_it_stands_in_full() -> None:
    text = WORDS * 11 + "The last word."
    texts = page_texts(memo_bytes(content(first_page(conditions=text)), standing()))
    assert "… continued on page 2" in texts[0]
    assert "The last word." not in texts[0]
    assert "Texts by the officer, in full" in texts[1]
    assert "The last word." in texts[1]


def test_a_text_that_fits_is_printed_once() -> None:
    texts = page_texts(memo_bytes(content(), standing()))
    assert "continued on page" not in " ".join(texts)
    assert sum(text.count("tested half-yearly") for text in texts) == 1


def test_what_the_officer_has_not_written_is_said_to_be_missing() -> None:
    first = first_page(request="", weak_spots="", recommendation="", conditions="")
    assert page_texts(memo_bytes(content(first), standing()))[0].count("not yet written by the officer") == 4


def test_every_page_says_which_it_is_of_how_many_and_which_case_it_belongs_to() -> None:
    long = content(sections=(Section("Figures", (figures(lines=140),)),))
    texts = page_texts(memo_bytes(long, standing()))
    assert len(texts) > 3
    for number, text in enumerate(texts, start=1):
        assert f"Page {number} of {len(texts)}" in text
        assert "case 7f3a·c91e" in text


def test_a_table_over_several_pages_repeats_its_head() -> None:
    long = content(sections=(Section("Figures", (figures(lines=140),)),))
    texts = page_texts(memo_bytes(long, standing()))
    assert all("GBP thousands" in text for text in texts[1:])


def test_a_draft_says_so_across_the_head_of_every_page() -> None:
    texts = page_texts(memo_bytes(_draft(), standing()))
    assert all("DRAFT — not usable until resolved" in text for text in texts)
    assert not any("DRAFT" in text for text in page_texts(memo_bytes(content(), standing())))


def test_no_row_of_a_table_stands_alone_on_a_page() -> None:
    for lines in range(20, 75, 3):
        facts = Pairs("Facts", tuple((f"name {number}", f"fact {number}") for number in range(lines)))
        for blocks in ((facts,), (figures(lines=lines),)):
            for text in page_texts(memo_bytes(content(sections=(Section("Long", blocks),)), standing()))[1:]:
                assert text.count("fact ") + text.count(" of the borrower's statements") != 1


@pytest.mark.parametrize("periods", [1, 2, 3])
def test_a_grid_of_few_periods_is_as_wide_as_the_text(periods: int) -> None:
    for line in ("Ratio", "A name so long that it would fill half of the width of the page and more"):
        heads = (line, *(str(2025 - number) for number in range(periods)))
        rows = (Row((Cell(line), *(Cell("1.00×") for _ in range(periods)))),)
        grid = Grid("Ratios", heads, rows, (3.4, *(0.85 for _ in range(periods))))
        (table, *_) = grid_flowables(grid, TEXT_WIDTH)
        assert sum(table._colWidths) == pytest.approx(TEXT_WIDTH)


@pytest.mark.parametrize("periods", [1, 3, 8])
def test_large_amounts_in_many_periods_do_not_touch(periods: int) -> None:
    rows = tuple(
        Row((Cell("Property, plant and equipment"), *(Cell("−123 456 789 012") for _ in range(periods))))
        for _ in range(3)
    )  # fmt: skip
    heads = ("GBP", *(f"31.12.{2018 + number}, 12 m" for number in range(periods)))
    grid = Grid("Figures", heads, rows, (3.0, *(1.0 for _ in range(periods))))
    pdf = memo_bytes(content(sections=(Section("Figures", (grid,)),)), standing())
    lines = page_lines(pdf, 1)
    assert not [(one, two) for one, two in combinations(lines, 2) if _overlap(one, two)]
    assert page_texts(pdf)[1].count("123 456 789 012") == 3 * periods


def test_a_cell_as_long_as_a_book_is_cut_and_says_where_it_stands_in_full() -> None:
    book = "word " * 4000
    row = Row((Cell("1"), Cell("Inventories"), Cell(book)))
    grid = Grid("Findings", ("Weight", "Where", "What"), (row,) * 4, (0.7, 1.6, 4.2), words=(0, 1, 2))
    noted = Grid("Stress events", ("Event", "PD"), (Row((Cell("One"), Cell("1"))), note_row(book)) * 3, (3, 1))
    texts = page_texts(memo_bytes(content(sections=(Section("Long", (grid, noted)),)), standing()))
    assert "".join(texts).count("in full in the attached case") == 7


def test_markup_and_foreign_characters_in_a_text_are_printed_not_run() -> None:
    first = first_page(obligor="<b>& 東京 Łódź", recommendation='a < b & c > d <font size="99">x</font>')
    text = page_texts(memo_bytes(content(first), standing()))[0]
    assert "<b>& ◊◊ Łódź" in text
    assert 'a < b & c > d <font size="99">x</font>' in text


def test_only_our_fonts_are_used_and_all_are_embedded() -> None:
    with pikepdf.open(BytesIO(memo_bytes(content(), standing()))) as pdf:
        fonts = {str(font.BaseFont) for page in pdf.pages for font in page.resources.Font.values()}
    assert {name.partition("+")[2].partition("-")[0] for name in fonts} == {"SourceSansPro", "SourceSerifPro"}


def test_both_signature_fields_stand_on_page_one_and_are_empty() -> None:
    with pikepdf.open(BytesIO(memo_bytes(content(), standing()))) as pdf:
        fields = list(pdf.Root.AcroForm.Fields)
        assert [str(field.T) for field in fields] == ["Preparer", "Approver"]
        assert all("/V" not in field for field in fields)
        boxes = [[float(edge) for edge in field.Rect] for field in fields]
    assert all(right - left > 200 and top - bottom > 60 for left, bottom, right, top in boxes)


def test_headings_figures_and_tables_are_tagged() -> None:
    with pikepdf.open(BytesIO(memo_bytes(content(), standing()))) as pdf:
        roles = list(_roles(pdf.Root.StructTreeRoot.K))
    assert roles.count("/H1") == 1
    assert roles.count("/Figure") == 2
    assert roles.count("/Table") == 4
    assert roles.count("/Form") == 2
    assert "/TH" in roles


def _roles(node: pikepdf.Object) -> list[str]:
    if not isinstance(node, pikepdf.Dictionary) or "/S" not in node:
        return []
    kids = node.get("/K", pikepdf.Array())
    found = [str(node.S)]
    for kid in list(kids) if isinstance(kids, pikepdf.Array) else [kids]:
        found += _roles(kid)
    return found


@pytest.mark.needs("qpdf")
def test_an_outside_program_finds_the_file_sound(tmp_path: Path) -> None:
    path = tmp_path / "memo.pdf"
    path.write_bytes(memo_bytes(content(), standing()))
    done = subprocess.run(["qpdf", "--check", str(path)], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout + done.stderr


PROGRAM = """
import hashlib, sys
from tests.contents import content
from tests.memo.reading import memo_bytes
from tests.standings import standing
sys.stdout.write(hashlib.sha256(memo_bytes(content(), standing())).hexdigest())
"""


def test_equal_content_gives_equal_bytes_in_any_process_time_zone_and_locale() -> None:
    here = Path(__file__).parents[2]
    worlds = (
        {"TZ": "Pacific/Kiritimati", "PYTHONHASHSEED": "1", "LC_ALL": "C"},
        {"TZ": "America/Los_Angeles", "PYTHONHASHSEED": "2", "LC_ALL": "C.UTF-8", "LANG": "de_DE.UTF-8"},
    )
    digests = {
        subprocess.run(
            [sys.executable, "-c", PROGRAM],
            env=os.environ | world,
            cwd=here,
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        for world in worlds
    }
    assert len(digests) == 1
    assert len(digests.pop()) == 64


def test_other_content_gives_other_bytes() -> None:
    assert memo_bytes(content(), standing()) != memo_bytes(content(first_page(grade="7")), standing())
