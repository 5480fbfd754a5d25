"""The last piece of a sum of waves, in units of its own: what the tails and the lasting sign are taken from."""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property

from flint import arb, fmpq, fmpq_poly

from specgate.response.asymptote import lasting_sign, leading_mode
from specgate.response.deviation import LOWEST, Modal
from specgate.response.modes import Expansion, Mode, dyadic
from specgate.response.segments import exact, float_of
from specgate.response.tables import FloatModes
from specgate.response.tail import tail
from specgate.terms.precision import working_precision


class Ending(Modal):
    """A sum of decaying modes in the time from `since` (s) on, in powers of two of time and value that suit it.

    expand: the modes by precision, times counted from `since`, in seconds and SI.
    """

    def __init__(self, since: fmpq, expand: Callable[[int], Expansion]) -> None:
        self.since = since
        self.expand = expand
        first = expand(LOWEST)
        speeds = [abs(mode.pole) for mode in first.modes]
        self._time = max((_exponent(speed) for speed in speeds), default=0)
        sizes = [abs(c) for mode in first.rescaled(self._time, 0).modes for c in mode.coefficients]
        self._value = max((_exponent(size) for size in sizes if not size.is_zero()), default=0)
        self._kept: dict[int, Expansion] = {}

    @property
    def initial(self) -> fmpq:
        """Not used: nothing of an ending is a step."""
        return fmpq(0)

    @property
    def change(self) -> float:
        """It is in units of its modes."""
        return 1.0

    def at(self, bits: int) -> Expansion:
        """Return the modes in these units."""
        if bits not in self._kept:
            self._kept[bits] = self.expand(bits).rescaled(self._time, self._value)
        return self._kept[bits]

    @cached_property
    def table(self) -> FloatModes:
        """The modes in floats."""
        return FloatModes.of(self.at(LOWEST), fmpq(0))

    def below(self, level: fmpq) -> fmpq | None:
        """Return a time (s) from which on the sum is at most a level, not far from the least; None: none found."""
        if not self.at(LOWEST).modes:
            return self.since
        scaled = level * dyadic(-self._value)
        height = float_of(scaled) * (1.0 - 1e-15)
        found = tail(self, height, lambda bits: _ball(scaled, bits))
        return None if found is None else self.since + found * dyadic(-self._time)

    def lasting(self, denominator: fmpq_poly) -> tuple[int, fmpq] | None:
        """Return the sign that the sum has for good and since when (s); None: it has none, or not told."""
        modes = self.at(LOWEST).modes
        if not modes:
            return 0, self.since
        if _doubled(self.at(LOWEST)):
            return None
        stretched = fmpq_poly([c * dyadic(self._time * power) for power, c in enumerate(denominator.coeffs())])
        found = lasting_sign(self.at(LOWEST), stretched)
        return None if found is None else (found.sign, self.since + exact(found.since) * dyadic(-self._time))

    def rest(self, time: fmpq) -> tuple[fmpq, fmpq]:
        """Return bounds of the integrals of the magnitude and of the square of the sum from a time (s) on.

        With T counted from `since`, the integral of t^j e^(-at) over [T, inf) is
        e^(-aT) sum_i j!/(j-i)! T^(j-i)/a^(i+1), and the sum is at most that of the suprema of |c| t^j e^(-at) there.
        """
        expansion = self.expand(LOWEST)
        with working_precision(LOWEST):
            local = arb(time - self.since)
            area, height = arb(0), arb(0)
            for mode in expansion.modes:
                for power, c in enumerate(mode.coefficients):
                    area += abs(c) * _beyond(-mode.pole.real, power, local)
                    height += abs(c) * _greatest(-mode.pole.real, power, local)
            return area.upper().fmpq(), (area * height).upper().fmpq()


def _doubled(expansion: Expansion) -> bool:
    """Whether real modes as slow as the slowest may be one: those of different waves may share a pole."""
    lead = leading_mode(expansion)
    real = [mode for mode in expansion.modes if not mode.oscillates and mode.pole.real.overlaps(lead.pole.real)]
    return len(real) > 1


def derived(expansion: Expansion) -> Expansion:
    """Return the expansion of the derivative."""
    rows = expansion.derivative_rows(2)[1]
    modes = (Mode(mode.pole, row) for mode, row in zip(expansion.modes, rows, strict=True))
    return Expansion(fmpq(0), tuple(modes), expansion.bits)


def _beyond(rate: arb, power: int, time: arb) -> arb:
    """Return the integral of t^power e^(-rate t) from `time` on."""
    total, factor = arb(0), 1 / rate
    for i in range(power + 1):
        total += factor * time ** (power - i)
        factor = factor * (power - i) / rate
    return total * (-rate * time).exp()


def _greatest(rate: arb, power: int, time: arb) -> arb:
    """Return the supremum of t^power e^(-rate t) from `time` on."""
    summit = time.max(power / rate)
    return summit**power * (-rate * summit).exp()


def _ball(value: fmpq, bits: int) -> arb:
    with working_precision(bits):
        return arb(value)


def _exponent(value: arb) -> int:
    mantissa, exponent = value.mid().man_exp()
    return int(mantissa).bit_length() + int(exponent)
