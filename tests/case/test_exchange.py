import math
from collections.abc import Callable
from dataclasses import dataclass
from datetime import date

import msgspec
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from creditdesk.base.errors import Refusal, UserError
from creditdesk.case.document import TEXT_BLOCKS, Assessment, Case, Obligor, Rates
from creditdesk.case.exchange import read_case, write_case
from creditdesk.case.wire import case_digest
from creditdesk.scenario.marks import Scenario
from creditdesk.statements.adjust import Adjustment, AdjustmentKind, Entry
from creditdesk.statements.chart import Chart
from creditdesk.statements.period import Basis, Framework, Opinion, Period, Presentation
from tests.pencils import marksets

SMALL = """format = "creditdesk-case"
version = 1
[obligor]
name = "Fellgate Castings Ltd (invented)"
legal_form = "company"
country = "GB"
sector = "C"
currency = "GBP"
unit = 1000
[[periods]]
ends = 2024-12-31
months = 12
basis = "audited"
presentation = "by_function"
[[periods]]
ends = 2025-12-31
months = 12
basis = "audited"
presentation = "by_function"
[figures]
revenue = [41250, 43900]
goodwill = [nan, nan]
"""


@dataclass(frozen=True)
class Reader:
    chart: Chart

    def faults(self, text: str) -> tuple[str, ...]:
        with pytest.raises(UserError) as caught:
            read_case(text.encode(), self.chart, file="a.case.toml")
        assert caught.value.exit_code == 3
        return caught.value.faults

    def fault(self, text: str) -> str:
        (fault,) = self.faults(text)
        return fault.removeprefix("a.case.toml: ")


@pytest.fixture
def reader(chart: Chart) -> Reader:
    return Reader(chart)


def test_reads_blank_as_blank_and_nil_as_nil(chart: Chart) -> None:
    case = read_case(SMALL.replace("[41250", "[0").encode(), chart, file="a")
    assert case.figures["revenue"] == (0.0, 43900.0)
    assert all(map(math.isnan, case.figures["goodwill"]))
    assert "cash" not in case.figures
    assert case.assessment == Assessment(None, None)


def test_nil_has_no_sign(chart: Chart) -> None:
    plain, signed = (read_case(SMALL.replace("[41250", nil).encode(), chart, file="a") for nil in ("[0", "[-0.0"))
    assert case_digest(plain) == case_digest(signed)


def test_round_trip_gives_the_equal_case_and_the_same_bytes(case: Case, chart: Chart) -> None:
    data = write_case(case, chart)
    back = read_case(data, chart, file="a")
    assert back == case
    assert write_case(back, chart) == data


def test_whole_amounts_are_written_as_integers_and_blanks_as_nan(case: Case, chart: Chart) -> None:
    text = write_case(case, chart).decode()
    assert "cash = [ 100, 120.5 ]\n" in text
    assert "goodwill = [ nan, nan ]\n" in text
    assert "[obligor.rates]\ndate = 2025-12-31\nEUR = 1.15\nUSD = 1.34\n" in text
    assert 'revenue = [ "", "41250+2650" ]\n' in text


def test_rows_stand_in_the_order_of_the_chart(case: Case, chart: Chart) -> None:
    shuffled = msgspec.structs.replace(case, figures=dict(reversed(case.figures.items())))
    assert write_case(shuffled, chart) == write_case(case, chart)
    assert list(read_case(write_case(case, chart), chart, file="a").figures)[:2] == ["cash", "trade_receivables"]


words = st.text(st.characters(exclude_categories=("Cs", "Cc"), include_characters="\n\t\r"), max_size=30)
amounts = (
    st.just(math.nan) | st.integers(-(10**15), 10**15).map(float) | st.floats(allow_nan=False, allow_infinity=False)
)
moments = st.dates(date(1990, 1, 1), date(2040, 1, 1))


