from itertools import pairwise
from math import log

import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.palette import contrast, relative_luminance
from creditdesk.charts.pdscale import PdScale, round_text, scale_for
from creditdesk.charts.shades import mixed, shades
from creditdesk.charts.style import PALETTES, text_width
from tests.charts.colourvision import MISSING, distance, linear, seen

SIZE = 9.0


def test_places_are_even_in_log_odds() -> None:
    scale = PdScale(0.01, 0.5, 0.0, 100.0)
    assert scale.at(0.01) == 0.0
    assert scale.at(0.5) == 100.0
    low, middle = log(0.01 / 0.99), log(0.1 / 0.9)
    assert scale.at(0.1) == pytest.approx(100 * (middle - low) / -low)
    assert scale.at(0.9) == 100.0, "held at the end"


@given(st.lists(st.floats(1e-6, 1 - 1e-6), min_size=1, max_size=6), st.floats(60, 600))
def test_a_scale_holds_what_it_is_for_between_round_ends_and_marks_that_stand_apart(
    pds: list[float], end: float
) -> None:
    scale = scale_for(pds, (0.0, end))
    held = [min(max(pd, 1e-6), 0.999) for pd in pds]
    assert scale.low <= min(held) * (1 + 1e-9)
    assert scale.high >= max(held) * (1 - 1e-9)
    ticks = scale.ticks(SIZE)
    assert ticks
    for (at, words), (other, others) in pairwise(ticks):
        assert other - at >= (text_width(words, SIZE) + text_width(others, SIZE)) / 2


def test_nothing_known_and_a_single_pd_still_make_a_scale() -> None:
    assert scale_for([float("nan")], (0.0, 100.0)).ticks(SIZE)
    scale = scale_for([0.02], (0.0, 100.0))
    assert scale.low < 0.02 < scale.high


@pytest.mark.parametrize(
    ("pd", "words"),
    [(0.0005, "0.05"), (0.002, "0.2"), (0.005, "0.5"), (0.01, "1"), (0.2, "20"), (0.99, "99"), (0.995, "99.5")],
)
def test_round_probabilities_are_written_without_digits_they_do_not_have(pd: float, words: str) -> None:
    assert round_text(pd).rstrip("% \u202f\u00a0") == words


def test_colours_mix_as_screens_do() -> None:
    assert mixed("#000000", "#FF8040", 0.0) == "#000000"
    assert mixed("#000000", "#FF8040", 1.0) == "#FF8040"
    assert mixed("#000000", "#FF8040", 0.5) == "#804020"


@pytest.mark.parametrize("palette", PALETTES.values(), ids=PALETTES)
def test_ink_is_legible_on_every_shade_and_shades_go_one_way_for_every_eye(palette: object) -> None:
    made = shades(palette, palette.breach, 24)  # type: ignore[arg-type, attr-defined]
    assert min(contrast(palette.ink, shade) for shade in made) >= 4.5  # type: ignore[attr-defined]
    brightness = [relative_luminance(shade) for shade in made]
    assert brightness in (sorted(brightness), sorted(brightness, reverse=True))
    for eye in ("trichromat", *MISSING):
        assert distance(seen(linear(made[0]), eye), seen(linear(made[-1]), eye)) > 25
