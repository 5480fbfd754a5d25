"""The shape of an assumption of the model that a criterion rests on, and how its numbers are read and written."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Literal

from flint import fmpq

from specgate.approximations.figures import SHOWN
from specgate.compliance.compare import sign
from specgate.compliance.readings import PI_DECIDES, Reading
from specgate.response.answers import Answer
from specgate.terms.places import Place
from specgate.terms.precision import HIGHEST
from specgate.terms.records import record
from specgate.terms.unit import Unit
from specgate.terms.units import UnitTable
from specgate.terms.verdicts import Standing, Trilean

Kind = Literal[
    "valid_to", "pedigree", "stands_for", "dead_time", "hidden_slow_mode", "near_cancellation", "quasi_integrator"
]

SECOND, RADIAN_PER_SECOND, PER_SECOND, DEGREE, PERCENT, RATIO = (
    UnitTable.standard().parse(symbol) for symbol in ("s", "rad/s", "1/s", "deg", "%", "1")
)


@record
class Figured:
    """A number with its name and the unit that it is printed in; the reading is in coherent SI."""

    name: str
    reading: Reading
    unit: Unit


@record
class ModelAssumption:
    """Something that the models of blocks take for granted, under one criterion.

    on: the response, break or loop. subsystem: whose model it is; None where it is the loop's. holds: UNKNOWN where
    nobody can tell. standing: what it leaves to whatever rests on it. words: a sentence on what was found.
    """

    kind: Kind
    on: str
    subsystem: str | None
    holds: Trilean
    standing: Standing
    words: str
    place: Place
    figures: tuple[Figured, ...] = ()


def exceeds(value: Reading, limit: Reading) -> Trilean:
    """Whether a number is greater than another that is exactly known, told with both decimals for pi.

    One without limit is; of one that is not decided nobody can tell.
    """
    found = []
    for answer, bound in ((value.answer, limit.answer), (value.again, limit.again)):
        assert bound.exact is not None
        found.append(_exceeds(answer, bound.exact))
    return found[0] if found[0] is found[1] else Trilean.UNKNOWN


def _exceeds(answer: Answer, bound: fmpq) -> Trilean:
    if answer.absent is not None:
        return Trilean.YES if answer.absent.infinite else Trilean.UNKNOWN
    decided = sign(answer, bound)
    return Trilean.UNKNOWN if decided is None else Trilean.of(decided > 0)


def greatest(answers: Sequence[Answer]) -> Answer:
    """Return the greatest of some numbers, the first of those that cannot be told apart."""
    balls = [one.enclose(SHOWN) for one in answers]
    return next(one for one, own in zip(answers, balls, strict=True) if not any(other > own for other in balls))


UNTOLD = f"that cannot be told at {HIGHEST} bits, or {PI_DECIDES}"
