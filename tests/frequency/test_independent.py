"""Random loops against other methods: no grid finds a crossing or a peak that is not there, and what is there checks.

Crossings and peaks are checked two ways. At each frequency that is reported, mpmath evaluates L from poles and zeros to
40 digits. And a dense grid (numpy, floats) looks for changes of sign and for greater values that were missed. Gain
margins are checked by the roots of D + k N on both sides of the factor, stability by floating-point roots.
"""

from __future__ import annotations

import random
from collections.abc import Callable
from dataclasses import dataclass

import mpmath
import numpy as np
import pytest
from flint import arb, fmpq, fmpq_poly

from specgate.frequency.rational_gain import RationalGain
from specgate.frequency.rational_loop import RationalLoop
from specgate.response.answers import Answer
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision

ONE = fmpq_poly([1])
S = fmpq_poly([0, 1])


def decimal(value: float, digits: int = 3) -> fmpq:
    """Return a number of a few digits exactly."""
    text = f"{value:.{digits}e}"
    mantissa, exponent = text.split("e")
    return fmpq(int(mantissa.replace(".", "")), 1) * fmpq(10) ** (int(exponent) - digits)


def lag(chance: random.Random, low: float = -1, high: float = 1) -> fmpq_poly:
    return ONE + S * decimal(10 ** chance.uniform(low, high))


def swing(chance: random.Random, damping: float) -> fmpq_poly:
    rate = decimal(10 ** chance.uniform(-0.7, 0.7))
    return ONE + S * (2 * decimal(damping) / rate) + S * S / rate**2


def product(parts: list[fmpq_poly]) -> fmpq_poly:
    result = ONE
    for part in parts:
        result *= part
    return result


Pair = tuple[fmpq_poly, fmpq_poly]


def plain(chance: random.Random) -> Pair:
    poles = [lag(chance) for _ in range(chance.randint(1, 5))] + [S] * chance.randint(0, 1)
    zeros = [lag(chance) for _ in range(chance.randint(0, max(0, len(poles) - 2)))]
    return product(zeros) * decimal(10 ** chance.uniform(-1, 0.6)), product(poles)


def resonant(chance: random.Random) -> Pair:
    swings = [swing(chance, 10 ** chance.uniform(-3, -0.3)) for _ in range(chance.randint(1, 3))]
    dips = [swing(chance, 10 ** chance.uniform(-3, -0.3)) for _ in range(chance.randint(0, len(swings)))]
    return product(dips) * decimal(10 ** chance.uniform(-2, 0)), product([*swings, S, lag(chance)])


def conditional(chance: random.Random) -> Pair:
    zeros = [lag(chance, 0, 1) for _ in range(2)]
    return product(zeros) * decimal(10 ** chance.uniform(0, 2)), S**3 * product([lag(chance, -3, -1)])


def right_half_plane(chance: random.Random) -> Pair:
    pole = S * decimal(10 ** chance.uniform(-0.5, 0.5)) - ONE
    zero = ONE - S * decimal(10 ** chance.uniform(-2, -1)) if chance.random() < 0.5 else ONE
    return zero * lag(chance) * decimal(10 ** chance.uniform(0.1, 1.5)), pole * product([lag(chance, -2, -1)])


def direct(chance: random.Random) -> Pair:
    poles = [lag(chance) for _ in range(chance.randint(1, 4))]
    zeros = [lag(chance) for _ in poles]
    zeros[0] = zeros[0] if chance.random() < 0.5 else ONE - S * decimal(10 ** chance.uniform(-1, 0.3))
    return product(zeros) * decimal(chance.choice((-1, 1)) * 10 ** chance.uniform(-1.5, 0.3)), product(poles)


def differentiating(chance: random.Random) -> Pair:
    return lag(chance) * S * decimal(10 ** chance.uniform(-1, 1)), lag(chance)


def axis(chance: random.Random) -> Pair:
    undamped = ONE + S * S / decimal(10 ** chance.uniform(-0.5, 0.5)) ** 2
    notch = ONE + S * S / decimal(10 ** chance.uniform(-0.5, 0.5)) ** 2
    return notch * lag(chance) * decimal(10 ** chance.uniform(-1, 1)), undamped * S * lag(chance, -2, -1)


