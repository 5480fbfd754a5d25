"""The side of an error as seen from the limit, and the distance that is left to it."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import pytest
from flint import arb, fmpq

from specgate.compliance.assessment import Assessment, Side
from specgate.compliance.compare import Limits
from specgate.compliance.reserves import reserve
from specgate.compliance.sides import formula_error, side
from specgate.response.answers import Answer
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Verdict

Judge = Callable[[str], Mapping[str, Assessment]]


def enclosed(value: fmpq) -> Answer:
    def refine(bits: int) -> arb:
        with working_precision(bits):
            return arb(value) + arb(0, arb(fmpq(1, 2**bits)))

    return Answer.of_ball(refine)


TWO_SIDED = Limits(least=fmpq(4), most=fmpq(6))


@pytest.mark.parametrize(
    ("promise", "truth", "limits", "expected"),
    [
        (1, 2, Limits(most=fmpq(3)), "unsafe"),
        (2, 1, Limits(most=fmpq(3)), "safe"),
        (1, 2, Limits(least=fmpq(3)), "safe"),
        (2, 1, Limits(least=fmpq(3)), "unsafe"),
        (5, 6, TWO_SIDED, "unsafe"),
        (7, 5, TWO_SIDED, "safe"),
        (2, 2, Limits(most=fmpq(3)), "none"),
        (1, 2, Limits(truth=True), "none"),
    ],
)
@pytest.mark.parametrize("make", [Answer.of_exact, enclosed])
def test_a_promise_better_than_the_truth_is_unsafe(
    promise: int, truth: int, limits: Limits, expected: Side, make: Callable[[fmpq], Answer]
) -> None:
    assert side(make(fmpq(promise)), make(fmpq(truth)), limits) == expected


def test_the_error_is_formula_over_truth_less_one() -> None:
    exact = formula_error(Answer.of_exact(3), Answer.of_exact(4), Limits(most=fmpq(5)))
    assert (exact.absolute.exact, exact.relative and exact.relative.exact) == (-1, fmpq(-1, 4))
    ball = formula_error(enclosed(fmpq(3)), enclosed(fmpq(4)), Limits(most=fmpq(5)))
    assert ball.relative is not None
    assert ball.relative.enclose(128).contains(fmpq(-1, 4))
    assert formula_error(Answer.of_exact(1), Answer.of_exact(0), Limits(most=fmpq(5))).relative is None
    assert formula_error(enclosed(fmpq(1)), enclosed(fmpq(0)), Limits(most=fmpq(5))).relative is None


PROJECT = """
    specgate: 1
    project: {{id: S-1, title: Reserves, revision: A}}
    subsystems:
      lag: {{input: {{unit: V}}, output: {{unit: mm}}, model: {{numerator: [10 mm/V], denominator: [1 s, 1]}}}}
    loops:
      loop:
        inputs: {{u: {{unit: V}}}}
        signals: {{y: lag(u)}}
        breaks: {{b: y}}
        responses: {{r: {{from: u, to: y, input: step, size: 1 V}}}}
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {{{criterion}}}
    """
FINAL = "response: loop.r, measure: final_value"


@pytest.mark.parametrize(
    ("criterion", "value", "relative"),
    [
        ("response: loop.r, measure: peak_deviation, at_most: 12 mm", 2, fmpq(1, 6)),
        ("response: loop.r, measure: peak_deviation, at_most: 8 mm", -2, fmpq(-1, 4)),
        ("response: loop.r, measure: peak_deviation, at_most: 0 mm", -10, None),
        ("response: loop.r, measure: peak_deviation, at_least: 8 mm", 2, fmpq(1, 4)),
        (f"{FINAL}, between: [9 mm, 13 mm]", 1, fmpq(1, 2)),
        (f"{FINAL}, between: [9 mm, 9 mm]", -1, None),
        (f"{FINAL}, within: 4 mm, of: 1.1 cm", 3, fmpq(3, 4)),
        (f"{FINAL}, within: 4 mm, of: 20 mm", -6, fmpq(-3, 2)),
    ],
)
def test_what_is_left_to_a_limit(judge: Judge, criterion: str, value: int, relative: fmpq | None) -> None:
    (assessed,) = judge(PROJECT.format(criterion=criterion))["R"].criteria
    found = reserve(assessed)
    assert found is not None
    assert found.value is not None
    assert found.value.exact == value
    assert (None if found.relative is None else found.relative.exact) == relative


@pytest.mark.parametrize(
    "criterion",
    [
        "loop: loop, measure: stable, equals: true",
        "break: loop.b, measure: loop_type, equals: 0",
        "break: loop.b, measure: crossover_frequency, at_least: 1 rad/s",
    ],
)
def test_no_reserve_where_there_is_no_distance(judge: Judge, criterion: str) -> None:
    (assessed,) = judge(PROJECT.format(criterion=criterion))["R"].criteria
    assert reserve(assessed) is None


def test_an_unlimited_value_leaves_an_unlimited_reserve(judge: Judge) -> None:
    text = PROJECT.replace("[1 s, 1]", "[1 s, 1, 0 1/s]").replace("10 mm/V", "10 mm/V/s")
    text = text.replace("lag(u)", "lag(u - 0.1 V/mm * y)")
    constant = "break: loop.b, measure: position_constant"
    (above,) = judge(text.format(criterion=f"{constant}, at_least: 50"))["R"].criteria
    (inside,) = judge(text.format(criterion=f"{constant}, between: [1, 50]"))["R"].criteria
    assert (above.verdict, inside.verdict) == (Verdict.COMPLIANT, Verdict.NON_COMPLIANT)
    left = reserve(above)
    assert left is not None
    assert left.value is None
    assert reserve(inside) is None
