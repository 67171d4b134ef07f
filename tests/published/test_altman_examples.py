"""Worked examples of the Z-scores in textbooks, inputs to printed result, through the shipped model files."""

import numpy as np
import pytest
from msgspec.structs import replace

from creditdesk.house.shipped import resources_folder
from creditdesk.model.score import reading_of, score
from creditdesk.model.spec import ModelSpec
from creditdesk.model.treat import treat
from creditdesk.model.write import from_toml

HOUSE = resources_folder() / "housebook" / "models"


def shipped(name: str) -> ModelSpec:
    return from_toml((HOUSE / f"{name}.toml").read_text(encoding="utf-8"))


def scored(spec: ModelSpec, *ratios: float) -> float:
    values = np.array(ratios)
    return float(score(spec, treat(spec, values, np.zeros(values.shape, dtype=np.uint8))))


def test_hull_risk_management_and_financial_institutions() -> None:
    """Working capital 170, assets 670, EBIT 60, sales 2200, market equity 380, liabilities 240, retained earnings 300:
    printed 5.46 (from memory; follows from the inputs).
    """
    z = scored(shipped("altman-1968-z"), 170 / 670, 300 / 670, 60 / 670, 380 / 240, 2200 / 670)
    assert z == pytest.approx(5.46, abs=0.005)
    assert reading_of(shipped("altman-1968-z"), z) == "safe zone"


def test_an_exam_question_on_the_same_firm() -> None:
    """The same firm with sales of 1300: printed 4.12 (read)."""
    assert scored(shipped("altman-1968-z"), 170 / 670, 300 / 670, 60 / 670, 380 / 240, 1300 / 670) == pytest.approx(
        4.12, abs=0.005
    )


def test_saunders_and_cornett_financial_institutions_management() -> None:
    """.2 0 -.20 .10 2.0 with 1.2 1.4 3.3 .6 1.0: printed 1.64 (from memory). The shipped last weight is .999 as in the
    paper, so the score is lower by .001 times the ratio.
    """
    spec = shipped("altman-1968-z")
    assert scored(spec, 0.2, 0.0, -0.2, 0.1, 2.0) == pytest.approx(1.64 - 0.001 * 2.0, abs=1e-12)
    rounded = replace(spec, factors=(*spec.factors[:4], replace(spec.factors[4], coefficient=1.0)))
    assert scored(rounded, 0.2, 0.0, -0.2, 0.1, 2.0) == pytest.approx(1.64, abs=1e-12)
    assert reading_of(spec, 1.64) == "distress zone"


@pytest.mark.parametrize(
    ("assets", "ebit", "working_capital", "equity", "retained", "liabilities", "swapped", "altman"),
    [
        (78_000, 8_600, 3_900, 15_000, 26_000, 55_000, 3.363, 2.442),
        (75_000, 8_300, 6_800, 26_000, 19_000, 49_000, 5.103, 2.721),
    ],
)
def test_ross_westerfield_and_jordan_swap_two_weights(  # noqa: PLR0913 - the columns of one printed problem
    assets: float,
    ebit: float,
    working_capital: float,
    equity: float,
    retained: float,
    liabilities: float,
    swapped: float,
    altman: float,
) -> None:
    """The textbook prints 3.363 (read; the second printing's 5.103 worked out) with 1.05 on EBIT / assets and 6.72 on
    equity / liabilities; the order in the shipped file is that of Altman, Hartzell & Peck.
    """
    spec = shipped("altman-1995-z2")
    ratios = (working_capital / assets, retained / assets, ebit / assets, equity / liabilities)
    assert scored(spec, *ratios) == pytest.approx(altman, abs=5e-4)
    exchanged = replace(
        spec,
        factors=(
            *spec.factors[:2],
            replace(spec.factors[2], coefficient=spec.factors[3].coefficient),
            replace(spec.factors[3], coefficient=spec.factors[2].coefficient),
        ),
    )
    assert scored(exchanged, *ratios) == pytest.approx(swapped, abs=5e-4)


@pytest.mark.parametrize(
    ("name", "weights", "constant"),
    [
        ("altman-1968-z", [1.2, 1.4, 3.3, 0.6, 0.999], 0.0),
        ("altman-1983-z1", [0.717, 0.847, 3.107, 0.420, 0.998], 0.0),
        ("altman-1995-z2", [6.56, 3.26, 6.72, 1.05], 0.0),
        ("springate-1978", [1.03, 3.07, 0.66, 0.4], 0.0),
        ("ohlson-1980-m1", [-0.407, 6.03, -1.43, 0.0757, -1.72, -2.37, -1.83, 0.285, -0.521], -1.32),
        ("zmijewski-1984", [-4.513, 5.679, -0.004], -4.336),
        ("three-ratio-1968", [-33.1247, -18.0876, -5.087466], 10.153452),
    ],
)
def test_the_shipped_weights_are_the_published_ones(name: str, weights: list[float], constant: float) -> None:
    """Read in the journal (Altman 1968) or in secondary texts (all others), as each file's ``checked`` says."""
    spec = shipped(name)
    assert [factor.coefficient for factor in spec.factors] == weights
    assert spec.intercept == constant


@pytest.mark.parametrize(
    ("name", "zones"),
    [
        ("altman-1968-z", [(1.80, "distress zone"), (1.81, "grey zone"), (2.99, "grey zone"), (3.0, "safe zone")]),
        ("altman-1983-z1", [(1.22, "distress zone"), (1.23, "grey zone"), (2.90, "grey zone"), (2.91, "safe zone")]),
        ("altman-1995-z2", [(1.09, "distress zone"), (1.10, "grey zone"), (2.60, "grey zone"), (2.61, "safe zone")]),
        ("springate-1978", [(0.861, "below the cut-off of 0.862"), (0.862, "not below the cut-off of 0.862")]),
    ],
)
def test_the_shipped_zones_are_the_published_ones(name: str, zones: list[tuple[float, str]]) -> None:
    """Zones read in secondary texts."""
    assert [(value, reading_of(shipped(name), value)) for value, _ in zones] == zones
