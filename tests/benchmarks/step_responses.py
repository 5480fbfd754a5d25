"""Prices of all measures of a step response, by class of system: `python tests/benchmarks/step_responses.py`.

Every system is answered from scratch: both extremes with their times, settling to 2 % and 5 %, arrivals at 10, 50 and
90 % of the change, all enclosed to 64 bits. CPU time of the best of three runs. The last columns compare with the
figures that a general-purpose library gives by default for the same systems, read off a grid of samples without any
bound: `scipy.signal.step` on 1000 points, and the step figures of `control`, where that is installed.
"""

from __future__ import annotations

import json
import random
import sys
import time
import warnings
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from fractions import Fraction
from importlib import import_module
from pathlib import Path
from statistics import median
from typing import Any

import numpy as np
from flint import fmpq, fmpq_poly

from specgate.response.step import StepResponse
from specgate.systems import roots
from specgate.systems.polynomials import highest_first, product

DATA = Path(__file__).resolve().parents[1] / "data" / "step_cases.json"
RUNS = 3

Pair = tuple[fmpq_poly, fmpq_poly]


@dataclass(frozen=True)
class Class:
    """A class of systems with the price that it is held to (ms: median, 90 %, worst)."""

    name: str
    systems: list[Pair]
    held_to: tuple[float | None, float | None, float | None]


def exact(value: str | float | Fraction) -> fmpq:
    """Return a decimal exactly."""
    fraction = Fraction(value if not isinstance(value, float) else f"{value:.4g}")
    return fmpq(fraction.numerator, fraction.denominator)


def lag(rate: float | Fraction) -> fmpq_poly:
    """Return s + rate."""
    return highest_first([fmpq(1), exact(rate)])


def pair(frequency: float, damping: float | Fraction) -> fmpq_poly:
    """Return s^2 + 2 damping frequency s + frequency^2."""
    w = exact(frequency)
    return highest_first([fmpq(1), 2 * exact(damping) * w, w * w])


def up_to_order_six(random_: random.Random) -> Pair:
    """Return a plain system: damping from 0.05, a pole ratio of up to 1000, some zeros."""
    factors = [
        pair(10 ** random_.uniform(-1, 1.5), random_.uniform(0.05, 1.0))
        if random_.random() < 0.5
        else lag(10 ** random_.uniform(-1, 2))
        for _ in range(random_.randint(1, 3))
    ]
    denominator = product(factors)
    zeros = random_.randint(0, min(2, denominator.degree() - 1))
    return product(lag(10 ** random_.uniform(-1, 2)) for _ in range(zeros)), denominator


def light(damping: str) -> Callable[[random.Random], Pair]:
    """Return a maker of systems with one lightly damped pair."""

    def make(random_: random.Random) -> Pair:
        swing = pair(10 ** random_.uniform(-1, 1), Fraction(damping))
        return fmpq_poly([1]), swing if random_.random() < 0.5 else swing * lag(10 ** random_.uniform(-1, 1))

    return make


def stiff(random_: random.Random) -> Pair:
    """Return a system with a pole ratio of 1e8."""
    slow = 10 ** random_.uniform(-1, 1)
    return fmpq_poly([1]), lag(slow) * lag(slow * 1e8)


