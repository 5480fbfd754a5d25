"""Modal expansion of a step response in balls: y(t) = offset + sum of Re(c t^j e^{pt}), proved to any precision."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property
from math import factorial

from flint import acb, acb_mat, acb_poly, acb_series, arb, fmpq, fmpq_poly

from specgate.systems.polynomials import order_at_origin
from specgate.systems.roots import Root, certified_roots
from specgate.terms.precision import series_terms, working_precision
from specgate.terms.records import record

GUARD = 32
"""Bits beyond the asked precision at which poles and residues are computed."""


@dataclass(frozen=True, eq=False)
class Mode:
    """Re(sum of coefficients[j] t^j e^{pole t}); a conjugate pair is one mode, its upper pole, with twice the residue.

    The real part of the pole of a mode on the axis, the imaginary part of a real one, are exactly zero.
    """

    pole: acb
    coefficients: tuple[acb, ...]

    @property
    def oscillates(self) -> bool:
        """Whether the mode is that of a conjugate pair."""
        return not self.pole.imag.is_zero()


@record
class Expansion:
    """offset + sum of modes; `bits` is the precision that it was made with and is evaluated at."""

    offset: fmpq
    modes: tuple[Mode, ...]
    bits: int

    def derivative_rows(self, orders: int) -> tuple[tuple[tuple[acb, ...], ...], ...]:
        """Return rows[k][mode][j]: the coefficients of t^j e^{pt} in the k-th derivative, k < orders."""
        with working_precision(self.bits):
            rows = [tuple(mode.coefficients for mode in self.modes)]
            while len(rows) < orders:
                rows.append(tuple(_derived(m.pole, c) for m, c in zip(self.modes, rows[-1], strict=True)))
        return tuple(rows)

    @cached_property
    def _matrix(self) -> acb_mat:
        rows = self._rows
        flat = [c for row in rows for mode in row for c in mode]
        return acb_mat(4, len(flat) // 4, flat)

    def deviation(self, time: arb) -> tuple[arb, arb, arb, arb]:
        """Return balls of y - offset and of its first three derivatives at a (ball of) time."""
        if not self.modes:
            return arb(0), arb(0), arb(0), arb(0)
        with working_precision(self.bits):
            basis: list[acb] = []
            for mode in self.modes:
                term = (mode.pole * time).exp()
                basis.append(term)
                for _ in mode.coefficients[1:]:
                    term = term * time
                    basis.append(term)
            value, first, second, third = (self._matrix * acb_mat(len(basis), 1, basis)).entries()
        return value.real, first.real, second.real, third.real

    def envelope(self, time: arb) -> tuple[arb, arb, arb, arb]:
        """Return the same over a ball of times that is long beside a period: of a mode that turns in it its magnitude.

        Re(c e^(pt)) in boxes would be up to sqrt(2) times as large.
        """
        with working_precision(self.bits):
            totals = [arb(0)] * 4
            for index, mode in enumerate(self.modes):
                turns = bool(time.rad() * abs(mode.pole.imag) > 1)
                growth = (mode.pole.real * time if turns else mode.pole * time).exp()
                for order, row in enumerate(self._rows):
                    part: acb | arb = arb(0)
                    for c in reversed(row[index]):
                        part = part * time + (abs(c) if turns else c)
                    value = part * growth
                    totals[order] += arb(0, abs(value).upper()) if turns else acb(value).real
        value, first, second, third = totals
        return value, first, second, third

    def taylor(self, time: arb, terms: int) -> tuple[arb, arb, arb, arb]:
        """Return the same over a ball of times, by Taylor's polynomials about its middle with `terms` terms.

        They keep what modes cancel each other; the remainder of the k-th derivative is that of order k + terms over
        the whole ball, mode by mode, times r^terms / terms!.
        """
        with working_precision(self.bits):
            middle = time.mid()
            away = arb(0, time.rad())
            values = self._at(middle, terms + 4)
            rest = time.rad() ** terms / factorial(terms)
            result = []
            for order in range(4):
                total = arb(0)
                for k in range(terms - 1, -1, -1):
                    total = values[order + k] + total * away / (k + 1)
                result.append(total + arb(0, (self._magnitude(time, order + terms) * rest).upper()))
        return result[0], result[1], result[2], result[3]

    def _at(self, time: arb, orders: int) -> list[arb]:
        """Return the first derivatives at an instant."""
        rows = self._many_rows(orders)
        values = [arb(0)] * orders
        for index, mode in enumerate(self.modes):
            growth = (mode.pole * time).exp()
            for order in range(orders):
                part = acb(0)
                for c in reversed(rows[order][index]):
                    part = part * time + c
                values[order] += (part * growth).real
        return values

    def _magnitude(self, time: arb, order: int) -> arb:
        """Return a bound of the magnitude of a derivative over a ball of times, mode by mode."""
        total = arb(0)
        for mode, row in zip(self.modes, self._many_rows(order + 1)[order], strict=True):
            part = arb(0)
            for c in reversed(row):
                part = part * abs(time) + abs(c)
            total += part * (mode.pole.real * time).exp()
        return total

    def _many_rows(self, orders: int) -> tuple[tuple[tuple[acb, ...], ...], ...]:
        if len(self._longest) < orders:
            self._longest[:] = self.derivative_rows(orders)
        return tuple(self._longest)

    @cached_property
    def _longest(self) -> list[tuple[tuple[acb, ...], ...]]:
        return []

    @cached_property
    def _rows(self) -> tuple[tuple[tuple[acb, ...], ...], ...]:
        return self.derivative_rows(4)

    def rescaled(self, time: int, value: int) -> Expansion:
        """Return the expansion of 2^-value y(2^-time t): powers of two, so nothing is rounded."""
        with working_precision(self.bits):
            modes = tuple(
                Mode(
                    mode.pole * power_of_two(-time),
                    tuple(c * power_of_two(-time * j - value) for j, c in enumerate(mode.coefficients)),
                )
                for mode in self.modes
            )
        return Expansion(self.offset * dyadic(-value), modes, self.bits)

    def only(self, which: Sequence[int]) -> Expansion:
        """Return the expansion with some of its modes."""
        return Expansion(self.offset, tuple(self.modes[index] for index in which), self.bits)

    def rebased(self, start: fmpq) -> Expansion:
        """Return the expansion in the time from `start` on: sum c t^j e^{pt} written about t = start."""
        with working_precision(self.bits):
            shift = arb(start)
            modes = tuple(Mode(mode.pole, _rebased(mode, shift)) for mode in self.modes)
        return Expansion(self.offset, modes, self.bits)


def dyadic(exponent: int) -> fmpq:
    """Return 2^exponent."""
    return fmpq(1 << exponent) if exponent >= 0 else fmpq(1, 1 << -exponent)


def power_of_two(exponent: int) -> arb:
    """Return 2^exponent, exactly at any precision."""
    return arb(dyadic(exponent))


def expand(numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq, bits: int) -> Expansion:
    """Expand size * numerator / (denominator * s); the fraction is coprime, proper, its denominator monic.

    A pole p of multiplicity m has the coefficients F_{m-1-j} / j! of t^j e^{pt}, where F_0 + F_1 x + ... is the
    Taylor series of Y(p + x) x^m. The cofactor is a product of differences of certified roots, so that close poles
    cost only the digits that they share. At the origin everything is rational.
    """
    scaled = numerator * size
    precision = bits + GUARD
    roots = certified_roots(denominator, precision) if denominator.degree() > 0 else ()
    offset, drift = at_origin(scaled, denominator)
    with working_precision(precision):
        top = acb_poly(scaled)
        modes = [
            Mode(root.value, _residues(top, roots, index))
            for index, root in enumerate(roots)
            if not (root.value.is_zero() or root.value.imag < 0)
        ]
        if drift:
            modes.append(Mode(acb(0), (acb(0), *(acb(arb(c)) for c in drift))))
    return Expansion(offset, tuple(modes), precision)


def _residues(top: acb_poly, roots: Sequence[Root], index: int) -> tuple[acb, ...]:
    pole, count = roots[index].value, roots[index].multiplicity
    others = [(pole - root.value, root.multiplicity) for k, root in enumerate(roots) if k != index]
    fold = 1 if pole.imag.is_zero() else 2
    if count == 1:
        cofactor = pole
        for difference, multiplicity in others:
            cofactor = cofactor * (difference if multiplicity == 1 else difference**multiplicity)
        return (fold * top(pole) / cofactor,)
    bottom = acb_poly([pole, 1])
    for difference, multiplicity in others:
        bottom = (bottom * acb_poly([difference, 1]) ** multiplicity).truncate(count)
    shifted = top(acb_poly([pole, 1])).truncate(count)
    with series_terms(count):
        series = (acb_series(shifted.coeffs(), count) / acb_series(bottom.coeffs(), count)).coeffs()
    taylor = [*series, *([acb(0)] * (count - len(series)))]
    return tuple(fold * taylor[count - 1 - j] / factorial(j) for j in range(count))


def at_origin(top: fmpq_poly, bottom: fmpq_poly) -> tuple[fmpq, tuple[fmpq, ...]]:
    """Return the constant of the step response and the coefficients of t, t^2 ... that poles at the origin give it."""
    order = order_at_origin(bottom)
    rest = bottom.right_shift(order)
    series: list[fmpq] = []
    for k in range(order + 1):
        series.append((top[k] - sum((rest[k - i] * series[i] for i in range(k)), fmpq(0))) / rest[0])
    return series[order], tuple(series[order - j] / factorial(j) for j in range(1, order + 1))


def _derived(pole: acb, coefficients: tuple[acb, ...]) -> tuple[acb, ...]:
    """Return the coefficients of the derivative of sum c_j t^j e^{pt}."""
    following = (*coefficients[1:], None)
    return tuple(
        pole * c if up is None else pole * c + (j + 1) * up
        for j, (c, up) in enumerate(zip(coefficients, following, strict=True))
    )


def _rebased(mode: Mode, shift: arb) -> tuple[acb, ...]:
    growth = (mode.pole * shift).exp()
    if len(mode.coefficients) == 1:
        return (mode.coefficients[0] * growth,)
    shifted = acb_poly(list(mode.coefficients))(acb_poly([shift, 1])) * growth
    return tuple(shifted[j] for j in range(len(mode.coefficients)))


def expand_swinging(
    numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq, frequency: Callable[[], arb], bits: int
) -> Expansion:
    """Expand size * numerator w^2 / (denominator s (s^2 + w^2)): the response to size * (1 - cos w t).

    The fraction is coprime and proper, its denominator monic, with at most one root at the origin. `frequency` gives a
    ball of w at the precision that is set; w is no root of any polynomial with rational coefficients, so that -w^2 is
    apart from every pole. At the origin w^2 / (s^2 + w^2) is 1 up to s^2: offset and drift are rational.
    """
    scaled = numerator * size
    precision = bits + GUARD
    roots = certified_roots(denominator, precision) if denominator.degree() > 0 else ()
    offset, drift = at_origin(scaled, denominator)
    with working_precision(precision):
        w = frequency()
        swing = (Root(acb(0, w), 1), Root(acb(0, -w), 1))
        every = (*roots, *swing)
        top = acb_poly(scaled) * acb_poly([acb(w * w)])
        modes = [
            Mode(root.value, _residues(top, every, index))
            for index, root in enumerate(every)
            if not (root.value.is_zero() or root.value.imag < 0)
        ]
        if drift:
            modes.append(Mode(acb(0), (acb(0), *(acb(arb(c)) for c in drift))))
    return Expansion(offset, tuple(modes), precision)
