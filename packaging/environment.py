"""Make the project's own environment in .venv, from Python's standard library alone.

The environment is built beside, stamped last and then renamed, so that a half-made one is never used. Its stamp holds
what it was made from; an equal stamp means that it can be used at once.
"""

import sys

CANNOT = 3
if sys.version_info < (3, 11):  # noqa: UP036  an older Python runs this line, and gets no further
    print(f"creditdesk needs Python 3.11 or newer; this is {sys.version.split()[0]}.", file=sys.stderr)
    sys.exit(CANNOT)

import hashlib
import importlib.util
import os
import shutil
import subprocess
import tomllib
from dataclasses import dataclass
from pathlib import Path
from typing import Any

ROOT = Path(__file__).resolve().parent.parent
WINDOWS = sys.platform == "win32"
STAMP = "made-from"
SYSTEM_PACKAGES = [
    "python3-venv",
    "libegl1",
    "libgl1",
    "libglib2.0-0",
    "libdbus-1-3",
    "libfontconfig1",
    "libxkbcommon-x11-0",
    "libxcb-cursor0",
    "libxcb-icccm4",
    "libxcb-image0",
    "libxcb-keysyms1",
    "libxcb-randr0",
    "libxcb-render-util0",
    "libxcb-shape0",
    "libxcb-xkb1",
]


class Unable(Exception):
    """Say why the environment cannot be made, in words for the user."""


@dataclass(frozen=True, slots=True)
class Place:
    """Name where an environment lies and where it is built; ``root`` is the project's folder."""

    root: Path

    @property
    def finished(self) -> Path:
        """Give the environment in use."""
        return self.root / ".venv"

    @property
    def growing(self) -> Path:
        """Give the one being built."""
        return self.root / ".venv.new"

    @property
    def leaving(self) -> Path:
        """Give the one just replaced."""
        return self.root / ".venv.old"


def python_in(environment: Path) -> Path:
    """Give the path of an environment's interpreter."""
    return environment / ("Scripts/python.exe" if WINDOWS else "bin/python")


def stamp(root: Path, extra: str) -> str:
    """Sum up what an environment is made from: versions, declared needs, interpreter, folder; ``extra`` may be ""."""
    digest = hashlib.sha256()
    for name in ("packaging/constraints.txt", "pyproject.toml"):
        digest.update((root / name).read_bytes())
    digest.update(f"{sys.version_info[:2]} {sys.platform} {root}".encode())
    return f"{digest.hexdigest()} {extra}".strip()


def is_current(place: Place, extra: str) -> bool:
    """Say whether the finished environment was made from what is here now; one with an extra serves without it too."""
    try:
        made_from = (place.finished / STAMP).read_text(encoding="utf-8")
    except OSError:
        return False
    bare = stamp(place.root, "")
    wanted = {stamp(place.root, extra)} if extra else {bare, *(f"{bare} {name}" for name in extras(place.root))}
    return made_from in wanted and python_in(place.finished).exists()


def extras(root: Path) -> list[str]:
    """Name the optional groups of dependencies."""
    return list(_settings(root)["project"].get("optional-dependencies", {}))


def requirements(root: Path, extra: str) -> list[str]:
    """List what the environment needs: the build backend, the dependencies, those of the extra."""
    settings = _settings(root)
    project = settings["project"]
    more = project["optional-dependencies"][extra] if extra else []
    return [*settings["build-system"]["requires"], *project["dependencies"], *more]


def _settings(root: Path) -> dict[str, Any]:
    return tomllib.loads((root / "pyproject.toml").read_text(encoding="utf-8"))


def ready(extra: str = "", root: Path = ROOT) -> Path:
    """Return the interpreter of a usable environment, made now if need be; raises Unable with what to do."""
    place = Place(root)
    if not is_current(place, extra):
        if importlib.util.find_spec("ensurepip") is None:
            _install_system_packages("Python's venv module cannot work without ensurepip")
        _build(place, extra)
        _swap(place)
    missing = missing_libraries(place.finished)
    if missing:
        _install_system_packages(f"Qt needs {', '.join(missing)}")
        missing = missing_libraries(place.finished)
    if missing:
        raise Unable(f"Qt still misses {', '.join(missing)}.")
    return python_in(place.finished)


