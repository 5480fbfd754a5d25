"""Prices of sampled loops, by period and delay: `python tests/benchmarks/sampled.py`.

One loop, 2/(s (s + 1) (s + 2)) under a proportional law, sampled ever faster; and laws and plants of other kinds. Every
loop is answered from scratch: its components and stability; all measures of a step response between the samples (both
extremes with their times, settling to 2 %, arrivals at 10 and 90 %); all margins at the sampler. CPU time, ms.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path

from flint import fmpq

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from specgate.response.piecewise import PiecewiseResponse
from specgate.sampled.channel import channel, pieces
from specgate.sampled.drive import step
from specgate.sampled.opened import opened
from specgate.sampled.over_frequency import over_frequency
from specgate.sampled.solution import SampledSolution, solve_sampled
from tests.sampled.conftest import Case, form

PLANT = ([2], [1, 3, 2, 0])
CASES = {
    **{f"T = 1/{n}": Case(PLANT, (["1/2"], [1]), Fraction(1, n)) for n in (1, 10, 100, 1000)},
    "fractional delay, T = 1/10": Case(PLANT, (["1/2"], [1]), Fraction(1, 10), Fraction(1, 30)),
    "delay of 20 periods, T = 1/10": Case(([1], [1, 1]), (["1/4"], [1]), Fraction(1, 10), Fraction(2)),
    "integral law, T = 1/10": Case(([1], [1, 2, 1]), (["3/4", "-7/10"], [1, -1]), Fraction(1, 10)),
    "damping 0.01, T = 1/4": Case(([4], [1, "1/25", 4]), (["1/200", "1/200"], [1, -1]), Fraction(1, 4)),
    "rational (two integrators)": Case(([1], [1, 0, 0]), ([3, "-5/2"], [1, "1/2"]), Fraction(1, 2)),
    "order 8, T = 1/5": Case(([1], [1, 8, 28, 56, 70, 56, 28, 8, 1]), (["1/100"], [1, -1]), Fraction(1, 5)),
}


def respond(solution: SampledSolution) -> None:
    """Ask a step response everything."""
    found = PiecewiseResponse(pieces(channel(solution, ["ask"], form(place=1)), step("ask", fmpq(1))))
    final = found.final_value().exact
    assert final is not None
    answers = [found.greatest().value, found.least().value, found.settling(abs(final) / 50)]
    answers += [found.first_arrival(final * share) for share in (fmpq(1, 10), fmpq(9, 10))]
    for answer in answers:
        if answer.absent is None:
            answer.enclose(64)


def margins(solution: SampledSolution) -> None:
    """Ask for all margins but that of delay."""
    loop = over_frequency(opened(solution, "place"))
    assert loop is not None
    for name in ("gain_margin", "phase_margin", "sensitivity_peak", "crossover_frequency"):
        answer = getattr(loop, name)()
        if answer.absent is None:
            answer.enclose(64)


def delay(solution: SampledSolution) -> None:
    """Ask for the dead time that the loop stands."""
    loop = over_frequency(opened(solution, "place"))
    assert loop is not None
    answer = loop.delay_margin()
    if answer.absent is None:
        answer.enclose(40)


def price(work: Callable[[], object]) -> float:
    """Return the CPU time of the better of two runs, ms."""
    best = float("inf")
    for _ in range(2):
        start = time.process_time()
        work()
        best = min(best, time.process_time() - start)
    return best * 1e3


def main() -> None:
    """Print the table."""
    print(f"{'loop':32s}{'stable':>10s}{'response':>10s}{'margins':>10s}{'delay':>10s}")
    for name, case in CASES.items():
        figures = [price(lambda case=case: solve_sampled(case.wiring()).stable)]
        figures += [
            price(lambda case=case, ask=ask: ask(solve_sampled(case.wiring()))) for ask in (respond, margins, delay)
        ]
        print(f"{name:32s}" + "".join(f"{figure:10.1f}" for figure in figures))


if __name__ == "__main__":
    main()
