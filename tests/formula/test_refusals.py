"""What is no formula is refused with its place, and nothing of it runs."""

import ast
import math
from collections.abc import Callable

import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.errors import UserError
from creditdesk.formula.compiler import compile_formula
from creditdesk.formula.screening import DEEPEST, LONGEST
from creditdesk.formula.sums import evaluate_sum

NAMES = ("revenue", "net_profit", "equity")
TEXTS = {"basis": ("audited", "unaudited")}


def faults(text: str, *, comparisons: bool = True) -> tuple[str, ...]:
    with pytest.raises(UserError) as refused:
        compile_formula(text, NAMES, comparisons=comparisons, texts=TEXTS)
    assert refused.value.code == "formula"
    assert refused.value.exit_code == 3
    return refused.value.faults


CANARIES = [
    "canary()",
    "canary().real",
    "canary.__class__",
    "[canary()][0]",
    "[canary() for one in (1,)]",
    "{canary() for one in (1,)}",
    "{one: canary() for one in (1,)}",
    "list(canary() for one in (1,))",
    "(lambda: canary())()",
    "(lambda one=canary(): 1)",
    "f'{canary()}'",
    "(one := canary())",
    "max(*[canary(), 1])",
    "max(1, 2, key=canary())",
    "1 if canary() else 2",
    "canary() if 1 else 2",
    "(canary(), 1)",
    "[1, 2][canary():]",
    "abs(canary())",
    "revenue + canary()",
    "canary() == 'audited'",
    "canary() and 1",
    "not canary()",
    "__import__('builtins').canary()",
    "eval('canary()')",
    "().__class__.__base__.__subclasses__()",
]


class Canary:
    """Note when it is touched."""

    def __init__(self) -> None:
        self.sang = 0

    def __call__(self) -> int:
        self.sang += 1
        return 1


