"""Features: which pair dominates, which pole is slowest, and rational figures that stay rational."""

from __future__ import annotations

from typing import Any

from flint import fmpq

from specgate.approximations.figures import root, smallest, total
from specgate.response.answers import Absent, Answer


def test_the_pair_of_smallest_decay_rate(build: Any) -> None:
    features = build.roots([(-2, 3), (-1, 8), -5])
    assert features.pair is not None
    assert features.sigma.exact == 1
    assert features.pair.distance_squared.exact == 65
    assert len(features.others) == 3


def test_of_equal_decay_rates_the_lower_frequency(build: Any) -> None:
    features = build.roots([(-1, 8), (-1, 2)])
    assert features.pair.distance_squared.exact == 5


def test_equal_decay_rates_that_are_not_rational(build: Any) -> None:
    """(s^2 + s + 1)^2 + 1 has two pairs, both mirrored about -1/2: decay rates differ, nothing overlaps for ever."""
    features = build.ratio([1], [1, 2, 3, 2, 2])
    assert features.pair is not None
    assert not features.pair.real


def test_no_pair(build: Any) -> None:
    features = build.roots([-1, -4])
    assert features.pair is None
    assert features.sigma is None
    assert features.damping is None
    assert features.slowest.decay.exact == 1


def test_rational_figures_are_exact(build: Any) -> None:
    features = build.ratio([1], [1, 6, 25])
    assert features.sigma.exact == 3
    assert features.natural_frequency.exact == 5
    assert features.damping.exact == fmpq(3, 5)


def test_irrational_figures_are_balls(build: Any) -> None:
    features = build.ratio([1], [1, 1, 3])
    assert features.natural_frequency.exact is None
    assert abs(features.natural_frequency.enclose(128) ** 2 - 3) < 1e-15
    assert features.damping.exact is None


def test_a_repeated_pair_is_its_own_neighbour(build: Any) -> None:
    features = build.roots([(-1, 2), (-1, 2)])
    assert len(features.others) == 2
    assert {pole.index for pole in features.others} == {features.pair.index, features.pair.conjugate_index}


def test_common_factors_are_no_features(build: Any) -> None:
    features = build.roots([(-1, 2), -3], [-3])
    assert features.alone


def test_stability_counts_what_is_hidden(build: Any, hidden: Absent) -> None:
    assert build.roots([(-1, 2)]).stable
    assert not build.roots([(-1, 2)], void=hidden).stable
    assert not build.roots([(1, 2)]).stable


def test_a_channel_of_zero(build: Any) -> None:
    features = build.ratio([0], [1, 1])
    assert features.poles == ()
    assert features.zeros == ()
    assert features.pair is None


def test_roots_of_rationals() -> None:
    assert root(Answer.of_exact(fmpq(49, 4))).exact == fmpq(7, 2)
    assert root(Answer.of_exact(2)).exact is None


def test_sums_and_least_of_exact_and_inexact() -> None:
    irrational = root(Answer.of_exact(2))
    assert smallest([Answer.of_exact(1), irrational]).exact == 1
    assert smallest([Answer.of_exact(3), irrational]).exact is None
    assert smallest([irrational, irrational]).enclose(64) < 2
    assert total([Answer.of_exact(1), Answer.of_exact(2)]).exact == 3
    assert total([Answer.of_exact(1), irrational]).exact is None
