"""Rise and envelope of a pair that dominates: stated accuracies with other poles and zeros, against proved values.

The systems that err most were found by a search over damping ratio and up to four further poles and zeros
(differential evolution, double precision) and are listed with the digits that matter.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

import pytest
from flint import fmpq

from specgate.approximations.approximation import Approximation
from specgate.approximations.features import Features
from specgate.approximations.table import entry
from specgate.measures.measure import Arguments, Band

RISE = Arguments(measure="rise_time")
SETTLING = {band: Arguments(band=Band(fmpq(band, 100), relative=True), measure="settling_time") for band in (1, 2, 5)}
Extreme = tuple[str, list[Any], list[Any]]
"""Damping ratio, further poles, zeros; natural frequency 1."""

# too short, too long: with one pole or zero, with several
OF_RISE: Mapping[str, tuple[tuple[Extreme, Extreme], tuple[Extreme, Extreme]]] = {
    "cubic": (
        (("0.1", [-5], []), ("0.1816", [], [-5])),
        (("0.1013", [("-0.2974", "99.73")], [("0.1168", "5.29")]), ("0.1", [("-0.334", "4.99")], [])),
    ),
    "constant": (
        (("0.6", [-5], []), ("0.4", [], [-5])),
        (("0.5994", [("-0.755", "114.3")], [("-1.15", "5.113")]), ("0.4", [("-0.501", "6.302")], ["-11.96"])),
    ),
    "linear": (
        (("0.3", [-5], []), ("0.5287", [], [-5])),
        (("0.3032", [("-0.52", "161.7")], [("-0.4", "5.17")]), ("0.5339", [("-0.69", "5.44")], ["-30"])),
    ),
    "quadratic": (
        (("0.2381", [-5], []), ("0.9", [], [-5])),
        (("0.2055", [("-0.43", "208.8")], [("-0.983", "5.063")]), ("0.7296", [("-0.896", "4.92")], [])),
    ),
    "linear_wide": (
        (("0.05", [-5], []), ("0.5057", [], [-5])),
        (("0.05045", [("-0.661", "173.9")], [("-0.433", "5.146")]), ("0.5124", [("-0.651", "5.581")], ["-23"])),
    ),
}
OF_ENVELOPE: Mapping[int, tuple[tuple[Extreme, Extreme], tuple[Extreme, Extreme]]] = {
    2: (
        (("0.03", [], ["-0.51"]), ("0.7832", [], ["-3.92"])),
        (("0.1", [], ["-0.9", "1"]), ("0.7863", [], [("-3.935", "0.0022")])),
    ),
    5: (
        (("0.03", [], ["-0.51"]), ("0.69296", [], [("-6.94", "0.002")])),
        (("0.1", [], ["-0.9", "1"]), ("0.7026", [], [("-3.515", "0.001")])),
    ),
    1: (
        (("0.05", [], ["-0.51"]), ("0.8283", [], ["-4.145"])),
        (("0.1", [], ["-0.9", "1"]), ("0.8305", [], [("-4.155", "0.0045")])),
    ),
}


def grid(build: Any, *, by_decay_rate: bool) -> Iterator[Features]:
    for damping in ("0.07", "0.2", "0.35", "0.5", "0.65", "0.8", "0.9"):
        zeta = fmpq(int(damping[2:]), 10 ** len(damping[2:]))
        unit = zeta if by_decay_rate else fmpq(1)
        for poles, zeros in (([-5], []), ([-9], [6]), ([], [-7]), ([-6, -11], []), ([], [-6, 12]), ([(-6, 8)], [-30])):
            yield build.pair(zeta, _scaled(poles, unit), _scaled(zeros, unit))


def _scaled(roots: list[Any], unit: fmpq) -> list[Any]:
    return [(root[0] * unit, root[1] * unit) if isinstance(root, tuple) else root * unit for root in roots]


def used(shown: Any, row: Approximation, arguments: Arguments, ends: tuple[Features, Features]) -> None:
    """Assert that two systems are told the same range, and err to within a tenth of its width from its ends."""
    first, last = (row.accuracy(system, arguments) for system in ends)
    assert first is not None
    assert first == last
    shown.tight(tuple(shown.error(row, system, arguments) for system in ends), first.lower, first.upper)


@pytest.mark.parametrize("variant", OF_RISE)
def test_rise_of_a_dominant_pair(build: Any, shown: Any, variant: str) -> None:
    row = entry("second_order_rise", variant)
    for system in grid(build, by_decay_rate=False):
        if shown.holds(row, system, RISE):
            shown.error(row, system, RISE)
    for low, high in OF_RISE[variant]:
        used(shown, row, RISE, (build.pair(*low), build.pair(*high)))


@pytest.mark.parametrize("band", OF_ENVELOPE)
def test_envelope_of_a_dominant_pair(build: Any, shown: Any, band: int) -> None:
    row, arguments = entry("settling_envelope"), SETTLING[band]
    for system in grid(build, by_decay_rate=True):
        if shown.holds(row, system, arguments):
            shown.error(row, system, arguments)
    for low, high in OF_ENVELOPE[band]:
        used(shown, row, arguments, (build.pair(*low), build.pair(*high)))


# where a peak of the pair just stays inside the band
TOUCHING = {1: "0.8261", 2: "0.77971", 5: "0.69011"}


@pytest.mark.parametrize("band", TOUCHING)
def test_envelope_of_the_pair_alone(build: Any, shown: Any, band: int) -> None:
    """An upper bound that is met where an extreme of the oscillation touches its envelope, and worst behind a jump."""
    row, arguments = entry("settling_envelope"), SETTLING[band]
    stated = row.accuracy(build.pair("0.5"), arguments)
    assert stated is not None
    assert stated.lower == 0
    errors = [shown.error(row, build.pair(fmpq(k, 100)), arguments) for k in range(1, 100, 2)]
    errors.append(shown.error(row, build.pair(TOUCHING[band]), arguments))
    shown.tight((min(errors), max(errors)), stated.lower, stated.upper)


def test_other_bands(build: Any, shown: Any) -> None:
    row = entry("settling_envelope")
    for band in (fmpq(1, 1000), fmpq(1, 200), fmpq(3, 100), fmpq(7, 200)):
        arguments = Arguments(band=Band(band, relative=True), measure="settling_time")
        for k in range(3, 100, 8):
            shown.error(row, build.pair(fmpq(k, 100)), arguments)


def test_edges_of_the_envelope(build: Any, shown: Any) -> None:
    row = entry("settling_envelope")
    assert shown.holds(row, build.pair("0.99"), SETTLING[2])
    assert not shown.holds(row, build.pair("0.9900001"), SETTLING[2])
    assert not shown.holds(row, build.pair("0.5"), Arguments(band=Band(fmpq(51, 1000), True), measure="settling_time"))
    assert not shown.holds(row, build.roots([-1, -2]), SETTLING[2])
    distance = Arguments(band=Band(fmpq(1, 50), relative=False), measure="settling_time")
    assert not shown.holds(row, build.pair("0.5"), distance)
    assert row.evaluate(build.pair("0.5"), distance).absent is not None
