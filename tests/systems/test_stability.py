"""Counting roots by side, against polynomials that are built from known roots and against other criteria."""

from __future__ import annotations

import pytest
from flint import fmpq, fmpq_mat, fmpq_poly
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.systems.polynomials import highest_first, product
from specgate.systems.stability import RootCount, classify, count_positive_roots, count_real_roots, is_hurwitz

few = settings(max_examples=50, deadline=None)
positive = st.fractions(min_value="1/1000", max_value=1000, max_denominator=1000).map(
    lambda q: fmpq(q.numerator, q.denominator)
)
whole = st.integers(min_value=-9, max_value=9)

# A factor with the places of its roots: (left, right, on the axis, at the origin).
Factor = tuple[fmpq_poly, tuple[int, int, int, int]]


def real_factor(at: fmpq, side: int) -> Factor:
    return highest_first([1, at * side]), ((1, 0, 0, 0) if side > 0 else (0, 1, 0, 0))


def pair_factor(at: fmpq, imaginary: fmpq, side: int) -> Factor:
    p = highest_first([1, 2 * at * side, at * at + imaginary * imaginary])
    return p, ((2, 0, 0, 0) if side > 0 else (0, 2, 0, 0))


factors = st.one_of(
    st.builds(real_factor, positive, st.sampled_from([1, -1])),
    st.builds(pair_factor, positive, positive, st.sampled_from([1, -1])),
    positive.map(lambda w: (highest_first([1, 0, w * w]), (0, 0, 2, 0))),
    st.just((highest_first([1, 0]), (0, 0, 1, 1))),
)


@few
@given(st.lists(st.tuples(factors, st.integers(1, 3)), min_size=1, max_size=6), positive)
def test_counts_of_known_roots(chosen: list[tuple[Factor, int]], gain: fmpq) -> None:
    p = product(factor**power for (factor, _), power in chosen) * -gain
    left, right, axis, origin = (sum(places[i] * power for (_, places), power in chosen) for i in range(4))
    count = classify(p)
    assert (count.left, count.right, count.axis, count.origin) == (left, right, axis, origin)
    assert sum(count.axis_multiplicities) == axis
    assert is_hurwitz(p) == count.stable == (right == 0 and axis == 0)


def hurwitz_minors_positive(p: fmpq_poly) -> bool:
    """Hurwitz 1895: the leading principal minors of his matrix, computed one by one."""
    n, lead = p.degree(), p.leading_coefficient()
    a = [p[n - k] / lead if 0 <= k <= n else fmpq(0) for k in range(-n, 2 * n + 1)]
    rows = [[a[n + 2 * column + 1 - row] for column in range(n)] for row in range(n)]
    return all(fmpq_mat([row[:k] for row in rows[:k]]).det() > 0 for k in range(1, n + 1))


@few
@given(st.lists(st.integers(min_value=-2, max_value=30), min_size=2, max_size=8).filter(lambda c: c[0] != 0))
def test_agrees_with_the_determinants_of_hurwitz(coefficients: list[int]) -> None:
    p = highest_first(coefficients)
    assert is_hurwitz(p) == hurwitz_minors_positive(p) == classify(p).stable


@few
@given(st.lists(whole, min_size=2, max_size=9).filter(lambda c: c[0] != 0))
def test_mirroring_exchanges_left_and_right(coefficients: list[int]) -> None:
    p = highest_first(coefficients)
    count, mirrored = classify(p), classify(p(fmpq_poly([0, -1])))
    assert (mirrored.left, mirrored.right) == (count.right, count.left)
    assert mirrored.axis_multiplicities == count.axis_multiplicities
    assert count.left + count.right + count.axis == p.degree()


def test_multiplicities_on_the_axis() -> None:
    p = highest_first([1, 0, 4]) ** 2 * highest_first([1, 0, 9]) * highest_first([1, 0]) ** 3 * highest_first([1, 1])
    assert classify(p) == RootCount(left=1, right=0, axis=9, origin=3, axis_multiplicities=(3, 2, 2, 1, 1))


def test_symmetric_quadruple_is_not_on_the_axis() -> None:
    assert classify(highest_first([1, 0, 0, 0, 4])) == RootCount(left=2, right=2, axis=0, origin=0)


def test_pole_that_floats_cannot_tell_from_the_axis() -> None:
    tiny = fmpq(1, 10**30)
    lag = highest_first([1, 1])
    assert is_hurwitz(highest_first([1, tiny]) * lag)
    assert classify(highest_first([1, -tiny]) * lag).right == 1
    assert classify(highest_first([1, 2 * tiny, 1]) ** 3 * lag).stable
    assert classify(highest_first([1, -2 * tiny, 1]) ** 3 * lag).right == 6


def test_limit_of_stability_is_not_stable() -> None:
    """s^3 + 2 s^2 + 3 s + k: Routh's bound is k = 6, where the pair lies at +-j sqrt 3."""
    assert is_hurwitz(highest_first([1, 2, 3, fmpq(6) - fmpq(1, 10**40)]))
    assert not is_hurwitz(highest_first([1, 2, 3, 6]))
    assert classify(highest_first([1, 2, 3, 6])).axis == 2
    assert classify(highest_first([1, 2, 3, fmpq(6) + fmpq(1, 10**40)])).right == 2


def test_constants_have_no_roots_and_zero_has_all() -> None:
    assert is_hurwitz(highest_first([-3]))
    assert classify(highest_first([5])) == RootCount(0, 0, 0, 0)
    for question in (is_hurwitz, classify, count_real_roots):
        with pytest.raises(ValueError, match="every number"):
            question(fmpq_poly())


def test_real_roots_are_counted_once() -> None:
    p = highest_first([1, -2]) ** 2 * highest_first([1, 3]) * highest_first([1, 0]) * highest_first([1, 0, 1])
    assert count_real_roots(p) == 3
    assert count_positive_roots(p) == 1
