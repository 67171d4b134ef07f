"""The statements of a case: as received, and after its adjustments."""

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from creditdesk.base.findings import Finding
from creditdesk.case.document import Case
from creditdesk.statements.adjust import adjusted_printed, apply_adjustments
from creditdesk.statements.chart import Chart
from creditdesk.statements.statement import StatementSet
from creditdesk.statements.subtotals import build_statements

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class CaseStatements:
    """Hold both sets; they are one and the same where nothing was adjusted.

    ``held``: ratios of the assessed period that are given and not computed from the statements.
    """

    received: StatementSet
    adjusted: StatementSet
    findings: tuple[Finding, ...]
    held: Mapping[str, float] = field(default_factory=dict)


def case_statements(case: Case, chart: Chart) -> CaseStatements:
    """Build the statements of ``case``."""
    figures, printed = _arrays(case.figures), _arrays(case.printed)
    received = build_statements(chart, case.periods, figures, printed)
    if not case.adjustments:
        return CaseStatements(received, received, ())
    moved, findings = apply_adjustments(chart, case.periods, figures, case.adjustments)
    printed = adjusted_printed(chart, case.periods, printed, case.adjustments)
    return CaseStatements(received, build_statements(chart, case.periods, moved, printed), findings)


def _arrays(rows: Mapping[str, tuple[float, ...]]) -> dict[str, FloatArray]:
    return {key: np.array(row, dtype=np.float64) for key, row in rows.items()}
