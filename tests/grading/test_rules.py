import tomllib

import msgspec
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.errors import UserError
from creditdesk.grading.rules import Effect, HouseRule, RuleBook, RuleFile, apply_rules, compile_rules, grades_after
from creditdesk.grading.scale import NO_GRADE, MasterScale
from creditdesk.house.shipped import resources_folder

HOUSE = resources_folder() / "housebook"
SCALE = msgspec.toml.decode((HOUSE / "scale.toml").read_bytes(), type=MasterScale)
NUMBERS = ("total_equity", "total_assets", "interest_cover")
SOUND = {
    "total_equity": 100.0,
    "total_assets": 300.0,
    "interest_cover": 4.0,
    "going_concern_doubt": 0.0,
    "restated": 0.0,
    "consolidated": 0.0,
    "out_of_scope": 0.0,
    "basis": "audited",
    "opinion": "unqualified",
    "presentation": "by_function",
}


def shipped() -> RuleBook:
    file = msgspec.toml.decode((HOUSE / "rules.toml").read_bytes(), type=RuleFile)
    return compile_rules(file, SCALE, NUMBERS)


def made(*rules: HouseRule) -> RuleBook:
    return compile_rules(RuleFile(format="creditdesk-rules", version=1, label="made up", rules=rules), SCALE, NUMBERS)


def rule(key: str, condition: str, effect: Effect, grade: str | None = None) -> HouseRule:
    return HouseRule(key=key, condition=condition, effect=effect, reason=f"{key} holds", grade=grade)


def test_a_sound_borrower_keeps_the_grade_of_its_pd() -> None:
    outcome = apply_rules(shipped(), SCALE, SOUND, "3")
    assert (outcome.grade, outcome.fired, outcome.unknown, outcome.stopped) == ("3", (), (), False)


@pytest.mark.parametrize(
    ("changes", "key", "grade"),
    [
        ({"total_equity": -1.0}, "negative_equity", "10"),
        ({"basis": "unaudited"}, "unaudited_figures", "6"),
        ({"basis": "management"}, "management_figures", "7"),
        ({"going_concern_doubt": 1.0}, "going_concern_doubt", "11"),
        ({"opinion": "adverse"}, "no_clean_opinion", "10"),
        ({"opinion": "disclaimer"}, "no_clean_opinion", "10"),
        ({"out_of_scope": 1.0}, "out_of_scope", "8"),
    ],
)
def test_each_shipped_rule_fires_and_caps(changes: dict[str, float | str], key: str, grade: str) -> None:
    outcome = apply_rules(shipped(), SCALE, SOUND | changes, "3")
    assert outcome.grade == grade
    assert [fired.key for fired in outcome.fired] == [key]
    assert outcome.fired[0].moved
    assert f"no better than grade {grade}" in outcome.fired[0].reason


def test_the_strictest_cap_counts_and_a_worse_grade_is_left_alone() -> None:
    env = SOUND | {"total_equity": -1.0, "basis": "unaudited"}
    outcome = apply_rules(shipped(), SCALE, env, "3")
    assert outcome.grade == "10"
    assert [(fired.key, fired.moved) for fired in outcome.fired] == [
        ("negative_equity", True),
        ("unaudited_figures", False),
    ]
    worse = apply_rules(shipped(), SCALE, env, "11")
    assert worse.grade == "11"
    assert not any(fired.moved for fired in worse.fired)


@pytest.mark.parametrize("grade", ["D", "none"])
def test_default_and_no_grade_stay_but_the_rules_are_listed(grade: str) -> None:
    outcome = apply_rules(shipped(), SCALE, SOUND | {"total_equity": -1.0}, grade)
    assert outcome.grade == grade
    assert [fired.key for fired in outcome.fired] == ["negative_equity"]


def test_a_condition_that_cannot_be_told_does_not_fire_and_is_noted() -> None:
    outcome = apply_rules(shipped(), SCALE, SOUND | {"total_equity": np.nan, "opinion": None}, "3")
    assert (outcome.grade, outcome.fired) == ("3", ())
    assert outcome.unknown == (
        "negative_equity: not known whether total_equity < 0",
        'no_clean_opinion: not known whether opinion == "adverse" or opinion == "disclaimer"',
    )


def test_an_unknown_part_does_not_matter_where_another_decides() -> None:
    book = made(rule("either", "total_equity < 0 or going_concern_doubt", Effect.CAP, "9"))
    env = SOUND | {"total_equity": np.nan}
    assert apply_rules(book, SCALE, env | {"going_concern_doubt": 1.0}, "3").grade == "9"
    assert apply_rules(book, SCALE, env, "3").unknown == (
        "either: not known whether total_equity < 0 or going_concern_doubt",
    )


