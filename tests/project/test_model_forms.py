"""Every rational form of a model, against numpy, scipy and the formulas written out."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction

import numpy as np
import pytest
from flint import fmpq, fmpq_mat, fmpq_poly
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from scipy import signal

from specgate.project.blocks import build
from specgate.project.instantiate import transfer, values
from specgate.project.types import Project
from specgate.systems.blocks import Block

OneBlock = Callable[..., Project]
_SHARED = settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
POINTS = [0.3 + 0.7j, -1.1 + 2.0j, 5.0 + 0.0j, 0.0 + 3.3j]


def block(project: Project) -> Block:
    built = build(project.subsystems["block"], values(project)).block
    assert built is not None
    return built


def coefficients(polynomial: fmpq_poly) -> list[float]:
    """Return the coefficients, highest power first."""
    return [float(Fraction(int(c.p), int(c.q))) for c in reversed(polynomial.coeffs())]


def at(project: Project, s: complex, output: str | None = None, source: str | None = None) -> complex:
    """Return the transfer function of the block at a point, in floats."""
    made = block(project)
    numerator = made.numerators[output or made.outputs[0], source or made.inputs[0]]
    return complex(np.polyval(coefficients(numerator), s) / np.polyval(coefficients(made.denominator), s))


def test_polynomials(one_block: OneBlock) -> None:
    made = block(one_block("{numerator: [2, -3.5], denominator: [0.25, 0, 7]}"))
    assert made.numerators[made.outputs[0], made.inputs[0]] == fmpq_poly([fmpq(-7, 2), 2])
    assert made.denominator == fmpq_poly([7, 0, fmpq(1, 4)])


def test_a_common_factor_is_kept(one_block: OneBlock) -> None:
    made = block(one_block("{numerator: [1, 1], denominator: [1, 3, 2]}"))
    assert made.denominator.degree() == 2


def test_differential_equation(one_block: OneBlock) -> None:
    # 3 y'' + 2 y' + 5 y = 4 u' + u
    equation = one_block("{equation: {output: [3, 2, 5], input: [4, 1]}}")
    polynomials = one_block("{numerator: [4, 1], denominator: [3, 2, 5]}")
    assert block(equation) == block(polynomials)


def test_factored(one_block: OneBlock) -> None:
    project = one_block(
        "{gain: 2.5, integrators: 2, differentiators: 1, lags: [0.4, -3], leads: [0.1], "
        "pairs: [{natural_frequency: 5, damping: 0.3}], zero_pairs: [{natural_frequency: 2, damping: -0.1}]}"
    )
    for s in POINTS:
        pair = s**2 / 25 + 2 * 0.3 * s / 5 + 1
        zeros = s**2 / 4 - 2 * 0.1 * s / 2 + 1
        expected = 2.5 * s * (1 + 0.1 * s) * zeros / (s**2 * (1 + 0.4 * s) * (1 - 3 * s) * pair)
        assert at(project, s) == pytest.approx(expected, rel=1e-12)
    assert block(project).denominator.degree() == 6


def test_the_gain_of_a_factored_model_is_that_at_rest(one_block: OneBlock) -> None:
    made = block(one_block("{gain: 2.5, lags: [0.4, 3], pairs: [{natural_frequency: 5, damping: 0.3}]}"))
    assert made.numerators[made.outputs[0], made.inputs[0]](0) / made.denominator(0) == fmpq(5, 2)


def test_poles_and_zeros_against_scipy(one_block: OneBlock) -> None:
    project = one_block(
        "{zeros: [-3, {real: -1, imaginary: 2}], poles: [0, -0.5, {real: -4, imaginary: 6}, {real: 1, imaginary: -1}], "
        "leading_coefficient: -7}"
    )
    numerator, denominator = signal.zpk2tf([-3, -1 + 2j, -1 - 2j], [0, -0.5, -4 + 6j, -4 - 6j, 1 + 1j, 1 - 1j], -7)
    made = block(project)
    assert coefficients(made.numerators[made.outputs[0], made.inputs[0]]) == pytest.approx(list(numerator), rel=1e-12)
    assert coefficients(made.denominator) == pytest.approx(list(denominator), rel=1e-12)


# --- state space -------------------------------------------------------------------------------------------


def _rows(matrix: list[list[int]]) -> str:
    return "[" + ", ".join("[" + ", ".join(map(str, row)) + "]" for row in matrix) + "]"


def _state_space(one_block: OneBlock, a: list[list[int]], b: list[list[int]], c: list[int], d: list[int]) -> Project:
    names = ", ".join(f"x{i}" for i in range(len(a)))
    inputs = "inputs: {" + ", ".join(f"u{i}: {{unit: 1}}" for i in range(len(d))) + "}"
    model = f"{{state_space: {{states: [{names}], A: {_rows(a)}, B: {_rows(b)}, C: {_rows([c])}, D: {_rows([d])}}}}}"
    return one_block(model, inputs=inputs)


def _matrix(rows: int, columns: int) -> st.SearchStrategy[list[list[int]]]:
    row = st.lists(st.integers(-9, 9), min_size=columns, max_size=columns)
    return st.lists(row, min_size=rows, max_size=rows)


def _system(order: int) -> st.SearchStrategy[tuple[list[list[int]], ...]]:
    """A, B and C and D as one row each, with two inputs."""
    return st.tuples(_matrix(order, order), _matrix(order, 2), _matrix(1, order), _matrix(1, 2))


@_SHARED
@given(st.integers(1, 5).flatmap(_system), st.fractions(-5, 5, max_denominator=7))
def test_state_space_is_its_resolvent_exactly(
    one_block: OneBlock,
    system: tuple[list[list[int]], ...],
    point: Fraction,
) -> None:
    a, b, (c,), (d,) = system
    made = block(_state_space(one_block, a, b, c, d))
    s = fmpq(point.numerator, point.denominator)
    n = len(a)
    resolvent = fmpq_mat([[(s if i == j else fmpq(0)) - a[i][j] for j in range(n)] for i in range(n)])
    determinant = resolvent.det()
    assert made.denominator(s) == determinant
    if determinant == 0:
        return
    states = resolvent.solve(fmpq_mat([[fmpq(entry) for entry in row] for row in b]))
    for column in range(2):
        expected = sum((c[i] * states[i, column] for i in range(n)), fmpq(d[column]))
        numerator = made.numerators.get((made.outputs[0], f"u{column}"), fmpq_poly())
        assert numerator(s) / determinant == expected


def test_state_space_against_scipy(one_block: OneBlock) -> None:
    a, b, c, d = [[-1, 2, 0], [0, -3, 4], [5, 0, -6]], [[1, 0], [0, 2], [3, 1]], [1, -1, 2], [0, 3]
    made = block(_state_space(one_block, a, b, c, d))
    for column in range(2):
        numerator, denominator = signal.ss2tf(np.array(a), np.array(b), np.array([c]), np.array([d]), input=column)
        ours = coefficients(made.numerators[made.outputs[0], f"u{column}"])
        assert [0.0] * (len(numerator[0]) - len(ours)) + ours == pytest.approx(list(numerator[0]), rel=1e-9, abs=1e-9)
        assert coefficients(made.denominator) == pytest.approx(list(denominator), rel=1e-9)


def test_an_unobservable_mode_stays_in_the_denominator(one_block: OneBlock) -> None:
    made = block(_state_space(one_block, [[-1, 0], [0, 2]], [[1, 0], [1, 0]], [1, 0], [0, 0]))
    assert made.denominator == fmpq_poly([-2, -1, 1])
    assert made.numerators[made.outputs[0], "u0"] == fmpq_poly([-2, 1])


def test_several_inputs_and_outputs_over_one_denominator(project: Callable[[str], Project]) -> None:
    made = project(
        """
        subsystems:
          block:
            inputs: {duty: {unit: 1}, load: {unit: A}}
            outputs: {voltage: {unit: V}, current: {unit: A}}
            model:
              numerators:
                voltage: {duty: [12 V], load: [-2 mohm*s, -0.1 ohm]}
                current: {duty: [3 A*s, 0.5 A]}
              denominator: [4 ms**2, 5 ms, 1]
        """
    )
    found = transfer(made, "block", values(made))
    denominator = fmpq_poly([1, fmpq(5, 1000), fmpq(4, 10**6)])
    assert {pair: tf.denominator for pair, tf in found.items()} == dict.fromkeys(found, denominator)
    assert found["voltage", "load"].numerator == fmpq_poly([fmpq(-1, 10), fmpq(-2, 1000)])
    assert found["current", "duty"].numerator == fmpq_poly([fmpq(1, 2), 3])
    assert found["current", "load"].numerator == fmpq_poly()


# --- controllers -------------------------------------------------------------------------------------------

_TWO = "inputs: {set_point: {unit: 1}, measurement: {unit: 1}}"


def test_parallel_controller(one_block: OneBlock) -> None:
    full = one_block("{pid: {form: parallel, proportional: 2, integral: 3, derivative: 0.5, derivative_lag: 0.1}}")
    ideal = one_block("{pid: {form: parallel, proportional: 2, derivative: 0.5}}")
    for s in POINTS:
        assert at(full, s) == pytest.approx(2 + 3 / s + 0.5 * s / (1 + 0.1 * s), rel=1e-12)
        assert at(ideal, s) == pytest.approx(2 + 0.5 * s, rel=1e-12)
    assert block(full).denominator.degree() == 2
    assert block(ideal).denominator.degree() == 0


def test_a_term_of_zero_leaves_no_mode_behind(one_block: OneBlock) -> None:
    made = block(one_block("{pid: {form: parallel, proportional: 2, integral: 0, derivative: 0, derivative_lag: 0.1}}"))
    assert (made.denominator, made.numerators[made.outputs[0], made.inputs[0]]) == (fmpq_poly([1]), fmpq_poly([2]))


def test_standard_controller(one_block: OneBlock) -> None:
    made = one_block("{pid: {form: standard, gain: 4, integral_time: 2, derivative_time: 0.5, derivative_lag: 0.05}}")
    for s in POINTS:
        assert at(made, s) == pytest.approx(4 * (1 + 1 / (2 * s) + 0.5 * s / (1 + 0.05 * s)), rel=1e-12)


def test_series_controller(one_block: OneBlock) -> None:
    made = one_block("{pid: {form: series, gain: 4, integral_time: 2, derivative_time: 0.5, derivative_lag: 0.05}}")
    for s in POINTS:
        assert at(made, s) == pytest.approx(4 * (1 + 1 / (2 * s)) * (1 + 0.5 * s) / (1 + 0.05 * s), rel=1e-12)


@pytest.mark.parametrize("weight", [1, 0.3, 0])
@pytest.mark.parametrize("on", ["error", "measurement"])
def test_standard_controller_with_two_degrees_of_freedom(one_block: OneBlock, weight: float, on: str) -> None:
    made = one_block(
        "{pid: {form: standard, gain: 4, integral_time: 2, derivative_time: 0.5, derivative_lag: 0.05, "
        f"set_point_weight: {weight}, derivative_on: {on}}}}}",
        inputs=_TWO,
    )
    for s in POINTS:
        derivative = 0.5 * s / (1 + 0.05 * s)
        forward = 4 * (weight + 1 / (2 * s) + (derivative if on == "error" else 0))
        assert at(made, s, source="set_point") == pytest.approx(forward, rel=1e-12)
        assert at(made, s, source="measurement") == pytest.approx(-4 * (1 + 1 / (2 * s) + derivative), rel=1e-12)


@pytest.mark.parametrize("on", ["error", "measurement"])
def test_series_controller_with_two_degrees_of_freedom(one_block: OneBlock, on: str) -> None:
    made = one_block(
        "{pid: {form: series, gain: 4, integral_time: 2, derivative_time: 0.5, derivative_lag: 0.05, "
        f"set_point_weight: 0.25, derivative_on: {on}}}}}",
        inputs=_TWO,
    )
    for s in POINTS:
        lead = (1 + 0.5 * s) / (1 + 0.05 * s)
        forward = 4 * (0.25 + 1 / (2 * s)) * (lead if on == "error" else 1)
        assert at(made, s, source="set_point") == pytest.approx(forward, rel=1e-12)
        assert at(made, s, source="measurement") == pytest.approx(-4 * (1 + 1 / (2 * s)) * lead, rel=1e-12)


def test_set_point_and_measurement_go_by_name_then_by_order(one_block: OneBlock) -> None:
    model = "{pid: {form: standard, gain: 4, set_point_weight: 0.5}}"
    named = block(one_block(model, inputs="inputs: {measurement: {unit: 1}, set_point: {unit: 1}}"))
    ordered = block(one_block(model, inputs="inputs: {asked: {unit: 1}, seen: {unit: 1}}"))
    assert named.numerators[named.outputs[0], "set_point"] == fmpq_poly([2])
    assert named.numerators[named.outputs[0], "measurement"] == fmpq_poly([-4])
    assert ordered.numerators[ordered.outputs[0], "asked"] == fmpq_poly([2])


def test_series_and_standard_form_of_one_controller(one_block: OneBlock) -> None:
    # K' = K (1 + Td/Ti), Ti' = Ti + Td, Td' = Ti Td/(Ti + Td): Astrom and Hagglund, PID Controllers (1995), section 3.2
    series = one_block("{pid: {form: series, gain: 4, integral_time: 2, derivative_time: 0.5}}")
    standard = one_block("{pid: {form: standard, gain: 5, integral_time: 2.5, derivative_time: 0.4}}")
    one, other = block(series), block(standard)
    pair = (one.outputs[0], one.inputs[0])
    assert one.numerators[pair] * other.denominator == other.numerators[pair] * one.denominator
