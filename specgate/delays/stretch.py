"""A stretch of time on which a delayed response is a polynomial, a sum of modes and a bounded rest."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from functools import cached_property

from flint import acb_poly, arb, fmpq, fmpq_poly

from specgate.delays.panel import FINE, Panel, panel
from specgate.delays.remainder import ORDERS, Remainder
from specgate.delays.steps import Mode, Values
from specgate.response import modes as response_modes
from specgate.response.modes import Expansion
from specgate.response.superposed.integrals import integral, square_integral
from specgate.terms.precision import working_precision
from specgate.terms.records import record

_NARROW = arb(2) ** -30
"""Part of a piece below which a ball of times is narrow."""

ROUGH = 96
"""Bits up to which the polynomial that serves wide balls of times gives an integral well enough."""


@record
class Group:
    """factor * (drift(t - begin) + modes at t - origin), within |factor| (rest at t - begin, and left_out).

    drift: coefficients of t^l / l!. left_out: bounds of what dead modes leave, by derivative; none if all are there.
    """

    begin: fmpq
    factor: fmpq
    origin: fmpq
    modes: tuple[Mode, ...]
    drift: tuple[fmpq, ...] = ()
    rest: Remainder | None = None
    left_out: tuple[arb, ...] = ()

    def moved(self, begin: fmpq, factor: fmpq) -> Group:
        """Return the same, times a factor, from a later begin on."""
        return Group(
            self.begin + begin,
            self.factor * factor,
            self.origin + begin,
            self.modes,
            self.drift,
            self.rest,
            self.left_out,
        )

    def add(self, into: list[arb], time: arb) -> None:
        """Add the group and its derivatives over a ball of times."""
        total = [arb(0)] * len(ORDERS)
        for mode in self.modes:
            mode.add(total, time - self.origin)
        since = time - self.begin
        fallen = None if self.rest is None else (-since.lower() * self.rest.rate).exp()
        for order in ORDERS:
            part = total[order] if fallen is None else total[order] + self._error(order, fallen)
            into[order] += (part + _drift(self.drift, order, since) if self.drift else part) * self.factor

    def _error(self, order: int, fallen: arb) -> arb:
        """Return what is left out; fallen: by how much the rest has."""
        assert self.rest is not None
        size = self.rest.sizes[order] * fallen
        return arb(0, (size + self.left_out[order] if self.left_out else size).abs_upper())

    def sizes(self, left: fmpq, right: fmpq) -> tuple[arb, arb]:
        """Return upper bounds of what is left out on [left, right]: at most, and its integral."""
        if self.rest is None:
            return arb(0), arb(0)
        most = self.rest.at(0, arb(left - self.begin))
        dead = self.left_out[0] if self.left_out else arb(0)
        scale = abs(arb(self.factor))
        return (most + dead) * scale, (most / self.rest.rate + dead * (right - left)) * scale


@record
class Stretch:
    """The sum of some groups; without any it is zero.

    known: whether anything is told of it at all. span: its ends, where it is a piece of the method of steps.
    """

    groups: tuple[Group, ...]
    bits: int
    known: bool = True
    span: tuple[fmpq, fmpq] | None = None

    @cached_property
    def _panel(self) -> Panel | None:
        """The groups of the method of steps as one polynomial, for wide balls of times."""
        return None if self.span is None else panel(self._terms(), *self.span, self.bits)

    def _terms(self) -> Iterator[tuple[fmpq, fmpq, Mode]]:
        return ((group.origin, group.factor, mode) for group in self._early for mode in group.modes)

    @cached_property
    def _early(self) -> tuple[Group, ...]:
        return tuple(group for group in self.groups if group.rest is None)

    def at(self, time: arb) -> Values:
        """Return balls of y, y', y'', y''' over a ball of times."""
        if not self.known:
            nothing = arb("nan")
            return nothing, nothing, nothing, nothing
        if self.span is not None and not time.rad() < _NARROW * arb(self.span[1] - self.span[0]):
            wide = self._panel
            if wide is not None:
                return self._sum(time, list(wide.at(time)), (g for g in self.groups if g.rest is not None))
        return self._sum(time, [arb(0)] * len(ORDERS), self.groups)

    def _sum(self, time: arb, total: list[arb], groups: Iterable[Group]) -> Values:
        with working_precision(self.bits):
            for group in groups:
                group.add(total, time)
        return total[0], total[1], total[2], total[3]

    @property
    def speed(self) -> float:
        """The speed of the fastest mode (rad/s)."""
        return max((float(abs(mode.pole).mid()) for group in self.groups for mode in group.modes), default=0.0)

    @cached_property
    def _fine(self) -> Panel | None:
        """The same about as good as the terms themselves are, for integrals."""
        return None if self.span is None else panel(self._terms(), *self.span, self.bits, FINE)

    def _quick(self, bits: int) -> Panel | None:
        """Return the polynomial where it is all of the stretch, for an integral to `bits`."""
        if len(self._early) < len(self.groups):
            return None
        return self._panel if bits <= ROUGH else self._fine

    def area(self, left: fmpq, right: fmpq, bits: int) -> arb | None:
        """Return a ball of the integral of y from left to right."""
        if not self.known:
            return None
        quick = self._quick(bits)
        if quick is not None:
            return quick.area(left, right)
        with working_precision(self.bits):
            expansion, drift = self._from(left)
            total = integral(expansion, drift, fmpq(0), right - left)
            for group in self.groups:
                total += arb(0, group.sizes(left, right)[1].upper())
        return total

    def square(self, left: fmpq, right: fmpq, bits: int) -> arb | None:
        """Return a ball of the integral of y^2: |(y + e)^2 - y^2| <= |e| (2 |y + e| + |e|)."""
        if not self.known:
            return None
        quick = self._quick(bits)
        if quick is not None:
            return quick.square(left, right)
        with working_precision(self.bits):
            expansion, drift = self._from(left)
            total = square_integral(expansion, drift, fmpq(0), right - left)
            errors = [group.sizes(left, right) for group in self.groups]
            most, area = (sum((error[k] for error in errors), arb(0)) for k in (0, 1))
            height = abs(self.at(arb(left).union(arb(right)))[0]).upper() if area > 0 else arb(0)
            return total + arb(0, (area * (2 * height + most)).upper())

    def _from(self, left: fmpq) -> tuple[Expansion, fmpq_poly]:
        """Return all modes and the polynomial in the time from `left` on."""
        modes, drift = [], fmpq_poly([0])
        for group in self.groups:
            shift = arb(left - group.origin)
            for mode in group.modes:
                moved = mode.polynomials[0](acb_poly([shift, 1])) * (mode.pole * shift).exp()
                factors = tuple(c * mode.weight * arb(group.factor) for c in moved.coeffs())
                modes.append(response_modes.Mode(mode.pole, factors))
            drift += polynomial_of(group.drift)(fmpq_poly([left - group.begin, 1])) * group.factor
        return Expansion(fmpq(0), tuple(mode for mode in modes if mode.coefficients), self.bits), drift


def polynomial_of(drift: Sequence[fmpq]) -> fmpq_poly:
    """Return sum of drift[l] t^l / l!."""
    result, factorial = [], fmpq(1)
    for power, coefficient in enumerate(drift):
        factorial = factorial * max(power, 1)
        result.append(coefficient / factorial)
    return fmpq_poly(result)


def _drift(coefficients: Sequence[fmpq], order: int, time: arb) -> arb:
    """Return a derivative of sum of c[l] t^l / l!."""
    total, factor = arb(0), arb(1)
    for power, coefficient in enumerate(coefficients[order:]):
        factor = factor * time / power if power else factor
        total += factor * coefficient
    return total
