"""What a Review holds of the models: what the project says of them, and what a requirement takes for granted."""

from __future__ import annotations

from collections.abc import Callable

from specgate.exchange import json
from specgate.review.types import AssumptionReview, ModelAssumptionReview, Review

PROJECT = """
    specgate: 1
    project: {id: V-1, title: Validity, revision: A}
    subsystems:
      law:
        input: {unit: 1}
        output: {unit: 1}
        model: {gain: 2}
        stands_for: {sampled: 20 ms, by: hold_as_delay, delay: 8 ms}
      plant:
        input: {unit: 1, linear_range: [-9, 9]}
        output: {unit: 1}
        model: {gain: 1, integrators: 1}
        valid_to: 1.5 rad/s
        pedigree: {kind: data_sheet, from: V-DS-1}
    loops:
      loop:
        inputs: {u: {unit: 1}}
        signals: {y: plant(law(u - y))}
        responses: {r: {from: u, to: y, input: step, size: 1}}
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {response: loop.r, measure: settling_time, band: 2 %, at_most: 100 s}
    """


def test_what_the_project_says_of_its_models_stands_as_written(reviewed: Callable[[str], Review]) -> None:
    subsystems = reviewed(PROJECT).specification.subsystems
    assert subsystems["law"].model_claims == {"stands_for": "sampled 20 ms, delay 8 ms, by hold_as_delay"}
    assert subsystems["plant"].model_claims == {"pedigree": "data_sheet, V-DS-1", "valid_to": "1.5 rad/s"}


def test_a_requirement_lists_ranges_and_models_with_their_numbers(reviewed: Callable[[str], Review]) -> None:
    found = reviewed(PROJECT)
    assumptions = found.requirements["R"].assumptions
    assert [one.kind for one in assumptions] == ["linear_range", "pedigree", "valid_to", "stands_for"]
    assert [type(one) for one in assumptions] == [AssumptionReview, *[ModelAssumptionReview] * 3]
    validity = next(one for one in assumptions if one.kind == "valid_to")
    assert isinstance(validity, ModelAssumptionReview)
    assert (validity.holds, validity.standing, validity.subsystem) == (False, "out_of_range", "plant")
    numbers = {one.name: (one.value.value, one.value.unit) for one in validity.figures}
    assert numbers["valid_to"] == (1.5, "rad/s")
    assert numbers["the fastest mode that counts"] == (2.0, "rad/s")
    assert found.requirements["R"].standing == "out_of_range"
    assert any("rests on a model that does not hold" in one for one in found.gate.reasons)
    assert json.read(json.write(found)) == found
