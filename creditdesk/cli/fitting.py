"""Fitting a model on a sample, and scoring a sample with a model."""

import csv
import io
from argparse import Namespace
from pathlib import Path

import numpy as np

from creditdesk.base.errors import UserError
from creditdesk.cli.models import with_model_asked_for
from creditdesk.house.book import HouseBook
from creditdesk.house.files import read_file, write_file
from creditdesk.intake.sample import read_sample
from creditdesk.model.calibrate import calibrated_pd
from creditdesk.model.fit import Method, fit_model
from creditdesk.model.recipe import Recipe, plain_recipe, recipe_from_toml
from creditdesk.model.sample import stack
from creditdesk.model.score import score, why_no_pd, why_no_score
from creditdesk.model.spec import REASON_CODES, ModelSpec
from creditdesk.model.treat import treat
from creditdesk.model.write import to_toml


def fit_file(options: Namespace) -> str:
    """Fit on the sample file and write the model file; return a few lines about the fit."""
    sample = read_sample(options.sample, REASON_CODES)
    if options.recipe is None:
        columns = [name for name in sample.values if name != options.target]
        recipe = plain_recipe(columns, options.out.name.removesuffix(".toml"))
    else:
        recipe = _recipe(options.recipe)
    spec = fit_model(sample.values, sample.reasons, options.target, recipe, options.base_rate, Method(options.method))
    write_file(options.out, to_toml(spec).encode())
    return _summary(spec, options.out)


def _recipe(path: Path) -> Recipe:
    try:
        return recipe_from_toml(read_file(path).decode())
    except ValueError as error:  # what a TOML reader and a type check raise alike
        raise UserError("recipe", f"{path}: {error}") from error


def _summary(spec: ModelSpec, out: Path) -> str:
    assert spec.sample is not None
    assert spec.fit is not None
    assert spec.covariance is not None
    errors = np.sqrt(np.diag(np.array(spec.covariance.matrix)))
    coefficients = [spec.intercept]
    for factor in spec.factors:
        coefficients += [factor.coefficient, *factor.own_coefficients.values()]
    lines = [
        f"{spec.sample.size} borrowers, {spec.sample.defaults} defaults, log-likelihood {spec.fit.log_likelihood:.6f} "
        f"({spec.fit.null_log_likelihood:.6f} with the intercept alone), {spec.fit.iterations} steps"
    ]
    lines += [
        f"  {name:<40}{coefficient:>14.6f}{error:>14.6f}"
        for name, coefficient, error in zip(spec.covariance.terms, coefficients, errors, strict=True)
    ]
    return "\n".join([*lines, f"Model written to {out}"])


def score_file(options: Namespace, house: HouseBook) -> str:
    """Score every row of the sample file, write it with score, PD and why there is none; return a sentence about it."""
    spec = with_model_asked_for(house, options.model).models[options.model].spec
    sample = read_sample(options.sample, REASON_CODES)
    design = treat(spec, *stack(spec, sample.values, sample.reasons))
    scores = score(spec, design)
    pds = calibrated_pd(spec, scores)
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow([*sample.text, "score", "pd", "reason"])
    for row in range(sample.rows):
        names = [column[row] for column in sample.text.values()]
        why = why_no_score(spec, design.missing[:, row], design.refused[:, row]) or why_no_pd(spec) or ""
        writer.writerow([*names, _cell(scores[row]), _cell(pds[row]), why])
    write_file(options.out, text.getvalue().encode())
    return f"{sample.rows} rows scored, {int(np.isfinite(scores).sum())} with a score, written to {options.out}"


def _cell(number: float) -> str:
    return "" if np.isnan(number) else repr(float(number))
