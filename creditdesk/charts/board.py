"""A drawing board in points: the few marks from which every chart is made, kept by layer."""

from collections.abc import Sequence

import numpy as np
from matplotlib.artist import Artist
from matplotlib.figure import Figure
from matplotlib.patches import PathPatch
from matplotlib.path import Path
from matplotlib.text import Text
from matplotlib.transforms import Affine2D, Transform
from numpy.typing import ArrayLike

from creditdesk.charts.style import CAP_HEIGHT, Pen, Size, Type, drawable, font

_ROUND = "round"
Corners = tuple[float, float, float, float]


class Board:
    """Draw on a figure in points from its lower left corner, whatever its resolution.

    Marks belong to the layer named when they are drawn; a layer is rubbed out at once, the others stay as they are.
    ``z`` orders marks of all layers. A chart lays itself out anew when the figure's size has changed.
    """

    def __init__(self, figure: Figure) -> None:
        self.figure = figure
        self._layers: dict[str, list[Artist]] = {}
        self._transform: Transform = Affine2D().scale(1 / 72) + figure.dpi_scale_trans

    @property
    def size(self) -> Size:
        """Return the figure's width and height in points."""
        width, height = self.figure.get_size_inches()
        return float(width) * 72, float(height) * 72

    def clear(self, layer: str) -> None:
        """Rub out every mark of ``layer``."""
        for artist in self._layers.pop(layer, ()):
            artist.remove()

    def marks(self, layer: str) -> tuple[Artist, ...]:
        """Return the marks of ``layer`` in the order drawn."""
        return tuple(self._layers.get(layer, ()))

    def marks_but(self, *layers: str) -> list[Artist]:
        """Return the marks of all other layers."""
        return [mark for name, marks in self._layers.items() if name not in layers for mark in marks]

    def line(self, layer: str, points: ArrayLike, pen: Pen, z: float = 2) -> Artist:
        """Draw an open line through ``points``: rows of x, y."""
        return self._patch(layer, Path(np.asarray(points, dtype=float)), pen, None, z)

    def area(self, layer: str, points: ArrayLike, fill: Pen, edge: Pen | None = None, z: float = 1) -> Artist:
        """Fill the polygon with corners ``points``; of the pen ``fill`` only colour and alpha count."""
        corners = np.asarray(points, dtype=float)
        closed = Path(np.vstack([corners, corners[:1]]), closed=True)
        return self._patch(layer, closed, edge, fill, z)

    def shape(self, layer: str, path: Path, fill: Pen, z: float = 1) -> Artist:
        """Fill what a path encloses, its holes left out."""
        return self._patch(layer, path, None, fill, z)

    def box(self, layer: str, corner: Size, size: Size, fill: Pen, edge: Pen | None = None, z: float = 1) -> Artist:
        """Fill the rectangle of ``size`` whose lower left corner is ``corner``."""
        (x, y), (width, height) = corner, size
        return self.area(layer, [(x, y), (x + width, y), (x + width, y + height), (x, y + height)], fill, edge, z)

    def outline(self, layer: str, boxes: Sequence[Corners], edge: Pen, z: float = 1) -> Artist:
        """Draw the outlines of rectangles as one mark; each is left, bottom, right and top."""
        return self._patch(layer, _outlines(boxes), edge, None, z)

    def reshape(self, mark: Artist, boxes: Sequence[Corners]) -> None:
        """Let the outlines that ``outline`` drew go around other rectangles."""
        assert isinstance(mark, PathPatch)
        mark.set_path(_outlines(boxes))

    def reword(self, mark: Artist, middle: Size, words: str) -> None:
        """Let a line that ``words`` wrote say something else in another place, in the same type."""
        assert isinstance(mark, Text)
        mark.set_text(words)
        mark.set_position((middle[0], middle[1] - CAP_HEIGHT * mark.get_fontproperties().get_size_in_points() / 2))

    def dot(self, layer: str, centre: Size, radius: float, fill: Pen, edge: Pen | None = None, z: float = 3) -> Artist:
        """Draw a filled circle."""
        return self._patch(layer, Path.circle(centre, radius), edge, fill, z)

    def triangle(self, layer: str, centre: Size, radius: float, colour: str, up: bool) -> Artist:
        """Draw a filled triangle that points up or down."""
        x, y = centre
        tip = radius if up else -radius
        corners = [(x - radius, y - tip * 0.8), (x + radius, y - tip * 0.8), (x, y + tip)]
        return self.area(layer, corners, Pen(colour), z=4)

    def text(self, layer: str, at: Size, words: str, style: Type, z: float = 5) -> Artist:
        """Write one line; ``at`` is the baseline at the side named by the style's alignment."""
        text = Text(
            *at,
            drawable(words, style.face),
            color=style.colour,
            fontproperties=font(style.face),
            horizontalalignment=style.align,
            verticalalignment="baseline",
            parse_math=False,
            usetex=False,
            transform=self._transform,
            zorder=z,
        )
        text.set_fontsize(style.size)
        return self._keep(layer, text)

    def words(self, layer: str, middle: Size, words: str, style: Type) -> Artist:
        """Write one line whose capitals are centred on the height of ``middle``."""
        x, y = middle
        return self.text(layer, (x, y - CAP_HEIGHT * style.size / 2), words, style)

    def lines(self, layer: str, top: Size, lines: Sequence[str], style: Type, leading: float) -> None:
        """Write ``lines`` downwards, the first one's capitals ending at the height of ``top``."""
        x, y = top
        for number, words in enumerate(lines):
            self.text(layer, (x, y - CAP_HEIGHT * style.size - number * leading), words, style)

    def _patch(self, layer: str, path: Path, edge: Pen | None, fill: Pen | None, z: float) -> Artist:
        patch = PathPatch(
            path, facecolor=(fill.colour, fill.alpha) if fill else "none",
            edgecolor=(edge.colour, edge.alpha) if edge else "none", linewidth=edge.width if edge else 0.0,
            fill=fill is not None, transform=self._transform, zorder=z, capstyle="butt", joinstyle=_ROUND,
        )  # fmt: skip
        if edge and edge.dashes:
            patch.set_linestyle((0, tuple(length / edge.width for length in edge.dashes)))
        return self._keep(layer, patch)

    def _keep(self, layer: str, artist: Artist) -> Artist:
        self.figure.add_artist(artist)
        self._layers.setdefault(layer, []).append(artist)
        return artist


def _outlines(boxes: Sequence[Corners]) -> Path:
    corners = [
        ((left, bottom), (right, bottom), (right, top), (left, top), (left, bottom))
        for left, bottom, right, top in boxes
    ]
    codes = [Path.MOVETO, Path.LINETO, Path.LINETO, Path.LINETO, Path.CLOSEPOLY] * len(boxes)
    return Path(np.asarray(corners, dtype=float).reshape(-1, 2), codes)
