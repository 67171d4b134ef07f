"""``identity new``: a key only its owner can read, and only with the passphrase."""

import re
from collections.abc import Callable
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest
from cryptography.hazmat.primitives.asymmetric import ec, rsa
from cryptography.hazmat.primitives.serialization import pkcs12

from tests.cli.conftest import PASSPHRASE
from tests.programs import Ended

Command = Callable[..., Ended]


@pytest.mark.parametrize("kind", ["ecdsa-p256", "rsa-3072"])
def test_a_new_identity(command: Command, passphrase: str, tmp_path: Path, kind: str) -> None:
    out = tmp_path / "ada.p12"
    asked = ("--name", "Ada Lætitia", "--out", out, "--passphrase-env", passphrase, "--kind", kind)
    done = command("identity", "new", *asked)
    assert (done.code, done.messages) == (0, ())
    assert out.stat().st_mode & 0o777 == 0o600
    key, certificate, others = pkcs12.load_key_and_certificates(out.read_bytes(), PASSPHRASE.encode())
    assert others == []
    assert certificate is not None
    assert certificate.subject.rfc4514_string() == "CN=Ada Lætitia"
    assert certificate.subject == certificate.issuer
    assert isinstance(key, ec.EllipticCurvePrivateKey if kind == "ecdsa-p256" else rsa.RSAPrivateKey)
    assert key.key_size == (256 if kind == "ecdsa-p256" else 3072)
    lasts = certificate.not_valid_after_utc - datetime.now(UTC)
    assert timedelta(days=365) < lasts < timedelta(days=5 * 366)
    digits = re.search("[0-9a-f]{64}", done.text)
    assert digits is not None
    from cryptography.hazmat.primitives.hashes import SHA256

    assert digits[0] == certificate.fingerprint(SHA256()).hex()
    assert PASSPHRASE not in done.text


def test_a_passphrase_is_asked_for_and_must_be_long(
    command: Command, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    out = tmp_path / "ada.p12"
    asked = ("identity", "new", "--name", "Ada", "--out", out, "--passphrase-env")
    done = command(*asked, "NO_SUCH_VARIABLE")
    assert (done.code, done.out, len(done.messages)) == (2, b"", 1)
    monkeypatch.setenv("SHORT", "1234567")
    done = command(*asked, "SHORT")
    assert (done.code, done.out, len(done.messages)) == (3, b"", 1)
    assert "1234567" not in done.messages[0]
    assert not out.exists()


@pytest.mark.parametrize("name", ["", " ", "x" * 65, "Ada\nBen"])
def test_a_name_must_be_one(command: Command, passphrase: str, tmp_path: Path, name: str) -> None:
    done = command("identity", "new", "--name", name, "--out", tmp_path / "a.p12", "--passphrase-env", passphrase)
    assert (done.code, done.out, len(done.messages)) == (3, b"", 1)
    assert list(tmp_path.iterdir()) == []


def test_an_old_identity_is_not_written_over(command: Command, passphrase: str, tmp_path: Path) -> None:
    """A key once lost cannot be had again: what it signed would be signed by a stranger."""
    out = tmp_path / "ada.p12"
    out.write_bytes(b"a key")
    done = command("identity", "new", "--name", "Ada", "--out", out, "--passphrase-env", passphrase)
    assert (done.code, done.out) == (3, b"")
    assert out.read_bytes() == b"a key"
