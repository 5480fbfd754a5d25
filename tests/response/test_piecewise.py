"""The piecewise engine: against the engine for one analytic piece, on pieces made by hand, and against samples."""

from __future__ import annotations

from itertools import pairwise, product
from math import exp

import pytest
from flint import arb, fmpq, fmpq_poly

from specgate.response.answers import Absent, Answer
from specgate.response.extremes import Extreme
from specgate.response.pieces import Pieces
from specgate.response.piecewise import PiecewiseResponse
from specgate.response.questions import Mask
from specgate.response.step import StepResponse
from specgate.response.superposed import Superposed
from specgate.response.superposed.waves import AfterBump, BumpWave, StepWave
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision

ONE = fmpq(1)


def poly(*coefficients: int | fmpq) -> fmpq_poly:
    """Return a polynomial, highest power first."""
    return highest_first(list(coefficients))


def wave(numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq | int = 1, begin: fmpq | int = 0) -> StepWave:
    """Return a delayed step response."""
    reduced = TransferFunction(numerator, denominator).reduced()
    return StepWave(reduced.numerator, reduced.denominator, fmpq(size), fmpq(begin))


LAG = poly(1, 1)
PAIR = poly(1, fmpq(1, 2), 4)

SYSTEMS = {
    "pair": (poly(4), PAIR),
    "overdamped": (poly(2), poly(1, 3, 2)),
    "wrong way": (poly(-1, 3), poly(1, 2, 3)),
    "stiff": (poly(1000000, 3000000), LAG * poly(1, 1000000) * poly(1, 2)),
    "light": (poly(1), poly(1, fmpq(1, 1000), 1)),
    "repeated": (poly(1), LAG**5),
    "feed-through": (poly(1, 4, 1), poly(1, 1, 2)),
    "eighth order": (poly(1), LAG**8),
    "gain": (poly(2), poly(1)),
    "worked off": (poly(1, 0), LAG**3),
}


def same(one: Answer, other: Answer) -> bool:
    """Whether two answers agree: both exact and equal, both without a value, or overlapping enclosures."""
    if one.absent is not None or other.absent is not None:
        return (one.absent is None) == (other.absent is None)
    if one.exact is not None and other.exact is not None:
        return one.exact == other.exact
    first, second = one.enclose(60), other.enclose(60)
    with working_precision(200):
        return bool(first.overlaps(second)) and first.rad() < 1e-9 and second.rad() < 1e-9


def alike(one: Extreme, other: Extreme) -> bool:
    """Whether two extremes agree in value and time."""
    return same(one.value, other.value) and same(one.time, other.time)


@pytest.mark.parametrize("name", SYSTEMS)
def test_one_piece_is_answered_as_by_the_engine_for_one_piece(name: str) -> None:
    numerator, denominator = SYSTEMS[name]
    known = StepResponse(numerator, denominator, fmpq(3))
    asked = PiecewiseResponse(Superposed([wave(numerator, denominator, 3)]))
    final = known.final_value()
    assert same(asked.final_value(), final)
    assert same(asked.initial_value(), known.initial_value())
    assert same(asked.greatest().value, known.greatest().value)
    assert same(asked.least().value, known.least().value)
    assert alike(asked.peak_deviation(), known.peak_deviation())
    assert final.exact is not None
    band = abs(final.exact) / 50 or fmpq(1, 200)
    assert same(asked.settling(band), known.settling(band))
    if final.exact:
        assert same(asked.first_arrival(final.exact * 9 / 10), known.first_arrival(final.exact * 9 / 10))
        assert same(asked.first_arrival(final.exact / 10), known.first_arrival(final.exact / 10))


class Sawtooth(Pieces):
    """y = 2^-i (1 - (t - i)) on [i, i + 1), i = 0, 1 ...: jumps without end, told in the barest way."""

    @property
    def final(self) -> fmpq | Absent:
        return fmpq(0)

    def kink(self, index: int) -> fmpq | None:
        return fmpq(index)

    def derivatives(self, index: int, time: arb, bits: int) -> tuple[arb, arb, arb, arb]:
        with working_precision(bits):
            share = arb(fmpq(1, 2**index))
            return share * (1 - (time - index)), -share, arb(0), arb(0)

    def settled_by(self, distance: fmpq) -> fmpq | None:
        index = 0
        while fmpq(1, 2**index) > distance:
            index += 1
        return fmpq(index)

    def speed(self, index: int) -> float:
        return 1.0


