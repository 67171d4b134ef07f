"""Yes, no and unknown."""

import numpy as np
import pytest

from creditdesk.base.errors import UserError
from creditdesk.formula.compiler import compile_formula
from creditdesk.formula.nodes import Kind

FLAGS = {"p": Kind.FLAG, "q": Kind.FLAG, "amount": Kind.NUMBER}
BASIS = {"basis": ("audited", "reviewed", "unaudited")}
UNKNOWN = np.nan
P = np.repeat([1.0, 0.0, UNKNOWN], 3)
Q = np.tile([1.0, 0.0, UNKNOWN], 3)


@pytest.mark.parametrize(
    ("text", "truth"),
    [
        # Kleene, Introduction to Metamathematics (1952), section 64, strong tables; p runs slowest
        ("p and q", [1, 0, UNKNOWN, 0, 0, 0, UNKNOWN, 0, UNKNOWN]),
        ("p or q", [1, 1, 1, 1, 0, UNKNOWN, 1, UNKNOWN, UNKNOWN]),
        ("not p", [0, 0, 0, 1, 1, 1, UNKNOWN, UNKNOWN, UNKNOWN]),
        ("not (p and not q)", [1, 0, UNKNOWN, 1, 1, 1, 1, UNKNOWN, UNKNOWN]),
    ],
)
def test_connectives_follow_the_strong_tables(text: str, truth: list[float]) -> None:
    formula = compile_formula(text, FLAGS, comparisons=True)
    np.testing.assert_array_equal(formula({"p": P, "q": Q}), truth)
    single = [float(formula({"p": p, "q": q})) for p, q in zip(P, Q, strict=True)]
    np.testing.assert_array_equal(single, truth)


def test_flags_may_be_given_as_booleans() -> None:
    formula = compile_formula("p and not q or q", FLAGS, comparisons=True)
    found = formula({"p": np.array([True, True, False]), "q": np.array([True, False, False])})
    np.testing.assert_array_equal(found, [1.0, 1.0, 0.0])
    assert float(formula({"p": True, "q": False})) == 1.0


@pytest.mark.parametrize("operator", ["<", "<=", ">", ">=", "==", "!="])
def test_comparisons_with_an_unknown_number_are_unknown(operator: str) -> None:
    formula = compile_formula(f"amount {operator} 3", FLAGS, comparisons=True)
    found = formula({"amount": np.array([np.nan, 3.0])})
    assert np.isnan(found[0])
    assert found[1] == float(operator in ("<=", ">=", "=="))


def test_a_chain_of_comparisons_joins_them() -> None:
    formula = compile_formula("0 < amount <= 3", FLAGS, comparisons=True)
    np.testing.assert_array_equal(formula({"amount": np.array([-1.0, 2.0, 3.0, 4.0, np.nan])}), [0, 1, 1, 0, np.nan])


def test_a_choice_by_an_unknown_condition_is_unknown() -> None:
    formula = compile_formula("if_else(p, amount, 0)", FLAGS)
    found = formula({"p": np.array([1.0, 0.0, np.nan]), "amount": np.array([np.nan, np.nan, 5.0])})
    np.testing.assert_array_equal(found, [np.nan, 0.0, np.nan])
    flag = compile_formula("if_else(p, q, amount > 1)", FLAGS, comparisons=True)
    assert flag.kind is Kind.FLAG
    assert float(flag({"p": 0.0, "q": 0.0, "amount": 2.0})) == 1.0


def test_texts_are_compared_for_equality() -> None:
    formula = compile_formula("basis == 'audited' or 'reviewed' == basis", (), texts=BASIS, comparisons=True)
    assert formula.kind is Kind.FLAG
    assert formula.names == ("basis",)
    assert [float(formula({"basis": basis})) for basis in BASIS["basis"]] == [1.0, 1.0, 0.0]
    assert np.isnan(formula({"basis": None}))
    other = compile_formula('basis != "audited" and amount > 0', FLAGS, texts=BASIS, comparisons=True)
    np.testing.assert_array_equal(other({"basis": "reviewed", "amount": np.array([1.0, -1.0])}), [1.0, 0.0])


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        (
            "basis == 'unaudted'",
            'a text that basis never holds, "\'unaudted\'"; allowed: "audited" "reviewed" "unaudited"',
        ),
        ("basis < 'audited'", "found a text after <"),
        ("amount == 'audited'", "found no text name"),
        ("'audited' == 'audited'", "found no text name"),
        ("basis == basis", "found a text"),
        ("basis", "found a text"),
        ("'audited'", "found a text by itself"),
        ("basis + 1", "found a text"),
        ("not basis", "found a text"),
        ("max('audited', 1)", "found a text by itself"),
    ],
)
def test_texts_serve_for_nothing_else(text: str, fault: str) -> None:
    with pytest.raises(UserError) as refused:
        compile_formula(text, FLAGS, texts=BASIS, comparisons=True)
    assert fault in refused.value.faults[0]


def test_a_misspelled_text_is_met_with_the_nearest() -> None:
    with pytest.raises(UserError, match='did you mean "unaudited"'):
        compile_formula("basis == 'unaudted'", FLAGS, texts=BASIS, comparisons=True)
