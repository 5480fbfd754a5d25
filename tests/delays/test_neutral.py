"""Loops that let what is late through at once (as many zeros as poles): jumps that come back without end.

Values against Taylor series in 40 digits, echoes of a pure gain against their geometric series.
"""

from __future__ import annotations

from fractions import Fraction
from functools import cache

import mpmath
import numpy as np
import pytest
from flint import arb, fmpq

from specgate.delays.gain import DelayedGain
from specgate.delays.inputs import respond_late
from specgate.delays.open_loop import DelayedLoop
from specgate.response.inputs import Input
from specgate.response.questions import TimeResponse
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.quasi_stability import is_stable

from .conftest import closed, late
from .series import Chain

LOOPS: dict[str, tuple[list[Fraction], list[Fraction], Fraction]] = {
    "lead": ([Fraction(1, 4), Fraction(1, 2)], [Fraction(1), Fraction(1)], Fraction(1)),
    "gain and integral": ([Fraction(3, 10), Fraction(1, 5)], [Fraction(1), Fraction(0)], Fraction(1)),
    "wrong way": ([Fraction(-1, 2), Fraction(2, 5)], [Fraction(2), Fraction(1)], Fraction(1, 2)),
    "oscillating": (
        [Fraction(1, 5), Fraction(6, 25), Fraction(11, 25), Fraction(2, 5)],
        [Fraction(1), Fraction(2, 5), Fraction(1), Fraction(0)],
        Fraction(1),
    ),
    "near its limit": ([Fraction(4, 5), Fraction(4, 5)], [Fraction(1), Fraction(2)], Fraction(1)),
}


def opened(name: str) -> DelayedTransfer:
    above, below, delay = LOOPS[name]
    return late([rational(c) for c in above], [rational(c) for c in below], rational(delay))


def rational(value: Fraction) -> fmpq:
    return fmpq(value.numerator, value.denominator)


@cache
def response(name: str, kind: str) -> TimeResponse:
    given = {"step": {"size": fmpq(1)}, "ramp_and_hold": {"size": fmpq(1), "slope": fmpq(1, 3)}}[kind]
    found = respond_late([(closed(opened(name)), Input(kind, given))])  # type: ignore[arg-type]
    assert not hasattr(found, "reason"), found
    return found  # type: ignore[return-value]


@cache
def reference(name: str) -> Chain:
    return Chain([LOOPS[name]], step=Fraction(1, 10))


@pytest.mark.parametrize("name", LOOPS)
def test_values_are_those_of_taylor_series(name: str) -> None:
    found, truth = response(name, "step"), reference(name)
    with mpmath.workdps(40):
        for time in (Fraction(k, 37) * 3 + Fraction(1, 50) for k in range(1, 200, 9)):
            ball = found.enclose(rational(time), 100)
            assert ball.rad() < arb(2) ** -80
            assert abs(mpmath.mpf(ball.mid().str(40, radius=False)) - truth.at(time)) < mpmath.mpf(10) ** -22


@pytest.mark.parametrize("name", LOOPS)
def test_settling_is_the_last_instant_outside_of_the_band(name: str) -> None:
    found, truth = response(name, "step"), reference(name)
    final = found.final_value().exact
    assert final is not None
    target, band = Fraction(int(final.p), int(final.q)), abs(final) / 25
    ball = found.settling(band).enclose(60).mid().fmpq()
    time = Fraction(int(ball.p), int(ball.q))
    edge = Fraction(int(band.p), int(band.q))
    with mpmath.workdps(40):
        before, after = (
            abs(truth.at(max(Fraction(0), time + side * Fraction(1, 10**9))) - _mp(target)) for side in (-1, 1)
        )
        assert before > _mp(edge) > after
        for step in range(1, 80):
            later = time + Fraction(step, 7)
            assert abs(truth.at(later) - _mp(target)) <= _mp(edge)


