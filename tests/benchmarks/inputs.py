"""How long a response to each kind of input takes to answer, and how that grows with damping, order and pieces.

    python tests/benchmarks/inputs.py

Prints processor time in milliseconds, best of three, on a loop of order 3 and on harder channels.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from math import pi

from flint import fmpq, fmpq_poly

from specgate.response.answers import Absent
from specgate.response.inputs import Input, respond
from specgate.response.questions import Mask, TimeResponse
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction

INPUTS = {
    "step": Input("step", {"size": fmpq(1)}),
    "ramp": Input("ramp", {"slope": fmpq(1)}),
    "impulse": Input("impulse", {"area": fmpq(1)}),
    "pulse": Input("pulse", {"size": fmpq(1), "duration": fmpq(7, 10)}),
    "ramp_and_hold": Input("ramp_and_hold", {"size": fmpq(1), "slope": fmpq(2)}),
    "one_minus_cosine": Input("one_minus_cosine", {"size": fmpq(1), "duration": fmpq(2)}),
    "sine": Input("sine", {"amplitude": fmpq(1), "frequency": fmpq(3)}),
}

LEVEL = fmpq(1, 20)
MASK = Mask(upper=((fmpq(0), fmpq(2)), (fmpq(3), fmpq(2)), (fmpq(3), fmpq(3, 2))), forever=True)

QUESTIONS: dict[str, Callable[[TimeResponse], object]] = {
    "extremes": lambda y: (y.greatest().value, y.least().value),
    "settling": lambda y: y.settling(LEVEL),
    "after 2 s": lambda y: y.deviation_after(fmpq(2)).value,
    "rate": lambda y: y.peak_rate().value,
    "mask": lambda y: y.within(MASK),
    "|y|": lambda y: y.absolute_integral(),
    "y^2": lambda y: y.squared_integral(),
}


def pair(damping: fmpq, frequency: fmpq) -> fmpq_poly:
    """Return s^2 + 2 damping frequency s + frequency^2."""
    return highest_first([fmpq(1), 2 * damping * frequency, frequency * frequency])


def channel(damping: fmpq, order: int, ratio: int = 4) -> TransferFunction:
    """Return a pair with real poles up to an order, `ratio` times as fast and faster."""
    denominator = pair(damping, fmpq(2))
    for k in range(order - 2):
        denominator = denominator * fmpq_poly([fmpq(ratio + k), 1])
    return TransferFunction(fmpq_poly([denominator[0]]), denominator)


def spent(transfer: TransferFunction, given: Input, ask: Callable[[TimeResponse], object]) -> float:
    """Return the processor time that a question to a new response takes, in ms, best of three."""
    best = float("inf")
    for _ in range(3):
        response = respond([(transfer, given)])
        assert not isinstance(response, Absent)
        start = time.process_time()
        ask(response)
        best = min(best, time.process_time() - start)
    return 1e3 * best


def table(title: str, transfer: TransferFunction) -> None:
    """Print a row for each input."""
    print(f"\n{title}\n{'ms':18}" + "".join(f"{name:>11}" for name in QUESTIONS))
    for kind, given in INPUTS.items():
        row = "".join(f"{spent(transfer, given, ask):11.1f}" for ask in QUESTIONS.values())
        print(f"{kind:18}{row}")


def growth() -> None:
    """Print how a pulse grows with damping and order, as a table with bars."""
    print("\npulse: extremes, settling and the integral of |y| together")
    cases = [(f"damping 1e-{k}", channel(fmpq(1, 10**k), 3)) for k in (1, 2, 3, 4, 5)]
    cases += [(f"order {n}", channel(fmpq(1, 5), n)) for n in (2, 4, 8, 12, 20)]
    cases += [(f"pole ratio 1e{k}", channel(fmpq(1, 5), 3, 10**k)) for k in (2, 4, 6, 8)]
    for name, transfer in cases:
        total = sum(spent(transfer, INPUTS["pulse"], QUESTIONS[key]) for key in ("extremes", "settling", "|y|"))
        print(f"  {name:18}{total:9.1f}  {'#' * min(60, round(total / 4))}")


def main() -> None:
    """Print all tables."""
    table("order 3, damping 0.2", channel(fmpq(1, 5), 3))
    table(f"order 8, damping 0.02, {1 / (0.02 * 2 * pi):.0f} periods to decay", channel(fmpq(1, 50), 8))
    growth()


if __name__ == "__main__":
    main()
