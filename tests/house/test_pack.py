import io
import random
import zipfile

import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.errors import UserError
from creditdesk.house.pack import FILE_LIMIT, SIZE_LIMIT, pack, unpack

FILES = {"house.toml": b"a = 1\n", "models/one.toml": b"", "lines.toml": b"\xff\x00" * 50}
plain_names = st.lists(st.text("abcxyz019_-.é", min_size=1, max_size=6), min_size=1, max_size=3).map("/".join)


def code_of(data: bytes) -> str:
    with pytest.raises(UserError) as caught:
        unpack(data)
    return caught.value.code


def zip_of(*entries: tuple[str, bytes], kind: int = zipfile.ZIP_STORED) -> bytes:
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", kind) as archive:
        for name, content in entries:
            archive.writestr(zipfile.ZipInfo(name), content, compress_type=kind)
    return buffer.getvalue()


@given(st.dictionaries(plain_names.filter(lambda n: not {".", ".."} & set(n.split("/"))), st.binary(), max_size=8))
def test_packs_and_unpacks_any_files(files: dict[str, bytes]) -> None:
    assert unpack(pack(files)) == files


def test_bytes_depend_on_names_and_contents_only() -> None:
    assert pack(FILES) == pack(dict(reversed(FILES.items())))
    assert pack(FILES) != pack({**FILES, "house.toml": b"a = 2\n"})


def test_members_are_sorted_stored_and_undated() -> None:
    with zipfile.ZipFile(io.BytesIO(pack(FILES))) as archive:
        entries = archive.infolist()
    assert [entry.filename for entry in entries] == sorted(FILES)
    assert {entry.date_time for entry in entries} == {(1980, 1, 1, 0, 0, 0)}
    assert {entry.compress_type for entry in entries} == {zipfile.ZIP_STORED}


@pytest.mark.parametrize("name", ["/etc/x", "../x", "a/../x", "a//b", "./a", "c:x", "a\\b", "a/", ""])
def test_names_that_leave_the_folder_are_refused(name: str) -> None:
    with pytest.raises(UserError) as caught:
        pack({name: b""})
    assert caught.value.code == "archive_name"
    if name:
        assert code_of(zip_of((name, b""))) == "archive_name"


@pytest.mark.filterwarnings("ignore:Duplicate name")
def test_a_name_used_twice_is_refused() -> None:
    assert code_of(zip_of(("a", b"1"), ("a", b"2"))) == "archive_name"


def test_limits_are_kept_both_ways() -> None:
    for files in ({"a": bytes(SIZE_LIMIT + 1)}, {str(number): b"" for number in range(FILE_LIMIT + 1)}):
        with pytest.raises(UserError) as caught:
            pack(files)
        assert caught.value.code == "archive_too_large"
        assert code_of(zip_of(*files.items())) == "archive_too_large"
    assert code_of(bytes(2 * SIZE_LIMIT + 1)) == "archive_too_large"


def test_a_bomb_is_not_unfolded() -> None:
    assert code_of(zip_of(("a", bytes(SIZE_LIMIT - 1)), kind=zipfile.ZIP_DEFLATED)) == "archive_packed"


def test_damage_is_refused_or_harmless() -> None:
    """A bit of a date may flip unseen; a name or a content may not change into another without notice."""
    data, seed = pack(FILES), random.Random(7)
    for at in seed.sample(range(len(data)), 250):
        changed = data[:at] + bytes([data[at] ^ (1 << seed.randrange(8))]) + data[at + 1 :]
        try:
            files = unpack(changed)
        except UserError:
            continue
        assert list(files.values()) == list(unpack(data).values())
    for cut in range(0, len(data), 7):
        assert code_of(data[:cut]) == "not_an_archive"
