"""Check everything: layout, rules, types, imports, sizes, then all tests. Arguments go to pytest.

``--long`` adds the campaigns that take minutes. Every stage runs, also after one has failed; the end says how each
went.
"""

import os
import random
import subprocess
import sys
import time
from dataclasses import dataclass
from pathlib import Path

import environment

HASH_SEED = str(random.randrange(2**32))  # another order of sets each time, but one for all processes of a run


@dataclass(frozen=True, slots=True)
class Stage:
    """Name one check and the command that makes it."""

    name: str
    command: list[str]


@dataclass(frozen=True, slots=True)
class Outcome:
    """Say how a stage ended and how many seconds it took."""

    name: str
    code: int
    seconds: float


def stages(python: Path, for_pytest: list[str]) -> list[Stage]:
    """List the checks, those that take seconds first."""
    module = [str(python), "-m"]
    packaging = environment.ROOT / "packaging"
    scripts = [str(path) for path in sorted(packaging.glob("*.py"))]
    return [
        Stage("layout", [*module, "ruff", "format", "--check", "--quiet", "."]),
        Stage("rules", [*module, "ruff", "check", "--quiet", "."]),
        Stage("types", [*module, "mypy", "--strict", "--no-error-summary", "creditdesk"]),
        Stage("types of the scripts", [*module, "mypy", "--strict", "--no-error-summary", *scripts]),
        Stage(
            "imports",
            [str(python), "-c", "from importlinter.cli import lint_imports_command as run; run(['--no-logo'])"],
        ),
        Stage("sizes", [str(python), str(packaging / "size_check.py")]),
        Stage("tests", [*module, "pytest", "-q", "-n", "2", "--dist", "loadgroup", *for_pytest]),
    ]


def run(stage: Stage) -> Outcome:
    """Run one stage from the project's folder, without a display."""
    print(f"\n== {stage.name}", flush=True)
    surroundings = {"PYTHONHASHSEED": HASH_SEED, **os.environ, "QT_QPA_PLATFORM": "offscreen"}
    start = time.monotonic()
    code = subprocess.run(stage.command, cwd=environment.ROOT, env=surroundings, check=False).returncode
    return Outcome(stage.name, code, time.monotonic() - start)


def main(arguments: list[str]) -> int:
    """Run every stage and end with 0 only where all are good."""
    try:
        python = environment.ready("test")
    except environment.Unable as reason:
        print(reason, file=sys.stderr)
        return environment.CANNOT
    outcomes = [run(stage) for stage in stages(python, arguments)]
    print(f"\nPYTHONHASHSEED={os.environ.get('PYTHONHASHSEED', HASH_SEED)}")
    for outcome in outcomes:
        print(f"{'good  ' if outcome.code == 0 else 'FAILED'}  {outcome.seconds:6.1f} s  {outcome.name}")
    return 0 if all(outcome.code == 0 for outcome in outcomes) else 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
