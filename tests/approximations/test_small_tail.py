"""A slow tail left out: what is left, the amplitude of the tail, and an accuracy proved for each response."""

from __future__ import annotations

from math import exp
from typing import Any

import pytest
from flint import fmpq, fmpq_poly
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq, minimize_scalar

from specgate.approximations.features import Features
from specgate.approximations.table import conditions, entry
from specgate.measures.measure import Arguments, Band
from specgate.measures.table import MEASURES
from specgate.response.answers import Answer

ROW = entry("small_tail")
TWO, FIVE = (Arguments(band=Band(fmpq(band, 100), relative=True), measure="settling_time") for band in (2, 5))


def lagged(build: Any, rate: fmpq, size: fmpq, gain: int = 1) -> Features:
    """Return the response 1 + r e^(-p t) - (1 + r) e^(-t), times a gain."""
    features: Features = build.ratio([gain * (1 + size * (1 - rate)), gain * rate], [1, 1 + rate, rate])
    return features


def found(features: Features, arguments: Arguments, key: str) -> Any:
    condition = next(one for _, one in conditions("small_tail", arguments.measure) if one.key == key)
    return condition.find(features, arguments, condition.threshold)


def seconds(features: Features, arguments: Arguments = TWO) -> float:
    read = MEASURES[arguments.measure].read
    assert read is not None
    return float(read(features.subject, arguments).enclose(64).mid())


@pytest.mark.parametrize(("size", "true"), [(fmpq(-19, 1000), 6.8), (fmpq(-21, 1000), 48.8)])
def test_the_amplitude_decides_and_not_the_rate(build: Any, size: fmpq, true: float) -> None:
    """The two figures of the text, against the closed form solved by another method."""
    rest = 1 + float(size)
    closed = brentq(lambda t: 0.02 + float(size) * exp(-t / 1000) - rest * exp(-t), 0.1, 1000)
    system = lagged(build, fmpq(1, 1000), size)
    assert abs(seconds(system) - closed) < 1e-6
    assert abs(closed - true) < 0.05
    assert found(system, TWO, "tail").holds.name == ("YES" if abs(size) < fmpq(1, 50) else "NO")


@pytest.mark.parametrize("gain", [1, -7])
def test_what_is_left_is_the_rest_of_the_closed_form(build: Any, gain: int) -> None:
    """x = 1 - (1 + r) e^(-t) settles at ln((1 + r)/band)."""
    system = lagged(build, fmpq(1, 1000), fmpq(1, 100), gain)
    assert found(system, TWO, "tail").value == fmpq(1, 2)
    closed = brentq(lambda t: 1.01 * exp(-t) - 0.02, 0, 10)
    assert abs(float(ROW.evaluate(system, TWO).enclose(64)) - closed) < 1e-9


@settings(max_examples=25, deadline=None)
@given(st.integers(1, 300), st.integers(-190, 190), st.integers(5, 95), st.integers(2, 9))
def test_whatever_the_rest(build: Any, shown: Any, rate: int, size: int, damping: int, lag: int) -> None:
    """A tail added to a pair and a lag: every response in range errs within what is stated for it."""
    if size == 0:
        return
    p, r = fmpq(rate, 10000), fmpq(size, 10000)
    rest = fmpq_poly([1, fmpq(2 * damping, 100), 1]) * fmpq_poly([1, fmpq(1, lag)])
    slow, s = fmpq_poly([p, 1]), fmpq_poly([0, 1])
    above, below = slow + r * s * rest - r * s * slow, slow * rest  # 1/rest with r s/(s + p) - r s/rest
    system = build.ratio([above[k] for k in range(5, -1, -1)], [below[k] for k in range(5, -1, -1)])
    assert abs(found(system, TWO, "tail").value - 50 * abs(r)) < 1e-15
    for arguments in (TWO, FIVE):
        assert ROW.accuracy(system, arguments) is not None
        shown.error(ROW, system, arguments)


