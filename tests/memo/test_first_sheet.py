"""Page one holds one page, whatever a case brings: lengths of names, texts, periods and their months are drawn."""

from datetime import date

import msgspec
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from creditdesk.case.assess import assess
from creditdesk.case.document import Assessment, Case
from creditdesk.memo.blocks import FirstPage, KeyRatio, MemoContent, Spot
from creditdesk.memo.content import memo_content
from creditdesk.memo.firstparts import key_ratio_table
from creditdesk.memo.firstsheet import first_sheet
from creditdesk.memo.fonts import register_fonts
from creditdesk.memo.issue import draft_memo
from creditdesk.memo.page import print_pages
from creditdesk.memo.structure import Structure
from tests.borrowers import SOUND, STRETCHED, demo, shipped_house
from tests.contents import content, first_page
from tests.memo.reading import page_texts
from tests.standings import factor, standing

FEW = settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow])
MANY_FACTORS = tuple(factor(f"Factor {number} " * 5, f"r{number}", "times", 1234.5, 0.4) for number in range(12))

words = st.sampled_from(["Millworks ", "B", "Straße ", "word\n", "Ⓧ ", "1 "])
texts = st.builds(lambda word, count: word * count, words, st.integers(0, 900))
names = st.builds(lambda word, count: word * count, words, st.integers(1, 120))
cells = st.sampled_from(["1.2×", "not disclosed", "−1 234 567 890.00×", "needs prior period " * 4, "a" * 60])
heads = st.sampled_from(["2025", "Dec 2025 (6 m)", "Mar 2024 (18 m) restated", "31 December 2025"])


@st.composite
def pages(draw: st.DrawFn) -> FirstPage:
    columns = draw(st.lists(heads, max_size=3))
    shown = st.tuples(*(cells for _ in columns))
    ratios = st.builds(
        lambda label, own: KeyRatio(label, own, tuple(None if "n" in text else 1.0 for text in own)), names, shown
    )
    return first_page(
        obligor=draw(names),
        description=draw(texts),
        request=draw(texts),
        pd_notes=tuple(draw(st.lists(texts, max_size=3))),
        key_heads=tuple(columns),
        key_ratios=tuple(draw(st.lists(ratios, max_size=9))),
        spots_found=tuple(Spot(text, "▲") for text in draw(st.lists(texts.filter(str.strip), max_size=12))),
        weak_spots=draw(texts),
        recommendation=draw(texts),
        conditions=draw(texts),
    )


def pages_of(made: MemoContent, **changes: object) -> int:
    register_fonts()
    _, count = print_pages(made, list(first_sheet(made, standing(**changes)).flowables), Structure(), 1)
    return count


@FEW
@given(pages(), st.booleans())
def test_any_words_fit_one_page(page: FirstPage, many: bool) -> None:
    made = content(page)

    assert pages_of(made, **({"factors": MANY_FACTORS} if many else {})) == 1


def test_the_longest_of_everything_fits_one_page() -> None:
    long = "Millworks " * 900
    ratios = (KeyRatio(long, ("−1 234 567 890.00×", long, long), (1.0, None, None)),) * 9
    page = first_page(
        obligor=long, description=long, request=long, pd=None, pd_text="not usable", pd_notes=(long,) * 3,
        grade="–", grade_note="no grade", key_heads=("Mar 2024 (18 m) restated",) * 3, key_ratios=ratios,
        spots_found=(Spot(long, "■"),) * 40, weak_spots=long, recommendation=long, conditions=long,
        caution=first_page().caution * 4,
    )  # fmt: skip

    assert pages_of(content(page), factors=MANY_FACTORS) == 1


@st.composite
def cases(draw: st.DrawFn) -> Case:
    """Take a demonstration case, and give it other periods, other months and another size."""
    base = demo(draw(st.sampled_from([SOUND, STRETCHED])))
    count = draw(st.integers(1, 8))
    column = [draw(st.integers(0, len(base.periods) - 1)) for _ in range(count)]
    size = draw(st.sampled_from([1e-3, 1.0, 1.0, 1e6]))
    figures = {key: tuple(size * row[one] for one in column) for key, row in base.figures.items()}
    months = st.sampled_from([3, 6, 6, 9, 12, 12, 18])
    periods = tuple(
        msgspec.structs.replace(base.periods[one], ends=date(2026 - count + place, 12, 31), months=draw(months))
        for place, one in enumerate(column)
    )
    return msgspec.structs.replace(
        base,
        obligor=msgspec.structs.replace(base.obligor, name=draw(names.filter(str.strip))),
        periods=periods,
        figures=figures,
        printed={},
        typed={},
        notes={},
        adjustments=(),
        assessment=Assessment(date(2026, 3, 15)),
        texts={key: draw(texts) for key in ("request", "weak_spots", "recommendation", "conditions")},
    )


@FEW
@given(cases())
def test_any_case_fits_one_page(case: Case) -> None:
    found = assess(case, shipped_house())
    made = memo_content(case, found, shipped_house())
    register_fonts()

    _, count = print_pages(made, list(first_sheet(made, found).flowables), Structure(), 1)

    assert count == 1


def with_months(case: Case, months: int) -> Case:
    last = msgspec.structs.replace(case.periods[-1], months=months)
    return msgspec.structs.replace(case, periods=(*case.periods[:-1], last))


@pytest.mark.parametrize("name", [SOUND, STRETCHED])
@pytest.mark.parametrize("months", [3, 6, 18])
def test_a_short_or_long_assessed_period_gives_a_memo_to_sign(name: str, months: int) -> None:
    first = page_texts(draft_memo(with_months(demo(name), months), shipped_house()))[0]

    assert "Countersigned" in first
    assert f"({months} m)" in first.replace("\u00a0", " ")


def test_wide_heads_make_the_key_ratios_one_line_higher_and_no_more() -> None:
    register_fonts()
    years, months = first_page(), first_page(key_heads=("2023", "2024", "Dec 2025 (6 m)"))

    plain, wide = (key_ratio_table(page, 223.0, 8).wrap(223.0, 10_000)[1] for page in (years, months))

    assert plain < wide < plain + 12
