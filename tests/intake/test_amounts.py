"""Amounts as people write them."""

import math
from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.errors import BugError, UserError
from creditdesk.formula.sums import evaluate_sum
from creditdesk.intake.amounts import Amount, AmountKind, parse_amount
from creditdesk.intake.numerals import DecimalMark


def number(text: str, decimal: DecimalMark | None, unit: int = 1) -> float:
    amount = parse_amount(text, decimal, unit)
    assert amount.kind is AmountKind.NUMBER
    assert amount.text == text
    return amount.value


def refusal(text: str, decimal: DecimalMark | None = ".") -> str:
    with pytest.raises(UserError) as refused:
        parse_amount(text, decimal)
    assert refused.value.code == "amount"
    (fault,) = refused.value.faults
    assert fault.isprintable()
    return fault


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("0", 0.0),
        ("1234", 1234.0),
        ("0012", 12.0),
        ("1,234", 1234.0),
        ("1,234.5", 1234.5),
        ("1,234,567", 1234567.0),
        ("12,34,567.25", 1234567.25),  # grouping by lakh and crore
        ("1 234.5", 1234.5),
        ("1\u00a0234", 1234.0),
        ("1\u202f234\u202f567", 1234567.0),
        ("1\u2009234", 1234.0),
        ("1'234.50", 1234.5),
        ("1\u2019234", 1234.0),
        (".5", 0.5),
        ("0.123", 0.123),
        ("  7 ", 7.0),
        ("(1,234)", -1234.0),
        ("( 1,234 )", -1234.0),
        ("(0)", 0.0),
        ("1234-", -1234.0),
        ("1,234 -", -1234.0),
        ("-1234", -1234.0),
        ("- 1234", -1234.0),
        ("\u22121234", -1234.0),
        ("\u20131,234", -1234.0),
        ("+1234", 1234.0),
        ("1.2m", 1.2e6),
        ("(1.2)m", -1.2e6),
        ("(1.2m)", -1.2e6),
        ("3k", 3000.0),
        ("3 K", 3000.0),
        ("1.5 bn", 1.5e9),
        ("1.2 Mio.", 1.2e6),
        ("250 Tsd.", 250000.0),
        ("1.2 million", 1.2e6),
        ("£1,234", 1234.0),
        ("£ 1,234.50", 1234.5),
        ("-£5", -5.0),
        ("£-5", -5.0),
        ("(£5)", -5.0),
        ("£(5)", -5.0),
        ("1,234 €", 1234.0),
        ("US$1.2m", 1.2e6),
        ("EUR 1,234", 1234.0),
        ("1,234 USD", 1234.0),
        ("1.2 Mio. EUR", 1.2e6),
        ("12 TEUR", 12000.0),
        ("12 T€", 12000.0),
        ("3 kEUR", 3000.0),
        ("1.2 MUSD", 1.2e6),
        ("kr 500", 500.0),
        ("5 MXN", 5.0),
        ("1e6", 1e6),
        ("1.5E+06", 1.5e6),
        ("2.5e-3", 0.0025),
        ("\uff11\uff12\uff0c\uff13\uff14\uff15", 12345.0),
        ("\uff08\uff11\uff12\uff09", -12.0),
        ("\u0663\u0664", 34.0),  # Arabic-Indic digits
        ("\u200e1,234\u200b", 1234.0),
        ("0.1", 0.1),
        ("123456789.123456789", 123456789.123456789),
    ],
)
def test_amounts_with_a_decimal_point(text: str, value: float) -> None:
    assert number(text, ".") == value
    assert math.copysign(1.0, number(text, ".")) == math.copysign(1.0, value)


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("1.234,5", 1234.5),
        ("1.234", 1234.0),
        ("1.234.567", 1234567.0),
        ("1,234", 1.234),
        ("1 234,5", 1234.5),
        ("1'234,5", 1234.5),
        ("(1.234,50)", -1234.5),
        ("1,2 Mio. EUR", 1.2e6),
        ("1,2m", 1.2e6),
        ("€ 1.234,50", 1234.5),
        (",5", 0.5),
        ("1.234,5-", -1234.5),
    ],
)
def test_amounts_with_a_decimal_comma(text: str, value: float) -> None:
    assert number(text, ",") == value


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("1,234.5", 1234.5),
        ("1.234,5", 1234.5),
        ("1 234", 1234.0),
        ("1 234,567", 1234.567),
        ("1'234.567", 1234.567),
        ("1,234,567", 1234567.0),
        ("1.234.567", 1234567.0),
        ("1,23", 1.23),
        ("1.2345", 1.2345),
        ("0,123", 0.123),
        ("0.500", 0.5),
        ("1234,567", 1234.567),
        ("12,34,567", 1234567.0),
        ("1,2+3.400,5", 3401.7),
    ],
)
def test_a_text_that_reads_one_way_needs_no_convention(text: str, value: float) -> None:
    assert number(text, None) == value


