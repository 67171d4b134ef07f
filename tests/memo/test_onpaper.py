from collections.abc import Callable
from io import BytesIO

import numpy as np
import pikepdf
import pypdfium2
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties, get_font
from matplotlib.ft2font import LoadFlags
from matplotlib.patches import Circle, Ellipse, PathPatch
from matplotlib.path import Path
from reportlab.pdfgen.canvas import Canvas

from creditdesk.base.errors import BugError
from creditdesk.house.fontfiles import Face, font_path
from creditdesk.memo.fonts import register_fonts
from creditdesk.memo.onpaper import PaperRenderer, draw_figure, paper_face

WIDTH, HEIGHT = 300, 200


def on_paper(figure: Figure) -> bytes:
    register_fonts()
    target = BytesIO()
    canvas = Canvas(target, pagesize=(WIDTH, HEIGHT), invariant=1, initialFontName=str(Face.SANS))
    draw_figure(figure, canvas, 0, 0, WIDTH, HEIGHT)
    canvas.save()
    return target.getvalue()


def picture(pdf: bytes, scale: float = 1) -> np.ndarray:
    with pypdfium2.PdfDocument(pdf) as document:
        return np.asarray(document[0].render(scale=scale).to_pil().convert("RGB")).astype(int)


def text_of(pdf: bytes) -> str:
    with pypdfium2.PdfDocument(pdf) as document:
        return str(document[0].get_textpage().get_text_range())


def bare() -> Figure:
    figure = Figure(figsize=(WIDTH / 72, HEIGHT / 72), dpi=72)
    axes = figure.add_axes((0, 0, 1, 1))
    axes.set_axis_off()
    axes.set_xlim(0, WIDTH)
    axes.set_ylim(0, HEIGHT)
    return figure


def shapes() -> Figure:
    figure = bare()
    axes = figure.axes[0]
    axes.plot([10, 100, 290], [20, 180, 60], lw=3, color="#2B4C7E", solid_capstyle="round")
    axes.plot([10, 290], [100, 100], lw=2, ls=(0, (6, 3)), color="#9C3B2C")
    axes.fill_between([20, 150, 280], [30, 40, 90], [60, 90, 150], color="#2F6B57", alpha=0.4, lw=0)
    axes.add_patch(Ellipse((220, 150), 90, 50, angle=20, facecolor="#A8690F", edgecolor="k", lw=1.5))
    axes.add_patch(Circle((70, 140), 25, facecolor="none", edgecolor="#5B6773", lw=4))
    curve = Path([(150, 20), (200, 90), (250, 20)], [Path.MOVETO, Path.CURVE3, Path.CURVE3])
    axes.add_patch(PathPatch(curve, facecolor="none", edgecolor="k", lw=2))
    axes.scatter([30, 60, 90], [170, 170, 170], s=60, marker="s", c=["r", "g", "b"])
    return figure


def labelled() -> Figure:
    figure = bare()
    figure.axes[0].text(40, 90, "score −4.05 für 12\u202f%", size=12)
    figure.axes[0].text(200, 40, "turned", size=12, rotation=90)
    return figure


def test_shapes_look_as_matplotlib_draws_them_itself() -> None:
    # outside check: matplotlib's own Agg renderer at one pixel a point
    agg = FigureCanvasAgg(shapes())
    agg.draw()
    difference = np.abs(np.asarray(agg.buffer_rgba())[..., :3].astype(int) - picture(on_paper(shapes())))
    assert difference.mean() < 2
    assert np.median(difference) == 0


def test_text_is_text_with_a_true_minus_and_its_place() -> None:
    pdf = on_paper(labelled())
    assert "score −4.05 für 12" in text_of(pdf)
    assert "turned" in text_of(pdf)
    dark = picture(pdf).sum(axis=2) < 300
    rows, columns = np.nonzero(dark[:, :180])
    assert 39 <= columns.min() <= 43
    assert 100 <= rows.min() < rows.max() <= 114  # y 90 runs upwards, so the baseline is 110 from the top
    turned_rows, turned_columns = np.nonzero(dark[:, 180:])
    assert np.ptp(turned_rows) > 2 * np.ptp(turned_columns)


def test_equal_figures_give_equal_bytes_and_stay_as_they_were() -> None:
    figure = shapes()
    figure.set_dpi(150)
    canvas = figure.canvas
    assert on_paper(figure) == on_paper(shapes()) == on_paper(figure)
    assert (figure.dpi, figure.canvas) == (150, canvas)
    assert tuple(figure.get_size_inches()) == pytest.approx((WIDTH / 72, HEIGHT / 72))


