"""The exchange file described for other programs: JSON Schema, with the line items of one chart of accounts.

TOML has dates and nan, JSON has neither: dates stand here as text in ISO form, and where an amount is not disclosed
the file holds the number nan, which no schema can name.
"""

from collections.abc import Mapping

import msgspec

from creditdesk.case.checks import MONTHS_MOST, PERIODS_MOST
from creditdesk.case.codes import COUNTRIES, CURRENCIES, SECTORS, UNITS
from creditdesk.case.document import REFUSED_FORMS, TEXT_BLOCKS, LegalForm
from creditdesk.case.exchange import ExchangeFile
from creditdesk.case.pencil_checks import DRAWS_ALLOWED, INPUTS_MOST, NAME_MOST, POINTS_ALLOWED
from creditdesk.case.pencil_schema import PENCIL_TEXTS
from creditdesk.house.decode import Schema
from creditdesk.statements.chart import Chart, LineItem, Subtotal

_TEXTS: Mapping[str, Mapping[str, str]] = {
    "ExchangeFile": {
        "format": "Says that this is a case.",
        "version": "Version of this format.",
        "obligor": "The borrower.",
        "periods": "The periods, oldest first; a closing date stands once, or again where one of the two is restated.",
        "assessment": "What the assessment is made for.",
        "model": "The model whose PD counts.",
        "figures": "One list per line item, one number per period, in the case's unit; nan: not disclosed, 0: nil."
        " Costs, payments and deductions are positive numbers.",
        "printed": "Totals as the borrower printed them, one number per period; nan: not printed.",
        "adjustments": "Changes to the figures as received, each with its reason.",
        "typed": 'Sums as typed, checked to give the figure; "" where a plain number was typed.',
        "notes": "Where each figure comes from: one text per period.",
        "texts": "Blocks of text by the officer.",
        "scenarios": "What-ifs: pencil marks over the assessed period, which change no figure.",
        "studies": "Questions asked of a scenario or of the figures as they stand.",
    },
    "ObligorTable": {
        "name": "Name of the borrower.",
        "legal_form": f"Legal form. Refused, because natural persons are outside the purpose: "
        f"{', '.join(sorted(REFUSED_FORMS))}.",
        "country": "Country, ISO 3166-1 alpha-2.",
        "sector": "Section letter of the sector scheme.",
        "sector_scheme": "Scheme of the section letter: ISIC Rev. 4, ISIC Rev. 5 or NACE Rev. 2.1.",
        "activity": 'Class of the scheme in digits, such as "25.11"; "" where not known.',
        "currency": "Currency of all amounts, ISO 4217.",
        "unit": "Single units of currency in one unit of the amounts.",
        "lei": 'Legal Entity Identifier, ISO 17442, check digits included; "" where there is none.',
        "rates": "Exchange rates of one date: units of foreign currency for one unit of the case's currency.",
    },
    "Assessment": {
        "date": "The day of the assessment, the only today there is; without it the end of the assessed period.",
        "period": "End of the assessed period; without it the latest actual one of at least eleven months.",
    },
    "ModelChoice": {"lead": 'Name of a model in the house book, or path of a model file; "": as the house says.'},
    "Period": {
        "ends": "Closing date.",
        "months": "Length in months.",
        "basis": "Who stands behind the figures.",
        "presentation": "Layout of the income statement.",
        "opinion": "The auditor's opinion.",
        "going_concern_doubt": "Doubt is reported that the borrower can continue as a going concern.",
        "restated": "The figures replace earlier ones of the same date.",
        "consolidated": "The figures are those of a group.",
        "framework": "Accounting framework.",
        "leases": "Where lease obligations stand.",
        "interest_paid_in": "Part of the cash flow statement in which interest paid stands.",
    },
    "Adjustment": {
        "kind": "restate: entries keep assets = liabilities + equity; normalise: income lines only, for analysis.",
        "period": "End of the period it concerns.",
        "entries": "Amounts added to line items.",
        "reason": "Why.",
        "author": "Who claims to have made it; only a signature proves a key.",
    },
    "Entry": {"line": "Key of a line item.", "amount": "Amount added, in the case's unit, with its sign."},
    **PENCIL_TEXTS,
}


