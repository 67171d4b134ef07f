"""Make the invented development sample of the demonstration model, and fit the model from it.

Every borrower here is invented: no figure comes from a real company or lender. The numbers are drawn from one seeded
generator through the inverse normal distribution, so that the same file comes out anywhere. From the project's root:

    python resources/demo/make_sample.py
"""

import csv
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from math import exp, log
from pathlib import Path
from random import Random
from statistics import NormalDist

SEED = 26
BORROWERS = 6_000
TARGET = "defaulted"
RATIOS = (
    *("ebit_to_assets", "equity_ratio", "interest_cover", "log_assets"),
    *("debt_to_ebitda", "quick_ratio", "revenue_growth"),
)
COLUMNS = ("borrower", "year", *RATIOS, TARGET)
_NORMAL = NormalDist()


class Draws:
    """Give random numbers from the one generator whose stream Python promises to keep."""

    def __init__(self, seed: int) -> None:
        self._random = Random(seed)

    def uniform(self) -> float:
        """Draw from (0, 1)."""
        return max(self._random.random(), 1e-12)

    def normal(self) -> float:
        """Draw from the standard normal distribution."""
        return _NORMAL.inv_cdf(self.uniform())

    def fat(self) -> float:
        """Draw with fatter tails than the normal: now and then the spread is more than double."""
        return self.normal() * (2.4 if self.uniform() < 0.12 else 0.85)


@dataclass(frozen=True, slots=True)
class Firm:
    """Hold one invented firm; amounts are shares of total assets unless said otherwise."""

    quality: float
    log_assets: float
    ebitda: float
    ebit: float
    debt: float
    equity: float
    interest: float
    quick_ratio: float
    growth: float


def draw_firm(draws: Draws) -> Firm:
    """Draw one firm: better firms earn more, owe less and hold more liquid means."""
    quality = draws.normal()
    log_assets = min(max(14.9 + 1.15 * draws.normal() + 0.15 * quality, 12.3), 18.4)
    ebitda = 0.118 + 0.036 * quality + 0.052 * draws.fat()
    depreciation = 0.018 + 0.045 * draws.uniform()
    debt = draw_debt(draws, quality, log_assets)
    other = min(max(0.30 + 0.13 * draws.normal() - 0.02 * quality, 0.04), 0.9)
    lost = exp(-2.2 + 0.9 * draws.normal()) if draws.uniform() < 0.05 - 0.03 * min(max(quality, -1.5), 1.5) else 0.0
    interest = 0.0 if debt == 0 else debt * (0.055 + 0.025 * draws.uniform() - 0.004 * quality) + 0.001
    return Firm(
        quality=quality,
        log_assets=log_assets,
        ebitda=ebitda,
        ebit=ebitda - depreciation,
        debt=debt,
        equity=1.0 - debt - other - lost,
        interest=interest,
        quick_ratio=exp(0.02 + 0.16 * quality - 0.5 * (other - 0.3) + 0.42 * draws.normal()),
        growth=0.035
        + 0.02 * quality
        + 0.11 * draws.fat()
        + (0.35 * draws.uniform() if draws.uniform() < 0.05 else 0.0),
    )


def draw_debt(draws: Draws, quality: float, log_assets: float) -> float:
    """Draw interest-bearing debt; about one firm in seven has none, good and small ones more often."""
    if draws.uniform() < 0.14 + 0.06 * quality - 0.03 * (log_assets - 14.9):
        return 0.0
    return min(max(0.27 + 0.14 * draws.normal() - 0.05 * quality, 0.02), 0.85)


def ratio_cells(firm: Firm) -> dict[str, float | str]:
    """Work out the ratios; where one has no value the cell holds the reason."""
    if firm.debt == 0:
        cover: float | str = "no_debt"
        leverage: float | str = "no_debt"
    else:
        cover = firm.ebit / firm.interest
        leverage = firm.debt / firm.ebitda if firm.ebitda > 0 else "negative_denominator"
    return {
        "ebit_to_assets": firm.ebit,
        "equity_ratio": firm.equity,
        "interest_cover": cover,
        "log_assets": firm.log_assets,
        "debt_to_ebitda": leverage,
        "quick_ratio": firm.quick_ratio,
        "revenue_growth": firm.growth,
    }


