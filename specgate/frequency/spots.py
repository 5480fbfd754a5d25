"""Spots on the frequency axis, and exact signs of polynomials there.

On the axis everything is a polynomial in x = omega^2 (times omega). A spot is a value of x in [0, infinity]: a rational
(zero included), an irrational root of a polynomial with whole coefficients, or infinity. At each of them the sign of
any other polynomial is decided exactly and a quotient of two is enclosed to any precision.

Roots. The positive roots of a square-free polynomial are isolated exactly (`systems.real_roots`). Each is then enclosed
by itself, first where the polynomial is monotone (`narrowing`), then to any precision (`newton`).

Signs. For a root r of a square-free f and any p let g = gcd(f, p) and f = g h. g and h have no root in common and r is
a root of one of them: refining until g or h is proved not to vanish at r decides whether p(r) = 0. If it is not zero,
refining p(r) itself ends.
"""

from __future__ import annotations

from typing import Literal, Protocol, cast

from flint import arb, fmpq, fmpq_poly, fmpz_poly

from specgate.frequency.chebyshev import chebyshev_modulo
from specgate.frequency.narrowing import monotone
from specgate.frequency.newton import Function, Zero
from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.systems.polynomials import order_at_origin, primitive
from specgate.systems.real_roots import TooClose, may_have_rational_roots, positive_intervals
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.verdicts import Proof

Sign = Literal[-1, 0, 1]

FIRST = 64
"""Bits at which signs at roots are looked for first; roots are refined as far as a question needs."""
_EXACT_FROM = 256
"""Bits at which a polynomial that may vanish at a root is looked at by its greatest common divisor with the other."""

_HIGHEST = 200
"""Degree beyond which isolating all roots would take too long (some seconds at this one)."""

_TOO_CLOSE = "frequencies that decide lie too close together to be told apart"

_NIVEN = (-2, -1, 0, 1, 2)
"""Twice the rational cosines of rational parts of a turn (Niven 1956, theorem 6.16)."""

_MOST = 16 * HIGHEST
"""Bits beyond which even the sign of a number that is not zero is given up; no polynomial of sane size gets there."""


class Spot(Protocol):
    """A value of x = omega^2 in [0, infinity]."""

    def sign(self, p: fmpq_poly) -> Sign:
        """Return the sign of p(x), at infinity that of its limit (exact)."""

    def enclose(self, bits: int) -> arb:
        """Return a ball of about `bits` relative bits that holds x. Raises ValueError at infinity."""

    def ratio(self, p: fmpq_poly, q: fmpq_poly) -> Answer:
        """Return p(x) / q(x), q(x) not zero; at infinity its limit, which has to be finite."""

    def turns_round(self, p: fmpq_poly, q: fmpq_poly, times: int) -> bool:
        """Return whether the cosine p(x) / q(x) is that of an angle of which so many times are whole turns."""


class Rational:
    """A rational x >= 0."""

    def __init__(self, x: fmpq) -> None:
        self.x = x

    def sign(self, p: fmpq_poly) -> Sign:
        """Return the sign of p(x)."""
        return sign_of(p(self.x))

    def enclose(self, bits: int) -> arb:
        """Return a ball that holds x."""
        with working_precision(bits):
            return arb(self.x)

    def ratio(self, p: fmpq_poly, q: fmpq_poly) -> Answer:
        """Return p(x) / q(x), exactly."""
        return Answer.of_exact(p(self.x) / q(self.x))

    def turns_round(self, p: fmpq_poly, q: fmpq_poly, times: int) -> bool:
        """Return whether T_times(p/q) = 1: a rational cosine goes with a rational part of a turn only at 0, 1/2, 1."""
        cosine = p(self.x) / q(self.x)
        return bool(fmpq_poly(fmpz_poly.chebyshev_t(times))(cosine) == 1) if 2 * cosine in _NIVEN else False


class Infinity:
    """The far end of the axis."""

    def sign(self, p: fmpq_poly) -> Sign:
        """Return the sign that p has for all large x."""
        return sign_of(p.leading_coefficient()) if p else 0

    def enclose(self, bits: int) -> arb:
        """Raise: there is no ball about infinity."""
        raise ValueError("infinity has no enclosure")

    def ratio(self, p: fmpq_poly, q: fmpq_poly) -> Answer:
        """Return lim p/q. Raises ValueError where it is infinite."""
        if p.degree() > q.degree():
            raise ValueError("this quotient grows without limit")
        if p.degree() < q.degree():
            return Answer.of_exact(0)
        return Answer.of_exact(p.leading_coefficient() / q.leading_coefficient())

    def turns_round(self, p: fmpq_poly, q: fmpq_poly, times: int) -> bool:
        """Return whether the limit of p/q is such a cosine: L is real at infinity."""
        return p.degree() == q.degree() and p.leading_coefficient() == q.leading_coefficient()


