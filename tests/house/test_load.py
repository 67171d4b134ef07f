import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from creditdesk.base.errors import UserError
from creditdesk.house.book import HouseBook
from creditdesk.house.load import digest_of_files, house_book_from_files, load_house_book, load_model
from creditdesk.house.pack import pack, unpack
from creditdesk.house.shipped import resources_folder

Files = dict[str, bytes]


@pytest.fixture(scope="module")
def folder() -> Path:
    return resources_folder() / "housebook"


@pytest.fixture(scope="module")
def book(folder: Path) -> HouseBook:
    return load_house_book(folder)


@pytest.fixture
def files(book: HouseBook) -> Files:
    return dict(book.files)


def faults_of(files: Files) -> tuple[str, ...]:
    with pytest.raises(UserError) as caught:
        house_book_from_files(files, place="book")
    assert (caught.value.code, caught.value.exit_code) == ("house_book", 3)
    return tuple(fault.removeprefix("book/") for fault in caught.value.faults)


def changed(files: Files, name: str, old: str, new: str) -> Files:
    text = files[name].decode()
    assert old in text
    return {**files, name: text.replace(old, new, 1).encode()}


def test_the_shipped_house_book_is_sound(book: HouseBook) -> None:
    assert book.settings.lead_model == "northlight-sme"
    assert {spec.spec.name for spec in book.models.values()} == set(book.models)
    assert len(book.settings.key_ratios) == 5
    assert book.settings.invented
    assert "fictional" in book.settings.lender


def test_memory_and_folder_give_the_same_book(book: HouseBook) -> None:
    again = house_book_from_files(unpack(pack(book.files)))
    assert (again.digest, again.settings, again.chart) == (book.digest, book.settings, book.chart)
    assert {name: model.digest for name, model in again.models.items()} == {
        name: model.digest for name, model in book.models.items()
    }


def test_the_digest_knows_names_and_contents_and_where_they_meet(files: Files) -> None:
    assert digest_of_files(files) == digest_of_files(dict(reversed(files.items())))
    assert digest_of_files({"a": b"bc"}) != digest_of_files({"ab": b"c"})
    assert digest_of_files({**files, "house.toml": files["house.toml"] + b"\n"}) != digest_of_files(files)


def test_a_file_that_is_missing_or_misnamed_is_named(files: Files) -> None:
    del files["rules.toml"]
    assert faults_of({**files, "rule.toml": b""}) == (
        "rules.toml: found no such file, a house book needs it",
        "rule.toml: found a file of an unknown name, allowed house.toml, lines.toml, ratios.toml, scale.toml,"
        " rules.toml, flow.toml, stress.toml, models/*.toml; nearest known name: rules.toml",
    )
    without_models = {name: data for name, data in files.items() if not name.startswith("models/")}
    assert "models: found no model file, a house book needs at least one" in faults_of(without_models)


@pytest.mark.parametrize("gone", [("flow.toml",), ("stress.toml",), ("flow.toml", "stress.toml")])
def test_a_house_book_without_what_if_still_loads(files: Files, gone: tuple[str, ...]) -> None:
    older = house_book_from_files({name: data for name, data in files.items() if name not in gone})
    assert [older.flow is None, older.stress is None] == [name in gone for name in ("flow.toml", "stress.toml")]


