"""Memos and identities that several tests look at; made once."""

from pathlib import Path

import pytest

from creditdesk.memo.decision import Decision
from creditdesk.memo.identity import Identity, load_identity, new_identity, write_private
from creditdesk.memo.sign import sign_as_approver, sign_as_preparer
from tests.memos import NOW, small_memo

PASSPHRASE = "correct horse"


def _identity(folder: Path, name: str, kind: str) -> Identity:
    path = folder / f"{name}.p12"
    write_private(path, new_identity(name, PASSPHRASE, kind, now=NOW))
    return load_identity(path, PASSPHRASE, now=NOW)


@pytest.fixture(scope="session")
def preparer(tmp_path_factory: pytest.TempPathFactory) -> Identity:
    return _identity(tmp_path_factory.mktemp("preparer"), "Ada Brightwater", "ecdsa-p256")


@pytest.fixture(scope="session")
def approver(tmp_path_factory: pytest.TempPathFactory) -> Identity:
    return _identity(tmp_path_factory.mktemp("approver"), "Björn Ostrander", "rsa-3072")


@pytest.fixture(scope="session")
def unsigned_memo() -> bytes:
    return small_memo()


@pytest.fixture(scope="session")
def prepared_memo(unsigned_memo: bytes, preparer: Identity) -> bytes:
    return sign_as_preparer(unsigned_memo, preparer, time=NOW)


@pytest.fixture(scope="session")
def countersigned_memo(prepared_memo: bytes, approver: Identity) -> bytes:
    return sign_as_approver(
        prepared_memo,
        approver,
        decision=Decision.APPROVE_WITH_CONDITIONS,
        conditions="Interest cover at least 2.5 ×; no dividend while debt / EBITDA exceeds 3.0 ×.",
        time=NOW,
    )
