"""A small memo for tests: one page with a heading, a chart, a table and both signature fields; all of it invented."""

import sys
from collections.abc import Sequence
from datetime import UTC, date, datetime
from functools import partial
from io import BytesIO

from matplotlib.figure import Figure
from reportlab.lib.pagesizes import A4
from reportlab.lib.styles import ParagraphStyle
from reportlab.platypus import Flowable, HRFlowable, SimpleDocTemplate, Table

from creditdesk.house.fontfiles import Face
from creditdesk.memo.attach import Attachment, Relationship
from creditdesk.memo.finish import finish
from creditdesk.memo.onpaper import draw_figure
from creditdesk.memo.structure import Structure, TaggedCanvas
from creditdesk.memo.tagging import (
    Decoration,
    SignaturePlace,
    TableTags,
    TaggedDrawing,
    TaggedParagraph,
    as_decoration,
    tagged_list,
)

NOW = datetime(2026, 12, 1, 9, 30, tzinfo=UTC)
WRITTEN_ON = date(2026, 12, 1)
BODY = ParagraphStyle("body", fontName=str(Face.SANS), fontSize=10, leading=13)
HEADING = ParagraphStyle("heading", fontName=str(Face.SERIF_SEMIBOLD), fontSize=14, leading=18)
ATTACHMENTS = (
    Attachment("case.toml", b'format = "creditdesk-case"\n', "application/toml", Relationship.SOURCE, "The case"),
    Attachment("standing.json", b'{"pd": 0.017}\n', "application/json", Relationship.DATA, "The result"),
)


def small_chart() -> Figure:
    """Return a chart with a line, a band and labels that hold a true minus."""
    figure = Figure()
    figure.patch.set_visible(False)
    axes = figure.add_axes((0.1, 0.15, 0.8, 0.75))
    axes.plot([-8, -6, -4], [1, 2, 4])
    axes.fill_between([-8, -6, -4], [0.5, 1, 3], [2, 3, 5], alpha=0.3)
    axes.set_xticks([-8, -6, -4], ["−8", "−6", "−4"])
    axes.set_yticks([1, 4], ["1 %", "4 %"])
    return figure


def signature_places() -> Table:
    """Return both places to sign, side by side."""
    places = [SignaturePlace(name, f"Signature of the {name.lower()}", 210, 80) for name in ("Preparer", "Approver")]
    return Table([places], style=[("FONT", (0, 0), (-1, -1), str(Face.SANS), 9)], renderCB=as_decoration)


def ratio_table(rows: int, tags: TableTags | None = None) -> Table:
    """Return a table with a head that is repeated on further pages."""
    data = [["Ratio", "2024", "2025"], *([f"Ratio {row}", f"{row} %", f"{row + 1} %"] for row in range(rows))]
    style = [("FONT", (0, 0), (-1, -1), str(Face.SANS), 9), ("LINEBELOW", (0, 0), (-1, 0), 1, "#1D2B3A")]
    return Table(data, repeatRows=1, style=style, renderCB=tags or TableTags(1, 1))


def small_story() -> list[Flowable]:
    """Return one page's content."""
    chart = TaggedDrawing(partial(draw_figure, small_chart()), 400, 160, "PD over score, rising from 1 % to 4 %")
    return [
        TaggedParagraph("Brackwater Millworks Ltd", HEADING, "H1"),
        TaggedParagraph("An invented borrower; <b>PD 1.7 %</b> at score −4.05.", BODY),
        chart,
        Decoration(HRFlowable(width="100%")),
        TaggedParagraph("Ratios", HEADING, "H2"),
        *tagged_list(["sales grew", "margins held"], BODY),
        ratio_table(3),
        signature_places(),
    ]


def _running_head(canvas: TaggedCanvas, document: SimpleDocTemplate) -> None:
    with canvas.artifact("Pagination"):
        canvas.setFont(str(Face.SANS), 8)
        canvas.drawString(54, 810, f"Lantern Quay Finance (fictional) · page {document.page}")


def drawn(story: Sequence[Flowable], structure: Structure) -> bytes:
    """Return the pages of a story as reportlab writes them, their tags in ``structure``."""
    target = BytesIO()
    document = SimpleDocTemplate(target, pagesize=A4)
    document.build(list(story), onFirstPage=_running_head, onLaterPages=_running_head, canvasmaker=structure.canvas)
    return target.getvalue()


def finished(story: Sequence[Flowable], attachments: Sequence[Attachment] = ATTACHMENTS) -> bytes:
    """Return a finished, unsigned memo of a story."""
    structure = Structure()
    pages = drawn(story, structure)
    return finish(
        pages, structure, title="Credit memo", language="en-GB", written_on=WRITTEN_ON, attachments=attachments
    )


def small_memo() -> bytes:
    """Return the small unsigned memo."""
    return finished(small_story())


if __name__ == "__main__":
    sys.stdout.buffer.write(small_memo())
