"""Contents of memos made by hand for tests of the layout: invented, and as long as a test wants them."""

from dataclasses import replace

from creditdesk.memo.blocks import (
    Cell,
    FirstPage,
    Grid,
    KeyRatio,
    Listing,
    MemoContent,
    Pairs,
    Prose,
    Row,
    RowKind,
    Section,
    Spot,
    Subheading,
    Tone,
    group_row,
    note_row,
)

KEY_RATIOS = (
    KeyRatio("Equity ratio", ("43.3 %", "44.7 %", "50.3 %"), (0.433, 0.447, 0.503)),
    KeyRatio("Debt to EBITDA", ("2.19×", "2.30×", "1.61×"), (2.19, 2.3, 1.61)),
    KeyRatio("Interest cover", ("5.35×", "3.85×", "5.92×"), (5.35, 3.85, 5.92)),
    KeyRatio("Operating margin", ("7.6 %", "6.5 %", "8.2 %"), (0.076, 0.065, 0.082)),
    KeyRatio("Current ratio", ("1.68×", "not disclosed", "1.78×"), (1.68, None, 1.78)),
)
WORDS = (
    "Approve a term loan of 2,500 over five years, margin not below 2.35 %, secured on the line that it finances, with "
    "half-yearly figures and a monthly list of stock. "
)


def first_page(**changes: object) -> FirstPage:
    page = FirstPage(
        obligor="Brackwater Millworks Ltd",
        description="Manufacturing (ISIC C) · GB · audited to 31 December 2025 · GBP thousands",
        request="Term loan 2,500 over five years for a coating line, straight-line repayment, secured on the line.",
        pd=0.017,
        pd_text="1.7\u00a0%",
        pd_notes=("90\u00a0% interval 1.1\u00a0% to 2.6\u00a0%", "31\u00a0December 2025 to 31\u00a0December 2026"),
        grade="6",
        grade_note="of 12",
        key_heads=("2023", "2024", "2025"),
        key_ratios=KEY_RATIOS,
        spots_found=(
            Spot("Interest cover 5.92×, the reference borrower's 7.40×: +0.27 log-odds."),
            Spot("Quick ratio 0.97, the reference borrower's 1.05: +0.08 log-odds."),
            Spot("Inventories, 2025: Inventories turn in 74 days, slower than 90 % of the sample.", "▲"),
        ),
        weak_spots="One mill, one site: a longer standstill would stop all sales.",
        recommendation=WORDS,
        conditions="Interest cover at least 2.5×, tested half-yearly; no dividend while debt to EBITDA exceeds 3.0×.",
        caution="Invented demonstration, not for lending. An estimate from a configured model, not a decision.",
    )
    return replace(page, **changes)  # type: ignore[arg-type]


def figures(periods: int = 3, lines: int = 30) -> Grid:
    heads = ("GBP thousands", *(str(2026 - periods + number) for number in range(periods)))
    rows = [group_row("Assets")]
    for line in range(lines):
        cells = [Cell(f"Line {line} of the borrower's statements")]
        cells += [
            Cell(f"{(line + 3) * 1234 + number:,}".replace(",", "\u202f"), float(number)) for number in range(periods)
        ]
        rows.append(Row(tuple(cells), RowKind.TOTAL if line % 7 == 6 else RowKind.LINE))
        if line % 11 == 5:
            rows.append(Row((Cell("received"), *cells[1:]), RowKind.UNDER))
        if line % 13 == 4:
            rows.append(note_row("Interest-bearing debt ÷ annual EBITDA; 2025: 8\u202f170 ÷ 4\u202f560"))
    return Grid(
        "Figures", heads, tuple(rows), (3.0, *(0.8 for _ in range(periods))), note="n.d. = not disclosed; – = nil."
    )


def findings() -> Grid:
    rows = tuple(
        Row(
            (
                Cell("▲ query", tone=Tone.CAUTION),
                Cell(f"Inventories, {2020 + number}", tone=Tone.SECOND),
                Cell("Inventories turn in 74 days. " * (number % 3 + 1)),
            )
        )
        for number in range(6)
    )
    return Grid("Findings", ("Weight", "Where", "What"), rows, (0.7, 1.6, 4.2), words=(0, 1, 2))


def content(first: FirstPage | None = None, **changes: object) -> MemoContent:
    made = MemoContent(
        title="Credit memo: Brackwater Millworks Ltd",
        lender="Lantern Quay Finance (fictional)",
        dated="1\u00a0December 2026",
        case_mark="7f3a·c91e",
        draft="",
        foot="Invented demonstration · Model northlight-sme 2.1",
        curve_words="The borrower stands on the fitted curve at PD 1.7 %. Grade 6.",
        contribution_words="From the reference borrower at −3.38 to this one at −4.05.",
        first=first or first_page(),
        sections=(
            Section("Figures", (Prose("Figures of the borrower.", Tone.SECOND), figures(), Subheading("Notes"))),
            Section("Findings", (findings(),)),
            Section("Model", (Pairs("Model", (("Model", "Northlight"), ("Digest", "sha256:" + "3f" * 32))),)),
            Section("Cautions", (Listing((WORDS, WORDS)),)),
        ),
    )
    return replace(made, **changes)  # type: ignore[arg-type]
