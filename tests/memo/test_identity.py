import os
import stat
from collections.abc import Callable
from datetime import UTC, datetime, timedelta, timezone
from pathlib import Path

import pytest
from cryptography import x509
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec, ed25519, rsa
from cryptography.hazmat.primitives.serialization import BestAvailableEncryption, pkcs12
from cryptography.x509.oid import ExtensionOID, NameOID

from creditdesk.base.errors import UserError
from creditdesk.memo.identity import _refuse_unfit, load_identity, new_identity, write_private
from tests.memos import NOW

PASSPHRASE = "correct horse"


def stored(folder: Path, data: bytes) -> Path:
    path = folder / "id.p12"
    path.write_bytes(data)
    return path


def made_by_hand(key: object) -> bytes:
    """Return a PKCS#12 file with any key and a certificate for it."""
    name = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, "Someone")])
    builder = x509.CertificateBuilder().subject_name(name).issuer_name(name).serial_number(7)
    builder = builder.not_valid_before(NOW).not_valid_after(NOW + timedelta(days=30)).public_key(key.public_key())
    algorithm = None if isinstance(key, ed25519.Ed25519PrivateKey) else hashes.SHA256()
    certificate = builder.sign(key, algorithm)
    return pkcs12.serialize_key_and_certificates(
        b"x", key, certificate, None, BestAvailableEncryption(PASSPHRASE.encode())
    )


def fault_of(path: Path, passphrase: str = PASSPHRASE, now: datetime = NOW) -> UserError:
    with pytest.raises(UserError) as caught:
        load_identity(path, passphrase, now=now)
    return caught.value


@pytest.mark.parametrize("kind", ["ecdsa-p256", "rsa-3072"])
def test_an_identity_opens_with_its_name_and_fingerprint(kind: str, tmp_path: Path) -> None:
    data = new_identity("  Ada Brightwater ", PASSPHRASE, kind, now=NOW)
    identity = load_identity(stored(tmp_path, data), PASSPHRASE, now=NOW)
    certificate = pkcs12.load_key_and_certificates(data, PASSPHRASE.encode())[1]
    assert certificate is not None
    assert identity.name == "Ada Brightwater"
    assert identity.fingerprint_sha256 == certificate.fingerprint(hashes.SHA256()).hex()
    assert (identity.valid_from, identity.valid_to) == (NOW, NOW + timedelta(days=5 * 365))
    assert "signer" not in repr(identity)


def test_the_certificate_is_for_signing_alone() -> None:
    certificate = pkcs12.load_key_and_certificates(new_identity("A", PASSPHRASE, now=NOW), PASSPHRASE.encode())[1]
    assert certificate is not None
    usage = certificate.extensions.get_extension_for_oid(ExtensionOID.KEY_USAGE)
    assert usage.critical
    assert usage.value.digital_signature
    assert usage.value.content_commitment
    assert not usage.value.key_cert_sign
    assert not usage.value.key_encipherment
    assert certificate.extensions.get_extension_for_class(x509.BasicConstraints).value.ca is False
    certificate.verify_directly_issued_by(certificate)


def test_the_clock_given_is_the_clock_used(tmp_path: Path) -> None:
    elsewhere = NOW.astimezone(timezone(timedelta(hours=9)))
    identity = load_identity(stored(tmp_path, new_identity("A", PASSPHRASE, now=elsewhere)), PASSPHRASE, now=NOW)
    assert identity.valid_from == NOW


@pytest.mark.parametrize("name", ["", "   ", "x" * 65, "two\nlines"])
def test_a_name_that_names_nobody_is_refused(name: str) -> None:
    with pytest.raises(UserError) as caught:
        new_identity(name, PASSPHRASE, now=NOW)
    assert caught.value.code == "identity.name"


def test_a_short_passphrase_is_refused() -> None:
    with pytest.raises(UserError, match="at least 8"):
        new_identity("A", "1234567", now=NOW)


def test_a_wrong_passphrase_and_a_wrong_file_are_told_apart(tmp_path: Path) -> None:
    path = stored(tmp_path, new_identity("A", PASSPHRASE, now=NOW))
    assert fault_of(path, "wrong horse").code == "identity.passphrase_wrong"
    for data in (b"", b"no identity", b"0" * 2_000_000, path.read_bytes()[:-40]):
        assert fault_of(stored(tmp_path, data)).code == "identity.format"
    assert fault_of(tmp_path / "missing.p12").code == "identity.unreadable"
    assert fault_of(tmp_path).code == "identity.unreadable"


def test_a_certificate_not_valid_now_is_refused(tmp_path: Path) -> None:
    path = stored(tmp_path, new_identity("A", PASSPHRASE, now=NOW))
    assert "expired on 2031-11-30" in str(fault_of(path, now=datetime(2031, 12, 1, tzinfo=UTC)))
    assert "only from 2026-12-01 09:30" in str(fault_of(path, now=NOW - timedelta(seconds=1)))


def _weak_rsa() -> bytes:
    return made_by_hand(rsa.generate_private_key(65537, 2048))


def _other_curve() -> bytes:
    return made_by_hand(ec.generate_private_key(ec.SECP384R1()))


def _other_kind() -> bytes:
    return made_by_hand(ed25519.Ed25519PrivateKey.generate())


def _no_key() -> bytes:
    certificate = pkcs12.load_key_and_certificates(new_identity("A", PASSPHRASE, now=NOW), PASSPHRASE.encode())[1]
    assert certificate is not None
    return pkcs12.serialize_key_and_certificates(
        None, None, None, [certificate], BestAvailableEncryption(PASSPHRASE.encode())
    )


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (_weak_rsa, "2048 bits, at least 3072"),
        (_other_curve, "secp384r1, P-256 is expected"),
        (_other_kind, "must be ECDSA on P-256 or RSA"),
        (_no_key, "a private key and its certificate"),
    ],
)
def test_keys_not_signed_with_here_are_refused(make: Callable[[], bytes], words: str, tmp_path: Path) -> None:
    assert words in str(fault_of(stored(tmp_path, make())))


def test_a_certificate_of_another_key_is_refused() -> None:
    ours = ec.generate_private_key(ec.SECP256R1())
    other = pkcs12.load_key_and_certificates(new_identity("A", PASSPHRASE, now=NOW), PASSPHRASE.encode())[1]
    assert other is not None
    with pytest.raises(UserError, match="belongs to another key"):
        _refuse_unfit(Path("id.p12"), ours, other, NOW)


def test_the_file_is_private_and_never_overwritten(tmp_path: Path) -> None:
    path = tmp_path / "id.p12"
    old_mask = os.umask(0)
    try:
        write_private(path, b"first")
    finally:
        os.umask(old_mask)
    assert stat.S_IMODE(path.stat().st_mode) == 0o600
    with pytest.raises(UserError, match="not overwritten"):
        write_private(path, b"second")
    assert path.read_bytes() == b"first"
    assert list(tmp_path.iterdir()) == [path]


def test_a_failed_write_leaves_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def full(_handle: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(UserError, match="No space left"):
        write_private(tmp_path / "id.p12", b"data")
    assert list(tmp_path.iterdir()) == []


def test_a_missing_folder_is_named(tmp_path: Path) -> None:
    with pytest.raises(UserError, match=r"nowhere.*No such file"):
        write_private(tmp_path / "nowhere" / "id.p12", b"data")