@pytest.mark.parametrize("name", LOOPS)
def test_nothing_is_beyond_the_extremes(name: str) -> None:
    found, truth = response(name, "step"), reference(name)
    top, low = (float(one.value.enclose(60)) for one in (found.greatest(), found.least()))
    with mpmath.workdps(30):
        values = [float(truth.at(Fraction(k, 20))) for k in range(300)]
    assert max(values) <= top + 1e-12
    assert min(values) >= low - 1e-12


def test_echoes_of_a_pure_gain() -> None:
    """y = 1/2 - 1/4 + 1/8 ... for each dead time that has passed: inside of 1/100 from the sixth on, for good."""
    found = respond_late([(closed(late([fmpq(1, 2)], [1], fmpq(1))), Input("step", {"size": fmpq(1)}))])
    for count in (1, 2, 7, 40, 500):
        ball = found.enclose(fmpq(2 * count + 1, 2), 100)  # type: ignore[union-attr]
        assert ball.overlaps(arb((1 - fmpq(-1, 2) ** count) / 3))
    assert found.settling(fmpq(1, 100)).exact == 6 or found.settling(fmpq(1, 100)).enclose(60).overlaps(arb(6))  # type: ignore[union-attr]
    assert found.greatest().value.enclose(60).overlaps(arb(fmpq(1, 2)))  # type: ignore[union-attr]
    assert found.peak_rate().value.absent.infinite  # type: ignore[union-attr]


def test_a_ramp_leaves_no_jump() -> None:
    found = response("lead", "ramp_and_hold")
    rate = found.peak_rate().value
    assert rate.absent is None
    assert found.settling(fmpq(1, 100)).absent is None


@pytest.mark.parametrize("name", LOOPS)
def test_the_peak_of_the_sensitivity(name: str) -> None:
    """Against a dense look over frequency; where it comes back near its limit for ever the interval holds that."""
    channel = opened(name)
    loop = DelayedLoop(channel, is_stable(channel.numerator + channel.denominator))
    peak = loop.sensitivity_peak()
    assert peak.absent is None
    above, below, delay = LOOPS[name]
    s = 1j * np.linspace(1e-3, 400, 800_001)
    gain = np.polyval([float(c) for c in above], s) / np.polyval([float(c) for c in below], s)
    seen = float(np.max(1 / np.abs(1 + gain * np.exp(-float(delay) * s))))
    ball = peak.enclose(60)
    assert seen < float(ball.upper()) + 1e-9
    assert float(ball.lower()) < seen + 1e-3


def _mp(value: Fraction) -> mpmath.mpf:
    return mpmath.mpf(value.numerator) / value.denominator


@pytest.mark.parametrize("name", LOOPS)
def test_the_gain_margin_bounds_the_stable_factors(name: str) -> None:
    """A little less gain than the margin says is stable, a little more is not: counted, not read off crossings."""
    channel = opened(name)
    factor = DelayedLoop(channel, stable=True).gain_margin().enclose(60).mid().fmpq()
    for change, stable in ((fmpq(999_999, 10**6), True), (fmpq(1_000_001, 10**6), False)):
        assert is_stable(channel.denominator + channel.numerator.scaled(factor * change)) is stable


def test_a_margin_at_infinite_frequency() -> None:
    """A gain of 1/2 with dead time: every crossing leaves a factor of two, and no less."""
    loop = DelayedLoop(late([fmpq(1, 2)], [1], fmpq(1)), stable=True)
    assert loop.gain_margin().exact == 2
    assert abs(float(loop.phase_crossover_frequency().enclose(60)) - np.pi) < 1e-12


def test_the_bandwidth_of_a_gain_that_tends_to_nothing() -> None:
    """Against a dense look; what comes back does not count, the first fall by 3 dB does."""
    found = DelayedGain(closed(opened("gain and integral"))).bandwidth()
    s = 1j * np.linspace(1e-4, 2, 2_000_001)
    loop = (0.3 + 0.2 / s) * np.exp(-s)
    gain = np.abs(loop / (1 + loop))
    first = s.imag[int(np.argmax(gain < 10 ** (-3 / 20)))]
    assert abs(float(found.enclose(60)) - first) < 3e-6
