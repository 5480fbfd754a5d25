"""What it costs to solve a wiring: `python tests/benchmarks/wiring.py`.

For chains of lags in one loop and in many: the processor time of det P, of the first channel and of a break, best of
ten, and what det P and the first channel together are held to.
"""

from __future__ import annotations

from collections.abc import Callable
from random import Random
from time import process_time

from flint import fmpq

from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.polynomials import highest_first
from specgate.systems.solution import solve

HELD_TO = {6: 3.0, 20: 15.0}
"""Milliseconds by the number of signals."""


def chain(blocks: int, nested: bool) -> Wiring:
    """Lags one after the other in an outer loop; nested: with an inner loop over every third of them."""
    random = Random(blocks)

    def figure() -> fmpq:
        return fmpq(random.randint(1, 999), random.choice([1, 10, 100, 1000]))

    instances, signals = [], {}
    for k in range(blocks):
        terms = [(fmpq(1), SignalRef(f"x{k - 1}" if k else "r"))]
        if k == 0:
            terms.append((fmpq(-1), SignalRef(f"x{blocks - 1}")))
        if k == blocks // 2:
            terms.append((fmpq(1), SignalRef("d")))
        if nested and k % 3 == 0 and k + 2 < blocks:
            terms.append((-figure(), SignalRef(f"x{k + 2}")))
        lag = Block(
            f"lag{k}", ("u",), ("y",), {("y", "u"): highest_first([figure()])}, highest_first([figure(), figure()])
        )
        instances.append(Instance(lag.name, lag, {"u": LinearForm(tuple(terms))}))
        signals[f"x{k}"] = LinearForm(((fmpq(1), OutputRef(lag.name, "y")),))
    return Wiring(("r", "d"), tuple(instances), signals)


def price(action: Callable[[], object]) -> float:
    """Return milliseconds."""
    times = []
    for _ in range(10):
        start = process_time()
        action()
        times.append(process_time() - start)
    return 1000 * min(times)


def row(blocks: int, nested: bool) -> str:
    """Return the prices of one wiring as a line of the table."""
    wiring = chain(blocks, nested)
    solved = price(lambda: solve(wiring).determinant)
    both = price(lambda: solve(wiring).channel("r", f"x{blocks - 1}"))
    solution = solve(wiring)
    opened = price(lambda: solution.open_at("x0"))
    kind = "inner loops" if nested else "one loop"
    return f"{blocks:7}  {kind:12}{solved:8.2f}{both:14.2f}{HELD_TO[blocks]:9.0f}{opened:8.2f}"


def main() -> None:
    """Print the table."""
    print("signals  wiring         det P  with channel  held to   break  (ms)")
    for nested in (False, True):
        for blocks in HELD_TO:
            print(row(blocks, nested))


if __name__ == "__main__":
    main()
