"""Plain values of a Review: units of parameters, radii of poles, fragile results, what the files say."""

from __future__ import annotations

from collections.abc import Callable
from math import hypot

import pytest
from flint import arb, fmpq, fmpq_poly
from hypothesis import given
from hypothesis import strategies as st

from specgate.compliance.readings import Reading
from specgate.response.answers import Answer, Fragile
from specgate.review.printing import as_plain, coefficients, poles, result
from specgate.review.types import Review
from specgate.systems.roots import certified_roots
from specgate.terms.units import UnitTable

Reviewed = Callable[[str], Review]
UNITS = UnitTable.standard()

PROJECT = """
    specgate: 1
    project: {id: Q-1, title: Values, revision: A, units: {count: 1/65536 rev}}
    parameters:
      lag: {value: 85 ms, tolerance: [-10 %, +25 %], source: "Q-TN-1, table 2"}
      loss: -6 dB
      speed: 1500 rpm
      twice: {formula: 2 * lag}
      turned: {formula: speed * lag}
      warmer: 5 degC
      share: 8 %
      force: 2.5 kN
      field: 3 kV/mm
      plain: 4
    subsystems:
      block: {input: {unit: V}, output: {unit: mm}, model: {numerator: [2 mm/V], denominator: [lag, 1]}}
      law: {input: {unit: 1}, output: {unit: 1}, model: {equation: {output: [1, 2], input: [3]}}}
      two:
        inputs: {a: {unit: 1}, b: {unit: 1}}
        outputs: {x: {unit: 1}, y: {unit: 1}}
        model: {numerators: {x: {a: [1], b: [2]}, y: {b: [1, 1]}}, denominator: [1, 3]}
      late: {input: {unit: 1}, output: {unit: 1}, model: {gain: 1, dead_time: 20 ms}}
    loops:
      loop: {inputs: {u: {unit: V}}, signals: {y: block(u)}}
    """


@pytest.mark.parametrize(
    ("name", "value", "exact", "unit"),
    [
        ("lag", 0.085, "17/200", "s"),
        ("loss", -6.0, "-6", "dB"),
        ("speed", 1500.0, "1500", "rpm"),
        ("twice", 0.17, "17/100", "s"),
        ("turned", 13.3517687778, None, "1"),  # 50 pi rad/s times 0.085 s
        ("warmer", 5.0, "5", "degC"),
        ("share", 0.08, "2/25", "1"),
        ("force", 2500.0, "2500", "N"),
        ("plain", 4.0, "4", "1"),
    ],
)
def test_parameters_are_in_coherent_units_except_those_with_pi_or_db(
    reviewed: Reviewed, name: str, value: float, exact: str | None, unit: str
) -> None:
    found = reviewed(PROJECT).specification.parameters[name]
    assert (found.value, found.exact, found.unit) == (value, exact, unit)


def test_what_else_the_files_say(reviewed: Reviewed) -> None:
    said = reviewed(PROJECT).specification
    assert said.parameters["lag"].tolerance == {"lower": "-10 %", "upper": "+25 %", "as_written": "[-10 %, +25 %]"}
    assert said.parameters["lag"].source == "Q-TN-1, table 2"
    assert said.parameters["field"].value == 3e6
    assert (said.subsystems["block"].numerator, said.subsystems["block"].reads) == (("1/500",), ("lag",))
    assert (said.subsystems["block"].used, said.subsystems["law"].used) == (True, False)
    assert said.subsystems["law"].model == "differential equation"
    assert said.subsystems["two"].numerators == {"x/a": ("1",), "x/b": ("2",), "y/b": ("1", "1")}
    assert said.subsystems["two"].numerator == ()
    assert said.subsystems["late"].model == "factors, dead time 20 ms"


@given(st.lists(st.tuples(st.integers(-40, 40), st.integers(0, 40)), min_size=1, max_size=4))
def test_the_true_pole_lies_within_the_radius_of_the_printed_one(places: list[tuple[int, int]]) -> None:
    polynomial, true = fmpq_poly([1]), []
    for tenths, sevenths in places:
        real, imaginary = fmpq(tenths, 10), fmpq(sevenths, 7)
        factor = fmpq_poly([real * real + imaginary * imaginary, -2 * real, 1]) if sevenths else fmpq_poly([-real, 1])
        polynomial *= factor
        true += [(real, imaginary), (real, -imaginary)] if sevenths else [(real, fmpq(0))]
    printed = poles(certified_roots(polynomial, 128))
    assert sum(one.multiplicity for one in printed) == len(true)
    for real, imaginary in true:
        place = (int(real.p) / int(real.q), int(imaginary.p) / int(imaginary.q))
        slack = 1e-15 * hypot(*place)  # of the float that stands for the true place here
        assert any(hypot(one.real - place[0], one.imaginary - place[1]) <= one.radius + slack for one in printed)


def test_poles_on_the_axis_print_an_exact_zero() -> None:
    assert [(one.real, one.imaginary) for one in poles(certified_roots(fmpq_poly([4, 0, 1]), 128))] == [
        (0.0, -2.0),
        (0.0, 2.0),
    ]
    (origin,) = poles(certified_roots(fmpq_poly([0, 0, 1]), 128))
    assert (origin.real, origin.imaginary, origin.multiplicity, origin.radius) == (0.0, 0.0, 2, 0.0)


def test_polynomials_have_their_highest_power_first() -> None:
    assert coefficients(fmpq_poly([fmpq(1, 3), 0, -2])) == ("-2", "0", "1/3")
    assert coefficients(fmpq_poly()) == ("0",)


def test_a_fragile_result_names_the_other_candidate() -> None:
    fragile = Fragile("a peak touches the edge of the band", lambda bits: arb(fmpq(18, 5)))
    answer = Answer.of_ball(lambda bits: arb(5), fragile)
    found = result(Reading.once(answer), UNITS.parse("ms"), None)
    assert found.fragile == "a peak touches the edge of the band; the other candidate is 3600 ms"


def test_no_value_and_no_limit() -> None:
    absent = result(Reading.once(Answer.nothing("it does not settle")), None, None)
    assert (absent.value, absent.reason, absent.infinite) == (None, "it does not settle", None)
    infinite = result(Reading.once(Answer.nothing("an integrator", infinite=True)), None, None)
    assert (infinite.value, infinite.infinite) == (None, True)
    assert result(Reading.once(Answer.of_truth(False)), None, None).value is False
    counted = result(Reading.once(Answer.of_exact(2)), None, None)
    assert (counted.value, counted.exact, counted.unit) == (2, None, None)


def test_kept_content_becomes_what_json_can_hold() -> None:
    assert as_plain({"a": (1, fmpq(1, 2)), "b": None, "c": True}) == {"a": [1, "1/2"], "b": None, "c": True}
