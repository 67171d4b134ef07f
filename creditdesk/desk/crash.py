"""What happens when our own code fails: a report on disk, a plain word to the user, the case safe in its file."""

import sys
from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path
from types import TracebackType

import creditdesk


def reports_folder() -> Path:
    """Return the folder for crash reports, made if need be; a temporary one where the user's cannot be written."""
    import tempfile  # all of this is imported when it is too late for speed

    import platformdirs

    folder = Path(platformdirs.user_log_dir("creditdesk", appauthor=False))
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError:
        return Path(tempfile.gettempdir())
    return folder


def write_report(error: BaseException) -> Path:
    """Write what failed and where, without any figure of the case; return the report's path."""
    import platform
    import traceback

    now = datetime.now(UTC)
    lines = [
        f"creditdesk {creditdesk.__version__}, {platform.platform()}, Python {platform.python_version()}",
        now.isoformat(timespec="seconds"),
        "",
        *traceback.format_exception(error),
    ]
    path = reports_folder() / f"report-{now:%Y%m%d-%H%M%S-%f}.txt"
    path.write_text("\n".join(lines), encoding="utf-8")
    return path


def install(tell: Callable[[Path], None]) -> None:
    """Send every exception that nobody caught to a report, then to ``tell``, whatever thread it came from.

    Qt hands exceptions of slots, model methods and runnables to ``sys.excepthook`` and goes on: the case is safe,
    because each edit is on disk before the next one begins. ``tell`` must be safe to call from any thread.
    """

    def hook(kind: type[BaseException], error: BaseException, trace: TracebackType | None) -> None:
        if issubclass(kind, KeyboardInterrupt):
            sys.__excepthook__(kind, error, trace)
            return
        tell(write_report(error))

    sys.excepthook = hook
