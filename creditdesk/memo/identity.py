"""Signing identities: a private key and its self-signed certificate in one PKCS#12 file.

A self-signed certificate names nobody: it proves which key signed, and the house book says whose key that is. The
passphrase protects the file and is stored nowhere.
"""

import hashlib
import os
import tempfile
from contextlib import suppress
from dataclasses import dataclass, field
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Literal

from asn1crypto import keys as asn1_keys  # type: ignore[import-untyped]
from asn1crypto import pkcs12 as asn1_pkcs12
from asn1crypto import x509 as asn1_x509
from cryptography import x509
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec, rsa
from cryptography.hazmat.primitives.serialization import (
    Encoding,
    NoEncryption,
    PrivateFormat,
    PublicFormat,
    pkcs12,
)
from cryptography.x509.oid import NameOID
from pyhanko.sign.signers import SimpleSigner
from pyhanko_certvalidator.registry import SimpleCertificateStore

from creditdesk.base.errors import UserError

Kind = Literal["ecdsa-p256", "rsa-3072"]
PrivateKey = ec.EllipticCurvePrivateKey | rsa.RSAPrivateKey

SHORTEST_PASSPHRASE = 8
LONGEST_NAME = 64  # characters of a common name, RFC 5280, appendix A.1
_VALID_DAYS = 5 * 365
_SMALLEST_RSA_BITS = 3072
_DERIVATION_ROUNDS = 600_000  # PBKDF2 with SHA-256
_LARGEST_FILE = 1_000_000


@dataclass(frozen=True, slots=True)
class Identity:
    """Hold an opened signing identity.

    ``fingerprint_sha256`` is that of the certificate, ``key_fingerprint`` the SHA-256 of the public key: equal for two
    certificates on one key. Both are 64 lower-case hex digits.
    """

    name: str
    fingerprint_sha256: str
    key_fingerprint: str
    valid_from: datetime
    valid_to: datetime
    signer: SimpleSigner = field(repr=False)


def new_identity(name: str, passphrase: str, kind: Kind = "ecdsa-p256", *, now: datetime) -> bytes:
    """Return a PKCS#12 file with a new key and a self-signed certificate valid for five years from ``now``.

    ``now`` must carry its time zone. Raises UserError: an empty or overlong name, a passphrase under eight characters.
    """
    name = name.strip()
    _refuse_unusable_name(name)
    if len(passphrase) < SHORTEST_PASSPHRASE:
        raise UserError("identity.passphrase", f"The passphrase needs at least {SHORTEST_PASSPHRASE} characters.")
    key: PrivateKey = (
        ec.generate_private_key(ec.SECP256R1())
        if kind == "ecdsa-p256"
        else rsa.generate_private_key(public_exponent=65537, key_size=_SMALLEST_RSA_BITS)
    )
    protection = (
        PrivateFormat.PKCS12.encryption_builder()
        .kdf_rounds(_DERIVATION_ROUNDS)
        .key_cert_algorithm(pkcs12.PBES.PBESv2SHA256AndAES256CBC)
        .hmac_hash(hashes.SHA256())
        .build(passphrase.encode("utf-8"))
    )
    return pkcs12.serialize_key_and_certificates(
        name.encode("utf-8"), key, _certificate(name, key, now.astimezone(UTC)), None, protection
    )


def _refuse_unusable_name(name: str) -> None:
    if not name:
        raise UserError("identity.name", "The identity needs the name of the person who signs.")
    if len(name) > LONGEST_NAME or not name.isprintable():
        raise UserError(
            "identity.name", f"The name {name!r} must have at most {LONGEST_NAME} characters, all printable."
        )


def _certificate(name: str, key: PrivateKey, now: datetime) -> x509.Certificate:
    subject = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, name)])
    usage = x509.KeyUsage(
        digital_signature=True,
        content_commitment=True,  # nonRepudiation
        key_encipherment=False,
        data_encipherment=False,
        key_agreement=False,
        key_cert_sign=False,
        crl_sign=False,
        encipher_only=False,
        decipher_only=False,
    )
    return (
        x509.CertificateBuilder()
        .subject_name(subject)
        .issuer_name(subject)
        .public_key(key.public_key())
        .serial_number(x509.random_serial_number())
        .not_valid_before(now)
        .not_valid_after(now + timedelta(days=_VALID_DAYS))
        .add_extension(x509.BasicConstraints(ca=False, path_length=None), critical=True)
        .add_extension(usage, critical=True)
        .add_extension(x509.SubjectKeyIdentifier.from_public_key(key.public_key()), critical=False)
        .sign(key, hashes.SHA256())
    )


