"""What is told of the proof of a number that was searched in a sum of modes (see `specgate.response.accounts`)."""

from __future__ import annotations

from collections.abc import Iterable

from flint import arb, fmpq

from specgate.response.accounts import Account, Footing, radius_of, rounded_up
from specgate.response.answers import Answer
from specgate.response.course import Course
from specgate.response.deviation import LOWEST
from specgate.response.modes import Mode, power_of_two
from specgate.terms.precision import working_precision

MODES = "a sum of modes e^(pt) at certified poles p, with residues in balls; between two instants Taylor's remainder"


def modal_account(
    course: Course, method: str, *, brackets: int | None = None, since: fmpq | None = None, **counts: int
) -> Account:
    """Say what a search in a sum of modes rests on.

    brackets: intervals with one proved change of sign each that hold what is searched. since: normalised time from
    which on a bound, and no search, excludes it.
    """
    deviation = course.deviation
    expansion = deviation.at(LOWEST)
    until = None if since is None else rounded_up(deviation.to_time(arb(since), LOWEST))
    footing = modal_footing(MODES, expansion.modes, expansion.bits, deviation.time_exponent)
    return Account(method, footing, brackets, until, counts)


def modal_footing(ground: str, modes: Iterable[Mode], bits: int, time_exponent: int = 0) -> Footing:
    """Return what a sum of modes stands on; their poles are in units of 2^time_exponent per second."""
    found = tuple(modes)
    poles = sum(len(mode.coefficients) * (2 if mode.oscillates else 1) for mode in found)
    with working_precision(bits):
        scale = power_of_two(time_exponent)
        radius = max((radius_of(mode.pole.real * scale, mode.pole.imag * scale) for mode in found), default=0.0)
    return Footing(ground, poles, radius, bits)


def together(method: str, **parts: Answer) -> Account:
    """Say that a number is made of others, each with its own account."""
    return Account(method, parts={name: part.how() for name, part in parts.items() if part.how is not None})
