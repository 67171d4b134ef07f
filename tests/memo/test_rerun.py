"""The re-run from a memo's attachments: what counts as the same, what as different, and what cannot be run."""

import json
import math
import zipfile
from collections.abc import Callable, Iterator, Mapping
from functools import cache
from io import BytesIO
from typing import Any

import msgspec
import pytest

from creditdesk.case.assess import assess
from creditdesk.case.document import Case, ModelChoice
from creditdesk.case.exchange import write_case
from creditdesk.case.result import result_bytes
from creditdesk.case.what_if import work_out
from creditdesk.house.book import HouseBook, with_model
from creditdesk.house.load import model_from_bytes
from creditdesk.house.pack import FILE_LIMIT, SIZE_LIMIT, pack
from creditdesk.memo.parts import CASE, HOUSE_BOOK, LEAD_MODEL, RESULT
from creditdesk.memo.rerun import TOLERANCE, _differences, rerun
from tests.borrowers import LEAD, SOUND, STRETCHED, case_of, demo, intercept_as_written, shipped_house
from tests.pencils import with_studies

HOUSE = shipped_house()
INTERCEPT = intercept_as_written()
Parts = dict[str, bytes]


def parts_of(case: Case, house: HouseBook = HOUSE) -> Parts:
    """Return what a memo of ``case`` carries."""
    asked = work_out(case, house)
    return {
        CASE: write_case(case, house.chart),
        RESULT: result_bytes(asked.ink, asked),
        HOUSE_BOOK: pack(house.files),
    }


@cache
def sound() -> Mapping[str, bytes]:
    return parts_of(demo(SOUND))


def with_result(change: Callable[[dict[str, Any]], object]) -> Parts:
    """Return the parts of the sound case with its recorded result changed in place."""
    recorded = json.loads(sound()[RESULT])
    change(recorded)
    return {**sound(), RESULT: json.dumps(recorded).encode()}


def own_model(intercept: str) -> bytes:
    """Return the shipped model under another name and with another intercept."""
    text = HOUSE.files[f"models/{LEAD}.toml"].decode()
    return text.replace(f'name = "{LEAD}"', 'name = "own"').replace(INTERCEPT, intercept).encode()


