"""Change signed memos one bit at a time, cut them, lengthen them: none may pass, none may raise."""

import random
import re
from collections.abc import Iterator

import pytest

from creditdesk.memo.signatures import State, inspect

STRUCTURE = re.compile(
    rb"%PDF-1\.7|/ByteRange \[[^\]]*\]|/Contents <[0-9a-f]{24}|[0-9a-f]{24}>|/SubFilter \S+|/M \([^)]*\)|/Reason \S+"
    rb"|/Filter /Adobe\S+|/Perms <<[^>]*>>|/Fields \[[^\]]*\]|/DocMDP|xref\n\d+ \d+\n.{20}|trailer\s*<<[^>]*>>?"
    rb"|/Prev \d+|/Root \d+ \d+ R|startxref\n\d+|%%EOF\n",
    re.DOTALL,
)
RANDOM_FLIPS = 500


@pytest.fixture(params=["prepared_memo", "countersigned_memo"])
def memo(request: pytest.FixtureRequest) -> bytes:
    return request.getfixturevalue(request.param)


def flipped(memo: bytes, place: int, bit: int) -> bytes:
    return memo[:place] + bytes([memo[place] ^ 1 << bit]) + memo[place + 1 :]


def structural_places(memo: bytes) -> Iterator[int]:
    for found in STRUCTURE.finditer(memo):
        yield from range(found.start(), found.end())


def survivors(memo: bytes, flips: Iterator[tuple[int, int]]) -> list[tuple[int, int]]:
    return [(place, bit) for place, bit in flips if inspect(flipped(memo, place, bit)).valid]


def random_flips(memo: bytes, count: int, seed: int) -> Iterator[tuple[int, int]]:
    chance = random.Random(seed)
    return ((chance.randrange(len(memo)), chance.randrange(8)) for _ in range(count))


def test_no_random_bit_flip_passes(memo: bytes) -> None:
    assert survivors(memo, random_flips(memo, RANDOM_FLIPS, seed=1)) == []


def test_no_structural_bit_flip_passes(memo: bytes) -> None:
    places = sorted(set(structural_places(memo)))
    assert len(places) > 400
    assert survivors(memo, ((place, place % 8) for place in places)) == []


@pytest.mark.long
def test_no_flip_of_any_structural_bit_passes(memo: bytes) -> None:
    places = set(structural_places(memo))
    assert survivors(memo, ((place, bit) for place in sorted(places) for bit in range(8))) == []


@pytest.mark.long
def test_no_bit_flip_in_the_signatures_own_bytes_passes(memo: bytes) -> None:
    spans = [found.span(1) for found in re.finditer(rb"/Contents (<[0-9a-f]{600,}>)", memo)]
    assert spans
    assert survivors(memo, ((place, place % 8) for start, end in spans for place in range(start, end))) == []


@pytest.mark.parametrize("tail", [b"\n", b" ", b"\0", b"%", b"%%EOF\n", b"x" * 1000])
def test_a_byte_behind_the_end_does_not_pass(memo: bytes, tail: bytes) -> None:
    assert not inspect(memo + tail).valid


def test_cut_short_only_a_signer_s_own_end_passes(prepared_memo: bytes, countersigned_memo: bytes) -> None:
    around = range(len(prepared_memo) - 12, len(prepared_memo) + 12)
    lengths = {
        *range(0, len(countersigned_memo), 1_009),
        *around,
        *range(len(countersigned_memo) - 12, len(countersigned_memo)),
    }
    passing = {
        length: inspect(countersigned_memo[:length]).state
        for length in lengths
        if inspect(countersigned_memo[:length]).valid
    }
    assert passing == {len(prepared_memo): State.PREPARER}


def test_two_memos_do_not_mix(prepared_memo: bytes, countersigned_memo: bytes) -> None:
    update = countersigned_memo[len(prepared_memo) :]
    assert not inspect(prepared_memo + update + update).valid
    assert not inspect(
        prepared_memo[: len(prepared_memo) // 2] + countersigned_memo[len(prepared_memo) // 2 :] + b"\n"
    ).valid
