import asyncio
import hashlib
from contextlib import suppress

import pytest
from asn1crypto import cms, core
from cryptography.hazmat.primitives.asymmetric.utils import decode_dss_signature, encode_dss_signature

from creditdesk.memo.canonical import canonical_cms, canonical_contents
from creditdesk.memo.identity import Identity

P256_ORDER = 0xFFFFFFFF00000000FFFFFFFFFFFFFFFFBCE6FAADA7179E84F3B9CAC2FC632551  # FIPS 186-5 names SP 800-186 for it


def made(identity: Identity) -> cms.ContentInfo:
    digest = hashlib.sha256(b"memo").digest()
    return asyncio.run(identity.signer.async_sign(digest, "sha256", use_pades=True))


@pytest.fixture(params=["preparer", "approver"])
def message(request: pytest.FixtureRequest) -> bytes:
    return canonical_cms(made(request.getfixturevalue(request.param)))


def test_the_form_is_its_own_canonical_form(message: bytes) -> None:
    assert canonical_cms(cms.ContentInfo.load(message)) == message


def test_signed_attributes_are_those_of_pades_b_b(message: bytes) -> None:
    # ETSI EN 319 142-1, 6.3: content type, message digest, signing certificate; no signing time; no unsigned ones
    (signer,) = cms.ContentInfo.load(message)["content"]["signer_infos"]
    types = [attribute["type"].native for attribute in signer["signed_attrs"]]
    assert types == ["content_type", "message_digest", "signing_certificate_v2"]
    assert isinstance(signer["unsigned_attrs"], core.Void)


def test_the_higher_of_two_equivalent_values_is_not_canonical(preparer: Identity) -> None:
    message = cms.ContentInfo.load(canonical_cms(made(preparer)))
    signer = message["content"]["signer_infos"][0]
    first, second = decode_dss_signature(signer["signature"].native)
    assert second <= P256_ORDER // 2
    signer["signature"] = encode_dss_signature(first, P256_ORDER - second)
    assert canonical_cms(message) != message.dump(force=True)


def test_no_bit_beside_what_is_signed_can_change_and_stay_canonical(message: bytes) -> None:
    parsed = cms.ContentInfo.load(message)
    (signer,) = parsed["content"]["signer_infos"]
    certificate = parsed["content"]["certificates"][0].chosen.dump()
    signed = [certificate, signer["signed_attrs"].contents, signer["signature"].contents]  # a flip there: no signature
    covered = {place for part in signed for place in range(message.index(part), message.index(part) + len(part))}
    survivors = []
    for place in sorted(set(range(len(message))) - covered):
        for bit in range(8):
            flipped = bytearray(message)
            flipped[place] ^= 1 << bit
            with suppress(Exception):  # any refusal will do, as it does for who asks
                if canonical_cms(cms.ContentInfo.load(bytes(flipped))) == bytes(flipped):
                    survivors.append((place, bit))
    assert len(covered) < len(message) - 50
    assert survivors == []


def test_an_unsigned_attribute_is_not_canonical(message: bytes) -> None:
    parsed = cms.ContentInfo.load(message)
    attribute = cms.CMSAttribute({"type": "content_type", "values": ["data"]})
    parsed["content"]["signer_infos"][0]["unsigned_attrs"] = [attribute]
    assert canonical_cms(parsed) == message != parsed.dump(force=True)


def test_contents_are_lower_case_hex_with_zeros_to_the_end() -> None:
    assert canonical_contents(b"\xab\xcd", 10) == b"<abcd0000>"
    with pytest.raises(ValueError, match="4 digits, 3 are free"):
        canonical_contents(b"\xab\xcd", 5)
