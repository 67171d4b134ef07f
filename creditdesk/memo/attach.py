"""Files inside the memo: embedded as associated files (ISO 19005-3, 6.8) and read back within limits."""

import hashlib
import zlib
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from enum import StrEnum
from io import BytesIO

import pikepdf

from creditdesk.base.errors import BugError, UserError

MOST_BYTES = 8 * 1024 * 1024
MOST_FILES = 200
_MOST_NODES = 1_000


class Relationship(StrEnum):
    """Say what an attached file is to the document (ISO 19005-3, AFRelationship)."""

    SOURCE = "Source"
    DATA = "Data"
    SUPPLEMENT = "Supplement"
    ALTERNATIVE = "Alternative"
    UNSPECIFIED = "Unspecified"


@dataclass(frozen=True, slots=True)
class Attachment:
    """Hold one file to embed: its name, bytes, kind (as in ``application/json``) and what it is to the memo."""

    name: str
    data: bytes
    media_type: str
    relationship: Relationship
    description: str

    @property
    def sha256(self) -> str:
        """Return the SHA-256 of the bytes, lower-case hex."""
        return hashlib.sha256(self.data).hexdigest()


def embed(pdf: pikepdf.Pdf, attachments: Sequence[Attachment], written_on: date) -> None:
    """Embed files in an open PDF, in the order of their names; their dates are ``written_on``, midnight UTC."""
    ordered = sorted(attachments, key=lambda one: one.name)
    _refuse_what_could_not_be_read_back(ordered)
    specifications = [_specification(pdf, one, pdf_date(written_on)) for one in ordered]
    if not specifications:
        return
    tree = [entry for one, spec in zip(ordered, specifications, strict=True) for entry in (one.name, spec)]
    pdf.Root.Names = pikepdf.Dictionary(EmbeddedFiles=pikepdf.Dictionary(Names=pikepdf.Array(tree)))
    pdf.Root.AF = pikepdf.Array(specifications)


def _refuse_what_could_not_be_read_back(attachments: Sequence[Attachment]) -> None:
    names = [one.name for one in attachments]
    if len(set(names)) < len(names) or not all(map(_plain, names)):
        raise BugError(f"Each attachment needs a plain file name of its own: {', '.join(names)}.")
    size = sum(len(one.data) for one in attachments)
    if len(names) > MOST_FILES or size > MOST_BYTES:
        raise UserError(
            "attachments.large",
            f"The memo would carry {len(names)} attachments of {size:,} bytes together; "
            f"at most {MOST_FILES} files of {MOST_BYTES:,} bytes can be read back.",
        )


def pdf_date(day: date) -> str:
    """Write a day as PDF writes moments: its midnight, UTC."""
    return f"D:{day:%Y%m%d}000000Z"


def _specification(pdf: pikepdf.Pdf, attachment: Attachment, moment: str) -> pikepdf.Object:
    stream = pdf.make_stream(attachment.data)
    stream.Type = pikepdf.Name.EmbeddedFile
    stream.Subtype = pikepdf.Name("/" + attachment.media_type)
    stream.Params = pikepdf.Dictionary(
        Size=len(attachment.data),
        CreationDate=moment,
        ModDate=moment,
        CheckSum=pikepdf.String(hashlib.md5(attachment.data, usedforsecurity=False).digest()),  # the format's own sum
    )
    return pdf.make_indirect(
        pikepdf.Dictionary(
            Type=pikepdf.Name.Filespec,
            F=attachment.name,
            UF=attachment.name,
            Desc=attachment.description,
            AFRelationship=pikepdf.Name("/" + attachment.relationship),
            EF=pikepdf.Dictionary(F=stream, UF=stream),
        )
    )


def attachments(pdf_bytes: bytes) -> dict[str, bytes]:
    """Return the files embedded in a PDF by name; none is an empty dict.

    Raises UserError: a file that is no sound PDF, more than ``MOST_FILES`` files, more than ``MOST_BYTES`` together
    once unpacked, a name twice, a name that is no plain file name.
    """
    try:
        with pikepdf.open(BytesIO(pdf_bytes), attempt_recovery=False, suppress_warnings=True) as pdf:
            return _read_all(pdf)
    except (pikepdf.PdfError, zlib.error, AttributeError, KeyError, TypeError, ValueError) as error:
        raise UserError("attachments.damaged", f"The attachments of the PDF cannot be read ({error}).") from error


def _read_all(pdf: pikepdf.Pdf) -> dict[str, bytes]:
    read: dict[str, bytes] = {}
    left = MOST_BYTES
    for name, specification in _entries(pdf):
        if name in read or not _plain(name):
            raise UserError("attachments.name", f"Attachment {name!r}: each must have a plain file name of its own.")
        if len(read) == MOST_FILES:
            raise UserError("attachments.many", f"The PDF has more than {MOST_FILES} attachments; no more are read.")
        read[name] = _unpacked(specification.EF.F, left)
        left -= len(read[name])
    return read


def _entries(pdf: pikepdf.Pdf) -> list[tuple[str, pikepdf.Object]]:
    """Walk the name tree; ours is one node, other writers may divide it, a hostile one may run in circles."""
    waiting = [pdf.Root.get("/Names", pikepdf.Dictionary()).get("/EmbeddedFiles", pikepdf.Dictionary())]
    found: list[tuple[str, pikepdf.Object]] = []
    for _ in range(_MOST_NODES):
        if not waiting or len(found) > MOST_FILES:
            return found
        node = waiting.pop()
        pairs = list(node.get("/Names", pikepdf.Array()))
        found += [(str(name), spec) for name, spec in zip(pairs[::2], pairs[1::2], strict=True)]
        waiting += list(node.get("/Kids", pikepdf.Array()))[:_MOST_NODES]
    raise ValueError("the list of attachments has too many parts")


def _plain(name: str) -> bool:
    return bool(name.strip(". ")) and name.isprintable() and not set(name) & set('/\\:*?"<>|')


def _unpacked(stream: pikepdf.Object, most: int) -> bytes:
    """Decode an embedded file, never holding more than ``most`` bytes of it: a few bytes can unpack to gigabytes."""
    raw = stream.read_raw_bytes()
    filters = stream.get("/Filter")
    if filters is None or (isinstance(filters, pikepdf.Array) and len(filters) == 0):
        data, ended = raw[: most + 1], True
    elif (
        filters in (pikepdf.Name.FlateDecode, pikepdf.Array([pikepdf.Name.FlateDecode]))
        and "/DecodeParms" not in stream
    ):
        unpacker = zlib.decompressobj()
        data = unpacker.decompress(raw, most + 1)
        ended = unpacker.eof
    else:
        raise ValueError(f"an attachment is packed as {filters}, of which only FlateDecode is read")
    if len(data) > most:
        raise UserError("attachments.large", f"The attachments are larger than {MOST_BYTES // 2**20} MB together.")
    if not ended:
        raise ValueError("an attachment ends too early")
    return data
