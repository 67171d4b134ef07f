"""The case as a workbook: figures, ratios and the verdict, numbers as numbers."""

import io

import numpy as np
from openpyxl import Workbook
from openpyxl.styles import Font
from openpyxl.worksheet.worksheet import Worksheet

from creditdesk.case.comparison import Comparison
from creditdesk.case.document import Case
from creditdesk.case.standing import Standing
from creditdesk.case.what_if import WhatIf
from creditdesk.charts.words import contribution_scale
from creditdesk.flow.book import DRIVERS
from creditdesk.house.book import HouseBook
from creditdesk.ratios.compute import Reason

_BOLD = Font(bold=True)


def workbook(case: Case, asked: WhatIf, house: HouseBook) -> bytes:
    """Return an .xlsx of ``case``: one sheet each for figures, ratios and standing; blank means not disclosed.

    Where the case has scenarios, a further sheet has them side by side.
    """
    standing, book = asked.ink, Workbook()
    first = book.active
    assert isinstance(first, Worksheet)
    _figures(first, case, standing)
    _ratios(book.create_sheet("Ratios"), standing, house)
    _standing(book.create_sheet("Standing"), standing)
    if asked.comparison is not None:
        _what_if(book.create_sheet("What if"), asked, asked.comparison)
    for sheet in (first, *book.worksheets[1:]):
        sheet.column_dimensions["A"].width = 44
        sheet.freeze_panes = "B2"
    target = io.BytesIO()
    book.save(target)
    return target.getvalue()


def _figures(sheet: Worksheet, case: Case, standing: Standing) -> None:
    sheet.title = "Figures"
    statements = standing.statements
    sheet.append([f"{case.obligor.currency}, unit {case.obligor.unit}", *(one.ends for one in statements.periods)])
    lines = {line.key: line.label for line in statements.chart.lines}
    totals = {total.key: total.label for total in statements.chart.subtotals}
    for key, row in zip(statements.keys, statements.values, strict=True):
        sheet.append([lines.get(key) or totals.get(key, key), *(_number(amount) for amount in row)])
        if key in totals:
            sheet.cell(sheet.max_row, 1).font = _BOLD


def _ratios(sheet: Worksheet, standing: Standing, house: HouseBook) -> None:
    table = standing.ratios
    sheet.append(["Ratio", *(one.ends for one in standing.statements.periods)])
    for key, values, reasons in zip(table.keys, table.values, table.reasons, strict=True):
        cells = [
            Reason(int(code)).key.replace("_", " ") if code else _number(value)
            for value, code in zip(values, reasons, strict=True)
        ]
        sheet.append([house.catalogue.spec(key).label, *cells])


def _standing(sheet: Worksheet, standing: Standing) -> None:
    rows: list[tuple[str, object]] = [
        ("Obligor", standing.obligor),
        ("Assessed period", standing.period),
        ("Assessed on", standing.assessed_on),
        ("Model", f"{standing.model.name} {standing.model.version}"),
        ("Score", standing.score),
        ("PD by the model", standing.pd_model),
        ("PD calibrated", standing.pd_calibrated),
        ("PD that counts", standing.pd_final),
        ("Grade by the model", standing.grade.model),
        ("Grade", standing.grade.final),
        ("Usable", "yes" if standing.usable else "no: a finding of severity stop stands"),
    ]
    rows += [("Reason", reason) for reason in standing.reasons]
    scale = contribution_scale(standing.model.link)
    rows += [(f"{factor.label}, {scale}", factor.log_odds) for factor in standing.factors]
    rows += [("Finding", finding.text) for finding in standing.findings]
    rows += [("Caution", caution) for caution in standing.cautions]
    for label, value in rows:
        sheet.append([label, value])
        if isinstance(value, str):
            sheet.cell(sheet.max_row, 2).data_type = "s"  # a text that begins with = is a text, not a formula


def _what_if(sheet: Worksheet, asked: WhatIf, comparison: Comparison) -> None:
    """Write scenarios beside last year and the figures as they are; what a scenario marks is bold."""
    columns = comparison.columns
    _texts(sheet, ["", *(column.name or "as it is" for column in columns)])
    for row in comparison.rows:
        unit = f", {row.unit.replace('_', ' ')}" if row.key in DRIVERS else ""
        _texts(sheet, [f"{row.label}{unit}", *map(_number, row.values)])
        for place, marked in enumerate(row.marked, start=2):
            if marked:
                sheet.cell(sheet.max_row, place).font = _BOLD
    _texts(sheet, ["Score", *(_number(column.score) for column in columns)])
    _texts(sheet, ["PD that counts", *(_number(column.pd_final) for column in columns)])
    _texts(sheet, ["Grade", *(column.grade for column in columns)])
    for answer in asked.answers:
        for finding in answer.findings:
            _texts(sheet, [f"Finding: {answer.scenario.name}", finding.text])


def _texts(sheet: Worksheet, cells: list[str | float | None]) -> None:
    """Append a row; a text that begins with = is a text, not a formula."""
    sheet.append(cells)
    for place, cell in enumerate(cells, start=1):
        if isinstance(cell, str):
            sheet.cell(sheet.max_row, place).data_type = "s"


def _number(value: float) -> float | None:
    return None if np.isnan(value) else float(value)
