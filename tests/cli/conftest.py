"""Commands called in this process, which is quick; where a process is the point, tests start one."""

from collections.abc import Callable

import pytest

from creditdesk.cli.main import main
from tests.programs import Argument, Ended, ended

Command = Callable[..., Ended]
PASSPHRASE, VARIABLE = "lantern on the quay", "CREDITDESK_TEST_PASSPHRASE"


@pytest.fixture
def command(capfdbinary: pytest.CaptureFixture[bytes]) -> Command:
    """Return a function that calls the program's entry point and sums up how it ended."""

    def call(*arguments: Argument) -> Ended:
        capfdbinary.readouterr()
        try:
            code = main([str(argument) for argument in arguments])
        except SystemExit as end:  # how the parser of arguments ends
            code = end.code if isinstance(end.code, int) else 1
        out, err = capfdbinary.readouterr()
        return ended(code, out, err)

    return call


@pytest.fixture
def passphrase(monkeypatch: pytest.MonkeyPatch) -> str:
    """Put a passphrase into the environment and return the variable's name."""
    monkeypatch.setenv(VARIABLE, PASSPHRASE)
    return VARIABLE
