"""The result as JSON: its keys, its numbers to the last bit, its blanks, the same bytes for the same standing."""

import json
from dataclasses import replace
from typing import Any

import msgspec
import pytest

from creditdesk.case.assess import assess
from creditdesk.case.document import Case
from creditdesk.case.result import result, result_bytes
from creditdesk.house.book import with_model
from creditdesk.model.spec import Calibration
from tests.borrowers import STRETCHED, case_of, demo, generated, shipped_house, with_spec
from tests.statements.books import CLEAN, without, year

HOUSE = shipped_house()
NUMBER, TEXT, FLAG = (float,), (str,), (bool,)
MAYBE = (float, type(None))

# What a script may rely on: each key with the types its value may have; there may be more keys.
TOP: dict[str, Any] = {
    "format": TEXT, "version": (int,), "obligor": TEXT, "period": TEXT, "assessed_on": TEXT, "pd_runs_from": TEXT,
    "model": {"name": TEXT, "version": TEXT, "digest": TEXT, "link": TEXT, "reading": TEXT},
    "ratios": (dict,),
    "reference": {"text": TEXT, "score": NUMBER, "pd_model": MAYBE},
    "factors": [{
        "key": TEXT, "ratio": TEXT, "value": MAYBE, "treated": MAYBE, "log_odds": MAYBE, "pd_share": MAYBE,
        "capped": FLAG,
        "terms": [{"name": TEXT, "value": NUMBER, "coefficient": NUMBER, "reference": NUMBER}],
    }],
    "score": MAYBE, "pd_model": MAYBE, "pd_calibrated": MAYBE,
    "pd_interval": {"on": TEXT, "level": NUMBER, "low": NUMBER, "high": NUMBER},
    "pd_judged": MAYBE, "pd": MAYBE, "pd_final": MAYBE,
    "grade": {"model": TEXT, "judged": TEXT, "final": TEXT, "reasons": [TEXT]},
    "reasons": [TEXT],
    "second_opinions": [{"name": TEXT, "score": MAYBE, "reading": TEXT, "pd": MAYBE}],
    "findings": [{"code": TEXT, "severity": TEXT, "place": TEXT, "text": TEXT}],
    "cautions": [TEXT],
}  # fmt: skip

CASES: dict[str, tuple[Case, str]] = {
    "sound": (demo(), ""),
    "stretched": (demo(STRETCHED), ""),
    "no score": (case_of({"cash": 1.0}), ""),
    "no depreciation": (case_of(without(CLEAN, "depreciation_amortisation")), ""),
    "discriminant": (demo(), "altman-1983-z1"),
    "probit": (demo(), "zmijewski-1984"),
    "unusable": (case_of(CLEAN | {"cash": 50_000.0}), ""),
}


def fitting(value: Any, shape: Any, place: str) -> None:  # noqa: ANN401  any JSON value
    if isinstance(shape, dict):
        assert isinstance(value, dict), place
        assert value.keys() >= shape.keys(), place
        for key, part in shape.items():
            fitting(value[key], part, f"{place}.{key}")
    elif isinstance(shape, list):
        assert isinstance(value, list), place
        for number, part in enumerate(value):
            fitting(part, shape[0], f"{place}[{number}]")
    else:
        assert type(value) in shape, f"{place}: {value!r}"


def read_back(case: Case, model: str = "") -> dict[str, Any]:
    read: dict[str, Any] = json.loads(result_bytes(assess(case, HOUSE, model)))
    return read


@pytest.mark.parametrize(("case", "model"), CASES.values(), ids=CASES)
def test_every_key_is_there_with_a_value_of_its_type(case: Case, model: str) -> None:
    found = read_back(case, model)
    shape = TOP if found["pd_interval"] is not None else {**TOP, "pd_interval": (type(None),)}
    fitting(found, shape, "result")
    assert (found["format"], found["version"]) == ("creditdesk-standing", 1)
    assert found["model"]["link"] in {"logit", "probit", "none"}
    assert {one["severity"] for one in found["findings"]} <= {"stop", "query", "note"}
    blank = found["score"] is None
    assert all((factor["log_odds"] is None) is blank for factor in found["factors"])


def test_the_interval_is_there_exactly_where_the_model_has_a_covariance_and_a_score() -> None:
    assert [read_back(*one)["pd_interval"] is None for one in CASES.values()] == [
        False, False, True, False, True, True, False,
    ]  # fmt: skip


