"""The font files, found where their packages keep them: the same for window, charts and paper."""

from enum import StrEnum
from importlib.resources import files
from pathlib import Path

SANS_FAMILY = "Source Sans Pro"
SERIF_FAMILY = "Source Serif Pro"


class Face(StrEnum):
    """Name one font face; the value is its PostScript name, and the name it has on paper."""

    SANS = "SourceSansPro-Regular"
    SANS_ITALIC = "SourceSansPro-It"
    SANS_SEMIBOLD = "SourceSansPro-Semibold"
    SANS_SEMIBOLD_ITALIC = "SourceSansPro-SemiboldIt"
    SANS_BOLD = "SourceSansPro-Bold"
    SANS_BOLD_ITALIC = "SourceSansPro-BoldIt"
    SERIF = "SourceSerifPro-Regular"
    SERIF_ITALIC = "SourceSerifPro-It"
    SERIF_SEMIBOLD = "SourceSerifPro-Semibold"
    SERIF_SEMIBOLD_ITALIC = "SourceSerifPro-SemiboldIt"
    SERIF_BOLD = "SourceSerifPro-Bold"
    SERIF_BOLD_ITALIC = "SourceSerifPro-BoldIt"


def font_path(face: Face) -> Path:
    """Return the TrueType file of a face."""
    package = "font_source_serif_pro" if "Serif" in face else "font_source_sans_pro"
    return Path(str(files(package))) / "files" / f"{face}.ttf"


def font_files() -> tuple[Path, ...]:
    """Return the TrueType files of all faces, for matplotlib's and Qt's own font lists."""
    return tuple(font_path(face) for face in Face)