@st.composite
def cases(draw: st.DrawFn, keys: tuple[str, ...]) -> Case:
    ends = sorted(draw(st.lists(moments, min_size=1, max_size=8, unique=True)))
    rows = st.lists(amounts, min_size=len(ends), max_size=len(ends)).map(
        lambda row: tuple(math.nan if math.isnan(cell) else cell + 0.0 for cell in row)
    )
    notes = st.lists(words, min_size=len(ends), max_size=len(ends)).filter(any).map(tuple)
    gap = draw(st.integers(-(10**9), 10**9).map(float))
    return Case(
        obligor=Obligor(
            name=draw(words.filter(str.strip)),
            legal_form=draw(st.sampled_from(["company", "public_body"])),
            country=draw(st.sampled_from(["GB", "DE", "XK"])),
            sector="C",
            currency="GBP",
            unit=draw(st.sampled_from([1, 1000, 1_000_000])),
            rates=draw(st.none() | st.builds(Rates, moments, st.just({"EUR": 1.15}))),
        ),
        periods=tuple(
            Period(
                end,
                draw(st.integers(1, 24)),
                draw(st.sampled_from(Basis)),
                draw(st.sampled_from(Presentation)),
                opinion=draw(st.none() | st.sampled_from(Opinion)),
                framework=draw(st.none() | st.sampled_from(Framework)),
                going_concern_doubt=draw(st.booleans()),
            )
            for end in ends
        ),
        figures=draw(st.dictionaries(st.sampled_from(keys), rows, max_size=6)),
        assessment=draw(st.builds(Assessment, st.none() | moments, st.none() | st.sampled_from(ends))),
        printed=draw(st.dictionaries(st.just("total_assets"), rows)),
        adjustments=tuple(
            Adjustment(AdjustmentKind.RESTATE, end, (Entry("cash", gap), Entry("share_capital", gap)), "because")
            for end in ends[:1]
        ),
        notes=draw(st.dictionaries(st.sampled_from(keys), notes, max_size=2)),
        texts=draw(st.dictionaries(st.sampled_from(list(TEXT_BLOCKS)), words, max_size=3)),
        scenarios=tuple(
            Scenario(f"Case {number}", marks, rationale=draw(words), in_memo=draw(st.booleans()))
            for number, marks in enumerate(draw(st.lists(marksets, max_size=2)))
        ),
    )


@given(st.data())
@settings(max_examples=150, suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow])
def test_every_sound_case_survives_the_round_trip(chart: Chart, data: st.DataObject) -> None:
    case = data.draw(cases(tuple(item.key for item in chart.lines)))
    written = write_case(case, chart)
    back = read_case(written, chart, file="a")
    assert case_digest(back) == case_digest(case)
    assert write_case(back, chart) == written


REFUSED = {
    "unknown key": (
        lambda text: text + '[obligorr]\nname = "x"\n',
        'obligorr: found unknown key "obligorr", allowed a known key; nearest known name: obligor',
    ),
    "wrong type": (
        lambda text: text.replace("[nan, nan]", '["a", 1]'),
        'figures.goodwill[0]: found "a", allowed a number',
    ),
    "short list": (
        lambda text: text.replace("[nan, nan]", "[1]"),
        "figures.goodwill: found a list of 1, allowed a list of 2, one for each period",
    ),
    "unknown line": (
        lambda text: text.replace("goodwill", "godwill"),
        'figures.godwill: found unknown line item "godwill", allowed a line item of the chart of accounts'
        "; nearest known name: goodwill",
    ),
    "total among the lines": (
        lambda text: text + "total_assets = [1, 2]\n",
        "figures.total_assets: found the total total_assets, allowed it in [printed] only",
    ),
    "line among the totals": (
        lambda text: text + "[printed]\ncash = [1, 2]\n",
        "printed.cash: found the line item cash, allowed it in [figures] only",
    ),
    "without end": (
        lambda text: text.replace("43900", "inf"),
        "figures.revenue[1]: found inf, allowed a number, or nan for not disclosed",
    ),
    "true as amount": (lambda text: text.replace("43900", "true"), "figures.revenue[1]: found true, allowed a number"),
    "date with time": (
        lambda text: text.replace("2024-12-31", "2024-12-31T00:00:00"),
        "periods[0].ends: found 2024-12-31T00:00:00, allowed a date such as 2025-12-31",
    ),
    "date as text": (
        lambda text: text.replace("2024-12-31", '"2024-12-31"'),
        'periods[0].ends: found "2024-12-31", allowed a date such as 2025-12-31',
    ),
    "months": (
        lambda text: text.replace("months = 12", "months = 25", 1),
        "periods[0].months: found 25, allowed 1 to 24",
    ),
    "unit": (
        lambda text: text.replace("unit = 1000", "unit = 100"),
        "obligor.unit: found 100, allowed 1 or 1000 or 1000000",
    ),
    "country": (
        lambda text: text.replace('"GB"', '"gb"'),
        'obligor.country: found "gb", allowed an ISO 3166-1 alpha-2 code such as GB; nearest known name: GB',
    ),
    "currency": (
        lambda text: text.replace('"GBP"', '"STG"'),
        'obligor.currency: found "STG", allowed an ISO 4217 code such as GBP',
    ),
    "sector": (
        lambda text: text.replace('sector = "C"', 'sector = "V"'),
        'obligor.sector: found "V", allowed a section letter A to U of ISIC4',
    ),
    "lei": (
        lambda text: text.replace("unit =", 'lei = "999900INVENTED000100"\nunit ='),
        'obligor.lei: found "999900INVENTED000100", allowed 20 characters of ISO 17442 whose check digits agree,'
        " or nothing",
    ),
    "escape in a name": (
        lambda text: text.replace("Fellgate", "\\u001b[2J"),
        r"obligor.name: found the control character '\x1b', allowed readable text",
    ),
    "order": (
        lambda text: text.replace("2024-12-31", "2026-12-31"),
        "periods[1].ends: found 2025-12-31, allowed a date after 2026-12-31, the end of the period before:"
        " oldest first",
    ),
    "repeated": (
        lambda text: text.replace("2024-12-31", "2025-12-31"),
        "periods[1].ends: found 2025-12-31 a second time, allowed one period per date, or one of them restated",
    ),
    "assessed period": (
        lambda text: text.replace("[figures]", "[assessment]\nperiod = 2023-12-31\n[figures]"),
        "assessment.period: found 2023-12-31, allowed the end of a period: 2024-12-31, 2025-12-31",
    ),
    "text block": (
        lambda text: text + '[texts]\nrecomendation = "x"\n',
        'texts.recomendation: found unknown text block "recomendation", allowed a known text block'
        "; nearest known name: recommendation",
    ),
    "own currency": (
        lambda text: text.replace("[[periods]]", "[obligor.rates]\ndate = 2025-12-31\nGBP = 1.0\n[[periods]]", 1),
        "obligor.rates.GBP: found a rate for the case's own currency, allowed other currencies",
    ),
    "rate of nil": (
        lambda text: text.replace("[[periods]]", "[obligor.rates]\ndate = 2025-12-31\nUSD = 0\n[[periods]]", 1),
        "obligor.rates.USD: found 0, allowed a number above 0",
    ),
    "rate without a date": (
        lambda text: text.replace("[[periods]]", "[obligor.rates]\nUSD = 1.3\n[[periods]]", 1),
        "obligor.rates.date: found nothing, allowed a date: the day the rates stand for",
    ),
    "typed sum": (
        lambda text: text + '[typed]\nrevenue = ["", "41250+2651"]\n',
        'typed.revenue[1]: found "41250+2651" = 43901 beside the figure 43900, allowed a sum that gives the figure',
    ),
    "typed beside a blank": (
        lambda text: text + '[typed]\ngoodwill = ["1+1", ""]\n',
        'typed.goodwill[0]: found "1+1" = 2 beside no figure, allowed a sum that gives the figure',
    ),
    "note on an unknown line": (
        lambda text: text + '[notes]\ncosh = ["", "x"]\n',
        'notes.cosh: found unknown line item "cosh", allowed a line item of the chart of accounts'
        "; nearest known name: cash",
    ),
}


