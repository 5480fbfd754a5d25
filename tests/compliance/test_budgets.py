"""Budgets against sums made here by other means, with limits a millionth to either side of them.

Root-sum-square: ECSS-E-ST-60-10C (2008), budgets of errors: means add, independent deviations by root-sum-square,
correlated ones linearly, each at the level of the whole. Phases: a lag of T turns by -atan(w T), an integrator by -90
deg, a dead time by -w T.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from fractions import Fraction

import pytest

from specgate.compliance.assessment import Assessment, BudgetAssessment
from specgate.compliance.budgeting import used_words
from specgate.terms.verdicts import Trilean, Verdict

Judge = Callable[[str], Mapping[str, Assessment]]

PROJECT = """
    specgate: 1
    project: {{id: B-1, title: Budgets, revision: A}}
    subsystems:
      lag: {{input: {{unit: V}}, output: {{unit: V}}, model: {{numerator: [1], denominator: [0.3 s, 1]}}}}
      late: {{input: {{unit: V}}, output: {{unit: V}}, model: {{gain: -2, dead_time: 20 ms}}}}
      drive: {{input: {{unit: V}}, output: {{unit: V}}, model: {{gain: 1 1/s, integrators: 1}}}}
    loops:
      loop:
        inputs: {{u: {{unit: V}}}}
        signals: {{y: lag(u), z: late(drive(y))}}
        responses: {{r: {{from: u, to: y, input: step, size: 1 V}}}}
    requirements:
      R:
        text: It shall.
        budget: {{{budget}}}
{shares}
    """


def judged(judge: Judge, budget: str, *limits: str) -> Assessment:
    shares = "\n".join(
        f"      S{number}: {{text: Share {number}., derived_from: [R], criterion: "
        f"{{response: loop.r, measure: final_value, {limit}}}}}"
        for number, limit in enumerate(limits)
    )
    return judge(PROJECT.format(budget=budget, shares=shares))["R"]


def added(judge: Judge, budget: str, *limits: str) -> BudgetAssessment:
    found = judged(judge, budget, *limits).budget
    assert found is not None
    return found


def within(half: str, centre: str = "0 V") -> str:
    return f"within: {half}, of: {centre}"


OF = "of: [S0, S1, S2]"
THREE = (within("1 V"), within("2 V", "0.5 V"), within("300 mV"))


@pytest.mark.parametrize(
    ("budget", "reach"),
    [
        # centres 0, 1/2, 0; half-widths 1, 2, 3/10
        (f"combine: sum, {OF}", Fraction(38, 10)),
        (f"combine: maximum, {OF}", Fraction(25, 10)),
        (f"combine: root_sum_square, {OF}", 0.5 + math.sqrt(1 + 4 + 0.09)),
        ("combine: root_sum_square, of: [{id: S0, as: mean}, S1, S2]", 0.5 + 1 + math.sqrt(4 + 0.09)),
        ("combine: root_sum_square, of: [{id: S0, group: a}, {id: S1, group: a}, S2]", 0.5 + math.sqrt(9 + 0.09)),
        ("combine: root_sum_square, of: [{id: S0, factor: -2}, S1, S2]", 0.5 + math.sqrt(4 + 4 + 0.09)),
        (
            "combine: root_sum_square, level: 3 sigma, of: [{id: S0, level: 1 sigma}, {id: S1, level: 2 sigma}, S2]",
            0.5 + math.sqrt(9 + 9 + 0.09),
        ),
        ("combine: sum, of: [{id: S0, factor: -1}, {id: S1, factor: 0.5}]", Fraction(225, 100)),
    ],
)
def test_shares_are_combined_as_it_says(judge: Judge, budget: str, reach: Fraction | float) -> None:
    for nudge, outcome in ((1e-6, Trilean.YES), (-1e-6, Trilean.NO)):
        most = f"{float(reach) + nudge:.9f} V"
        assert added(judge, f"{budget}, between: [-9 V, {most}]", *THREE).allotted is outcome, most
    if isinstance(reach, Fraction):
        assert added(judge, f"{budget}, between: [-9 V, {float(reach)} V]", *THREE).allotted is Trilean.YES


def test_equality_of_a_root_is_decided(judge: Judge) -> None:
    for most, outcome in (("13 V", Trilean.YES), ("12.999999999999999999999 V", Trilean.NO)):
        budget = f"combine: root_sum_square, of: [S0, S1, S2], at_most: {most}"
        assert added(judge, budget, within("3 V"), within("4 V"), within("12 V")).allotted is outcome


def test_a_root_that_is_not_rational_is_never_equal(judge: Judge) -> None:
    # the square root of 2 to 40 digits, rounded down and up
    for most, outcome in (
        ("1.4142135623730950488016887242096980785696 V", Trilean.NO),
        ("1.4142135623730950488016887242096980785697 V", Trilean.YES),
    ):
        budget = f"combine: root_sum_square, of: [S0, S1], at_most: {most}"
        assert added(judge, budget, within("1 V"), within("1 V")).allotted is outcome


@pytest.mark.parametrize(
    ("budget", "limits", "outcome"),
    [
        ("combine: product, of: [S0, S1], at_most: 6 V", ("between: [1 V, 2 V]", "between: [0 V, 3 V]"), Trilean.YES),
        ("combine: product, of: [S0, S1], at_most: 5.9 V", ("between: [1 V, 2 V]", "between: [0 V, 3 V]"), Trilean.NO),
        ("combine: minimum, of: [S0, S1], at_least: 1 V", ("between: [1 V, 2 V]", "between: [3 V, 4 V]"), Trilean.YES),
        ("combine: minimum, of: [S0, S1], at_least: 1.1 V", ("between: [1 V, 2 V]", "between: [3 V, 4 V]"), Trilean.NO),
        ("combine: product, of: [S0, S1], at_most: 6 V", (within("1 V"), "between: [0 V, 3 V]"), Trilean.UNKNOWN),
    ],
)
def test_products_and_smallest(judge: Judge, budget: str, limits: tuple[str, ...], outcome: Trilean) -> None:
    assert added(judge, budget, *limits).allotted is outcome


def test_results_decide_where_limits_do_not(judge: Judge) -> None:
    # each is 1 V; within 1 V of 0.5 V each, they are half a volt off: at most 1 V each
    limits = (within("1 V", "0.5 V"), within("1 V", "0.5 V"))
    for most, verdict in (("2 V", Verdict.COMPLIANT), ("1.999999 V", Verdict.NON_COMPLIANT)):
        found = judged(judge, f"combine: sum, of: [S0, S1], at_most: {most}", *limits)
        assert found.verdict is verdict
        assert found.budget is not None
        assert found.budget.allotted is Trilean.NO
    assert found.reason is not None
    assert used_words(found.budget) in found.reason


def test_what_is_left_and_who_takes_it(judge: Judge) -> None:
    found = added(judge, f"combine: sum, {OF}, at_most: 5 V, reserve: 20 %", *THREE)
    assert found.left_over is not None
    assert str(found.left_over.exact) == "6/5"
    assert found.given is not None
    assert {name: str(part.exact) for name, part in found.given.parts.items()} == {
        "S0": "5/19",
        "S1": "25/38",
        "S2": "3/38",
    }
    assert found.with_reserve is Trilean.YES
    assert added(judge, f"combine: sum, {OF}, at_most: 5 V, reserve: 1.2 V", *THREE).with_reserve is Trilean.YES
    assert added(judge, f"combine: sum, {OF}, at_most: 5 V, reserve: 1.200001 V", *THREE).with_reserve is Trilean.NO
    assert added(judge, f"combine: sum, {OF}, at_most: 5 V, reserve: 24.0001 %", *THREE).with_reserve is Trilean.NO


@pytest.mark.parametrize("frequency", [0.1, 2.0, 37.5])
def test_phases_of_blocks(judge: Judge, frequency: float) -> None:
    lag, late = -math.degrees(math.atan(0.3 * frequency)), -180 - math.degrees(0.02 * frequency)
    whole = lag + late - 90
    for nudge, verdict in ((-1e-6, Verdict.COMPLIANT), (1e-6, Verdict.NON_COMPLIANT)):
        budget = (
            f"quantity: phase_at, frequency: {frequency} rad/s, of_blocks: [lag, late, drive], "
            f"at_least: {whole + nudge:.9f} deg"
        )
        found = judged(judge, budget)
        assert found.verdict is verdict
        assert found.budget is not None
        shown = [part.found.least for part in found.budget.parts if part.found is not None]
        assert [float(one.enclose(64).mid()) for one in shown if one is not None] == pytest.approx([lag, late, -90])


def test_what_a_block_may_take(judge: Judge) -> None:
    blocks = "of_blocks: {lag: -40 deg, drive: -90 deg}, at_least: -130 deg"
    found = added(judge, f"quantity: phase_at, frequency: 2 rad/s, {blocks}")
    assert (found.allotted, found.result) == (Trilean.YES, Trilean.YES)
    found = added(judge, f"quantity: phase_at, frequency: 2 rad/s, {blocks.replace('-40', '-40.000001')}")
    assert (found.allotted, found.result) == (Trilean.NO, Trilean.YES)
