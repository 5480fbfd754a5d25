"""Responses of loops with dead time against Taylor series in 40 digits, closed forms and laws."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from functools import cache

import mpmath
import pytest
from flint import arb, fmpq

from specgate.delays.inputs import respond_late
from specgate.response.answers import Answer
from specgate.response.inputs import Input
from specgate.response.questions import TimeResponse
from specgate.response.step import StepResponse
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.polynomials import highest_first
from specgate.systems.quasi import Quasi

from .conftest import closed, late
from .series import Chain

Block = tuple[Sequence[int | Fraction], Sequence[int | Fraction], int | Fraction]
CLOSE = mpmath.mpf(10) ** -22


def rational(value: int | Fraction) -> fmpq:
    fraction = Fraction(value)
    return fmpq(fraction.numerator, fraction.denominator)


@cache
def reference_of(name: str) -> Chain:
    return chain(*LOOPS[name])


def chain(*blocks: Block, step: Fraction = Fraction(1, 20)) -> Chain:
    return Chain([([Fraction(c) for c in n], [Fraction(c) for c in d], Fraction(t)) for n, d, t in blocks], step=step)


def transfer(*blocks: Block) -> DelayedTransfer:
    """Return the closed loop of some blocks in series."""
    above, below, delay = highest_first([1]), highest_first([1]), fmpq(0)
    for numerator, denominator, time in blocks:
        above *= highest_first([rational(c) for c in numerator])
        below *= highest_first([rational(c) for c in denominator])
        delay += rational(time)
    common = above.gcd(below)
    above, below = above // common, below // common
    return closed(late(list(reversed(above.coeffs())), list(reversed(below.coeffs())), delay))


def response(channel: DelayedTransfer, kind: str = "step", **quantities: fmpq | int) -> TimeResponse:
    given = Input(kind, {name: fmpq(value) for name, value in quantities.items()} or {"size": fmpq(1)})  # type: ignore[arg-type]
    found = respond_late([(channel, given)])
    assert not hasattr(found, "reason"), found
    return found  # type: ignore[return-value]


def number(answer: Answer | arb) -> mpmath.mpf:
    ball = answer.enclose(80) if isinstance(answer, Answer) else answer
    return mpmath.mpf(ball.mid().str(40, radius=False))


LOOPS: dict[str, tuple[Block, ...]] = {
    "lag with PI": (([Fraction(9, 10), Fraction(1, 2)], [1, 0], 0), ([1], [2, 1], 1)),
    "near its limit": (([Fraction(3, 2)], [1], 0), ([1], [1, 0], 1)),
    "short dead time": (([3, 2], [1, 0], 0), ([1], [5, 1], Fraction(1, 10))),
    "two lags, two dead times": (
        ([Fraction(1, 2), Fraction(1, 3)], [Fraction(1, 5), 1, 0], Fraction(7, 10)),
        ([1], [1, 2, 1], Fraction(3, 10)),
    ),
    "wrong way first": (([Fraction(1, 4)], [1], 0), ([-1, 1], [1, 1, 0], Fraction(1, 2))),
    "oscillating plant": (
        ([Fraction(1, 10), Fraction(1, 5)], [1, 0], 0),
        ([1], [1, Fraction(1, 2), 1], Fraction(4, 5)),
    ),
}


@pytest.mark.parametrize("name", LOOPS)
def test_values_are_those_of_taylor_series(name: str) -> None:
    blocks = LOOPS[name]
    reference, found = reference_of(name), response(transfer(*blocks))
    with mpmath.workdps(40):
        for time in (Fraction(k, 37) * 3 + Fraction(1, 50) for k in range(1, 160, 6)):
            ball = found.enclose(rational(time), 128)
            assert ball.rad() < arb(2) ** -90
            assert abs(number(ball) - reference.at(time)) < CLOSE, time


@pytest.mark.parametrize("name", LOOPS)
def test_what_is_asked_of_a_step(name: str) -> None:
    """Extremes and settling against a dense look at the series; the answers themselves are checked on it."""
    blocks = LOOPS[name]
    reference, found = reference_of(name), response(transfer(*blocks))
    assert found.final_value().exact == 1
    with mpmath.workdps(40):
        values = [(t, reference.at(t)) for t in (Fraction(k, 9) for k in range(1, 9 * 13))]
        peak = found.greatest()
        if peak.time.absent is None:
            time = Fraction(number(peak.time).__str__()).limit_denominator(10**14)
            assert abs(number(peak.value) - reference.at(time)) < mpmath.mpf(10) ** -20
        assert all(value < number(peak.value) + mpmath.mpf(10) ** -20 for _, value in values)
        lowest = found.least()
        assert all(value > number(lowest.value) - mpmath.mpf(10) ** -20 for _, value in values)
        band = fmpq(1, 20)
        settled = found.settling(band)
        if number(settled) < 13:
            edge = Fraction(number(settled).__str__()).limit_denominator(10**16)
            assert abs(abs(reference.at(edge) - 1) - mpmath.mpf(1) / 20) < mpmath.mpf(10) ** -12
            assert all(abs(value - 1) <= mpmath.mpf(1) / 20 for t, value in values if t > edge)


def test_an_integrator_answers_in_polynomials() -> None:
    """x' = -k x(t - 1): exact peaks while the pieces are polynomials (k = 1: 3/2 at t = 3)."""
    found = response(transfer(([1], [1, 0], 1)))
    peak = found.greatest()
    assert (peak.value.exact, peak.time.exact) == (fmpq(3, 2), 3)
    assert found.first_arrival(fmpq(1, 2)).exact == fmpq(3, 2)