@pytest.mark.parametrize("name", REFUSED)
def test_a_fault_is_named_with_place_found_and_allowed(reader: Reader, name: str) -> None:
    change, expected = REFUSED[name]
    changed = change(SMALL)
    assert changed != SMALL
    assert reader.fault(changed) == expected


def with_adjustment(entries: str, period: str = "2025-12-31", kind: str = "restate") -> str:
    return SMALL + f'[[adjustments]]\nkind = "{kind}"\nperiod = {period}\nentries = [{entries}]\nreason = "because"\n'


LOANS = '{line = "shareholder_loans", amount = -400}'


def test_a_restatement_keeps_the_balance(reader: Reader) -> None:
    read_case(with_adjustment(LOANS + ', {line = "other_reserves", amount = 400}').encode(), reader.chart, file="a")
    assert reader.fault(with_adjustment(LOANS)) == (
        "adjustments[0].entries: found entries that move assets by 400 more than liabilities and equity"
        ", allowed entries that keep assets = liabilities + equity"
    )


def test_a_normalisation_leaves_the_balance_sheet_alone(reader: Reader) -> None:
    read_case(with_adjustment('{line = "revenue", amount = -400}', kind="normalise").encode(), reader.chart, file="a")
    fault = reader.fault(with_adjustment(LOANS, kind="normalise"))
    place, _, allowed = fault.partition(": found shareholder_loans, allowed ")
    assert place == "adjustments[0].entries[0].line"
    assert "income statement" in allowed


def test_adjustments_name_known_lines_and_periods(reader: Reader) -> None:
    assert reader.faults(with_adjustment('{line = "shareholder_loan", amount = 1}', "2022-12-31")) == (
        "a.case.toml: adjustments[0].period: found 2022-12-31, allowed the end of a period: 2024-12-31, 2025-12-31",
        'a.case.toml: adjustments[0].entries[0].line: found unknown line item "shareholder_loan", allowed a line item'
        " of the chart of accounts; nearest known name: shareholder_loans",
    )
    assert reader.fault(with_adjustment("")) == (
        "adjustments[0].entries: found an empty list, allowed at least one entry"
    )


