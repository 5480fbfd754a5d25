"""A pole is dropped together with a zero beside it; the rest of the response is kept.

"Beside" is not enough. What dropping them leaves out is a tail that decays as slowly as the pole, with an amplitude of
about |1 - p/z| |F(-p)| of the change, where F is the rest. With a pole at 0.05 1/s beside a pair of wn = 1 rad/s and
zeta = 0.5, a zero 5 % below the pole turns a settling time of 8.1 s into 20.3 s, and one 5 % above into 18.2 s, because
5 % is more than the band of 2 %. So the tail is asked to stay inside the band. Neither may lie on the axis or right of
it: a growing mode that is only nearly hidden still grows.

The couple is the pole and the zero left of the axis, both real or both complex, whose ratio is nearest to 1. The
formula's value is that of the rest, computed and proved, with the same value at s = 0; a pole or zero that is not
rational is divided out to some seventy digits. Its accuracy is stated for this very response: what is left out never
exceeds the proved peak a of the tail, so that the response enters a band b for good not before the rest enters
b + a and not after it enters b - a, and it passes a level between the times at which the rest passes a lower and a
higher one. In a chain, what follows is read from the rest: `[near_cancellation, second_order_settling]`.
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.cancellation import Cancellation, cancellation
from specgate.approximations.conditions import SETTLES, at_most, words
from specgate.approximations.features import Features
from specgate.approximations.figures import quotient
from specgate.measures.measure import Arguments
from specgate.measures.table import MEASURES
from specgate.response.answers import Absent, Answer
from specgate.terms.verdicts import Proof, Trilean

_SETTLING = "settling_time"
_SHAPE = ("overshoot", "rise_time", "delay_time")
_NO_COUPLE = "no pole with a zero of its kind left of the axis"


def _rest(features: Features, arguments: Arguments) -> Answer:
    rest = _reduced(features, arguments)
    if isinstance(rest, Absent):
        return Answer(Proof.EXACT, absent=rest)
    read = MEASURES[arguments.measure or _SETTLING].read
    assert read is not None
    answer: Answer = read(rest.subject, arguments)
    return answer


def _reduced(features: Features, _: Arguments) -> Features | Absent:
    """Return the response without the couple."""
    found = features.once(cancellation)
    return Absent(f"there is {_NO_COUPLE}") if found is None else found.rest


def _couple(features: Features, _: Arguments, __: fmpq | None) -> Found:
    found = features.once(cancellation)
    return words("none", False) if found is None else words(found.couple.words, True)


def _tail_in_band(features: Features, arguments: Arguments, threshold: fmpq | None) -> Found:
    found, band = features.once(cancellation), arguments.band
    if found is None or band is None:
        return words(_NO_COUPLE, False)
    return _within(found, found.width(band), threshold)


def _tail(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    found = features.once(cancellation)
    return words(_NO_COUPLE, False) if found is None else _within(found, fmpq(1), threshold)


def _within(found: Cancellation, yardstick: fmpq, threshold: fmpq | None) -> Found:
    """Find the tail in parts of a yardstick, which is in parts of the change."""
    if found.tail.absent is not None or threshold is None:
        return Found(found.tail.absent.reason if found.tail.absent is not None else None, Trilean.UNKNOWN)
    return at_most(quotient(found.tail, Answer.of_exact(yardstick)), threshold)


def _accuracy(features: Features, arguments: Arguments) -> Accuracy | None:
    found = features.once(cancellation)
    return None if found is None or found.tail.absent is not None else _stated(found, arguments)


def _stated(found: Cancellation, arguments: Arguments) -> Accuracy | None:
    if arguments.measure == "overshoot":
        return found.of_overshoot()
    if arguments.measure == "rise_time":
        return found.of_rise(arguments.lower, arguments.upper)
    if arguments.measure == "delay_time":
        return found.of_rise(fmpq(0), fmpq(1, 2))
    return None if arguments.band is None else found.of_settling(arguments.band)


ROW = Approximation(
    name="near_cancellation",
    title="A pole is dropped with a zero beside it",
    estimates=(_SETTLING, *_SHAPE),
    formula="the same response without the pole and the zero",
    source="common practice; how small the tail has to be: derived",
    conditions=(
        SETTLES,
        Condition(
            key="couple",
            name="a pole and a zero beside it, both left of the axis",
            source="derived",
            required="one of each, both real or both complex",
            find=_couple,
        ),
        Condition(
            key="tail_in_band",
            name="greatest value of the tail that is left out, in parts of the band",
            source="derived",
            required="<= {threshold}",
            find=_tail_in_band,
            threshold=fmpq(1),
            tighter="smaller",
            concerns=(_SETTLING,),
        ),
        Condition(
            key="tail",
            name="greatest value of the tail that is left out, in parts of the change",
            source="derived",
            required="<= {threshold}",
            find=_tail,
            threshold=fmpq(1, 50),
            tighter="smaller",
            concerns=_SHAPE,
        ),
    ),
    evaluate=_rest,
    accuracy=_accuracy,
    text=__doc__,
    reduce=_reduced,
)
