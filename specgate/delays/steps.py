"""The method of steps in the frequency domain: a delayed response as a sum of rational ones that begin one by one.

With D = d0 + sum of dk e^(-tk s), Y = N/D = sum over T of c_T(s) e^(-T s), where T runs through the sums of delays and

    d0 c_T = n_T - sum over k of dk c_(T - tk).

Every c_T is rational with poles at the roots of d0 alone, and its inverse transform acts from t = T on: up to any time
finitely many of them count, and y(t) is the sum of their residues exactly. About a root p of d0 of multiplicity m the
recursion is one of Laurent series, each step adding m to the order of the pole, less the times that p is a root of all
dk. Between two kinks the terms with one p are put together: a polynomial in t times e^(p t).

With one minus a cosine as input every c_T has a factor G more (see `swing`), and a simple pole at jw.

How many digits cancel between roots near each other is seen in the balls; more bits give them back.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from heapq import heappop, heappush

from flint import acb, acb_poly, acb_series, arb, fmpq

from specgate.delays.laurent import as_time_polynomial, of_polynomial, principal, without_root
from specgate.delays.swing import pole_of, shaped
from specgate.delays.transform import Transform
from specgate.systems.polynomials import order_at_origin
from specgate.systems.quasi import Quasi
from specgate.systems.roots import Root, certified_roots
from specgate.terms.precision import series_terms, working_precision
from specgate.terms.records import record

Values = tuple[arb, arb, arb, arb]
"""y and its first three derivatives."""


@record
class Mode:
    """Re(polynomial(x) e^(pole x)), twice that for a pole off the real axis; x: time from where the mode is told.

    polynomials: that of the mode and of its first three derivatives.
    """

    pole: acb
    polynomials: tuple[acb_poly, acb_poly, acb_poly, acb_poly]

    @staticmethod
    def of(pole: acb, polynomial: acb_poly) -> Mode:
        """Return a mode and its derivatives."""
        found = [polynomial]
        for _ in range(3):
            found.append(found[-1].derivative() + found[-1] * pole)
        return Mode(pole, (found[0], found[1], found[2], found[3]))

    @property
    def weight(self) -> int:
        """2 for a conjugate pair, 1 for a real pole."""
        return 1 if self.pole.imag.is_zero() else 2

    def add(self, into: list[arb], x: arb) -> None:
        """Add the mode and its derivatives at x."""
        factor = (self.pole * x).exp() * self.weight
        for order, polynomial in enumerate(self.polynomials):
            into[order] += (polynomial(acb(x)) * factor).real

    def envelope(self, order: int, x: arb) -> arb:
        """Return what a derivative of a decaying mode does not exceed in magnitude at x and after."""
        total = arb(0)
        for power, coefficient in enumerate(self.polynomials[order].coeffs()):
            at = x.max(arb(power) / -self.pole.real) if power else x
            total += abs(coefficient) * at**power * (self.pole.real * at).exp()
        return (total * self.weight).abs_upper()


def summed(modes: Sequence[Mode], x: arb) -> Values:
    """Return the sum of modes and its derivatives over a ball of times."""
    total = [arb(0)] * 4
    for mode in modes:
        mode.add(total, x)
    return total[0], total[1], total[2], total[3]


def kinks_of(numerator: Quasi, denominator: Quasi, until: fmpq, most: int) -> tuple[tuple[fmpq, ...], fmpq]:
    """Return the times up to `until` at which a new term begins, in order, and up to when these are all.

    At most `most` of them: where there are more, they are all up to the first that is left out.
    """
    steps = [delay for delay, _ in denominator.delayed]
    waiting = sorted(delay for delay, _ in numerator.terms if delay <= until)
    found: list[fmpq] = []
    while waiting:
        time = heappop(waiting)
        if found and found[-1] == time:
            continue
        if len(found) == most:
            return tuple(found), time
        found.append(time)
        for step in steps:
            if time + step <= until:
                heappush(waiting, time + step)
    return tuple(found), until


class Steps:
    """The terms of Y that begin at some times, at one working precision; all delays of N and D are >= 0.

    kinks: every time at which a term begins, from the first on, without a gap.
    """

    def __init__(self, transform: Transform, kinks: Sequence[fmpq], bits: int) -> None:
        self.kinks = tuple(kinks)
        self.bits = bits
        self._numerator, self._denominator = transform.numerator, transform.denominator
        self._period = transform.period
        with working_precision(bits):
            self._terms = [self._about(root.value, root.multiplicity) for root in self._roots()]
            if self._period is not None:
                self._terms.append(self._about_swing(self._period))
        self._pieces: list[tuple[Mode, ...]] = []

    def _roots(self) -> list[Root]:
        roots = certified_roots(self._denominator.undelayed, self.bits)
        return [root for root in roots if not root.value.imag < 0]

    def _about(self, root: acb, multiplicity: int) -> tuple[acb, list[acb_poly]]:
        """Return a root of d0 with the polynomial in t - T of each term that begins at T."""
        order = _Order(multiplicity, min(multiplicity, self._shared) if root.is_zero() else 0)
        levels = _levels(self.kinks, self._numerator, self._denominator)
        with series_terms(order.at(max(levels, default=1)) + multiplicity):
            local = _Local(self._numerator, self._denominator, root, order, self._period)
            found = [principal(series, order.at(level)) for level, series in local.terms(self.kinks)]
        return root, [acb_poly(as_time_polynomial(parts)) for parts in found]

    @property
    def _shared(self) -> int:
        """How often s = 0 is a root of every delayed term of D."""
        return min((order_at_origin(p) for _, p in self._denominator.delayed), default=0)

    def _about_swing(self, period: fmpq) -> tuple[acb, list[acb_poly]]:
        """Return the same for the pole of the input."""
        pole, residue = pole_of(period)
        with series_terms(1):
            local = _Local(self._numerator, self._denominator, pole, _Order(0, 0), None)
            return pole, [acb_poly([series[0] * residue]) for _, series in local.terms(self.kinks)]

    def modes(self, index: int) -> tuple[Mode, ...]:
        """Return y between kink `index` and the next as modes, x counted from the kink."""
        with working_precision(self.bits):
            while len(self._pieces) <= index:
                self._pieces.append(self._next())
        return self._pieces[index]

    def _next(self) -> tuple[Mode, ...]:
        number = len(self._pieces)
        if number == 0:
            return tuple(Mode.of(root, terms[0]) for root, terms in self._terms)
        gap = arb(self.kinks[number] - self.kinks[number - 1])
        return tuple(
            Mode.of(root, mode.polynomials[0](acb_poly([gap, 1])) * (root * gap).exp() + terms[number])
            for mode, (root, terms) in zip(self._pieces[-1], self._terms, strict=True)
        )


@record
class _Order:
    """How often d0 has a root, and how often, no more than that, every delayed term of D has it."""

    own: int
    shared: int

    @property
    def gain(self) -> int:
        """By how much the order of the pole grows from one term to those that it drives."""
        return self.own - self.shared

    def at(self, level: int) -> int:
        """Return the order of the pole of a term that has been divided by d0 so often."""
        return self.own + (level - 1) * self.gain


class _Local:
    """The recursion of the terms as Laurent series about one root of d0; a term is x^-order.at(level) times a series.

    order: of zeros for a point that is no root.
    """

    def __init__(self, numerator: Quasi, denominator: Quasi, root: acb, order: _Order, period: fmpq | None) -> None:
        self._order = order
        self._base = without_root(of_polynomial(denominator.undelayed, root), order.own)
        self._inverse = 1 / self._base
        self._delayed = [
            (delay, without_root(of_polynomial(p, root), order.shared)) for delay, p in denominator.delayed
        ]
        self._driven = {delay: shaped(of_polynomial(p, root), root, period) for delay, p in numerator.terms}

    def terms(self, kinks: Sequence[fmpq]) -> Iterator[tuple[int, acb_series]]:
        """Yield the terms that begin at some times; all before one of them are among them."""
        known: dict[fmpq, tuple[int, acb_series]] = {}
        for time in kinks:
            known[time] = self._term(time, known)
            yield known[time]

    def _term(self, time: fmpq, known: dict[fmpq, tuple[int, acb_series]]) -> tuple[int, acb_series]:
        """Return c_T from the terms that begin before."""
        parts = [(0, self._driven[time])] if time in self._driven else []
        for delay, polynomial in self._delayed:
            if time - delay in known:
                level, series = known[time - delay]
                parts.append((level, -polynomial * series))
        highest = max(level for level, _ in parts)
        total = acb_series([0])
        for level, series in parts:
            lifted = self._order.gain * (highest - level)
            total = total + (series * acb_series([*([0] * lifted), 1]) if lifted else series)
        return highest + 1, self._divided(total)

    def _divided(self, series: acb_series) -> acb_series:
        """Return a series divided by d0, the root left out; FLINT divides by a linear one in one pass."""
        return series / self._base if len(self._base.coeffs()) <= 2 else series * self._inverse


def _levels(kinks: Sequence[fmpq], numerator: Quasi, denominator: Quasi) -> Iterator[int]:
    """Yield for each kink how often a term that begins there has been divided by d0."""
    driven = {delay for delay, _ in numerator.terms}
    known: dict[fmpq, int] = {}
    for time in kinks:
        before = [known[time - delay] for delay, _ in denominator.delayed if time - delay in known]
        if time in driven:
            before.append(0)
        known[time] = max(before) + 1
        yield known[time]
