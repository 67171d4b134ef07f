"""The one form a signature may have in a memo, so that not a single bit of it can be changed unseen.

A signature's own bytes are the only stretch of the file that its digest does not cover. They are rebuilt from what is
signed or checked (certificate, signed attributes, signature value) and compared: DER throughout, SHA-256, ECDSA on
P-256 with the lower of its two equivalent values or RSA, one certificate, no unsigned attributes; lower-case hex, zero
padding.
"""

from asn1crypto import algos, cms, core, x509  # type: ignore[import-untyped]
from cryptography.hazmat.primitives.asymmetric.utils import decode_dss_signature, encode_dss_signature

LEVEL = "PAdES B-B"

_P256_ORDER = 0xFFFFFFFF00000000FFFFFFFFFFFFFFFFBCE6FAADA7179E84F3B9CAC2FC632551  # SEC 2, 2.4.2
_SIGNATURE_ALGORITHMS = {
    "ec": {"algorithm": "sha256_ecdsa"},  # RFC 5758, 3.2: no parameters
    "rsa": {"algorithm": "sha256_rsa", "parameters": core.Null()},  # RFC 4055, 5: parameters are NULL
}


def canonical_cms(message: cms.ContentInfo) -> bytes:
    """Rebuild a signature in its one form, from the certificate, signed attributes and signature value in it.

    Raises ValueError, KeyError or TypeError where the message is no signature of the kinds made here.
    """
    signed = message["content"]
    (signer,) = signed["signer_infos"]
    (choice,) = signed["certificates"]
    certificate = x509.Certificate.load(choice.chosen.dump(), strict=True)
    kind = certificate.public_key.algorithm
    if kind == "ec" and certificate.public_key.curve != ("named", "secp256r1"):
        raise ValueError("the signer's key is not on P-256")
    digest = algos.DigestAlgorithm({"algorithm": "sha256", "parameters": core.Null()})
    # A place for level B-T: a time-stamp token would be carried over here as the one unsigned attribute.
    rebuilt = cms.SignerInfo(
        {
            "version": "v1",
            "sid": _identifier(certificate),
            "digest_algorithm": digest,
            "signed_attrs": cms.CMSAttributes.load(signer["signed_attrs"].untag().dump(), strict=True),
            "signature_algorithm": algos.SignedDigestAlgorithm(_SIGNATURE_ALGORITHMS[kind]),
            "signature": _canonical_value(signer["signature"].native, kind),
        }
    )
    data = cms.SignedData(
        {
            "version": "v1",
            "digest_algorithms": [digest],
            "encap_content_info": {"content_type": "data"},
            "certificates": [cms.CertificateChoices(name="certificate", value=certificate)],
            "signer_infos": [rebuilt],
        }
    )
    return bytes(cms.ContentInfo({"content_type": "signed_data", "content": data}).dump())


def canonical_contents(message: bytes, room: int) -> bytes:
    """Write a signature as its ``/Contents`` must stand in the file: ``room`` bytes, angle brackets included."""
    digits = message.hex().encode("ascii")
    if len(digits) > room - 2:
        raise ValueError(f"the signature needs {len(digits)} digits, {room - 2} are free")
    return b"<" + digits.ljust(room - 2, b"0") + b">"


def _identifier(certificate: x509.Certificate) -> cms.SignerIdentifier:
    return cms.SignerIdentifier(
        {
            "issuer_and_serial_number": cms.IssuerAndSerialNumber(
                {"issuer": certificate.issuer, "serial_number": certificate.serial_number}
            )
        }
    )


def _canonical_value(value: bytes, kind: str) -> bytes:
    """Return the signature value; of ECDSA's two valid values for one message, the one with the lower second half."""
    if kind != "ec":
        return value
    first, second = decode_dss_signature(value)
    return encode_dss_signature(first, min(second, _P256_ORDER - second))
