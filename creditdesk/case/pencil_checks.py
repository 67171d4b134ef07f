"""Faults of scenarios and studies that need no house book: names, repetitions, bounds, numbers without end."""

import math
from collections import Counter
from collections.abc import Iterator, Sequence

import numpy as np

from creditdesk.case.raw import is_number, list_of, number_of, table_of
from creditdesk.flow.moves import MoveKind
from creditdesk.house.decode import Fault, Table, nearest_name, place_of, show
from creditdesk.scenario.specs import Shape

INK = "Ink"
"""What scenarios are read against; no scenario has this name."""
NAME_MOST = 60
DRAWS_ALLOWED = (1, 1_000_000)
POINTS_ALLOWED = (2, 201)
INPUTS_MOST = 50
_SEED_MOST = 2**63 - 1
_LEAST_EIGENVALUE = 1e-9
_NEEDED = {"break_even": "limits", "reach": "levers"}
"""Lists without which a study asks nothing."""

Placed = tuple[str, Table]
"""A table with its place in the file."""


def scenario_faults(raw: Table) -> Iterator[Fault]:
    """List the faults of ``[[scenarios]]``."""
    scenarios = [table_of(scenario) for scenario in list_of(raw.get("scenarios"))]
    yield from _name_faults(scenarios)
    for index, scenario in enumerate(scenarios):
        place = f"scenarios[{index}]"
        marks = placed(f"{place}.marks", scenario.get("marks"))
        for where, mark in marks:
            yield from _finite(where, mark, "amount")
        yield from _repeated(marks, "target", "mark")
        yield from _assumption_faults(index, table_of(scenario.get("assumptions")))


def _assumption_faults(index: int, assumptions: Table) -> Iterator[Fault]:
    for key, value in assumptions.items():
        where = place_of(["scenarios", index, "assumptions", key])
        if isinstance(value, float) and not math.isfinite(value):
            yield Fault(where, show(value), "a number")
        for inner in table_of(value):
            yield Fault(where, f"the key {key}.{inner} without quotes", f'it in quotes: "{key}.{inner}"')


def placed(place: str, value: object) -> list[Placed]:
    """List the tables of a list with their places."""
    return [(f"{place}[{index}]", table_of(part)) for index, part in enumerate(list_of(value))]


def scenario_names(raw: Table) -> list[str]:
    """List the names of the scenarios that have one."""
    names = (table_of(scenario).get("name") for scenario in list_of(raw.get("scenarios")))
    return [name for name in names if isinstance(name, str)]


def _name_faults(scenarios: Sequence[Table]) -> Iterator[Fault]:
    seen = {INK.casefold(): f"a name other than “{INK}”, which stands for the figures without marks"}
    for index, scenario in enumerate(scenarios):
        name, place = scenario.get("name"), f"scenarios[{index}].name"
        if not isinstance(name, str):
            continue
        if not 1 <= len(name) <= NAME_MOST or name != name.strip() or len(name.splitlines()) > 1:
            yield Fault(place, show(name), f"a name of 1 to {NAME_MOST} letters in one line, without blanks around it")
        elif name.casefold() in seen:
            yield Fault(place, show(name), seen[name.casefold()])
        seen.setdefault(name.casefold(), f"a name of its own: scenarios[{index}] has this one")


def _finite(place: str, table: Table, *keys: str) -> Iterator[Fault]:
    """Refuse numbers without end, and nan: a mark says how far."""
    for key in keys:
        value = table.get(key)
        if is_number(value) and not math.isfinite(number_of(value)):
            yield Fault(f"{place}.{key}", show(value), "a number")


def _repeated(tables: Sequence[Placed], key: str, what: str) -> Iterator[Fault]:
    """Allow each target once."""
    seen: dict[str, str] = {}
    for place, table in tables:
        target = table.get(key)
        if isinstance(target, str):
            if target in seen:
                allowed = f"one {what} for each target: {seen[target]} has this one"
                yield Fault(f"{place}.{key}", f"a second {what} of {show(target)}", allowed)
            seen.setdefault(target, place)


def study_faults(raw: Table) -> Iterator[Fault]:
    """List the faults of ``[[studies]]``."""
    names = scenario_names(raw)
    for place, study in placed("studies", raw.get("studies")):
        name, needed = study.get("scenario"), _NEEDED.get(str(study.get("study")))
        if isinstance(name, str) and name and name not in names:
            allowed = f'the name of a scenario of this case, or "" for {INK.lower()}'
            yield Fault(f"{place}.scenario", f"unknown scenario {show(name)}", allowed, nearest_name(name, names))
        if needed is not None and isinstance(study.get(needed), list | tuple) and not study[needed]:
            yield Fault(f"{place}.{needed}", "an empty list", "at least one entry")
        ranges = study_ranges(place, study)
        for where, found in ranges:
            yield from _range_faults(where, found)
        yield from _repeated(ranges, "target", "range")
        yield from _number_faults(place, study)
        if study.get("study") == "simulation":
            yield from _simulation_faults(place, study)


