"""Charts on a memo's page: drawn by the functions the window draws with, read as their words."""

from collections.abc import Callable

from matplotlib.figure import Figure

from creditdesk.memo.onpaper import draw_figure
from creditdesk.memo.structure import TaggedCanvas
from creditdesk.memo.tagging import TaggedDrawing

Size = tuple[float, float]


def chart(make: Callable[[Size], Figure], size: Size, words: str) -> TaggedDrawing:
    """Return a chart of ``size`` points as a drawing that is read as ``words``."""
    figure = make(size)

    def draw(canvas: TaggedCanvas, x: float, y: float, width: float, height: float) -> None:
        draw_figure(figure, canvas, x, y, width, height)

    return TaggedDrawing(draw, *size, words)
