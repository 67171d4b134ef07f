"""The lead model of a case: a name of the house book, or a file beside the case."""

from pathlib import Path

import msgspec
import pytest

from creditdesk.base.errors import UserError
from creditdesk.case.assess import assess
from creditdesk.case.document import Case, ModelChoice
from creditdesk.case.lead import with_lead_model, with_named_model
from creditdesk.house.shipped import resources_folder
from tests.borrowers import LEAD, demo, intercept_as_written, shipped_house

HOUSE = shipped_house()
INTERCEPT = intercept_as_written()
MODEL = (resources_folder() / "housebook" / "models" / f"{LEAD}.toml").read_text(encoding="utf-8")


def led_by(name: str) -> Case:
    return msgspec.structs.replace(demo(), model=ModelChoice(name))


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    (tmp_path / "models").mkdir()
    own = MODEL.replace(f'name = "{LEAD}"', 'name = "own"').replace(INTERCEPT, "-3.0")
    (tmp_path / "models" / "own.toml").write_text(own, encoding="utf-8")
    return tmp_path


@pytest.mark.parametrize("name", ["", LEAD, "no-such-model"])
def test_a_name_reads_no_file(name: str, tmp_path: Path) -> None:
    assert with_lead_model(HOUSE, led_by(name), tmp_path) is HOUSE


@pytest.mark.parametrize("absolute", [False, True])
def test_a_path_is_read_from_the_case_s_folder_and_leads(folder: Path, *, absolute: bool) -> None:
    path = str(folder / "models" / "own.toml") if absolute else "models/own.toml"
    case = led_by(path)
    house = with_lead_model(HOUSE, case, folder)
    one = assess(case, house)
    assert (one.model.name, one.score) == (
        "own",
        pytest.approx((assess(demo(), HOUSE).score or 0) - 3.0 - float(INTERCEPT)),
    )
    assert house.models[path].outside == (folder / "models" / "own.toml").read_bytes()
    assert one.model.digest == house.models[path].digest != HOUSE.models[LEAD].digest
    assert (house.digest, house.files, LEAD in house.models) == (HOUSE.digest, HOUSE.files, True)


def test_a_file_that_is_missing_or_no_model_is_named(folder: Path) -> None:
    with pytest.raises(UserError) as caught:
        with_lead_model(HOUSE, led_by("none.toml"), folder)
    assert caught.value.code == "no_file"
    (folder / "bad.toml").write_text(MODEL.replace("[reading]", "[redding]"), encoding="utf-8")
    with pytest.raises(UserError) as caught:
        with_lead_model(HOUSE, led_by("bad.toml"), folder)
    assert any(str(folder / "bad.toml") in fault and "redding" in fault for fault in caught.value.faults)


def test_a_file_that_names_a_ratio_the_house_lacks_is_refused(folder: Path) -> None:
    (folder / "odd.toml").write_text(MODEL.replace('ratio = "quick_ratio"', 'ratio = "quick"'), encoding="utf-8")
    with pytest.raises(UserError, match="quick"):
        with_named_model(HOUSE, "odd.toml", folder)


def test_a_path_unread_is_an_unknown_lead() -> None:
    with pytest.raises(UserError, match=r"model\.lead: found 'own\.toml'"):
        assess(led_by("own.toml"), HOUSE)