SLIPS: dict[str, tuple[str, str, str, str]] = {
    "settings": (
        "house.toml",
        "pd_floor = 0.0005",
        "pd_floor = 1",
        "house.toml: pd_floor: found 1.0, allowed at least 0",
    ),
    "level": ("house.toml", "interval_level = 0.90", "interval_level = 90", "house.toml: interval_level: found 90.0"),
    "key ratio": (
        "house.toml",
        '"debt_to_ebitda"',
        '"debt_to_ebitdas"',
        'house.toml: key_ratios[1]: found unknown ratio "debt_to_ebitdas", allowed a known ratio'
        "; nearest known name: debt_to_ebitda",
    ),
    "lead model": (
        "house.toml",
        'lead_model = "northlight-sme"',
        'lead_model = "altman-1968-z"',
        "house.toml: lead_model: found altman-1968-z, whose file says that it may not lead, allowed ",
    ),
    "second opinion": (
        "house.toml",
        '"springate-1978"',
        '"springgate-1978"',
        'house.toml: second_opinions[4]: found unknown model "springgate-1978"',
    ),
    "unknown setting": (
        "house.toml",
        "pd_floor =",
        "pd_flor =",
        'house.toml: pd_flor: found unknown key "pd_flor", allowed a known key; nearest known name: pd_floor',
    ),
    "line": (
        "lines.toml",
        'key = "inventories"',
        'key = "stocks"',
        'found unknown line "inventories", allowed a line or subtotal of this file',
    ),
    "group": (
        "lines.toml",
        'group = "current_assets"',
        'group = "current_asset"',
        "nearest known name: current_assets",
    ),
    "stress event": (
        "stress.toml",
        'target = "interest_rate", kind = "by"',
        'target = "interest_rate", kind = "by_pct"',
        'stress.toml: events.dear_money.marks[0].kind: found "by_pct" of interest_rate, allowed "to" or "by"',
    ),
    "stressed target": (
        "stress.toml",
        'target = "payable_days"',
        'target = "payables_days"',
        "nearest known name: payable_days",
    ),
    "stress slot": ("stress.toml", 'slot = "I2"', 'slot = "I1"', "stress.toml: events: found no event in slot I2"),
    "flow": (
        "flow.toml",
        'revenue = "revenue"',
        'revenue = "revenues"',
        "flow.toml: roles.revenue: found 'revenues', allowed a line of the chart of accounts",
    ),
    "scale": ("scale.toml", "lower = 0.0", "lower = 0.1", "scale.toml: grades[0].lower: 0.1, expected 0"),
    "rule": (
        "rules.toml",
        "total_equity < 0",
        "total_equty < 0",
        "rules.toml: rules[0].condition: column 1",
    ),
    "ratio": (
        "ratios.toml",
        'numerator = "total_equity"',
        'numerator = "total_equty"',
        "ratios.toml: ratios.equity_ratio",
    ),
    "model": (
        "models/northlight-sme.toml",
        "max_missing = 3",
        "max_missing = 30",
        "models/northlight-sme.toml: max_missing: 30, expected 0 to 7",
    ),
    "TOML": ("scale.toml", "version = 1", "version = ", "scale.toml: line "),
}


@pytest.mark.parametrize("slip", SLIPS)
def test_one_slip_is_named_with_file_and_place(files: Files, slip: str) -> None:
    name, old, new, expected = SLIPS[slip]
    faults = faults_of(changed(files, name, old, new))
    assert any(expected in fault for fault in faults), faults
    assert all(fault.startswith(f"{name}: ") for fault in faults if expected in fault)


def test_slips_of_all_files_come_at_once(files: Files) -> None:
    for slip in ("key ratio", "scale", "rule", "model"):
        name, old, new, _ = SLIPS[slip]
        files = changed(files, name, old, new)
    assert {fault.split(":")[0] for fault in faults_of(files)} >= {
        "house.toml",
        "scale.toml",
        "models/northlight-sme.toml",
        "rules.toml",
    }


def test_two_models_of_one_name_are_refused(files: Files) -> None:
    files["models/zz.toml"] = files["models/northlight-sme.toml"]
    assert faults_of(files) == (
        'models/zz.toml: name: found "northlight-sme", which another model has, allowed a name of its own',
    )


def test_a_model_from_outside_is_checked_against_the_catalogue(book: HouseBook, tmp_path: Path) -> None:
    path = tmp_path / "mine.toml"
    data = book.files["models/northlight-sme.toml"]
    path.write_bytes(data)
    assert load_model(path, book).digest == book.models["northlight-sme"].digest
    path.write_bytes(data.replace(b'ratio = "quick_ratio"', b'ratio = "quik_ratio"'))
    with pytest.raises(UserError) as caught:
        load_model(path, book)
    assert caught.value.faults[0].startswith(f"{path}: factors[")
    path.write_bytes(data.replace(b"max_missing = 3", b'max_missing = "three"'))
    with pytest.raises(UserError, match='max_missing: found "three", allowed a whole number'):
        load_model(path, book)


@pytest.mark.parametrize(
    ("make", "part"),
    [(lambda _: None, "no such folder"), (Path.mkdir, "no TOML file in it")],
    ids=["none", "empty"],
)
def test_a_folder_that_is_no_house_book_is_named(tmp_path: Path, make: Callable[[Path], None], part: str) -> None:
    make(tmp_path / "book")
    with pytest.raises(UserError, match=part) as caught:
        load_house_book(tmp_path / "book")
    assert caught.value.code == "no_house_book"


def test_only_faulty_files_need_the_slow_library(folder: Path) -> None:
    code = (
        "import sys; from pathlib import Path; from creditdesk.house.load import load_house_book;"
        "load_house_book(Path(sys.argv[1])); print(sorted({'jsonschema', 'stdnum', 'PySide6', 'pandas', 'scipy'}"
        " & sys.modules.keys()))"
    )
    done = subprocess.run(
        [sys.executable, "-c", code, str(folder)], capture_output=True, text=True, check=True, env=os.environ
    )
    assert done.stdout.strip() == "[]"