@pytest.mark.parametrize("text", CANARIES)
def test_nothing_of_a_refused_text_runs(text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    canary = Canary()
    monkeypatch.setattr("builtins.canary", canary, raising=False)
    assert faults(text)[0].startswith("column ")
    assert canary.sang == 0


@pytest.mark.parametrize("text", [text for text in CANARIES if text.count("canary()") and "lambda one" not in text])
def test_the_canary_would_sing_in_an_interpreter(text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    canary = Canary()
    monkeypatch.setattr("builtins.canary", canary, raising=False)
    try:
        eval(text, {"revenue": 1.0})
    except TypeError:
        assert canary.sang  # it had run before its result did not fit
    assert canary.sang == 1


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("revenue.real", 'column 1: found attribute access, "revenue.real"; allowed: '),
        ("1 + revenue[0]", 'column 5: found a subscript, "revenue[0]"; allowed: '),
        ("lambda: 1", "column 1: found a lambda"),
        ("[x for x in (1, 2)]", "column 1: found a comprehension"),
        ("(1, 2)", "column 1: found a comma outside a function's brackets"),
        ("f'{revenue}'", "column 1: found a formatted text"),
        ("2 * (x := 1)", "column 6: found an assignment"),
        ("max(*revenue)", "column 5: found a starred argument"),
        ("abs(**revenue)", "column 1: found an argument with a name"),
        ("abs(x=1)", "column 1: found an argument with a name"),
        ("1 if revenue else 2", "column 1: found if ... else (write if_else(condition, a, b))"),
        ("print(1)", 'column 1: found an unknown function, "print"; allowed: the functions abs min max'),
        ("revenue + roud(1)", 'column 11: found an unknown function, "roud"'),
        ("sqr(1)", 'did you mean "sqrt"?'),
        ("(revenue)(1)", 'found an unknown function, "revenue"'),
        ("abs(1)(2)", 'column 1: found a call of something that is no function, "abs(1)"'),
        ("abs", 'column 1: found a function without its brackets, "abs"; allowed: abs(...)'),
        ("abs(1, 2)", 'column 1: found 2 arguments, "abs(1, 2)"; allowed: 1 for abs'),
        ("min(1)", "column 1: found 1 arguments"),
        ("_revenue", 'column 1: found a name that begins with an underscore, "_revenue"'),
        ("__builtins__", "column 1: found a name that begins with an underscore"),
        (
            "net_proft",
            'column 1: found an unknown name, "net_proft"; allowed: the names basis equity net_profit revenue; ',
        ),
        ("net_proft", 'did you mean "net_profit"?'),
        ("9**9**9", 'column 4: found an exponent, "9**9"; allowed: a constant from -10 to 10 after **'),
        ("2**11", 'column 4: found an exponent, "11"'),
        ("2**-10.5", 'column 4: found an exponent, "-10.5"'),
        ("2**revenue", 'column 4: found an exponent, "revenue"'),
        ("2**True", 'column 4: found an exponent, "True"'),
        ("2**1j", 'column 4: found "1j"'),
        ("7 // 2", "column 1: found an operator formulas do not have"),
        ("7 % 2", "found an operator formulas do not have"),
        ("7 @ 2", "found an operator formulas do not have"),
        ("7 << 2", "found an operator formulas do not have"),
        ("7 | 2", "found an operator formulas do not have"),
        ("~revenue", "column 1: found an operator formulas do not have"),
        ("revenue is equity", "column 1: found a comparison formulas do not have"),
        ("basis in ('audited',)", "column 1: found a comparison formulas do not have"),
        ("True", 'column 1: found a constant formulas do not have, "True"'),
        ("None", "found a constant formulas do not have"),
        ("...", "found a constant formulas do not have"),
        ("basis == b'audited'", "column 10: found a constant formulas do not have, \"b'audited'\""),
        ("basis == 'audi' 'ted'", "column 10: found a constant formulas do not have"),
        ("basis == u'audited'", "column 10: found a constant formulas do not have"),
        ("0x1F", 'column 1: found "0x1F"; allowed: numbers such as 365'),
        ("1_000", 'column 1: found "1_000"'),
        ("3revenue", 'column 1: found "3revenue"'),
        ("1.2.3", 'column 1: found "1.2.3"'),
        ("2 * 1e999", 'column 5: found "1e999"; allowed: numbers up to 1.7e308'),
        ("1e-99999", 'column 1: found "1e-99999"'),
        ("revenue +", "column 10: found nothing more where something must follow"),
        ("revenue equity", 'column 9: cannot be read from "equity" on'),
        ("  revenue = 1", 'column 11: cannot be read from "= 1" on'),
        ("import os", 'column 1: cannot be read from "import os" on'),
        ("revenue; equity", 'column 8: cannot be read from "; equity" on'),
        ("(revenue", 'column 1: found "(" that nothing closes'),
        ("revenue) + 1", 'column 8: found ")" that nothing opened'),
        ("revenue # + 1", 'column 9: found "#"'),
        ("revenue \\\n + 1", 'column 9: found "\\"'),
        ("basis == 'audited", 'column 10: found "\'"'),
        ("basis == '\\x61udited'", 'column 11: found "\\" in a text'),
        ("basis == '''audited'''", "column 10: found three quotes in a row"),
        ("", "column 1: found nothing; allowed: numbers"),
        (" \n\t", "column 1: found nothing"),
    ],
)
def test_each_refusal_names_place_and_find(text: str, fault: str) -> None:
    assert fault in "\n".join(faults(text))


@pytest.mark.parametrize(
    ("text", "column", "code"),
    [
        ("r\u0435venue + 1", 2, "U+0435"),  # Cyrillic e
        ("1 + \uff52evenue", 5, "U+FF52"),  # full-width r, which Python itself would read as r
        ("\U0001d42bevenue", 1, "U+1D42B"),  # mathematical bold r, likewise
        ("net_pro\ufb01t", 8, "U+FB01"),  # ligature, likewise
        ("revenue \u2212 1", 9, "U+2212"),  # the proper minus sign
        ("revenue\u200b", 8, "U+200B"),  # zero width
        ("revenue +\u00a01", 10, "U+00A0"),
        ("\uff11 + 1", 1, "U+FF11"),
        ("revenue\x00 + 1", 8, "U+0000"),
        ("\x1b[2Jrevenue", 1, "U+001B"),
    ],
)
def test_look_alikes_and_control_characters_are_refused(text: str, column: int, code: str) -> None:
    (first, *_) = faults(text)
    assert first.startswith(f"column {column}: found ")
    assert code in first
    assert first.isprintable()


def test_look_alikes_cannot_hide_behind_odd_quotes() -> None:
    for text in ("basis == '''c'd'''==\uff52evenue=='''c'd'''", "basis == \"a'b\" or \uff52evenue > '1"):
        assert faults(text)


@pytest.mark.parametrize("text", ["revenue < 1", "not revenue", "revenue and equity", "'audited'"])
def test_conditions_are_refused_where_the_caller_allows_none(text: str) -> None:
    (fault,) = faults(text, comparisons=False)
    assert fault.startswith("column 1: found a con")
    assert "not" not in fault.partition("allowed: ")[2].split()


