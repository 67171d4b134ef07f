"""The command line: which command, its options, and what its end means."""

import os
import sys
from collections.abc import Sequence
from pathlib import Path

import creditdesk
from creditdesk.base.errors import UserError
from creditdesk.cli.options import build_parser, command_named

OUR_BUG = 70
INTERRUPTED = 130


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command and return its exit code.

    0 done; 1 the answer is no; 2 wrong usage; 3 a file or its content is unusable, one line per fault on standard
    error; 70 our own bug, with the name of a report.
    """
    given = list(sys.argv[1:] if arguments is None else arguments)
    try:
        options = build_parser().parse_args(_with_command(given))
        return command_named(options.run)(options)
    except UserError as error:
        for fault in error.faults:
            print(f"creditdesk: {fault}", file=sys.stderr)
        return error.exit_code
    except KeyboardInterrupt:
        return INTERRUPTED
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except Exception as error:  # noqa: BLE001  the last place: a bug gets a report and a short word, never a traceback
        return _report(error)


def _with_command(given: list[str]) -> list[str]:
    """Put ``open`` before a bare case file, and alone where nothing is given."""
    if not given:
        return ["open"]
    looks_like_file = not given[0].startswith("-") and Path(given[0]).suffix != ""
    return ["open", *given] if looks_like_file else given


def _report(error: Exception) -> int:
    from creditdesk.desk.crash import write_report  # only when it is too late for speed

    report = write_report(error)
    print(
        f"creditdesk {creditdesk.__version__}: this is our own bug. A report was written to {report}", file=sys.stderr
    )
    return OUR_BUG