def test_dead_time_outside_every_loop_only_shifts() -> None:
    above, below = highest_first([1, 2]), highest_first([1, 1, 4])
    channel = DelayedTransfer(Quasi.of({fmpq(5, 7): above}), Quasi.rational(below), ((Quasi.rational(below), 1),))
    found, plain = response(channel), StepResponse(above, below, fmpq(1))
    assert found.final_value().exact == plain.final_value().exact
    for late_one, one in (
        (found.settling(fmpq(1, 50)), plain.settling(fmpq(1, 50))),
        (found.greatest().time, plain.greatest().time),
    ):
        assert abs(number(late_one) - number(one) - mpmath.mpf(5) / 7) < mpmath.mpf(10) ** -15
    assert abs(number(found.greatest().value) - number(plain.greatest().value)) < mpmath.mpf(10) ** -15


def test_a_vanishing_dead_time_leaves_the_rational_loop() -> None:
    blocks = (([3, 2], [1, 0], 0), ([1], [5, 1], 0))
    plain = StepResponse(highest_first([3, 2]), highest_first([5, 4, 2]), fmpq(1))
    gaps = []
    for exponent in (3, 5, 7):
        found = response(transfer(blocks[0], (blocks[1][0], blocks[1][1], Fraction(1, 10**exponent))))
        gaps.append(abs(number(found.settling(fmpq(1, 50))) - number(plain.settling(fmpq(1, 50)))))
        assert abs(number(found.greatest().value) - number(plain.greatest().value)) < mpmath.mpf(10) ** (1 - exponent)
    assert gaps[0] > 50 * gaps[1] > 2500 * gaps[2]


@pytest.mark.parametrize("factor", [Fraction(1, 1000), Fraction(731, 7)])
def test_times_scale_with_time(factor: Fraction) -> None:
    def scaled(by: Fraction) -> TimeResponse:
        gain, lag = Fraction(9, 10), Fraction(2)
        return response(transfer(([gain * lag * by, gain], [lag * by, 0], 0), ([1], [lag * by, Fraction(11, 10)], by)))

    one, other = scaled(Fraction(1)), scaled(factor)
    ratio = mpmath.mpf(factor.numerator) / factor.denominator
    for ask in (lambda r: r.settling(fmpq(1, 50)), lambda r: r.first_arrival(fmpq(1, 2)), lambda r: r.greatest().time):
        first, second = ask(one), ask(other)
        assert (first.absent is None) == (second.absent is None)
        if first.absent is None:
            assert abs(number(second) / number(first) / ratio - 1) < mpmath.mpf(10) ** -14