class Root:
    """An irrational positive root of a square-free polynomial with whole coefficients."""

    def __init__(self, polynomial: fmpz_poly, left: fmpq, right: fmpq) -> None:
        """Take the root in (left, right), which is the only one there; right is no root."""
        self._polynomial = polynomial
        ball, rising = monotone(polynomial, left, right)
        self._zero = Zero(_at(polynomial), _at(polynomial.derivative()), ball, rising=rising)

    def enclose(self, bits: int) -> arb:
        """Return a ball of at least `bits` relative bits that holds the root; it only ever gets narrower."""
        return self._zero.enclose(bits)

    def sign(self, p: fmpq_poly) -> Sign:
        """Return the sign of p at the root."""
        whole, bits = p.numer(), FIRST
        while bits <= _MOST:
            found = self._sign_at(whole, bits)
            if found is not None:
                return found
            if bits == _EXACT_FROM and self._is_root_of(whole):
                return 0
            bits *= 2
        raise ArithmeticError("the sign of a number that is not zero could not be found")

    def _sign_at(self, p: fmpz_poly, bits: int) -> Sign | None:
        ball = self.enclose(bits)
        with working_precision(bits + 16):
            value = p(ball)
            return 1 if value > 0 else -1 if value < 0 else 0 if value.is_zero() else None

    def _is_root_of(self, p: fmpz_poly) -> bool:
        common = self._polynomial.gcd(p)
        if common.degree() < 1:
            return False
        rest = self._polynomial // common
        bits = _EXACT_FROM
        while bits <= _MOST:
            if self._sign_at(rest, bits) is not None:
                return True
            if self._sign_at(common, bits) is not None:
                return False
            bits *= 2
        raise ArithmeticError("two roots could not be told apart")

    def ratio(self, p: fmpq_poly, q: fmpq_poly) -> Answer:
        """Return p / q at the root."""
        above, below, factor = p.numer(), q.numer(), fmpq(q.denom(), p.denom())
        if self._sign_at(above, FIRST) is None and self.sign(p) == 0:
            return Answer.of_exact(0)

        def refine(bits: int) -> arb:
            precision = bits + 16
            while True:
                ball = self.enclose(precision)
                with working_precision(precision + 16):
                    value = above(ball) / below(ball) * factor
                if value.rel_accuracy_bits() >= bits:
                    return value
                precision *= 2

        def against(limit: fmpq) -> Sign:
            return cast("Sign", self.sign(p - q * limit) * self.sign(q))

        return Answer(Proof.ENCLOSED, refine=refine, against=against)

    def turns_round(self, p: fmpq_poly, q: fmpq_poly, times: int) -> bool:
        """Return whether T_times(p/q) = 1 at the root, in the rationals modulo what is left of f without roots of q."""
        modulus = fmpq_poly(self._polynomial)
        modulus //= modulus.gcd(q)
        _, inverse, _ = (q % modulus).xgcd(modulus)
        return self.sign(chebyshev_modulo(times, p * inverse % modulus, modulus) - 1) == 0


def positive_roots(p: fmpq_poly) -> tuple[Spot, ...]:
    """Return the distinct positive roots of a polynomial that is not zero, in rising order; rational ones as such.

    Raises OutOfWork for a polynomial of too high a degree, or with roots too close together.
    """
    whole = primitive(p.right_shift(order_at_origin(p)))
    signs = [c > 0 for c in whole.coeffs() if c != 0]
    if all(signs) or not any(signs):
        return ()  # Descartes: no change of sign among the coefficients, no positive root
    if whole.degree() > _HIGHEST:
        raise OutOfWork(f"a loop of more than order {_HIGHEST // 2} is not answered over frequency")
    square_free = whole // whole.gcd(whole.derivative())
    if square_free.degree() == 1:
        return (Rational(fmpq(-square_free[0], square_free[1])),)
    try:
        intervals = positive_intervals(square_free)
    except TooClose:
        raise OutOfWork(_TOO_CLOSE) from None
    rational = bool(intervals) and may_have_rational_roots(square_free)
    return tuple(_spot(square_free, *interval, rational=rational) for interval in intervals)


def _spot(p: fmpz_poly, left: fmpq, right: fmpq, *, rational: bool) -> Spot:
    """Return a root as what it is: lead * root is a whole number if it is rational (p has whole coefficients).

    rational: whether p may have rational roots at all.
    """
    if left == right:
        return Rational(right)
    root = Root(p, left, right)
    if not rational:
        return root
    lead = p.leading_coefficient()
    bits = int((right * abs(lead)).ceil()).bit_length() + 8
    with working_precision(2 * bits + 64):
        nearest = (root.enclose(bits) * lead).unique_fmpz()
    if nearest is not None and p(fmpq(nearest, lead)) == 0:
        return Rational(fmpq(nearest, lead))
    return root


def _at(p: fmpz_poly) -> Function:
    def value(x: arb, bits: int) -> arb:
        with working_precision(bits):
            return p(x)

    return value


def sign_of(value: fmpq) -> Sign:
    """Return the sign of a rational."""
    return 1 if value > 0 else -1 if value < 0 else 0
