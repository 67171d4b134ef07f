"""Equal input gives equal bytes in any locale, time zone, hash seed and process; other vector units move no reading.

The child calls ``setlocale`` before the program starts, as a program around ours may have done: without that the C
library would never look at the locale.
"""

import json
import os
import shutil
import subprocess
from collections.abc import Iterator, Mapping
from pathlib import Path

import pytest

from tests.programs import SOUND, STRETCHED, Ended, run_python

DEMOS = pytest.mark.parametrize("case", [SOUND, STRETCHED], ids=lambda path: path.stem)
TOLERANCE = 1e-9  # relative; between machines numbers may differ by no more
LOCALISED = """
import locale, sys
locale.setlocale(locale.LC_ALL, "")
from creditdesk.cli.main import main
sys.exit(main(sys.argv[1:]))
"""
ASCII = {"LC_ALL": "C", "PYTHONCOERCECLOCALE": "0", "PYTHONUTF8": "0"}
LOCALE_SOURCES = Path("/usr/share/i18n/locales")
FEATURES = """
from numpy._core._multiarray_umath import __cpu_dispatch__, __cpu_features__
print(*(name for name in __cpu_dispatch__ if __cpu_features__[name]))
"""


@pytest.fixture(scope="session")
def german(tmp_path_factory: pytest.TempPathFactory) -> Mapping[str, str]:
    """Make a locale with a decimal comma, of the system's own sources; plain C where it has none."""
    folder = tmp_path_factory.mktemp("locales")
    if shutil.which("localedef") is None or not (LOCALE_SOURCES / "de_DE").exists():
        return ASCII
    made = ["localedef", "-i", "de_DE", "-f", "UTF-8", str(folder / "de_DE.UTF-8")]
    subprocess.run(made, check=True, capture_output=True)
    return {"LC_ALL": "de_DE.UTF-8", "LOCPATH": str(folder)}


def surroundings(german: Mapping[str, str]) -> Iterator[Mapping[str, str]]:
    """Give three surroundings that differ in locale, time zone and hash seed; zones in a form without files."""
    yield {"LC_ALL": "C.UTF-8", "TZ": "UTC0", "PYTHONHASHSEED": "0"}
    yield {**german, "TZ": "AAA-14", "PYTHONHASHSEED": "1"}
    yield {**ASCII, "TZ": "BBB+11:30", "PYTHONHASHSEED": "4294967295"}


def assessed(case: Path, env: Mapping[str, str], *more: str) -> Ended:
    done = run_python("-c", LOCALISED, "assess", case, *more, env=env)
    assert (done.code, done.messages) == (0, ())
    return done


@DEMOS
def test_assess_gives_equal_bytes_everywhere(case: Path, german: Mapping[str, str]) -> None:
    results = [assessed(case, env, "--json").out for env in surroundings(german)]
    assert json.loads(results[0])["pd_final"] > 0
    assert results[1] == results[0]
    assert results[2] == results[0]


def test_the_text_is_equal_bytes_everywhere_too(german: Mapping[str, str]) -> None:
    first, *others = [assessed(STRETCHED, env).out for env in surroundings(german)]
    assert "−3.2" in first.decode()  # a sign that no ASCII locale has
    assert others == [first, first]


def test_an_unsigned_memo_is_equal_bytes_everywhere(german: Mapping[str, str], tmp_path: Path) -> None:
    memos = []
    for number, env in enumerate(surroundings(german)):
        out = tmp_path / f"{number}.pdf"
        done = run_python("-c", LOCALISED, "memo", SOUND, "--out", out, "--unsigned", env=env)
        assert (done.code, done.messages) == (0, ())
        memos.append(out.read_bytes())
    assert memos[0].startswith(b"%PDF-")
    assert memos[1] == memos[0]
    assert memos[2] == memos[0]


def vector_units(env: Mapping[str, str]) -> list[str]:
    """List the vector units of this processor that numpy chooses among and that ``env`` leaves to it."""
    return run_python("-c", FEATURES, env=env).text.split()


@pytest.mark.parametrize("keep", [0, 1], ids=["none", "the first alone"])
@DEMOS
def test_other_vector_units_give_the_same_to_nine_digits(case: Path, keep: int) -> None:
    units = vector_units({})
    if not units:
        pytest.skip("numpy chooses among no vector units on this processor")
    off = units[keep:]
    env = {"NPY_DISABLE_CPU_FEATURES": " ".join(off), "OPENBLAS_CORETYPE": "Prescott" if keep == 0 else "Haswell"}
    assert vector_units(env) == units[:keep]
    here, there = (json.loads(assessed(case, surrounding, "--json").out) for surrounding in ({}, env))
    assert list(differences(here, there, "")) == []


def differences(here: object, there: object, place: str) -> Iterator[str]:
    """Name what differs: numbers by more than the tolerance, anything else at all."""
    if isinstance(here, dict) and isinstance(there, dict):
        assert list(here) == list(there), place
        for key in here:
            yield from differences(here[key], there[key], f"{place}.{key}")
    elif isinstance(here, list) and isinstance(there, list):
        assert len(here) == len(there), place
        for number, (one, other) in enumerate(zip(here, there, strict=True)):
            yield from differences(one, other, f"{place}[{number}]")
    elif isinstance(here, float) and isinstance(there, float):
        if here != pytest.approx(there, rel=TOLERANCE, abs=0):
            yield f"{place}: {here!r}, {there!r}"
    elif here != there:
        yield f"{place}: {here!r}, {there!r}"


def test_what_differs_is_seen() -> None:
    """The comparison itself can fail."""
    one: dict[str, object] = {"a": [1.0, {"b": "x", "c": None}]}
    other: dict[str, object] = {"a": [1.0 + 1e-8, {"b": "y", "c": 0.0}]}
    assert len(list(differences(one, other, ""))) == 3
    assert os.environ.get("NPY_DISABLE_CPU_FEATURES") is None
