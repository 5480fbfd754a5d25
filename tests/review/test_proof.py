"""Records of proofs: only where asked for, only of bounded results, true, and the same on every run."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Iterator

import pytest

from specgate.exchange import json
from specgate.intake.load import Problems, load
from specgate.project.types import Project
from specgate.review.build import review
from specgate.review.types import Result, Review
from specgate.review.wanted import Wanted

TEXT = """
specgate: 1
project: {id: T-1, title: Test, revision: A}
subsystems:
  plant:
    input: {unit: 1, linear_range: [-1, 1]}
    output: {unit: 1}
    instances: separate
    model: {numerator: [9], denominator: [1, 1.2, 9]}
loops:
  level:
    inputs: {order: {unit: 1}}
    signals: {height: plant(order), slow: plant(order - 1/2 * slow)}
    breaks: {main: slow}
    responses:
      lift: {from: order, to: height, input: step, size: 1}
      nudge: {from: order, to: height, input: pulse, size: 1, duration: 2 s}
requirements:
  R-1:
    text: The level shall settle within 2 % in no more than 9 s.
    verification: analysis
    criterion: {response: level.lift, measure: settling_time, band: 2 %, at_most: 9 s}
"""


@pytest.fixture(scope="module")
def project(tmp_path_factory: pytest.TempPathFactory) -> Project:
    path = tmp_path_factory.mktemp("proof") / "specgate.yaml"
    path.write_text(TEXT)
    loaded = load(path)
    assert not isinstance(loaded, Problems), [one.message for one in loaded.findings]
    return loaded


@pytest.fixture(scope="module")
def proved(project: Project) -> Review:
    return review(project, Wanted(proof=True))


def results(node: object) -> Iterator[Result]:
    if isinstance(node, Result):
        yield node
    if dataclasses.is_dataclass(node) and not isinstance(node, type):
        for field in dataclasses.fields(node):
            yield from results(getattr(node, field.name))
    elif isinstance(node, dict):
        for part in node.values():
            yield from results(part)
    elif isinstance(node, tuple):
        for part in node:
            yield from results(part)


def test_every_bounded_result_and_no_other_has_a_record(proved: Review) -> None:
    found = list(results(proved))
    assert sum(one.proof_record is not None for one in found) > 15
    assert all((one.proof_record is not None) is (one.proof == "enclosed") for one in found)


def test_nothing_else_changes_and_nothing_is_there_unasked(project: Project, proved: Review) -> None:
    plain = review(project)
    assert [dataclasses.replace(one, proof_record=None) for one in results(proved)] == list(results(plain))
    assert "proof_record" not in json.write(plain)
    assert json.read(json.write(proved)) == proved


def test_the_same_record_on_every_run(project: Project, proved: Review) -> None:
    assert json.write(review(project, Wanted(proof=True))) == json.write(proved)


def test_what_the_record_of_a_settling_time_says_is_so(proved: Review) -> None:
    (criterion,) = proved.requirements["R-1"].criteria
    record = criterion.result.proof_record
    assert record is not None
    assert (record.poles, record.brackets) == (2, 1)
    assert record.bits in (64, 128, 192, 256)
    assert record.pole_radius is not None
    assert record.searched_until is not None
    assert 0 < record.pole_radius < 1e-30
    assert math.log10(record.pole_radius) == pytest.approx(round(math.log10(record.pole_radius)))
    # the envelope 1/sqrt(1 - zeta^2) exp(-0.6 t), zeta = 0.2, is 2 % from here on
    envelope = math.log(50 / math.sqrt(1 - 0.04)) / 0.6
    assert envelope <= record.searched_until * (1 + 1e-12) <= 1.02 * envelope
    assert record.searched_until >= criterion.result.value  # type: ignore[operator]


def test_a_difference_has_the_records_of_both(proved: Review) -> None:
    (rise,) = [one for one in proved.loops["level"].responses["lift"].measures if one.measure == "rise_time"]
    assert rise.proof_record is not None
    assert rise.proof_record.parts is not None
    assert [(name, part.brackets) for name, part in rise.proof_record.parts.items()] == [("later", 1), ("earlier", 1)]


def test_an_exact_peak_has_none(proved: Review) -> None:
    assert [one.peak and one.peak.proof for one in proved.requirements["R-1"].assumptions] == ["exact", "exact"]
    assert all(one.peak is None or one.peak.proof_record is None for one in proved.requirements["R-1"].assumptions)


def test_the_schema_knows_records(proved: Review) -> None:
    import json as plain
    from importlib.resources import files

    import jsonschema

    schema = plain.loads(files("specgate.schemas").joinpath("results.schema.json").read_text())
    jsonschema.validate(plain.loads(json.write(proved)), schema)


def test_margins_say_what_was_counted(proved: Review) -> None:
    found = {one.measure: one for one in proved.loops["level"].breaks["main"].measures}
    record = found["phase_margin"].proof_record
    assert record is not None
    assert record.counts is not None
    assert record.counts["gain crossings"] == len(
        [c for c in proved.loops["level"].breaks["main"].crossings if c.kind == "gain"]
    )