def study_ranges(place: str, study: Table) -> list[Placed]:
    """List the ranges of a study with their places, of whichever kind it is."""
    direct = [(f"{place}.{key}", table_of(study[key])) for key in ("across", "up", "along") if key in study]
    parts = [part for key in ("levers", "inputs") for part in placed(f"{place}.{key}", study.get(key))]
    return direct + [(f"{where}.range", table_of(part.get("range"))) for where, part in parts]


def _range_faults(place: str, found: Table) -> Iterator[Fault]:
    yield from _finite(place, found, "low", "high")
    low, high = number_of(found.get("low")), number_of(found.get("high"))
    if math.isfinite(low) and math.isfinite(high) and low >= high:
        yield Fault(f"{place}.high", show(found["high"]), f"a number above low, {low:.15g}")


def _number_faults(place: str, study: Table) -> Iterator[Fault]:
    bounds = {"draws": DRAWS_ALLOWED, "points": POINTS_ALLOWED, "seed": (0, _SEED_MOST)}
    for key, (least, most) in bounds.items():
        value = study.get(key)
        if isinstance(value, int) and not isinstance(value, bool) and not least <= value <= most:
            yield Fault(f"{place}.{key}", show(value), f"{least} to {most}")
    for where, limit in placed(f"{place}.limits", study.get("limits")):
        yield from _finite(where, limit, "at")
    for where, lever in placed(f"{place}.levers", study.get("levers")):
        yield from _finite(where, lever, "cost", "step")
        if number_of(lever.get("cost"), 1.0) <= 0.0:
            yield Fault(
                f"{where}.cost", show(lever["cost"]), "a number above 0: a lever that costs nothing is no choice"
            )
        if number_of(lever.get("step"), 0.0) < 0.0:
            yield Fault(f"{where}.step", show(lever["step"]), "a number above 0, or 0 for any amount")


def _simulation_faults(place: str, study: Table) -> Iterator[Fault]:
    inputs = placed(f"{place}.inputs", study.get("inputs"))
    if not inputs and study.get("coefficients") is not True:
        yield Fault(f"{place}.inputs", "nothing that varies", "at least one input, or coefficients = true")
    if len(inputs) > INPUTS_MOST:
        yield Fault(f"{place}.inputs", f"a list of {len(inputs)}", f"a list of at most {INPUTS_MOST}")
        return
    for where, part in inputs:
        spread = table_of(part.get("range"))
        if part.get("shape") == Shape.LOG_NORMAL:
            if spread.get("kind") in (MoveKind.TO, MoveKind.BY):
                yield Fault(f"{where}.range.kind", show(spread["kind"]), f'"{MoveKind.BY_PCT}" for log_normal')
            elif number_of(spread.get("low"), 0.0) <= -100.0:
                yield Fault(f"{where}.range.low", show(spread["low"]), "above -100 for log_normal")
    targets = [table_of(part.get("range")).get("target") for _, part in inputs]
    yield from _correlation_faults(place, study, [target for target in targets if isinstance(target, str)])


def _correlation_faults(place: str, study: Table, targets: list[str]) -> Iterator[Fault]:
    correlations = placed(f"{place}.correlations", study.get("correlations"))
    faults = [fault for where, part in correlations for fault in _pair_faults(where, part, targets)]
    pairs = [frozenset({str(part.get("one")), str(part.get("other"))}) for _, part in correlations]
    twice = [pair for pair, count in Counter(pairs).items() if count > 1]
    faults += [
        Fault(f"{place}.correlations", f"{' and '.join(sorted(pair))} twice", "each pair once") for pair in twice
    ]
    yield from faults
    if not faults and len(set(targets)) == len(targets) and all(pair <= set(targets) for pair in pairs):
        matrix = np.eye(len(targets))
        for _, part in correlations:
            one, other = (targets.index(str(part[key])) for key in ("one", "other"))
            matrix[one, other] = matrix[other, one] = number_of(part.get("value"), 0.0)
        if targets and np.linalg.eigvalsh(matrix)[0] < _LEAST_EIGENVALUE:
            found = "correlations that contradict each other: their matrix is not positive definite"
            yield Fault(f"{place}.correlations", found, "correlations that inputs can have together; smaller ones can")


def _pair_faults(place: str, pair: Table, targets: list[str]) -> Iterator[Fault]:
    for key in ("one", "other"):
        target = pair.get(key)
        if isinstance(target, str) and target not in targets:
            near = nearest_name(target, targets)
            yield Fault(f"{place}.{key}", show(target), "the target of an input of this study", near)
    if isinstance(pair.get("one"), str) and pair.get("one") == pair.get("other"):
        yield Fault(f"{place}.other", show(pair["other"]), "another target than one")
    value = pair.get("value")
    if is_number(value) and not -1.0 < number_of(value) < 1.0:
        yield Fault(f"{place}.value", show(value), "a number above -1 and below 1")
