"""Margins near a tangency say so, with the margin that a very small change would leave."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest
from flint import arb, fmpq, fmpq_poly

from specgate.frequency.rational_loop import RationalLoop
from specgate.response.answers import Answer
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction
from tests.frequency.conftest import rational

Loop = Callable[..., RationalLoop]


def middle(ball: arb) -> float:
    return float(ball.mid())


def with_resonance(loop: Loop, gain: str) -> RationalLoop:
    """0.2/(s (s + 1)(s^2 + 0.02 s + 4)) peaks at |L| = 1.118 where its phase is 62.6 deg past -1."""
    return loop([rational(gain)], [1, rational("1.02"), rational("4.02"), 4, 0])


def other(answer: Answer) -> float | None:
    if answer.fragile is None or answer.fragile.other is None:
        return None
    return middle(answer.fragile.other(64))


@pytest.mark.parametrize("gain", ["0.178", "0.1788"])
def test_a_resonance_just_below_one(loop: Loop, gain: str) -> None:
    near = with_resonance(loop, gain)
    phase, delay = near.phase_margin(), near.delay_margin()
    assert phase.fragile is not None
    assert "brings about" in phase.fragile.reason
    beyond = with_resonance(loop, "0.179")
    assert len([c for c in beyond.crossings() if c.kind == "gain"]) == 3
    assert other(phase) == pytest.approx(middle(beyond.phase_margin().enclose(64)), rel=0.1)
    assert other(delay) == pytest.approx(middle(beyond.delay_margin().enclose(64)), rel=0.1)
    assert near.gain_margin().fragile is None


def test_a_resonance_just_above_one(loop: Loop) -> None:
    near, before = with_resonance(loop, "0.1798"), with_resonance(loop, "0.178")
    assert near.phase_margin().fragile is not None
    assert other(near.phase_margin()) == pytest.approx(middle(before.phase_margin().enclose(64)), rel=0.01)


@pytest.mark.parametrize("gain", ["0.16", "0.177", "0.181", "0.2"])
def test_one_that_is_clear_of_it(loop: Loop, gain: str) -> None:
    found = with_resonance(loop, gain)
    answers: list[Any] = [found.phase_margin(), found.delay_margin(), found.gain_margin(), found.sensitivity_peak()]
    assert all(answer.fragile is None for answer in answers)


def test_nothing_is_left_without_the_only_crossing(loop: Loop) -> None:
    found = loop([rational("0.199")], [1, rational("0.2"), 1]).phase_margin()
    assert found.fragile is not None
    assert found.fragile.reason.endswith("without it nothing uses this margin up")


def dipping(pole: str) -> RationalLoop:
    """3 (s + 1)^2/((s + a)^3 (s/100 + 1)): a phase down to -180.66, -179.92, -179.18 deg at 0.11, 0.112, 0.114."""
    above = fmpq_poly([1, 1]) ** 2 * 3
    below = fmpq_poly([rational(pole), 1]) ** 3 * fmpq_poly([1, fmpq(1, 100)])
    return RationalLoop(TransferFunction(above, below), is_hurwitz(above + below))


def test_a_phase_just_short_of_the_axis() -> None:
    near = dipping("0.112").gain_margin()
    assert near.absent is not None
    assert near.absent.infinite
    assert near.fragile is not None
    assert "0.6 deg" in near.fragile.reason
    crossed = dipping("0.1115").gain_margin()
    assert crossed.absent is None
    assert other(near) == pytest.approx(middle(crossed.enclose(64)), rel=0.5)


def test_a_phase_just_beyond_the_axis() -> None:
    found = dipping("0.1115").gain_margin()
    assert found.fragile is not None
    assert found.fragile.reason.endswith("without it nothing uses this margin up")
    assert dipping("0.11").gain_margin().fragile is None
    assert dipping("0.114").gain_margin().fragile is None
