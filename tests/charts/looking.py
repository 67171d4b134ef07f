"""Look at a drawn figure: where its texts stand, whether any is cut or covers another."""

from collections.abc import Sequence
from itertools import combinations

import numpy as np
from matplotlib.artist import Artist
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.patches import PathPatch
from matplotlib.text import Text
from matplotlib.transforms import Bbox

SLACK = 0.6  # points: what hinting may add to a glyph


def texts(figure: Figure) -> list[Text]:
    return [artist for artist in figure.artists if isinstance(artist, Text) and artist.get_text()]


def words(figure: Figure) -> list[str]:
    return [text.get_text() for text in texts(figure)]


def pixels(figure: Figure) -> bytes:
    canvas = FigureCanvasAgg(figure)
    canvas.draw()
    return bytes(canvas.buffer_rgba())


def centre(artist: Artist) -> tuple[float, float]:
    """Return the middle of a patch in points."""
    assert isinstance(artist, PathPatch)
    box = artist.get_path().get_extents()
    return (box.x0 + box.x1) / 2, (box.y0 + box.y1) / 2


def assert_tidy(figure: Figure) -> None:
    """Fail where a text is cut by the figure's edge or touches another text."""
    FigureCanvasAgg(figure).draw()
    slack = SLACK * figure.dpi / 72
    boxes = [(text.get_text(), _ink(text)) for text in texts(figure)]
    sheet = figure.bbox.padded(slack)
    cut = [name for name, box in boxes if not _inside(box, sheet)]
    assert not cut, f"cut: {cut}"
    touching = [(one, two) for (one, a), (two, b) in combinations(boxes, 2) if _overlap(a, b, slack)]
    assert not touching, f"touching: {touching}"


def _ink(text: Text) -> Bbox:
    return text.get_window_extent()


def _inside(box: Bbox, sheet: Bbox) -> bool:
    return bool(box.x0 >= sheet.x0 and box.x1 <= sheet.x1 and box.y0 >= sheet.y0 and box.y1 <= sheet.y1)


def _overlap(a: Bbox, b: Bbox, slack: float) -> bool:
    return min(a.x1, b.x1) - max(a.x0, b.x0) > slack and min(a.y1, b.y1) - max(a.y0, b.y0) > slack


def lines_at(artists: Sequence[Artist], height: float) -> list[PathPatch]:
    """Return the horizontal lines at a height in points."""
    found = []
    for artist in artists:
        if isinstance(artist, PathPatch) and not artist.get_fill():
            heights = np.asarray(artist.get_path().vertices)[:, 1]
            if abs(heights[-1] - height) < 0.01 and abs(heights[-2] - height) < 0.01:
                found.append(artist)
    return found
