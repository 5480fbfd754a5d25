"""Numbers read off poles and zeros: exact where they are rational, refinable balls else."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from math import isqrt

from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.terms.precision import working_precision

SHOWN = 128
"""Bits at which figures are compared with each other and shown."""


def quotient(above: Answer, below: Answer) -> Answer:
    """Return above / below; `below` must not be zero."""
    if above.exact is not None and below.exact is not None:
        return Answer.of_exact(above.exact / below.exact)
    return combined(lambda x, y: x / y, above, below)


def product(first: Answer, second: Answer) -> Answer:
    """Return first * second, exact where both are."""
    if first.exact is not None and second.exact is not None:
        return Answer.of_exact(first.exact * second.exact)
    return combined(lambda x, y: x * y, first, second)


def root(square: Answer) -> Answer:
    """Return the square root, exact where it is rational."""
    if square.exact is not None:
        top, bottom = isqrt(int(square.exact.p)), isqrt(int(square.exact.q))
        if fmpq(top * top, bottom * bottom) == square.exact:
            return Answer.of_exact(fmpq(top, bottom))
    return combined(lambda x: x.sqrt(), square)


def total(parts: Sequence[Answer]) -> Answer:
    """Return the sum, exact where every part is."""
    if all(part.exact is not None for part in parts):
        return Answer.of_exact(sum((part.exact for part in parts if part.exact is not None), fmpq(0)))
    return combined(lambda *balls: sum(balls, arb(0)), *parts)


def negative(value: Answer) -> Answer:
    """Return minus a number."""
    return Answer.of_exact(-value.exact) if value.exact is not None else combined(lambda ball: -ball, value)


def smallest(parts: Sequence[Answer]) -> Answer:
    """Return the smallest of some numbers: the very one where it is certain which that is, its exactness kept."""
    balls = [part.enclose(SHOWN) for part in parts]
    for index, ball in enumerate(balls):
        if all(ball < other for other in balls[:index] + balls[index + 1 :]):
            return parts[index]
    if all(part.exact is not None for part in parts):
        return Answer.of_exact(min(part.exact for part in parts if part.exact is not None))
    return combined(_least, *parts)


def combined(of: Callable[..., arb], *operands: Answer) -> Answer:
    """Return a function of numbers as a ball that is refined by refining them."""

    def refine(bits: int) -> arb:
        balls = [operand.enclose(bits) for operand in operands]
        with working_precision(bits):
            return of(*balls)

    return Answer.of_ball(refine)


def _least(*balls: arb) -> arb:
    smallest_ball = balls[0]
    for ball in balls[1:]:
        smallest_ball = smallest_ball.min(ball)
    return smallest_ball
