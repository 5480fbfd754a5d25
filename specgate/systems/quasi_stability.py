"""Whether every root of a quasi-polynomial lies left of the imaginary axis: decided exactly.

- The content, a polynomial in s alone, is decided by Routh's array, the origin by the value there (e^0 = 1).
- A root j w of the rest with w not zero: then z = e^(-j w unit) is a root of D(j w, .), and of D(-j w, 1/.) mirrored.
  Unless these share a factor in z and s, their resultant makes w algebraic; then z is transcendental (Lindemann) and
  D(j w, z) vanishes for all z, which the content excludes. A shared factor needs a term with a delay whose degree is
  that of the undelayed term, and leading coefficients of one magnitude. Hence a quasi-polynomial whose delayed terms
  are of lower degree has no root on the axis but those found above, and counting to the right of the axis in balls of
  rising precision comes to an end.
- Where delayed terms reach the degree of the undelayed one (neutral type), roots follow those of the sum of leading
  coefficients a(z) far out: all of them left of a line Re s < 0 if and only if a(z) has no root with |z| <= 1 (Hale,
  Verduyn Lunel 1993, section 9.3). A root with |z| < 1 is a chain of unstable roots. Where the sum of the others'
  magnitudes is less than the first (as it must be, to stay so under small changes of the delays), roots are counted;
  else the question stays open.
- A delayed term of higher degree than the undelayed one (advanced type) has roots arbitrarily far to the right
  (Bellman, Cooke 1963, section 12.5).
"""

from __future__ import annotations

from functools import lru_cache

from flint import fmpq, fmpq_poly

from specgate.systems.quasi import Quasi, common_unit
from specgate.systems.quasi_count import line
from specgate.systems.stability import classify, is_hurwitz
from specgate.terms.precision import HIGHEST

_LARGEST_DIFFERENCE = 200
"""Degree in z of the sum of leading coefficients beyond which its roots are not located."""


def is_stable(quasi: Quasi) -> bool | None:
    """Whether every root lies strictly left of the axis; None where it was not decided. Raises ValueError for zero."""
    if not quasi:
        raise ValueError("every number is a root of zero")
    if quasi.is_rational:
        return is_hurwitz(quasi.undelayed)
    return _stable(tuple((str(delay), tuple(map(str, p.coeffs()))) for delay, p in quasi.terms))


@lru_cache(maxsize=256)
def _stable(key: tuple[tuple[str, tuple[str, ...]], ...]) -> bool | None:
    quasi = Quasi(tuple((_number(delay), fmpq_poly([_number(c) for c in p])) for delay, p in key))
    content = quasi.content
    if not is_hurwitz(content):
        return False
    rest = quasi.over(content)
    if rest.at_origin(1)[0] == 0:
        return False
    advanced = any(p.degree() > rest.undelayed.degree() for _, p in rest.delayed)
    if advanced or leading_chain_grows(rest):
        return False
    return none_right(rest)


def _number(text: str) -> fmpq:
    numerator, _, denominator = text.partition("/")
    return fmpq(int(numerator), int(denominator or 1))


def none_right(quasi: Quasi) -> bool | None:
    """Whether no root lies right of the axis, where it is known that none lies on it; None where not decided."""
    bits = 64
    while bits <= HIGHEST:
        found = line(quasi, fmpq(0), bits)
        if found is not None:
            return found.count == 0
        bits *= 4
    return None


def leading_chain_grows(quasi: Quasi) -> bool:
    """Whether roots are known to lie far out on the right: a(z) has one with |z| < 1 (see above)."""
    degree = quasi.undelayed.degree()
    leads = [(delay, p[degree]) for delay, p in quasi.terms if p.degree() == degree]
    if len(leads) == 1:
        return False
    unit = common_unit([delay for delay, _ in leads])
    highest = int((leads[-1][0] / unit).p)
    if len(leads) == 2 or highest > _LARGEST_DIFFERENCE:
        # Of z^k = -a0/ak all roots have one magnitude; of several terms a product of roots below 1 is enough.
        return abs(leads[-1][1]) > abs(leads[0][1])
    coefficients = [fmpq(0)] * (highest + 1)
    for delay, lead in leads:
        coefficients[int((delay / unit).p)] = lead
    outside = fmpq_poly(coefficients)
    return _has_root_inside(outside)


def _has_root_inside(p: fmpq_poly) -> bool:
    """Whether a polynomial has a root with |z| < 1: by z = (1 - x)/(1 + x), which takes the disc to Re x > 0."""
    above, below = fmpq_poly([1, -1]), fmpq_poly([1, 1])
    result, power = fmpq_poly(), fmpq_poly([1])
    for coefficient in reversed(p.coeffs()):
        result, power = result * above + power * coefficient, power * below
    return classify(result).right > 0
