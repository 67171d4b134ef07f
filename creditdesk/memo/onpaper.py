"""Charts on paper: a matplotlib renderer that draws on a reportlab canvas.

Text stays text, in the registered fonts; equal figures give equal bytes. Lengths are points, y runs upwards on both
sides. What a chart of this house never needs (images, shaded triangles, mathematical text, hatching) is refused.
"""

from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from functools import cache
from typing import Any, cast

from matplotlib.backend_bases import FigureCanvasBase, GraphicsContextBase, RendererBase
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties, fontManager, weight_dict
from matplotlib.path import Path
from matplotlib.transforms import IdentityTransform, Transform
from matplotlib.typing import ColorType
from reportlab.pdfbase.pdfmetrics import stringWidth
from reportlab.pdfgen.canvas import Canvas
from reportlab.pdfgen.pathobject import PDFPathObject

from creditdesk.base.errors import BugError
from creditdesk.house.fontfiles import SERIF_FAMILY, Face, font_files
from creditdesk.memo.fonts import glyph_ink, register_fonts

POINTS_PER_INCH = 72.0
_FILL_NON_ZERO = 1  # reportlab's name for the winding rule matplotlib fills by
Frame = tuple[float, float, float, float]
_CAPS = {"butt": 0, "round": 1, "projecting": 2}
_JOINS = {"miter": 0, "round": 1, "bevel": 2}


def draw_figure(figure: Figure, canvas: Canvas, x: float, y: float, width: float, height: float) -> None:
    """Draw a figure with its lower left corner at ``x``, ``y``, made to fit ``width`` by ``height`` points.

    The figure is laid out anew at that size, so that its text keeps its size in points; size, resolution and canvas of
    the figure are as before afterwards.
    """
    register_fonts()
    _teach_matplotlib_the_fonts()
    renderer = PaperRenderer(canvas, width, height)
    canvas.saveState()
    canvas.translate(x, y)
    with _laid_out_for_paper(figure, renderer):
        figure.draw(renderer)
    canvas.restoreState()


@cache
def _teach_matplotlib_the_fonts() -> None:
    """Let matplotlib space lines by the fonts that are printed, whatever the system has installed."""
    known = {entry.fname for entry in fontManager.ttflist}
    for file in font_files():
        if str(file) not in known:
            fontManager.addfont(file)


@contextmanager
def _laid_out_for_paper(figure: Figure, renderer: "PaperRenderer") -> Iterator[None]:
    dpi, (width, height), canvas = figure.dpi, figure.get_size_inches(), figure.canvas
    try:
        _PaperCanvas(figure, renderer)
        figure.dpi = POINTS_PER_INCH
        figure.set_size_inches(renderer.width / POINTS_PER_INCH, renderer.height / POINTS_PER_INCH, forward=False)
        yield
    finally:
        figure.set_canvas(canvas)
        figure.dpi = dpi
        figure.set_size_inches(width, height, forward=False)


class _PaperCanvas(FigureCanvasBase):
    """Give layout engines and text the paper's own measures."""

    def __init__(self, figure: Figure, renderer: "PaperRenderer") -> None:
        super().__init__(figure)
        self._renderer = renderer

    def get_renderer(self) -> "PaperRenderer":
        return self._renderer


