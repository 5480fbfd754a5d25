"""Square roots, reciprocals and quotients of answers, with exact signs against a rational where there are such."""

from __future__ import annotations

from flint import arb, fmpq

from specgate.frequency.spots import Sign, sign_of
from specgate.response.answers import Answer
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Proof


def root_of(square: Answer) -> Answer:
    """Return the square root of a value that is not negative: exact where it is rational."""
    if square.exact is not None:
        return root_of_rational(square.exact)

    def refine(bits: int) -> arb:
        ball = square.enclose(bits + 8)
        with working_precision(bits + 8):
            return ball.sqrt()

    def against(limit: fmpq) -> Sign | None:
        if limit < 0:
            return 1
        return None if square.against is None else square.against(limit * limit)

    return Answer(Proof.ENCLOSED, refine=refine, against=against)


def root_of_rational(square: fmpq) -> Answer:
    """Return the square root of a rational that is not negative."""
    if square.p.is_square() and square.q.is_square():
        return Answer.of_exact(fmpq(square.p.isqrt(), square.q.isqrt()))

    def refine(bits: int) -> arb:
        with working_precision(bits + 8):
            return arb(square).sqrt()

    def against(limit: fmpq) -> Sign:
        return 1 if limit < 0 else sign_of(square - limit * limit)

    return Answer(Proof.ENCLOSED, refine=refine, against=against)


def reciprocal(value: Answer) -> Answer:
    """Return 1 / value of a value that is not zero."""
    if value.exact is not None:
        return Answer.of_exact(1 / value.exact)

    def refine(bits: int) -> arb:
        ball = value.enclose(bits + 8)
        with working_precision(bits + 8):
            return 1 / ball

    def against(limit: fmpq) -> Sign | None:
        # for positive values: 1/v - l has the sign of 1/l - v
        if limit <= 0:
            return 1
        found = None if value.against is None else value.against(1 / limit)
        return None if found is None else sign_of(fmpq(-found))

    return Answer(Proof.ENCLOSED, refine=refine, against=against)


def quotient(above: Answer, below: Answer) -> Answer:
    """Return above / below; `below` is not zero."""
    if above.exact is not None and above.exact == 0:
        return above

    def refine(bits: int) -> arb:
        numerator, denominator = above.enclose(bits + 8), below.enclose(bits + 8)
        with working_precision(bits + 8):
            return numerator / denominator

    return Answer(Proof.ENCLOSED, refine=refine)


def scaled(value: Answer, factor: fmpq) -> Answer:
    """Return factor * value, factor > 0."""
    if value.exact is not None:
        return Answer.of_exact(value.exact * factor)

    def refine(bits: int) -> arb:
        ball = value.enclose(bits + 8)
        with working_precision(bits + 8):
            return ball * factor

    return Answer(Proof.ENCLOSED, refine=refine)
