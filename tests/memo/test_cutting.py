from hypothesis import given, settings
from hypothesis import strategies as st

from creditdesk.memo.cutting import cut_to_lines, lines_of
from creditdesk.memo.fonts import register_fonts
from creditdesk.memo.styles import BODY, marked_up
from creditdesk.memo.tagging import TaggedParagraph

register_fonts()


def _make(text: str) -> TaggedParagraph:
    return TaggedParagraph(marked_up(text), BODY)


@settings(max_examples=60, deadline=None)
@given(st.text(alphabet="abc <&é\n", max_size=600), st.integers(1, 5))
def test_a_cut_text_never_takes_more_lines_than_it_may(text: str, lines: int) -> None:
    shown, cut = cut_to_lines(_make, text, 140, lines)
    assert lines_of(_make(shown), 140) <= lines
    assert cut == (shown != text) or text.endswith("…")
    if cut:
        assert text.startswith(shown.removesuffix("…"))


def test_as_much_is_kept_as_fits_and_it_ends_at_a_word() -> None:
    text = "one two three four five six seven eight nine ten eleven twelve " * 8
    shown, cut = cut_to_lines(_make, text, 140, 3, " … more")
    kept = shown.removesuffix(" … more")
    assert cut
    assert text.startswith(kept + " ")
    longer = text[: len(kept) + 15] + " … more"
    assert lines_of(_make(longer), 140) > 3
