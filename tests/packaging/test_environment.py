from pathlib import Path

import environment
import pytest

PROJECT = """[build-system]
requires = ["backend"]
[project]
name = "x"
dependencies = ["a"]
[project.optional-dependencies]
test = ["b"]
"""


@pytest.fixture
def place(tmp_path: Path) -> environment.Place:
    (tmp_path / "packaging").mkdir()
    (tmp_path / "packaging" / "constraints.txt").write_text("a==1\n")
    (tmp_path / "pyproject.toml").write_text(PROJECT)
    return environment.Place(tmp_path)


def _finish(place: environment.Place, extra: str) -> None:
    python = environment.python_in(place.finished)
    python.parent.mkdir(parents=True, exist_ok=True)
    python.touch()
    (place.finished / environment.STAMP).write_text(environment.stamp(place.root, extra))


def test_without_an_environment_nothing_is_current(place: environment.Place) -> None:
    assert not environment.is_current(place, "")


def test_one_made_for_tests_serves_for_running_but_not_the_other_way_round(place: environment.Place) -> None:
    _finish(place, "")
    assert environment.is_current(place, "")
    assert not environment.is_current(place, "test")
    _finish(place, "test")
    assert environment.is_current(place, "")
    assert environment.is_current(place, "test")


@pytest.mark.parametrize("changed", ["packaging/constraints.txt", "pyproject.toml"])
def test_a_change_of_what_it_was_made_from_makes_it_stale(place: environment.Place, changed: str) -> None:
    _finish(place, "")
    with (place.root / changed).open("a") as file:
        file.write("# more\n")
    assert not environment.is_current(place, "")


def test_one_without_stamp_or_interpreter_is_not_used(place: environment.Place) -> None:
    _finish(place, "")
    environment.python_in(place.finished).unlink()
    assert not environment.is_current(place, "")
    _finish(place, "")
    (place.finished / environment.STAMP).unlink()
    assert not environment.is_current(place, "")


def test_requirements_hold_the_build_backend_the_dependencies_and_the_extra(place: environment.Place) -> None:
    assert environment.requirements(place.root, "") == ["backend", "a"]
    assert environment.requirements(place.root, "test") == ["backend", "a", "b"]


def test_scripts_name_the_place_they_will_have(place: environment.Place) -> None:
    script = environment.python_in(place.growing).parent / "tool"
    script.parent.mkdir(parents=True)
    script.write_text(f"#!{environment.python_in(place.growing)}\n")
    environment.point_scripts_to(place.growing, place.finished)
    assert script.read_text() == f"#!{environment.python_in(place.finished)}\n"


def test_a_build_that_fails_leaves_the_one_in_use_as_it_was(
    place: environment.Place, monkeypatch: pytest.MonkeyPatch
) -> None:
    _finish(place, "")
    kept = (place.finished / environment.STAMP).read_text()
    (place.root / "pyproject.toml").write_text(PROJECT + "# changed\n")
    monkeypatch.setattr(environment.sys, "executable", "/bin/false")
    with pytest.raises(environment.Unable, match="failed"):
        environment.ready("", place.root)
    assert (place.finished / environment.STAMP).read_text() == kept
    assert not environment.is_current(place, "")


def test_libraries_that_are_not_found_are_named_once() -> None:
    output = "\tlibEGL.so.1 => not found\n\tlibc.so.6 => /lib/libc.so.6 (0x1)\n\tlibEGL.so.1 => not found\n"
    assert environment.not_found(output) == ["libEGL.so.1"]


def test_package_names_follow_the_release() -> None:
    assert "libglib2.0-0" in environment.names_among({"libglib2.0-0"})
    assert "libglib2.0-0t64" in environment.names_among({"libglib2.0-0t64"})
    assert "libglib2.0-0" in environment.names_among(set())


def test_without_rights_the_exact_line_is_said_and_nothing_is_installed(
    place: environment.Place, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(environment.importlib.util, "find_spec", lambda _name: None)
    monkeypatch.setattr(environment.shutil, "which", lambda name: f"/usr/bin/{name}")
    monkeypatch.setattr(environment, "_is_root", lambda: False)
    monkeypatch.setattr(environment, "_names_here", lambda: ["python3-venv", "libegl1"])
    with pytest.raises(environment.Unable, match=r"sudo apt-get install -y python3-venv libegl1$"):
        environment.ready("", place.root)
    assert not place.growing.exists()
