"""How readers get at what a subject holds, and how they combine balls into answers."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

from flint import arb, fmpq

from specgate.measures.measure import Arguments, Reader
from specgate.measures.subjects import BreakSubject, ResponseSubject
from specgate.response.answers import Absent, Answer, Fragile
from specgate.response.budget import OutOfWork
from specgate.response.extremes import Extreme
from specgate.response.questions import TimeResponse
from specgate.response.record import together
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.verdicts import Proof

_LATER = "this kind of loop is not answered over frequency by this version"

TimeReader = Callable[[TimeResponse, Arguments], Answer]


def missing(absent: Absent) -> Answer:
    """Return the answer of a question whose subject does not exist."""
    return Answer(Proof.EXACT if absent.proved else Proof.ESTIMATED, absent=absent)


def decided(truth: bool | None) -> Answer:
    """Return the answer to whether every mode decays, which dead times may leave undecided."""
    if truth is None:
        return Answer.undecided(
            "the loop is too near the limit of stability, or its dead times act too directly, to tell"
        )
    return Answer.of_truth(truth)


def in_time(read: TimeReader) -> Reader:
    """Make a reader of a response subject from one of its response in time.

    A mode that grows unseen inside the channel (`void`) leaves no measure over time.
    """

    def reader(subject: ResponseSubject, arguments: Arguments) -> Answer:
        if subject.void is not None:
            return missing(subject.void)
        if isinstance(subject.response, Absent):
            return missing(subject.response)
        return read(subject.response, arguments)

    return reader


def over_frequency(ask: Callable[[Any, Arguments], Answer]) -> Reader:
    """Make a reader of a break or a response from a question to what each is over frequency.

    A mode that grows unseen inside a channel (`void`) leaves no measure of a response.
    """

    def reader(subject: BreakSubject | ResponseSubject, arguments: Arguments) -> Answer:
        if isinstance(subject, ResponseSubject) and subject.void is not None:
            return missing(subject.void)
        found = subject.loop if isinstance(subject, BreakSubject) else subject.gain
        try:
            return Answer.undecided(_LATER) if found is None else ask(found, arguments)
        except OutOfWork as limit:
            return Answer.undecided(limit.reason)

    return reader


def with_time(extreme: Extreme) -> Answer:
    """Return the value of an extreme with its time beside it."""
    value = extreme.value
    told = value.absent is None or value.absent.infinite
    return replace(value, at={"time": extreme.time}) if told and extreme.time.absent is None else value


def change(response: TimeResponse) -> fmpq | Answer:
    """Return the change from the value before the step to the final value, or the answer why there is none."""
    final = response.final_value()
    return final if final.exact is None else final.exact


def no_change(measure: str, instead: str) -> Answer:
    """Return the answer of a measure that counts in parts of a change which is zero."""
    return Answer.nothing(f"the response returns to where it was before the step, so {measure}: {instead}")


def sign_of(refine: Callable[[int], arb]) -> int | None:
    """Return the sign of a number known by balls, or None where even the narrowest ball holds zero."""
    bits = 64
    while bits <= HIGHEST:
        ball = refine(bits)
        with working_precision(bits):
            if ball > 0:
                return 1
            if ball < 0:
                return -1
            if ball.is_zero():
                return 0
        bits *= 2
    return None


def _carried(fragile: Fragile | None, through: Callable[[arb, int], arb]) -> Fragile | None:
    """Return what is fragile of a number that is made of a fragile one; `through` makes it of the other candidate."""
    if fragile is None or fragile.other is None:
        return fragile
    other = fragile.other
    return Fragile(fragile.reason, lambda bits: through(other(bits), bits))


def positive_part(value: Answer) -> Answer:
    """Return max(0, value): exactly zero only where the value is proved not to be positive."""
    if value.absent is not None:
        return value
    if value.exact is not None:
        return Answer.of_exact(max(value.exact, fmpq(0)))
    sign = sign_of(value.enclose)
    if sign is None:
        fragile = _carried(value.fragile, lambda other, _: other.nonnegative_part())
        return replace(Answer.of_ball(lambda bits: value.enclose(bits).nonnegative_part(), fragile), how=value.how)
    return value if sign > 0 else Answer.of_exact(0)


def affine(value: Answer, factor: fmpq, offset: fmpq) -> Answer:
    """Return factor * value + offset."""
    if value.absent is not None:
        return value
    if value.exact is not None:
        return Answer.of_exact(value.exact * factor + offset)

    def mapped(ball: arb, bits: int) -> arb:
        with working_precision(bits):
            return ball * factor + offset

    found = Answer.of_ball(lambda bits: mapped(value.enclose(bits), bits), _carried(value.fragile, mapped))
    return replace(found, how=value.how)


def difference(later: Answer, earlier: Answer) -> Answer:
    """Return later - earlier; a missing operand is the answer."""
    for operand in (later, earlier):
        if operand.absent is not None:
            return operand
    if later.exact is not None and earlier.exact is not None:
        return Answer.of_exact(later.exact - earlier.exact)

    def between(start: arb, end: arb, bits: int) -> arb:
        with working_precision(bits):
            return end - start

    fragile = _carried(later.fragile, lambda other, bits: between(earlier.enclose(bits), other, bits))
    fragile = fragile or _carried(earlier.fragile, lambda other, bits: between(other, later.enclose(bits), bits))
    found = Answer.of_ball(lambda bits: between(earlier.enclose(bits), later.enclose(bits), bits), fragile)
    return found.accounted(lambda: together("the later less the earlier", later=later, earlier=earlier))
