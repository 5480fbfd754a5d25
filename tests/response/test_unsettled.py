"""Responses that do not settle: what grows, what swings for ever, and what is still finite, in closed form."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.response.step import StepResponse
from specgate.systems.polynomials import highest_first
from specgate.terms.precision import working_precision

Make = Callable[..., StepResponse]

BOUND = "the response grows without bound"


def assert_is(answer: Answer, value: arb) -> None:
    assert answer.absent is None
    with working_precision(300):
        assert answer.enclose(200).overlaps(value)
        assert answer.enclose(200).rel_accuracy_bits() >= 100


def unbounded(answer: Answer) -> bool:
    return answer.absent is not None and answer.absent.proved and answer.absent.reason == BOUND


@pytest.mark.parametrize(
    ("numerator", "denominator", "up", "down"),
    [
        ([1], [1, 0], True, False),  # t
        ([-1], [1, 1, 0], False, True),  # -(t - 1 + e^-t)
        ([1], [1, 0, 0], True, False),  # t^2 / 2
        ([1], [1, -1], True, False),  # e^t - 1
        ([1], [1, "-1e-9", 1], True, True),  # a pair that grows by 1e-9 a radian or so
        ([1, 0], [1, 0, 2, 0, 1], True, True),  # t sin(t) / 2
        ([2], [1, 1, "-1e-7"], True, False),  # a pole at 1e-7
    ],
)
def test_growth_to_one_side_or_both(
    numerator: list[str | int], denominator: list[str | int], up: bool, down: bool, respond: Make
) -> None:
    response = respond(numerator, denominator)
    assert not response.settles
    assert unbounded(response.greatest().value) is up
    assert unbounded(response.least().value) is down
    assert unbounded(response.peak_deviation().value)
    for extreme, grows in ((response.greatest(), up), (response.least(), down)):
        if not grows:
            assert extreme.value.exact == 0
            assert extreme.time.exact == 0


def test_the_finite_side_of_a_growing_response(respond: Make) -> None:
    """y = 2 - t - 2 e^-t of (1 - s)/(s^2 + s) is greatest, 1 - ln 2, at t = ln 2, and falls without bound."""
    response = respond([-1, 1], [-1, -1, 0])
    with working_precision(300):
        assert_is(response.greatest().value, 1 - arb(2).log())
        assert_is(response.greatest().time, arb(2).log())
    assert unbounded(response.least().value)


def test_a_lasting_swing(respond: Make) -> None:
    """y = 1 - cos t, and y = sin t, and y = cos t: taken exactly where it starts at a summit or in a trough."""
    one = respond([1], [1, 0, 1])
    with working_precision(300):
        assert_is(one.greatest().value, arb(2))
        assert_is(one.greatest().time, arb.pi())
    assert (one.least().value.exact, one.least().time.exact) == (0, 0)
    sine = respond([1, 0], [1, 0, 1])
    with working_precision(300):
        assert_is(sine.greatest().time, arb.pi() / 2)
        assert_is(sine.least().time, 3 * arb.pi() / 2)
        assert_is(sine.peak_deviation().value, arb(1))
    cosine = respond([1, 0, 0], [1, 0, 1])
    assert (cosine.greatest().value.exact, cosine.greatest().time.exact) == (1, 0)


def test_a_lasting_swing_with_a_transient(respond: Make) -> None:
    """1/((s+1)(s^2+1)): y = 1 - e^-t/2 - (cos t + sin t)/2 comes up to 1 + 1/sqrt(2) from below and never takes it."""
    response = respond([1], [1, 1, 1, 1])
    with working_precision(300):
        assert_is(response.greatest().value, 1 + 1 / arb(2).sqrt())
    assert response.greatest().time.absent is not None
    assert response.greatest().time.absent.proved
    assert response.least().value.exact == 0


def test_a_transient_that_helps_the_first_summit(respond: Make) -> None:
    """(s^2+3s+1)/((s+1)(s^2+1)): y = 1 + e^-t/2 + ... goes above what it swings to in the end, once, and takes it."""
    response = respond([1, 3, 1], [1, 1, 1, 1])
    extreme = response.greatest()
    assert extreme.time.absent is None
    value = extreme.value.enclose(128)
    with working_precision(256):
        assert response.enclose(extreme.time.enclose(128).mid().fmpq(), 128).overlaps(value)
        late = max(float(response.enclose(fmpq(2000 + k, 20), 64)) for k in range(200))
    assert late < float(value) - 1e-3


def test_swings_whose_frequencies_are_no_square_roots_are_left_open(respond: Make) -> None:
    extreme = respond([1, 1], [1, 0, 4, 0, 2]).greatest()
    assert extreme.value.absent is not None
    assert not extreme.value.absent.proved


def top_of_two_swings() -> tuple[arb, arb]:
    """Return the greatest sin(t) + sin(2t), where 4 cos(t)^2 + cos(t) - 2 = 0, and the first such t."""
    cosine = (arb(33).sqrt() - 1) / 8
    time = cosine.acos()
    return time.sin() + (2 * time).sin(), time


def test_swings_with_a_common_period_are_searched_for_one_of_them(respond: Make) -> None:
    response = respond([3, 0, 6, 0], [1, 0, 5, 0, 4])
    with working_precision(300):
        top, time = top_of_two_swings()
        assert_is(response.greatest().value, top)
        assert_is(response.greatest().time, time)
        assert_is(response.least().value, -top)


def test_a_transient_beside_swings_with_a_common_period() -> None:
    """y = sin(t) + sin(2t) + 3 e^(-t/10) - 3, and its like upwards: it comes ever nearer to its value far away."""
    swings = highest_first([fmpq(3), fmpq(0), fmpq(6), fmpq(0)]), highest_first([fmpq(c) for c in (1, 0, 5, 0, 4)])
    slow = highest_first([fmpq(-3, 10)]), highest_first([fmpq(1), fmpq(1, 10)])
    for sign in (1, -1):
        above, below = swings[0] * slow[1] + sign * slow[0] * swings[1], swings[1] * slow[1]
        response = StepResponse(above, below, fmpq(1))
        far, near = (response.least(), response.greatest()) if sign > 0 else (response.greatest(), response.least())
        with working_precision(300):
            top, _ = top_of_two_swings()
            assert_is(far.value, -sign * (top + 3))
        value = near.value.enclose(64)
        assert response.enclose(near.time.enclose(64).mid().fmpq(), 64).overlaps(value)
        values = [float(response.enclose(fmpq(k, 100), 64)) for k in range(3000)]
        sampled = max(values) if sign > 0 else min(values)
        assert 0 <= sign * (float(value) - sampled) + 1e-12 < 1e-4


def test_swings_without_a_common_period_reach_the_sum_of_their_amplitudes(respond: Make) -> None:
    """2/((s^2+3)(s^2+4)) s/s: y = 2/sqrt(3) sin(sqrt(3) t) - sin(2 t)."""
    response = respond([2, 0], [1, 0, 7, 0, 12])
    with working_precision(300):
        top = 1 + 2 / arb(3).sqrt()
        assert_is(response.greatest().value, top)
        assert_is(response.least().value, -top)
        near = max(float(response.enclose(fmpq(k, 10), 64)) for k in range(3000))
    assert float(top) - 0.02 < near < float(top)
    assert response.greatest().time.absent is not None
    assert not response.greatest().time.absent.proved


def test_a_transient_above_what_two_swings_reach(respond: Make) -> None:
    """y = 3 e^-t (1 - e^-t) beside small swings at sqrt(2) and sqrt(3): the first summit is the greatest value."""
    # s/(s+1)(s+2) * 3 + s (1/(s^2+2) + 1/(s^2+3)) / 100
    quick = highest_first([fmpq(3), fmpq(0)]), highest_first([fmpq(1), fmpq(3), fmpq(2)])
    swings = (
        highest_first([fmpq(2, 100), fmpq(0), fmpq(5, 100), fmpq(0)]),
        highest_first([fmpq(c) for c in (1, 0, 5, 0, 6)]),
    )
    response = StepResponse(quick[0] * swings[1] + swings[0] * quick[1], quick[1] * swings[1], fmpq(1))
    value, time = response.greatest().value.enclose(64), response.greatest().time.enclose(64)
    assert 0.75 < float(value) < 0.77
    assert response.enclose(time.mid().fmpq(), 64).overlaps(value)
    sampled = max(float(response.enclose(fmpq(k, 100), 64)) for k in range(1000))
    assert sampled - 1e-12 < float(value) < sampled + 1e-4
    with working_precision(200):
        lowest = -(1 / arb(2).sqrt() + 1 / arb(3).sqrt()) / 100
    assert response.least().value.absent is not None or response.least().value.enclose(64).overlaps(lowest)


def test_values_exist_all_the_same(respond: Make) -> None:
    response = respond([1], [1, 1, 0])
    with working_precision(200):
        assert response.enclose(fmpq(3), 128).overlaps(2 + (-arb(3)).exp())
    assert response.initial_value().exact == 0
    assert response.enclose(fmpq(0), 64).contains(0)


def test_a_dip_before_fast_growth(respond: Make) -> None:
    """y = (e^2t - 1) - 3 (1 - e^-t) falls at first; far cells overflow and must not hide the least value.

    y' = 2 e^2t - 3 e^-t is zero at t = ln(3/2)/3.
    """
    # 2/(s (s - 2)) - 3/(s (s + 1)), over s (s - 2) (s + 1)
    response = respond([-1, 8], [1, -1, -2])
    with working_precision(300):
        time = arb(fmpq(3, 2)).log() / 3
        assert_is(response.least().time, time)
        assert_is(response.least().value, (2 * time).exp() - 1 - 3 * (1 - (-time).exp()))
    assert unbounded(response.greatest().value)