def test_all_faults_are_told_at_once_in_the_order_of_the_text() -> None:
    told = faults("revnue + a.b * equty - 3 % 2")
    assert [fault.partition(":")[0] for fault in told] == ["column 1", "column 10", "column 16", "column 24"]
    assert "\n".join(told) == str(UserError("formula", told))


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("(" * 10_000 + "1" + ")" * 10_000, "found 20,001 characters; allowed: at most 2,000"),
        ("not " * 50_000 + "revenue", "found 200,007 characters"),
        ("1" * 2_001, "column 2001: found 2,001 characters"),
        ("(" * 900 + "1" + ")" * 900, "column 51: found more than 50 brackets within one another"),
        ("not " * 490 + "revenue > 1", "found more than 50 levels within one another"),
        ("-" * 1_990 + "1", "found more than 50 levels within one another"),
        ("2**-" * 400 + "1", 'column 4: found an exponent, "-2**-2**'),
        ("abs(" * 51 + "1" + ")" * 51, "found more than 50 brackets within one another"),
        ("1+(" * 50 + "1" + ")" * 50, "found more than 50 levels within one another"),
    ],
)
def test_size_and_depth_are_limited(text: str, fault: str) -> None:
    assert fault in faults(text)[0]


ARITIES = {"abs": (1, 1), "ln": (1, 1), "exp": (1, 1), "sqrt": (1, 1), "sign": (1, 1), "min": (2, 20), "max": (2, 20)}


@pytest.mark.parametrize("function", ARITIES)
def test_functions_take_so_many_arguments_and_no_other_number(function: str) -> None:
    least, most = ARITIES[function]
    for number in (least, most):
        assert float(compile_formula(f"{function}({', '.join(['1'] * number)})", ())({})) in (0.0, 1.0, math.e)
    for number in (least - 1, most + 1):
        assert f"found {number} arguments" in faults(f"{function}({', '.join(['1'] * number)})")[0]


def test_a_choice_takes_three_arguments() -> None:
    assert "found 2 arguments" in faults("if_else(1 < 2, 3)")[0]
    assert "found 4 arguments" in faults("if_else(1 < 2, 3, 4, 5)")[0]


def test_a_long_find_is_shortened_and_a_shorter_one_is_not() -> None:
    assert f'found an unknown name, "{"a" * 40}"; allowed' in faults("a" * 40)[0]
    assert f'found an unknown name, "{"a" * 39}…"; allowed' in faults("a" * 41)[0]


def test_up_to_the_limits_everything_works() -> None:
    assert float(compile_formula("7" + " " * (LONGEST - 1), ())({})) == 7.0
    assert float(compile_formula("(" * DEEPEST + "7" + ")" * DEEPEST, ())({})) == 7.0
    assert float(compile_formula("-" * (DEEPEST - 1) + "7", ())({})) == -7.0
    long_sum = compile_formula("+".join(["revenue"] * 250), NAMES)
    assert len(long_sum.text) < LONGEST
    assert float(long_sum({"revenue": 2.0})) == 500.0
    assert float(compile_formula("1" + "+1" * 999, ())({})) == 1000.0
    assert float(compile_formula("1" + "<2" * 1 + " and 1<2" * 200, (), comparisons=True)({})) == 1.0
    assert evaluate_sum("1" + "+1" * 999) == 1000.0


@pytest.mark.parametrize("error", [RecursionError, MemoryError, ValueError, OverflowError])
def test_a_parser_that_gives_up_means_a_refusal(error: type[Exception], monkeypatch: pytest.MonkeyPatch) -> None:
    def give_up(*_: object, **__: object) -> ast.Expression:
        raise error

    monkeypatch.setattr(ast, "parse", give_up)
    assert "found more than 50 levels" in faults("revenue")[0]


alphabet = st.sampled_from(
    [*"revnufi_abs01.,+-*/()<>=!'\"[]{}:;#\\\n \x00eEjé\uff52", "revenue", "basis", "abs(", "**", " and ", "not "]
)


@given(st.lists(alphabet, max_size=30).map("".join) | st.text(max_size=40))
def test_any_text_is_compiled_or_refused_and_nothing_else(text: str) -> None:
    for refusal in (
        refusal_of(lambda: compile_formula(text, NAMES, comparisons=True, texts=TEXTS)),
        refusal_of(lambda: evaluate_sum(text)),
    ):
        assert refusal is None or (refusal.code == "formula" and all(fault.isprintable() for fault in refusal.faults))


def refusal_of(attempt: Callable[[], object]) -> UserError | None:
    try:
        attempt()
    except UserError as refused:
        return refused
    return None
