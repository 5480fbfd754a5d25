"""Every measure over time of the reference systems (tests/data/README.md): intervals, widths, limits either side."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest
from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.response.step import StepResponse
from specgate.terms.precision import working_precision

DATA = Path(__file__).resolve().parents[1] / "data" / "step_cases.json"
CASES: list[dict[str, Any]] = json.loads(DATA.read_text())
SETTLING = [case for case in CASES if case["final_exists"]]
LASTING = [case for case in CASES if not case["final_exists"]]

Exact = Callable[[str | int], fmpq]
Make = Callable[..., StepResponse]

DIGITS = fmpq(1, 10**22)
"""The truths are given to 25 digits."""

STEP = fmpq(1, 10**6)
ZERO = fmpq(1, 10**15)
"""What "0" for an overshoot or an undershoot means in the file."""

BITS = 64


def figures(case: dict[str, Any], response: StepResponse, exact: Exact) -> Iterator[tuple[str, Answer, fmpq | None]]:
    """Yield (name, answer, truth as a value of y or in s, None where there is no value)."""
    final = exact(case["final_value"])
    yield "y0", response.initial_value(), exact(case["y0"])
    yield "final_value", response.final_value(), final
    peak = response.peak_deviation()
    yield "peak_abs", peak.value, exact(case["peak_abs"])
    yield "tp_abs", peak.time, None if case["tp_abs"] is None else exact(case["tp_abs"])
    if final == 0:
        return
    up = response.greatest() if final > 0 else response.least()
    yield "overshoot_pct", up.value, final * (1 + exact(case["overshoot_pct"]) / 100)
    yield "tp", up.time, None if case["tp"] is None else exact(case["tp"])
    yield "ts2", response.settling(abs(final) / 50), exact(case["ts2"])
    yield "ts5", response.settling(abs(final) / 20), exact(case["ts5"])


def assert_contains(answer: Answer, truth: fmpq, scale: fmpq, name: str) -> None:
    """Assert that the interval holds the truth to its digits, and is as narrow as promised."""
    ball = answer.enclose(BITS)
    with working_precision(256):
        off = abs(ball - arb(truth))
        assert not off > arb(abs(truth) * DIGITS + ZERO * scale), name
        assert off < arb(abs(truth) * STEP) or off < arb(scale * STEP), name
        radius = float(ball.rad())
    assert radius <= max(1e-9 * abs(float(truth.p) / float(truth.q)), 1e-12 * float(scale.p) / float(scale.q)), name


@pytest.mark.parametrize("case", SETTLING, ids=lambda case: case["id"])
def test_every_interval_contains_the_truth(case: dict[str, Any], respond: Make, rational: Exact) -> None:
    response = respond(case["numerator"], case["denominator"])
    assert response.settles is case["stable_reduced"]
    change = rational(case["peak_abs"])
    for name, answer, truth in figures(case, response, rational):
        if truth is None:
            assert answer.absent is not None, name
            assert answer.absent.proved, name
            continue
        assert answer.absent is None, (name, answer.absent)
        assert_contains(answer, truth, change, name)


@pytest.mark.parametrize("case", SETTLING, ids=lambda case: case["id"])
def test_rise_time_and_undershoot(case: dict[str, Any], respond: Make, rational: Exact) -> None:
    response = respond(case["numerator"], case["denominator"])
    final = rational(case["final_value"])
    if final == 0:
        assert case["tr"] is None
        return
    rise, earlier, later = rational(case["tr"]), *(response.first_arrival(final * k / 10) for k in (fmpq(1), fmpq(9)))
    with working_precision(256):
        difference = later.enclose(BITS) - earlier.enclose(BITS)
        assert not abs(difference - arb(rise)) > arb(rise * DIGITS * 100)
    down = (response.least() if final > 0 else response.greatest()).value
    truth = rational(case["undershoot_pct"]) / 100 * abs(final)
    ball = down.enclose(BITS)
    with working_precision(256):
        depth = -ball if final > 0 else ball
        if truth == 0:
            assert not depth > 0
        else:
            assert not abs(depth - arb(truth)) > arb(truth * DIGITS)


@pytest.mark.parametrize("case", SETTLING, ids=lambda case: case["id"])
def test_no_limit_a_millionth_away_is_decided_wrongly(case: dict[str, Any], respond: Make, rational: Exact) -> None:
    response = respond(case["numerator"], case["denominator"])
    change = rational(case["peak_abs"])
    for name, answer, truth in figures(case, response, rational):
        if truth is None:
            continue
        away = abs(truth) * STEP if truth != 0 else change * STEP
        ball = answer.enclose(BITS)
        with working_precision(256):
            assert ball < arb(truth + away), name
            assert ball > arb(truth - away), name


@pytest.mark.parametrize("case", LASTING, ids=lambda case: case["id"])
def test_what_does_not_settle_has_no_final_value(case: dict[str, Any], respond: Make, rational: Exact) -> None:
    response = respond(case["numerator"], case["denominator"])
    assert not response.settles
    assert response.initial_value().exact == rational(case["y0"])
    for answer in (response.final_value(), response.settling(fmpq(1, 50)), response.first_arrival(fmpq(1, 2))):
        assert answer.absent is not None
        assert answer.absent.proved
