"""Time that responses and margins of loops with dead time take: against the horizon, and with several dead times.

    python tests/benchmarks/dead_time.py

Processor time in ms, median of five. `measures`: final and extreme values, settling time, three arrivals.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable, Sequence

from flint import fmpq

from specgate.delays.inputs import respond_late
from specgate.delays.open_loop import DelayedLoop
from specgate.response.inputs import Input
from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.delayed import DelayedSolution, solve_delayed
from specgate.systems.polynomials import highest_first

Coefficients = Sequence[fmpq | int]
HORIZONS = (2, 10, 50, 200, 1000, 2000, 10_000)
RATIOS = (10, 100, 1000)


def applied(name: str, above: Coefficients, below: Coefficients, late: fmpq, *terms: tuple[int, str]) -> Instance:
    block = Block(name, ("u",), ("y",), {("y", "u"): highest_first(above)}, highest_first(below), late)
    references = (
        (fmpq(factor), OutputRef(*other.split(".")) if "." in other else SignalRef(other)) for factor, other in terms
    )
    return Instance(name, block, {"u": LinearForm(tuple(references))})


def signal(name: str) -> LinearForm:
    return LinearForm(((fmpq(1), OutputRef(name, "y")),))


def slow(horizon: int) -> DelayedSolution:
    """A lag of `horizon` with dead time 1 and a PI controller that makes it about twice as quick."""
    lag = fmpq(horizon)
    blocks = (
        applied("pi", [lag / 2, fmpq(1, 2)], [lag, 0], fmpq(0), (1, "r"), (-1, "y")),
        applied("plant", [3], [lag, 1], fmpq(1), (1, "u")),
    )
    return solve_delayed(Wiring(("r",), blocks, {"u": signal("pi"), "y": signal("plant")}))


def quick(ratio: int) -> DelayedSolution:
    """A valve so much faster than the dead time 1 behind it, and a PI controller that suits that."""
    blocks = (
        applied("pi", [fmpq(1, 3), fmpq(2, 5)], [1, 0], fmpq(0), (1, "r"), (-1, "y")),
        applied("plant", [1], [fmpq(1, ratio), 1], fmpq(1), (1, "u")),
    )
    return solve_delayed(Wiring(("r",), blocks, {"u": signal("pi"), "y": signal("plant")}))


def several(delays: Sequence[fmpq]) -> DelayedSolution:
    """An inner and an outer loop with dead times in the controller, the plant, the inner and the outer sensor."""
    given = [*delays, *[fmpq(0)] * (4 - len(delays))]
    blocks = (
        applied("pi", [fmpq(2, 5), fmpq(1, 5)], [1, 0], given[3], (1, "r"), (-1, "seen")),
        applied("drive", [1], [fmpq(1, 2), 1], given[1], (1, "u"), (-1, "near")),
        applied("inner", [fmpq(1, 3)], [fmpq(1, 10), 1], given[2], (1, "v")),
        applied("plant", [1], [1, fmpq(3, 2), 1], given[0], (1, "v")),
        applied("outer", [1], [fmpq(1, 10), 1], fmpq(0), (1, "y")),
    )
    signals = {"u": "pi", "v": "drive", "near": "inner", "y": "plant", "seen": "outer"}
    return solve_delayed(Wiring(("r",), blocks, {name: signal(block) for name, block in signals.items()}))


def measures(solution: DelayedSolution) -> None:
    (channel,) = solution.together([({"y": fmpq(1)}, "r")])
    found = respond_late([(channel, Input("step", {"size": fmpq(1)}))])
    found.greatest()  # type: ignore[union-attr]
    found.least()  # type: ignore[union-attr]
    found.settling(fmpq(1, 50))  # type: ignore[union-attr]
    for level in (fmpq(1, 10), fmpq(1, 2), fmpq(9, 10)):
        found.first_arrival(level)  # type: ignore[union-attr]


def margins(solution: DelayedSolution) -> None:
    opened = solution.open_at("y")
    loop = DelayedLoop(opened.reduced, opened.stable)
    for ask in (loop.gain_margin, loop.phase_margin, loop.delay_margin, loop.sensitivity_peak):
        ask()


def timed(task: Callable[[], object]) -> float:
    times = []
    for _ in range(5):
        begin = time.process_time()
        task()
        times.append(1000 * (time.process_time() - begin))
    return statistics.median(times)


def row(name: str, make: Callable[[], DelayedSolution]) -> None:
    solution = make()
    print(
        f"{name:34s} {timed(lambda: make().stable):9.1f} {timed(lambda: measures(solution)):9.1f}"
        f" {timed(lambda: margins(solution)):9.1f}"
    )


def main() -> None:
    print(f"{'loop':34s} {'stable':>9s} {'measures':>9s} {'margins':>9s}   (ms)")
    for horizon in HORIZONS:
        row(f"dead time 1, lag {horizon}", lambda horizon=horizon: slow(horizon))  # type: ignore[misc]
    for ratio in RATIOS:
        row(f"dead time 1, lag 1/{ratio}", lambda ratio=ratio: quick(ratio))  # type: ignore[misc]
    for delays in (
        [fmpq(1, 2)],
        [fmpq(1, 2), fmpq(1, 4)],
        [fmpq(1, 2), fmpq(3, 10), fmpq(1, 5)],
        [fmpq(1, 2), fmpq(37, 100), fmpq(21, 100), fmpq(13, 100)],
    ):
        row(f"dead times {', '.join(map(str, delays))}", lambda delays=delays: several(delays))  # type: ignore[misc]


if __name__ == "__main__":
    main()
