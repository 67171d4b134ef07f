"""One virtual display for all tests of the real window, and the window on the sound demonstration."""

from collections.abc import Iterator
from pathlib import Path

import pytest

from tests.programs import SOUND
from tests.window.hands import Hands, Watched, virtual_display, watched


@pytest.fixture(scope="session")
def display() -> Iterator[str]:
    with virtual_display() as name:
        yield name


@pytest.fixture
def hands(display: str) -> Hands:
    return Hands(display)


@pytest.fixture
def drafts(tmp_path: Path) -> Path:
    """Return the folder where the working copy of an exchange file is kept."""
    return tmp_path / "drafts"


@pytest.fixture
def window(display: str, hands: Hands, drafts: Path) -> Iterator[Watched]:
    """Open the real window on the exchange file of the sound borrower and give it the keyboard."""
    with watched(SOUND, display, drafts) as opened:
        opened.wait(lambda _: True)
        hands.focus("Brackwater Millworks Ltd")
        yield opened
