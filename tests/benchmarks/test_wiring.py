"""Price of solving a wiring: python -m pytest tests/benchmarks/test_wiring.py -s

Processor time, best of ten, so that a busy machine does not decide.
"""

from __future__ import annotations

from collections.abc import Callable
from random import Random
from time import process_time

import pytest
from flint import fmpq

from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.polynomials import highest_first
from specgate.systems.solution import solve


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


@pytest.mark.parametrize("nested", [False, True])
@pytest.mark.parametrize(("blocks", "ceiling"), [(6, 3.0), (20, 15.0)])
def test_price_of_a_wiring(blocks: int, ceiling: float, nested: bool) -> None:
    wiring = chain(blocks, nested)
    solved = price(lambda: solve(wiring).determinant)
    solution = solve(wiring)
    assert solution.determinant.degree() == blocks
    channel = price(lambda: solve(wiring).channel("r", f"x{blocks - 1}")) - solved
    opened = price(lambda: solution.open_at("x0"))
    figures = f"det P {solved:.2f} ms, first channel +{channel:.2f} ms, break {opened:.2f} ms"
    print(f"{blocks} signals, nested {nested}: {figures}")
    assert solved + channel < ceiling
