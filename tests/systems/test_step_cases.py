"""Yes/no answers and end values of the reference systems (tests/data/README.md), all of them exact."""

from __future__ import annotations

import json
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
from flint import fmpq

from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.limits import final_value, initial_value
from specgate.systems.polynomials import highest_first, order_at_origin
from specgate.systems.solution import LoopSolution, solve
from specgate.systems.stability import classify

DATA = Path(__file__).resolve().parents[1] / "data" / "step_cases.json"
CASES: list[dict[str, Any]] = json.loads(DATA.read_text())


def exact(text: str) -> fmpq:
    """Return a decimal or a fraction."""
    fraction = Fraction(text)
    return fmpq(fraction.numerator, fraction.denominator)


def solved(case: dict[str, Any]) -> LoopSolution:
    numerator = highest_first([exact(text) for text in case["numerator"]])
    denominator = highest_first([exact(text) for text in case["denominator"]])
    block = Block("plant", ("u",), ("y",), {("y", "u"): numerator}, denominator)
    argument = LinearForm(((fmpq(1), SignalRef("r")),))
    output = LinearForm(((fmpq(1), OutputRef("plant", "y")),))
    return solve(Wiring(("r",), (Instance("plant", block, {"u": argument}),), {"y": output}))


@pytest.mark.parametrize("case", CASES, ids=lambda case: case["id"])
def test_counts_and_stability(case: dict[str, Any]) -> None:
    solution = solved(case)
    channel = solution.channel("r", "y")
    reduced = channel.transfer.reduced()
    count = classify(reduced.denominator)
    assert solution.determinant.degree() == case["order_as_given"]
    assert reduced.denominator.degree() == case["order_reduced"]
    assert channel.hidden.degree() == case["order_as_given"] - case["order_reduced"]
    assert count.origin == case["integrators"]
    assert count.axis - count.origin == case["axis_poles"]
    assert count.right == case["rhp_poles"]
    assert count.stable == case["stable_reduced"]
    assert solution.stable == channel.stable == case["stable_as_given"]
    assert order_at_origin(solution.determinant) == case["integrators_as_given"]
    assert channel.hides_instability == (case["stable_reduced"] and not case["stable_as_given"])


@pytest.mark.parametrize("case", CASES, ids=lambda case: case["id"])
def test_first_and_last_value(case: dict[str, Any]) -> None:
    transfer = solved(case).channel("r", "y").transfer
    final = final_value(transfer, fmpq(1))
    assert (final is not None) == case["final_exists"]
    assert final is None or final == exact(case["final_value"])
    assert initial_value(transfer, fmpq(1)) == exact(case["y0"])