@pytest.mark.parametrize(
    ("text", "with_point", "with_comma"),
    [
        ("1,234", 1234.0, 1.234),
        ("12.345", 12.345, 12345.0),
        ("(1,234)", -1234.0, -1.234),
        ("£1,234", 1234.0, 1.234),
        ("1.250k", 1250.0, 1250000.0),
        ("1,200+340", 1540.0, 341.2),
    ],
)
def test_a_text_that_reads_two_ways_says_so(text: str, with_point: float, with_comma: float) -> None:
    amount = parse_amount(text, None)
    assert amount.kind is AmountKind.AMBIGUOUS
    assert math.isnan(amount.value)
    assert amount.readings == (with_point, with_comma)
    assert (number(text, "."), number(text, ",")) == (with_point, with_comma)


@pytest.mark.parametrize(
    "text", ["-", "\u2013", "\u2014", "\u2212", "--", " - ", "(\u2013)", "nil", "Nil", "£ -", "€\u2013", "- EUR"]
)
def test_a_dash_is_nil_by_convention_and_marked(text: str) -> None:
    assert parse_amount(text, None) == Amount(0.0, AmountKind.NIL, text)


@pytest.mark.parametrize(
    "text",
    [
        "",
        " ",
        "\u00a0",
        "n/a",
        "N/A",
        "#N/A",
        "n.a.",
        "NA",
        "n/d",
        "n.d.",
        "nan",
        "k.A.",
        "k. A.",
        "...",
        "…",
        "not disclosed",
    ],
)
def test_nothing_is_not_disclosed_and_never_nil(text: str) -> None:
    amount = parse_amount(text, None)
    assert amount.kind is AmountKind.NOT_DISCLOSED
    assert math.isnan(amount.value)
    assert amount.text == text


@pytest.mark.parametrize(
    ("text", "unit", "value"),
    [
        ("1.2m", 1000, 1200.0),
        ("1.2m", 1_000_000, 1.2),
        ("3k", 1000, 3.0),
        ("3k", 1_000_000, 0.003),
        ("0.1k", 1_000_000, 0.0001),
        ("1234", 1000, 1234.0),  # a plain number is in the unit already
        ("1.2m+300k-40", 1000, 1460.0),
    ],
)
def test_a_word_for_thousand_or_million_states_single_units(text: str, unit: int, value: float) -> None:
    assert number(text, ".", unit) == value


def test_a_unit_no_case_has_is_our_mistake() -> None:
    with pytest.raises(BugError):
        parse_amount("1", ".", 100)


