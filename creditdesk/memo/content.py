"""The content of a memo: every text and number in it, from case, standing and house book, ready to print."""

from collections.abc import Iterator, Sequence

from creditdesk.base.display import format_number, format_pd
from creditdesk.base.errors import BugError
from creditdesk.case.document import TEXT_BLOCKS, Case
from creditdesk.case.standing import Standing
from creditdesk.case.what_if import WhatIf
from creditdesk.case.words import long_date
from creditdesk.charts.words import with_full_stop
from creditdesk.house.book import HouseBook
from creditdesk.memo.attach import Attachment
from creditdesk.memo.blocks import Block, Listing, MemoContent, Pairs, Prose, Section, Subheading, Tone, without_empty
from creditdesk.memo.closing import (
    cautions_section,
    findings_section,
    opinions_section,
    scale_section,
    verify_section,
)
from creditdesk.memo.figurepages import figures_section
from creditdesk.memo.firstpage import DRAFT, contribution_words, curve_words, first_page
from creditdesk.memo.fonts import missing_glyphs
from creditdesk.memo.modelcard import contributions_section, model_section
from creditdesk.memo.parts import CASE
from creditdesk.memo.ratiopages import ratios_section
from creditdesk.memo.text import NIL, REPLACEMENT, pd_text, short_digest
from creditdesk.memo.whatifpages import what_if_section
from creditdesk.model.spec import ModelSpec
from creditdesk.ratios.words import titled

OFFICER_TEXTS = ("request", "weak_spots", "recommendation", "conditions")


def memo_content(
    case: Case,
    standing: Standing,
    house: HouseBook,
    attachments: Sequence[Attachment] = (),
    asked: WhatIf | None = None,
) -> MemoContent:
    """Return everything the memo says; nothing is computed here that the standing or what is asked does not hold."""
    mark = next((short_digest(part.sha256) for part in attachments if part.name == CASE), "without digest")
    return MemoContent(
        title=f"Credit memo: {case.obligor.name}",
        lender=standing.house.lender,
        dated=long_date(standing.assessed_on),
        case_mark=mark,
        draft="" if standing.usable else DRAFT,
        foot=_foot(standing),
        curve_words=curve_words(standing),
        contribution_words=contribution_words(standing),
        first=first_page(case, standing, house),
        sections=tuple(_sections(case, asked or WhatIf(standing, ()), house, attachments)),
    )


def officer_section(case: Case, keys: Sequence[str]) -> Section | None:
    """Return the officer's texts of these keys in full; None where none is written."""
    blocks: list[Block] = []
    for key in keys:
        text = case.texts.get(key, "").strip()
        if text:
            blocks += [Subheading(titled(key)), Prose(text)]
    return Section("Texts by the officer", tuple(blocks)) if blocks else None


def _sections(case: Case, asked: WhatIf, house: HouseBook, attachments: Sequence[Attachment]) -> Iterator[Section]:
    """Yield the sections in the order of the memo."""
    standing = asked.ink
    yield from _unprintable(case)
    texts = officer_section(case, [key for key in TEXT_BLOCKS if key not in OFFICER_TEXTS])
    if texts is not None:
        yield texts
    yield figures_section(case, standing)
    yield ratios_section(standing, house)
    yield findings_section(standing, house)
    yield contributions_section(standing)
    yield _grade_section(standing)
    what_if = what_if_section(case, asked, house)
    if what_if is not None:
        yield what_if
    yield model_section(standing, _spec(standing, house), house)
    opinions = opinions_section(standing)
    if opinions is not None:
        yield opinions
    yield scale_section(house.scale, standing)
    yield cautions_section(standing, house)
    yield verify_section(standing, attachments)


def _spec(standing: Standing, house: HouseBook) -> ModelSpec:
    for model in house.models.values():
        if model.digest == standing.model.digest:
            return model.spec
    raise BugError(f"The house book does not hold the model {standing.model.name} that was applied.")


def _grade_section(standing: Standing) -> Section:
    """Return the way from the score to the grade, step by step."""
    facts = [
        ("Score", NIL if standing.score is None else format_number(standing.score, 4)),
        ("PD of the model", pd_text(standing.pd_model)),
        ("PD after calibration", pd_text(standing.pd_calibrated)),
        ("Its interval", _interval_words(standing)),
        ("PD after judgement", pd_text(standing.pd_judged)),
        ("PD after the floor", pd_text(standing.pd)),
        ("Grade of the model", standing.grade.model),
        ("Grade after judgement", standing.grade.judged),
        ("Final grade", standing.grade.final if standing.usable else "none while a finding stops it"),
        ("PD that counts", pd_text(standing.pd_final) if standing.usable else "not usable"),
    ]
    blocks: list[Block] = [
        Pairs("From score to grade", tuple(facts)),
        Subheading("Reasons for the final grade"),
        Listing(tuple(map(with_full_stop, standing.grade.reasons))),
        Subheading("Principal reasons"),
        Listing(tuple(with_full_stop(reason) for reason in standing.reasons if reason not in standing.grade.reasons)),
    ]
    return Section("From score to grade", without_empty(blocks))


def _interval_words(standing: Standing) -> str:
    interval = standing.pd_interval
    if interval is None:
        return NIL if standing.pd_calibrated is None else "none: the model states no covariance"
    bounds = f"{format_pd(interval.low)} to {format_pd(interval.high)}"
    return f"{100 * interval.level:.0f}\u00a0%: {bounds}, uncertainty of the fitted coefficients only"


def _foot(standing: Standing) -> str:
    model = f"{standing.model.name} {standing.model.version}"
    words = f"Model {model} · house book {standing.house.label} {standing.house.version}"
    return f"Invented demonstration · {words}" if standing.model.invented or standing.house.invented else words


def _unprintable(case: Case) -> Iterator[Section]:
    """Say which characters of the case the memo cannot print."""
    texts = (case.obligor.name, *case.texts.values(), *(one.reason + one.author for one in case.adjustments))
    lacking = missing_glyphs("".join((*texts, *(note for notes in case.notes.values() for note in notes))))
    if lacking:
        words = (
            f"The memo's fonts lack these characters of the case, which are shown as {REPLACEMENT}: "
            f"{' '.join(f'U+{ord(character):04X}' for character in lacking)}. The attached case has them."
        )
        yield Section("Characters that could not be printed", (Prose(words, Tone.CAUTION),))
