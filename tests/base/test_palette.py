import pytest

from creditdesk.base.palette import DARK, LIGHT, Palette, contrast

TEXT_COLOURS = ["ink", "second_ink", "accent", "pencil", "caution", "breach", "strength"]


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=lambda palette: palette.name)
@pytest.mark.parametrize("ground", ["paper", "sheet"])
@pytest.mark.parametrize("colour", TEXT_COLOURS)
def test_text_stands_out_from_its_ground(palette: Palette, ground: str, colour: str) -> None:
    # WCAG 2.2, success criterion 1.4.3: 4.5 to 1 for text.
    assert contrast(getattr(palette, colour), getattr(palette, ground)) >= 4.5


def test_contrast_of_black_and_white_is_21() -> None:
    # WCAG 2.2, definition of contrast ratio: it ranges from 1 to 21.
    assert contrast("#000000", "#FFFFFF") == pytest.approx(21)
    assert contrast("#123456", "#123456") == 1
