"""Start creditdesk on the sound demonstration borrower.

Without a display the sheets are drawn to files instead, and a signed memo is written with a throwaway identity and
verified. ``--out FOLDER`` says where these go.
"""

import argparse
import os
import secrets
import shlex
import subprocess
import sys
import tempfile
from pathlib import Path

import environment

PASSPHRASE = "CREDITDESK_DEMO_PASSPHRASE"  # the name of a variable, not a passphrase


def main(arguments: list[str]) -> int:
    """Make the environment if need be, then show the demonstration borrower."""
    parser = argparse.ArgumentParser(description="Start creditdesk on the sound demonstration borrower.")
    parser.add_argument("--out", type=Path, default=environment.ROOT / "output", help="for pictures and memo")
    chosen = parser.parse_args(arguments)
    try:
        return show(environment.ready(), chosen.out)
    except environment.Unable as reason:
        print(reason, file=sys.stderr)
        return environment.CANNOT


def show(python: Path, folder: Path) -> int:
    """Open the window on the demonstration borrower, or put all that it shows into ``folder``."""
    case = str(environment.ROOT / "resources" / "demo" / "brackwater-millworks.case.toml")
    if environment.has_display():
        return subprocess.run([str(python), "-m", "creditdesk", case], cwd=environment.ROOT, check=False).returncode
    print("There is no display here, so the sheets are drawn to files.", flush=True)
    return on_paper(python, case, folder)


def on_paper(python: Path, case: str, folder: Path) -> int:
    """Assess, draw every sheet, write a signed memo and verify it; end at the first step that fails."""
    folder.mkdir(parents=True, exist_ok=True)
    surroundings = {**os.environ, PASSPHRASE: secrets.token_urlsafe(24), "QT_QPA_PLATFORM": "offscreen"}
    with tempfile.TemporaryDirectory() as hidden:
        for step in steps(sheets(python), case, folder, Path(hidden) / "throwaway.p12"):
            print(f"\n$ creditdesk {shlex.join(step)}", flush=True)
            command = [str(python), "-m", "creditdesk", *step]
            code = subprocess.run(command, cwd=environment.ROOT, env=surroundings, check=False).returncode
            if code != 0:
                print(f"This step ended with {code}.", file=sys.stderr)
                return code
    print(f"\nThe pictures and the signed memo are in {folder}:")
    for path in sorted(folder.iterdir()):
        print(f"  {path}")
    return 0


def sheets(python: Path) -> list[str]:
    """Ask the program which sheets its window has."""
    asked = [str(python), "-c", "from creditdesk.desk.window import SHEETS; print(*SHEETS, sep='\\n')"]
    answer = subprocess.run(asked, cwd=environment.ROOT, stdout=subprocess.PIPE, text=True, check=False)
    if answer.returncode != 0:
        raise environment.Unable("The window cannot be loaded, see above.")
    return answer.stdout.split()


def steps(names: list[str], case: str, folder: Path, identity: Path) -> list[list[str]]:
    """List the program's commands in order; the identity and its random passphrase are thrown away afterwards."""
    memo = str(folder / "memo.pdf")
    key = ["--passphrase-env", PASSPHRASE]
    return [
        ["assess", case],
        *(["picture", sheet, case, "--out", str(folder / f"{sheet.lower()}.png")] for sheet in names),
        ["identity", "new", "--name", "Demonstration only", "--out", str(identity), *key],
        ["memo", case, "--out", memo, "--identity", str(identity), *key],
        ["verify", memo],
    ]


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
