"""How a model treats one factor, in the words and numbers that its file states."""

from creditdesk.case.standing import Treatment
from creditdesk.model.spec import Factor, Rule


def treatment_of(factor: Factor, reason: str | None) -> Treatment:
    """State caps, transform and scaling of ``factor``, and its rule for ``reason`` where the ratio has no value."""
    rule = factor.rules.rule(reason) if reason is not None else None
    return Treatment(
        cap_low=factor.caps.low,
        cap_high=factor.caps.high,
        transform=factor.transform.value,
        centre=factor.centre,
        scale=factor.scale,
        deflator=None if factor.deflator is None else factor.deflator.index,
        rule="" if reason is None else rule_words(rule),
        evidence="" if rule is None else rule.evidence,
    )


def rule_words(rule: Rule | None) -> str:
    """Say what a rule does where a ratio has no value; None stands for a reason without a rule."""
    if rule is None or rule.refuse:
        return "no score"
    if rule.at_cap is not None:
        return f"taken at the {'lower' if rule.at_cap == 'low' else 'upper'} cap"
    if rule.log_odds is not None:
        return "a stated amount on the score"
    return f"own coefficient, {(rule.own_coefficient or '').replace('_', ' ')}"
