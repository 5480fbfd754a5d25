"""Sums of waves as pieces: pulses, bumps, ramps that are held, several inputs at once."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import cached_property
from math import frexp

from flint import acb, arb, fmpq, fmpq_poly

from specgate.response.accounts import Footing
from specgate.response.answers import Absent
from specgate.response.modes import Expansion, Mode, dyadic
from specgate.response.pieces import Pieces
from specgate.response.record import modal_footing
from specgate.response.segments import at_most, exact
from specgate.response.superposed.closing import closing
from specgate.response.superposed.ending import Ending, derived
from specgate.response.superposed.integrals import integral, square_integral
from specgate.response.superposed.lasting import Lasting
from specgate.response.superposed.waves import Wave, combined
from specgate.systems.polynomials import least_common_multiple, order_at_origin
from specgate.systems.stability import is_hurwitz
from specgate.terms.precision import HIGHEST, working_precision

_WIDE, _NARROW = 1, 2.0**-40
"""Between them, in radians, Taylor polynomials are worth their price where modes cancel."""

_FEW, _TERMS = 6, 14
_SEEN = 8
UNSETTLED = "the response does not settle"
_GROUND = (
    "between two kinks of the input a polynomial and a sum of modes e^(pt) at certified poles p, with residues in balls"
)
_RUNGS = (128, 256, 512, 1024, 2048, HIGHEST, HIGHEST + 512)


class Superposed(Pieces):
    """The sum of waves; between two instants at which one begins or ends it is one polynomial and one sum of modes.

    It settles if the sum of the polynomials is constant in the end and every pole, of all waves, decays. A pole that
    does not is never cancelled by delay: sums of e^(-p d) over different rational d with algebraic factors vanish for
    no algebraic p but zero (Lindemann and Weierstrass). So waves that begin together must be one fraction, reduced.
    """

    def __init__(self, waves: Sequence[Wave]) -> None:
        self._waves = tuple(waves)
        times = {fmpq(0), *(wave.begin for wave in waves), *(wave.end for wave in waves if wave.end is not None)}
        self._kinks = sorted(times)
        self._sums: dict[tuple[int, int], Expansion] = {}
        self._speeds: dict[int, float] = {}
        self._wholes: dict[tuple[int, int], Expansion] = {}

    @cached_property
    def final(self) -> fmpq | Absent:
        """The limit of y, exact, or the reason why there is none."""
        drift = self._drift(len(self._kinks) - 1)
        if drift.degree() > 0 or not self._decays:
            return Absent(UNSETTLED)
        return drift[0]

    @cached_property
    def _decays(self) -> bool:
        return is_hurwitz(self._poles)

    @cached_property
    def _poles(self) -> fmpq_poly:
        """The poles of all waves but those at the origin, which the polynomials show."""
        different = {wave.key: wave.poles for wave in self._waves if wave.end is None}
        return least_common_multiple(poles.right_shift(order_at_origin(poles)) for poles in different.values())

    def kink(self, index: int) -> fmpq | None:
        """Return where a piece begins."""
        return self._kinks[index] if index < len(self._kinks) else None

    def _active(self, index: int) -> list[Wave]:
        begin = self._kinks[index]
        return [wave for wave in self._waves if wave.begin <= begin and (wave.end is None or begin < wave.end)]

    def _drift(self, index: int) -> fmpq_poly:
        """Return the polynomial of a piece in the time from its kink on."""
        begin = self._kinks[index]
        return sum((wave.drift(fmpq_poly([begin - wave.begin, 1])) for wave in self._active(index)), fmpq_poly([0]))

    def _sum(self, index: int, bits: int) -> Expansion:
        """Return the modes of a piece in the time from its kink on, without its polynomial."""
        rung = next((rung for rung in _RUNGS if rung >= bits), _RUNGS[-1])
        if (index, rung) not in self._sums:
            begin, waves = self._kinks[index], self._active(index)
            rebased = [_rebased(wave.at(rung), begin - wave.begin) for wave in waves]
            self._sums[index, rung] = combined(rebased, [wave.key for wave in waves])
        return self._sums[index, rung]

    def _whole(self, index: int, bits: int) -> Expansion:
        """Return a piece in the time from its kink on, its polynomial as offset and a mode at the origin."""
        modes = self._sum(index, bits)
        key = (index, modes.bits)
        if key not in self._wholes:
            drift = self._drift(index)
            with working_precision(modes.bits):
                growth = (acb(0), *(acb(arb(c)) for c in drift.coeffs()[1:]))
            origin = (Mode(acb(0), growth),) if drift.degree() > 0 else ()
            self._wholes[key] = Expansion(drift[0], (*modes.modes, *origin), modes.bits)
        return self._wholes[key]

    def derivatives(self, index: int, time: arb, bits: int) -> tuple[arb, arb, arb, arb]:
        """Return balls of y, y', y'', y''' over a ball of times inside the closed piece, one-sided at its ends."""
        whole = self._whole(index, bits)
        with working_precision(whole.bits):
            local = time - arb(self._kinks[index])
            reach = local.rad() * self.speed(index)
            if reach > _WIDE:
                value, first, second, third = whole.envelope(local)
            elif reach > _NARROW and self.guard() > _FEW:
                value, first, second, third = whole.taylor(local, _TERMS)
            else:
                value, first, second, third = whole.deviation(local)
            return value + arb(whole.offset), first, second, third

    def guard(self) -> int:
        """Return how many bits cancel: the modes against the largest value seen at a few instants of each piece.

        Modes that are small beside a constant need as many bits more.
        """
        return self._guard

    @cached_property
    def _guard(self) -> int:
        seen, summed = 0.0, 0.0
        for index in range(min(_SEEN, len(self._kinks))):
            modes = self._sum(index, _RUNGS[1]).modes
            unit = exact(1.0 / (self.speed(index) or 1.0))
            with working_precision(_RUNGS[1]):
                summed = max([summed, *(at_most(abs(c)) for mode in modes for c in mode.coefficients)])
                times = [arb(unit * dyadic(k)) for k in range(-2, 10)]
            whole = self._whole(index, _RUNGS[1])
            with working_precision(whole.bits):
                values = [whole.deviation(time)[0] + arb(whole.offset) for time in times]
            seen = max([seen, *(at_most(abs(value)) for value in values)])
        if not (summed > 0.0 and seen > 0.0):
            return 0
        return min(abs(frexp(summed)[1] - frexp(seen)[1]), _RUNGS[3])

    def polynomial(self, index: int) -> fmpq_poly | None:
        """Return a piece without modes as the polynomial that it is."""
        return None if self._sum(index, _RUNGS[0]).modes else self._drift(index)

    @cached_property
    def _ending(self) -> Ending:
        return Ending(self._kinks[-1], lambda bits: self._sum(len(self._kinks) - 1, bits))

    @cached_property
    def _slope_ending(self) -> Ending:
        return Ending(self._kinks[-1], lambda bits: derived(self._sum(len(self._kinks) - 1, bits)))

    def settled_by(self, distance: fmpq) -> fmpq | None:
        """Return a time from which on |y - final| <= distance is proved; None: none found."""
        return None if isinstance(self.final, Absent) else self._ending.below(distance)

    @cached_property
    def _lasting_part(self) -> Lasting:
        return Lasting(self._ending, self._drift(len(self._kinks) - 1))

    def slope(self) -> Superposed | None:
        """Return the pieces of y'; None where y jumps."""
        slopes = [wave.slope() for wave in self._waves]
        told = [slope for slope in slopes if slope is not None]
        return Superposed(told) if len(told) == len(slopes) else None

    def footing(self) -> Footing:
        """Return what a proof stands on: the poles of all waves, those of waves of one kind once."""
        different = {wave.key: wave for wave in self._waves}.values()
        return modal_footing(_GROUND, [mode for wave in different for mode in wave.at(_RUNGS[0]).modes], _RUNGS[0])

    def runaway(self) -> int | None:
        """Return where y goes if it grows without bound: 1, -1, 0 both ways; None: it does not, or not told."""
        return self._lasting_part.runaway()

    def reach(self, sign: int) -> Callable[[int], arb] | None:
        """Return the limit superior of sign * y of what swings for ever; None: not told."""
        return self._lasting_part.reach(sign)

    def beyond(self, sign: int, level: fmpq) -> fmpq | None:
        """Return a time from which on sign * y <= level is proved; None: none found."""
        return self._lasting_part.beyond(sign, level)

    def slow_by(self, rate: fmpq) -> fmpq | None:
        """Return a time from which on |y'| <= rate is proved; None: none found."""
        return None if isinstance(self.final, Absent) else self._slope_ending.below(rate)

    def lasting(self) -> tuple[int, fmpq] | None:
        """Return the sign that y - final has for good and since when; None: it has none, or not told."""
        return None if isinstance(self.final, Absent) else self._ending.lasting(self._poles)

    def rest(self, time: fmpq) -> tuple[fmpq, fmpq] | None:
        """Return bounds of the integrals of |y| and of y^2 from `time` on, for a final value of zero."""
        return self._ending.rest(time) if self.final == 0 else None

    def closing(self, bits: int) -> tuple[fmpq, arb] | None:
        """Return a time from which on one oscillation is left, and a ball of the integral of |y| from there on."""
        return closing(self._ending, bits) if self.final == 0 else None

    def speed(self, index: int) -> float:
        """Return how fast the piece varies (rad/s)."""
        if index not in self._speeds:
            with working_precision(_RUNGS[0]):
                modes = self._sum(index, _RUNGS[0]).modes
                self._speeds[index] = max((at_most(abs(mode.pole)) for mode in modes), default=0.0)
        return self._speeds[index]

    def jump(self, index: int) -> fmpq | None:
        """Return by how much y jumps at a kink."""
        return sum((wave.jump for wave in self._waves if wave.begin == self._kinks[index]), fmpq(0))

    def start(self, index: int) -> tuple[fmpq, int] | None:
        """Return how long y moves strictly one way from the first kink on, and which way; None: not told."""
        active = self._active(index)
        return active[0].start() if len(active) == 1 and active[0].begin == self._kinks[index] else None

    def area(self, index: int, left: fmpq, right: fmpq, bits: int) -> arb | None:
        """Return a ball of the integral of y over a part of a piece."""
        begin = self._kinks[index]
        return integral(self._sum(index, bits), self._drift(index), left - begin, right - begin)

    def square(self, index: int, left: fmpq, right: fmpq, bits: int) -> arb | None:
        """Return a ball of the integral of y^2 over a part of a piece."""
        begin = self._kinks[index]
        return square_integral(self._sum(index, bits), self._drift(index), left - begin, right - begin)


def _rebased(expansion: Expansion, shift: fmpq) -> Expansion:
    return expansion if shift == 0 else expansion.rebased(shift)
