"""The unsigned memo: drawn, tagged, with everything attached that a re-run needs."""

from collections.abc import Iterator

from creditdesk.case.document import Case
from creditdesk.case.what_if import WhatIf
from creditdesk.house.book import HouseBook
from creditdesk.house.pack import pack
from creditdesk.memo.attach import Attachment, Relationship
from creditdesk.memo.content import memo_content
from creditdesk.memo.finish import finish
from creditdesk.memo.layout import write_memo
from creditdesk.memo.parts import CASE, HOUSE_BOOK, LEAD_MODEL, RESULT

LANGUAGE = "en-GB"


def unsigned_memo(case_bytes: bytes, case: Case, asked: WhatIf, result_json: bytes, house: HouseBook) -> bytes:
    """Return the memo as PDF without signatures: equal input gives equal bytes.

    ``case_bytes`` is the case as an exchange file, ``result_json`` what is ``asked`` of it as JSON, the standing with
    its scenarios; both are attached as they are.
    """
    standing = asked.ink
    lead = house.models.get(case.model.lead)
    attachments = tuple(_attachments(case_bytes, result_json, house, lead.outside if lead else b""))
    content = memo_content(case, standing, house, attachments, asked)
    pdf, structure = write_memo(content, standing)
    return finish(
        pdf,
        structure,
        title=content.title,
        language=LANGUAGE,
        written_on=standing.assessed_on,
        attachments=attachments,
    )


def _attachments(case_bytes: bytes, result_json: bytes, house: HouseBook, lead: bytes) -> Iterator[Attachment]:
    yield Attachment(CASE, case_bytes, "application/toml", Relationship.SOURCE, "the case as entered")
    yield Attachment(RESULT, result_json, "application/json", Relationship.DATA, "the result, every number in full")
    book = pack(house.files)
    yield Attachment(HOUSE_BOOK, book, "application/zip", Relationship.SUPPLEMENT, "the house book, complete")
    if lead:
        yield Attachment(LEAD_MODEL, lead, "application/toml", Relationship.SUPPLEMENT, "the lead model")
