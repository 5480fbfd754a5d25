"""Positive roots isolated exactly, against the certified complex roots of FLINT."""

from __future__ import annotations

from random import Random

import pytest
from flint import arb, fmpq, fmpq_poly, fmpz_poly

from specgate.frequency.narrowing import monotone
from specgate.frequency.spots import Rational, positive_roots
from specgate.response.budget import OutOfWork
from specgate.systems.polynomials import primitive
from specgate.systems.real_roots import may_have_rational_roots, positive_intervals
from specgate.terms.precision import working_precision

X = fmpq_poly([0, 1])


def rational(random: Random) -> fmpq:
    """Return a number of some size between 1e-9 and 1e9, now and then a power of two."""
    if random.random() < 0.2:
        return fmpq(2) ** random.randint(0, 12) / 2 ** random.randint(0, 12)
    return fmpq(random.randint(1, 999), random.randint(1, 99)) * fmpq(10) ** random.randint(0, 6) / 10**3


def polynomial(random: Random) -> fmpz_poly:
    """Return a square-free polynomial with roots decades apart, near each other, and pairs near the real axis."""
    p = fmpq_poly([1])
    for _ in range(random.randint(1, 4)):
        root = rational(random)
        p *= random.choice((X - root, X + root, X - root * (1 + fmpq(1, 10**9)), X * X - root))
    for _ in range(random.randint(0, 3)):
        root = rational(random)
        p *= (X - root) ** 2 + root * root / 10 ** random.randint(0, 12)
    if random.random() < 0.5:
        p *= fmpq_poly([random.randint(-9, 9) or 1 for _ in range(random.randint(2, 9))])
    whole = primitive(p)
    whole = whole // whole.gcd(whole.derivative())
    return whole if whole[0] != 0 else whole.right_shift(1)


def positive_real(p: fmpz_poly) -> list[arb]:
    with working_precision(256):
        balls = [root.real for root, _ in p.complex_roots() if root.imag.is_zero() and root.real > 0]
    return sorted(balls, key=lambda ball: ball.mid().fmpq())


@pytest.mark.parametrize("seed", range(60))
def test_each_interval_has_its_root(seed: int) -> None:
    p = polynomial(Random(seed))
    wanted, found = positive_real(p), positive_intervals(p)
    assert len(found) == len(wanted)
    for (left, right), root in zip(found, wanted, strict=True):
        assert 0 <= left <= right
        with working_precision(256):
            if left == right:
                assert p(right) == 0
                assert root.contains(right)
            else:
                assert root > arb(left) or root.contains(left)
                assert root < arb(right)
                assert p(right) != 0


@pytest.mark.parametrize("seed", range(60))
def test_each_ball_is_about_its_root_and_monotone(seed: int) -> None:
    p = polynomial(Random(1000 + seed))
    intervals = [(left, right) for left, right in positive_intervals(p) if left < right]
    wanted = [root for root in positive_real(p) if not any(root.contains(right) for right in powers(p))]
    for (left, right), root in zip(intervals, wanted, strict=True):
        ball, rising = monotone(p, left, right)
        assert ball.overlaps(root)
        assert any(has_sign(p.derivative(), ball, bits, rising) for bits in (64, 128, 256, 512, 1024))


def has_sign(p: fmpz_poly, ball: arb, bits: int, positive: bool) -> bool:
    with working_precision(bits):
        value = p(ball)
        return bool(value > 0 if positive else value < 0)


def powers(p: fmpz_poly) -> list[fmpq]:
    return [right for left, right in positive_intervals(p) if left == right]


def test_rational_roots_are_told_from_others() -> None:
    p = (X - fmpq(3, 7)) * (X - 4) * (X * X - 2) * (X * X - X * fmpq(1, 3) + 5)
    assert may_have_rational_roots(primitive(p))
    assert [spot.x for spot in positive_roots(p) if isinstance(spot, Rational)] == [fmpq(3, 7), fmpq(4)]
    assert len(positive_roots(p)) == 3
    assert not may_have_rational_roots(fmpz_poly([-2, 0, 1]))


def test_a_root_of_one_interval_is_not_that_of_the_next() -> None:
    p = primitive((X - 1) * (X - 2) * (X - 3) * (X - 4) * (X - fmpq(5, 2)))
    assert [right for left, right in positive_intervals(p) if left == right] == [1, 2, fmpq(5, 2), 3, 4]


def test_none_where_there_is_none() -> None:
    for p in (fmpz_poly([1, 0, 1]), fmpz_poly([5]), fmpz_poly([1, 2, 3]), fmpz_poly([1, -1, 1]), fmpz_poly([-1, -2])):
        assert positive_intervals(p) == ()


def test_roots_that_all_but_touch_are_told_apart() -> None:
    tiny = fmpq(1, 10**40)
    p = primitive((X - 1 - tiny) * (X - 1 + tiny) * ((X - 3) ** 2 + tiny))
    (one, other) = positive_intervals(p)
    assert one[0] < 1 - tiny <= one[1] <= other[0] < 1 + tiny <= other[1]


def test_roots_too_close_to_be_told_apart_are_said_to_be_so() -> None:
    """x^n - 2 (a x - 1)^2 has two roots about a^(-1 - n/2) apart (Mignotte 1982)."""
    close = X**8 - 2 * (X * 10**30 - 1) ** 2
    assert len(positive_roots(close)) == 3
    with pytest.raises(OutOfWork, match="too close"):
        positive_roots(X**20 - 2 * (X * 10**30 - 1) ** 2)