def exchange_schema(chart: Chart) -> Schema:
    """Make the JSON Schema (draft 2020-12) of the exchange file for the line items of ``chart``.

    It says what each file must look like by itself; sums, order of dates and the length of lists against the number of
    periods are checked by the program beyond it.
    """
    schema = msgspec.json.schema(ExchangeFile)
    definitions: dict[str, Schema] = schema["$defs"]
    for name, definition in definitions.items():
        definition.pop("title", None)
        definition.pop("description", None)
        for field, text in _TEXTS.get(name, {}).items():
            definition["properties"] = {
                **_properties(definition),
                field: {**_plain(definition, field), "description": text},
            }
    _narrow_obligor(definitions["ObligorTable"])
    _narrow(definitions["Period"], "months", minimum=1, maximum=MONTHS_MOST)
    _narrow(definitions["Adjustment"], "entries", minItems=1)
    _narrow(definitions["Entry"], "line", enum=[item.key for item in chart.lines])
    _narrow_pencil(definitions)
    definitions["LegalForm"]["enum"] = sorted(set(LegalForm) - REFUSED_FORMS)
    _narrow_rows(definitions, chart)
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "title": "Exchange file of a creditdesk case",
        "description": "One assessment of one borrower as TOML (*.case.toml); its dates are here text in ISO form.",
        **schema,
    }


def _properties(definition: Schema) -> dict[str, Schema]:
    found = definition.get("properties")
    return dict(found) if isinstance(found, dict) else {}


def _plain(definition: Schema, field: str) -> Schema:
    """Give a field's own schema without the empty value that TOML cannot write."""
    schema = dict(_properties(definition)[field])
    branches = schema.pop("anyOf", None)
    if isinstance(branches, list):
        if schema.get("default", 0) is None:
            del schema["default"]
        kept = [branch for branch in branches if branch != {"type": "null"}]
        schema |= kept[0] if len(kept) == 1 else {"anyOf": kept}
    return schema


def _narrow(definition: Schema, field: str, **bounds: object) -> None:
    properties = _properties(definition)
    properties[field] = {**properties[field], **bounds}
    definition["properties"] = properties


def _narrow_obligor(definition: Schema) -> None:
    _narrow(definition, "name", minLength=1)
    _narrow(definition, "country", enum=sorted(COUNTRIES))
    _narrow(definition, "currency", enum=sorted(CURRENCIES))
    _narrow(definition, "sector", enum=sorted(frozenset().union(*SECTORS.values())))
    _narrow(definition, "unit", enum=list(UNITS))
    _narrow(definition, "activity", pattern=r"^(\d+(\.\d+)?)?$")
    _narrow(definition, "lei", pattern=r"^([A-Z0-9]{18}[0-9]{2})?$")
    day = {"type": "string", "format": "date", "description": "The day the rates stand for."}
    rate = {"type": "number", "exclusiveMinimum": 0}
    _narrow(
        definition,
        "rates",
        properties={"date": day, **dict.fromkeys(sorted(CURRENCIES), rate)},
        required=["date"],
        additionalProperties=False,
    )


def _narrow_pencil(definitions: dict[str, Schema]) -> None:
    _narrow(definitions["Scenario"], "name", minLength=1, maxLength=NAME_MOST)
    _narrow(definitions["GridSpec"], "points", minimum=POINTS_ALLOWED[0], maximum=POINTS_ALLOWED[1])
    _narrow(definitions["BreakEvenSpec"], "limits", minItems=1)
    _narrow(definitions["ReachSpec"], "levers", minItems=1)
    _narrow(definitions["Lever"], "cost", exclusiveMinimum=0)
    _narrow(definitions["Lever"], "step", minimum=0)
    _narrow(definitions["Correlation"], "value", exclusiveMinimum=-1, exclusiveMaximum=1)
    _narrow(definitions["SimulationSpec"], "inputs", maxItems=INPUTS_MOST)
    _narrow(definitions["SimulationSpec"], "draws", minimum=DRAWS_ALLOWED[0], maximum=DRAWS_ALLOWED[1])
    _narrow(definitions["SimulationSpec"], "seed", minimum=0)


def _narrow_rows(definitions: dict[str, Schema], chart: Chart) -> None:
    definitions["Amounts"] = {"type": "array", "items": {"type": "number"}, "minItems": 1, "maxItems": PERIODS_MOST}
    definitions["Texts"] = {"type": "array", "items": {"type": "string"}, "minItems": 1, "maxItems": PERIODS_MOST}
    file, lines, totals = definitions["ExchangeFile"], chart.lines, chart.subtotals
    _narrow(file, "periods", minItems=1, maxItems=PERIODS_MOST)
    _narrow(file, "figures", properties=_rows(lines, "Amounts"), additionalProperties=False)
    _narrow(file, "printed", properties=_rows(totals, "Amounts"), additionalProperties=False)
    _narrow(file, "typed", properties=_rows(lines, "Texts"), additionalProperties=False)
    _narrow(file, "notes", properties=_rows((*lines, *totals), "Texts"), additionalProperties=False)
    blocks = {key: {"type": "string", "description": text} for key, text in TEXT_BLOCKS.items()}
    _narrow(file, "texts", properties=blocks, additionalProperties=False)


def _rows(items: tuple[LineItem | Subtotal, ...], shape: str) -> dict[str, Schema]:
    return {item.key: {"$ref": f"#/$defs/{shape}", "description": item.label} for item in items}