def test_periods_are_one_to_eight(reader: Reader) -> None:
    head, _, rest = SMALL.partition("[[periods]]")
    none = f"{head.replace('[obligor]', 'periods = []' + chr(10) + '[obligor]')}"
    assert reader.fault(none) == "periods: found no period, allowed 1 to 8 periods"
    block = 'ends = {}-12-31\nmonths = 12\nbasis = "audited"\npresentation = "by_function"\n'
    nine = head + "".join("[[periods]]\n" + block.format(year) for year in range(2017, 2026))
    assert reader.fault(nine) == "periods: found 9 periods, allowed 1 to 8 periods"
    assert rest


def test_a_repeated_period_is_fine_where_one_is_restated(chart: Chart) -> None:
    twice = SMALL.replace("2024-12-31", "2025-12-31").replace("[figures]", "restated = true\n[figures]")
    assert len(read_case(twice.encode(), chart, file="a").periods) == 2


def test_all_faults_come_at_once(reader: Reader) -> None:
    text = SMALL.replace("goodwill = [nan, nan]", "goodwill = [1]\ninventoris = [1, 2]").replace('"GB"', "5")
    places = [line.split(": ")[1] for line in reader.faults(text)]
    assert sorted(places) == ["figures.goodwill", "figures.inventoris", "obligor.country"]


@pytest.mark.parametrize(
    ("text", "code", "part"),
    [
        ("", "not_a_case", "found an empty file"),
        ("a = 1", "not_a_case", "found no format"),
        ('format = "creditdesk-model"', "not_a_case", 'format "creditdesk-model"'),
        (SMALL.replace("version = 1", "version = 99"), "case_version", "written by a newer version"),
        (SMALL.replace("version = 1", "version = 0"), "case_version", "unknown version"),
        (SMALL.replace("version = 1", 'version = "1"'), "faults", 'version: found "1", allowed 1'),
        ("\x00\x01\x02[[[", "not_toml", "line 1, column 1"),
    ],
    ids=["empty", "no format", "model", "newer", "older", "version as text", "binary"],
)
def test_what_is_no_case_of_this_version_is_refused_at_once(chart: Chart, text: str, code: str, part: str) -> None:
    with pytest.raises(UserError) as caught:
        read_case(text.encode(), chart, file="a.case.toml")
    assert (caught.value.code, caught.value.exit_code) == (code, 3)
    assert part in caught.value.faults[0]


@pytest.mark.parametrize("form", ["natural_person", "sole_trader", "partnership_of_individuals"])
def test_natural_persons_are_refused_with_the_reason(chart: Chart, form: str) -> None:
    text = SMALL.replace('"company"', f'"{form}"').replace("[41250", '["faulty"')
    with pytest.raises(Refusal) as caught:
        read_case(text.encode(), chart, file="a.case.toml")
    assert caught.value.exit_code == 1
    assert "natural person" in caught.value.faults[0]
    assert "local law" in caught.value.faults[0]


junk = st.recursive(
    st.booleans() | st.integers() | st.floats() | st.text(max_size=5) | st.dates(),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=5), inner, max_size=3),
    max_leaves=8,
)
Change = Callable[[dict[str, object], object], None]
PLACES: tuple[Change, ...] = (
    lambda raw, value: raw.__setitem__("obligor", value),
    lambda raw, value: raw.__setitem__("periods", value),
    lambda raw, value: raw["periods"].__setitem__(0, value),  # type: ignore[attr-defined]
    lambda raw, value: raw["periods"][1].__setitem__("ends", value),  # type: ignore[index]
    lambda raw, value: raw["figures"].__setitem__("revenue", value),  # type: ignore[attr-defined]
    lambda raw, value: raw.__setitem__("adjustments", value),
    lambda raw, value: raw.__setitem__("adjustments", [{"kind": "restate", "entries": value}]),
    lambda raw, value: raw.__setitem__("typed", value),
    lambda raw, value: raw.__setitem__("typed", {"revenue": value}),
    lambda raw, value: raw.__setitem__("notes", value),
    lambda raw, value: raw.__setitem__("texts", value),
    lambda raw, value: raw["obligor"].__setitem__("rates", value),  # type: ignore[attr-defined]
    lambda raw, value: raw["obligor"].__setitem__("unit", value),  # type: ignore[attr-defined]
)


@given(st.sampled_from(PLACES), junk)
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_nothing_in_any_place_breaks_the_reader(chart: Chart, change: Change, value: object) -> None:
    """A value of any kind in any place gives a case or faults of this file, one line each."""
    import tomllib

    import tomli_w

    raw = tomllib.loads(SMALL)
    change(raw, value)
    try:
        read_case(tomli_w.dumps(raw).encode(), chart, file="a.case.toml")
    except UserError as error:
        faults = error.faults
    else:
        faults = ("a.case.toml: ",)
    assert faults
    assert all(line.startswith("a.case.toml: ") and line.isprintable() for line in faults)
