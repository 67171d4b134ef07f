"""Single numbers as people write them: grouping, decimal mark, sign, brackets, currency, thousand and million."""

import re
import unicodedata
from decimal import Context, Decimal
from typing import Literal, TypeAlias

DecimalMark: TypeAlias = Literal[".", ","]
MARKS: tuple[DecimalMark, DecimalMark] = (".", ",")

_LIKE_MINUS = "\u2010\u2011\u2012\u2013\u2014\u2212\ufe63\uff0d"
_LIKE_APOSTROPHE = "\u2018\u2019\u02bc\uff07"
_REPLACED = {ord(char): "-" for char in _LIKE_MINUS} | {ord(char): "'" for char in _LIKE_APOSTROPHE}
_REPLACED |= {ord("×"): "*", ord("÷"): "/"}
_FULL_WIDTH_SHIFT = 0xFEE0  # from U+FF01..U+FF5E to ASCII
ANY_CURRENCY = "¤"

# thousand, million, thousand million; in English, German, French and as abbreviations of the trade (common practice)
_SCALES = {
    3: ("k", "thousand", "tsd", "t"),
    6: ("m", "mm", "mn", "mio", "mln", "mill", "million", "millions"),
    9: ("bn", "mrd", "billion", "billions"),
}
_EXPONENTS = {word: exponent for exponent, words in _SCALES.items() for word in words}
_CODES = (
    "AED AUD BGN BRL CAD CHF CNY CZK DKK EGP EUR GBP HKD HUF IDR ILS INR JPY KES KRW MXN MYR NGN NOK NZD PHP PLN RON "
    "RUB SAR SEK SGD THB TRY UAH USD ZAR"
)
"""Codes of much traded currencies; other letters beside a number are refused rather than taken for one."""

_MONEY = rf"(?:(?:A|C|CA|HK|NZ|R|S|US)?¤|{'|'.join(_CODES.split())}|kr\.?|Kč|zł|Fr\.|Ft)"
_SCALE_WORDS = "|".join(sorted((word for word in _EXPONENTS if word != "t"), key=len, reverse=True))
_SCALE = rf"(?:(?i:{_SCALE_WORDS})\.?|T(?={_MONEY}))"
_BODY = rf"(?P<digits>[\d.,' ]+)(?P<power>[eE][-+]?\d{{1,3}})?(?P<scale>{_SCALE})?"
_SIGNED = re.compile(rf"(?P<sign>[-+])?{_MONEY}?(?P<inner>[-+])?{_BODY}{_MONEY}?(?P<behind>-)?", re.ASCII)
_BRACKETED = re.compile(rf"{_MONEY}?\({_MONEY}?{_BODY}{_MONEY}?\)(?P<outer>{_SCALE})?{_MONEY}?", re.ASCII)
_IDLE_BLANKS = re.compile(r"(?<![\d.,' ]) ++|(?<! ) ++(?![\d.,'])", re.ASCII)
"""Blanks that stand between a number and its sign, word or currency; those between digits may group."""
_EXACT = Context(prec=4_000)


def cleaned(text: str) -> str:
    """Give a text in plain characters: ASCII digits and signs, ``¤`` for any currency sign, one kind of blank.

    Raised and lowered digits are left alone: they are footnote marks. So are tabs and line ends within the text: they
    part two numbers, where a blank may group one.
    """
    return "".join(map(_plain, text.translate(_REPLACED))).strip()


def _plain(char: str) -> str:
    if "\uff01" <= char <= "\uff5e":
        char = chr(ord(char) - _FULL_WIDTH_SHIFT)
    category = unicodedata.category(char)
    if category == "Nd":
        return str(unicodedata.decimal(char))
    return {"Zs": " ", "Cf": "", "Sc": ANY_CURRENCY}.get(category, char)


def without_money(text: str) -> str:
    """Take a currency off both ends of a cleaned text."""
    return re.sub(rf"^{_MONEY} *|(?<! ) *+{_MONEY}$", "", text)


def read_number(text: str, mark: DecimalMark, unit_digits: int) -> Decimal | None:
    """Read one cleaned number under one decimal mark; None where it is none.

    Signs stand in front, behind the currency, or behind everything; brackets mean minus. A word for thousand or
    million states single units of currency, which become units of ten to the power of ``unit_digits``.
    """
    dense = _IDLE_BLANKS.sub("", text)
    if found := _SIGNED.fullmatch(dense):
        signs = [sign for sign in found.group("sign", "inner", "behind") if sign]
        value = _scaled(found, mark, found["scale"], unit_digits)
        return None if value is None or len(signs) > 1 else value.copy_negate() if "-" in signs else value
    if (found := _BRACKETED.fullmatch(dense)) and not (found["scale"] and found["outer"]):
        value = _scaled(found, mark, found["scale"] or found["outer"], unit_digits)
        return None if value is None else value.copy_negate()
    return None


def _scaled(found: re.Match[str], mark: DecimalMark, scale: str | None, unit_digits: int) -> Decimal | None:
    """Read the digits of a match and move the decimal point for its exponent and its scale word."""
    value = read_digits(found["digits"], mark)
    if value is None:
        return None
    power = int(found["power"][1:]) if found["power"] else 0
    moved = _EXPONENTS[scale.rstrip(".").lower()] - unit_digits if scale else 0
    return value.scaleb(power + moved, _EXACT)


def read_digits(text: str, mark: DecimalMark) -> Decimal | None:
    """Read digits with one decimal mark and regular grouping; None where they do not fit.

    Groups of three are parted by one kind of sign throughout; the comma also by hundreds beyond the first thousand, as
    in 12,34,567. A grouped number does not begin with a zero.
    """
    whole, found, fraction = text.partition(mark)
    if found and not re.fullmatch(r"\d+", fraction, re.ASCII):
        return None
    if not re.fullmatch(r"\d+", whole, re.ASCII) and not (found and not whole) and not _grouped(whole, mark):
        return None
    return Decimal(re.sub(r"\D", "", whole) + "." + fraction if found else re.sub(r"\D", "", whole))


def _grouped(whole: str, mark: DecimalMark) -> bool:
    """Say whether a whole number is grouped by one kind of sign other than the decimal mark."""
    if re.fullmatch(r"[1-9]\d?(,\d\d)+,\d{3}", whole, re.ASCII):
        return mark == "."
    return any(
        re.fullmatch(rf"[1-9]\d{{0,2}}({re.escape(sign)}\d{{3}})+", whole, re.ASCII) for sign in ".,' " if sign != mark
    )
