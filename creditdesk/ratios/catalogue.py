"""The compiled ratio catalogue: made once from its file and the chart of accounts, never changed."""

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from functools import cached_property

from creditdesk.base.errors import UserError
from creditdesk.formula.vocabulary import ARGUMENTS
from creditdesk.ratios.compiler import Compiler, Row
from creditdesk.ratios.expressions import ROW_FUNCTIONS, Step
from creditdesk.ratios.plan import Plan, plan
from creditdesk.ratios.spec import CONSTANTS, DEBT, NET_DEBT, RatioFile, RatioGroup, RatioSpec, SecondFormula
from creditdesk.statements.chart import Chart, Nature


@dataclass(frozen=True, eq=False)
class Catalogue:
    """Hold the compiled catalogue.

    ``rows``: the main formula of each ratio in order, then the second ones; ``by_nature`` and ``otherwise`` map a
    ratio's position to its second row. ``steps``: functions along periods, each once, in the order to run them.
    ``names``: lines and subtotals used anywhere.
    """

    chart: Chart
    groups: tuple[RatioGroup, ...]
    specs: tuple[RatioSpec, ...]
    rows: tuple[Row, ...]
    by_nature: Mapping[int, int]
    otherwise: Mapping[int, int]
    steps: tuple[Step, ...]
    names: tuple[str, ...]
    plan: Plan
    labels: Mapping[str, str]
    index: Mapping[str, int]

    @property
    def keys(self) -> tuple[str, ...]:
        """List the ratio keys in order."""
        return tuple(self.index)

    @cached_property
    def noted(self) -> tuple[int, ...]:
        """List the positions of ratios that may carry a mark, by one of their own formulas or of those they combine."""
        marked = {row.ratio for row in self.rows if row.note}
        marked |= {row.ratio for row in self.rows if marked.intersection(row.parts)}
        return tuple(sorted(marked))

    def spec(self, key: str) -> RatioSpec:
        """Return what is stated of a ratio."""
        return self.specs[self.index[key]]

    def rows_of(self, key: str) -> tuple[Row, ...]:
        """Return every formula of a ratio, the main one first."""
        position = self.index[key]
        seconds = (self.by_nature.get(position), self.otherwise.get(position))
        return (self.rows[position], *(self.rows[row] for row in seconds if row is not None))


def compile_catalogue(file: RatioFile, chart: Chart) -> Catalogue:
    """Compile a catalogue against a chart of accounts.

    Raise UserError "catalogue" with every fault of the file, each with its place such as
    ``ratios.equity_ratio.numerator``, what was found and what is allowed.
    """
    compiler = Compiler(file, chart)
    faults = [*_faults_of_keys(file, chart), *_faults_of_settings(file, compiler.natures)]
    rows, second = compiler.rows()
    if faults := list(dict.fromkeys([*faults, *compiler.faults])):
        raise UserError("catalogue", faults)
    names = dict.fromkeys(name for row in rows for one in row.expressions() for name in one.formula.names)
    used = [*names, *(name for name in (DEBT, NET_DEBT) if name in compiler.natures)]
    lines = tuple(dict.fromkeys(name for name in used if name in compiler.natures))
    return Catalogue(
        chart=chart,
        groups=file.groups,
        specs=file.ratios,
        rows=tuple(rows),
        by_nature=second["by_nature"],
        otherwise=second["otherwise"],
        steps=_steps(rows),
        names=lines,
        plan=plan(rows, file.ratios, lines),
        labels=_labels(file, chart),
        index={spec.key: position for position, spec in enumerate(file.ratios)},
    )


