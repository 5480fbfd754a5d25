"""Enclosed roots against roots that are known, and against mpmath where the problem is well conditioned."""

from __future__ import annotations

import mpmath
import pytest
from flint import acb, arb, fmpq, fmpq_poly
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.systems.polynomials import highest_first, product
from specgate.systems.roots import certified_roots
from specgate.systems.stability import classify
from specgate.terms.precision import working_precision

few = settings(max_examples=50, deadline=None)
rational = st.fractions(min_value=-100, max_value=100, max_denominator=50).map(
    lambda q: fmpq(q.numerator, q.denominator)
)


def contains(ball: arb, value: fmpq) -> bool:
    with working_precision(2000):
        return (ball * value.q - value.p).contains(0)


@few
@given(st.dictionaries(rational, st.integers(1, 4), min_size=1, max_size=6), st.sampled_from([64, 200, 700]))
def test_rational_roots_with_their_multiplicities(known: dict[fmpq, int], bits: int) -> None:
    found = certified_roots(product(highest_first([1, -root]) ** power for root, power in known.items()), bits)
    assert [root.multiplicity for root in found] == [known[root] for root in sorted(known)]
    for root, value in zip(found, sorted(known), strict=True):
        assert root.value.imag.is_zero()
        assert contains(root.value.real, value)
        assert root.value.real.rad() <= arb(2) ** -bits * (1 + abs(arb(value)))


@few
@given(
    st.lists(
        st.tuples(rational, rational.filter(bool)),
        min_size=1,
        max_size=4,
        unique_by=lambda pair: (pair[0], abs(pair[1])),
    )
)
def test_pairs_are_contained_and_conjugate(pairs: list[tuple[fmpq, fmpq]]) -> None:
    found = certified_roots(product(highest_first([1, -2 * a, a * a + b * b]) for a, b in pairs), 100)
    assert len(found) == 2 * len(pairs)
    for a, b in pairs:
        for imaginary in (b, -b):
            assert sum(contains(root.value.real, a) and contains(root.value.imag, imaginary) for root in found) == 1
    assert all(root.value.real.is_zero() for root in found if root.value.real.contains(0))
    assert sum(root.value.real.is_zero() for root in found) == 2 * sum(a == 0 for a, _ in pairs)


def test_roots_on_the_axis_are_exactly_on_it() -> None:
    found = certified_roots(highest_first([1, 0, 2]) ** 2 * highest_first([1, 1]) * highest_first([1, 0]), 128)
    on_axis = [root for root in found if root.value.real.is_zero()]
    assert [root.multiplicity for root in on_axis] == [2, 1, 2]
    assert on_axis[1].value.is_zero()


@pytest.mark.parametrize("bits", [64, 300])
def test_balls_that_touch_the_axis_are_put_on_it(bits: int) -> None:
    """One square-free factor with roots on and off the axis: the finder alone leaves real parts of about 1e-38."""
    p = highest_first([1, 0, 2]) * highest_first([1, -3]) * highest_first([1, fmpq(1, 10**50)])
    found = certified_roots(p, bits)
    assert [root.value.real.is_zero() for root in found] == [False, True, True, False]
    assert found[0].value.real < 0


@pytest.mark.parametrize("digits", [30, 45, 60, 200, 600])
def test_index_of_roots_with_nearly_equal_real_parts(digits: int) -> None:
    """What looks equal at one precision is told apart at another: the order must not change with it."""
    gap = fmpq(1, 10**digits)
    p = highest_first([1, 2 + 2 * gap, (1 + gap) ** 2 + 4]) * highest_first([1, 2, 2])
    orders = [[round(float(root.value.imag.mid())) for root in certified_roots(p, bits)] for bits in (64, 300, 3000)]
    assert sorted(orders[0]) == [-2, -1, 1, 2]
    assert orders == [orders[0]] * 3


@few
@given(st.lists(st.integers(-20, 20), min_size=3, max_size=8).filter(lambda c: c[0] != 0))
def test_a_root_keeps_its_index_at_every_precision(coefficients: list[int]) -> None:
    p = highest_first(coefficients)
    first = certified_roots(p, 64)
    for bits in (128, 300, 900):
        again = certified_roots(p, bits)
        assert [root.multiplicity for root in again] == [root.multiplicity for root in first]
        assert all(fine.value.overlaps(coarse.value) for fine, coarse in zip(again, first, strict=True))
    assert sum(root.multiplicity for root in first) == p.degree()
    assert sum(root.multiplicity for root in first if root.value.real > 0) == classify(p).right


@few
@given(st.lists(st.integers(-20, 20), min_size=3, max_size=8).filter(lambda c: c[0] != 0))
def test_balls_of_different_roots_are_disjoint(coefficients: list[int]) -> None:
    found = certified_roots(highest_first(coefficients), 64)
    for index, root in enumerate(found):
        assert not any(root.value.overlaps(other.value) for other in found[index + 1 :])


def test_agrees_with_another_root_finder() -> None:
    p = highest_first([3, -7, 11, 2, 40, 9])
    with mpmath.workdps(40):
        other = mpmath.polyroots([3, -7, 11, 2, 40, 9], maxsteps=200, extraprec=200, asc=False)
        digits = sorted((mpmath.nstr(root.real, 25), mpmath.nstr(root.imag, 25)) for root in other)
    with working_precision(200):
        near = [acb(arb(real), arb(imaginary)) + acb(arb(0, 1e-20), arb(0, 1e-20)) for real, imaginary in digits]
    found = certified_roots(p, 128)
    assert all(sum(ball.contains(root.value) for ball in near) == 1 for root in found)


def test_roots_that_floats_merge_are_told_apart() -> None:
    gap = fmpq(1, 10**40)
    found = certified_roots(highest_first([1, 1]) * highest_first([1, fmpq(1) + gap]), 64)
    assert [root.multiplicity for root in found] == [1, 1]
    assert found[0].value.real < found[1].value.real


def test_sorted_by_real_then_imaginary_part() -> None:
    p = highest_first([1, 2, 5]) * highest_first([1, 2, 2]) * highest_first([1, 3])
    found = certified_roots(p, 64)
    assert [(round(float(r.value.real.mid())), round(float(r.value.imag.mid()))) for r in found] == [
        (-3, 0), (-1, -2), (-1, -1), (-1, 1), (-1, 2),
    ]  # fmt: skip


def test_no_roots() -> None:
    assert certified_roots(highest_first([7]), 64) == ()
    with pytest.raises(ValueError, match="every number"):
        certified_roots(fmpq_poly(), 64)
