"""A pole dropped with a zero beside it: what is left, the tail, and an accuracy proved for each response."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import pytest
from flint import fmpq, fmpq_poly
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.approximations.features import Features
from specgate.approximations.table import conditions, entry
from specgate.measures.measure import Arguments, Band
from specgate.measures.table import MEASURES
from specgate.response.answers import Absent, Answer
from specgate.response.extremes import Extreme
from specgate.response.step import StepResponse
from specgate.terms.verdicts import Trilean

ROW = entry("near_cancellation")
TWO, FIVE = (Arguments(band=Band(fmpq(band, 100), relative=True), measure="settling_time") for band in (2, 5))
SHAPE = [Arguments(measure=name) for name in ("overshoot", "rise_time", "delay_time")]


def found(features: Features, arguments: Arguments, key: str) -> Any:
    condition = next(one for _, one in conditions("near_cancellation", arguments.measure) if one.key == key)
    return condition.find(features, arguments, condition.threshold)


def seconds(features: Features, arguments: Arguments = TWO) -> float:
    read = MEASURES[arguments.measure].read
    assert read is not None
    return float(read(features.subject, arguments).enclose(64).mid())


@pytest.mark.parametrize(("zero", "true"), [("-0.0475", 20.3), ("-0.0525", 18.2)])
def test_five_per_cent_apart_is_not_near_enough(build: Any, shown: Any, zero: str, true: float) -> None:
    """A pole of 0.05 beside a pair of wn = 1, zeta = 0.5: 8.1 s become 20.3 s or 18.2 s."""
    system = build.pair("0.5", ["-0.05"], [zero])
    assert abs(seconds(system) - true) < 0.05
    assert abs(float(ROW.evaluate(system, TWO).enclose(64)) - 8.076) < 0.001
    assert not shown.holds(ROW, system, TWO)
    assert 2.5 < float(found(system, TWO, "tail_in_band").value) < 2.8


def test_a_tail_inside_the_band(build: Any, shown: Any) -> None:
    system = build.pair("0.5", ["-0.05"], ["-0.0501"])
    assert shown.holds(ROW, system, TWO)
    assert abs(shown.error(ROW, system, TWO) + 0.0122) < 0.0001


def systems(build: Any) -> Iterator[Features]:
    for rest in ([-1, -3], [("-0.3", 1), -4], [-1, (-2, 9)]):
        for pole in ("0.003", "0.05", "2.5", "30"):
            for part in ("0.99", "1.005", "1.02", "1.2"):
                zero = fmpq(*map(int, _ratio(pole))) * fmpq(*map(int, _ratio(part)))
                yield build.roots([*rest, -fmpq(*map(int, _ratio(pole)))], [-zero])
    yield build.roots([-1, -3, ("-0.1", 4)], [("-0.1", "4.005")])
    yield build.roots([-1, -3, ("-0.1", 4)], [("-0.099", "4")], size=-5)


def _ratio(text: str) -> tuple[str, str]:
    whole, _, decimals = text.partition(".")
    return whole + decimals, "1" + "0" * len(decimals)


@pytest.fixture(scope="module")
def swept(build: Any) -> list[Features]:
    return list(systems(build))


@pytest.mark.parametrize("arguments", [TWO, FIVE, *SHAPE], ids=lambda one: one.measure)
def test_every_response_errs_within_its_own_accuracy(swept: list[Features], shown: Any, arguments: Arguments) -> None:
    counted = 0
    for system in swept:
        if shown.holds(ROW, system, arguments) and ROW.accuracy(system, arguments) is not None:
            shown.error(ROW, system, arguments)
            counted += 1
    assert counted >= (5 if arguments.measure == "overshoot" else 15)  # half of the rests do not overshoot


@settings(max_examples=15, deadline=None)
@given(st.integers(1, 400), st.integers(-60, 60), st.integers(5, 95), st.integers(1, 9))
def test_whatever_the_rest(build: Any, shown: Any, pole: int, apart: int, damping: int, lag: int) -> None:
    p = fmpq(pole, 100)
    if apart == 0:
        return
    system = build.pair(fmpq(damping, 100), [-p, -lag], [-p * (1 + fmpq(apart, 4000))])
    for arguments in (TWO, SHAPE[1]):
        if shown.holds(ROW, system, arguments) and ROW.accuracy(system, arguments) is not None:
            shown.error(ROW, system, arguments)


def reached(shown: Any, system: Features, arguments: Arguments) -> float:
    """Return how far up its stated range a response errs: 0 at the lower end, 1 at the upper."""
    stated = ROW.accuracy(system, arguments)
    assert stated is not None
    return (shown.error(ROW, system, arguments) - float(stated.lower)) / float(stated.upper - stated.lower)


@pytest.mark.parametrize("arguments", [TWO, FIVE], ids=["2 %", "5 %"])
def test_the_accuracy_of_a_settling_time_is_tight(build: Any, shown: Any, arguments: Arguments) -> None:
    """A tail that is still whole when the rest settles: a zero below the pole uses one end, one above it the other."""
    p = fmpq(1, 10**6)
    late, early = (build.roots([-1, -200, -p], [-p * part]) for part in (fmpq(999, 1000), fmpq(1001, 1000)))
    assert reached(shown, early, arguments) < 0.1
    assert reached(shown, late, arguments) > 0.9


def test_the_accuracy_of_an_overshoot_is_tight(build: Any, shown: Any) -> None:
    p = fmpq(1, 10**5)
    higher, lower = (build.pair("0.3", [-p], [-p * part]) for part in (fmpq(999, 1000), fmpq(1001, 1000)))
    assert reached(shown, higher, SHAPE[0]) < 0.1
    assert reached(shown, lower, SHAPE[0]) > 0.9


@pytest.mark.parametrize(
    ("arguments", "low", "high"), [(SHAPE[1], "67.5", "67.5"), (SHAPE[2], "61", "70.5")], ids=["rise", "delay"]
)
def test_the_accuracy_of_an_arrival_is_tight(build: Any, shown: Any, arguments: Arguments, low: str, high: str) -> None:
    """A tail that rings at a frequency (found by search) at which it is at its greatest as the rest passes a level."""

    def ringing(frequency: str, part: fmpq) -> Features:
        w, slow = fmpq(*map(int, _ratio(frequency))), fmpq(-1, 1000)
        return build.roots([-1, (slow, w)], [(slow, w * part)])

    assert reached(shown, ringing(low, fmpq(99, 100)), arguments) < 0.1
    assert reached(shown, ringing(high, fmpq(101, 100)), arguments) > 0.9


def test_edges_of_the_tail(build: Any) -> None:
    """A single lag and a pole of 1e-9 with a zero at its k-fold leave |1 - 1/k| of the change, within 1e-7."""
    p = fmpq(1, 10**9)
    just_in, just_out = (
        build.roots([-1, -p], [-p / (1 + fmpq(1, 50) + by)]) for by in (-fmpq(1, 10**6), fmpq(1, 10**6))
    )
    assert found(just_in, TWO, "tail_in_band").holds.name == "YES"
    assert found(just_out, TWO, "tail_in_band").holds.name == "NO"
    assert found(just_in, SHAPE[1], "tail").holds.name == "YES"
    assert found(just_out, SHAPE[1], "tail").holds.name == "NO"


def test_the_couple_nearest_to_each_other_is_taken(build: Any) -> None:
    system = build.roots([-1, -5, -9], ["-5.1", "-8"])
    assert found(system, TWO, "couple").value == "pole at -5, zero at -5.1 1/s"
    complex_one = build.roots([-1, ("-0.1", 4)], [("-0.1", "4.01")])
    assert found(complex_one, TWO, "couple").value == "pole at -0.1 ± 4j, zero at -0.1 ± 4.01j 1/s"


@pytest.mark.parametrize(
    ("poles", "zeros"),
    [
        ([-1, -2], []),
        ([-1, -2], [2]),
        ([-1, (-2, 3)], [(2, 3)]),
        ([-1, -2], [0]),
    ],
)
def test_no_couple_left_of_the_axis(build: Any, shown: Any, poles: list[Any], zeros: list[Any]) -> None:
    system = build.roots(poles, zeros)
    assert not shown.holds(ROW, system, TWO)
    assert ROW.evaluate(system, TWO).absent is not None


def test_a_growing_mode_that_is_nearly_hidden_still_grows(build: Any, shown: Any) -> None:
    system = build.roots([-1, "0.001"], ["0.00100001"])
    assert not shown.holds(ROW, system, TWO)
    assert ROW.reduce is not None
    assert isinstance(ROW.reduce(system, TWO), Absent)


def test_poles_that_are_not_rational(build: Any, shown: Any) -> None:
    """s^3 + 21 s^2 + 22 s + 1 has three real poles, none of them a fraction; the zero stands beside the slowest."""
    assert len(fmpq_poly([1, 22, 21, 1]).factor()[1]) == 1
    system = build.ratio([20, 1], [1, 21, 22, 1])
    assert ROW.reduce is not None
    rest = ROW.reduce(system, FIVE)
    assert isinstance(rest, Features)
    assert rest.channel.denominator.degree() == 2
    assert rest.steady_gain == system.steady_gain
    assert shown.holds(ROW, system, FIVE)
    shown.error(ROW, system, FIVE)


def test_a_band_in_the_unit_of_the_signal(build: Any, shown: Any) -> None:
    part = build.pair("0.5", ["-0.05"], ["-0.0501"])
    whole = build.pair("0.5", ["-0.05"], ["-0.0501"], size=-10)
    distance = Arguments(band=Band(fmpq(1, 5), relative=False), measure="settling_time")
    assert abs(shown.error(ROW, part, TWO) - shown.error(ROW, whole, distance)) < 1e-15
    assert ROW.accuracy(part, TWO) == ROW.accuracy(whole, distance)


def test_a_tail_that_is_not_told_is_not_small(build: Any, shown: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    """Where the peak of the tail stays undecided the condition does too, and nothing is stated."""
    lost = Extreme(Answer.undecided("out of work"), Answer.undecided("out of work"))
    monkeypatch.setattr(StepResponse, "peak_deviation", lambda _: lost)
    system = build.pair("0.5", ["-0.05"], ["-0.0501"])
    assert found(system, TWO, "tail_in_band").holds is Trilean.UNKNOWN
    assert found(system, SHAPE[1], "tail").value == "out of work"
    assert ROW.accuracy(system, TWO) is None
    assert not shown.holds(ROW, system, TWO)
