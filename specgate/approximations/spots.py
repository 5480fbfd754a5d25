"""Roots of a polynomial with the rational figures that some of them have."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from flint import acb, arb, fmpq, fmpq_poly

from specgate.approximations.figures import root
from specgate.response.answers import Answer
from specgate.systems.roots import certified_roots
from specgate.terms.precision import working_precision
from specgate.terms.records import record

_MATCHED_AT = 256


@dataclass(frozen=True, eq=False)
class Spot:
    """One root: a pole or a zero.

    index: place among the certified roots of the polynomial; conjugate_index: that of its conjugate.
    real: exact real part, square: exact square of the distance from the origin; known for roots of linear factors
    over the rationals and for conjugate pairs of quadratic ones, so that a ratio of exactly five is seen as five.
    """

    polynomial: fmpq_poly
    index: int
    conjugate_index: int
    upper: bool
    real: fmpq | None
    square: fmpq | None

    @property
    def oscillates(self) -> bool:
        """Whether the root is one of a conjugate pair."""
        return self.index != self.conjugate_index

    def at(self, bits: int) -> acb:
        """Return a ball that contains the root."""
        return certified_roots(self.polynomial, bits)[self.index].value

    @cached_property
    def decay(self) -> Answer:
        """Minus the real part, 1/s."""
        if self.real is not None:
            return Answer.of_exact(-self.real)
        return Answer.of_ball(lambda bits: -self.at(bits).real)

    @cached_property
    def distance_squared(self) -> Answer:
        """Square of the distance from the origin, 1/s^2."""
        if self.square is not None:
            return Answer.of_exact(self.square)
        return Answer.of_ball(self._square_at)

    @cached_property
    def distance(self) -> Answer:
        """Distance from the origin, 1/s; of a complex pair its natural frequency, rad/s."""
        return root(self.distance_squared)

    def _square_at(self, bits: int) -> arb:
        place = self.at(bits)
        with working_precision(bits):
            return place.real * place.real + place.imag * place.imag


@record
class _Rational:
    """A root that solves a linear or quadratic equation with rational coefficients."""

    real: fmpq
    square: fmpq
    place: acb


def spots(polynomial: fmpq_poly) -> tuple[Spot, ...]:
    """Return every root, repeated ones as often as they occur, by real and then imaginary part.

    Raises ValueError for the zero polynomial.
    """
    roots = certified_roots(polynomial, _MATCHED_AT)
    rational = _rational_roots(polynomial)
    result: list[Spot] = []
    for index, found in enumerate(roots):
        known = next((one for one in rational if one.place.overlaps(found.value)), None)
        spot = Spot(
            polynomial,
            index,
            _conjugate(index, [one.value for one in roots]),
            upper=found.value.imag > 0,
            real=None if known is None else known.real,
            square=None if known is None else known.square,
        )
        result += [spot] * found.multiplicity
    return tuple(result)


def _conjugate(index: int, places: list[acb]) -> int:
    mirrored = places[index].conjugate()
    return next(i for i, place in enumerate(places) if place.overlaps(mirrored))


def _rational_roots(polynomial: fmpq_poly) -> list[_Rational]:
    """Return the roots of the linear factors and of the quadratic ones without real roots, over the rationals."""
    result: list[_Rational] = []
    for factor, _ in polynomial.factor()[1]:
        if factor.degree() == 1:
            real = fmpq(-factor[0], factor[1])
            with working_precision(2 * _MATCHED_AT):
                result.append(_Rational(real, real * real, acb(arb(real))))
        elif factor.degree() == 2:
            real, square = fmpq(-factor[1], 2 * factor[2]), fmpq(factor[0], factor[2])
            if square <= real * real:
                continue
            with working_precision(2 * _MATCHED_AT):
                height = arb(square - real * real).sqrt()
                result += [_Rational(real, square, acb(arb(real), sign * height)) for sign in (1, -1)]
    return result
