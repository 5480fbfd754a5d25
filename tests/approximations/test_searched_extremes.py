"""Extremes of stated accuracies, searched for: the search is guided by proved values, and only those are asserted.

One damping ratio, and one further root and its distance, of which the search knows neither edge nor jump; systems that
meet a condition no more count as exact. See `test_accuracy.py` for more roots than one.
"""

from __future__ import annotations

from collections.abc import Callable
from math import hypot, log, pi
from typing import Any

import pytest
from flint import fmpq
from scipy.optimize import differential_evolution

from specgate.approximations.features import Features
from specgate.approximations.table import entry
from specgate.measures.measure import Arguments, Band

Added = Callable[[float, float], Features]


def rational(number: float, digits: int = 6) -> fmpq:
    return fmpq(round(number * 10**digits), 10**digits)


def searched(shown: Any, name: str, arguments: Arguments, added: Added, low: float, far: float) -> tuple[float, float]:
    """Return the least and greatest error that are found, all of systems in range."""
    row = entry(name)

    def error(point: Any) -> float:
        system = added(*point)
        return float(shown.error(row, system, arguments)) if shown.holds(row, system, arguments) else 0.0

    ends = []
    for sign in (1, -1):

        def one(point: Any, sign: int = sign) -> float:
            return sign * error(point)

        found = differential_evolution(one, [(low, 0.9), (5, far)], popsize=6, maxiter=7, seed=1, polish=False)
        ends.append(sign * float(found.fun))
    return ends[0], ends[1]


@pytest.mark.parametrize(("band", "low", "high"), [(2, -72, 425), (5, -84, 521), (1, -97, 329)])
def test_settling_of_the_pair_alone(build: Any, shown: Any, band: int, low: int, high: int) -> None:
    """The greatest error stands where a peak just touches the band: a search over the damping ratio alone finds it."""
    arguments = Arguments(band=Band(fmpq(band, 100), relative=True), measure="settling_time")
    row = entry("second_order_settling")
    highest = fmpq(8, 10) if band == 5 else fmpq(9, 10)
    extremes = shown.extremes(lambda damping: shown.error(row, build.pair(damping), arguments), fmpq(1, 10), highest)
    shown.tight(extremes, fmpq(low, 1000), fmpq(high, 1000))


@pytest.mark.parametrize("aside", [fmpq(1, 10**9), fmpq(-1, 10**9)])
def test_either_side_of_the_jump_of_the_settling_time(build: Any, shown: Any, aside: fmpq) -> None:
    """The first overshoot fills a band b at zeta = L/sqrt(pi^2 + L^2), L = -ln b: the greatest error is its limit."""
    for band in (1, 2, 5):
        arguments = Arguments(band=Band(fmpq(band, 100), relative=True), measure="settling_time")
        damping = rational(log(100 / band) / hypot(pi, log(100 / band)), 12) + aside
        error = shown.error(entry("second_order_settling"), build.pair(damping), arguments)
        assert error > 0.3 if aside > 0 else error < 0.03


@pytest.mark.parametrize(
    ("name", "measure", "low", "high"),
    [
        ("second_order_overshoot", "overshoot", -27, 28),
        ("dominant_pair", "peak_time", -62, 72),
    ],
)
def test_shape_with_one_root_more(build: Any, shown: Any, name: str, measure: str, low: int, high: int) -> None:
    """A pole, a zero on the left and one on the right, each from five natural frequencies on."""
    kinds: tuple[Added, ...] = (
        lambda damping, distance: build.pair(rational(damping), [-rational(distance)]),
        lambda damping, distance: build.pair(rational(damping), [], [-rational(distance)]),
        lambda damping, distance: build.pair(rational(damping), [], [rational(distance)]),
    )
    found = [searched(shown, name, Arguments(measure=measure), kind, 0.05, 8) for kind in kinds]
    least, most = min(end for end, _ in found), max(end for _, end in found)
    shown.tight((least, most), fmpq(low, 1000), fmpq(high, 1000))
