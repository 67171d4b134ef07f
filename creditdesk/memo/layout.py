"""From content to pages: the same bytes for the same content, in any process and any time zone."""

from reportlab.platypus import Flowable, PageBreak

from creditdesk.case.standing import Standing
from creditdesk.memo.blocks import MemoContent, Prose, Section, Subheading
from creditdesk.memo.firstsheet import first_sheet
from creditdesk.memo.fonts import register_fonts
from creditdesk.memo.page import print_pages
from creditdesk.memo.sheets import Bookmark, section_flowables
from creditdesk.memo.structure import Structure
from creditdesk.ratios.words import titled


def write_memo(content: MemoContent, standing: Standing) -> tuple[bytes, Structure]:
    """Draw a memo; return the PDF and the tags gathered on the way. The charts are drawn from ``standing``.

    The pages are drawn twice, because each says how many there are.
    """
    register_fonts()
    structure = Structure()
    _, total = print_pages(content, _flowables(content, standing), structure, 0)
    pdf, _ = print_pages(content, _flowables(content, standing), structure, total)
    return pdf, structure


def _flowables(content: MemoContent, standing: Standing) -> list[Flowable]:
    page = first_sheet(content, standing)
    flowables: list[Flowable] = [Bookmark("The decision on one page"), *page.flowables, PageBreak()]
    for section in (*_texts_in_full(content, page.cut), *content.sections):
        flowables += section_flowables(section)
    return flowables


def _texts_in_full(content: MemoContent, cut: tuple[str, ...]) -> tuple[Section, ...]:
    """Return the officer's texts that page one could not hold."""
    if not cut:
        return ()
    texts = {key: getattr(content.first, key) for key in cut}
    blocks = [block for key, text in texts.items() for block in (Subheading(titled(key)), Prose(text))]
    return (Section("Texts by the officer, in full", tuple(blocks)),)
