"""Where a root may be on the unit circle, for delays whose part of a period lies in a small interval.

The characteristic polynomial is z^n D(z) + N(z, e). On the circle |z^n| = 1, so that a root there needs |N| = |D|,
whatever n is. In w, z = (1 + w)/(1 - w), w = jv, that is a polynomial in x = v^2, E = |N|^2 - |D|^2, with coefficients
in balls over an interval of e. Descartes' rule isolates its roots x(e): each stays in a ball of its own and is simple
for every e in the interval, so that it is a continuous function of e (a branch). A root of the loop is on the circle
there if and only if the angle h = n theta - arg(-N/D) is a multiple of 2 pi, theta = 2 atan(sqrt x). Where dh/de has
one sign over the interval, the values of h at its ends tell exactly how often that happens.

A branch may run into z = -1 within the interval. Then the neighbourhood u < 1/v0 of it, u = 1/v, is looked at by
itself: with G = z^n D + N, up to a factor, Re G and Im G/u are analytic in u^2. Where one of them is not zero there is
no root but at u = 0 itself, and there G is real and linear in what depends on e.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property

from flint import acb, arb, arb_poly, fmpq

from specgate.sampled.delay_family import Family
from specgate.sampled.descartes import Part, covered, isolated
from specgate.sampled.enclosed_axis import parts
from specgate.terms.precision import working_precision

_NEAR = (2, 8, 32, 128, 1024)
"""Values of u at which the neighbourhood of z = -1 may begin, as 1/u."""
_BOXES = 24
_STEPS = 60
_SHORT = fmpq(1, 1 << 8)


@dataclass(frozen=True)
class Branch:
    """A root x of E (or several that are not told apart) over an interval of e.

    angle: theta. phase: arg(-N/D). turn, own: their slopes over e, if told.
    """

    x: arb
    angle: arb
    phase: arb
    turn: arb | None
    own: arb | None

    def total(self, whole: int) -> arb:
        """Return h."""
        return self.angle * whole - self.phase

    def slope(self, whole: int) -> arb | None:
        """Return dh/de over the interval, None where it is not told."""
        return None if self.turn is None or self.own is None else self.turn * whole - self.own


@dataclass(frozen=True)
class AtEnd:
    """G at z = -1 over an interval of e, and its slope."""

    value: arb
    slope: arb


class Cell:
    """The loop with delays n T + e, low <= e <= high; one of them where both are the same."""

    def __init__(self, family: Family, low: fmpq, high: fmpq) -> None:
        self.family, self.low, self.high, self.bits = family, low, high, family.bits
        with working_precision(self.bits):
            left = arb(family.period - high).union(arb(family.period - low))
        self._opened = family.opened
        self._answer, self._slope = family.over(left)

    # --- branches -----------------------------------------------------------------------------------------

    @cached_property
    def _in_w(self) -> tuple[tuple[arb_poly, arb_poly], ...]:
        """Even and odd parts of D, N and dN/d(left) on the axis."""
        with working_precision(self.bits):
            return tuple(parts(arb_poly(one)) for one in (self._opened, self._answer, self._slope))

    @cached_property
    def _excess(self) -> arb_poly:
        (c, d), (a, b), _ = self._in_w
        with working_precision(self.bits):
            x = arb_poly([0, 1])
            found = a * a + x * b * b - c * c - x * d * d
        # at z = 1 no root is on the circle then: G = 2 D there
        return arb_poly([0, *found.coeffs()[1:]]) if self.family.unit_at_one else found

    @cached_property
    def _found(self) -> tuple[tuple[Part, ...], fmpq | None] | None:
        """The roots, and where the neighbourhood of z = -1 begins if that has to be looked at; None: not told."""
        whole = self._isolated(self._excess)
        if whole is not None:
            return whole, None
        for inverse in _NEAR:
            end = fmpq(inverse * inverse)
            inner = self._isolated(self._up_to(end))
            if inner is not None:
                below = ((end * low / (1 + low), end * high / (1 + high), alone) for low, high, alone in inner)
                return tuple(below), fmpq(1, inverse)
        return None

    def _isolated(self, p: arb_poly) -> tuple[Part, ...] | None:
        """Return intervals outside of which p has no positive root.

        Only over a short interval of e may one of them hold more than one: two branches meet there. It tells nothing
        but that no root is elsewhere.
        """
        long = self.high - self.low > self.family.period * _SHORT
        found = (isolated if long else covered)(p, self.bits)
        return None if found is None else tuple(found)

    def _up_to(self, end: fmpq) -> arb_poly:
        """Return (1 + t)^n E(end t/(1 + t)), whose positive roots are those of E below `end`."""
        coefficients = self._excess.coeffs()
        with working_precision(self.bits):
            result, power = arb_poly([0]), arb_poly([1])
            above, below = arb_poly([0, end]), arb_poly([1, 1])
            for c in reversed(coefficients):
                result, power = result * above + power * c, power * below
            return result

    def _narrowed(self, low: fmpq, high: fmpq) -> arb:
        """Return a ball of the only root in an interval: by interval Newton steps, or by its change of sign."""
        with working_precision(self.bits):
            rate = self._excess.derivative()
            for _ in range(_STEPS):
                width, middle = high - low, (low + high) / 2
                slope = rate(arb(low).union(arb(high)))
                if not slope.contains(0):
                    met = middle - self._excess(arb(middle)) / slope
                    low, high = max(low, met.lower().fmpq()), min(high, met.upper().fmpq())
                if (high - low) * 2 > width:
                    low, high = self._part(low, high)
                if (high - low) * 4 > width * 3:
                    break
            return arb(low).union(arb(high))

    def _part(self, low: fmpq, high: fmpq) -> tuple[fmpq, fmpq]:
        """Return a part over which the sign changes; all of it where that is not told.

        Two places to cut at: the root may be on one of them.
        """
        first, last = self._excess(arb(low)), self._excess(arb(high))
        for share in (fmpq(31, 64), fmpq(35, 64)):
            cut = low + (high - low) * share
            value = self._excess(arb(cut))
            if value * first < 0 or value * last > 0:
                return low, cut
            if value * last < 0 or value * first > 0:
                return cut, high
        return low, high

    @property
    def told(self) -> bool:
        """Whether the branches are told apart."""
        return self._found is not None

    @cached_property
    def branches(self) -> tuple[Branch, ...]:
        """The branches, by frequency."""
        if self._found is None:
            return ()
        return tuple(self._branch(low, high, alone=alone) for low, high, alone in self._found[0])

    @property
    def empty(self) -> bool:
        """Whether no root is on the circle, whatever n is."""
        return self._found is not None and not self._found[0] and self._found[1] is None

    def _branch(self, low: fmpq, high: fmpq, *, alone: bool) -> Branch:
        opened, answer, slope = self._in_w
        with working_precision(self.bits):
            x = self._narrowed(low, high) if alone else arb(low).union(arb(high))
            v = x.sqrt()
            below, above, moved = (acb(even(x), v * odd(x)) for even, odd in (opened, answer, slope))
            angle = 2 * v.atan()
            ratio = above / below
            # arg(-r) as half a turn from arg r where -r is near the cut
            phase = (-ratio).arg() if ratio.real < 0 else ratio.arg() + arb.pi()
            if not alone or below.contains(0) or above.contains(0):
                return Branch(x, angle, phase, None, None)
            turning = _along(answer, x, v) / above - _along(opened, x, v) / below
            share = moved / above
            if turning.real.contains(0):
                return Branch(x, angle, phase, None, None)
            moving = share.real / turning.real  # dv/de, for e = period - left
            return Branch(x, angle, phase, 2 * moving / (1 + x), turning.imag * moving - share.imag)

    # --- at z = -1 ----------------------------------------------------------------------------------------

    @property
    def ends(self) -> bool:
        """Whether a branch may run into z = -1."""
        return self._found is None or self._found[1] is not None

    def may_end(self, whole: int) -> bool:
        """Whether a root may be at z = -1; none is elsewhere near it. Raises Unclear."""
        if self._found is None:
            raise Unclear
        near, ends = self._found[1], False
        if near is None:
            return False
        with working_precision(self.bits):
            for low, high in _boxes(near):
                real, imaginary = self._around(whole, arb(low).union(arb(high)))
                if not real.contains(0):
                    continue
                if imaginary.contains(0):
                    raise Unclear
                ends = ends or low == 0
        return ends

    def at_end(self, whole: int) -> AtEnd:
        """Return G at z = -1."""
        with working_precision(self.bits):
            opened, answer, slope = (self._reversed(p)[0][0] for p in (self._opened, self._answer, self._slope))
            return AtEnd(answer + (-opened if whole % 2 else opened), -slope)

    def _reversed(self, p: list[arb]) -> tuple[arb_poly, arb_poly]:
        return parts(arb_poly(p[::-1]))

    def _around(self, whole: int, u: arb) -> tuple[arb, arb]:
        """Return Re G and -Im G/u over a part of the neighbourhood."""
        (c, d), (a, b) = self._reversed(self._opened), self._reversed(self._answer)
        y = u * u
        sign = -1 if whole % 2 else 1
        turned = 2 * whole * u.atan()
        # atan(u)/u lies between 1/(1 + u^2) and 1
        share = turned.sinc() * 2 * whole * (1 / (1 + y)).union(arb(1))
        real = sign * (turned.cos() * c(y) - share * y * d(y)) + a(y)
        imaginary = sign * (turned.cos() * d(y) + share * c(y)) + b(y)
        return real, imaginary


class Unclear(Exception):
    """An interval of e has to be cut."""


def _along(part: tuple[arb_poly, arb_poly], x: arb, v: arb) -> acb:
    """Return dp/dv of p = even(x) + jv odd(x), x = v^2."""
    even, odd = part
    return acb(2 * v * even.derivative()(x), odd(x) + 2 * x * odd.derivative()(x))


def _boxes(end: fmpq) -> Iterator[tuple[fmpq, fmpq]]:
    for k in range(_BOXES):
        yield end * k / _BOXES, end * (k + 1) / _BOXES
