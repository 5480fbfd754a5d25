"""The slow tail that a pole near the origin leaves is taken off the response; the rest of it is kept.

A slow pole -p with a small residue, of a leak or a heat path behind a much faster loop, adds r e^(-p t) to the step
response, r in parts of the change. It is gone only after several 1/p; whether that matters depends on r alone, not on
how slow the pole is. A response with a lag of 1 s and r = -1.9 % at p = 0.001 1/s settles within 2 % after 6.8 s; with
r = -2.1 % it does so after 48.8 s. So r is asked to stay inside the band.

The pole is the slowest one; it has to be real and single, or its term is another one. What is left is
F(s) = G(s) - r s/(s + p), r = N(-p)/(-p D'(-p)) of G = N/D: it does not have the pole any more, has the same value
at s = 0, and starts with a jump of -r. The formula's value is the settling time of this rest, computed and proved; a
pole that is not rational is divided out to some seventy digits. Its accuracy is stated for this very response: at any
time the two differ by |r| e^(-p t), at most |r|, so that the response enters a band b for good not before the rest
enters b + |r|, and not after it enters b - |r|.
"""

from __future__ import annotations

from flint import arb, fmpq, fmpq_poly

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.cancellation import Remainder, rational
from specgate.approximations.conditions import SETTLES, at_most, words
from specgate.approximations.features import Features
from specgate.approximations.figures import combined, quotient
from specgate.approximations.spots import Spot
from specgate.measures.measure import Arguments
from specgate.measures.table import MEASURES
from specgate.response.answers import Answer
from specgate.response.step import StepResponse

_SETTLING = "settling_time"
_NO_TAIL = "the slowest pole is not a real and single one"


def _slow(features: Features) -> Spot | None:
    """Return the slowest pole where it is real, single and left of the axis."""
    slowest = features.slowest
    if slowest is None or slowest.oscillates or not features.stable:
        return None
    return slowest if sum(pole.index == slowest.index for pole in features.poles) == 1 else None


def _remainder(features: Features) -> Remainder | None:
    """Return the response without the term of its slowest pole; None where there is no such term."""
    pole, gain = _slow(features), features.steady_gain
    if pole is None or not gain:
        return None
    rate, numerator, denominator = rational(pole.decay), features.channel.numerator, features.channel.denominator
    factor = fmpq_poly([rate, 1])
    others, _ = divmod(denominator, factor)
    size = numerator(-rate) / (-rate * others(-rate))
    above, _ = divmod(numerator - size * fmpq_poly([0, 1]) * others, factor)
    above *= gain * others[0] / above[0]  # as it is already for a rational pole: one final value, exactly
    return Remainder(features.of(above, others), StepResponse(above, others, 1 / gain), _size(features, pole, gain))


def _size(features: Features, pole: Spot, gain: fmpq) -> Answer:
    """Return the amplitude of the tail, in parts of the change: |N(-p)/(p D'(-p) G(0))|."""
    numerator, slope = features.channel.numerator, features.channel.denominator.derivative()
    if pole.decay.exact is not None:
        rate = pole.decay.exact
        return Answer.of_exact(abs(numerator(-rate) / (rate * slope(-rate) * gain)))
    return combined(lambda rate: abs(_at(numerator, -rate) / (rate * _at(slope, -rate) * gain)), pole.decay)


def _at(polynomial: fmpq_poly, place: arb) -> arb:
    value = arb(0)
    for coefficient in reversed(polynomial.coeffs()):
        value = value * place + coefficient
    return value


def _rest(features: Features, arguments: Arguments) -> Answer:
    found = features.once(_remainder)
    if found is None:
        return Answer.nothing(_NO_TAIL)
    read = MEASURES[_SETTLING].read
    assert read is not None
    answer: Answer = read(found.rest.subject, arguments)
    return answer


def _pole(features: Features, _: Arguments, __: fmpq | None) -> Found:
    pole = _slow(features)
    return words("it is not", False) if pole is None else words("it is", True)


def _tail(features: Features, arguments: Arguments, threshold: fmpq | None) -> Found:
    found = features.once(_remainder)
    if found is None or threshold is None or arguments.band is None:
        return words(_NO_TAIL, False)
    return at_most(quotient(found.tail, Answer.of_exact(found.width(arguments.band))), threshold)


def _accuracy(features: Features, arguments: Arguments) -> Accuracy | None:
    found = features.once(_remainder)
    return None if found is None or arguments.band is None else found.of_settling(arguments.band)


ROW = Approximation(
    name="small_tail",
    title="A slow tail of small amplitude is left out",
    estimates=(_SETTLING,),
    formula="the same response without the term of its slowest pole",
    source="common practice; how small the tail has to be: derived",
    conditions=(
        SETTLES,
        Condition(
            key="pole",
            name="the slowest pole is real and single",
            source="derived",
            required="left of the axis, of first order",
            find=_pole,
        ),
        Condition(
            key="tail",
            name="amplitude of the tail that is left out, in parts of the band",
            source="derived",
            required="<= {threshold}",
            find=_tail,
            threshold=fmpq(1),
            tighter="smaller",
        ),
    ),
    evaluate=_rest,
    accuracy=_accuracy,
    text=__doc__,
)