def test_a_small_dead_time_before_a_long_horizon() -> None:
    """Dead time 1 in a loop that settles after thousands: its slowest pole is that of Lambert's function."""
    gain = Fraction(1, 4000)
    found = response(transfer(([gain], [1, 0], 1)))
    with mpmath.workdps(40):
        k = mpmath.mpf(1) / 4000
        pole = mpmath.lambertw(-k)
        residue = k * mpmath.exp(-pole) / (pole * (1 - k * mpmath.exp(-pole)))
        expected = mpmath.log(mpmath.mpf(1) / 50 / abs(residue)) / pole
        assert abs(number(found.settling(fmpq(1, 50))) / mpmath.re(expected) - 1) < mpmath.mpf(10) ** -18
    assert found.greatest().value.exact == 1
    assert found.greatest().time.absent is not None


def test_ramps_and_pulses_are_sums_of_delayed_steps() -> None:
    blocks = LOOPS["lag with PI"]
    channel = transfer(*blocks)
    step = chain(*blocks)
    pulse = response(channel, "pulse", size=fmpq(3), duration=fmpq(5, 2))
    with mpmath.workdps(40):
        for time in (Fraction(3, 2), Fraction(29, 10), Fraction(77, 10), Fraction(41, 2)):
            since = time - Fraction(5, 2)
            expected = 3 * (step.at(time) - (step.at(since) if since > 0 else 0))
            assert abs(number(pulse.enclose(rational(time), 100)) - expected) < CLOSE
    assert pulse.final_value().exact == 0
    ramp = response(channel, "ramp", slope=fmpq(2))
    assert ramp.final_value().absent is not None
    with mpmath.workdps(40):
        slope = (number(ramp.enclose(fmpq(401, 20), 128)) - number(ramp.enclose(fmpq(399, 20), 128))) * 10
        assert abs(slope - 2 * step.at(Fraction(20))) < mpmath.mpf(10) ** -3


def test_a_pulse_through_an_integrator_settles() -> None:
    channel = late([1, 2], [1, 1, 0], fmpq(5, 7))
    found = response(channel, "pulse", size=3, duration=2)
    assert found.final_value().exact == 12
    step = response(channel)
    assert step.final_value().absent is not None
    rising = step.greatest().value.absent
    assert rising is not None
    assert rising.proved


def test_what_runs_away_has_no_extreme_on_that_side() -> None:
    ramp = response(transfer(*LOOPS["wrong way first"]), "ramp", slope=fmpq(2))
    up, down = ramp.greatest().value, ramp.least().value
    assert up.absent is not None
    assert up.absent.proved
    assert down.absent is None
    assert number(down) < 0
    growing = response(transfer(([2], [1], 0), ([1], [1, 0], 1)))
    for value in (growing.greatest().value, growing.least().value):
        assert value.absent is not None
        assert value.absent.proved


def test_a_growing_loop_is_followed_and_does_not_settle() -> None:
    blocks = (([2], [1], 0), ([1], [1, 0], 1))
    found, reference = response(transfer(*blocks)), chain(*blocks)
    assert found.settling(fmpq(1, 50)).absent is not None
    with mpmath.workdps(40):
        for time in (Fraction(9, 4), Fraction(31, 3), Fraction(57, 2)):
            assert abs(number(found.enclose(rational(time), 100)) / reference.at(time) - 1) < mpmath.mpf(10) ** -18


def test_integrals_of_the_error() -> None:
    """For k/s e^(-s t) the error's square integrates to cos(k t)/(2 k (1 - sin(k t))) (Marshall et al. 1992)."""
    gain = Fraction(7, 10)
    loop = late([rational(gain)], [1, 0], fmpq(1))
    error = DelayedTransfer(loop.denominator, loop.denominator + loop.numerator, closed(loop).factors)
    found = response(error)
    with mpmath.workdps(30):
        k = mpmath.mpf(7) / 10
        expected = mpmath.cos(k) / (2 * k * (1 - mpmath.sin(k)))
        assert abs(number(found.squared_integral()) / expected - 1) < mpmath.mpf(10) ** -14