def test_pieces_without_end_that_jump() -> None:
    response = PiecewiseResponse(Sawtooth())
    assert response.settles
    assert same(response.greatest().value, Answer.of_exact(1))
    assert same(response.greatest().time, Answer.of_exact(0))
    assert same(response.least().value, Answer.of_exact(0))
    # 0.3 is left behind at 1.4 (0.5 - 0.5 * 0.4); the third tooth starts at 0.25, inside.
    assert same(response.settling(fmpq(3, 10)), Answer.of_exact(fmpq(7, 5)))
    # 0.2: the third tooth starts outside and is left at 2.2.
    assert same(response.settling(fmpq(1, 5)), Answer.of_exact(fmpq(11, 5)))
    rate = response.peak_rate()
    assert rate.value.absent is not None
    assert rate.value.absent.infinite
    assert rate.time.exact == 0
    assert same(response.deviation_after(fmpq(8, 5)).value, Answer.of_exact(fmpq(1, 4)))
    assert same(response.deviation_after(fmpq(8, 5)).time, Answer.of_exact(fmpq(2)))
    assert float(response.enclose(fmpq(5, 2), 64)) == 0.125
    assert response.absolute_integral().absent is not None


def test_a_mask_is_first_violated_where_the_response_jumps_over_it() -> None:
    response = PiecewiseResponse(Sawtooth())
    upper = ((fmpq(0), ONE), (fmpq(1, 2), ONE), (fmpq(1, 2), fmpq(2, 5)), (fmpq(5), fmpq(2, 5)))
    answer = response.within(Mask(upper=upper))
    assert answer.truth is False
    assert answer.at is not None
    time, limit = answer.at["time"], answer.at["limit"]
    # The limit falls from 1 to 0.4 at 0.5, where y is 0.5.
    assert isinstance(time, Answer)
    assert time.exact == fmpq(1, 2)
    assert isinstance(limit, Answer)
    assert limit.exact == fmpq(2, 5)
    later = tuple((max(when, fmpq(7, 10)) if value < 1 or when > 0 else when, value) for when, value in upper)
    answer = response.within(Mask(upper=later))
    assert answer.truth is False
    assert answer.at is not None
    assert isinstance(answer.at["time"], Answer)
    assert answer.at["time"].exact == 1


@pytest.mark.parametrize(
    ("upper", "lower", "inside"),
    [
        ((), ((fmpq(0), fmpq(0)), (fmpq(9), fmpq(0))), True),
        (((fmpq(0), ONE), (fmpq(4), ONE)), (), True),
        (((fmpq(0), ONE), (fmpq(4), fmpq(9, 10))), (), False),
        ((), ((fmpq(1), fmpq(1, 2)), (fmpq(2), ONE)), False),
    ],
)
def test_masks_of_an_exponential(upper: Mask, lower: Mask, inside: bool) -> None:
    response = PiecewiseResponse(Superposed([wave(poly(1), LAG)]))
    answer = response.within(Mask(upper=upper, lower=lower))
    assert answer.truth is inside


def test_touching_for_ever_complies() -> None:
    response = PiecewiseResponse(Superposed([wave(poly(1), LAG)]))
    assert response.within(Mask(upper=((fmpq(0), ONE),), lower=((fmpq(0), fmpq(0)),), forever=True)).truth is True
    assert response.within(Mask(upper=((fmpq(0), fmpq(99, 100)),), forever=True)).truth is False


PULSES = {
    "long pulse": [wave(poly(4), PAIR), wave(poly(4), PAIR, -1, 3)],
    "short pulse": [wave(poly(4), PAIR), wave(poly(4), PAIR, -1, fmpq(1, 1000))],
    "pulse through a gain": [wave(poly(2), poly(1)), wave(poly(2), poly(1), -1, 3)],
    "ramp and hold": [wave(poly(4), PAIR * poly(1, 0)), wave(poly(4), PAIR * poly(1, 0), -1, 2)],
    "two inputs": [wave(poly(1, 0), LAG**3), wave(poly(3), poly(1, fmpq(1, 3), 2), 2, fmpq(5, 2))],
}