def of_order(order: int) -> Callable[[random.Random], Pair]:
    """Return a maker of systems of one order, poles spread over a factor of 30."""

    def make(random_: random.Random) -> Pair:
        count = random_.randint(0, order // 2)
        swings = [pair(10 ** random_.uniform(-0.5, 1), random_.uniform(0.2, 0.9)) for _ in range(count)]
        lags = [lag(10 ** random_.uniform(-0.5, 1)) for _ in range(order - 2 * count)]
        zeros = random_.randint(0, order // 2)
        return product(lag(10 ** random_.uniform(-0.5, 1)) for _ in range(zeros)), product([*swings, *lags])

    return make


def reference_systems() -> Iterator[Pair]:
    """Yield the reference systems of the tests that settle."""
    for case in json.loads(DATA.read_text()):
        if case["final_exists"] and case["final_value"] != "0":
            yield tuple(highest_first([exact(c) for c in case[key]]) for key in ("numerator", "denominator"))


def classes() -> list[Class]:
    """Return all classes; the same systems on every run."""

    def drawn(make: Callable[[random.Random], Pair], count: int) -> list[Pair]:
        return [make(random.Random(f"{make.__qualname__} {seed}")) for seed in range(count)]

    return [
        Class("order 1 to 6", drawn(up_to_order_six, 60), (3, 6, 25)),
        Class("damping 1e-4", drawn(light("1e-4"), 12), (8, None, None)),
        Class("damping 1e-6", drawn(light("1e-6"), 12), (40, None, None)),
        Class("damping 1e-12", drawn(light("1e-12"), 12), (300, None, None)),
        Class("pole ratio 1e8", drawn(stiff, 12), (10, None, None)),
        Class("order 20", drawn(of_order(20), 12), (60, None, None)),
        Class("order 30", drawn(of_order(30), 12), (100, None, None)),
        Class("reference systems", list(reference_systems()), (None, None, None)),
    ]


def answer(numerator: fmpq_poly, denominator: fmpq_poly) -> None:
    """Answer everything about one response from scratch."""
    roots._at_precision.cache_clear()
    response = StepResponse(numerator, denominator, fmpq(1))
    final = response.final_value().exact
    assert final is not None
    answers = [extreme for found in (response.greatest(), response.least()) for extreme in (found.value, found.time)]
    answers += [response.settling(abs(final) / 50), response.settling(abs(final) / 20)]
    answers += [response.first_arrival(final * share) for share in (fmpq(1, 10), fmpq(1, 2), fmpq(9, 10))]
    for found in answers:
        if found.absent is None:
            found.enclose(64)


def by_samples(numerator: fmpq_poly, denominator: fmpq_poly) -> None:
    """Read the same figures off samples of scipy's step response."""
    signal = import_module("scipy.signal")
    times, values = signal.step((floats(numerator), floats(denominator)), N=1000)
    final = values[-1]
    float(times[np.argmax(values)]), float(values.max()), float(values.min())
    for band in (0.02, 0.05):
        outside = np.flatnonzero(np.abs(values - final) > band * abs(final))
        float(times[outside[-1]]) if len(outside) else 0.0
    for share in (0.1, 0.5, 0.9):
        float(times[np.argmax(values >= share * final)])


def by_control(numerator: fmpq_poly, denominator: fmpq_poly) -> None:
    """Ask control for its step figures."""
    control = import_module("control")
    control.step_info(control.tf(floats(numerator), floats(denominator)))


def floats(polynomial: fmpq_poly) -> list[float]:
    """Return coefficients, highest power first."""
    return [int(c.p) / int(c.q) for c in reversed(polynomial.coeffs())]


def price(work: Callable[[fmpq_poly, fmpq_poly], None], system: Pair) -> float:
    """Return the CPU time in ms of the best of a few runs; infinite where it fails."""
    best = float("inf")
    for _ in range(RUNS):
        before = time.process_time()
        try:
            work(*system)
        except Exception as error:  # a reference that gives up is not ours to mend
            if work is answer:
                raise
            print(f"# {work.__name__}: {type(error).__name__}", file=sys.stderr)
            return float("nan")
        best = min(best, time.process_time() - before)
    return 1e3 * best


def column(values: list[float], held_to: float | None) -> str:
    """Return a figure with what it is held to."""
    return f"{values[0]:8.2f} {'' if held_to is None else f'<= {held_to:g}':7}"


def main() -> None:
    """Print the table."""
    warnings.simplefilter("ignore")
    references: list[Callable[[fmpq_poly, fmpq_poly], None]] = [by_samples]
    try:
        import_module("control")
        references.append(by_control)
    except ImportError:
        pass
    print(f"{'ms of CPU':18} {'n':>3} {'median':>8} {'':7} {'90 %':>8} {'':7} {'worst':>8} {'':7}", end="")
    print(*(f"{'x ' + work.__name__[3:]:>10}" for work in references))
    answer(*up_to_order_six(random.Random(1)))
    for group in classes():
        prices = sorted(price(answer, system) for system in group.systems)
        figures = [median(prices), prices[int(0.9 * len(prices))], prices[-1]]
        cells = [column([figure], held) for figure, held in zip(figures, group.held_to, strict=True)]
        ratios = [_ratio(prices, [price(work, system) for system in group.systems]) for work in references]
        print(f"{group.name:18} {len(prices):3}", *cells, *(f"{ratio:10.2f}" for ratio in ratios), flush=True)


def _ratio(ours: list[float], theirs: list[Any]) -> float:
    """Return total time over total time of a reference (where it gave an answer)."""
    known = [value for value in theirs if value == value]
    return sum(ours) / sum(known) * len(known) / len(ours) if known else float("nan")


if __name__ == "__main__":
    main()
