"""A second look at one factor: how its ratio became a part of the score, step by step, in words."""

from collections.abc import Iterator
from dataclasses import dataclass

from creditdesk.base.display import format_number, format_percent
from creditdesk.case.standing import FactorMove, FactorStanding, Standing, Treatment
from creditdesk.charts.rowmarks import points
from creditdesk.charts.words import contribution_scale, ratio_text, signed, value_or_reason, what_it_moves
from creditdesk.ratios.words import spoken

_TRANSFORMS = {"identity": "", "log": "natural logarithm", "signed_log": "sign of x times ln(1 + |x|)"}
_DECIMALS = 4


@dataclass(frozen=True, slots=True)
class Look:
    """Hold what a second look shows: the factor's name, named lines, and the place of its ratio."""

    key: str
    title: str
    lines: tuple[tuple[str, str], ...]
    target: str


def second_look(standing: Standing, key: str) -> Look | None:
    """Lay one factor of the assessed period open; None where the model has no such factor."""
    factor = next((one for one in standing.factors if one.key == key), None)
    if factor is None:
        return None
    move = next((one for one in standing.what_moved if one.key == key), None)
    lines = (*_value_lines(factor), *_score_lines(standing, factor), *_move_lines(standing, move))
    return Look(key, factor.label, lines, f"ratios.{factor.ratio}[{standing.period.isoformat()}]")


def _value_lines(factor: FactorStanding) -> Iterator[tuple[str, str]]:
    how = factor.treatment
    if factor.value is not None:
        yield "Value", ratio_text(factor.value, factor.unit)
    else:
        yield "Value", f"none: {factor.reason_text}"
        yield "Rule for that", f"{how.rule}. {how.evidence}".strip()
    if factor.treated is None:
        yield "Treated as", "no ratio: the main term is nil"
    else:
        yield "Treated as", ratio_text(factor.treated, factor.unit) + (", the cap" if factor.capped else "")
    yield "Caps", _caps(how, factor.unit)
    yield "Transform", _transform(how)


def _score_lines(standing: Standing, factor: FactorStanding) -> Iterator[tuple[str, str]]:
    for term in factor.terms:
        main, number = term.name == factor.key, format_number(term.coefficient, _DECIMALS)
        if main:
            yield (
                "Coefficient",
                f"{number} on a term of {_term(term.value)} (reference borrower:\u00a0{_term(term.reference)})",
            )
        else:
            name = spoken(term.name.partition(".")[2])
            yield f"If {name}", f"{number}, {'applies' if term.value else 'does not apply'} here"
    if factor.reference_value is not None:
        yield "Reference borrower", ratio_text(factor.reference_value, factor.unit)
    if factor.log_odds is not None:
        moved = what_it_moves(standing.model.link)
        direction = "" if factor.log_odds == 0 else f", {'raises' if factor.log_odds > 0 else 'lowers'} {moved}"
        yield "Contribution", f"{signed(factor.log_odds, 3)} {contribution_scale(standing.model.link)}{direction}"
    if factor.pd_share is not None:
        yield "Share of the PD", f"{points(factor.pd_share)} (Aumann and Shapley 1974)"
    if factor.place is not None:
        yield "In the sample", f"above {format_percent(factor.place, 0)} of the development sample"


def _move_lines(standing: Standing, move: FactorMove | None) -> Iterator[tuple[str, str]]:
    if move is None or standing.last_year is None:
        return
    before = value_or_reason(move.before, move.before_reason, move.unit)
    moved = f"{signed(move.log_odds, 3)} {contribution_scale(standing.model.link)}"
    yield f"In {standing.last_year.label}", f"{before}; since then {moved}"


def _caps(how: Treatment, unit: str) -> str:
    bounds = [
        f"{words} {ratio_text(cap, unit)}"
        for words, cap in (("from", how.cap_low), ("to", how.cap_high))
        if cap is not None
    ]
    return " ".join(bounds) if bounds else "none"


def _transform(how: Treatment) -> str:
    words = [_TRANSFORMS.get(how.transform, how.transform)]
    if how.deflator is not None:
        words.append(f"less ln {format_number(how.deflator, 2)}, a price index")
    if how.centre != 0:
        words.append(f"less {_within(how.centre)}")
    if how.scale != 1:
        words.append(f"divided by {_term(how.scale)}")
    return ", ".join(word for word in words if word) or "none"


def _term(value: float) -> str:
    """Write a term's value with the digits it needs: 1, 0.0776, 1.5953."""
    return format_number(value, 0 if value == round(value) else _DECIMALS)


def _within(value: float) -> str:
    """Write a value that stands behind a minus sign."""
    return f"({_term(value)})" if value < 0 else _term(value)