def load_identity(path: Path, passphrase: str, *, now: datetime) -> Identity:
    """Open a PKCS#12 file and return the identity in it.

    Raises UserError: no such file, no PKCS#12, a wrong passphrase, a key or certificate missing, a key too weak or of
    a kind not signed with here, a certificate not valid at ``now`` (which must carry its time zone).
    """
    key, certificate = _opened(path, passphrase)
    _refuse_unfit(path, key, certificate, now)
    der = certificate.public_bytes(Encoding.DER)
    parsed = asn1_x509.Certificate.load(der)
    signer = SimpleSigner(
        signing_cert=parsed,
        signing_key=asn1_keys.PrivateKeyInfo.load(key.private_bytes(Encoding.DER, PrivateFormat.PKCS8, NoEncryption())),
        cert_registry=SimpleCertificateStore(),  # type: ignore[no-untyped-call]
    )
    return Identity(
        name=certificate_name(certificate),
        fingerprint_sha256=hashlib.sha256(der).hexdigest(),
        key_fingerprint=hashlib.sha256(parsed.public_key.dump()).hexdigest(),
        valid_from=certificate.not_valid_before_utc,
        valid_to=certificate.not_valid_after_utc,
        signer=signer,
    )


def certificate_name(certificate: x509.Certificate) -> str:
    """Return the name a certificate gives its owner: the common name, else the whole subject."""
    common = certificate.subject.get_attributes_for_oid(NameOID.COMMON_NAME)
    return str(common[0].value) if common else certificate.subject.rfc4514_string()


def _opened(path: Path, passphrase: str) -> tuple[PrivateKey, x509.Certificate]:
    data = _read(path)
    try:
        key, certificate, _ = pkcs12.load_key_and_certificates(data, passphrase.encode("utf-8"))
    except ValueError as error:
        raise _why_not_opened(path, data) from error
    if key is None or certificate is None:
        raise UserError("identity.incomplete", f"{path}: the file must hold a private key and its certificate.")
    if not isinstance(key, ec.EllipticCurvePrivateKey | rsa.RSAPrivateKey):
        raise UserError("identity.key", f"{path}: the key must be ECDSA on P-256 or RSA.")
    return key, certificate


def _read(path: Path) -> bytes:
    try:
        with path.open("rb") as file:
            data = file.read(_LARGEST_FILE + 1)
    except OSError as error:
        raise UserError("identity.unreadable", f"{path}: cannot be read ({error.strerror}).") from error
    if len(data) > _LARGEST_FILE:
        raise UserError("identity.format", f"{path}: is no signing identity, it is larger than {_LARGEST_FILE} bytes.")
    return data


def _why_not_opened(path: Path, data: bytes) -> UserError:
    """Tell a wrong passphrase from a file of another kind: the outer shape of PKCS#12 needs no passphrase."""
    try:
        sound = asn1_pkcs12.Pfx.load(data, strict=True)["auth_safe"]["content_type"].native == "data"
    except (ValueError, TypeError, KeyError):
        sound = False
    if sound:
        return UserError("identity.passphrase_wrong", f"{path}: the passphrase does not open this identity.")
    return UserError("identity.format", f"{path}: is no signing identity (PKCS#12 expected).")


def _refuse_unfit(path: Path, key: PrivateKey, certificate: x509.Certificate, now: datetime) -> None:
    faults = []
    if _public_bytes(key) != certificate.public_key().public_bytes(Encoding.DER, PublicFormat.SubjectPublicKeyInfo):
        faults.append("the certificate belongs to another key")
    if isinstance(key, rsa.RSAPrivateKey) and key.key_size < _SMALLEST_RSA_BITS:
        faults.append(f"the RSA key has {key.key_size} bits, at least {_SMALLEST_RSA_BITS} are needed")
    if isinstance(key, ec.EllipticCurvePrivateKey) and not isinstance(key.curve, ec.SECP256R1):
        faults.append(f"the key lies on the curve {key.curve.name}, P-256 is expected")
    first, last = certificate.not_valid_before_utc, certificate.not_valid_after_utc
    if now > last:
        faults.append(f"the certificate expired on {last:%Y-%m-%d}; make a new identity")
    if now < first:
        faults.append(f"the certificate is valid only from {first:%Y-%m-%d %H:%M} UTC on; check this computer's clock")
    if faults:
        raise UserError("identity.unfit", [f"{path}: {fault}." for fault in faults])


def _public_bytes(key: PrivateKey) -> bytes:
    return key.public_key().public_bytes(Encoding.DER, PublicFormat.SubjectPublicKeyInfo)


def write_private(path: Path, data: bytes) -> None:
    """Write a new file that only its owner may read: claimed, written beside, synced, then put in place.

    Raises UserError where the file exists already, or cannot be written.
    """
    try:
        os.close(os.open(path, os.O_CREAT | os.O_EXCL | os.O_WRONLY, 0o600))
    except FileExistsError as error:
        raise UserError("file.exists", f"{path}: exists already and is not overwritten.") from error
    except OSError as error:
        raise UserError("file.unwritable", f"{path}: cannot be written ({error.strerror}).") from error
    try:
        _replace_synced(path, data)
    except OSError as error:
        path.unlink(missing_ok=True)
        raise UserError("file.unwritable", f"{path}: cannot be written ({error.strerror}).") from error


def _replace_synced(path: Path, data: bytes) -> None:
    handle, name = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.")  # made with mode 0600
    beside = Path(name)
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        beside.replace(path)
    except OSError:
        beside.unlink(missing_ok=True)
        raise
    with suppress(OSError):  # a folder cannot be synced on every system
        folder = os.open(path.parent, os.O_RDONLY)
        try:
            os.fsync(folder)
        finally:
            os.close(folder)
