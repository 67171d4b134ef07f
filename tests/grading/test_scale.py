import tomllib

import msgspec
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from msgspec.structs import replace

from creditdesk.base.errors import BugError
from creditdesk.grading.scale import (
    MasterScale,
    criteria_of,
    faults,
    final_pd,
    final_pds,
    grade_of,
    moved,
    not_better_than,
    not_worse_than,
    positions,
    representative_pd,
)
from creditdesk.house.shipped import resources_folder
from creditdesk.intake.sample import read_sample
from creditdesk.model.sample import stack
from creditdesk.model.score import model_pd, score
from creditdesk.model.spec import REASON_CODES
from creditdesk.model.treat import treat
from creditdesk.model.write import from_toml

HOUSE = resources_folder() / "housebook"
SCALE = msgspec.toml.decode((HOUSE / "scale.toml").read_bytes(), type=MasterScale)


def test_the_shipped_scale_is_sound_and_numbered_from_1_to_12() -> None:
    assert faults(SCALE) == ()
    assert SCALE.keys == (*(str(number) for number in range(1, 13)), "D")
    assert len({grade.criteria for grade in SCALE.grades}) == 12
    representatives = [grade.representative_pd for grade in SCALE.grades]
    assert representatives == sorted(set(representatives))
    for grade in SCALE.grades:
        assert grade_of(SCALE, grade.representative_pd) == grade.key


def test_a_lower_bound_belongs_to_its_grade_and_an_upper_one_to_the_next() -> None:
    for grade in SCALE.grades:
        assert grade_of(SCALE, grade.lower) == grade.key
        if grade.lower > 0:
            assert grade_of(SCALE, grade.lower * (1 - 1e-9)) == str(int(grade.key) - 1)
        assert SCALE.upper(grade.key) == (SCALE.grades[int(grade.key)].lower if grade.key != "12" else 1.0)


def test_noise_beyond_twelve_digits_moves_no_grade() -> None:
    for grade in SCALE.grades[1:]:
        for noisy in (grade.lower * (1 - 1e-14), np.nextafter(grade.lower, 0.0), grade.lower * (1 + 1e-14)):
            assert grade_of(SCALE, float(noisy)) == grade.key


def test_the_worst_grade_holds_every_pd_up_to_1_and_none_is_default() -> None:
    assert grade_of(SCALE, 1.0) == "12"
    assert grade_of(SCALE, 0.0) == "1"
    assert grade_of(SCALE, float("nan")) == "none"


@given(st.lists(st.floats(0.0, 1.0), min_size=2, max_size=40))
def test_a_higher_pd_never_has_a_better_grade(pds: list[float]) -> None:
    ordered = np.array(sorted(pds))
    found = positions(SCALE, ordered)
    assert np.all(np.diff(found) >= 0)
    assert [SCALE.keys[place] for place in found] == [grade_of(SCALE, pd) for pd in ordered.tolist()]


def test_the_pd_that_counts_is_the_final_grades_where_it_was_moved() -> None:
    assert final_pd(SCALE, 0.0163, "6", "6") == 0.0163
    assert final_pd(SCALE, 0.0163, "6", "8") == representative_pd(SCALE, "8") == 0.053
    assert final_pd(SCALE, 0.0163, "6", "D") == 1.0
    assert final_pd(SCALE, 1.0, "D", "D") == 1.0
    assert np.isnan(final_pd(SCALE, 0.0163, "6", "none"))


def test_bounds_and_notches_stay_on_the_scale() -> None:
    assert [not_better_than(SCALE, grade, "7") for grade in ("3", "7", "9", "D", "none")] == [
        "7",
        "7",
        "9",
        "D",
        "none",
    ]
    assert [not_worse_than(SCALE, grade, "7") for grade in ("3", "7", "9", "D", "none")] == ["3", "7", "7", "D", "none"]
    assert [moved(SCALE, "6", notches) for notches in (-9, -1, 0, 2, 9)] == ["1", "5", "6", "8", "12"]
    assert [moved(SCALE, grade, 1) for grade in ("D", "none", "12")] == ["D", "none", "12"]


def test_every_grade_has_words() -> None:
    assert criteria_of(SCALE, "D").startswith("In default")
    assert criteria_of(SCALE, "none") == ""
    assert criteria_of(SCALE, "4").startswith("Good")
    with pytest.raises(BugError):
        criteria_of(SCALE, "13")


def test_no_grade_of_the_demonstration_sample_is_unduly_crowded() -> None:
    """Basel Framework CRE36 (Basel II paragraph 403): no undue concentration in one grade."""
    spec = from_toml((HOUSE / "models" / "northlight-sme.toml").read_text(encoding="utf-8"))
    table = read_sample(resources_folder() / "demo" / "northlight_sample.csv", REASON_CODES)
    scores = score(spec, treat(spec, *stack(spec, table.values, table.reasons)))
    places = positions(SCALE, model_pd(spec.link, scores))
    shares = np.bincount(places[places >= 0], minlength=12) / np.count_nonzero(places >= 0)
    assert np.max(shares) < 0.25
    assert np.count_nonzero(shares > 0.01) >= 9
    rates = [np.mean(table.values["defaulted"][places == place]) for place in range(3, 12)]
    assert np.all(np.diff(rates)[2:] > 0)


def changed(index: int, **changes: object) -> MasterScale:
    grades = list(SCALE.grades)
    grades[index] = replace(grades[index], **changes)
    return replace(SCALE, grades=tuple(grades))


@pytest.mark.parametrize(
    ("scale", "place"),
    [
        (replace(SCALE, grades=SCALE.grades[:6]), "grades"),
        (replace(SCALE, default_criteria=" "), "default_criteria"),
        (changed(0, lower=0.0001, representative_pd=0.0005), "grades[0].lower"),
        (changed(3, lower=0.0015), "grades[3].lower"),
        (changed(3, lower=float("nan")), "grades[3].lower"),
        (changed(3, key="four"), "grades[3].key"),
        (changed(3, representative_pd=0.0029), "grades[3].representative_pd"),
        (changed(3, representative_pd=0.006), "grades[3].representative_pd"),
        (changed(3, representative_pd=float("nan")), "grades[3].representative_pd"),
        (changed(3, criteria=""), "grades[3].criteria"),
    ],
)
def test_each_fault_of_a_scale_has_its_place(scale: MasterScale, place: str) -> None:
    assert place in [fault.split(":")[0] for fault in faults(scale)]


def test_a_scale_file_with_an_unknown_word_is_refused() -> None:
    raw = tomllib.loads((HOUSE / "scale.toml").read_text(encoding="utf-8"))
    raw["grades"][0]["letter"] = "A"
    with pytest.raises(msgspec.ValidationError):
        msgspec.convert(raw, MasterScale)


@given(
    st.lists(
        st.tuples(st.floats(0.0, 1.0), st.integers(-1, len(SCALE.grades)), st.integers(-1, len(SCALE.grades))),
        min_size=1,
        max_size=9,
    )
)
def test_many_final_pds_at_once_are_what_each_is_alone(points: list[tuple[float, int, int]]) -> None:
    pds, judged, final = (np.array(row) for row in zip(*points, strict=True))
    found = final_pds(SCALE, pds, judged, final)
    for number, (pd, before, after) in enumerate(points):
        alone = (
            pd if after < 0 else final_pd(SCALE, pd, SCALE.keys[before] if before >= 0 else "none", SCALE.keys[after])
        )
        assert found[number] == alone