def _build(place: Place, extra: str) -> None:
    """Build the environment beside the one in use."""
    print("Making the environment in .venv (once; it takes a minute or so) ...", flush=True)
    shutil.rmtree(place.growing, ignore_errors=True)
    python = str(python_in(place.growing))
    pip = [python, "-m", "pip", "install", "--quiet", "--no-input", "--disable-pip-version-check"]
    _must_run([sys.executable, "-m", "venv", str(place.growing)])
    pins = str(place.root / "packaging" / "constraints.txt")
    _must_run([*pip, "--constraint", pins, *requirements(place.root, extra)])
    _must_run([*pip, "--no-deps", "--no-build-isolation", "--editable", str(place.root)])
    point_scripts_to(place.growing, place.finished)
    (place.growing / STAMP).write_text(stamp(place.root, extra), encoding="utf-8")


def point_scripts_to(environment: Path, future: Path) -> None:
    """Replace the environment's own path in its scripts by the path it will have after the renaming."""
    if WINDOWS:  # its launchers are programs that carry the path inside; there "python -m" is the way
        return
    for script in python_in(environment).parent.iterdir():
        if script.is_symlink() or not script.is_file():
            continue
        text = script.read_bytes()
        if os.fsencode(environment) in text:
            script.write_bytes(text.replace(os.fsencode(environment), os.fsencode(future)))


def _swap(place: Place) -> None:
    shutil.rmtree(place.leaving, ignore_errors=True)
    if place.finished.exists():
        place.finished.rename(place.leaving)
    place.growing.rename(place.finished)
    shutil.rmtree(place.leaving, ignore_errors=True)


def _must_run(command: list[str]) -> None:
    if subprocess.run(command, check=False).returncode != 0:
        raise Unable(f"This failed, see above: {' '.join(command)}")


def missing_libraries(environment: Path) -> list[str]:
    """Name the system libraries that Qt's plugins for a display and for none cannot find."""
    if not sys.platform.startswith("linux") or shutil.which("ldd") is None:
        return []
    plugins = sorted(environment.glob("lib/python*/site-packages/PySide6/Qt/plugins/platforms/libq*.so"))
    wanted = [str(path) for path in plugins if path.stem in {"libqxcb", "libqoffscreen"}]
    if not wanted:
        raise Unable(f"Qt's platform plugins are not in {environment}.")
    return not_found(subprocess.run(["ldd", *wanted], capture_output=True, text=True, check=False).stdout)


def not_found(ldd_output: str) -> list[str]:
    """Name the libraries that ldd could not find."""
    return sorted({line.split()[0] for line in ldd_output.splitlines() if line.endswith("not found")})


def _install_system_packages(why: str) -> None:
    """Install what the system lacks where that is ours to do; otherwise say exactly what to type."""
    if shutil.which("apt-get") is None:
        raise Unable(f"{why}. Install with your system's own tool what Debian calls: {' '.join(SYSTEM_PACKAGES)}")
    if not _is_root():
        raise Unable(f"{why}. Type this, then start again:\n  sudo apt-get install -y {' '.join(_names_here())}")
    print(f"{why}: installing the packages of the system ...", flush=True)
    quiet = {**os.environ, "DEBIAN_FRONTEND": "noninteractive"}
    subprocess.run(["apt-get", "update", "-qq"], env=quiet, check=False)
    line = ["apt-get", "install", "-y", "--no-install-recommends", *_names_here()]
    if subprocess.run(line, env=quiet, check=False, stdout=subprocess.DEVNULL).returncode != 0:
        raise Unable(f"{why}. This failed, see above: {' '.join(line)}")
    importlib.invalidate_caches()


def _is_root() -> bool:
    return not WINDOWS and os.geteuid() == 0


def _names_here() -> list[str]:
    """Name the packages as this release does: newer ones append t64 to some."""
    known = subprocess.run(["apt-cache", "pkgnames", "lib"], capture_output=True, text=True, check=False).stdout.split()
    return names_among(set(known))


def names_among(known: set[str]) -> list[str]:
    """Pick for each package the name that is known, the plain one where neither is."""
    return [name if name in known or f"{name}t64" not in known else f"{name}t64" for name in SYSTEM_PACKAGES]


def has_display() -> bool:
    """Say whether a window can be shown."""
    if not sys.platform.startswith("linux"):
        return True
    return bool(os.environ.get("DISPLAY") or os.environ.get("WAYLAND_DISPLAY"))
