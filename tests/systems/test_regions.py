"""Exact comparison of decay, damping and natural frequency, on polynomials that are built from known pairs."""

from __future__ import annotations

import pytest
from flint import fmpq, fmpq_poly
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.systems.polynomials import highest_first, product
from specgate.systems.regions import compare_damping_ratio, compare_decay_rate, compare_natural_frequency

few = settings(max_examples=50, deadline=None)
TINY = fmpq(1, 10**40)


def rational(low: str, high: str) -> st.SearchStrategy[fmpq]:
    return st.fractions(min_value=low, max_value=high, max_denominator=60).map(
        lambda q: fmpq(q.numerator, q.denominator)
    )


damping = rational("-59/60", "59/60")
frequency = rational("1/60", "60")


def pair(zeta: fmpq, w: fmpq) -> fmpq_poly:
    return highest_first([1, 2 * zeta * w, w * w])


def sign(value: fmpq) -> int:
    return (value > 0) - (value < 0)


pairs = st.lists(st.tuples(damping, frequency, st.integers(1, 2)), min_size=1, max_size=4)


@few
@given(pairs, frequency, st.integers(0, 2), damping)
def test_least_damping(chosen: list[tuple[fmpq, fmpq, int]], real: fmpq, integrators: int, other: fmpq) -> None:
    p = product(pair(zeta, w) ** power for zeta, w, power in chosen) * highest_first([1, real])
    p = p * highest_first([1, 0]) ** integrators
    least = min(zeta for zeta, _, _ in chosen)
    for limit in (least, least + TINY, least - TINY, other):
        assert compare_damping_ratio(p, limit) == sign(least - limit)


@few
@given(pairs, frequency, st.sampled_from([1, -1]), frequency)
def test_least_natural_frequency_counts_no_real_root(
    chosen: list[tuple[fmpq, fmpq, int]], real: fmpq, side: int, other: fmpq
) -> None:
    least = min(w for _, w, _ in chosen)
    # Real roots on both crossings of the limiting circle must not be taken for a pair.
    p = product(pair(zeta, w) ** power for zeta, w, power in chosen) * highest_first([1, side * least])
    p = p * highest_first([1, real]) * highest_first([1, 0])
    for limit in (least, least + TINY, least - TINY, other):
        assert compare_natural_frequency(p, limit) == sign(least - limit)


@few
@given(st.lists(st.tuples(rational("-9", "9"), rational("0", "9")), min_size=1, max_size=4), rational("-9", "9"))
def test_least_decay(chosen: list[tuple[fmpq, fmpq]], other: fmpq) -> None:
    p = product(highest_first([1, 2 * a, a * a + b * b]) for a, b in chosen)
    least = min(a for a, _ in chosen)
    for limit in (least, least + TINY, least - TINY, other):
        assert compare_decay_rate(p, limit) == sign(least - limit)


def test_irrational_pair_is_exactly_at_a_rational_damping() -> None:
    """s^2 + s + 1 has zeta = 1/2 though its roots are irrational; so has s^2 + sqrt(2) s + 2 in s^4 + 2 s^2 + 4."""
    assert compare_damping_ratio(highest_first([1, 1, 1]), fmpq(1, 2)) == 0
    assert compare_damping_ratio(highest_first([1, 0, 2, 0, 4]), fmpq(-1, 2)) == 0


def test_limits_at_the_ends_of_the_scale() -> None:
    critically_damped = highest_first([1, 2, 1])
    assert compare_damping_ratio(critically_damped, fmpq(1)) == 0
    assert compare_damping_ratio(critically_damped, fmpq(3, 2)) == -1
    assert compare_damping_ratio(highest_first([1, 1, 1]), fmpq(1)) == -1
    assert compare_damping_ratio(highest_first([1, -1]), fmpq(-1)) == 0
    assert compare_damping_ratio(highest_first([1, -1]), fmpq(-2)) == 1
    assert compare_damping_ratio(highest_first([1, 0, 4]), fmpq(0)) == 0
    assert compare_natural_frequency(highest_first([1, 1, 1]), fmpq(0)) == 1


def test_nothing_to_compare() -> None:
    for compare, p in (
        (compare_decay_rate, highest_first([3])),
        (compare_damping_ratio, highest_first([1, 0, 0])),
        (compare_natural_frequency, highest_first([1, 3, 2])),
    ):
        with pytest.raises(ValueError, match="no root"):
            compare(p, fmpq(1))
