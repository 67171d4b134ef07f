"""``picture``: one sheet of the real window, without a display, at the size asked for."""

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray
from PIL import Image

from creditdesk.base.palette import DARK, LIGHT
from creditdesk.desk.window import SHEETS, STANDING
from tests.programs import SOUND, STRETCHED, Ended, run

Command = Callable[..., Ended]
NO_DISPLAY = {"DISPLAY": "", "WAYLAND_DISPLAY": "", "QT_QPA_PLATFORM": ""}


def pixels(path: Path) -> NDArray[np.uint8]:
    """Return the picture as rows x columns x red, green, blue."""
    with Image.open(path) as image:
        assert image.format == "PNG"
        return np.asarray(image.convert("RGB"))


def taken(sheet: str, out: Path, *more: str, case: Path = SOUND) -> NDArray[np.uint8]:
    done = run("picture", sheet, case, "--out", out, *more, env=NO_DISPLAY)
    assert (done.code, done.messages) == (0, ())
    assert str(out) in done.text
    return pixels(out)


def share_of(colour: str, picture: NDArray[np.uint8]) -> float:
    wanted = np.array([int(colour[at : at + 2], 16) for at in (1, 3, 5)], dtype=np.uint8)
    return float((picture == wanted).all(axis=2).mean())


@pytest.mark.parametrize("sheet", [name.lower() for name in (*SHEETS, STANDING)])
def test_every_sheet_at_the_size_asked_for(sheet: str, tmp_path: Path) -> None:
    picture = taken(sheet, tmp_path / "page.png", "--size", "1280x800")
    assert picture.shape == (800, 1280, 3)
    assert share_of(LIGHT.sheet, picture) + share_of(LIGHT.paper, picture) > 0.3
    assert len(np.unique(picture.reshape(-1, 3), axis=0)) > 200  # text and charts, not a blank sheet


def test_the_sheet_pencil_shows_the_first_scenario_also_in_the_standing(tmp_path: Path) -> None:
    ink, pencil = taken("figures", tmp_path / "a.png"), taken("pencil", tmp_path / "b.png")
    standing = np.s_[130:870, 960:]
    assert (ink[standing] != pencil[standing]).any(axis=2).mean() > 0.01


def test_the_dark_theme_and_another_case_are_other_pictures(tmp_path: Path) -> None:
    light, dark = taken("figures", tmp_path / "a.png"), taken("figures", tmp_path / "b.png", "--theme", "dark")
    assert light.shape == dark.shape == (900, 1440, 3)
    assert share_of(DARK.paper, dark) + share_of(DARK.sheet, dark) > 0.3
    assert share_of(LIGHT.paper, dark) < 0.01
    other = taken("figures", tmp_path / "c.png", case=STRETCHED)
    assert (other != light).any(axis=2).mean() > 0.01


def test_the_same_case_gives_the_same_picture_and_makes_no_draft(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("CREDITDESK_DRAFTS", str(tmp_path / "drafts"))
    first, second = taken("figures", tmp_path / "a.png"), taken("figures", tmp_path / "b.png")
    assert (first == second).all()
    assert sorted(path.name for path in tmp_path.iterdir()) == ["a.png", "b.png"]


def test_a_picture_of_more_pixels_shows_the_same(tmp_path: Path) -> None:
    plain = taken("standing", tmp_path / "a.png", "--size", "1280x800")
    fine = taken("standing", tmp_path / "b.png", "--size", "1280x800", "--scale", "2")
    assert (plain.shape, fine.shape) == ((800, 1280, 3), (1600, 2560, 3))
    smaller = fine.reshape(800, 2, 1280, 2, 3).mean(axis=(1, 3))
    assert np.abs(smaller - plain).mean() < 6  # of 255: the same picture but for the edges of letters
    assert len(np.unique(fine.reshape(-1, 3), axis=0)) > 200


@pytest.mark.parametrize("size", ["12", "0x0", "1280x", "800 600", "1280x800x3"])
def test_a_size_that_is_none_is_wrong_usage(command: Command, tmp_path: Path, size: str) -> None:
    done = command("picture", "figures", SOUND, "--out", tmp_path / "a.png", "--size", size)
    assert (done.code, done.out, len(done.messages)) == (2, b"", 1)
    assert list(tmp_path.iterdir()) == []


def test_what_keeps_a_picture_from_being_taken(tmp_path: Path) -> None:
    out = tmp_path / "a.png"
    for asked, words in (
        (("nosuch", SOUND, "--out", out), "obligor, figures, ratios, pencil, memo, standing"),
        (("figures", tmp_path / "none.case.toml", "--out", out), "no such file"),
        (("figures", SOUND, "--out", tmp_path / "no" / "a.png"), "cannot be written"),
    ):
        done = run("picture", *asked, env=NO_DISPLAY)
        assert (done.code in (2, 3), done.out, len(done.messages)) == (True, b"", 1)
        assert words in done.messages[0]
    assert list(tmp_path.iterdir()) == []
