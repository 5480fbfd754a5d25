"""Phase margin of a sampled loop with the hold as a dead time of half a period.

A hold keeps each sample for a period T, so that what it sends is late by T/2 on average: drawn continuous, with that
dead time and the delay of computation, the loop has nearly the margins of the sampled one. "Nearly" is a matter of the
sampling frequency over the crossover: at ten times, one integrator alone keeps 71.7 degrees where 72.0 are promised;
at four times, 38.2 where 45.0 are. Lags in the plant turn the error round: with one to three of them, ten times leave
up to 0.9 degrees more than is promised. Size and side depend on the plant, because the hold moves the crossover too.

The rule is audited for a sampled gain around a plant of one integrator and up to three real lags. Its accuracy is
stated for this very loop: -0.9 to +0.4 degrees of its phase margin, and -1.6 to +1.0 where the computation takes up
to a period besides.
"""

from __future__ import annotations

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import at_least, words
from specgate.approximations.crowding import outward, signed_percent
from specgate.approximations.figures import SHOWN, combined
from specgate.approximations.of_loops import CLOSED_LOOP_STABLE
from specgate.approximations.opened import HeldGain, OpenedLoop
from specgate.approximations.spots import spots
from specgate.delays.open_loop import DelayedLoop
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_stability import is_stable
from specgate.terms.enclosed import ends
from specgate.terms.precision import working_precision

_NO_GAIN = "no single sampled gain with a plant in s"
_AT_ONCE, _LATE = (fmpq(9, 10), fmpq(4, 10)), (fmpq(16, 10), fmpq(1))
"""By how many degrees the promise may fall short of the truth, and exceed it: without delay, with up to a period."""


def _drawn(held: HeldGain) -> DelayedLoop | None:
    """Return the loop with half a period of dead time in place of the hold; None where the plant is not proper."""
    rest = held.rest.reduced()
    if not rest.numerator or rest.numerator.degree() > rest.denominator.degree():
        return None
    late = Quasi.of({held.period / 2 + held.delay: rest.numerator})
    transfer = DelayedTransfer(late, Quasi.rational(rest.denominator))
    return DelayedLoop(transfer, is_stable(transfer.numerator + transfer.denominator))


def _margin(opened: OpenedLoop, arguments: Arguments) -> Answer:
    loop = None if opened.held is None else _drawn(opened.held)
    return Answer.nothing(f"there is {_NO_GAIN}") if loop is None else loop.phase_margin(arguments.over)


def _kind(opened: OpenedLoop, _: Arguments, __: fmpq | None) -> Found:
    if opened.held is None:
        return words(_NO_GAIN, False)
    rest = opened.held.rest.reduced()
    poles = spots(rest.denominator)
    integrators = sum(pole.decay.exact == 0 and not pole.oscillates for pole in poles)
    lags = sum(not pole.oscillates and pole.decay.enclose(SHOWN) > 0 for pole in poles)
    fits = rest.numerator.degree() == 0 and integrators == 1 and integrators + lags == len(poles) <= 4
    return words("it is" if fits else "it is not", fits)


def _ratio(opened: OpenedLoop, _: Arguments, threshold: fmpq | None) -> Found:
    loop = None if opened.held is None else _drawn(opened.held)
    if opened.held is None or loop is None or threshold is None:
        return words(_NO_GAIN, False)
    crossings = [one for one in loop.crossings() if one.kind == "gain"]
    if len(crossings) != 1:
        return words(f"{len(crossings)} gain crossovers", False)
    period = opened.held.period
    return at_least(combined(lambda crossover: 2 * arb.pi() / (period * crossover), crossings[0].frequency), threshold)


def _accuracy(opened: OpenedLoop, arguments: Arguments) -> Accuracy | None:
    value, held = _margin(opened, arguments), opened.held
    if held is None or value.absent is not None or arguments.over is not None or held.delay > held.period:
        return None
    less, more = _AT_ONCE if held.delay == 0 else _LATE
    with working_precision(SHOWN):
        degrees = value.enclose(SHOWN) * 180 / arb.pi()
    least = ends(degrees)[0]
    if least <= more:
        return None
    lower, upper = outward(-less / (least + less), more / (least - more))
    return Accuracy(lower, upper, f"{signed_percent(lower)} to {signed_percent(upper)} % (this loop)")


ROW = Approximation(
    name="hold_as_delay",
    title="Phase margin of a sampled loop with the hold as a dead time",
    estimates=("phase_margin",),
    formula="phase margin with a dead time of T/2 in place of the hold",
    source="common practice; the accuracy: derived",
    conditions=(
        CLOSED_LOOP_STABLE,
        Condition(
            key="kind",
            name="a sampled gain around a plant of one integrator and at most three real lags",
            source="derived",
            required="a single loop of that kind",
            find=_kind,
        ),
        Condition(
            key="sampling",
            name="sampling frequency over crossover frequency",
            source="common practice",
            required=">= {threshold}",
            find=_ratio,
            threshold=fmpq(10),
        ),
    ),
    evaluate=_margin,
    accuracy=_accuracy,
    text=__doc__,
)
