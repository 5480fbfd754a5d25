"""What a question about a system is answered with: a value that can be refined, or why there is none."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Literal

from flint import arb, fmpq

from specgate.response.accounts import Account
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.verdicts import Proof


@record
class Absent:
    """Why there is no value.

    `proved`: that there is none is exactly known (the settling time of an unstable response), so a
    requirement on it is not met; otherwise the question is undecided and stays open. `infinite`: the value is
    without limit (a margin that nothing uses up) and meets every `at_least`.
    """

    reason: str
    proved: bool = True
    infinite: bool = False


@record
class Fragile:
    """A result that a very small change of the model would move far: why, and the value it would jump to."""

    reason: str
    other: Callable[[int], arb] | None = None


@record
class Answer:
    """A proved answer: exactly one of `truth`, `exact`, `refine`, `absent` decides (exact also carries refine).

    truth:   answer to a yes/no question.
    exact:   rational value (also whole numbers), coherent SI.
    refine:  function of a working precision in bits that returns a ball proved to contain the value; more
             bits give a ball that is no wider, up to its own limit.
    absent:  no value, and why.
    at:      what belongs to the answer and is printed beside it, by the names of the results format: `frequency`
             (rad/s), `time` (s), `value` and `limit` (the signal's unit, SI), `direction` (a word).
    how:     how the value was obtained, for the record of a proof; computed where it is asked for.
    against: exact sign of the value minus a rational (SI), for algebraic values, of which no ball can tell that they
             are equal to a limit; it returns None where it cannot tell either.
    """

    proof: Proof
    truth: bool | None = None
    exact: fmpq | None = None
    refine: Callable[[int], arb] | None = None
    absent: Absent | None = None
    fragile: Fragile | None = None
    at: Mapping[str, Answer | str] | None = None
    how: Callable[[], Account] | None = None
    against: Callable[[fmpq], Literal[-1, 0, 1] | None] | None = None

    @staticmethod
    def of_exact(value: fmpq | int) -> Answer:
        """Return an exactly known rational."""
        return Answer(Proof.EXACT, exact=fmpq(value))

    @staticmethod
    def of_truth(truth: bool) -> Answer:
        """Return an exactly known yes or no."""
        return Answer(Proof.EXACT, truth=truth)

    @staticmethod
    def of_ball(refine: Callable[[int], arb], fragile: Fragile | None = None) -> Answer:
        """Return a value known by enclosures of any width."""
        return Answer(Proof.ENCLOSED, refine=refine, fragile=fragile)

    @staticmethod
    def nothing(reason: str, *, infinite: bool = False) -> Answer:
        """Return the proof that there is no (finite) value."""
        return Answer(Proof.EXACT, absent=Absent(reason, proved=True, infinite=infinite))

    @staticmethod
    def undecided(reason: str) -> Answer:
        """Return a question left open: a work limit was reached, or it is not answered by this version."""
        return Answer(Proof.ESTIMATED, absent=Absent(reason, proved=False))

    def accounted(self, how: Callable[[], Account]) -> Answer:
        """Return the answer with how it was obtained; a missing one, or one that says so already, as it is."""
        return self if self.absent is not None or self.how is not None else replace(self, how=how)

    def enclose(self, bits: int) -> arb:
        """Return a ball that contains the value. Raises ValueError if there is none."""
        if self.exact is not None:
            with working_precision(bits):
                return arb(self.exact)
        if self.refine is None:
            raise ValueError("an answer without a value has no enclosure")
        return self.refine(bits)
