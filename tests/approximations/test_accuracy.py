"""Stated accuracies: swept over the range inside the conditions, against proved values.

Every system that meets all conditions of a row must err within the range that the row states for it; and the range
must be tight: among the systems there are some that err to within a tenth of its width from either end. Those were
found by a search over damping ratio and up to three further poles and zeros (differential evolution, double
precision) and are listed here with the digits that matter.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import pytest
from flint import arb, fmpq

from specgate.approximations.approximation import Approximation
from specgate.approximations.features import Features
from specgate.approximations.table import APPROXIMATIONS, conditions
from specgate.measures.measure import Arguments, Band
from specgate.measures.table import MEASURES
from specgate.terms.verdicts import Trilean

SETTLING = {band: Arguments(band=Band(fmpq(band, 100), relative=True), measure="settling_time") for band in (1, 2, 5)}
SHAPE = {name: Arguments(measure=name) for name in ("overshoot", "peak_time", "rise_time")}


@dataclass(frozen=True, eq=False)
class System:
    """A response and what it is known by."""

    label: str
    features: Features
    truths: dict[Arguments, arb] = field(default_factory=dict)

    def truth(self, arguments: Arguments) -> arb:
        """Return the proved value of the measure asked for."""
        if arguments not in self.truths:
            read = MEASURES[arguments.measure].read
            assert read is not None
            self.truths[arguments] = read(self.features.subject, arguments).enclose(96)
        return self.truths[arguments]

    def error(self, row: Approximation, arguments: Arguments) -> arb | None:
        """Return formula / true - 1 where every condition of the row holds, else None."""
        for _, condition in conditions(row.name, arguments.measure):
            if condition.find(self.features, arguments, condition.threshold).holds is not Trilean.YES:
                return None
        return row.evaluate(self.features, arguments).enclose(96) / self.truth(arguments) - 1


# Further poles and zeros in units of the yardstick; complex ones as (real part, imaginary part).
ADDED: tuple[tuple[tuple[Any, ...], tuple[Any, ...]], ...] = (
    ((-5,), ()),
    ((-8,), ()),
    ((-20,), ()),
    ((), (-5,)),
    ((), (-9,)),
    ((), (5,)),
    ((), (12,)),
    ((-5,), (-5.2,)),
    ((-6,), (30,)),
    ((-5, -5.1), ()),
    ((), (-5, -5.1)),
    (((-10, 4),), ()),
    (((-5.5, 9),), ()),
    ((), ((-9, 5),)),
    ((), ((-3, 4),)),
    ((-7, -40), (-15,)),
)
DAMPINGS = ("0.05", "0.1", "0.2", "0.3", "0.45", "0.6", "0.69", "0.7", "0.78", "0.83", "0.9")


def _scaled(roots: tuple[Any, ...], unit: fmpq) -> list[Any]:
    def times(number: float) -> fmpq:
        return fmpq(round(number * 10), 10) * unit

    return [tuple(times(part) for part in root) if isinstance(root, tuple) else times(root) for root in roots]


def grid(build: Any, *, by_decay_rate: bool) -> Iterator[System]:
    """Yield pairs alone and with the additions, these in units of the decay rate or of the natural frequency."""
    for damping in DAMPINGS:
        zeta = fmpq(int(damping[2:]), 10 ** len(damping[2:]))
        yield System(damping, build.pair(zeta))
        for poles, zeros in ADDED:
            unit = zeta if by_decay_rate else fmpq(1)
            yield System(f"{damping} {poles} {zeros}", build.pair(zeta, _scaled(poles, unit), _scaled(zeros, unit)))


class Sweep:
    """All systems, made once."""

    def __init__(self, build: Any) -> None:
        self.build = build

    @cached_property
    def for_settling(self) -> list[System]:
        return list(grid(self.build, by_decay_rate=True))

    @cached_property
    def for_shape(self) -> list[System]:
        return list(grid(self.build, by_decay_rate=False))

    def named(self, damping: str, poles: Any = (), zeros: Any = ()) -> System:
        return System(f"{damping} {poles} {zeros}", self.build.pair(damping, poles, zeros))


@pytest.fixture(scope="module")
def sweep(build: Any) -> Sweep:
    return Sweep(build)


Key = tuple[fmpq, fmpq]


def errors(row: Approximation, arguments: Arguments, systems: list[System]) -> Mapping[Key, list[arb]]:
    """Return the errors of all systems that meet the conditions, by the range stated for them; all lie inside."""
    found: dict[Key, list[arb]] = {}
    for system in systems:
        error = system.error(row, arguments)
        if error is None:
            continue
        stated = row.accuracy(system.features, arguments)
        assert stated is not None, system.label
        assert not error < stated.lower - TINY, (system.label, error, stated.text)
        assert not error > stated.upper + TINY, (system.label, error, stated.text)
        found.setdefault((stated.lower, stated.upper), []).append(error)
    return found


TINY = fmpq(1, 10**20)
"""Width of the balls that errors are computed with."""


def reached(found: Mapping[Key, list[arb]], stated: Key) -> None:
    """Assert that a stated range is used up to a tenth of its width at either end."""
    low, high = stated
    slack = float(high - low) / 10
    seen = [float(error.mid()) for error in found[stated]]
    assert min(seen) <= float(low) + slack + 1e-15, (stated, min(seen))
    assert max(seen) >= float(high) - slack - 1e-15, (stated, max(seen))


def thousandths(low: int, high: int) -> Key:
    return fmpq(low, 1000), fmpq(high, 1000)


# --- settling of a dominant pair ---

# (damping, poles, zeros) of the systems that err most: too short, too long.
Extreme = tuple[str, list[Any], list[Any]]
SECOND_ORDER: Mapping[int, Mapping[Key, tuple[Extreme, Extreme]]] = {
    2: {
        thousandths(-72, 425): (("0.7452", [], []), ("0.7798", [], [])),
        thousandths(-151, 540): (("0.1034", [], ["0.5386", "-17.5"]), ("0.7832", [], ["-3.92"])),
        thousandths(-155, 672): (
            ("0.7439", [("-9.484", "0.303")], [("6.121", "0.03")]),
            ("0.7866", [], [("-3.955", "0.129")]),
        ),
    },
    5: {
        thousandths(-84, 521): (("0.6569", [], []), ("0.6902", [], [])),
        thousandths(-209, 696): (("0.1054", [], ["0.539"]), ("0.693", [], [("-6.933", "0.084")])),
        thousandths(-215, 905): (("0.1586", [], [("0.759", "0.501")]), ("0.7025", [], [("-3.5", "0.344")])),
    },
    1: {
        thousandths(-97, 329): (("0.7927", [], []), ("0.8261", [], [])),
        thousandths(-149, 418): (("0.1029", [], ["0.964", "1.106"]), ("0.8283", [], ["-4.145"])),
        thousandths(-167, 517): (
            ("0.7921", [("-7.77", "0.448"), ("-8.084", "0.141")], []),
            ("0.8304", [], [("-4.161", "0.108")]),
        ),
    },
}


@pytest.mark.parametrize("band", SECOND_ORDER)
def test_second_order_settling(sweep: Sweep, band: int) -> None:
    extremes = [sweep.named(*system) for pair in SECOND_ORDER[band].values() for system in pair]
    row = APPROXIMATIONS["second_order_settling"]
    found = errors(row, SETTLING[band], sweep.for_settling + extremes)
    assert set(found) == set(SECOND_ORDER[band])
    for stated in SECOND_ORDER[band]:
        reached(found, stated)


JUMPS: Mapping[Key, tuple[Extreme, Extreme]] = {
    thousandths(-412, 668): (("0.69011", [], ["3.4506"]), ("0.68941", [], [("-4.491", "5.253")])),
    thousandths(-456, 862): (("0.69011", [], [("3.4506", "0.002")]), ("0.6869", [], [("-2.345", "2.511")])),
}
"""A peak that just stays in the 5 % band with the dropped part, and just does not without it, or the other way."""


@pytest.mark.parametrize("name", ["dominant_pair", "distant_zero"])
def test_settling_without_the_dropped_part(sweep: Sweep, name: str) -> None:
    extremes = [sweep.named(*system) for pair in JUMPS.values() for system in pair]
    for band in SETTLING:
        found = errors(APPROXIMATIONS[name], SETTLING[band], sweep.for_settling + extremes)
        if band == 5:
            for stated in JUMPS:
                reached(found, stated)
    alone = sweep.named("0.4")
    assert (alone.error(APPROXIMATIONS["dominant_pair"], SETTLING[5]) or arb(0)).contains(0)


# --- shape of a dominant pair ---

NEAR: tuple[Extreme, ...] = (
    ("0.2", ["-5"], []),
    ("0.2", [], ["-5"]),
    ("0.9", ["-5"], []),
    ("0.9", [], ["-5"]),
    ("0.05", ["-5"], []),
    ("0.05", [], ["-5"]),
    ("0.05", [], ["5"]),
    ("0.18", [], [("-0.18", "10")]),
    ("0.051", [], [("-0.07", "10")]),
)
CROWDED: tuple[Extreme, ...] = (
    ("0.2", ["-5", "-5.001"], []),
    ("0.2", [], [("-5.01", "0.001")]),
    ("0.9", ["-5", "-5.001"], []),
    ("0.9", [], ["-5", "-5.001"]),
    ("0.86", [], [("-0.862", "4.926")]),
    ("0.05", [], ["5", "5.001"]),
    ("0.0503", [], [("-0.015", "5.001")]),
    ("0.051", [], [("-5.001", "0.008")]),
    ("0.05", [("-0.285", "4.993")], []),
    ("0.9", [("-1", "482")], [("-5.1", "0.001")]),
    ("0.06", [("-0.667", "157.1")], [("-0.127", "5.2")]),
)
RANGES: Mapping[tuple[str, str], tuple[Key, ...]] = {
    ("second_order_overshoot", "overshoot"): (thousandths(-27, 28), thousandths(-80, 54)),
    ("second_order_peak_time", "peak_time"): (thousandths(-62, 72), thousandths(-120, 168)),
    ("dominant_pair", "overshoot"): (thousandths(-27, 28), thousandths(-80, 54)),
    ("dominant_pair", "peak_time"): (thousandths(-62, 72), thousandths(-120, 168)),
    ("dominant_pair", "rise_time"): (thousandths(-35, 38), thousandths(-166, 166)),
    ("distant_zero", "overshoot"): (thousandths(-27, 11), thousandths(-52, 43)),
    ("distant_zero", "peak_time"): (thousandths(-61, 70), thousandths(-114, 149)),
    ("distant_zero", "rise_time"): (thousandths(-20, 38), thousandths(-82, 75)),
}


@pytest.mark.parametrize(("name", "measure"), RANGES)
def test_shape_of_a_dominant_pair(sweep: Sweep, name: str, measure: str) -> None:
    extremes = [sweep.named(*system) for system in (*NEAR, *CROWDED)]
    found = errors(APPROXIMATIONS[name], SHAPE[measure], sweep.for_shape + extremes)
    assert set(found) - {(fmpq(0), fmpq(0))} == set(RANGES[name, measure])
    for stated in RANGES[name, measure]:
        reached(found, stated)


# --- real poles ---

FEW = thousandths(-51, 23), thousandths(-90, 2)
SOME_ZEROS = thousandths(-51, 108), thousandths(-90, 113)


def real_systems(build: Any) -> Iterator[System]:
    for others in ([], [5], [5, 25], [6, 12], [8, 9, 60], [5, "13.6"], [1000, 3000], [20, "20.5", 21, 22]):
        for zeros in ([], [-5], [5], [-5, "-13.6"], [("-3", 9)], [-7, 12]):
            if sum(2 if isinstance(zero, tuple) else 1 for zero in zeros) <= len(others) + 1:
                yield System(f"{others} {zeros}", build.roots([-1, *(f"-{p}" for p in others)], zeros))


@pytest.mark.parametrize(("band", "index"), [(2, 0), (5, 1)])
def test_slowest_pole_settling(build: Any, band: int, index: int) -> None:
    row = APPROXIMATIONS["slowest_pole_settling"]
    found = errors(row, SETTLING[band], list(real_systems(build)))
    assert set(found) == {FEW[index], SOME_ZEROS[index]}
    for stated in found:
        reached(found, stated)


@pytest.mark.parametrize("band", [1, 2, 5])
@pytest.mark.parametrize("poles", range(1, 9))
def test_real_poles_settling(build: Any, band: int, poles: int) -> None:
    """The most excess is where all other poles stand at 1.25 times the slowest, the least where they are far."""
    row = APPROXIMATIONS["real_poles_settling"]
    ratios = [
        [fmpq(5, 4) + fmpq(k, 1000) for k in range(poles - 1)],
        [fmpq(3, 2) + fmpq(k, 2) for k in range(poles - 1)],
        [fmpq(5, 4) * fmpq(2) ** k for k in range(poles - 1)],
        [fmpq(400 + k) for k in range(poles - 1)],
    ]
    systems = [System(str(others), build.roots([-1, *(-p for p in others)])) for others in ratios]
    found = errors(row, SETTLING[band], systems)
    assert len(found) == 1
    (stated, seen), *_ = found.items()
    assert all(not error < -TINY for error in seen)
    if band > 1:
        reached(found, stated)


def test_two_real_poles_from_ratio_two_on(build: Any) -> None:
    row = APPROXIMATIONS["real_poles_settling"]
    for band, most in ((2, "0.0012"), (5, "0.0061")):
        error = System("1 : 2", build.roots([-1, -2])).error(row, SETTLING[band])
        assert error is not None
        assert float(error.mid()) < float(most)


def test_first_order_settling(build: Any) -> None:
    row = APPROXIMATIONS["first_order_settling"]
    for band in SETTLING:
        (stated,) = errors(row, SETTLING[band], [System("lag", build.roots([-3]))])
        assert stated[1] - stated[0] <= fmpq(1, 50000)
    other = Arguments(band=Band(fmpq(7, 100), relative=True), measure="settling_time")
    assert set(errors(row, other, [System("lag", build.roots([-3]))])) == {(fmpq(0), fmpq(0))}