def scaled(factor: int) -> Callable[[random.Random], Pair]:
    def make(chance: random.Random) -> Pair:
        above, below = resonant(chance)
        at = S * fmpq(10) ** factor
        return above(at), below(at)

    make.__qualname__ = f"scaled by 1e{factor}"
    return make


CLASSES = [plain, resonant, conditional, right_half_plane, direct, differentiating, axis, scaled(9), scaled(-9)]


@dataclass
class Reference:
    """L in floats and in 40 digits."""

    above: fmpq_poly
    below: fmpq_poly

    def floats(self, p: fmpq_poly) -> list[float]:
        return [int(c.p) / int(c.q) for c in reversed(p.coeffs())]

    def grid(self, frequencies: np.ndarray) -> np.ndarray:
        s = 1j * frequencies
        return np.asarray(np.polyval(self.floats(self.above), s) / np.polyval(self.floats(self.below), s))

    def at(self, frequency: mpmath.mpf) -> mpmath.mpc:
        s = mpmath.mpc(0, frequency)
        n, d = (sum(mpmath.mpf(int(c.p)) / int(c.q) * s**k for k, c in enumerate(p.coeffs())) for p in self.pair)
        return n / d

    @property
    def pair(self) -> Pair:
        return self.above, self.below

    def stable_at(self, factor: float) -> bool:
        roots = np.roots(self.floats(self.below + self.above * decimal(factor, 15)))
        return bool(np.all(roots.real < 0))

    def frequencies(self) -> np.ndarray:
        corners = [abs(r) for p in (self.above, self.below) for r in np.roots(self.floats(p)) if abs(r) > 1e-30]
        low, high = np.log10(min(corners, default=1.0)) - 3, np.log10(max(corners, default=1.0)) + 3
        near = [np.linspace(w * 0.99, w * 1.01, 801) for w in corners]
        return np.unique(np.concatenate([np.logspace(low, high, 20001), *near]))


def number(answer: Answer) -> mpmath.mpf:
    with working_precision(200):
        return mpmath.mpf(arb(answer.enclose(160)).mid().str(50, radius=False))


def frequency(answer: Answer) -> Answer:
    assert answer.at is not None
    found = answer.at["frequency"]
    assert isinstance(found, Answer)
    return found


@pytest.mark.parametrize("make", CLASSES, ids=lambda make: make.__qualname__)
@pytest.mark.parametrize("seed", range(6))
def test_a_random_loop(make: Callable[[random.Random], Pair], seed: int) -> None:
    above, below = make(random.Random(f"{make.__qualname__} {seed}"))
    loop = RationalLoop(TransferFunction(above, below), is_hurwitz(above + below))
    with mpmath.workdps(40):
        reference = Reference(above, below)
        check_crossings(loop, reference)
        if loop.stable:
            check_gain_margins(loop, reference)
            check_phase_margins(loop, reference)
            check_peak(loop, reference)


def check_crossings(loop: RationalLoop, reference: Reference) -> None:
    gains, phases = [], []
    for crossing in loop.crossings():
        if crossing.frequency.absent is not None:
            continue
        at, margin = number(crossing.frequency), number(crossing.margin)
        value = reference.at(at)
        if crossing.kind == "gain":
            gains.append(float(at))
            assert mpmath.almosteq(abs(value), 1, 1e-30)
            turned = value * mpmath.expjpi((margin if crossing.direction == "lead" else -margin) / mpmath.pi)
            assert mpmath.almosteq(turned, -1, 1e-30)
        else:
            phases.append(float(at))
            assert mpmath.almosteq(value * (margin if crossing.direction == "up" else 1 / margin), -1, 1e-30)
    w = reference.frequencies()
    values = reference.grid(w)
    outside, imaginary = np.abs(values) > 1, np.imag(values) > 0
    for k in np.flatnonzero(outside[1:] != outside[:-1]):
        assert any(w[k] * (1 - 1e-9) <= at <= w[k + 1] * (1 + 1e-9) for at in gains)
    negative = (np.real(values) < 0)[1:] & (np.real(values) < 0)[:-1]
    for k in np.flatnonzero((imaginary[1:] != imaginary[:-1]) & negative):
        if np.abs(np.imag(values[k])) > 1e-12 * np.abs(values[k]) and abs(values[k + 1] - values[k]) < abs(values[k]):
            assert any(w[k] * (1 - 1e-9) <= at <= w[k + 1] * (1 + 1e-9) for at in phases)


