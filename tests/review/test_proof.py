"""Records of proofs: only where asked for, only of bounded results, true, and the same on every run."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Iterator
from pathlib import Path

import pytest

from specgate.exchange import json
from specgate.intake.load import Problems, load
from specgate.measures.table import MEASURES
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


ALL = """
specgate: 1
project: {id: T-2, title: Test, revision: A}
masks:
  course: {over: time, upper: [[0 s, 2], [30 s, 2]], lower: [[0 s, -1], [30 s, -1]]}
  gains: {over: frequency, upper: [[1 rad/s, 60 dB], [100 rad/s, 20 dB]]}
subsystems:
  plant: {input: {unit: 1}, output: {unit: 1}, instances: separate, model: {numerator: [9], denominator: [1, 1.2, 9]}}
  store: {input: {unit: 1}, output: {unit: 1}, model: {numerator: [0.7, 2], denominator: [1, 3, 3, 1, 0]}}
loops:
  level:
    inputs: {order: {unit: 1}}
    signals: {height: plant(order), slow: store(order - 1/4 * slow)}
    breaks: {main: slow}
    responses:
      lift: {from: order, to: slow, input: step, size: 1, reference: order}
      nudge: {from: order, to: height, input: pulse, size: 1, duration: 2 s, reference: 0}
      swing: {from: order, to: height, input: sine, amplitude: 1, frequency: 2 rad/s}
      hiss: {from: order, to: height, input: white_noise, density: 1 s}
requirements:
"""

ASKED = {
    "response: level.lift": (
        "value_at, time: 1 s",
        "deviation_after, time: 3 s",
        "peak_rate",
        "bandwidth",
        "resonance_peak",
        "gain_at, frequency: 3 rad/s",
        "phase_at, frequency: 3 rad/s",
        "within_mask, mask: course",
        "within_mask, mask: gains",
    ),
    "response: level.nudge": (
        "value_at, time: 1 s",
        "deviation_after, time: 3 s",
        "peak_rate",
        "integral_absolute_error",
        "integral_squared_error",
        "settling_time, band: 0.01",
        "maximum_value",
        "within_mask, mask: course",
    ),
    "response: level.swing": ("steady_state_amplitude", "steady_state_phase", "maximum_value"),
    "response: level.hiss": ("standard_deviation",),
    "break: level.main": (
        "gain_margin",
        "phase_margin_lead",
        "delay_margin",
        "least_distance",
        "sensitivity_peak",
        "crossover_frequency",
        "phase_crossover_frequency",
        "gain_at, frequency: 3 rad/s",
        "phase_at, frequency: 3 rad/s",
        "within_mask, mask: gains",
    ),
    "loop: level": ("damping_ratio", "natural_frequency", "decay_rate"),
}
"""What is enclosed, or searched for, of rational loops."""


def requirement(number: int, subject: str, measure: str) -> str:
    name = measure.split(",")[0]
    limit = "equals: true" if name == "within_mask" else f"between: [{', '.join(between(name))}]"
    text = f"  R-{number}: {{text: The level shall behave, verification: analysis, "
    return text + f"criterion: {{{subject}, measure: {measure}, {limit}}}}}\n"


def between(measure: str) -> tuple[str, str]:
    most = LIMITS.get(measure, "100")
    return f"-{most}", most


LIMITS = {
    **dict.fromkeys(("settling_time", "delay_margin"), "100 s"),
    **dict.fromkeys(("integral_absolute_error", "integral_squared_error"), "100 s"),
    **dict.fromkeys(("phase_at", "phase_margin_lead", "steady_state_phase"), "400 deg"),
    **dict.fromkeys(("bandwidth", "crossover_frequency", "phase_crossover_frequency", "natural_frequency"), "9 rad/s"),
    **dict.fromkeys(("decay_rate", "peak_rate"), "100 1/s"),
}


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


def test_every_bounded_result_and_no_other_number_has_a_record(proved: Review) -> None:
    found = list(results(proved))
    assert sum(one.proof_record is not None for one in found) > 15
    assert all((one.proof_record is not None) is (one.proof == "enclosed") for one in found)


def test_every_way_of_finding_a_number_says_what_it_stands_on(tmp_path: Path) -> None:
    asked = [(subject, measure) for subject, measures in ASKED.items() for measure in measures]
    path = tmp_path / "specgate.yaml"
    path.write_text(ALL + "".join(requirement(number, *one) for number, one in enumerate(asked)))
    loaded = load(path)
    assert not isinstance(loaded, Problems), [one.message for one in loaded.findings]
    found = review(loaded, Wanted(proof=True)).requirements
    for number, (subject, measure) in enumerate(asked):
        (criterion,) = found[f"R-{number}"].criteria
        record = criterion.result.proof_record
        assert criterion.result.value is not None, (subject, measure, criterion.result.reason)
        assert record is not None, (subject, measure)
        assert record.method != MEASURES[criterion.measure].method, (subject, measure)
        assert record.ground is not None, (subject, measure)
        assert (record.bits is None) is (criterion.measure == "within_mask"), (subject, measure)


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