def test_a_figure_is_laid_out_at_the_size_of_its_place() -> None:
    figure = bare()
    figure.set_size_inches(20, 20)
    figure.axes[0].text(10, 10, "M", size=72)
    rows, _ = np.nonzero(picture(on_paper(figure)).sum(axis=2) < 300)
    assert np.ptp(rows) == pytest.approx(0.66 * 72, abs=2)  # the fonts' cap height is 660 of 1000


def test_nothing_is_drawn_outside_the_axes_or_a_clip_path() -> None:
    figure = Figure()
    axes = figure.add_axes((0.25, 0.25, 0.5, 0.5))
    axes.set_axis_off()
    axes.set_xlim(0, 1)
    axes.set_ylim(0, 1)
    (line,) = axes.plot([-9, 9], [0.5, 0.5], lw=8, color="k")
    columns = np.nonzero(picture(on_paper(figure)).sum(axis=2) < 300)[1]
    assert (columns.min(), columns.max()) == (WIDTH // 4, 3 * WIDTH // 4 - 1)
    line.set_clip_path(Circle((0.5, 0.5), 0.1, transform=axes.transData))
    clipped = np.nonzero(picture(on_paper(figure)).sum(axis=2) < 300)[1]
    assert np.ptp(clipped) == pytest.approx(0.2 * WIDTH / 2, abs=2)


def test_a_fill_is_as_transparent_as_asked() -> None:
    figure = bare()
    figure.axes[0].fill_between([0, WIDTH], [0, 0], [HEIGHT, HEIGHT], color="k", alpha=0.25, lw=0)
    assert picture(on_paper(figure))[100, 150] == pytest.approx([191, 191, 191], abs=1)


def test_dashes_are_written_as_they_were_given() -> None:
    with pikepdf.open(BytesIO(on_paper(shapes()))) as pdf:
        content = pdf.pages[0].Contents.read_bytes()
    assert b"[12 6] 0.0 d" in content  # matplotlib's pattern counts in line widths: 2 points


@pytest.mark.parametrize("text", ["Agpx", "−12.5 %", "grade"])
@pytest.mark.parametrize("face", [Face.SANS, Face.SERIF_BOLD])
def test_text_is_measured_as_a_font_engine_measures_it(text: str, face: Face) -> None:
    # outside check: FreeType through matplotlib, unhinted and without kerning, which reportlab does not do either
    font = get_font(str(font_path(face)))
    font.set_size(20, 72)
    font.set_text(text, 0.0, flags=LoadFlags.NO_HINTING)
    height, descent = font.get_width_height()[1] / 64, font.get_descent() / 64
    family = "Source Serif Pro" if face is Face.SERIF_BOLD else "Source Sans Pro"
    prop = FontProperties(family=family, weight="bold" if face is Face.SERIF_BOLD else "regular", size=20)
    register_fonts()
    renderer = PaperRenderer(Canvas(BytesIO()), WIDTH, HEIGHT)
    width, ours, below = renderer.get_text_width_height_descent(text, prop, ismath=False)
    assert (ours, below) == pytest.approx((height, descent), abs=0.5)
    assert width == pytest.approx(
        sum(font.load_char(ord(c), LoadFlags.NO_HINTING).linearHoriAdvance / 65536 for c in text), rel=1e-3
    )


def _mathematical(figure: Figure) -> None:
    figure.axes[0].text(5, 5, "$x^2$")


def _image(figure: Figure) -> None:
    figure.axes[0].imshow(np.zeros((2, 2)))


def _hatched(figure: Figure) -> None:
    figure.axes[0].add_patch(Circle((0, 0), 9, hatch="//"))


@pytest.mark.parametrize("ask", [_mathematical, _image, _hatched])
def test_what_it_cannot_draw_is_refused(ask: Callable[[Figure], None]) -> None:
    figure = bare()
    ask(figure)
    with pytest.raises(BugError):
        on_paper(figure)


@pytest.mark.parametrize(
    ("wish", "face"),
    [
        ({"family": "Source Serif Pro"}, Face.SERIF),
        ({"family": "Source Sans Pro", "weight": "semibold"}, Face.SANS_SEMIBOLD),
        ({"family": "Source Sans Pro", "weight": 700, "style": "italic"}, Face.SANS_BOLD_ITALIC),
        ({"family": "no such font", "weight": "light"}, Face.SANS),
    ],
)
def test_the_nearest_face_is_taken(wish: dict[str, str | int], face: Face) -> None:
    assert paper_face(FontProperties(**wish)) is face
