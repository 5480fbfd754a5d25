"""What it costs to answer everything about an open loop: `python tests/benchmarks/margins.py`.

For each class of loops (the same on every run): the processor time to find all crossings, margins and peaks from the
polynomials of the open loop on and to enclose them to 64 bits, and beside it that of the bandwidth and the peaks of the
closed loop, as median, 90 % and worst over the class, and what the median of the former is held to.
"""

from __future__ import annotations

import json
import random
import time
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path
from statistics import median

from flint import fmpq, fmpq_poly

from specgate.frequency.rational_gain import RationalGain
from specgate.frequency.rational_loop import RationalLoop
from specgate.systems import roots
from specgate.systems.polynomials import highest_first
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction

Pair = tuple[fmpq_poly, fmpq_poly]

DATA = Path(__file__).resolve().parents[1] / "data" / "margin_cases.json"
RUNS = 3
ONE, S = fmpq_poly([1]), fmpq_poly([0, 1])


@dataclass(frozen=True)
class Class:
    """Loops, and the median that they are held to (ms)."""

    name: str
    loops: list[Pair]
    held_to: float | None


def number(value: float) -> fmpq:
    """Return three digits of a number exactly."""
    fraction = Fraction(f"{value:.2e}")
    return fmpq(fraction.numerator, fraction.denominator)


def part(chance: random.Random) -> tuple[fmpq_poly, int]:
    """Return a lag or a swing with its order."""
    if chance.random() < 0.5:
        return ONE + S * number(10 ** chance.uniform(-1.5, 0.5)), 1
    rate = number(10 ** chance.uniform(-0.5, 1.5))
    return ONE + S * (2 * number(10 ** chance.uniform(-2, -0.3)) / rate) + S * S / rate**2, 2


def stable_loop(chance: random.Random, order: int) -> Pair:
    """Return an open loop of an order, whose gain keeps the closed loop stable."""
    below, count = S, 1
    while count < order:
        factor, degree = part(chance)
        if count + degree <= order:
            below, count = below * factor, count + degree
    above = ONE
    for _ in range(chance.randint(0, order // 2)):
        above *= ONE + S * number(10 ** chance.uniform(-1.5, 0.5))
    gain = number(10 ** chance.uniform(-0.5, 1))
    while not is_hurwitz(below + above * gain):
        gain /= 2
    return above * gain, below


def reference_loops() -> list[Pair]:
    """Return the rational loops among the reference cases that are stable when closed."""

    def polynomial(texts: list[str]) -> fmpq_poly:
        return highest_first([fmpq(Fraction(t).numerator, Fraction(t).denominator) for t in texts])

    cases = (c for c in json.loads(DATA.read_text()) if "Ts" not in c and "delay" not in c and c["stable_cl"])
    return [(polynomial(c["num"]), polynomial(c["den"])) for c in cases]


def classes() -> list[Class]:
    """Return all classes; the same loops on every run."""

    def drawn(orders: range, count: int, name: str) -> list[Pair]:
        chance = random.Random(name)
        return [stable_loop(chance, chance.choice(orders)) for _ in range(count)]

    return [
        Class("reference loops", reference_loops(), 1),
        Class("order 2 to 6", drawn(range(2, 7), 60, "small"), 1),
        Class("order 10", drawn(range(10, 11), 20, "ten"), 4),
        Class("order 20", drawn(range(20, 21), 10, "twenty"), 25),
        Class("order 40", drawn(range(40, 41), 4, "forty"), None),
    ]


def margins(pair: Pair) -> None:
    """Answer everything about one open loop from scratch."""
    roots._at_precision.cache_clear()
    loop = RationalLoop(TransferFunction(*pair), stable=True)
    answers = [loop.gain_margin(), loop.gain_margin_up(), loop.gain_margin_down(), loop.phase_margin()]
    answers += [loop.phase_margin_lag(), loop.phase_margin_lead(), loop.delay_margin(), loop.sensitivity_peak()]
    answers += [loop.crossover_frequency(), loop.phase_crossover_frequency()]
    answers += [part for crossing in loop.crossings() for part in (crossing.frequency, crossing.margin)]
    for found in answers:
        if found.absent is None:
            found.enclose(64)


def gains(pair: Pair) -> None:
    """Answer the bandwidth and the peaks of one loop from scratch."""
    above, below = pair
    gain = RationalGain(TransferFunction(above, above + below))
    peak = RationalLoop(TransferFunction(above, below), stable=True).peak_gain()
    for found in (gain.bandwidth(), gain.resonance_peak(), peak):
        if found.absent is None:
            found.enclose(64)


def price(work: Callable[[Pair], None], pair: Pair) -> float:
    """Return the processor time in ms of the best of a few runs."""
    best = float("inf")
    for _ in range(RUNS):
        before = time.process_time()
        work(pair)
        best = min(best, time.process_time() - before)
    return 1e3 * best


def main() -> None:
    """Print the table."""
    print(f"{'ms of CPU':18} {'n':>3} | margins {'median':>8} {'':8} {'90 %':>8} {'worst':>8} | bandwidth and peaks")
    margins((ONE, S * S + S))
    for group in classes():
        table = [sorted(price(work, pair) for pair in group.loops) for work in (margins, gains)]
        figures = [(median(prices), prices[int(0.9 * len(prices))], prices[-1]) for prices in table]
        (middle, most, worst), others = figures
        held = "" if group.held_to is None else f"<= {group.held_to:g}"
        print(
            f"{group.name:18} {len(group.loops):3} |         {middle:8.2f} {held:8} {most:8.2f} {worst:8.2f} |", end=""
        )
        print(*(f"{value:8.2f}" for value in others), flush=True)


if __name__ == "__main__":
    main()
