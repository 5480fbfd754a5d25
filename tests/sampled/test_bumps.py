"""One minus a cosine on sampled loops, against exponentials of a system that has the cosine as states of its own."""

from __future__ import annotations

from fractions import Fraction

import mpmath
import pytest
from flint import arb, fmpq

from specgate.response.inputs import Input
from specgate.response.piecewise import PiecewiseResponse
from specgate.sampled.channel import channel, pieces
from specgate.sampled.drive import drive
from specgate.sampled.pieces import SampledPieces
from specgate.sampled.solution import solve_sampled
from specgate.terms.precision import working_precision

from .conftest import Case, exact, form

LAG = Fraction(2, 5)
"""Of the plant 1/(s (LAG s + 1)) of the simulation."""
GAIN, PERIOD, DELAY = Fraction(3, 10), Fraction(1), Fraction(1, 3)
CASE = Case(([1], [LAG, 1, 0]), ([GAIN], [1]), PERIOD, DELAY)
BUMPS = {
    "shorter than a period": (Fraction(7, 10), Fraction(0)),
    "a whole number of periods": (Fraction(3), Fraction(0)),
    "from between two samples on": (Fraction(17, 7), Fraction(5, 4)),
    "of a period as samples do not see it": (PERIOD, PERIOD),
}
SIZE = Fraction(3, 2)
TIMES = [Fraction(k, 5) + Fraction(1, 17) for k in range(0, 60, 5)]


def response(duration: Fraction, begin: Fraction, source: str, **signal: int) -> SampledPieces:
    given = Input("one_minus_cosine", {"size": exact(SIZE), "duration": exact(duration)}, exact(begin))
    found = drive([(source, given)])
    return pieces(channel(solve_sampled(CASE.wiring()), [source], form(**(signal or {"place": 1}))), found)


def simulated(duration: Fraction, begin: Fraction, source: str) -> list[mpmath.mpf]:
    """Return `place` at TIMES: the states are place, its rate, what is held, cosine and sine."""
    rate = 2 * mpmath.pi * duration.denominator / duration.numerator
    lag = mpmath.mpf(LAG.numerator) / LAG.denominator
    load = 1 / lag if source == "load" else 0
    motion = mpmath.matrix(
        [
            [0, 1, 0, 0, 0],
            [0, -1 / lag, 1 / lag, -load, 0],
            [0, 0, 0, 0, 0],
            [0, 0, 0, 0, -rate],
            [0, 0, 0, rate, 0],
        ]
    )
    half = mpmath.mpf(SIZE.numerator) / SIZE.denominator / 2
    gain = mpmath.mpf(GAIN.numerator) / GAIN.denominator
    state, held, now, found = mpmath.zeros(5, 1), mpmath.mpf(0), Fraction(0), []
    waiting: dict[Fraction, mpmath.mpf] = {}
    events = sorted(
        {k * PERIOD for k in range(13)}
        | {k * PERIOD + DELAY for k in range(13)}
        | {begin, begin + duration}
        | set(TIMES)
    )
    acts = False
    for event in events:
        length = event - now
        state = mpmath.expm(motion * (mpmath.mpf(length.numerator) / length.denominator)) * state
        now = event
        if event in (begin, begin + duration):
            acts = event == begin
            state[3], state[4] = (half, 0) if acts else (0, 0)
        if event.denominator == 1 and event % PERIOD == 0:
            asked = half - state[3] if acts and source == "ask" else 0
            waiting[event + DELAY] = gain * (asked - state[0])
        held = waiting.get(event, held)
        state[2] = held + (half if acts and source == "load" else 0)
        if event in TIMES:
            found.append(state[0])
    return found


@pytest.mark.parametrize("name", BUMPS)
@pytest.mark.parametrize("source", ["ask", "load"])
def test_values_hold_those_of_a_simulation(name: str, source: str) -> None:
    found = PiecewiseResponse(response(*BUMPS[name], source))
    for time, reference in zip(TIMES, simulated(*BUMPS[name], source), strict=True):
        ball = found.enclose(exact(time), 100)
        with working_precision(160):
            assert ball.overlaps(arb(mpmath.nstr(reference, 45)) + arb(0, arb(fmpq(1, 10**38))))
            assert ball.rad() < arb(fmpq(1, 10**28))


@pytest.mark.parametrize("name", BUMPS)
@pytest.mark.parametrize("source", ["ask", "load"])
def test_no_value_of_a_simulation_is_beyond_the_extremes(name: str, source: str) -> None:
    found = PiecewiseResponse(response(*BUMPS[name], source))
    high, low = found.greatest().value.enclose(64), found.least().value.enclose(64)
    values = [arb(mpmath.nstr(value, 30)) for value in simulated(*BUMPS[name], source)]
    assert all(low - arb(fmpq(1, 10**15)) < value < high + arb(fmpq(1, 10**15)) for value in values)
    assert found.final_value().exact == 0


def test_what_the_samples_do_not_see_does_nothing() -> None:
    """At each sample the cosine is one: nothing is asked for, and nothing moves."""
    found = PiecewiseResponse(response(*BUMPS["of a period as samples do not see it"], "ask"))
    assert found.greatest().value.enclose(64).contains(0)
    assert all(found.enclose(fmpq(k, 4), 64).is_zero() for k in range(1, 24))


def test_nothing_is_left_of_it_after_its_duration() -> None:
    """The error is the input itself while nothing answers: it passes its size, ends at zero and stays there."""
    found = response(Fraction(3, 4), Fraction(1, 8), "ask", ask=1, place=-1)
    searched = PiecewiseResponse(found)
    peak = searched.greatest()
    with working_precision(96):
        assert peak.value.enclose(64).overlaps(arb(exact(SIZE)))
    assert searched.enclose(fmpq(7, 8), 64).is_zero()
    assert all(found.jump(index) == 0 for index in range(6))
