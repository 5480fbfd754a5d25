"""Points of a response for drawing: where it settles within the window, fast beginnings and known instants included."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from math import pi

from flint import acb, acb_mat, arb, fmpq

from specgate.response.deviation import LOWEST, Deviation
from specgate.response.modes import Expansion, Mode, dyadic, power_of_two
from specgate.response.segments import exact, float_of
from specgate.response.tail import float_tail
from specgate.terms.precision import working_precision

Point = tuple[fmpq, arb]

_EARLY = 48
"""Points at most in the first step of the even ones, ever closer to the jump."""

_DENSE = 8
"""Even points that a period needs to be drawn as it is; where there are fewer, its two edges are drawn."""

_FINE = 20

_BAND = 0.01
"""Part of its change within which an unsearched response counts as settled for drawing."""


def points(deviation: Deviation, window: fmpq, known: Iterable[fmpq], jump: fmpq, most: int) -> tuple[Point, ...]:
    """Return at most `most` points (time in s, value), in order of time, the first just after the step.

    window: the last time (s). known: instants that must be among them. The others are even in time, with ever closer
    ones before the first of them.
    """
    fixed = sorted({time for time in known if 0 < time < window})[: most // 2]
    early = _early(deviation, window, most)
    even = most - 1 - len(fixed) - len(early)
    scale = dyadic(deviation.time_exponent)
    expansion = deviation.at(LOWEST)
    edges = _edges(expansion, window * scale, even)
    values = dict(_even(expansion, window * scale, even - len(edges)))
    single = [*edges, *(time * scale for time in [*fixed, *early])]
    values.update(zip(single, _at(expansion, single), strict=True))
    with working_precision(LOWEST):
        unit, offset = power_of_two(deviation.value_exponent), arb(deviation.offset)
        return ((fmpq(0), arb(jump)), *((time / scale, (offset + values[time]) * unit) for time in sorted(values)))


def settled_window(deviation: Deviation, settled: fmpq | None) -> fmpq:
    """Return a window (s) that ends a quarter after the settling time, or where the envelope is small."""
    if settled:
        return _round_up(settled * 5 / 4)
    level = _BAND * max(abs(float_of(deviation.initial)), abs(float_of(deviation.offset)), 1e-12)
    since = float_tail(deviation.table, level)
    return _round_up(exact(since or 1.0) * dyadic(-deviation.time_exponent))


def unsettled_window(modes: Sequence[Mode], time_exponent: int) -> fmpq:
    """Return a window (s): six growth times, or eight periods of a lasting oscillation, or five decay times."""
    decay = [float(mode.pole.real) for mode in modes]
    growing = [rate for rate in decay if rate > 0.0]
    swings = [float(mode.pole.imag) for mode in modes if mode.oscillates and mode.pole.real.is_zero()]
    fading = [-rate for rate in decay if rate < 0.0]
    if growing:
        end = 6.0 / max(growing)
    else:
        end = max([16.0 * pi / swing for swing in swings] + [5.0 / rate for rate in fading], default=10.0)
    return _round_up(exact(end) * dyadic(-time_exponent))


def _round_up(value: fmpq) -> fmpq:
    """Return the next number of two significant digits, or close to it."""
    power = len(str(value.p)) - len(str(value.q)) - 1
    unit = fmpq(10**power) if power >= 0 else fmpq(1, 10**-power)
    unit = unit if value >= 10 * unit else unit / 10
    return unit * ((value / unit).floor() + 1)


def _early(deviation: Deviation, window: fmpq, most: int) -> list[fmpq]:
    """Return halvings of the even step down to a sixteenth of the shortest time constant."""
    shortest = dyadic(-deviation.time_exponent - 4)
    times: list[fmpq] = []
    time = window / most
    while time > shortest and len(times) < _EARLY:
        time = time / 2
        times.append(time)
    return times


def _edges(expansion: Expansion, window: fmpq, count: int) -> list[fmpq]:
    """Return summits and troughs of the strongest oscillation, if its periods are too dense for `count` even times.

    All of them, or, where they are too many, one of either kind in turn.
    """
    swings = [mode for mode in expansion.modes if mode.oscillates]
    strongest = max(swings, key=lambda mode: float(abs(mode.coefficients[0]).mid()), default=None)
    if strongest is None or float_of(window) * float(strongest.pole.imag) * _DENSE < 2.0 * pi * count:
        return []
    with working_precision(expansion.bits):
        half_turn = arb.pi() / strongest.pole.imag
        first = -strongest.coefficients[0].arg() / strongest.pole.imag
        turns = ((arb(window) - first) / half_turn).mid().fmpq().floor()
        if 2 * turns <= count:
            times = {(first + k * half_turn).mid().fmpq() for k in range(int(turns) + 1)}
        else:
            times = {_edge(window * k / count, k, first, half_turn) for k in range(1, count + 1)}
    return sorted(time for time in times if time > 0)


def _edge(time: fmpq, k: int, first: arb, half_turn: arb) -> fmpq:
    """Return the summit (even k) or trough (odd k) of an oscillation just before a time."""
    turns = ((arb(time) - first) / half_turn).mid().fmpq().floor()
    turns -= (turns + k) % 2
    return (first + turns * half_turn).mid().fmpq()


def _at(expansion: Expansion, times: Sequence[fmpq]) -> list[arb]:
    """Return g at some times."""
    with working_precision(expansion.bits):
        return [expansion.deviation(arb(time))[0] for time in times]


def _even(expansion: Expansion, window: fmpq, count: int) -> list[tuple[fmpq, arb]]:
    """Return (time, g) at count even times; e^(pt) is the product of a coarse and a fine exponential.

    One factor from step to step would not do: the boxes around complex numbers grow with every turn.
    """
    if count == 0:
        return []
    step = window / count
    times = [step * k for k in range(1, count + 1)]
    with working_precision(expansion.bits):
        coefficients = [c for mode in expansion.modes for c in mode.coefficients]
        rows: list[list[acb]] = []
        for mode in expansion.modes:
            fine = [(mode.pole * arb(step * k)).exp() for k in range(1, _FINE + 1)]
            coarse = [(mode.pole * arb(step * k)).exp() for k in range(0, count, _FINE)]
            row = [large * small for large in coarse for small in fine][:count]
            for j in range(len(mode.coefficients)):
                rows.append([value * arb(time) ** j for value, time in zip(row, times, strict=True)] if j else row)
        basis = acb_mat(len(rows), count, [value for row in rows for value in row])
        values = (acb_mat(1, len(coefficients), coefficients) * basis).entries()
        return [(time, value.real) for time, value in zip(times, values, strict=True)]
