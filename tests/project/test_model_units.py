"""Units through a model: what is converted, what plain numbers carry, what is refused."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import fmpq

from specgate.project.blocks import build
from specgate.project.dimensions import units_by_fit
from specgate.project.instantiate import PI, PRECISE_PI, values
from specgate.project.types import Project
from specgate.terms.findings import Finding

OneBlock = Callable[..., Project]
Findings = Callable[[str], tuple[Finding, ...]]


def gain(project: Project, pi: fmpq = PI) -> fmpq:
    """Return the ratio of the last coefficients that are not zero, coherent SI."""
    made = build(project.subsystems["block"], values(project, pi)).block
    assert made is not None
    numerator = made.numerators[made.outputs[0], made.inputs[0]]
    return next(c for c in numerator.coeffs() if c != 0) / next(c for c in made.denominator.coeffs() if c != 0)


@pytest.mark.parametrize(
    ("model", "source", "target", "expected"),
    [
        # coefficients with units are coherent SI, whatever the ports are declared in
        ("{gain: 0.042 m/s/V}", "V", "mm/s", fmpq(42, 1000)),
        ("{gain: 42 mm/s/V}", "mV", "m/s", fmpq(42, 1000)),
        ("{numerator: [2 bar/V], denominator: [30 ms, 1]}", "V", "bar", fmpq(200000)),
        ("{gain: 1 mm/m}", "m", "mm", fmpq(1, 1000)),
        ("{gain: 50 l/min/V, integrators: 1}", "V", "l", fmpq(50, 60000)),
        # plain coefficients count in the declared units, and time in seconds
        ("{gain: 3}", "V", "bar", fmpq(300000)),
        ("{gain: 3}", "mV", "m", fmpq(3000)),
        ("{numerator: [3], denominator: [2, 1]}", "V", "l/min", fmpq(3, 60000)),
        ("{numerator: [3], denominator: [2 s, 1]}", "V", "mm", fmpq(3, 1000)),
        ("{gain: 3, lags: [2 ms]}", "%", "m", fmpq(300)),
        ("{poles: [-2], zeros: [], leading_coefficient: 3}", "V", "mm/s", fmpq(3, 2000)),
        ("{pid: {form: parallel, proportional: 2, integral: 5}}", "mm", "V", fmpq(5000)),
        ("{state_space: {states: [x], A: [[-2]], B: [[4]], C: [[1]]}}", "V", "mm", fmpq(2, 1000)),
        ("{numerator: [0, 3 mm/m], denominator: [2 s, 1]}", "m", "mm", fmpq(3, 1000)),
        # equal units leave a plain gain as it is
        ("{gain: 3}", "mm", "mm", fmpq(3)),
        ("{gain: 3, integrators: 1}", "mm/s", "mm", fmpq(3)),
        ("{gain: 3}", "deg", "deg", fmpq(3)),
        # equations: a plain side beside one with units is dimensionless where that fits
        ("{equation: {output: [4 kg, 5 N*s/m, 20 kN/m], input: [1]}}", "N", "mm", fmpq(1, 20000)),
        ("{equation: {output: [3.5, 40, 200], input: [12 N/V]}}", "V", "m", fmpq(12, 200)),
        ("{numerator: [5 m/V], denominator: [1, 0]}", "V", "m*s", fmpq(5)),
        ("{numerator: [5 m/s/V], denominator: [1, 4]}", "V", "m", fmpq(5, 4)),
    ],
)
def test_what_a_model_is_in_coherent_si(
    one_block: OneBlock, model: str, source: str, target: str, expected: fmpq
) -> None:
    assert gain(one_block(model, source, target)) == expected


def test_cycles_are_two_pi_with_whatever_pi_is_asked_for(one_block: OneBlock) -> None:
    project = one_block("{gain: 3 rpm/V}", "V", "rad/s")
    assert gain(project) == 3 * 2 * PI / 60
    assert gain(project, PRECISE_PI) == 3 * 2 * PRECISE_PI / 60
    assert build(project.subsystems["block"], values(project)).rounded


def test_a_natural_frequency_in_hertz(one_block: OneBlock) -> None:
    project = one_block("{gain: 1, pairs: [{natural_frequency: 2 Hz, damping: 0.5}]}")
    made = build(project.subsystems["block"], values(project)).block
    assert made is not None
    assert made.denominator.coeffs()[2] == 1 / (4 * PI) ** 2


@pytest.mark.parametrize(("source", "target", "rounded"), [("V", "rpm", True), ("V", "m", False)])
def test_conversions_with_pi_are_known_to_be_rounded(
    one_block: OneBlock, source: str, target: str, rounded: bool
) -> None:
    project = one_block("{gain: 3}", source, target)
    assert build(project.subsystems["block"], values(project)).rounded is rounded


@pytest.mark.parametrize(
    ("model", "source", "target", "by_fit"),
    [
        ("{gain: 1, integrators: 1}", "m/s", "m", False),
        ("{gain: 2}", "V", "V", False),
        ("{gain: 2 m/V, lags: [3 s]}", "V", "m", False),
        ("{numerator: [2 m/V], denominator: [3 s, 1]}", "V", "m", False),
        ("{gain: 2}", "V", "m", True),
        ("{gain: 2 m/V, lags: [3]}", "V", "m", True),
        ("{numerator: [2 m/V], denominator: [3, 1]}", "V", "m", True),
        ("{numerator: [2], denominator: [3 s, 1]}", "V", "m", True),
        ("{equation: {output: [4 kg, 5 N*s/m, 20 kN/m], input: [1]}}", "N", "mm", False),
        ("{equation: {output: [4 kg, 5 N*s/m, 20 kN/m], input: [2, 1]}}", "N", "mm", True),
        ("{equation: {output: [4 kg, 5 N*s/m, 20 kN/m], input: [1, 0]}}", "N", "mm", True),
        ("{state_space: {states: [x], A: [[-2]], B: [[4]], C: [[1]]}}", "V", "V", True),
    ],
)
def test_where_plain_numbers_carry_a_unit_is_listed(
    one_block: OneBlock, model: str, source: str, target: str, by_fit: bool
) -> None:
    assert units_by_fit(one_block(model, source, target)) == (("block",) if by_fit else ())


@pytest.mark.parametrize(
    ("model", "source", "target", "message"),
    [
        ("{numerator: [1 m/V], denominator: [85 ms, 1, 3]}", "V", "m", "beside `85 ms` it has to be in 1/s"),
        ("{numerator: [1 m/V], denominator: [85 ms, 1, 3]}", "V", "m", "a plain number is dimensionless"),
        ("{numerator: [1 m/V], denominator: [85 ms, 2 s]}", "V", "m", "`2 s`, the coefficient of s^0"),
        ("{numerator: [1 m/V], denominator: [85 ms, 1]}", "V", "m/s", "from `V` to `m/s` has to be in"),
        ("{numerator: [1 m/V], denominator: [0.085, 1]}", "V", "m/s", "does not make up for it"),
        ("{numerator: [12 N/V], denominator: [3, 40, 200]}", "mV", "m", "leaves its size in doubt"),
        ("{gain: 3 m/V}", "V", "m/s", "this factor has to be in m/s/V, but it is in m/V"),
        ("{gain: 3 m/V, integrators: 1}", "V", "m", "this factor has to be in m/s/V, but it is in m/V"),
        ("{gain: 3}", "m", "mm", "a plain gain from `m` to `mm` can be read in two ways"),
        ("{gain: 3}", "m", "mm", "such as `1 mm/m`"),
        ("{gain: 3, integrators: 1}", "m/s", "mm", "can be read in two ways"),
        ("{numerator: [3], denominator: [2 s, 1]}", "m", "mm", "can be read in two ways"),
        ("{numerator: [3], denominator: [2, 1]}", "%", "1", "can be read in two ways"),
        ("{pid: {form: parallel, proportional: 3}}", "deg", "rad", "can be read in two ways"),
        ("{state_space: {states: [x], A: [[-2]], B: [[4]], C: [[1]]}}", "m", "mm", "can be read in two ways"),
        ("{gain: 1, lags: [3 m]}", "V", "V", "a time constant is in s, this is m"),
        ("{gain: 1, pairs: [{natural_frequency: 8 1/s, damping: 0.5}]}", "V", "V", "radians or cycles"),
        ("{gain: 1, pairs: [{natural_frequency: slow, damping: 0.5}]}", "V", "V", "radians or cycles"),
        ("{gain: 1, pairs: [{natural_frequency: 8 s, damping: 0.5}]}", "V", "V", "is in rad/s, this is s"),
        ("{gain: 1, pairs: [{natural_frequency: 0, damping: 0.5}]}", "V", "V", "greater than zero"),
        ("{gain: 1, pairs: [{natural_frequency: 8 rad/s, damping: 0.5 s}]}", "V", "V", "a damping ratio is in 1"),
        ("{poles: [-3 Hz], zeros: [], leading_coefficient: 1}", "V", "V", "poles and zeros are in 1/s"),
        ("{poles: [-3 s], zeros: [], leading_coefficient: 1}", "V", "V", "a pole or zero is in 1/s"),
        ("{pid: {form: parallel, proportional: 140 V/m, integral: 60 V/m}}", "m", "V", "`integral` is in"),
        ("{pid: {form: parallel, proportional: 140 V/m, integral: 60}}", "m", "V", "`integral` is in"),
        ("{pid: {form: standard, gain: 3 V/m, integral_time: 2 m}}", "m", "V", "a time of a controller is in s"),
        ("{pid: {form: standard, gain: 3, integral_time: 0}}", "V", "V", "an integral time of zero"),
        ("{pid: {form: standard, gain: 3, derivative_lag: 2}}", "V", "V", "no derivative term"),
        ("{pid: {form: standard, gain: 3, set_point_weight: 0.5}}", "V", "V", "needs two inputs"),
        (
            "{pid: {form: standard, gain: 3, derivative_time: 1, derivative_on: measurement}}",
            "V",
            "V",
            "needs two inputs",
        ),
        ("{numerator: [1], denominator: [0, 0]}", "V", "V", "the denominator is zero"),
        ("{numerator: [1], denominator: [0 s, 0]}", "V", "V", "the denominator is zero"),
        (
            "{state_space: {states: [x, y], A: [[1, 2]], B: [[1], [0]], C: [[1, 0]]}}",
            "V",
            "V",
            "A has to have 2 rows of 2",
        ),
    ],
)
def test_what_does_not_fit_is_refused(findings: Findings, model: str, source: str, target: str, message: str) -> None:
    found = findings(
        f"""
        subsystems:
          block:
            parameters: {{slow: {{value: 3 1/s, source: x}}}}
            input: {{unit: "{source}"}}
            output: {{unit: "{target}"}}
            model: {model}
        """
    )
    assert [message in finding.message for finding in found] == [True], [finding.message for finding in found]
    assert found[0].rule in ("dimension-mismatch", "schema-violation")
    assert found[0].subsystem == "block"
    assert found[0].place.line >= 3


@pytest.mark.parametrize(
    "model",
    [
        "{gain: 1, lags: [" + ", ".join(["2"] * 3000) + "]}",
        "{numerator: [1], denominator: [" + ", ".join(["2"] * 3000) + "]}",
        "{poles: [" + ", ".join(["-2"] * 101) + "], zeros: [], leading_coefficient: 1}",
        "{gain: 1, integrators: 20, lags: [" + ", ".join(["2"] * 81) + "]}",
    ],
)
def test_a_model_that_nobody_has_written_is_refused_before_it_is_multiplied_out(
    findings: Findings, work: Callable[[Callable[[], object]], int], model: str
) -> None:
    def check() -> None:
        found = findings(f"subsystems: {{block: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {model}}}}}")
        assert ["more than the 100" in finding.message for finding in found] == [True]

    assert work(check) < 2_000_000


STATES = """
subsystems:
  block:
    parameters:
      mass: {{value: 4 kg, source: x}}
      damping: {{value: 5 N*s/m, source: x}}
      stiffness: {{value: 20 N/mm, source: x}}
    input: {{unit: N}}
    output: {{unit: mm}}
    model:
      state_space:
        states: [position, velocity]
        A: [[0, 1], [{stiffness}, -damping/mass]]
        B: [[0], [1/mass]]
        C: [[{read}, 0]]
"""


def test_dimensions_of_states_are_found(project: Callable[[str], Project]) -> None:
    made = project(STATES.format(stiffness="-stiffness/mass", read="1"))
    assert gain(made) == fmpq(1, 20000)
    assert units_by_fit(made) == ()


@pytest.mark.parametrize(
    ("stiffness", "read", "where"),
    [("-stiffness", "1", "A[2][1]"), ("-stiffness/mass", "1 1/s", "C[1][1]"), ("-stiffness/damping", "1", "A[2][1]")],
)
def test_states_that_do_not_fit_are_refused(findings: Findings, stiffness: str, read: str, where: str) -> None:
    found = findings(STATES.format(stiffness=stiffness, read=read))
    assert len(found) == 1
    assert found[0].rule == "dimension-mismatch"
    assert "the rest of the model wants" in found[0].message
