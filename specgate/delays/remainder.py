"""What the roots left of a line leave of a delayed response: at most C e^(-g t), by a bound of an integral.

Retarded type. Let Y = N/D, D = d0 + E with E the delayed terms, of lower degree than d0, R = E/d0, and let the line
Re s = -g hold no root of D or d0. Y splits exactly into

    Y = sum over j < K of (N/d0) (-R)^j  +  Y_K,   Y_K = (N/D) (-R)^K.

Y_K falls like |s|^(deg N - n - r K), r = n - deg E, so that with K large enough for the derivative of order k the
inverse transform of s^k Y_K may be moved from the right to the line: nothing is passed but roots of D (residues of Y,
which the modal sum has) and of d0, and along the line the integral converges absolutely and is at most e^(-g t) times

    (1/2 pi) integral of |s^k Y_K(-g + j w)| dw.

The other terms are rational times e^(-T s). For t > T each is the sum of its residues at all roots of d0. At roots
right of the line they cancel those of Y_K there, since Y has no pole at a root of d0 that is none of D. What is left
are residues at roots of d0 left of the line, sums of a u^(l-1)/(l-1)! e^(p u) with u = t - T, each at most its value
at the least u asked for, or at the summit of u^(l-1) e^(-(|Re p| - g) u), times e^(-g u).

Neutral type. Where delayed terms reach the degree of d0, let A be the sum of ak e^(-tk s), ak the ratios of leading
coefficients, E = A d0 + E', and let the sum of |ak| e^(g tk) be less than 1. Then B = 1/(1 + A) is, right of the line,
the transform of a sum of impulses bm at times Tm (Neumann's series), and that of |bm| e^(g Tm) is at most

    b = 1/(1 - sum of |ak| e^(g tk)).

The same split holds with B N/d0 for N/d0 and R = B E'/d0, which falls at least like 1/|s|, |B| <= b on the line: Y_K is
bounded as before. The other terms are rational ones V e^(-T s) times a power of B. Let V have the inverse transform v,
a sum of a_l u^(l-1)/(l-1)! e^(p u), u >= 0. Those with p left of the line are at most C e^(-g u); of those with p
right of it the continuation to u < 0 is at most C e^(g |u|) (C: the sum of |a_l| u^(l-1)/(l-1)! e^(-|g + Re p| |u|) at
its summits). Driven by impulses bm, the former add up to at most C b e^(-g (t - T)) at any t. The latter, had all
impulses acted, would be the residues at p, which cancel as before; the impulses yet to come leave out at most
C b e^(-g (t - T)). Derivatives are those between the jumps: there v' takes the place of v. Of retarded type, where not
all terms have begun at the least t asked for, the same is used with A = 0 and b = 1.

With one minus a cosine as input every term has a factor G more (see `swing`); N has that which makes it entire, so that
nothing else is passed. It is left out of the integral, and bounded on the line as a whole. Of neutral type its poles on
the axis count as roots right of the line.

The integral is bounded cell by cell, with |D| from below by the cells that counted its roots; beyond their height W by
|D| >= |d0| (1 - |E/d0|), and from some height on by powers of w alone.
"""

from __future__ import annotations

from collections.abc import Iterator
from functools import cached_property

from flint import acb, acb_poly, arb, fmpq, fmpq_poly

from specgate.delays.laurent import of_polynomial, principal, without_root
from specgate.delays.swing import bound_on, pole_of, shaped
from specgate.delays.transform import Transform
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_count import Evaluated, Line
from specgate.systems.roots import certified_roots
from specgate.terms.precision import series_terms, working_precision
from specgate.terms.records import record

ORDERS = (0, 1, 2, 3)
_BITS = 64
_MOST = 12000


@record
class Remainder:
    """|y^(k)(t) - modal sum| <= sizes[k] e^(-rate t) for t >= since."""

    rate: fmpq
    sizes: tuple[arb, arb, arb, arb]
    since: fmpq

    def at(self, order: int, time: arb) -> arb:
        """Return the bound of a derivative at a time, which it is not below."""
        return (self.sizes[order] * (-time * self.rate).exp()).abs_upper()


def remainder(transform: Transform, line: Line, since: fmpq) -> Remainder | None:
    """Return what is left of Y beside its residues right of a line, from a time on; None where it was not bounded.

    N is of lower degree than the undelayed term of D, the delayed ones of no higher. since: the least t asked for.
    """
    with working_precision(_BITS):
        bound = _Bound(transform, line, since)
        if not bound.echoes < 1:
            return None
        sizes = bound.integrals()
        if sizes is None:
            return None
        total = [size + bound.residues(order) for order, size in zip(ORDERS, sizes, strict=True)]
    if not all(size.is_finite() for size in total):
        return None
    return Remainder(-line.real, (total[0], total[1], total[2], total[3]), since)


