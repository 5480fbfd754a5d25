"""The least or the greatest of several answers, each with what belongs to it."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import replace
from functools import reduce

from flint import arb, fmpq

from specgate.frequency.spots import Sign, sign_of
from specgate.response.answers import Answer
from specgate.response.extremes import EQUAL_BITS
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.verdicts import Proof


@record
class Candidate:
    """A value and what is printed beside it. Of equal ones the first is chosen."""

    value: Answer
    at: Mapping[str, Answer | str]

    @property
    def answer(self) -> Answer:
        """The value with what belongs to it."""
        return replace(self.value, at=self.at)


def least(candidates: Iterable[Candidate]) -> Candidate | None:
    """Return the least of some candidates with values; None where there are none."""
    return _best(list(candidates), -1)


def greatest(candidates: Iterable[Candidate]) -> Candidate | None:
    """Return the greatest of some candidates with values; None where there are none."""
    return _best(list(candidates), 1)


def order(first: Answer, second: Answer) -> Sign | None:
    """Return the sign of first minus second; None where it is not told within EQUAL_BITS."""
    if first.exact is not None and second.exact is not None:
        return sign_of(first.exact - second.exact)
    bits = 64
    while bits <= EQUAL_BITS:
        one, other = first.enclose(bits), second.enclose(bits)
        if one > other:
            return 1
        if one < other:
            return -1
        if bits == 128:
            found = _exactly(first, second)
            if found is not None:
                return found
        bits *= 2
    return None


def order_of(first: Answer, second: Answer) -> int:
    """Return the order of two frequencies, infinite ones last; 0 where they are not told apart."""
    if first.absent is not None or second.absent is not None:
        return (first.absent is not None) - (second.absent is not None)
    return order(first, second) or 0


def _exactly(first: Answer, second: Answer) -> Sign | None:
    if second.exact is not None and first.against is not None:
        return first.against(second.exact)
    if first.exact is not None and second.against is not None:
        found = second.against(first.exact)
        return None if found is None else _OPPOSITE[found]
    return None


_OPPOSITE: Mapping[Sign, Sign] = {-1: 1, 0: 0, 1: -1}


def _best(candidates: Sequence[Candidate], wanted: Sign) -> Candidate | None:
    if not candidates:
        return None
    chosen = candidates[0]
    for candidate in candidates[1:]:
        if order(candidate.value, chosen.value) == wanted:
            chosen = candidate
    # what is told to be no better than the chosen one is out; the best is among the others
    level = [one.value for one in candidates if one is chosen or order(one.value, chosen.value) in (None, wanted)]
    return chosen if len(level) == 1 else Candidate(_joined(level, wanted), chosen.at)


def _joined(values: Sequence[Answer], wanted: Sign) -> Answer:
    """Return one value for several that EQUAL_BITS do not tell apart: the hull of their balls holds the best."""

    def refine(bits: int) -> arb:
        balls = [value.enclose(bits) for value in values]
        with working_precision(bits + 16):
            return reduce(lambda one, other: one.union(other), balls)

    def against(limit: fmpq) -> Sign | None:
        signs = [order(value, Answer.of_exact(limit)) for value in values]
        known = [sign for sign in signs if sign is not None]
        if len(known) < len(signs):
            return None
        return max(known) if wanted == 1 else min(known)

    return Answer(Proof.ENCLOSED, refine=refine, against=against)