def test_numbers_are_the_standing_s_own_to_the_last_bit() -> None:
    for case in generated(40, seed=11):
        standing = assess(case, HOUSE)
        found = json.loads(result_bytes(standing))
        for name in ("score", "pd_model", "pd_calibrated", "pd_judged", "pd", "pd_final"):
            assert found[name] == getattr(standing, name), name
        for factor, own in zip(found["factors"], standing.factors, strict=True):
            assert (factor["value"], factor["log_odds"], factor["missing"]) == (own.value, own.log_odds, own.reason)
            assert [term["value"] for term in factor["terms"]] == [term.value for term in own.terms]
        for key, row in found["ratios"].items():
            for period, cell in enumerate(row.values()):
                reason = standing.ratios.reason(key, period).key
                expected = standing.ratios.value(key, period) if reason == "value" else reason
                assert (cell["missing"] if isinstance(cell, dict) else cell) == expected


def test_each_step_of_the_chain_stands_under_its_own_key() -> None:
    """With a calibration, a floor and a rule in force no two of them are equal."""
    settings = msgspec.structs.replace(HOUSE.settings, pd_floor=0.02)
    house = replace(with_spec(HOUSE, calibration=Calibration("intercept_and_slope", intercept=-1.0)), settings=settings)
    standing = assess(case_of(country="DE"), house)
    found = json.loads(result_bytes(standing))
    names = ("pd_model", "pd_calibrated", "pd", "pd_final")
    assert len({found[name] for name in names}) == len(names)
    assert found["pd_judged"] == found["pd_calibrated"]
    assert [found[name] for name in names] == [getattr(standing, name) for name in names]
    assert found["grade"] == {
        "model": "6",
        "judged": "6",
        "final": "8",
        "reasons": list(standing.grade.reasons),
    }


def test_a_ratio_without_a_value_says_why_and_what_it_needs() -> None:
    found = read_back(case_of(without(CLEAN, "depreciation_amortisation")))["ratios"]
    assert found["debt_to_ebitda"]["2025-12-31"] == {
        "missing": "not_disclosed",
        "needs": ["depreciation_amortisation"],
    }
    assert found["revenue_growth"]["2024-12-31"] == {"missing": "needs_prior_period"}


def test_of_two_accounts_of_one_year_the_restated_one_s_ratios_stand() -> None:
    """Whatever their order, and the same one that would be assessed."""
    years = (year(2024), year(2024, restated=True), year(2025))
    for order in ((0, 1, 2), (1, 0, 2)):
        rows = {key: [amount] * 3 for key, amount in CLEAN.items()} | {"inventories": [3_650.0, 3_000.0, 3_650.0]}
        figures = {key: [row[index] for index in order] for key, row in rows.items()}
        case = case_of(figures, periods=[years[index] for index in order])
        found = read_back(case)
        assert list(found["ratios"]["quick_ratio"]) == ["2024-12-31", "2025-12-31"]
        current = (1_100 + 4_200 + 310 + 240) / 6_800
        assert found["ratios"]["quick_ratio"]["2024-12-31"] == pytest.approx(current)
        days = found["ratios"]["inventory_days"]
        assert days["2024-12-31"] == pytest.approx(3_000 / 15_000 * 365)
        assert days["2025-12-31"] == pytest.approx(3_650 / 15_000 * 365)
        assert len(found["past"]) == 2


def test_equal_standings_give_equal_bytes_and_every_part_of_the_case_counts() -> None:
    case = demo(STRETCHED)
    first = result_bytes(assess(case, HOUSE))
    assert result_bytes(assess(demo(STRETCHED), HOUSE)) == first
    turned = msgspec.structs.replace(case, figures=dict(reversed(case.figures.items())))
    assert result_bytes(assess(turned, HOUSE)) == first
    other = msgspec.structs.replace(case, obligor=msgspec.structs.replace(case.obligor, name="Tarnside Casting Ltd"))
    assert result_bytes(assess(other, HOUSE)) != first


def test_the_bytes_are_utf8_with_a_line_end_and_no_escapes() -> None:
    case = msgspec.structs.replace(demo(), obligor=msgspec.structs.replace(demo().obligor, name="Grünmühle – Söhne"))
    data = result_bytes(assess(case, HOUSE))
    assert "Grünmühle – Söhne".encode() in data
    assert data.endswith(b"}\n")
    assert b"NaN" not in data


def test_what_is_no_number_never_gets_into_json() -> None:
    standing = replace(assess(demo(), HOUSE), pd=float("nan"))
    with pytest.raises(ValueError, match="not JSON compliant"):
        result_bytes(standing)


def test_a_model_from_elsewhere_is_told_by_its_digest() -> None:
    house = with_spec(HOUSE, intercept=-4.0)
    own = with_model(house, replace(house.models["northlight-sme"], digest="sha256:own"))
    assert result(assess(demo(), own))["model"]["digest"] == "sha256:own"
    assert result(assess(demo(), own))["house"]["digest"] == HOUSE.digest
