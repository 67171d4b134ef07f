import subprocess
import sys

import pytest
from fontTools.ttLib import TTFont

from creditdesk.house.fontfiles import Face, font_files, font_path


@pytest.mark.parametrize("face", Face)
def test_each_face_is_the_font_its_name_says(face: Face) -> None:
    font = TTFont(font_path(face))
    assert font["name"].getDebugName(6) == face
    assert "glyf" in font  # outlines that reportlab can embed


def test_the_list_holds_every_face_once() -> None:
    assert len(set(font_files())) == len(Face)


def test_finding_the_files_loads_no_drawing_library() -> None:
    code = "import sys, creditdesk.house.fontfiles as f; f.font_files(); print(*sys.modules)"
    loaded = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout.split()
    assert not {"reportlab", "matplotlib", "fontTools", "PySide6", "numpy"} & set(loaded)
