"""The memo's last sections: findings, second opinions, master scale, cautions, verifying and signatures."""

from collections.abc import Iterator, Sequence

from creditdesk.base.display import format_number, format_pd
from creditdesk.base.findings import Finding, Severity
from creditdesk.case.standing import SecondOpinion, Standing
from creditdesk.case.words import long_date
from creditdesk.charts.words import with_full_stop
from creditdesk.grading.scale import MasterScale
from creditdesk.house.book import HouseBook
from creditdesk.memo.attach import Attachment
from creditdesk.memo.blocks import Block, Cell, Grid, Listing, Prose, Row, Section, Subheading, Tone, text_row
from creditdesk.memo.blocks import without_empty as _without_empty
from creditdesk.memo.figurepages import place_words
from creditdesk.memo.text import NIL, pd_text

MARKS = {Severity.STOP: "■ stop", Severity.QUERY: "▲ query", Severity.NOTE: "note"}
_TONES = {Severity.STOP: Tone.BREACH, Severity.QUERY: Tone.CAUTION, Severity.NOTE: Tone.SECOND}

ESTIMATE = (
    "The probability of default is an estimate from a configured model, not a decision. A named person decides; the "
    "program drafts neither a recommendation nor a decision."
)
INTERVAL = (
    "The interval covers the uncertainty of the fitted coefficients only. It says nothing of wrong figures, of a model "
    "that does not fit this borrower, or of a year unlike those of the sample."
)
INVENTED = (
    "The demonstration model, the demonstration house book and all demonstration data are invented and must not be "
    "used for lending."
)
PUBLISHED = (
    "Published models are old, were fitted elsewhere, and need recalibration to the house's own experience of default "
    "before a figure of theirs can carry weight."
)
OUTSIDE = (
    "Not for natural persons, sole traders and partnerships of individuals, public bodies, banks, insurers, funds, "
    "holdings without consolidated figures, income-producing property and other specialised lending, or start-ups "
    "without figures, unless the scope of the lead model names them."
)
CARRIES = (
    "This file carries the complete case, internal judgement included: whoever gets the file gets it. A copy without "
    "attachments can be made; it cannot be re-run."
)
PERSONAL = (
    "Names of owners, directors, guarantors and signers, and texts given as evidence, may be personal data: facts "
    "only, with their source."
)
PREVAIL = (
    "Independent validation, the house's credit policy, local law on credit decisions, on reasons and notices, and "
    "the law of data protection prevail; such law may reach small firms too. Where accounting, legal or regulatory "
    "judgement is needed, ask those licensed to give it."
)
KEYS = (
    "Two keys are not two people. A self-signed key names nobody: who holds it has to be known from elsewhere. The "
    "trail of a case shows order and completeness only against a head recorded elsewhere."
)

SIGNATURE_PROVES = (
    "that not one byte of the memo, its attachments included, has changed since it was signed;",
    "with which key it was signed, and, where that key stands in the house's list of signers, whose it is said to be.",
)
SIGNATURE_LEAVES_OPEN = (
    "the time: the time shown is the one the signer's machine claimed;",
    "the person: a self-signed certificate states a name and proves none;",
    "that figures, judgement or texts are right.",
)


def findings_section(standing: Standing, house: HouseBook) -> Section:
    """Return all findings, the gravest first."""
    order = list(Severity)
    ranked = sorted(standing.findings, key=lambda finding: order.index(finding.severity))
    names = [(ratio.key, ratio.label) for ratio in house.catalogue.specs]
    names += [(factor.key, factor.label) for factor in standing.factors]
    rows = tuple(_finding_row(finding, standing, names) for finding in ranked)
    grid = Grid("Findings", ("Weight", "Where", "What"), rows, (0.7, 1.6, 4.2), words=(0, 1, 2))
    return Section("Findings", (grid,) if rows else (Prose("The figures gave rise to no finding.", Tone.SECOND),))


def opinions_section(standing: Standing) -> Section | None:
    """Return what other configured models say; None where there are none."""
    if not standing.second_opinions:
        return None
    grid = Grid(
        name="Second opinions",
        heads=("Model", "Score", "PD", "Reading", "Scope"),
        rows=tuple(_opinion_row(opinion) for opinion in standing.second_opinions),
        shares=(2.0, 0.6, 0.6, 2.6, 2.2),
        words=(0, 3, 4),
        note="Shown beside the lead model, never averaged into it.",
    )
    return Section("Second opinions", (grid,))


