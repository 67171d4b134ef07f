"""What each command does; results go to standard output, messages to standard error."""

import json
import os
import re
import sys
from argparse import Namespace
from datetime import UTC, datetime
from pathlib import Path

from creditdesk.base.errors import UsageError
from creditdesk.base.palette import DARK, LIGHT
from creditdesk.case.convert import load_any, save_any
from creditdesk.case.document import Case
from creditdesk.case.lead import with_lead_model
from creditdesk.case.result import result_bytes
from creditdesk.case.what_if import scenarios_of, work_out
from creditdesk.cli.models import with_model_asked_for
from creditdesk.cli.progress import terminal_step
from creditdesk.cli.text import standing_text
from creditdesk.house.book import HouseBook
from creditdesk.house.files import write_file
from creditdesk.house.load import load_house_book
from creditdesk.house.shipped import resources_folder

REQUIREMENTS = ("known", "countersigned")
_SIZE = re.compile(r"(\d{3,5})x(\d{3,5})")


def house_book(options: Namespace) -> HouseBook:
    """Load the house book asked for, or the shipped demonstration."""
    return load_house_book(options.housebook or resources_folder() / "housebook")


def _case_and_house(options: Namespace) -> tuple[Case, HouseBook]:
    house = house_book(options)
    case = load_any(options.case, house.chart, house)
    return case, with_lead_model(house, case, options.case.parent)


def _say(text: str) -> None:
    """Write a result as UTF-8 whatever the locale says, so that equal results are equal bytes."""
    _say_bytes(f"{text}\n".encode())


def _say_bytes(data: bytes) -> None:
    sys.stdout.flush()
    sys.stdout.buffer.write(data)
    sys.stdout.buffer.flush()


def _key(options: Namespace) -> tuple[Path, str]:
    """Return identity file and passphrase; the passphrase comes from the environment, never from the command line."""
    if options.identity is None or options.passphrase_env is None:
        raise UsageError("identity", "Give --identity and --passphrase-env to sign, or --unsigned for a memo without.")
    return options.identity, _passphrase(options.passphrase_env)


def _passphrase(variable: str) -> str:
    passphrase = os.environ.get(variable)
    if passphrase is None:
        raise UsageError("passphrase", f"--passphrase-env {variable}: no environment variable has this name.")
    return passphrase


def assess(options: Namespace) -> int:
    """Print where the borrower stands; grade D or a stop is an answer too."""
    case, house = _case_and_house(options)
    name = options.model or ""
    house = with_model_asked_for(house, name)
    if options.json:
        asked = work_out(case, house, name, terminal_step())
        _say_bytes(result_bytes(asked.ink, asked))
    else:
        _say(standing_text(case, scenarios_of(case, house, name)))
    return 0


def memo(options: Namespace) -> int:
    """Write the memo."""
    from creditdesk.memo import issue  # heavy, and other commands go without

    if options.unsigned and options.identity is not None:
        raise UsageError("identity", "Give either --unsigned or --identity, not both.")
    if options.unsigned:
        _say(issue.issue_unsigned(*_case_and_house(options), options.out, terminal_step()))
        return 0
    key = _key(options)
    case, house = _case_and_house(options)
    _say(issue.prepare(case, house, options.out, key, datetime.now(UTC), terminal_step()).words)
    return 0


def countersign(options: Namespace) -> int:
    """Add the approver's decision and signature."""
    from creditdesk.memo.decision import Decision  # heavy, and other commands go without
    from creditdesk.memo.issue import countersign as add

    decision = (Decision(options.decision), options.conditions)
    _say(add(options.memo, options.out or options.memo, _key(options), decision, datetime.now(UTC)))
    return 0


def verify(options: Namespace) -> int:
    """Say whether a memo is as signed and gives the same result again; 1 where it is not."""
    from creditdesk.memo.verify import verify_file  # heavy, and other commands go without

    required = [word for word in options.require.split(",") if word]
    unknown = [word for word in required if word not in REQUIREMENTS]
    if unknown:
        raise UsageError("require", f"--require: found {', '.join(unknown)}, allowed {', '.join(REQUIREMENTS)}.")
    answer = verify_file(options.memo, house_book(options), required)
    _say(json.dumps(answer.as_json(), ensure_ascii=False, indent=1) if options.json else answer.text)
    return 0 if answer.valid else 1


def new_identity(options: Namespace) -> int:
    """Make a signing identity."""
    from creditdesk.memo import identity  # heavy, and other commands go without

    now, passphrase = datetime.now(UTC), _passphrase(options.passphrase_env)
    identity.write_private(options.out, identity.new_identity(options.name, passphrase, options.kind, now=now))
    made = identity.load_identity(options.out, passphrase, now=now)
    _say(f"Identity of {made.name} written to {options.out}\ncertificate SHA-256 {made.fingerprint_sha256}")
    return 0


def fit(options: Namespace) -> int:
    """Fit a model and write its file."""
    from creditdesk.cli.fitting import fit_file  # heavy, and other commands go without

    _say(fit_file(options))
    return 0


def score(options: Namespace) -> int:
    """Score many rows of ratios."""
    from creditdesk.cli.fitting import score_file  # heavy, and other commands go without

    _say(score_file(options, house_book(options)))
    return 0


def convert(options: Namespace) -> int:
    """Turn one form of a case into another."""
    house = house_book(options)
    case = load_any(options.source, house.chart, house)
    if options.target.suffix == ".xlsx":
        from creditdesk.memo.workbook import workbook  # heavy, and other commands go without

        house = with_lead_model(house, case, options.source.parent)
        write_file(options.target, workbook(case, scenarios_of(case, house), house))
    else:
        save_any(options.target, case, house.chart)
    _say(f"Written to {options.target}")
    return 0


def picture(options: Namespace) -> int:
    """Write a picture of one sheet of the real window."""
    size = _SIZE.fullmatch(options.size)
    if size is None:
        raise UsageError("size", f"--size: found {options.size!r}, expected WIDTHxHEIGHT such as 1280x800.")
    os.environ["QT_QPA_PLATFORM"] = "offscreen"  # set before Qt is imported; a picture needs no display
    os.environ["QT_SCALE_FACTOR"] = str(options.scale)
    from creditdesk.desk.picture import take_picture  # needs Qt

    look = (DARK if options.theme == "dark" else LIGHT, int(size[1]), int(size[2]))
    take_picture(options.sheet, options.case, options.out, house_book(options), look)
    _say(f"Picture written to {options.out}")
    return 0


def schema(options: Namespace) -> int:
    """Print the JSON Schema of the exchange file."""
    from creditdesk.case.exchange_schema import exchange_schema  # other commands go without

    _say(json.dumps(exchange_schema(house_book(options).chart), ensure_ascii=False, indent=1))
    return 0
