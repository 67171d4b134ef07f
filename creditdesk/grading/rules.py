"""House rules: conditions on a borrower that cap, floor or stop its grade, each with its reason."""

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from enum import StrEnum
from typing import Literal

import msgspec
import numpy as np

from creditdesk.base.errors import UserError
from creditdesk.formula.compiler import Formula, compile_formula
from creditdesk.formula.nodes import Kind
from creditdesk.formula.values import Env
from creditdesk.grading.scale import NO_GRADE, MasterScale, PlaceArray, not_better_than, not_worse_than
from creditdesk.statements.period import Basis, Opinion, Presentation

FLAGS = ("going_concern_doubt", "restated", "consolidated", "out_of_scope")
"""Facts a condition may name: 1 yes, 0 no, nan not known."""
TEXTS: Mapping[str, tuple[str, ...]] = {
    "basis": tuple(Basis),
    "opinion": (*Opinion, "none"),
    "presentation": tuple(Presentation),
}
"""Texts a condition may compare; the opinion is "none" where the accounts carry none or the case states none."""


class Effect(StrEnum):
    """Say what a rule does: CAP no better than, FLOOR no worse than a grade, STOP no grade at all."""

    CAP = "cap"
    FLOOR = "floor"
    STOP = "stop"


class HouseRule(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Describe one rule: ``condition`` in the formula language with comparisons; ``grade`` for a cap or a floor."""

    key: str
    condition: str
    effect: Effect
    reason: str
    grade: str | None = None


class RuleFile(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Hold ``rules.toml``."""

    format: Literal["creditdesk-rules"]
    version: Literal[1]
    label: str
    rules: tuple[HouseRule, ...]


@dataclass(frozen=True, slots=True)
class CompiledRule:
    """Hold a rule with its compiled condition."""

    rule: HouseRule
    condition: Formula


@dataclass(frozen=True, slots=True)
class RuleBook:
    """Hold the rules of a house in the order of the file."""

    label: str
    rules: tuple[CompiledRule, ...]


@dataclass(frozen=True, slots=True)
class FiredRule:
    """Hold a rule whose condition is met; ``moved``: it changed the grade."""

    key: str
    effect: Effect
    grade: str | None
    reason: str
    moved: bool


@dataclass(frozen=True, slots=True)
class RuleOutcome:
    """Hold the grade after all rules, which fired, and whether one stops.

    ``unknown``: a sentence for every rule whose condition could not be told for want of figures; it did not fire.
    """

    grade: str
    stopped: bool = False
    fired: tuple[FiredRule, ...] = field(default=())
    unknown: tuple[str, ...] = field(default=())


def compile_rules(file: RuleFile, scale: MasterScale, numbers: Iterable[str]) -> RuleBook:
    """Compile the rules of a file; ``numbers``: line items, subtotals and ratios that a condition may name.

    Raises UserError ``unusable_rules`` with every fault of every rule, each beginning with its place.
    """
    names = dict.fromkeys(numbers, Kind.NUMBER) | dict.fromkeys(FLAGS, Kind.FLAG)
    compiled: list[CompiledRule] = []
    found = [*_repeated(file)]
    for index, rule in enumerate(file.rules):
        found += [f"rules[{index}].{fault}" for fault in _faults(rule, scale)]
        try:
            condition = compile_formula(rule.condition, names, comparisons=True, texts=TEXTS, kind=Kind.FLAG)
        except UserError as error:
            found += [f"rules[{index}].condition: {fault}" for fault in error.faults]
        else:
            compiled.append(CompiledRule(rule, condition))
    if found:
        raise UserError("unusable_rules", found)
    return RuleBook(file.label, tuple(compiled))


def apply_rules(book: RuleBook, scale: MasterScale, env: Env, grade: str) -> RuleOutcome:
    """Apply every rule to a grade: floors first, then caps, so that the stricter word stands last.

    ``env``: what the conditions name, one value each. A condition that is not known does not fire, and is said so.
    A borrower in default or without a grade keeps it; the rules that would apply are still listed.
    """
    answers = [(one.rule, _answer(one.condition, env)) for one in book.rules]
    met = [rule for rule, answer in answers if answer == 1.0]
    reached, fired = grade, {}
    for rule in sorted(met, key=lambda rule: rule.effect is Effect.CAP):
        after = _after(rule, scale, reached)
        fired[rule.key] = FiredRule(rule.key, rule.effect, rule.grade, rule.reason, after != reached)
        reached = after
    return RuleOutcome(
        grade=reached,
        stopped=any(rule.effect is Effect.STOP for rule in met),
        fired=tuple(fired[rule.key] for rule in met),
        unknown=tuple(
            f"{rule.key}: not known whether {rule.condition}" for rule, answer in answers if np.isnan(answer)
        ),
    )


def grades_after(book: RuleBook, scale: MasterScale, env: Env, places: PlaceArray) -> PlaceArray:
    """Apply every rule to many grades at once, given and returned as places on the scale, 0 for the best.

    ``env``: what the conditions name, numbers and flags as arrays that fit ``places``. -1 where there was no grade or
    a rule stops; else what ``apply_rules`` says of each point alone.
    """
    reached, default = np.asarray(places), len(scale.grades)
    stopped = np.zeros(reached.shape, dtype=np.bool_)
    for one in sorted(book.rules, key=lambda one: one.rule.effect is Effect.CAP):
        with np.errstate(all="ignore"):
            met = one.condition(env) == 1.0
        if one.rule.effect is Effect.STOP:
            stopped = stopped | met
        elif one.rule.grade is not None:
            bound = scale.position(one.rule.grade)
            if one.rule.effect is Effect.CAP:
                reached = np.where(met & (reached >= 0), np.maximum(reached, bound), reached)
            else:
                reached = np.where(met & (reached < default), np.minimum(reached, bound), reached)
    return np.where(stopped, -1, reached)


def _answer(condition: Formula, env: Env) -> float:
    with np.errstate(all="ignore"):
        return float(condition(env))


def _after(rule: HouseRule, scale: MasterScale, grade: str) -> str:
    if rule.effect is Effect.STOP or rule.grade is None or grade == NO_GRADE:
        return grade
    limit = not_better_than if rule.effect is Effect.CAP else not_worse_than
    return limit(scale, grade, rule.grade)


def _repeated(file: RuleFile) -> Iterator[str]:
    keys = [rule.key for rule in file.rules]
    for index, key in enumerate(keys):
        if key in keys[:index]:
            yield f"rules[{index}].key: {key!r} stands twice"


def _faults(rule: HouseRule, scale: MasterScale) -> Iterator[str]:
    known = [grade.key for grade in scale.grades]
    if rule.effect is Effect.STOP and rule.grade is not None:
        yield f"grade: {rule.grade!r}, a stop has no grade"
    if rule.effect is not Effect.STOP and rule.grade not in known:
        yield f"grade: {rule.grade!r}, a {rule.effect.value} needs one of {', '.join(known)}"
    if not rule.key.isidentifier():
        yield f"key: {rule.key!r}, expected letters, digits and underscores"
    if not rule.reason.strip():
        yield "reason: empty, expected the sentence that stands in the memo"
