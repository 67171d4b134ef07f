from dataclasses import replace

import pytest

from creditdesk.case.standing import FactorStanding, Standing, Term, Treatment
from creditdesk.charts.look import second_look
from tests.charts.moving import moving
from tests.standings import factor, standing, without_pd

COVER = Treatment(cap_low=-4.06, cap_high=29.6, transform="signed_log", centre=1.5953, scale=2.0)
TERMS = (Term("interest_cover", 0.3384, -0.2337, 0.0), Term("interest_cover.no_interest", 0.0, -0.0343, 0.0))


def _one(**changes: object) -> FactorStanding:
    return factor("Interest cover", "interest_cover", "times", 5.92, -0.079, terms=TERMS, treatment=COVER, **changes)


def _lines(shown: Standing, key: str = "interest_cover") -> dict[str, str]:
    look = second_look(shown, key)
    assert look is not None
    return dict(look.lines)


def test_every_step_from_ratio_to_score_is_laid_open() -> None:
    assert _lines(standing(factors=(_one(),))) == {
        "Value": "5.92×",
        "Treated as": "5.92×",
        "Caps": "from −4.06× to 29.60×",
        "Transform": "sign of x times ln(1 + |x|), less 1.5953, divided by 2",
        "Coefficient": "−0.2337 on a term of 0.3384 (reference borrower:\u00a00)",
        "If no interest": "−0.0343, does not apply here",
        "Reference borrower": "5.33×",
        "Contribution": "−0.079 log-odds, lowers PD",
        "Share of the PD": "−0.16 percentage points (Aumann and Shapley 1974)",
        "In the sample": "above 60\u00a0% of the development sample",
    }


def test_a_cap_that_was_met_is_named() -> None:
    shown = standing(factors=(replace(_one(), value=40.0, treated=29.6, capped=True),))
    assert _lines(shown)["Treated as"] == "29.60×, the cap"


def test_a_ratio_without_a_value_shows_reason_rule_and_evidence() -> None:
    how = replace(COVER, rule="own coefficient, no interest", evidence="Estimated: 747 borrowers, 9 defaults.")
    gone = replace(
        _one(),
        value=None,
        reason="no_debt",
        reason_text="There is no interest-bearing debt.",
        treated=None,
        place=None,
        treatment=how,
        terms=(TERMS[0], replace(TERMS[1], value=1.0)),
    )
    lines = _lines(standing(factors=(gone,)))
    assert lines["Value"] == "none: There is no interest-bearing debt."
    assert lines["Rule for that"] == "own coefficient, no interest. Estimated: 747 borrowers, 9 defaults."
    assert lines["Treated as"] == "no ratio: the main term is nil"
    assert lines["If no interest"] == "−0.0343, applies here"
    assert "In the sample" not in lines


def test_what_moved_since_last_year_stands_beside_it() -> None:
    assert _lines(moving())["In 2024"] == "no debt; since then −0.050 log-odds"
    assert "In 2024" not in _lines(standing())


def test_it_leads_to_the_ratio_in_the_assessed_period() -> None:
    look = second_look(standing(), "equity_ratio")
    assert look is not None
    assert (look.title, look.target) == ("Equity ratio", "ratios.equity_ratio[2025-12-31]")


def test_without_a_score_there_is_no_contribution_to_speak_of() -> None:
    lines = _lines(replace(without_pd(), factors=tuple(replace(f, log_odds=None) for f in without_pd().factors)))
    assert "Contribution" not in lines
    assert lines["Value"] == "none: Needs depreciation."


def test_a_factor_the_model_does_not_have_gives_nothing() -> None:
    assert second_look(standing(), "shoe_size") is None


@pytest.mark.parametrize(
    ("how", "said"),
    [
        (Treatment(), "none"),
        (Treatment(transform="log", deflator=104.2), "natural logarithm, less ln 104.20, a price index"),
        (Treatment(centre=-2.5), "less (−2.5000)"),
    ],
)
def test_transforms_are_said_in_words(how: Treatment, said: str) -> None:
    lines = _lines(standing(factors=(replace(_one(), treatment=how),)))
    assert lines["Transform"] == said
    assert lines["Caps"] == "none"