def part_of(catalogue: Catalogue, keys: Iterable[str]) -> Catalogue:
    """Return a catalogue of some ratios and those they combine, in the same order: the same values for less work.

    ``names`` stays whole, because the largest of all amounts says up to where one counts as nil.
    """
    places = {catalogue.index[key] for key in keys}
    places |= {part for place in places for row in catalogue.rows_of(catalogue.keys[place]) for part in row.parts}
    kept = {old: new for new, old in enumerate(sorted(places))}
    seconds = range(len(catalogue.specs), len(catalogue.rows))
    old_rows = [*kept, *(row for row in seconds if catalogue.rows[row].ratio in kept)]
    new_rows = {old: new for new, old in enumerate(old_rows)}
    rows = [_moved(catalogue.rows[row], kept) for row in old_rows]
    specs = tuple(catalogue.specs[place] for place in kept)
    return replace(
        catalogue,
        specs=specs,
        rows=tuple(rows),
        by_nature={kept[place]: new_rows[row] for place, row in catalogue.by_nature.items() if place in kept},
        otherwise={kept[place]: new_rows[row] for place, row in catalogue.otherwise.items() if place in kept},
        steps=_steps(rows),
        plan=plan(rows, specs, catalogue.names),
        index={spec.key: position for position, spec in enumerate(specs)},
    )


def _moved(row: Row, places: Mapping[int, int]) -> Row:
    """Return a row for a catalogue in which its ratios stand elsewhere."""
    return replace(row, ratio=places[row.ratio], parts=tuple(places[part] for part in row.parts))


def _steps(rows: Iterable[Row]) -> tuple[Step, ...]:
    """List the functions along periods of some rows, each once, in the order to run them."""
    expressions = [expression for row in rows for expression in row.expressions()]
    return tuple({step.name: step for expression in expressions for step in expression.steps}.values())


def _labels(file: RatioFile, chart: Chart) -> dict[str, str]:
    """Label ratios, constants, lines and subtotals; a line's label stands before a ratio's of the same key."""
    ratios = {spec.key: spec.label for spec in file.ratios}
    return (
        ratios
        | dict(CONSTANTS)
        | {total.key: total.label for total in chart.subtotals}
        | {line.key: line.label for line in chart.lines}
    )


def _faults_of_keys(file: RatioFile, chart: Chart) -> Iterator[str]:
    """Find keys given twice, keys that are no words, and groups that do not exist."""
    groups = [group.key for group in file.groups]
    for place, keys in (("groups", groups), ("ratios", [spec.key for spec in file.ratios])):
        for key in sorted({key for key in keys if keys.count(key) > 1}):
            yield f"{place}.{key}: found {keys.count(key)} times; allowed: once"
    functions = {*ROW_FUNCTIONS, *ARGUMENTS}
    lines = {line.key for line in chart.lines}
    for key in sorted((lines | {total.key for total in chart.subtotals}) & (functions | CONSTANTS.keys())):
        yield f"chart of accounts, {key}: found the name of a function or constant; allowed: a key of its own"
    reserved = lines | functions | CONSTANTS.keys()
    for spec in file.ratios:
        if not spec.key.isidentifier() or spec.key != spec.key.lower() or spec.key.startswith("_"):
            yield f'ratios.{spec.key}: found "{spec.key}"; allowed: a key of small letters, digits and underscores'
        if spec.key in reserved:
            yield f"ratios.{spec.key}: found the key of a line, a constant or a function; allowed: a key of its own"
        if spec.group not in groups:
            yield f'ratios.{spec.key}.group: found "{spec.group}"; allowed: {", ".join(groups)}'


def _faults_of_settings(file: RatioFile, natures: Mapping[str, Nature]) -> Iterator[str]:
    """Find settings that contradict one another."""
    for spec in file.ratios:
        place = f"ratios.{spec.key}"
        if not 0 < abs(spec.factor) < float("inf"):
            yield f"{place}.factor: found {spec.factor}; allowed: a number other than 0"
        low, high = spec.plausible_low, spec.plausible_high
        if low is not None and high is not None and not low < high:
            yield f"{place}.plausible_low: found {low}; allowed: below plausible_high, {high}"
        for flag, needed in (("no_debt", DEBT), ("net_cash", NET_DEBT)):
            if getattr(spec, flag) and needed not in natures:
                yield f"{place}.{flag}: found true; allowed: only where the chart of accounts has {needed}"
        if spec.by_nature is not None and spec.presentation is not None:
            yield f"{place}.by_nature: found beside presentation; allowed: one of the two"
        for name in ("by_nature", "otherwise"):
            second: SecondFormula | None = getattr(spec, name)
            if second is not None and not (second.numerator or second.denominator):
                yield f"{place}.{name}: found no formula; allowed: a numerator, a denominator, or both"
