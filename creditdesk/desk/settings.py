"""What the window remembers from one time to the next: how it stood, never anything of a case.

The one place that reads and writes QSettings. A value that is missing, broken or of a later version is as good as none.
"""

from enum import StrEnum

from PySide6.QtCore import QByteArray, QSettings

_SHEET, _THEME, _GEOMETRY = "window/sheet", "window/theme", "window/geometry"
_SINCE_LAST_YEAR = "standing/since-last-year"


class Theme(StrEnum):
    """Name what decides between light and dark."""

    SYSTEM = "system"
    LIGHT = "light"
    DARK = "dark"


class Settings:
    """Read and write what is remembered; every value has its type and what stands in for it."""

    def __init__(self) -> None:
        self._stored = QSettings()

    @property
    def theme(self) -> Theme:
        """Return the chosen theme; the system's where none was chosen."""
        value = self._text(_THEME)
        return Theme(value) if value in list(Theme) else Theme.SYSTEM

    @theme.setter
    def theme(self, theme: Theme) -> None:
        self._stored.setValue(_THEME, theme.value)

    @property
    def sheet(self) -> str:
        """Return the name of the sheet shown last, "" where none is known."""
        return self._text(_SHEET)

    @sheet.setter
    def sheet(self, name: str) -> None:
        self._stored.setValue(_SHEET, name)

    @property
    def geometry(self) -> QByteArray:
        """Return place and size of the window as Qt wrote them; empty where none are known."""
        return self._bytes(_GEOMETRY)

    @geometry.setter
    def geometry(self, geometry: QByteArray) -> None:
        self._stored.setValue(_GEOMETRY, geometry)

    @property
    def since_last_year(self) -> bool:
        """Say whether the contributions were last shown from last year's borrower."""
        return self._text(_SINCE_LAST_YEAR) == "yes"

    @since_last_year.setter
    def since_last_year(self, wanted: bool) -> None:
        self._stored.setValue(_SINCE_LAST_YEAR, "yes" if wanted else "no")

    def split(self, name: str) -> QByteArray:
        """Return how a splitter stood, as Qt wrote it; empty where that is not known."""
        return self._bytes(f"split/{name}")

    def set_split(self, name: str, state: QByteArray) -> None:
        """Remember how a splitter stands."""
        self._stored.setValue(f"split/{name}", state)

    def _text(self, key: str) -> str:
        value = self._stored.value(key)
        return value if isinstance(value, str) else ""

    def _bytes(self, key: str) -> QByteArray:
        value = self._stored.value(key)
        return value if isinstance(value, QByteArray) else QByteArray()
