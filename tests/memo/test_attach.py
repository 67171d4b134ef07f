import subprocess
import tracemalloc
import zlib
from collections.abc import Callable
from dataclasses import replace
from io import BytesIO
from pathlib import Path

import pikepdf
import pytest
from pikepdf import Array, Dictionary, Name

from creditdesk.base.errors import BugError, UserError
from creditdesk.memo.attach import MOST_BYTES, MOST_FILES, Attachment, Relationship, attachments, embed
from tests.memos import ATTACHMENTS, WRITTEN_ON

ONE = Attachment("a.json", b"{}", "application/json", Relationship.DATA, "A file")


def blank(change: Callable[[pikepdf.Pdf], None]) -> bytes:
    pdf = pikepdf.new()
    pdf.add_blank_page()
    change(pdf)
    target = BytesIO()
    pdf.save(target, compress_streams=False, stream_decode_level=pikepdf.StreamDecodeLevel.none)
    return target.getvalue()


def holding(*files: Attachment) -> bytes:
    return blank(lambda pdf: embed(pdf, files, WRITTEN_ON))


def with_raw_stream(data: bytes, **entries: object) -> bytes:
    """Return a PDF with one hand-made attachment whose packed bytes are given."""

    def put(pdf: pikepdf.Pdf) -> None:
        stream = pikepdf.Stream(pdf, data, Type=Name.EmbeddedFile, **entries)
        file = pdf.make_indirect(Dictionary(Type=Name.Filespec, F="x", UF="x", EF=Dictionary(F=stream)))
        pdf.Root.Names = Dictionary(EmbeddedFiles=Dictionary(Names=Array(["x", file])))

    return blank(put)


def test_what_was_embedded_comes_back() -> None:
    files = (replace(ONE, name="b.bin", data=bytes(range(256))), ONE)
    assert attachments(holding(*files)) == {"a.json": b"{}", "b.bin": bytes(range(256))}


def test_no_attachment_is_an_empty_answer() -> None:
    assert attachments(holding()) == {}


def test_each_is_an_associated_file_with_kind_and_dates() -> None:
    with pikepdf.open(BytesIO(holding(*ATTACHMENTS))) as pdf:
        named = {str(pdf.Root.Names.EmbeddedFiles.Names[i]): pdf.Root.Names.EmbeddedFiles.Names[i + 1] for i in (0, 2)}
        assert [file.objgen for file in pdf.Root.AF] == [file.objgen for file in named.values()]
        case = named["case.toml"]
        assert (case.AFRelationship, str(case.UF), str(case.Desc)) == (Name.Source, "case.toml", "The case")
        assert case.EF.F.Subtype == Name("/application/toml")
        assert case.EF.F.Params.ModDate == "D:20261201000000Z"
        assert int(case.EF.F.Params.Size) == len(ATTACHMENTS[0].data)


@pytest.mark.needs("pdfdetach")
def test_another_program_finds_them(tmp_path: Path) -> None:
    (tmp_path / "memo.pdf").write_bytes(holding(*ATTACHMENTS))
    subprocess.run(["pdfdetach", "-saveall", "-o", tmp_path, tmp_path / "memo.pdf"], check=True, capture_output=True)
    assert {one.name: (tmp_path / one.name).read_bytes() for one in ATTACHMENTS} == {
        one.name: one.data for one in ATTACHMENTS
    }


@pytest.mark.parametrize("names", [("a", "a"), ("../a",), ("a/b",), ("..",), ("",), ("a\nb",)])
def test_names_that_could_not_be_read_back_are_our_bug(names: tuple[str, ...]) -> None:
    with pytest.raises(BugError):
        holding(*(replace(ONE, name=name) for name in names))


def test_more_than_can_be_read_back_is_not_written() -> None:
    with pytest.raises(UserError, match=r"8,388,609 bytes"):
        holding(replace(ONE, data=bytes(MOST_BYTES)), replace(ONE, name="b", data=b"1"))
    with pytest.raises(UserError, match="201 attachments"):
        holding(*(replace(ONE, name=f"{number}") for number in range(MOST_FILES + 1)))


def test_the_most_that_is_allowed_is_read() -> None:
    full = attachments(holding(replace(ONE, data=bytes(MOST_BYTES - 1)), replace(ONE, name="b", data=b"1")))
    assert sum(map(len, full.values())) == MOST_BYTES
    assert len(attachments(holding(*(replace(ONE, name=f"{number}") for number in range(MOST_FILES))))) == MOST_FILES


def test_a_stream_that_unpacks_to_far_too_much_is_not_unpacked() -> None:
    bomb = with_raw_stream(zlib.compress(bytes(128 * 2**20)), Filter=Name.FlateDecode)
    tracemalloc.start()
    try:
        with pytest.raises(UserError, match="8 MB"):
            attachments(bomb)
        assert tracemalloc.get_traced_memory()[1] < 4 * MOST_BYTES
    finally:
        tracemalloc.stop()


def _in_circles(pdf: pikepdf.Pdf) -> None:
    node = pdf.make_indirect(Dictionary())
    node.Kids = Array([node] * 300)
    pdf.Root.Names = Dictionary(EmbeddedFiles=node)


def _too_many(pdf: pikepdf.Pdf) -> None:
    files = [pdf.make_indirect(Dictionary(F="x", EF=Dictionary(F=pdf.make_stream(b"")))) for _ in range(MOST_FILES + 1)]
    names = [part for number, file in enumerate(files) for part in (f"{number:03}", file)]
    pdf.Root.Names = Dictionary(EmbeddedFiles=Dictionary(Names=Array(names)))


def _no_stream(pdf: pikepdf.Pdf) -> None:
    pdf.Root.Names = Dictionary(EmbeddedFiles=Dictionary(Names=Array(["x", Dictionary(EF=Dictionary(F=7))])))


def _odd_list(pdf: pikepdf.Pdf) -> None:
    pdf.Root.Names = Dictionary(EmbeddedFiles=Dictionary(Names=Array(["x"])))


@pytest.mark.parametrize(
    "pdf",
    [
        b"",
        b"%PDF-1.7 nonsense",
        blank(_in_circles),
        blank(_too_many),
        blank(_no_stream),
        blank(_odd_list),
        with_raw_stream(zlib.compress(b"whole")[:-5], Filter=Name.FlateDecode),
        with_raw_stream(b"no flate", Filter=Name.FlateDecode),
        with_raw_stream(b"68656c6c6f>", Filter=Name.ASCIIHexDecode),
        with_raw_stream(zlib.compress(b"1"), Filter=Name.FlateDecode, DecodeParms=Dictionary(Predictor=12)),
    ],
)
def test_what_cannot_be_read_safely_is_refused_in_words(pdf: bytes) -> None:
    with pytest.raises(UserError, match="attachment"):
        attachments(pdf)
