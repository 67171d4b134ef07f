"""Ratios and their formulas in words."""

import re
from collections.abc import Mapping

from creditdesk.base.display import (
    PLAIN,
    NumberStyle,
    format_amount,
    format_days,
    format_number,
    format_percent,
    format_times,
)
from creditdesk.formula.compiler import Formula
from creditdesk.formula.nodes import Name, Number, RowCall
from creditdesk.formula.spelling import spell
from creditdesk.ratios.catalogue import Catalogue
from creditdesk.ratios.compiler import Row
from creditdesk.ratios.spec import Unit

REASON_WORDS: Mapping[str, str] = {
    "net_cash": "net cash",
    "no_debt": "no debt",
    "not_disclosed": "not disclosed",
    "needs_prior_period": "no prior year",
    "zero_denominator": "divisor nil",
    "negative_denominator": "divisor negative",
}
"""Why a ratio has no value, by the reason's key, in the few words a table has room for."""
_ANSWERS = {1.0: "yes", 0.0: "no"}
_ABBREVIATIONS = re.compile(r"\b(ebitda|ebit|lei)\b", re.IGNORECASE)
_FUNCTION = re.compile(r"[a-z_]+\(")
_SIGN_HINT = re.compile(r" \([^()]*[+−-]\)$")
_BEFORE = {
    "annual": "annual ",
    "prior": "prior period's ",
    "opening": "opening ",
    "average": "average ",
    "change": "change in ",
}


def spoken(key: str) -> str:
    """Write a key as words: ``no_ebitda`` becomes no EBITDA."""
    return _ABBREVIATIONS.sub(lambda found: found[0].upper(), key.replace("_", " "))


def titled(key: str) -> str:
    """Write a key as the words of a heading: ``weak_spots`` becomes Weak spots."""
    words = spoken(key)
    return words[:1].upper() + words[1:]


def with_full_stop(words: str) -> str:
    """End what a reason or a finding says as a sentence ends."""
    return words if words.endswith((".", "!", "?")) or not words else f"{words}."


def format_ratio(value: float, unit: Unit, style: NumberStyle = PLAIN) -> str:
    """Write a ratio as its unit asks: 26.5 %, 2.50×, 64 days, 1 200, yes; blank for nan."""
    match unit:
        case Unit.PERCENT:
            return format_percent(value, style=style)
        case Unit.TIMES:
            return format_times(value, style=style)
        case Unit.DAYS:
            return format_days(value, style=style)
        case Unit.MONEY:
            return format_amount(value, style=style)
        case Unit.YES_NO if value in _ANSWERS:
            return _ANSWERS[value]
        case Unit.LOG | Unit.NUMBER | Unit.YES_NO:  # a mean of answers lies between yes and no
            return format_number(value, 2, style)


def formula_in_words(catalogue: Catalogue, row: Row) -> str:
    """Write a ratio's formula with the labels of its amounts: Interest-bearing debt ÷ annual EBITDA."""
    return sentence(_words(catalogue, row.whole))


def label_of(catalogue: Catalogue, formula: Formula) -> str:
    """Write an amount with the labels of its parts, for use within a sentence."""
    return _words(catalogue, formula)


def denominator_in_words(catalogue: Catalogue, row: Row) -> str:
    """Name what a ratio divides by, for use within a sentence."""
    if row.denominator_label or row.denominator is None:
        return within(row.denominator_label)
    return label_of(catalogue, row.denominator.formula)


def within(label: str) -> str:
    """Write a label as it stands within a sentence.

    A small letter first unless it begins with an acronym, without "of which" and without a hint on signs at its end.
    """
    label = _SIGN_HINT.sub("", label.removeprefix("of which "))
    return label[:1].lower() + label[1:] if label[1:2].islower() else label


def sentence(text: str) -> str:
    """Begin a text with a capital, unless a function stands there."""
    return text if _FUNCTION.match(text) else text[:1].upper() + text[1:]


def is_single(formula: Formula) -> bool:
    """Say whether a formula is one amount and needs no parentheses."""
    return isinstance(formula.tree, Name | Number | RowCall)


def _words(catalogue: Catalogue, formula: Formula) -> str:
    def along(function: str, argument: Formula) -> str:
        text = _words(catalogue, argument)
        return _BEFORE[function] + (text if is_single(argument) else f"({text})")

    return spell(formula, lambda name: within(catalogue.labels[name]), along)