def scale_section(scale: MasterScale, standing: Standing) -> Section:
    """Return the master scale with the criteria of every grade; the borrower's grade is marked."""
    final = standing.grade.final if standing.usable else ""
    rows = [
        _scale_row(grade.key, (grade.lower, scale.upper(grade.key), grade.representative_pd), grade.criteria, final)
        for grade in scale.grades
    ]
    rows.append(_scale_row("D", (None, None, 1.0), scale.default_criteria, final))
    grid = Grid(
        name="Master scale",
        heads=("Grade", "PD from", "To below", "Stands for", "Criteria"),
        rows=tuple(rows),
        shares=(0.6, 0.8, 0.8, 0.8, 5.0),
        words=(0, 4),
        note=f"{scale.label}. {scale.source} Default is a fact, not a PD.",
    )
    return Section("Master scale", (grid,))


def cautions_section(standing: Standing, house: HouseBook) -> Section:
    """Return every caution that applies: the program's own, the house's, and those that come with the model."""
    of_house = [caution for caution in standing.cautions if caution in house.settings.cautions]
    of_model = [caution for caution in standing.cautions if caution not in of_house]
    blocks: list[Block] = [
        Listing(tuple(_own_cautions(standing))),
        Subheading(f"Stated by the house, {standing.house.lender}"),
        Listing(tuple(of_house)),
        Subheading(f"Stated with the model, {standing.model.label}"),
        Listing(tuple(of_model)),
    ]
    return Section("Cautions", _without_empty(blocks))


def verify_section(standing: Standing, attachments: Sequence[Attachment]) -> Section:
    """Return how the memo is verified and re-run, and what a signature proves and does not."""
    rows = tuple(
        text_row(part.name, part.description, f"{len(part.data):,}".replace(",", "\u202f"), part.sha256)
        for part in attachments
    )
    house = standing.house
    blocks: list[Block] = [
        Prose(
            "creditdesk verify memo.pdf checks both signatures, the attachments and the list of signers, assesses the "
            "attached case again with the attached house book, and compares every number with the attached result. "
            f"House book: {house.label} {house.version} of {house.lender}, {house.digest}."
        ),
        Grid(
            "Attachments",
            ("Attachment", "What it is", "Bytes", "SHA-256"),
            rows,
            (1.05, 1.75, 0.6, 4.7),
            words=(0, 1, 3),
        ),
        Subheading("What a signature proves"),
        Listing(SIGNATURE_PROVES),
        Subheading("What it does not prove"),
        Listing(SIGNATURE_LEAVES_OPEN),
    ]
    return Section("How to verify and re-run this memo", _without_empty(blocks))


def _own_cautions(standing: Standing) -> Iterator[str]:
    yield ESTIMATE
    if standing.pd_interval is not None:
        yield INTERVAL
    if standing.pd_final is not None:
        yield f"The PD runs from {long_date(standing.pd_runs_from)} to {long_date(standing.pd_runs_to)}."
    if standing.model.invented or standing.house.invented:
        yield INVENTED
    if standing.second_opinions or not standing.model.invented:
        yield PUBLISHED
    yield from (OUTSIDE, CARRIES, PERSONAL, KEYS, PREVAIL)


def _finding_row(finding: Finding, standing: Standing, names: Sequence[tuple[str, str]]) -> Row:
    return Row(
        (
            Cell(MARKS[finding.severity], tone=_TONES[finding.severity]),
            Cell(place_words(finding.place, standing.statements, names), tone=Tone.SECOND),
            Cell(with_full_stop(finding.text)),
        )
    )


def _opinion_row(opinion: SecondOpinion) -> Row:
    score = NIL if opinion.score is None else format_number(opinion.score, 2)
    return Row(
        (
            Cell(opinion.label),
            Cell(score, opinion.score),
            Cell(pd_text(opinion.pd), opinion.pd),
            Cell(opinion.reading, tone=Tone.WORDS),
            Cell(opinion.scope_text, tone=Tone.WORDS if opinion.in_scope else Tone.CAUTION),
        )
    )


def _scale_row(key: str, pds: tuple[float | None, float | None, float | None], criteria: str, final: str) -> Row:
    mark = "▲ " if key == final else ""
    tone = Tone.STRONG if key == final else Tone.PLAIN
    texts = [NIL if pd is None else "0" if pd == 0 else format_pd(pd) for pd in pds]
    numbers = [Cell(text, pd, tone) for text, pd in zip(texts, pds, strict=True)]
    return Row((Cell(f"{mark}{key}", tone=tone), *numbers, Cell(criteria, tone=tone)))
