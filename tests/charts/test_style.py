import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg

from creditdesk.base.palette import DARK, LIGHT, Palette, contrast
from creditdesk.charts.board import Board
from creditdesk.charts.style import (
    PALETTES,
    PAPER,
    RC,
    Pen,
    Type,
    font,
    new_figure,
    shorten,
    text_width,
    type_size,
    wrap,
)
from creditdesk.house.fontfiles import Face, font_path

TEXT = ("ink", "second_ink", "accent", "pencil", "caution", "breach", "strength")


@pytest.mark.parametrize("palette", PALETTES.values(), ids=PALETTES)
@pytest.mark.parametrize("colour", TEXT)
@pytest.mark.parametrize("ground", ["paper", "sheet"])
def test_text_keeps_four_and_a_half_to_one(palette: Palette, colour: str, ground: str) -> None:
    # WCAG 2.2, success criterion 1.4.3 (AA): 4.5:1 for text.
    assert contrast(getattr(palette, colour), getattr(palette, ground)) >= 4.5


@pytest.mark.parametrize("palette", PALETTES.values(), ids=PALETTES)
@pytest.mark.parametrize("colour", ["ink", "second_ink", "caution"])
def test_what_is_written_over_grade_bands_is_read_there_too(palette: Palette, colour: str) -> None:
    assert contrast(getattr(palette, colour), palette.band) >= 4.5


@pytest.mark.parametrize("palette", PALETTES.values(), ids=PALETTES)
def test_bars_stand_out_from_the_sheet(palette: Palette) -> None:
    # WCAG 2.2, success criterion 1.4.11: 3:1 for graphics that carry meaning.
    assert contrast(palette.breach, palette.sheet) >= 3
    assert contrast(palette.strength, palette.sheet) >= 3


def test_paper_is_white_and_its_type_is_smaller() -> None:
    assert PAPER.paper == "#FFFFFF"
    assert type_size(PAPER) < type_size(LIGHT) == type_size(DARK)


def test_a_font_is_given_by_its_file_and_by_name() -> None:
    semibold = font(Face.SANS_SEMIBOLD)
    assert semibold.get_file() == str(font_path(Face.SANS_SEMIBOLD))
    assert semibold.get_weight() == 600
    assert font(Face.SERIF_ITALIC).get_style() == "italic"
    assert font(Face.SERIF).get_family() == ["Source Serif Pro"]


@pytest.mark.parametrize("words", ["grade 12", "Operating profit / assets", "−4.05", "12\u202f500"])
def test_a_measured_width_is_the_width_reportlab_prints(words: str) -> None:
    from reportlab.pdfbase.pdfmetrics import stringWidth

    from creditdesk.memo.fonts import register_fonts

    register_fonts()
    assert text_width(words, 10) == pytest.approx(stringWidth(words, str(Face.SANS), 10), rel=0.02, abs=0.6)


def test_a_text_is_cut_to_the_width_it_has() -> None:
    words = "Operating profit before depreciation to average total assets"
    cut = shorten(words, 80, 8)
    assert cut.endswith("…")
    assert text_width(cut, 8) <= 80
    assert words.startswith(cut[:-1])
    assert shorten(words, 800, 8) == words


def test_text_breaks_at_spaces_and_keeps_every_word() -> None:
    words = "Interest-bearing debt for each unit of equity that is left"
    lines = wrap(words, 90, 8)
    assert " ".join(lines) == words
    assert all(text_width(line, 8) <= 90 for line in lines)
    assert wrap("", 90, 8) == []


def test_no_line_breaks_inside_a_number_or_before_its_unit() -> None:
    assert wrap("1\u202f234.50x 12\u00a0%", 1, 8) == ["1\u202f234.50x", "12\u00a0%"]


def test_no_setting_of_the_user_lets_a_label_be_read_as_a_formula() -> None:
    figure = new_figure((200, 100))
    text = Board(figure).text("layer", (10, 10), "$5 of $x_2$", Type(LIGHT.ink, 8))
    assert RC["text.usetex"] is False
    assert text.get_parse_math() is False
    FigureCanvasAgg(figure).draw()


def test_a_character_the_font_lacks_is_shown_as_a_lozenge_without_a_warning() -> None:
    figure = new_figure((200, 100))
    text = Board(figure).text("layer", (10, 10), "東京 Ltd", Type(LIGHT.ink, 8))
    FigureCanvasAgg(figure).draw()
    assert text.get_text() == "◊◊ Ltd"


def test_a_layer_is_rubbed_out_alone() -> None:
    board = Board(new_figure((200, 100)))
    style = Type(LIGHT.ink, 8)
    board.text("one", (10, 10), "kept", style)
    board.text("two", (10, 30), "gone", style)
    board.clear("two")
    assert [artist.get_text() for artist in board.figure.artists] == ["kept"]
    assert board.marks("two") == ()
    assert len(board.marks("one")) == 1


def test_a_place_in_points_is_the_same_place_at_any_resolution() -> None:
    figure = new_figure((200, 100))
    dot = Board(figure).box("layer", (50, 20), (10, 10), fill=_pen())
    for dpi in (72, 96, 192):
        figure.set_dpi(dpi)
        corner = dot.get_window_extent().p0
        assert corner == pytest.approx((50 * dpi / 72, 20 * dpi / 72))


def _pen() -> Pen:
    return Pen(LIGHT.ink)