def numbers_in(value: Any, steps: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:  # noqa: ANN401  any JSON value
    """List the way to every number of a result."""
    if isinstance(value, float):
        yield steps
    elif isinstance(value, dict | list):
        for step, part in value.items() if isinstance(value, dict) else enumerate(value):
            yield from numbers_in(part, (*steps, step))


# ---------------------------------------------------------------------------------------------------- the same


@pytest.mark.parametrize(
    "case",
    [demo(SOUND), demo(STRETCHED), case_of({"cash": 1.0}), case_of()],
    ids=["sound", "stretched", "blank", "own"],
)
def test_what_was_assessed_is_assessed_the_same_again(case: Case) -> None:
    again = rerun(parts_of(case))
    assert (again.answer, again.largest_difference, again.problems) == ("equal", 0.0, ())


def test_noise_of_another_machine_s_arithmetic_is_the_same_and_is_measured() -> None:
    again = rerun(with_result(lambda result: result.update(pd_final=result["pd_final"] * (1 + 1e-12))))
    assert (again.answer, again.problems) == ("equal", ())
    assert again.largest_difference == pytest.approx(1e-12, rel=1e-3)


def test_numbers_may_be_written_as_whole_or_with_a_fraction() -> None:
    assert rerun(with_result(lambda result: result.update(version=1.0))).answer == "equal"


def test_a_memo_made_before_scenarios_were_told_is_assessed_as_it_was() -> None:
    old = {**sound(), RESULT: result_bytes(assess(demo(SOUND), HOUSE))}
    assert "scenarios" not in json.loads(old[RESULT])
    again = rerun(old)
    assert (again.answer, again.largest_difference) == ("equal", 0.0)


@cache
def studied() -> Mapping[str, bytes]:
    return parts_of(with_studies(demo(SOUND), draws=2_000))


def test_studies_chosen_for_the_memo_are_run_again() -> None:
    recorded = json.loads(studied()[RESULT])
    assert [one["study"] for one in recorded["studies"]] == ["grid", "break_even", "reach", "simulation"]
    assert rerun(studied()).answer == "equal"


@pytest.mark.parametrize(
    ("study", "found", "factor", "answer"),
    [
        ("simulation", "mean", 1 + 1e-8, "different"),
        ("reach", "cost", 1 + 1e-8, "equal"),  # a search may end a little elsewhere on another machine
        ("reach", "cost", 1 + 1e-5, "different"),
        ("break_even", "start", 1 + 1e-8, "different"),
    ],
)
def test_a_study_s_result_counts(study: str, found: str, factor: float, answer: str) -> None:
    recorded = json.loads(studied()[RESULT])
    (one,) = (one for one in recorded["studies"] if one["study"] == study)
    assert one[study][found]
    one[study][found] *= factor
    assert rerun({**studied(), RESULT: json.dumps(recorded).encode()}).answer == answer


# ---------------------------------------------------------------------------------------------------- different

CHANGES: dict[str, tuple[Callable[[dict[str, Any]], object], str]] = {
    "a PD by 1e-8": (lambda one: one.update(pd_final=one["pd_final"] * (1 + 1e-8)), "pd_final: recorded "),
    "a score by 1e-8": (lambda one: one.update(score=one["score"] * (1 - 1e-8)), "score: recorded "),
    "a contribution": (lambda one: one["factors"][2].update(log_odds=0.0), "factors[2].log_odds: recorded 0.0"),
    "a ratio": (lambda one: one["ratios"]["equity_ratio"].update({"2024-12-31": 0.5}), "ratios.equity_ratio.2024"),
    "a reason for no value": (
        lambda one: one["ratios"]["revenue_growth"]["2023-12-31"].update(missing="no_debt"),
        "ratios.revenue_growth.2023-12-31.missing: recorded 'no_debt', re-run 'needs_prior_period'",
    ),
    "a grade": (lambda one: one["grade"].update(final="3"), "grade.final: recorded '3', re-run '4'"),
    "a caution left out": (lambda one: one["cautions"].pop(), "cautions: recorded a list of"),
    "a finding's weight": (lambda one: one["findings"][0].update(severity="note "), "findings[0].severity: recorded"),
    "a letter of a name": (lambda one: one.update(obligor="Brackwater Millworks Ltd."), "obligor: recorded"),
    "a number made blank": (lambda one: one.update(pd=None), "pd: recorded None, re-run 0."),
    "a number made text": (lambda one: one.update(pd=str(one["pd"])), "pd: recorded '0."),
    "a flag made a number": (lambda one: one.update(usable=1), "usable: recorded 1.0, re-run True"),
    "a value made a table": (lambda one: one.update(score={"a": 1}), "score: recorded a table of 1, re-run -5."),
    "a key left out": (lambda one: one.pop("pd_interval"), "pd_interval: only the re-run gives it"),
    "a key put in": (lambda one: one.update(approved=True), "approved: only recorded"),
    "a scenario's PD by 1e-8": (
        lambda one: one["scenarios"][0].update(pd=one["scenarios"][0]["pd"] * (1 + 1e-8)),
        "scenarios[0].pd: recorded ",
    ),
    "a step of a scenario": (
        lambda one: one["scenarios"][0]["steps"][1].update(after=1.0),
        "scenarios[0].steps[1].after: recorded 1.0",
    ),
    "a scenario left out": (lambda one: one["scenarios"].pop(), "scenarios: recorded a list of 2, re-run a list of 3"),
    "a stress event's cover": (
        lambda one: one["stress"][2].update(interest_cover=9.0),
        "stress[2].interest_cover: recorded 9.0",
    ),
    "a judgement": (lambda one: one["stress"][3].update(judgement="None."), "stress[3].judgement: recorded 'None.'"),
    "a number beyond all": (lambda one: one.update(score=10**400), "score: recorded inf, re-run -5."),
}


@pytest.mark.parametrize("change", CHANGES)
def test_a_changed_result_is_different_and_said_where(change: str) -> None:
    made, words = CHANGES[change]
    again = rerun(with_result(made))
    assert again.answer == "different"
    assert len(again.problems) == 1
    assert again.problems[0].startswith(words)
    if "1e-8" in change:
        assert again.largest_difference == pytest.approx(1e-8, rel=1e-3)


def test_every_single_number_counts() -> None:
    recorded = json.loads(sound()[RESULT])
    ways = [steps for steps in numbers_in(recorded) if steps]
    assert len(ways) > 200
    for steps in ways:
        changed, whole = json.loads(sound()[RESULT]), recorded
        place = changed
        for step in steps[:-1]:
            place, whole = place[step], whole[step]
        for factor, same in ((1 + 1e-8, False), (1 + 1e-12, True)):
            place[steps[-1]] = whole[steps[-1]] * factor if whole[steps[-1]] else (0.0 if same else 1e-300)
            largest = max(size for _, size in _differences(changed, recorded, ""))
            assert (largest <= TOLERANCE) is same, steps


def test_a_changed_case_gives_another_result() -> None:
    case = demo(SOUND)
    figures = {**case.figures, "revenue": (38_650.0, 41_250.0, 43_901.0)}
    changed = msgspec.structs.replace(case, figures=figures, typed={})
    again = rerun({**sound(), CASE: write_case(changed, HOUSE.chart)})
    assert again.answer == "different"
    assert all(problem.startswith("ratios.") for problem in again.problems)  # the first of many


def test_a_changed_house_book_gives_another_result() -> None:
    files = {**HOUSE.files, "house.toml": HOUSE.files["house.toml"].replace(b"pd_floor = 0.0005", b"pd_floor = 0.02")}
    again = rerun({**sound(), HOUSE_BOOK: pack(files)})
    assert again.answer == "different"
    assert any(problem.startswith("house.digest: ") for problem in again.problems)
    assert any(problem.startswith("grade.final: ") for problem in again.problems)


def test_many_differences_are_told_in_the_record_s_order_and_cut_short() -> None:
    recorded = json.loads(sound()[RESULT])
    again = rerun(with_result(lambda one: one.update(dict.fromkeys(recorded, f"{'x' * 900} of another"))))
    assert len(again.problems) == 20
    assert [problem.split(":")[0] for problem in again.problems] == list(recorded)[:20]
    assert max(map(len, again.problems)) < 600


# ---------------------------------------------------------------------------------------------- not re-runnable here


@pytest.mark.parametrize("name", [CASE, RESULT, HOUSE_BOOK])
def test_a_missing_attachment_is_named(name: str) -> None:
    again = rerun({key: data for key, data in sound().items() if key != name})
    assert (again.answer, again.largest_difference) == ("impossible", None)
    assert again.problems == (f"The attachment {name} is missing.",)


def test_without_any_attachment_all_are_missing() -> None:
    assert len(rerun({}).problems) == 3


def zip_of(files: Mapping[str, bytes], kind: int = zipfile.ZIP_STORED) -> bytes:
    target = BytesIO()
    with zipfile.ZipFile(target, "w", kind) as archive:
        for name, data in files.items():
            archive.writestr(name, data)
    return target.getvalue()


SPOILED: dict[str, tuple[str, Callable[[], bytes], str]] = {
    "no JSON": (RESULT, lambda: b"{", "not JSON"),
    "no text": (RESULT, lambda: b"\xff\xfe\xfd", "not JSON"),
    "nothing": (RESULT, lambda: b"", "not JSON"),
    "nan": (RESULT, lambda: sound()[RESULT].replace(b'"score": -', b'"score": NaN, "was": -', 1), "NaN is no number"),
    "infinity": (RESULT, lambda: b'{"pd": -Infinity}', "-Infinity is no number"),
    "a key twice": (RESULT, lambda: sound()[RESULT].replace(b"{", b'{"pd": 0.5,', 1), "a key stands twice"),
    "nested without end": (RESULT, lambda: b"[" * 200_000, "not JSON"),
    "a case that is none": (CASE, lambda: b"x = 1\n", "format"),
    "a case of noise": (CASE, lambda: bytes(range(256)) * 40, CASE),
    "a case nested without end": (CASE, lambda: b"x = " + b"[" * 100_000, CASE),
    "a natural person": (
        CASE,
        lambda: sound()[CASE].replace(b'legal_form = "company"', b'legal_form = "sole_trader"'),
        "sole trader",
    ),
    "a case with a fault": (CASE, lambda: sound()[CASE].replace(b"unit = 1000", b"unit = 7"), "obligor.unit"),
    "no zip": (HOUSE_BOOK, lambda: b"PK\x03\x04", "not an archive"),
    "a packed zip": (HOUSE_BOOK, lambda: zip_of(HOUSE.files, zipfile.ZIP_DEFLATED), "stored files only"),
    "a bomb": (
        HOUSE_BOOK,
        lambda: zip_of({"house.toml": bytes(SIZE_LIMIT + 1)}, zipfile.ZIP_DEFLATED),
        f"allowed at most {SIZE_LIMIT}",
    ),
    "too many files": (
        HOUSE_BOOK,
        lambda: zip_of({f"models/{number}.toml": b"" for number in range(FILE_LIMIT + 1)}),
        f"allowed at most {FILE_LIMIT}",
    ),
    "a name that leaves the folder": (HOUSE_BOOK, lambda: zip_of({"../house.toml": b""}), "relative name"),
    "a house book in parts": (
        HOUSE_BOOK,
        lambda: pack({name: data for name, data in HOUSE.files.items() if name != "scale.toml"}),
        "scale.toml: found no such file",
    ),
    "a house book with a fault": (
        HOUSE_BOOK,
        lambda: pack({**HOUSE.files, "house.toml": HOUSE.files["house.toml"].replace(b"pd_floor", b"pd_flor")}),
        "pd_flor",
    ),
    "a house book without the model": (
        HOUSE_BOOK,
        lambda: pack({**HOUSE.files, f"models/{LEAD}.toml": own_model("-4.0")}),
        LEAD,
    ),
}


@pytest.mark.parametrize("what", SPOILED)
def test_what_cannot_be_run_is_said_and_never_raises(what: str) -> None:
    name, spoiled, words = SPOILED[what]
    again = rerun({**sound(), name: spoiled()})
    assert (again.answer, again.largest_difference) == ("impossible", None)
    assert any(words in problem for problem in again.problems), again.problems


# ------------------------------------------------------------------------------------- a lead model from outside


@pytest.fixture(scope="module")
def led() -> Parts:
    """Return the parts of a case that a model file from beside it leads."""
    case = msgspec.structs.replace(demo(SOUND), model=ModelChoice("models/own.toml"))
    data = own_model("-3.0")
    house = with_model(HOUSE, model_from_bytes(data, HOUSE, file="own.toml"), "models/own.toml")
    return {**parts_of(case, house), HOUSE_BOOK: pack(HOUSE.files), LEAD_MODEL: data}


def test_a_lead_model_from_outside_travels_along_and_re_runs(led: Parts) -> None:
    assert json.loads(led[RESULT])["model"]["name"] == "own"
    again = rerun(led)
    assert (again.answer, again.largest_difference) == ("equal", 0.0)


def test_without_it_or_with_another_one_it_does_not(led: Parts) -> None:
    alone = rerun({name: data for name, data in led.items() if name != LEAD_MODEL})
    assert alone.answer == "impossible"
    assert "models/own.toml" in alone.problems[0]
    other = rerun({**led, LEAD_MODEL: own_model("-3.1")})
    assert other.answer == "different"
    assert any(problem.startswith("model.digest: ") for problem in other.problems)
    assert rerun({**led, LEAD_MODEL: b"x = 1"}).answer == "impossible"


def test_no_attached_model_stands_in_for_one_of_the_house_book() -> None:
    """A model under the house's own name would let any PD pass as the house's."""
    tuned = HOUSE.files[f"models/{LEAD}.toml"].replace(INTERCEPT.encode(), b"-9.0")
    house = with_model(HOUSE, model_from_bytes(tuned, HOUSE, file="x"))
    flattering = result_bytes(assess(demo(SOUND), house))
    assert json.loads(flattering)["pd_model"] < json.loads(sound()[RESULT])["pd_model"] / 50
    again = rerun({**sound(), RESULT: flattering, LEAD_MODEL: tuned})
    assert again.answer == "different"
    assert any(problem.startswith("pd_model: ") for problem in again.problems)


def test_sizes_of_differences_are_shares_of_the_larger_number() -> None:
    def size(one: float, other: float) -> float:
        ((_, found),) = _differences(one, other, "x")
        return found

    assert size(0.0, -0.0) == 0.0
    assert size(2.0, 1.0) == size(1.0, 2.0) == 0.5
    assert size(1e308, -1e308) == 2.0
    assert size(5e-324, 0.0) == 1.0
    assert all(math.isinf(size(*pair)) for pair in ((math.inf, 1.0), (math.nan, math.nan), (1.0, -math.inf)))