def test_floors_come_before_caps_and_a_stop_leaves_the_grade() -> None:
    book = made(
        rule("strict", "total_assets > 0", Effect.CAP, "9"),
        rule("supported", "interest_cover > 2", Effect.FLOOR, "7"),
        rule("halt", "total_assets > 200", Effect.STOP),
    )
    outcome = apply_rules(book, SCALE, SOUND, "11")
    assert (outcome.grade, outcome.stopped) == ("9", True)
    assert [fired.key for fired in outcome.fired] == ["strict", "supported", "halt"]
    assert (
        apply_rules(made(rule("supported", "interest_cover > 2", Effect.FLOOR, "7")), SCALE, SOUND, "11").grade == "7"
    )


CONDITIONS = (
    "total_equity < 0",
    "interest_cover < 1.5 and total_assets > 200",
    "going_concern_doubt or interest_cover < 1",
    'opinion == "adverse"',
    "total_equity / total_assets > 0.5",
)
AMOUNTS = st.sampled_from([-50.0, 0.0, 1.0, 1.5, 120.0, 201.0, 400.0, float("nan")])
RULES = st.lists(
    st.tuples(st.sampled_from(CONDITIONS), st.sampled_from(Effect), st.sampled_from(["1", "4", "8", "12"])), max_size=5
)


@given(
    RULES,
    st.lists(st.tuples(AMOUNTS, AMOUNTS, AMOUNTS, st.integers(-1, len(SCALE.grades))), min_size=1, max_size=8),
    st.sampled_from([0.0, 1.0]),
    st.sampled_from(["adverse", "unqualified", None]),
)
def test_many_grades_at_once_are_what_each_is_alone(
    rules: list[tuple[str, Effect, str]],
    points: list[tuple[float, float, float, int]],
    doubt: float,
    opinion: str | None,
) -> None:
    book = made(
        *(
            rule(f"rule_{number}", condition, effect, None if effect is Effect.STOP else grade)
            for number, (condition, effect, grade) in enumerate(rules)
        )
    )
    same = SOUND | {"going_concern_doubt": doubt, "opinion": opinion}
    arrays = dict(zip(NUMBERS, np.array([point[:3] for point in points]).T, strict=True))
    places = np.array([point[3] for point in points])
    found = grades_after(book, SCALE, same | arrays, places)
    keys = {-1: NO_GRADE, **dict(enumerate(SCALE.keys))}
    for number, place in enumerate(places.tolist()):
        env = same | {key: float(row[number]) for key, row in arrays.items()}
        alone = apply_rules(book, SCALE, env, keys[place])
        assert keys[int(found[number])] == (NO_GRADE if alone.stopped else alone.grade)
        assert grades_after(book, SCALE, env, np.int64(place)) == found[number]


def test_all_faults_of_all_rules_come_at_once() -> None:
    rules = (
        rule("one", "total_equty < 0", Effect.CAP, "13"),
        rule("two words", "total_equity <", Effect.STOP, "3"),
        rule("one", "total_equity", Effect.FLOOR),
        HouseRule(key="four", condition='basis == "audit"', effect=Effect.CAP, reason=" ", grade="3"),
    )
    with pytest.raises(UserError) as caught:
        made(*rules)
    assert caught.value.code == "unusable_rules"
    places = [fault.split(":")[0] for fault in caught.value.faults]
    assert places == [
        "rules[2].key",
        "rules[0].grade",
        "rules[0].condition",
        "rules[1].grade",
        "rules[1].key",
        "rules[1].condition",
        "rules[2].grade",
        "rules[2].condition",
        "rules[3].reason",
        "rules[3].condition",
    ]
    assert 'did you mean "total_equity"?' in str(caught.value)


def test_conditions_run_nothing() -> None:
    for text in ("__import__('os').system('true')", "total_equity.real < 0", "[1 for x in ()]", "lambda: 1"):
        with pytest.raises(UserError):
            made(rule("bad", text, Effect.STOP))


def test_an_unknown_word_or_effect_in_the_file_is_refused() -> None:
    raw = tomllib.loads((HOUSE / "rules.toml").read_text(encoding="utf-8"))
    for changes in ({"effect": "raise"}, {"surprise": 1}):
        wrong = {**raw, "rules": [{**raw["rules"][0], **changes}]}
        with pytest.raises(msgspec.ValidationError):
            msgspec.convert(wrong, RuleFile)
