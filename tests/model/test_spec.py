from collections.abc import Callable

import msgspec
import pytest

from creditdesk.model.spec import REASON_CODES, REASONS, ModelSpec, Rule, Rules, counts_as_missing, terms_of
from creditdesk.ratios.compute import Reason

MakeSpec = Callable[..., ModelSpec]


def test_there_is_a_rule_for_every_reason_a_ratio_may_have() -> None:
    assert tuple(field.name for field in msgspec.structs.fields(Rules)) == REASONS
    assert {Reason(code).key: code for code in REASON_CODES.values()} == REASON_CODES
    assert len(REASONS) == len(Reason) - 1


def test_terms_come_factor_by_factor_main_term_first(make_spec: MakeSpec) -> None:
    terms = terms_of(make_spec())
    assert [term.name for term in terms] == [
        "profit",
        "profit.not_disclosed",
        "cover",
        "cover.unknown",
        "cover.none",
        "debt",
    ]
    assert [term.factor for term in terms] == [0, 0, 1, 1, 1, 2]
    assert [term.coefficient for term in terms] == [-8.0, 0.7, -0.4, 0.3, -0.2, 0.15]
    assert terms[4].reasons == ("no_debt", "zero_denominator")
    assert [term.name for term in terms if not term.estimated] == ["profit.not_disclosed"]


@pytest.mark.parametrize(
    ("reason", "stated", "expected"),
    [
        ("not_disclosed", None, True),
        ("needs_prior_period", None, True),
        ("no_debt", None, False),
        ("net_cash", None, False),
        ("no_debt", True, True),
        ("not_disclosed", False, False),
    ],
)
def test_a_reason_counts_as_missing_as_stated_or_as_usual(reason: str, stated: bool | None, expected: bool) -> None:
    assert counts_as_missing(reason, Rule(evidence="made up", refuse=True, missing=stated)) is expected


def test_a_reason_without_a_rule_counts_as_usual() -> None:
    assert counts_as_missing("not_disclosed", None)
    assert not counts_as_missing("no_debt", None)


def test_an_unknown_field_or_a_wrong_format_is_refused(make_spec: MakeSpec) -> None:
    plain = msgspec.to_builtins(make_spec())
    assert msgspec.convert(plain, ModelSpec) == make_spec()
    for change in ({"surprise": 1}, {"format": "something-else"}, {"version": 2}, {"link": "cloglog"}):
        with pytest.raises(msgspec.ValidationError):
            msgspec.convert({**plain, **change}, ModelSpec)
