from collections.abc import Callable

import numpy as np
import pytest
from msgspec.structs import replace

from creditdesk.model.layout import layout
from creditdesk.model.spec import REASON_CODES, ModelSpec, terms_of
from creditdesk.model.treat import treat_reference

MakeSpec = Callable[..., ModelSpec]
UNRULED = ("net_cash", "not_disclosed", "needs_prior_period", "zero_denominator")  # of the factor of debt


def test_every_rule_stands_in_the_tables_under_its_code(make_spec: MakeSpec) -> None:
    laid, code = layout(make_spec()), REASON_CODES
    assert laid.names == terms_of(make_spec())
    assert laid.at_cap[2, code["no_debt"]] == 0.5
    assert laid.at_cap[2, code["negative_denominator"]] == 10.0
    assert np.count_nonzero(~np.isnan(laid.at_cap)) == 2
    assert laid.refused[2].tolist() == [False, *(key in UNRULED for key in code)]
    assert laid.missing[2, code["negative_denominator"]]
    assert not laid.missing[:, 0].any()
    assert not laid.refused[:, 0].any()
    switched = {laid.names[place].name: row for place, row in zip(laid.switches, laid.switched, strict=True)}
    assert np.flatnonzero(switched["cover.none"]).tolist() == [code["no_debt"], code["zero_denominator"]]
    assert np.flatnonzero(switched["profit.not_disclosed"]).tolist() == [code["not_disclosed"]]


def test_a_layout_is_kept_for_equal_models_and_for_no_others(make_spec: MakeSpec) -> None:
    spec = make_spec()
    same, other = make_spec(), make_spec(max_missing=0)
    assert hash(spec) == hash(same) == hash(other)
    assert layout(spec) is layout(same)
    assert layout(other) is not layout(spec)
    moved = replace(spec, factors=(replace(spec.factors[0], centre=0.06), *spec.factors[1:]))
    assert layout(moved).centre[0] == 0.06


def test_the_kept_reference_cannot_be_written_to(make_spec: MakeSpec) -> None:
    reference = treat_reference(make_spec())
    with pytest.raises(ValueError, match="read-only"):
        reference.terms[0] = 1.0
