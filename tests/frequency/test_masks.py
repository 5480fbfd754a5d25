"""Masks over frequency: edges that are touched, crossed, jump, and lines in dB of any slope."""

from __future__ import annotations

import numpy as np
import pytest
from flint import fmpq

from specgate.frequency.rational_gain import RationalGain
from specgate.response.answers import Answer
from specgate.response.questions import Mask
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction

Corners = list[tuple[fmpq | int, fmpq | int]]


def points(corners: Corners) -> tuple[tuple[fmpq, fmpq], ...]:
    return tuple((fmpq(at), fmpq(limit)) for at, limit in corners)


def gain(numerator: list[fmpq | int], denominator: list[fmpq | int]) -> RationalGain:
    return RationalGain(TransferFunction(highest_first(numerator), highest_first(denominator)))


LAG = ([1], [1, 1])
PAIR = ([1], [1, fmpq(1, 5), 1])


def violation(answer: Answer) -> tuple[float, float, float]:
    """Return frequency, value and limit of the first violation."""
    assert answer.truth is False
    assert answer.at is not None
    found = [answer.at[name] for name in ("frequency", "value", "limit")]
    return tuple(float(one.enclose(64).mid()) for one in found if isinstance(one, Answer))  # type: ignore[return-value]


def test_touching_complies() -> None:
    lag = gain(*LAG)
    assert lag.within(Mask(points([(0, 1), (10, 1)]))).truth is True
    assert lag.within(Mask(points([(0, 1)]), forever=True)).truth is True
    assert lag.within(Mask(lower=points([(0, 0), (5, 0)]))).truth is True
    # 1/sqrt(1 + w^2) is 3/5 at 4/3
    assert lag.within(Mask(lower=points([(0, fmpq(3, 5)), (fmpq(4, 3), fmpq(3, 5))]))).truth is True
    assert lag.within(Mask(points([(fmpq(4, 3), fmpq(3, 5)), (9, fmpq(3, 5))]))).truth is True


def test_a_resonance_leaves_its_mask() -> None:
    """1/(s^2 + s/5 + 1) passes 2 first where (1 - x)^2 + x/25 = 1/4, at x = 0.5186..."""
    crossed = (1.96 - np.sqrt(1.96**2 - 3)) / 2
    found = violation(gain(*PAIR).within(Mask(points([(0, 2), (5, 2)]))))
    assert found == pytest.approx((np.sqrt(crossed), 2, 2))
    assert gain(*PAIR).within(Mask(points([(0, 6), (5, 6)]))).truth is True
    below = violation(gain(*PAIR).within(Mask(lower=points([(0, fmpq(1, 2)), (5, fmpq(1, 2))]))))
    assert below[1:] == pytest.approx((0.5, 0.5))


def test_a_sloping_edge_over_frequency() -> None:
    """1 - w/4 touches 1/sqrt(1 + w^2) at zero and falls faster from there on; 2 - 3w/8 stays above."""
    assert violation(gain(*LAG).within(Mask(points([(0, 1), (4, 0)])))) == (0.0, 1.0, 1.0)
    inside = gain(*LAG).within(Mask(points([(0, 2), (4, fmpq(1, 2))])))
    assert inside.truth is True


def test_the_looser_limit_holds_at_a_jump() -> None:
    lag = gain(*LAG)
    # down to 3/5 from 4/3 on, where the lag is exactly 3/5
    assert lag.within(Mask(points([(0, 1), (fmpq(4, 3), 1), (fmpq(4, 3), fmpq(3, 5)), (5, fmpq(3, 5))]))).truth is True
    early = Mask(points([(0, 1), (1, 1), (1, fmpq(3, 5)), (5, fmpq(3, 5))]))
    assert violation(lag.within(early)) == pytest.approx((1.0, np.sqrt(0.5), 0.6))


def test_for_ever_and_after_the_last_corner() -> None:
    rising = gain([1, 0], [1, 1])
    assert rising.within(Mask(points([(0, 1), (3, fmpq(99, 100))]))).truth is True
    assert rising.within(Mask(points([(0, 1), (3, 1)]), forever=True)).truth is True
    found = violation(rising.within(Mask(points([(0, 1), (3, fmpq(99, 100))]), forever=True)))
    assert found[0] == pytest.approx(0.99 / np.sqrt(1 - 0.99**2))


@pytest.mark.parametrize(("low", "high", "truth"), [(1, fmpq(1, 10), True), (fmpq(999, 1000), fmpq(999, 10000), True)])
def test_twenty_decibels_per_decade(low: fmpq, high: fmpq, truth: bool) -> None:
    """1/w from 1 to 10 stays above 1/sqrt(1 + w^2); 0.999/w meets it at w = 22.3."""
    mask = Mask(points([(1, low), (10, high)]), logarithmic=True)
    assert gain(*LAG).within(mask).truth is truth
    longer = Mask(points([(1, low), (100, fmpq(low) / 100)]), logarithmic=True)
    found = gain(*LAG).within(longer)
    assert found.truth is (low == 1)
    if low != 1:
        assert violation(found)[0] == pytest.approx(0.999 / np.sqrt(1 - 0.999**2))


@pytest.mark.parametrize("seed", range(12))
def test_any_slope(seed: int) -> None:
    """Against a dense grid: where the gain first leaves, or that it does not."""
    chance = np.random.default_rng(seed)
    low, high = (fmpq(int(x), 1000) for x in chance.integers(200, 9000, 2))
    end = fmpq(int(chance.integers(2, 40)), 2)
    found = gain(*PAIR).within(Mask(points([(fmpq(1, 2), low), (end, high)]), logarithmic=True))
    assert found.truth is not None
    w = np.geomspace(0.5, float(end.p) / float(end.q), 200001)
    actual = 1 / np.abs(1 - w**2 + 0.2j * w)
    first, last = float(low.p) / float(low.q), float(high.p) / float(high.q)
    limit = first * (w / 0.5) ** (np.log(last / first) / np.log(w[-1] / 0.5))
    outside = np.flatnonzero(actual > limit * (1 + 1e-12))
    assert found.truth is (len(outside) == 0)
    if len(outside):
        assert violation(found)[0] == pytest.approx(w[outside[0]], rel=1e-4)


def test_a_corner_on_the_curve_is_told() -> None:
    """The edge begins exactly on the curve, at 3/5, and falls faster or slower than it does."""
    lag, at = gain(*LAG), (fmpq(4, 3), fmpq(3, 5))
    slow = Mask(points([at, (5, fmpq(3, 10))]), logarithmic=True)
    fast = Mask(points([at, (5, fmpq(1, 10))]), logarithmic=True)
    assert lag.within(slow).truth is True
    assert violation(lag.within(fast)) == pytest.approx((4 / 3, 0.6, 0.6))


def test_a_growing_channel_is_inside_of_nothing() -> None:
    found = gain([1], [1, -1]).within(Mask(points([(0, 9)])))
    assert found.absent is not None
    assert found.absent.proved


def test_a_negative_limit_is_refused() -> None:
    with pytest.raises(ValueError, match="not negative"):
        gain(*LAG).within(Mask(lower=points([(0, -1), (1, 1)])))
