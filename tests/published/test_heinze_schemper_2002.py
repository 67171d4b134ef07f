"""Heinze & Schemper, A solution to the problem of separation in logistic regression, Statistics in Medicine 21, 2002.

The endometrial data (79 women, outcome HG, quasi-separated by NV) ship with an MIT-licensed Python package; the values
stand in that package's own tests against R's logistf (read).
"""

import csv
from pathlib import Path

import numpy as np
import pytest

from creditdesk.base.errors import UserError
from creditdesk.model.firth import penalised_likelihood
from creditdesk.model.likelihood import maximum_likelihood

NAMES = ("NV", "PI", "EH")


def read_rows() -> tuple[np.ndarray, np.ndarray]:
    with (Path(__file__).parent / "heinze_schemper_2002.csv").open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    return np.array([[float(row[name]) for name in NAMES] for row in rows]), np.array(
        [float(row["HG"]) for row in rows]
    )


COLUMNS, OUTCOME = read_rows()


def test_the_penalised_fit_gives_the_printed_coefficients_errors_and_likelihood() -> None:
    found = penalised_likelihood(COLUMNS, OUTCOME, NAMES)
    assert found.coefficients == pytest.approx([3.774560, 2.929273, -0.034752, -2.604164], abs=1e-6)
    assert found.standard_errors == pytest.approx([1.4887, 1.5508, 0.0396, 0.7760], abs=5e-5)
    assert found.log_likelihood == pytest.approx(-24.037268, abs=1e-6)


def test_maximum_likelihood_names_the_column_that_separates() -> None:
    with pytest.raises(UserError, match=r"^NV: this column alone .* but for ties"):
        maximum_likelihood(COLUMNS, OUTCOME, NAMES)
