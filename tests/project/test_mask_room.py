"""Whether the limits of a mask leave room between them: against both limits read at many places, in floats."""

from __future__ import annotations

from itertools import pairwise
from math import exp, log

import pytest
from flint import fmpq
from hypothesis import given
from hypothesis import strategies as st

from specgate.project.mask_room import crossed
from specgate.response.questions import Mask

Corners = list[tuple[int, int]]

CLEARLY = 1e-9


def points(corners: Corners) -> tuple[tuple[fmpq, fmpq], ...]:
    return tuple((fmpq(at), fmpq(level)) for at, level in corners)


def inside(corners: Corners, place: float, logarithmic: bool) -> float | None:
    """Read a limit between two corners, not at one."""
    for (first, level), (second, next_level) in pairwise(corners):
        if first < place < second:
            if not logarithmic:
                return level + (next_level - level) * (place - first) / (second - first)
            share = log(place / first) / log(second / first)
            return exp(log(level) + share * log(next_level / level))
    return None


_corners = st.lists(st.tuples(st.integers(1, 12), st.integers(1, 30)), min_size=2, max_size=5).map(
    lambda found: sorted(found, key=lambda corner: corner[0])
)


@given(_corners, _corners, st.booleans())
def test_it_is_what_is_seen_between_the_corners(upper: Corners, lower: Corners, logarithmic: bool) -> None:
    gaps = []
    for number in range(1, 12 * 40):
        place = number / 40 + 1 / 97  # never at a corner
        above, below = inside(upper, place, logarithmic), inside(lower, place, logarithmic)
        if above is not None and below is not None:
            gaps.append(above - below)
    found = crossed(Mask(points(upper), points(lower), logarithmic=logarithmic))
    if gaps and min(gaps) < -CLEARLY:
        assert found is not None
    # beside a corner the lines are as good as what holds at it: 1/40 off changes no level by more than 30
    if found is not None and gaps:
        assert min(gaps) < 30


@pytest.mark.parametrize(
    ("upper", "lower", "forever", "place"),
    [
        ([(0, 5), (4, 5)], [(0, 4), (4, 4)], False, None),
        ([(0, 5), (4, 5)], [(0, 5), (4, 5)], False, None),  # touching is no crossing
        ([(0, 5), (4, 5)], [(0, 4), (4, 6)], False, 4),
        ([(0, 9), (2, 9), (2, 3), (4, 3)], [(0, 1), (2, 1), (2, 4), (4, 2)], False, 2),
        ([(0, 9), (2, 9), (2, 3), (4, 3)], [(0, 1), (2, 5)], False, None),  # at the jump the looser limit holds
        ([(0, 5), (2, 5)], [(2, 6), (4, 6)], False, 2),  # one ends where the other begins: both hold there
        ([(0, 5), (2, 5)], [(2, 4), (4, 6)], False, None),
        ([(0, 5), (2, 5)], [(3, 6), (4, 6)], False, None),
        ([(0, 5), (2, 5)], [(3, 6), (4, 6)], True, 3),
        ([(0, 5), (2, 5)], [], True, None),
    ],
)
def test_by_hand(upper: Corners, lower: Corners, forever: bool, place: int | None) -> None:
    assert crossed(Mask(points(upper), points(lower), forever)) == (None if place is None else fmpq(place))


def test_a_millionth_decides_between_logarithms() -> None:
    # 10 falling to 1 over a decade passes 10/sqrt(10) = 3.16227766... half way on
    upper, half = points([(1, 10), (100, 1)]), fmpq(10)
    for level, expected in ((fmpq(3162276, 10**6), None), (fmpq(3162278, 10**6), half)):
        lower = ((half, level), (fmpq(11), fmpq(1)))
        assert crossed(Mask(upper, lower, logarithmic=True)) == expected