@pytest.mark.parametrize("name", PULSES)
def test_what_is_said_of_pulses_holds_at_samples(name: str) -> None:
    response = PiecewiseResponse(Superposed(PULSES[name]))
    final = response.final_value().exact
    assert final is not None
    times = [fmpq(k, 20) for k in range(600)]
    values = [response.enclose(time, 80) for time in times]
    high, low = (extreme.value.enclose(60) for extreme in (response.greatest(), response.least()))
    assert all(low.lower() <= value.upper() and value.lower() <= high.upper() for value in values)
    for extreme, which in ((response.greatest(), max), (response.least(), min)):
        ends = [final, which(value.mid().fmpq() for value in values)]
        away = abs(extreme.value.enclose(60).mid().fmpq() - which(ends))
        assert away < fmpq(1, 100)
        if extreme.time.absent is None and extreme.time.exact is None:
            there = response.enclose(extreme.time.enclose(60), 80)
            assert there.overlaps(extreme.value.enclose(60))
    band = fmpq(1, 20) * response.peak_deviation().value.enclose(60).mid().fmpq()
    settled = response.settling(band).enclose(60)
    outside = [time for time, value in zip(times, values, strict=True) if abs(value - final).lower() > band]
    assert max(outside) <= settled.upper().fmpq()
    assert settled.lower().fmpq() - max(outside) < fmpq(1, 10)
    rate = response.peak_rate().value
    if rate.absent is None:
        steps = [abs(b - a) * 20 for a, b in pairwise(values)]
        assert max(float(step) for step in steps) <= float(rate.enclose(60).upper()) * (1 + 1e-12)


def test_integrals_of_a_pulse_through_a_lag() -> None:
    """y = 1 - e^-t up to T, (e^T - 1) e^-t after it: its integral is T, that of its square T - 1 + e^-T."""
    response = PiecewiseResponse(Superposed([wave(poly(1), LAG), wave(poly(1), LAG, -1, 2)]))
    assert abs(float(response.absolute_integral().enclose(60)) - 2.0) < 1e-14
    assert abs(float(response.squared_integral().enclose(60)) - (1.0 + exp(-2.0))) < 1e-14


def test_integral_of_a_damped_oscillation() -> None:
    """The integral of |e^(-a t) sin t| is (1 + e^(-a pi)) / ((1 + a^2) (1 - e^(-a pi)))."""
    for a in (fmpq(1, 5), fmpq(1, 50)):
        response = PiecewiseResponse(Superposed([wave(poly(1, 0), poly(1, 2 * a, 1 + a * a))]))
        with working_precision(100):
            fade = (-arb(a) * arb.pi()).exp()
            expected = (1 + fade) / ((1 + arb(a) ** 2) * (1 - fade))
        found = response.absolute_integral().enclose(60)
        assert found.overlaps(expected)
        assert found.rel_accuracy_bits() > 50


def test_a_bump_through_a_gain_and_through_a_lag() -> None:
    bump = BumpWave(poly(2), poly(1), fmpq(1, 2), fmpq(5), fmpq(0))
    response = PiecewiseResponse(Superposed([bump, AfterBump(bump)]))
    assert same(response.greatest().value, Answer.of_exact(2))
    assert response.final_value().exact == 0
    assert abs(float(response.absolute_integral().enclose(60)) - 5.0) < 1e-13
    through = BumpWave(poly(1), LAG, fmpq(1), fmpq(3), fmpq(1))
    response = PiecewiseResponse(Superposed([through, AfterBump(through)]))
    assert response.least().value.exact == 0
    assert abs(float(response.absolute_integral().enclose(60)) - 3.0) < 1e-13
    before, after = (response.enclose(fmpq(4) + shift, 80) for shift in (fmpq(-1, 10**9), fmpq(1, 10**9)))
    assert abs(float(before - after)) < 1e-8


@pytest.mark.parametrize(("numerator", "begin"), list(product((1, -2), (fmpq(0), fmpq(1, 3)))))
def test_more_bits_give_narrower_balls(numerator: int, begin: fmpq) -> None:
    pulse = [wave(poly(numerator), PAIR, 1, begin), wave(poly(numerator), PAIR, -1, begin + 1)]
    response = PiecewiseResponse(Superposed(pulse))
    answers = [response.greatest().value, response.least().time, response.settling(fmpq(1, 100))]
    for answer in answers:
        wide, narrow = answer.enclose(60), answer.enclose(300)
        assert narrow.rel_accuracy_bits() >= 295
        assert wide.overlaps(narrow)
