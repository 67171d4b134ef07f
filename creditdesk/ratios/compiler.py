"""From the formulas of a ratio file to compiled rows, with every fault noted."""

from dataclasses import dataclass

import msgspec

from creditdesk.base.errors import UserError
from creditdesk.formula.compiler import Formula, Use, compile_formula
from creditdesk.formula.nodes import Chain, Kind, Node, Number
from creditdesk.formula.vocabulary import ARGUMENTS
from creditdesk.ratios.expressions import ROW_FUNCTIONS, Expression, fault_of_months, faults_of_time, prepare
from creditdesk.ratios.spec import CONSTANTS, RatioFile, RatioSpec, SecondFormula, Unit
from creditdesk.statements.chart import Chart


@dataclass(frozen=True, slots=True)
class Row:
    """Hold one compiled formula of a ratio: its main one, the one by nature, or the one used otherwise.

    ``ratio``: position in the catalogue. ``whole``: factor x numerator / denominator in one, for traces.
    ``parts``: positions of the ratios it combines; such a row has no denominator and no guard.
    """

    ratio: int
    numerator: Expression
    denominator: Expression | None
    guards: tuple[Expression, ...]
    whole: Formula
    note: str
    denominator_label: str
    parts: tuple[int, ...] = ()

    def expressions(self) -> tuple[Expression, ...]:
        """List numerator, denominator and guards."""
        return (self.numerator, *((self.denominator,) if self.denominator else ()), *self.guards)

    def uses(self) -> tuple[Use, ...]:
        """List the names of all its expressions, each with the functions along periods around it."""
        return tuple(use for expression in self.expressions() for use in expression.formula.uses)


class Compiler:
    """Compile all formulas of a file; what is wrong with them gathers in ``faults``.

    ``natures``: of lines and subtotals. ``ratios``: position of each ratio that a formula can name.
    """

    def __init__(self, file: RatioFile, chart: Chart) -> None:
        self.natures = {total.key: total.nature for total in chart.subtotals}
        self.natures |= {line.key: line.nature for line in chart.lines}
        self.ratios = {spec.key: place for place, spec in enumerate(file.ratios) if spec.key not in self.natures}
        self.faults: list[str] = []
        self._specs = file.ratios
        functions = {*ROW_FUNCTIONS, *ARGUMENTS}
        self._names = [name for name in (*self.natures, *CONSTANTS, *self.ratios) if name not in functions]

    def rows(self) -> tuple[list[Row], dict[str, dict[int, int]]]:
        """Compile the main rows in order, then the second ones.

        The mapping gives, for ``by_nature`` and ``otherwise``, the second row of each ratio that has one. Positions
        hold only where ``faults`` stays empty.
        """
        rows = [self._row(place, spec, f"ratios.{spec.key}") for place, spec in enumerate(self._specs)]
        second: dict[str, dict[int, int]] = {"by_nature": {}, "otherwise": {}}
        for place, spec in enumerate(self._specs):
            for name, found in second.items():
                formula: SecondFormula | None = getattr(spec, name)
                if formula is not None:
                    found[place] = len(rows)
                    rows.append(self._row(place, _with(spec, formula), f"ratios.{spec.key}.{name}"))
        compiled = [row for row in rows if row is not None]
        self._note_nested_parts(compiled)
        return compiled, second

    def _row(self, place: int, spec: RatioSpec, where: str) -> Row | None:
        """Compile one formula of a ratio; None where it has faults."""
        top = self._expression(spec, f"{where}.numerator", spec.numerator)
        bottom = self._expression(spec, f"{where}.denominator", spec.denominator) if spec.denominator else None
        guards = [self._expression(spec, f"ratios.{spec.key}.must_be_positive", text) for text in spec.must_be_positive]
        if top is None or None in guards or (spec.denominator and bottom is None):
            return None
        row = Row(
            ratio=place,
            numerator=top,
            denominator=bottom,
            guards=tuple(guard for guard in guards if guard is not None),
            whole=_whole(spec.factor, top.formula, bottom.formula if bottom else None),
            note=spec.note,
            denominator_label=spec.denominator_label,
            parts=tuple(self.ratios[name] for name in top.formula.names if name in self.ratios),
        )
        self._note_mixtures(row, spec, where)
        if spec.unit is Unit.YES_NO and row.whole.kind is not Kind.FLAG:
            self.faults.append(f"{where}: found an amount; allowed with the unit {spec.unit}: one comparison alone")
        return row

    def _expression(self, spec: RatioSpec, place: str, text: str) -> Expression | None:
        """Compile one text and check its use of time; None where it has faults."""
        kind = None if spec.comparisons and place.endswith("numerator") else Kind.NUMBER
        try:
            formula = compile_formula(
                text, self._names, functions=ROW_FUNCTIONS, comparisons=spec.comparisons, kind=kind
            )
        except UserError as error:
            self.faults += [f"{place}: {fault}" for fault in error.faults]
            return None
        faults = [f"{place}: {fault}" for fault in faults_of_time(formula, self.natures)]
        self.faults += faults
        return None if faults else prepare(formula)

    def _note_mixtures(self, row: Row, spec: RatioSpec, where: str) -> None:
        """Note amounts that may not stand together: flows beside other lengths of time, ratios beside lines."""
        if not spec.comparisons and (fault := fault_of_months(row.whole, self.natures)) is not None:
            self.faults.append(f"{where}: {fault}")
        names = {name for expression in row.expressions() for name in expression.formula.names}
        ratios = sorted(names & self.ratios.keys())
        alone = names <= self.ratios.keys() and row.denominator is None and not row.guards
        plain = not (spec.no_debt or spec.net_cash or spec.by_nature or spec.otherwise or spec.presentation)
        if ratios and not (alone and plain):
            self.faults.append(
                f"{where}: found the ratio {ratios[0]} beside other amounts or settings; allowed: ratios "
                "alone, without denominator, guard, second formula, or reasons and presentation of its own"
            )

    def _note_nested_parts(self, rows: list[Row]) -> None:
        """Note combinations of combinations."""
        combined = {row.ratio for row in rows if row.parts}
        for row in rows:
            for part in row.parts:
                if part in combined:
                    where, found = self._specs[row.ratio].key, self._specs[part].key
                    self.faults.append(f"ratios.{where}: found {found}; allowed: ratios that combine no others")


def _with(spec: RatioSpec, second: SecondFormula) -> RatioSpec:
    """Put a second formula in the place of the main one; what it leaves blank stays."""
    return msgspec.structs.replace(
        spec,
        numerator=second.numerator or spec.numerator,
        denominator=second.denominator or spec.denominator,
        denominator_label=second.denominator_label or spec.denominator_label,
        note=second.note,
    )


def _whole(factor: float, top: Formula, bottom: Formula | None) -> Formula:
    """Join numerator, denominator and factor to one formula."""
    rest: list[tuple[str, Node]] = [("/", bottom.tree)] if bottom else []
    if factor != 1.0:
        rest.append(("*", Number(factor, f"{factor:g}")))
    text = top.text if not bottom else f"({top.text}) / ({bottom.text})"
    return top.part(Chain(top.tree, tuple(rest)), text) if rest else top
