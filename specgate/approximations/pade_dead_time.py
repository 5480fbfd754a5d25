"""Phase margin with the dead time replaced by a rational function of order n (a Pade approximant).

The approximant has the magnitude of the dead time, one, and nearly its phase: it lags less, by 5 degrees at
w*theta = 1.07, 2.48, 4.05, 5.70 and 7.41 for orders 1 to 5. Gain crossovers are therefore exact, and the phase
margin is promised too large by the error at the deciding one: unsafe. So the error is asked to stay small at every
crossover, and the accuracy is stated for this very loop.

It is no approximation of a response near its start: there the approximant dips or jumps, by 16 to 100 % of the
change, where nothing happens at all. It estimates no initial value, no undershoot and no rise time.
"""

from __future__ import annotations

from collections.abc import Callable

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found, Variant
from specgate.approximations.conditions import at_most, words
from specgate.approximations.crowding import outward, signed_percent
from specgate.approximations.figures import SHOWN, combined, negative, smallest
from specgate.approximations.of_loops import CLOSED_LOOP_STABLE
from specgate.approximations.opened import OpenedLoop
from specgate.approximations.pade import of_dead_time, phase_error
from specgate.frequency.questions import Direction
from specgate.frequency.rational_loop import RationalLoop
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction
from specgate.terms.enclosed import ends
from specgate.terms.precision import working_precision

_NO_FACTOR = "no dead time that is a factor of L"
_SOURCE = "M. Vajta, Some remarks on Pade-approximations, 2000"


def _margin(order: int) -> Callable[[OpenedLoop, Arguments], Answer]:
    def evaluate(opened: OpenedLoop, arguments: Arguments) -> Answer:
        found = opened.late
        if found is None:
            return Answer.nothing(f"there is {_NO_FACTOR}")
        rest, dead_time = found
        late = of_dead_time(order, dead_time)
        whole = TransferFunction(rest.numerator * late.numerator, rest.denominator * late.denominator)
        stable = is_hurwitz(whole.numerator + whole.denominator)
        return RationalLoop(whole, stable).phase_margin(arguments.over)

    return evaluate


def _error(opened: OpenedLoop, order: int, *directions: Direction) -> Answer | None:
    """Return the greatest phase error at the gain crossings that these directions use up, rad; None without any."""
    found = opened.late
    crossings = [one for one in opened.gain_crossings if one.direction in directions and one.frequency.absent is None]
    if found is None or not crossings:
        return None

    def at(frequency: Answer) -> Answer:
        def refine(bits: int) -> arb:
            ball = frequency.enclose(bits)
            with working_precision(bits):
                return phase_error(order, ball * found[1], bits)

        return Answer.of_ball(refine)

    return negative(smallest([negative(at(one.frequency)) for one in crossings]))


def _dead_time(opened: OpenedLoop, _: Arguments, __: fmpq | None) -> Found:
    return words(_NO_FACTOR if opened.late is None else "there is one", opened.late is not None)


def _at_crossover(order: int) -> Condition:
    def find(opened: OpenedLoop, _: Arguments, threshold: fmpq | None) -> Found:
        error = _error(opened, order, "lag", "lead")
        if error is None or threshold is None:
            return words("no gain crossover", opened.late is not None)
        return at_most(combined(lambda turn: turn * 180 / arb.pi(), error), threshold)

    return Condition(
        key="phase_error",
        name="phase error at the gain crossovers, deg",
        source="common practice",
        required="<= {threshold}",
        find=find,
        threshold=fmpq(5),
        tighter="smaller",
    )


def _accuracy(order: int) -> Callable[[OpenedLoop, Arguments], Accuracy | None]:
    """Return what the phase errors leave.

    The phase margin is the least distance of -L from 1 along the circle, over the crossings. Where it is greater than
    the greatest error, no crossing passes -1 between the approximant and the dead time: one that lag uses up has its
    own error less than is promised, one that lead uses up its own error more. Near half a turn either may be either.
    """

    def accuracy(opened: OpenedLoop, arguments: Arguments) -> Accuracy | None:
        value = _margin(order)(opened, arguments)
        if value.absent is not None or arguments.over is not None:
            return None
        least, most = ends(value.enclose(SHOWN))
        less, more = _greatest(_error(opened, order, "lag")), _greatest(_error(opened, order, "lead"))
        if most + max(less, more) > 3:
            less = more = max(less, more)
        if least <= max(less, more):
            return None
        lower, upper = outward(-more / (least + more), less / (least - less))
        return Accuracy(lower, upper, f"{signed_percent(lower)} to {signed_percent(upper)} % (this loop)")

    return accuracy


def _greatest(error: Answer | None) -> fmpq:
    return fmpq(0) if error is None else ends(error.enclose(SHOWN))[1]


def _variant(name: str, order: int, reach: str) -> Variant:
    return Variant(
        name=name,
        for_=f"gain crossovers up to {reach} over the dead time",
        formula=f"phase margin with the Pade approximant of order {order}",
        source=_SOURCE,
        conditions=(
            CLOSED_LOOP_STABLE,
            Condition(
                key="dead_time",
                name="a dead time that is a factor of L",
                source="derived",
                required="there is one",
                find=_dead_time,
            ),
            _at_crossover(order),
        ),
        evaluate=_margin(order),
        accuracy=_accuracy(order),
    )


VARIANTS = (
    _variant("third_order", 3, "4.05"),
    _variant("first_order", 1, "1.07"),
    _variant("second_order", 2, "2.48"),
    _variant("fourth_order", 4, "5.70"),
    _variant("fifth_order", 5, "7.41"),
)

ROW = Approximation(
    name="pade_dead_time",
    title="Phase margin with a rational function in place of the dead time",
    estimates=("phase_margin",),
    formula="",
    source="",
    conditions=(),
    evaluate=VARIANTS[0].evaluate,
    accuracy=VARIANTS[0].accuracy,
    text=__doc__,
    variants=VARIANTS,
).taken_as("third_order")