class PaperRenderer(RendererBase):
    """Turn matplotlib's drawing calls into reportlab's; ``width`` and ``height`` are the drawing's, in points."""

    def __init__(self, canvas: Canvas, width: float, height: float) -> None:
        super().__init__()
        self.width, self.height = width, height
        self._paper = canvas

    def get_canvas_width_height(self) -> tuple[float, float]:
        """Return the drawing's size in points."""
        return self.width, self.height

    def flipy(self) -> bool:
        """Say that y runs upwards."""
        return False

    def points_to_pixels(self, points: float) -> float:  # type: ignore[override]  # the base is typed for arrays too
        """Return points unchanged: a pixel is a point here."""
        return points

    def get_text_width_height_descent(
        self, s: str, prop: FontProperties, ismath: bool | str
    ) -> tuple[float, float, float]:
        """Return width, height and descent of one line, from the glyphs' own boxes."""
        _refuse_mathematical_text(s, ismath)
        face, size = paper_face(prop), prop.get_size_in_points()
        lowest, highest = _ink_of_line(s, face)
        return stringWidth(s, str(face), size), (highest - lowest) * size, -lowest * size

    def draw_path(
        self, gc: GraphicsContextBase, path: Path, transform: Transform, rgbFace: ColorType | None = None
    ) -> None:
        """Draw and fill a path of lines and curves."""
        if gc.get_hatch():
            raise BugError("A chart asks for hatching, which the paper renderer does not draw.")
        colour = cast("Sequence[float] | None", rgbFace)  # what artists hand over is always in numbers
        fill, stroke = _visible(colour), gc.get_linewidth() > 0 and _visible(gc.get_rgb())
        if not fill and not stroke:
            return
        # Points far outside the paper make wild coordinates; a line may be cut there, an outline may not.
        frame = None if fill else (-self.width, -self.height, 2 * self.width, 2 * self.height)
        with self._clipped(gc):
            if colour is not None and fill:
                self._paper.setFillColorRGB(*colour[:3])
                self._set_alpha(self._paper.setFillAlpha, gc, colour)
            if stroke:
                self._set_pen(gc)
            self._paper.drawPath(
                self._outline(path, transform, frame), stroke=int(stroke), fill=int(fill), fillMode=_FILL_NON_ZERO
            )

    def draw_text(
        self,
        gc: GraphicsContextBase,
        x: float,
        y: float,
        s: str,
        *font_and_angle: Any,  # noqa: ANN401  # the base class's further parameters, as matplotlib passes them
        **options: object,
    ) -> None:
        """Draw one line of text from its left end on the baseline, turned by an angle in degrees."""
        _refuse_mathematical_text(s, options.get("ismath"))
        prop, angle = font_and_angle[:2]
        colour = gc.get_rgb()
        if not s.strip() or not _visible(colour):
            return
        with self._clipped(gc):
            self._paper.setFillColorRGB(*colour[:3])
            self._set_alpha(self._paper.setFillAlpha, gc, colour)
            self._paper.setFont(str(paper_face(prop)), prop.get_size_in_points())
            self._paper.translate(_rounded(x), _rounded(y))
            if angle:
                self._paper.rotate(angle)
            self._paper.drawString(0, 0, s)

    def draw_image(self, *_args: object, **_options: object) -> None:
        """Refuse pictures made of pixels."""
        raise BugError("A chart asks for an image, which the paper renderer does not draw.")

    def draw_gouraud_triangles(self, *_args: object, **_options: object) -> None:
        """Refuse shaded triangles."""
        raise BugError("A chart asks for shaded triangles, which the paper renderer does not draw.")

    @contextmanager
    def _clipped(self, gc: GraphicsContextBase) -> Iterator[None]:
        self._paper.saveState()
        rectangle = gc.get_clip_rectangle()
        if rectangle is not None:
            outline = self._paper.beginPath()
            x, y, width, height = (_rounded(value) for value in rectangle.bounds)
            outline.rect(x, y, width, height)
            self._paper.clipPath(outline, stroke=0, fill=0)
        path, transform = gc.get_clip_path()
        if path is not None:
            outline = self._outline(cast("Path", path), transform or IdentityTransform(), None)
            self._paper.clipPath(outline, stroke=0, fill=0, fillMode=_FILL_NON_ZERO)
        yield
        self._paper.restoreState()

    def _set_pen(self, gc: GraphicsContextBase) -> None:
        colour = gc.get_rgb()
        self._paper.setStrokeColorRGB(*colour[:3])
        self._set_alpha(self._paper.setStrokeAlpha, gc, colour)
        self._paper.setLineWidth(_rounded(gc.get_linewidth()))
        self._paper.setLineCap(_CAPS[str(gc.get_capstyle())])
        self._paper.setLineJoin(_JOINS[str(gc.get_joinstyle())])
        offset, dashes = gc.get_dashes()
        if dashes is not None:
            lengths = cast("Sequence[float]", dashes)
            self._paper.setDash([_rounded(length) for length in lengths], _rounded(offset or 0.0))

    def _set_alpha(self, setter: Callable[[float], None], gc: GraphicsContextBase, colour: Sequence[float]) -> None:
        forced = gc.get_forced_alpha() or len(colour) < 4
        alpha = gc.get_alpha() if forced else colour[3]
        if alpha < 1.0:
            setter(_rounded(alpha))

    def _outline(self, path: Path, transform: Transform, frame: Frame | None) -> PDFPathObject:
        outline = self._paper.beginPath()
        here = (0.0, 0.0)
        for numbers, code in path.iter_segments(transform, clip=frame, simplify=False):
            points: list[float] = [_rounded(number) for number in numbers]
            if code == Path.MOVETO:
                outline.moveTo(*points)
            elif code == Path.LINETO:
                outline.lineTo(*points)
            elif code == Path.CURVE3:
                outline.curveTo(*_as_cubic(here, points))
            elif code == Path.CURVE4:
                outline.curveTo(*points)
            elif code == Path.CLOSEPOLY:
                outline.close()
                continue
            here = (points[-2], points[-1])
        return outline


def paper_face(prop: FontProperties) -> Face:
    """Return the registered face nearest to the wished font: family, weight and slant; anything unknown is sans."""
    family = "SERIF" if SERIF_FAMILY in prop.get_family() else "SANS"
    wished = prop.get_weight()
    weight = weight_dict[wished] if isinstance(wished, str) else wished
    bold = "_BOLD" if weight >= 650 else "_SEMIBOLD" if weight >= 550 else ""
    italic = "_ITALIC" if prop.get_style() in ("italic", "oblique") else ""
    return Face[family + bold + italic]


def _refuse_mathematical_text(text: str, ismath: object) -> None:
    if ismath:
        raise BugError(f"A chart asks for mathematical text ({text!r}): write plain labels instead.")


def _visible(colour: Sequence[float] | None) -> bool:
    return colour is not None and (len(colour) < 4 or colour[3] > 0)


def _rounded(value: float) -> float:
    return round(float(value), 3)


def _as_cubic(
    start: tuple[float, float], quadratic: Sequence[float]
) -> tuple[float, float, float, float, float, float]:
    """Return the cubic curve equal to a quadratic one: its handles lie two thirds of the way to the control point."""
    (x0, y0), (cx, cy, x1, y1) = start, quadratic
    return (
        _rounded(x0 + 2 / 3 * (cx - x0)),
        _rounded(y0 + 2 / 3 * (cy - y0)),
        _rounded(x1 + 2 / 3 * (cx - x1)),
        _rounded(y1 + 2 / 3 * (cy - y1)),
        x1,
        y1,
    )


def _ink_of_line(text: str, face: Face) -> tuple[float, float]:
    """Return the lowest and highest ink of a line, in ems from the baseline."""
    boxes = [box for character in text if (box := glyph_ink(character, face)) is not None]
    return min((low for low, _ in boxes), default=0.0), max((high for _, high in boxes), default=0.0)
