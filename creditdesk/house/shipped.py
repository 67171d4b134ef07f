"""Where the files that ship with the program lie: the demonstration house book, demo cases, icons, theme."""

from pathlib import Path

import creditdesk
from creditdesk.base.errors import BugError


def resources_folder() -> Path:
    """Find the folder of shipped resources.

    A built wheel carries it inside the package; a checkout keeps it beside the package. Raises BugError where
    neither is there, because then the installation is incomplete.
    """
    package = Path(creditdesk.__file__).resolve().parent
    for candidate in (package / "resources", package.parent / "resources"):
        if (candidate / "housebook").is_dir():
            return candidate
    message = f"the shipped resources are missing: neither in {package} nor beside it"
    raise BugError(message)