def reached(shown: Any, system: Features, arguments: Arguments) -> float:
    """Return how far up its stated range a response errs: 0 at the lower end, 1 at the upper."""
    stated = ROW.accuracy(system, arguments)
    assert stated is not None
    return (shown.error(ROW, system, arguments) - float(stated.lower)) / float(stated.upper - stated.lower)


@pytest.mark.parametrize("arguments", [TWO, FIVE], ids=["2 %", "5 %"])
def test_the_accuracy_is_tight(build: Any, shown: Any, arguments: Arguments) -> None:
    """Searched over the rate, for a tail on either side: a tail that is still whole as the rest settles uses an end."""
    assert arguments.band is not None
    half = arguments.band.size / 2

    def at(size: fmpq, power: float) -> float:
        rate = fmpq(int(10 ** (power + 12)), 10**12)
        return reached(shown, lagged(build, rate, size), arguments)

    upper = minimize_scalar(lambda power: -at(half, power), bounds=(-6, -0.3), method="bounded", options={"maxiter": 9})
    lower = minimize_scalar(lambda power: at(-half, power), bounds=(-6, -0.3), method="bounded", options={"maxiter": 9})
    assert -upper.fun > 0.9
    assert lower.fun < 0.1


def test_edges_of_the_tail(build: Any) -> None:
    for sign in (1, -1):
        for by, holds in ((-1, "YES"), (0, "YES"), (1, "NO")):
            system = lagged(build, fmpq(1, 20), sign * (fmpq(1, 50) + fmpq(by, 10**6)))
            assert found(system, TWO, "tail").holds.name == holds


def test_a_tail_as_large_as_the_band_leaves_nothing_to_state(build: Any) -> None:
    assert ROW.accuracy(lagged(build, fmpq(1, 20), fmpq(1, 50)), TWO) is None


@pytest.mark.parametrize(
    ("poles", "zeros"), [([-1, -1], []), ([("-0.1", 1), -3], []), ([-1, "0.001"], ["0.00100001"]), ([-1, -2], [0])]
)
def test_no_tail_of_one_real_pole(build: Any, shown: Any, poles: list[Any], zeros: list[Any]) -> None:
    system = build.roots(poles, zeros)
    assert not shown.holds(ROW, system, TWO)
    assert ROW.evaluate(system, TWO).absent is not None
    assert ROW.accuracy(system, TWO) is None


def test_poles_that_are_not_rational(build: Any, shown: Any) -> None:
    """s^3 + 21 s^2 + 22 s + 1 has three real poles, none of them a fraction; a zero stands beside the slowest."""
    assert len(fmpq_poly([1, 22, 21, 1]).factor()[1]) == 1
    system = build.ratio(["20.5", 1], [1, 21, 22, 1])
    amplitude = found(system, FIVE, "tail").value
    slow = brentq(lambda p: -(p**3) + 21 * p**2 - 22 * p + 1, 0, 0.3)
    residue = (1 - 20.5 * slow) / (slow * (3 * slow**2 - 42 * slow + 22))
    assert abs(float(amplitude) - abs(residue) / 0.05) < 1e-9
    assert shown.holds(ROW, system, FIVE)
    shown.error(ROW, system, FIVE)


def test_a_band_in_the_unit_of_the_signal(build: Any, shown: Any) -> None:
    system = lagged(build, fmpq(1, 100), fmpq(1, 100), -10)
    distance = Arguments(band=Band(fmpq(1, 5), relative=False), measure="settling_time")
    assert shown.error(ROW, system, TWO) == shown.error(ROW, system, distance)
    assert ROW.accuracy(system, TWO) == ROW.accuracy(system, distance)


def test_nothing_is_a_reason(build: Any) -> None:
    answer: Answer = ROW.evaluate(build.roots([-1, -1]), TWO)
    assert answer.absent is not None
    assert "real and single" in answer.absent.reason