@pytest.mark.parametrize(
    ("text", "decimal", "value", "typed"),
    [
        ("1200+340-15", ".", 1525.0, "1200+340-15"),
        ("1200 + 340", ".", 1540.0, "1200 + 340"),
        ("=1200+340", ".", 1540.0, "1200+340"),
        ("= 1200+340", ".", 1540.0, "1200+340"),
        ("=31-12-2025", ".", -2006.0, "31-12-2025"),
        ("1,200.5+340", ".", 1540.5, "1200.5+340"),
        ("1.200,5+340", ",", 1540.5, "1200.5+340"),
        ("1\u202f200 + 2 300", ",", 3500.0, "1200 + 2300"),
        ("\u2212 5 + 2", ".", -3.0, "- 5 + 2"),
        ("+1200+340", ".", 1540.0, "+1200+340"),
        ("3×(400\u221250)÷2", ".", 525.0, "3*(400-50)/2"),
        ("(2+3)*(4-1)", ".", 15.0, "(2+3)*(4-1)"),
        ("0.1+0.2", ".", 0.3, "0.1+0.2"),
        ("£1.2m + £300k", ".", 1.5e6, "1200000 + 300000"),
        ("1200-15", ".", 1185.0, "1200-15"),
        ("2024-340", ".", 1684.0, "2024-340"),
        ("5+3", ".", 8.0, "5+3"),
        ("=5", ".", 5.0, ""),
        ("=-5", ".", -5.0, ""),
        ("-5", ".", -5.0, ""),
    ],
)
def test_sums_are_evaluated_and_kept(text: str, decimal: DecimalMark, value: float, typed: str) -> None:
    amount = parse_amount(text, decimal)
    assert (amount.value, amount.kind, amount.typed) == (value, AmountKind.NUMBER, typed)
    if typed:
        assert evaluate_sum(typed) == value


GENERAL = "an amount such as 1,234.5, (120) or 1.2m, a dash for nil, n/a, or a sum such as 1200+340"


@pytest.mark.parametrize(
    "text",
    [
        "abc",
        "12%",
        "1,234\u00b9",  # a footnote mark, not a digit
        "1,234 (2)",
        "½",
        "1,23",
        "1,2345",
        "0,123",
        "1,234,56",
        "1.234,5",
        "1.2.3",
        "1..2",
        "5.",
        ".",
        ",",
        "1 2",
        "12 34",
        "1  234",
        "12 .5",
        "123\n456",
        "123\t456",
        "1,234 567",
        "12 ABC",
        "30 SEP",
        "5 apples",
        "k",
        "1.2mm2",
        "1k k",
        "(1k)k",
        "<5",
        "~5",
        "1_000",
        "0x10",
        "1e1000",
        "9" * 400,
        "((5))",
        "-£-5",
        "+£-5",
        "-(£-5)",
        "(5",
        "#REF!",
        "#DIV/0!",
        "=A1+B2",
        "=SUM(A1:A3)",
        "revenue",
        "1+revenue",
        "1\x00",
        "\x1b[2J",
    ],
)
def test_what_is_no_amount_is_refused(text: str) -> None:
    fault = refusal(text)
    assert fault.startswith('found "')
    assert fault.endswith(f'"; expected {GENERAL}')


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("31-12-2025", "no date or business year"),
        ("31/12/25", "no date or business year"),
        ("2025-12-31", "no date or business year"),
        ("2024/25", "no date or business year"),
        ("2024-2025", "no date or business year"),
        ("--5", "one sign at a time"),
        ("5--3", "one sign at a time"),
        ("5 - -3", "one sign at a time"),
        ("-5-", "(column 4: found nothing more"),
        ("2*(5)", "because (5) alone means -5"),
        ("-(5)", "because (5) alone means -5"),
        ("(EUR 5)+3", "because (5) alone means -5"),
        ("(5)+(3)", "because (5) alone means -5"),
        ("=(5)", "because (5) alone means -5"),
        ("(2+3)-(5)", "because (5) alone means -5"),
        ("(1200+340)", "brackets around an amount mean minus"),
        ("((1200)+(340-1))", "because (5) alone means -5"),
        ("((1200-1)+(340-1))", "brackets around an amount mean minus"),
        ("(-5)", "brackets around an amount mean minus"),
        ("5/0", "(the sum divides by zero; "),
        ("5+", "(column 3: found nothing more"),
        ("5(3+1)", "(column 1: found a call of something that is no function"),
        ("1**2", "(column 1: found an operator formulas do not have"),
        ("1//2", "(column 1: found an operator formulas do not have"),
        ("1" * 2_001, "an amount of at most 2,000 characters"),
    ],
)
def test_what_would_mean_two_things_is_refused_with_the_reason(text: str, expected: str) -> None:
    assert expected in refusal(text)