class _Bound:
    """The parts of Y: base is d0, delayed E, falling E'. echoes: the sum of |ak| e^(g tk), 0 for retarded type."""

    def __init__(self, transform: Transform, line: Line, since: fmpq) -> None:
        numerator, denominator = transform.numerator, transform.denominator
        self.line, self.since = line, since
        self.period = transform.period
        self.base = denominator.undelayed
        self.delayed = Quasi(denominator.delayed)
        self.numerator = numerator
        top = self.base.degree()
        leads = {delay: fmpq_poly([-p[top] / self.base[top]]) for delay, p in denominator.delayed}
        self.falling = self.delayed + Quasi.of(leads) * Quasi.rational(self.base)
        self.retarded = self.falling == self.delayed
        self.echoes = sum((abs(arb(a[0])) * self._shift(delay) for delay, a in leads.items()), arb(0)).abs_upper()
        self._functions = tuple(Evaluated(part) for part in (numerator, self.falling, self.delayed))
        self._base = acb_poly(self.base)
        fall = top - self.falling.degree
        excess = numerator.degree - top
        self.powers = [max(0, -(-(order + excess + 2) // fall)) for order in ORDERS]
        self.exponents = [order + excess - fall * power for order, power in zip(ORDERS, self.powers, strict=True)]

    @property
    def impulses(self) -> arb:
        """The bound b of the sum of |bm| e^(g Tm), 1 for retarded type."""
        return 1 / (1 - self.echoes)

    def _shift(self, delay: fmpq) -> arb:
        """Return |e^(-delay s)| on the line."""
        return (-arb(self.line.real) * delay).exp()

    @cached_property
    def begun(self) -> bool:
        """Whether all terms that are split off begin before the least t asked for."""
        longest = self.delayed.terms[-1][0]
        last = self.numerator.terms[-1][0] + longest * max(0, max(self.powers) - 1)
        return self.retarded and last < self.since

    def integrals(self) -> list[arb] | None:
        """Return (1/pi) times the integral over w >= 0 of each |s^k Y_K|; None where a bound was not found."""
        far = self._far()
        totals = [arb(0)] * len(ORDERS)
        cells: list[tuple[fmpq, fmpq, arb | None]] = [(c.start, c.end, c.least) for c in self.line.cells]
        cells += [(start, end, None) for start, end in _doubled(self.line.height, far)]
        count = 0
        while cells:
            start, end, least = cells.pop()
            sizes = self._over(start, end, least)
            count += 1
            if count > _MOST:
                return None
            if sizes is None:
                middle = (start + end) / 2
                cells += [(start, middle, least), (middle, end, least)]
                continue
            totals = [(total + size * (end - start)).upper() for total, size in zip(totals, sizes, strict=True)]
        beyond = self._beyond(far)
        factor = bound_on(self.line.real, self.period) / arb.pi()
        return [((total + rest) * factor).abs_upper() for total, rest in zip(totals, beyond, strict=True)]

    def _over(self, start: fmpq, end: fmpq, least: arb | None) -> list[arb] | None:
        """Return upper bounds of |s^k Y_K| over a cell of heights; None where it has to be cut."""
        s = acb(self.line.real, arb((start + end) / 2, (end - start) / 2))
        above, falling = (function.value(s).abs_upper() for function in self._functions[:2])
        base = self._base(s).abs_lower()
        if not base > 0:
            return None
        below = least
        if below is None:
            delayed = falling if self.retarded else self._functions[2].value(s).abs_upper()
            below = (base - delayed).lower()
        if not below > 0:
            return None
        size, ratio = s.abs_upper(), (falling * self.impulses / base).upper()
        found = [
            (above * size**order * ratio**power / below).abs_upper()
            for order, power in zip(ORDERS, self.powers, strict=True)
        ]
        return found if all(one.is_finite() for one in found) else None

    def _far(self) -> fmpq:
        """Return a height from which on |d0| exceeds |E| by at least half of what its leading term does in the end."""
        height = max(self.line.height, -self.line.real, fmpq(1, 2**60)) * 2
        while True:
            lead, rest, delayed = self._leading(height)
            if lead * (1 - self.echoes) > 2 * (rest + delayed - lead * self.echoes):
                return height
            height = height * 2

    def _leading(self, height: fmpq) -> tuple[arb, arb, arb]:
        """Return |lead of d0|, what the rest of d0, and what E is at most in the same unit, h^n at the height h."""
        degree = self.base.degree()
        shifted = _shifted(self.base, self.line.real)
        rest = _size(shifted[:-1], height, degree)
        return abs(arb(shifted[-1])), rest, self._terms(self.delayed, height, degree)

    def _terms(self, quasi: Quasi, height: fmpq, degree: int) -> arb:
        """Return an upper bound of |terms(s)| / h^degree for heights h of at least `height`."""
        total = arb(0)
        for delay, polynomial in quasi.terms:
            size = _size(_shifted(polynomial, self.line.real), height, degree)
            total += size * self._shift(delay)
        return total.abs_upper()

    def _beyond(self, far: fmpq) -> list[arb]:
        """Return the integral from a height on: there |s^k Y_K| <= A (h/far)^exponent, exponent <= -2."""
        lead, rest, delayed = self._leading(far)
        base = lead - rest
        above, falling = (self._terms(part, far, self.base.degree()) for part in (self.numerator, self.falling))
        ratio = falling * self.impulses / base
        size = acb(self.line.real, far).abs_upper()
        found = []
        for order, power, exponent in zip(ORDERS, self.powers, self.exponents, strict=True):
            height = above * size**order * ratio**power / (base - delayed)
            found.append((height * far / (-exponent - 1)).abs_upper())
        return found

    def residues(self, order: int) -> arb:
        """Return the size of what split-off terms leave at roots of d0: those left of the line once all have begun."""
        total = arb(0)
        roots = [(root.value, root.multiplicity) for root in certified_roots(self.base, _BITS)]
        if self.begun:
            roots = [(root, times) for root, times in roots if not root.real > arb(self.line.real)]
        part = self.numerator
        for power in range(self.powers[order]):
            driven = self.impulses ** (power + 1)
            for root, times in roots:
                total += self._residue(part, root, times, order, power) * driven
            if self.period is not None and not self.begun:
                total += self._swing(part, order, power, self.period) * driven
            part = part * self.falling
        return total.abs_upper()

    def _residue(self, part: Quasi, root: acb, multiplicity: int, order: int, power: int) -> arb:
        times = multiplicity * (power + 1)
        spare = abs(root.real - self.line.real)
        total = arb(0)
        with series_terms(times + multiplicity):
            divisor = without_root(of_polynomial(self.base, root), multiplicity) ** (power + 1)
            for delay, polynomial in part.terms:
                driven = of_polynomial(polynomial * fmpq_poly([0, 1]) ** order, root)
                parts = principal(shaped(driven, root, self.period) / divisor, times)
                age = arb(self.since - delay) if self.begun else arb(0)
                for size in _decayed(parts, spare, age):
                    total += size * self._shift(delay)
        return total.abs_upper()

    def _swing(self, part: Quasi, order: int, power: int, period: fmpq) -> arb:
        """Return the same at the poles of the input, a conjugate pair."""
        pole, residue = pole_of(period)
        factor = residue * pole**order / self._base(pole) ** (power + 1)
        total = sum((abs(acb_poly(p)(pole)) * self._shift(delay) for delay, p in part.terms), arb(0))
        return (2 * abs(factor) * total).abs_upper()


def _decayed(parts: tuple[acb, ...], spare: arb, age: arb) -> Iterator[arb]:
    """Yield bounds of |a_l| u^(l-1)/(l-1)! e^(-spare u) for u >= age."""
    factorial = arb(1)
    for power, part in enumerate(parts):
        factorial = factorial * max(power, 1)
        summit = arb(power) / spare
        at = age if age > summit else summit.union(age) if age.overlaps(summit) else summit
        yield (abs(part) / factorial * at**power * (-spare * at).exp()).abs_upper()


def _shifted(polynomial: fmpq_poly, real: fmpq) -> list[fmpq]:
    """Return the coefficients of p(real + x) in x."""
    return list(polynomial(fmpq_poly([real, 1])).coeffs())


def _size(coefficients: list[fmpq], height: fmpq, degree: int) -> arb:
    """Return sum of |c_i| h^(i - degree): for i <= degree it falls as h rises."""
    total = arb(0)
    for power, coefficient in enumerate(coefficients):
        total += abs(arb(coefficient)) * arb(height) ** (power - degree)
    return total


def _doubled(start: fmpq, end: fmpq) -> Iterator[tuple[fmpq, fmpq]]:
    """Yield parts of [start, end] that widen by a quarter of their height, the first an eighth of the end at most."""
    while start < end:
        following = min(end, start + max(start / 4, end / 64))
        yield start, following
        start = following
