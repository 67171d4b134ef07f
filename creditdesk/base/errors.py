"""Two families of errors: what the user can mend, and our own bugs."""

from collections.abc import Sequence


class CreditdeskError(Exception):
    """Ground for every error this program raises itself."""


class UserError(CreditdeskError):
    """Stop the work for a reason the user can mend; shown as it stands.

    ``code`` is stable and meant for tests and scripts; ``faults`` holds one readable line per fault, each saying
    what was found, where, and what is allowed. ``exit_code`` is what a command ends with: 3, unusable file or content.
    """

    exit_code = 3

    def __init__(self, code: str, faults: str | Sequence[str]) -> None:
        self.code = code
        self.faults: tuple[str, ...] = (faults,) if isinstance(faults, str) else tuple(faults)
        super().__init__("\n".join(self.faults))


class Refusal(UserError):
    """Say that the answer is no: a borrower outside the program's purpose, a memo that does not verify."""

    exit_code = 1


class UsageError(UserError):
    """Say that a command was called wrongly."""

    exit_code = 2


class BugError(CreditdeskError):
    """Report a state that our own code should have made impossible."""
