"""Every field of the Review is declared, or known to be computed; a new one has to be placed."""

from __future__ import annotations

import dataclasses

import pytest

from specgate.review import types
from specgate.revisions import fields

COMPUTED: dict[type, set[str]] = {
    types.RequirementReview: {"location", "verdict", "standing", "assumptions", "rests_on", "derived", "reason"}
    | {"waiver", "waived"},
    types.CriterionReview: {"verdict", "result", "reserve", "standing", "location", "reason"},
    types.ParameterReview: {"exact", "unit", "as_written", "location"},
    types.SubsystemReview: {"used", "location", "by_fit"},
    types.LoopReview: {"signal_units", "subsystems", "poles", "hidden_modes", "measures", "in_z", "reason"}
    | {"characteristic_polynomial", "characteristic_terms", "formulas"},
    types.ResponseReview: {"unit", "measures", "poles", "zeros", "curve", "reason", "formulas"},
    types.BreakReview: {"measures", "crossings", "frequency_response", "reason", "in_z", "formulas"},
    types.ProjectReview: set(),
    types.PolicyReview: set(),
}
"""What follows from what is declared."""
COMPARED_APART: dict[type, set[str]] = {
    types.RequirementReview: {"criteria"},
    types.CriterionReview: {"measure", "on", "limit", "basis"},
    types.SubsystemReview: {"numerators", "numerator", "denominator", "reads"},
    types.LoopReview: {"responses", "breaks"},
    types.ResponseReview: {"numerator", "denominator", "numerator_terms", "denominator_terms"},
    types.BreakReview: {"numerator", "denominator", "numerator_terms", "denominator_terms"},
    types.PolicyReview: {"changed_thresholds"},
}
"""What is compared by functions of its own."""
TABLES = {
    types.RequirementReview: fields.REQUIREMENT,
    types.CriterionReview: fields.CRITERION,
    types.ParameterReview: fields.PARAMETER,
    types.SubsystemReview: fields.SUBSYSTEM,
    types.LoopReview: fields.LOOP,
    types.ResponseReview: fields.RESPONSE,
    types.BreakReview: fields.BREAK,
    types.ProjectReview: fields.PROJECT,
    types.PolicyReview: fields.POLICY,
}


@pytest.mark.parametrize("kind", TABLES, ids=lambda kind: kind.__name__)
def test_every_field_has_its_place(kind: type) -> None:
    places = [{one.name for one in TABLES[kind]}, COMPUTED.get(kind, set()), COMPARED_APART.get(kind, set())]
    names = {one.name for one in dataclasses.fields(kind)}
    assert set().union(*places) == names
    assert sum(map(len, places)) == len(names)