def check_gain_margins(loop: RationalLoop, reference: Reference) -> None:
    for margin, direction in ((loop.gain_margin_up(), 1), (loop.gain_margin_down(), -1)):
        if margin.absent is not None:
            assert margin.absent.infinite
            assert all(reference.stable_at(10.0 ** (direction * power)) for power in (0.1, 0.5, 1, 2))
            continue
        factor = float(number(margin))
        steps = [1 + (factor - 1) * share for share in (0.05, 0.3, 0.6, 0.9, 0.999)]
        assert all(reference.stable_at(step**direction) for step in steps)


def check_phase_margins(loop: RationalLoop, reference: Reference) -> None:
    margin, delay = loop.phase_margin(), loop.delay_margin()
    values = reference.grid(reference.frequencies())
    near = values[np.abs(np.abs(values) - 1) < 1e-4]
    if margin.absent is not None:
        assert margin.absent.infinite
        assert len(near) == 0
        return
    if len(near):
        assert float(number(margin)) <= np.min(np.abs(np.angle(-near))) * (1 + 1e-6) + 1e-3
    if delay.absent is None and delay.exact is None:
        at = number(frequency(delay))
        assert mpmath.almosteq(reference.at(at) * mpmath.expj(-at * number(delay)), -1, 1e-30)


def check_peak(loop: RationalLoop, reference: Reference) -> None:
    peak = loop.sensitivity_peak()
    value = number(peak)
    greatest = np.max(1 / np.abs(1 + reference.grid(reference.frequencies())))
    assert greatest <= float(value) * (1 + 1e-9)
    where = frequency(peak)
    if where.absent is None:
        assert mpmath.almosteq(1 / abs(1 + reference.at(number(where))), value, 1e-30)


@pytest.mark.parametrize("make", [plain, resonant, direct, scaled(9)], ids=lambda make: make.__qualname__)
@pytest.mark.parametrize("seed", range(6))
def test_a_random_channel(make: Callable[[random.Random], Pair], seed: int) -> None:
    """The first fall by 3 dB against a dense grid and 40 digits; phases against an unwrapped one; the greatest gain."""
    above, below = make(random.Random(f"{make.__qualname__} {seed}"))
    gain, channel = RationalGain(TransferFunction(above, below)), Reference(above, below)
    w = channel.frequencies()
    values = channel.grid(w)
    with mpmath.workdps(40):
        width = gain.bandwidth()
        if below[0] != 0:
            start = mpmath.mpf(int(above[0].p)) / int(above[0].q) * int(below[0].q) / int(below[0].p)
            level = mpmath.mpf(10) ** (mpmath.mpf(-3) / 20) * abs(start)
            fallen = np.flatnonzero(np.abs(values) < float(level))
            assert (width.absent is None) is (len(fallen) > 0)
            if width.absent is None:
                assert mpmath.almosteq(abs(channel.at(number(width))), level, 1e-30)
                assert float(number(width)) <= w[fallen[0]] * (1 + 1e-9)
            peak = gain.resonance_peak()
            if peak.absent is None:
                assert float(np.max(np.abs(values)) / abs(start)) <= float(number(peak)) * (1 + 1e-9)
        phases = np.unwrap(np.angle(values))
        for k in (0, len(w) // 3, len(w) // 2, len(w) - 1):
            found = float(number(gain.phase_at(fmpq(*float(w[k]).as_integer_ratio()))))
            started = float(number(gain.phase_at(fmpq(*float(w[0]).as_integer_ratio()))))
            assert found - started == pytest.approx(phases[k] - phases[0], abs=1e-6)
            assert np.exp(1j * found) == pytest.approx(np.exp(1j * phases[k]), abs=1e-9)