def hide_lines(draws: Draws, firm: Firm, cells: dict[str, float | str]) -> None:
    """Take away what small firms do not publish; an empty cell is not disclosed.

    Smaller firms hide more. Without an income statement four ratios are gone, and the model gives no score.
    """
    small = max(0.0, 16.0 - firm.log_assets) / 2.0
    if draws.uniform() < 0.03 * small:
        _blank(cells, "ebit_to_assets", "interest_cover", "debt_to_ebitda", "revenue_growth")
    elif draws.uniform() < 0.035 * small:
        _blank(cells, "ebit_to_assets", "interest_cover", "debt_to_ebitda")
    elif draws.uniform() < 0.04 * small:
        _blank(cells, "interest_cover", "debt_to_ebitda")
    elif draws.uniform() < 0.06:
        _blank(cells, "debt_to_ebitda")
    if draws.uniform() < 0.04:
        _blank(cells, "quick_ratio")
    if draws.uniform() < 0.04:
        _blank(cells, "revenue_growth")
    elif cells["revenue_growth"] != "" and draws.uniform() < 0.05 + 0.02 * small:
        cells["revenue_growth"] = "needs_prior_period"


def _blank(cells: dict[str, float | str], *keys: str) -> None:
    for key in keys:
        cells[key] = ""


def log_odds(draws: Draws, firm: Firm, cells: dict[str, float | str]) -> float:
    """Give the invented truth: the log-odds of default within a year, with a part that no ratio shows."""
    cover = 3.5 if firm.debt == 0 else min(max(firm.ebit / firm.interest, -3.0), 12.0)
    leverage = 0.0 if firm.debt == 0 else (8.0 if firm.ebitda <= 0 else min(firm.debt / firm.ebitda, 8.0))
    return (
        -4.1
        - 2.8 * (min(max(firm.ebit, -0.15), 0.25) - 0.07)
        - 1.7 * (min(max(firm.equity, -0.2), 0.8) - 0.42)
        - 0.40 * (log(1.0 + abs(cover)) * (1.0 if cover > 0 else -1.0) - 1.5)
        - 0.2 * (firm.log_assets - 14.9)
        + 0.12 * (leverage - 2.5)
        - 0.6 * (min(firm.quick_ratio, 2.5) - 1.0)
        - 1.8 * (min(max(firm.growth, -0.3), 0.35) - 0.04)
        + 0.3 * draws.normal()
        + (0.5 if cells["revenue_growth"] == "needs_prior_period" else 0.0)
        + 0.5 * sum(cells[key] == "" for key in ("ebit_to_assets", "quick_ratio", "revenue_growth", "debt_to_ebitda"))
    )


def borrowers(count: int, seed: int = SEED) -> Iterator[dict[str, float | str]]:
    """Draw borrowers one after the other: number, year of the accounts, ratios, 1 for a default within a year."""
    draws = Draws(seed)
    for number in range(1, count + 1):
        firm = draw_firm(draws)
        cells = ratio_cells(firm)
        year = 2016 + int(8 * draws.uniform())
        hide_lines(draws, firm, cells)
        defaulted = draws.uniform() < 1.0 / (1.0 + exp(-log_odds(draws, firm, cells)))
        yield {"borrower": f"invented-{number:04d}", "year": year, **cells, TARGET: int(defaulted)}


def rows(count: int) -> Iterator[list[str]]:
    """Write borrowers as cells of the file, five significant digits."""
    for borrower in borrowers(count):
        yield [f"{cell:.5g}" if isinstance(cell, float) else str(cell) for cell in map(borrower.get, COLUMNS)]


def write_sample(path: Path, lines: Iterable[list[str]]) -> None:
    """Write the sample file."""
    with path.open("w", encoding="utf-8", newline="") as stream:
        writer = csv.writer(stream, lineterminator="\n")
        writer.writerow(COLUMNS)
        writer.writerows(lines)


def fit_demonstration(sample: Path, recipe: Path, model: Path) -> None:
    """Fit the demonstration model from the sample and write its file."""
    from creditdesk.intake.sample import read_sample
    from creditdesk.model.fit import fit_model
    from creditdesk.model.recipe import recipe_from_toml
    from creditdesk.model.spec import REASON_CODES
    from creditdesk.model.write import to_toml

    table = read_sample(sample, REASON_CODES)
    spec = fit_model(table.values, table.reasons, TARGET, recipe_from_toml(recipe.read_text(encoding="utf-8")))
    model.write_text(to_toml(spec), encoding="utf-8")


def main() -> None:
    """Make sample and model beside this script and in the house book."""
    here = Path(__file__).resolve().parent
    sample = here / "northlight_sample.csv"
    write_sample(sample, rows(BORROWERS))
    fit_demonstration(
        sample, here / "northlight.recipe.toml", here.parent / "housebook" / "models" / "northlight-sme.toml"
    )
    print(f"{sample.name}: {BORROWERS} invented borrowers")


if __name__ == "__main__":
    main()