def test_the_expected_form_follows_the_convention() -> None:
    assert "such as 1.234,5, (120) or 1,2m" in refusal("1,234.5", ",")
    assert "such as 1,234.5, 1.234,5, (120) or 3k" in refusal("abc", None)


def test_the_longest_text_is_read_and_a_long_find_is_shortened() -> None:
    assert number("7" + " " * 1_999, ".") == 7.0
    assert refusal("a" * 40).startswith(f'found "{"a" * 40}"; ')
    assert refusal("a" * 41).startswith(f'found "{"a" * 39}…"; ')


def test_long_runs_of_blanks_are_read_at_once() -> None:
    assert number("£" + " " * 1_900 + "7", ".") == 7.0
    assert parse_amount("£" + " " * 1_900 + "-", ".").kind is AmountKind.NIL
    refusal("1" + " " * 1_900 + "x")
    refusal("1" + " " * 1_900 + "1")


amounts = st.decimals(-(10**12), 10**12, places=2) | st.integers(-(10**12), 10**12).map(Decimal)
GROUPS = {
    ".": [",", " ", "'", "\u00a0", "\u202f", "\u2009", "\u2019", ""],
    ",": [".", " ", "'", "\u00a0", "\u202f", "\u2009", ""],
}
NEGATIVES = ["-{}", "\u2212{}", "({})", "{}-", "- {}", "( {} )", "\u2013{}"]


@given(amounts, st.sampled_from([".", ","]), st.data())
def test_what_is_written_by_a_convention_is_read_back(amount: Decimal, mark: DecimalMark, data: st.DataObject) -> None:
    group = data.draw(st.sampled_from(GROUPS[mark]))
    whole, _, fraction = f"{abs(amount):,f}".partition(".")
    written = whole.replace(",", group) + (mark + fraction if fraction else "")
    written = data.draw(st.sampled_from(["{}", "£{}", "{} €", "EUR {}", "{} USD", " {} "])).format(written)
    if amount < 0:
        written = data.draw(st.sampled_from(NEGATIVES)).format(written.strip())
    assert number(written, mark) == float(amount)
    undecided = parse_amount(written, None)
    assert float(amount) in (undecided.value, *undecided.readings)


@given(st.lists(st.decimals(0, 10**9, places=3), min_size=2, max_size=8), st.sampled_from([".", ","]))
def test_a_typed_sum_is_kept_in_a_form_that_gives_its_value(parts: list[Decimal], mark: DecimalMark) -> None:
    text = "+".join(f"{part:f}" for part in parts).replace(".", mark)
    amount = parse_amount(text, mark)
    assert amount.value == float(sum(parts))
    assert evaluate_sum(amount.typed) == amount.value


@given(
    st.text(max_size=30) | st.text(st.sampled_from("0123456789.,' ()+-*/=kmEe€\u2013TEUR\n%"), max_size=20),
    st.sampled_from([".", ",", None]),
)
def test_any_text_is_read_or_refused_and_nothing_else(text: str, mark: DecimalMark | None) -> None:
    try:
        amount = parse_amount(text, mark)
    except UserError as refused:
        amount = None
        code = refused.code
    if amount is None:
        assert code == "amount"
    else:
        assert amount.kind is not AmountKind.NUMBER or math.isfinite(amount.value)
