"""The catalogue's file: what is refused, with every fault and its place; what the shipped one holds."""

import msgspec
import pytest

from creditdesk.base.errors import UserError
from creditdesk.ratios.catalogue import compile_catalogue
from creditdesk.ratios.spec import RatioFile, RatioGroup, RatioSpec, SecondFormula
from creditdesk.statements.chart import Chart, Subtotal
from creditdesk.statements.period import Presentation
from tests.ratios.ledger import shipped_catalogue, shipped_chart, shipped_file

GROUPS = (RatioGroup("main", "Main"),)
GOOD: dict[str, object] = {
    "key": "mine",
    "label": "Mine",
    "group": "main",
    "unit": "percent",
    "direction": "neither",
    "numerator": "total_equity",
    "denominator": "total_assets",
    "definition": "A ratio of a test.",
    "source": "made up",
}


def _spec(**changes: object) -> RatioSpec:
    return msgspec.convert({**GOOD, **changes}, RatioSpec)


def _faults(*specs: RatioSpec) -> list[str]:
    with pytest.raises(UserError) as caught:
        compile_catalogue(RatioFile(GROUPS, specs), shipped_chart())
    assert caught.value.code == "catalogue"
    return list(caught.value.faults)


@pytest.mark.parametrize(
    ("changes", "place", "said"),
    [
        ({"numerator": "total_equty"}, "ratios.mine.numerator: column 1", "total_equity"),
        ({"denominator": "total_assets +"}, "ratios.mine.denominator: column", "something must follow"),
        ({"numerator": "cash.real"}, "ratios.mine.numerator: column 1", "attribute"),
        ({"numerator": "total_equity > 0"}, "ratios.mine.numerator: column 1", "condition"),
        ({"must_be_positive": ["total_asets"]}, "ratios.mine.must_be_positive: column 1", "total_assets"),
        ({"numerator": "annual(total_equity)"}, "ratios.mine.numerator", "annual(total_equity), but"),
        ({"denominator": "average(revenue)"}, "ratios.mine.denominator", "allowed in average: balances"),
        ({"numerator": "annual(prior(net_profit))"}, "ratios.mine.numerator", "annual(change(x))"),
        ({"numerator": "change(unit)"}, "ratios.mine.numerator", "lines and subtotals"),
        ({"numerator": "net_profit"}, "ratios.mine", "found the flow net_profit beside"),
        ({"numerator": "net_profit", "denominator": "annual(revenue)"}, "ratios.mine", "found the flow net_profit"),
        ({"numerator": "net_profit", "denominator": "prior(net_profit)"}, "ratios.mine", "prior(annual(net_profit))"),
        ({"numerator": "change(cash)", "denominator": "annual(revenue)"}, "ratios.mine", "found the flow cash"),
        ({"group": "other"}, "ratios.mine.group", "allowed: main"),
        ({"key": "Mine"}, "ratios.Mine", "small letters"),
        ({"key": "cash"}, "ratios.cash", "key of a line"),
        ({"key": "prior"}, "ratios.prior", "a function"),
        ({"factor": 0.0}, "ratios.mine.factor", "other than 0"),
        ({"plausible_low": 2.0, "plausible_high": 1.0}, "ratios.mine.plausible_low", "below plausible_high"),
        ({"unit": "yes_no"}, "ratios.mine", "one comparison alone"),
        ({"by_nature": {"note": "x"}}, "ratios.mine.by_nature", "found no formula"),
        ({"otherwise": {"note": "x", "denominator": "tota"}}, "ratios.mine.otherwise.denominator", "unknown name"),
        (
            {"by_nature": {"note": "x", "denominator": "cash"}, "presentation": "by_nature"},
            "ratios.mine.by_nature",
            "one of the two",
        ),
    ],
)
def test_a_fault_is_refused_with_its_place(changes: dict[str, object], place: str, said: str) -> None:
    (fault,) = _faults(_spec(**changes))
    assert fault.startswith(place)
    assert said in fault


def test_all_faults_of_a_file_come_at_once() -> None:
    faults = _faults(
        _spec(key="one", numerator="total_equty", denominator="total_asset", group="none"),
        _spec(key="two", factor=0.0),
        _spec(key="two"),
    )
    places = [fault.split(": ", 1)[0] for fault in faults]
    assert places == [
        "ratios.two",
        "ratios.one.group",
        "ratios.two.factor",
        "ratios.one.numerator",
        "ratios.one.denominator",
    ]


def test_a_guard_shared_by_two_formulas_is_named_once() -> None:
    second = SecondFormula(note="x", denominator="non_current_assets")
    spec = msgspec.structs.replace(_spec(must_be_positive=["nothing"]), otherwise=second)
    assert len(_faults(spec)) == 1


@pytest.mark.parametrize(
    "changes",
    [
        {"numerator": "mine + cash", "denominator": ""},
        {"numerator": "mine", "denominator": "total_assets"},
        {"numerator": "cash", "denominator": "mine"},
        {"numerator": "mine", "denominator": "", "no_debt": True},
    ],
)
def test_a_ratio_stands_beside_ratios_alone(changes: dict[str, object]) -> None:
    faults = _faults(_spec(), _spec(key="other", **changes))
    assert all("found the ratio mine beside" in fault for fault in faults)


def test_combinations_are_not_combined_again() -> None:
    faults = _faults(
        _spec(),
        _spec(key="twice", numerator="mine + mine", denominator=""),
        _spec(key="x", numerator="twice", denominator=""),
    )
    assert faults == ["ratios.x: found twice; allowed: ratios that combine no others"]


def test_reasons_of_debt_need_a_chart_that_has_debt() -> None:
    bare = Chart(shipped_chart().groups, shipped_chart().lines, tuple(t for t in _sums() if "debt" not in t.key))
    with pytest.raises(UserError) as caught:
        compile_catalogue(RatioFile(GROUPS, (_spec(numerator="cash", denominator="inventories", no_debt=True),)), bare)
    assert caught.value.faults == (
        "ratios.mine.no_debt: found true; allowed: only where the chart of accounts has interest_bearing_debt",
    )


def _sums() -> tuple[Subtotal, ...]:
    return shipped_chart().subtotals


def test_the_file_refuses_unknown_fields() -> None:
    with pytest.raises(msgspec.ValidationError, match="unknown field"):
        _spec(denominater="cash")


def test_every_shipped_ratio_is_described() -> None:
    for spec in shipped_file().ratios:
        assert spec.definition.endswith(".")
        assert spec.source
        assert len(spec.definition) < 200


def test_shipped_margins_know_their_layout() -> None:
    layouts = {spec.key: spec.presentation for spec in shipped_catalogue().specs if spec.presentation}
    assert layouts == {"gross_margin": Presentation.BY_FUNCTION, "materials_margin": Presentation.BY_NATURE}


def test_what_the_shipped_models_of_others_need_is_there() -> None:
    needed = """
        working_capital_to_assets retained_earnings_to_assets ebit_to_assets market_equity_to_liabilities
        book_equity_to_liabilities asset_turnover log_assets total_liabilities_to_assets
        current_liabilities_to_current_assets liabilities_exceed_assets net_profit_to_assets
        funds_from_operations_to_liabilities loss_in_both_years change_in_net_profit current_ratio
        profit_before_tax_to_current_liabilities
    """
    assert set(needed.split()) <= set(shipped_catalogue().keys)
