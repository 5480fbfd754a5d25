"""The deviation of a response from its offset, scaled by powers of two so that poles and modes have size one."""

from __future__ import annotations

from functools import cached_property
from typing import Protocol

from flint import arb, fmpq, fmpq_poly

from specgate.response.early import lengthened
from specgate.response.modes import GUARD, Expansion, dyadic, expand, power_of_two
from specgate.response.segments import float_of
from specgate.response.start import Start, first_stretch
from specgate.response.tables import FloatModes
from specgate.terms.precision import HIGHEST, working_precision

LOWEST = 128
"""Bits of the expansion that floats are made from and that most questions are settled with."""

_RESOLVED = 80
"""Accuracy, in bits, of the highest coefficient of a mode."""

_LADDER = (LOWEST, 256, 512, 1024, 2048, HIGHEST, HIGHEST + 512)


class Modal(Protocol):
    """A sum of modes in normalised units that can be refined: what walks, panels and zeros work on."""

    @property
    def initial(self) -> fmpq:
        """Its value just after the step."""

    @property
    def table(self) -> FloatModes:
        """The modes in floats, times counted from the step."""

    @property
    def change(self) -> float:
        """How far it moves, in units of the sum of its modes; a hint of how far they cancel."""

    def at(self, bits: int) -> Expansion:
        """Return the expansion at a precision of the ladder that is at least `bits`."""


class Deviation(Modal):
    """g(t) = 2^-b (y(2^-a t) - offset), of the response y of a coprime, proper fraction with monic denominator.

    time_exponent is a, value_exponent b. `initial` is g(0+) and `offset` the offset, both exact and in units of 2^b;
    the offset is the final value where the response settles.
    """

    def __init__(self, numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq) -> None:
        self.fraction = (numerator, denominator, size)
        self._base, first = _resolved(numerator, denominator, size)
        speeds = [abs(mode.pole) for mode in first.modes]
        self.time_exponent = max((_exponent(speed) for speed in speeds if not speed.is_zero()), default=0)
        in_time = first.rescaled(self.time_exponent, 0)
        self.value_exponent = _exponent(_amplitude(in_time))
        self._expansions = {self._base: in_time.rescaled(0, self.value_exponent)}
        order = denominator.degree()
        jump = numerator[order] / denominator[order] * size
        self.offset: fmpq = self.to_units(first.offset)
        self._initial: fmpq = self.to_units(jump) - self.offset

    @property
    def initial(self) -> fmpq:
        """g(0+)."""
        return self._initial

    def to_units(self, value: fmpq) -> fmpq:
        """Return a value of the response in units of 2^b."""
        return value * dyadic(-self.value_exponent)

    def response(self, deviation: arb) -> arb:
        """Return y where g is `deviation`, with an error that is relative to g, however small g is beside y."""
        bits = min(max(LOWEST, deviation.rel_accuracy_bits()), HIGHEST) + GUARD
        gap = 0 if deviation.contains(0) else _exponent(arb(self.offset)) - _exponent(deviation)
        with working_precision(bits + max(0, gap)):
            return (arb(self.offset) + deviation) * power_of_two(self.value_exponent)

    def ceiling(self) -> arb:
        """Return a bound of |y| where every mode decays: the offset and the greatest size of each mode together."""
        expansion = self.at(LOWEST)
        with working_precision(expansion.bits):
            return ((abs(arb(self.offset)) + _amplitude(expansion)) * power_of_two(self.value_exponent)).upper()

    def to_time(self, time: arb, bits: int) -> arb:
        """Return a normalised time in seconds."""
        with working_precision(bits):
            return time * power_of_two(-self.time_exponent)

    def value_at(self, time: fmpq | arb, bits: int) -> arb:
        """Return a ball of y at a time in seconds, of relative radius 2^-bits if the time is known well enough."""
        precision, accuracy = max(LOWEST, bits), -(10**9)
        while True:
            expansion = self.at(precision)
            with working_precision(expansion.bits):
                value = self.response(expansion.deviation(arb(time) * power_of_two(self.time_exponent))[0])
            if value.rel_accuracy_bits() >= bits or value.rel_accuracy_bits() <= accuracy or precision > HIGHEST:
                return value
            accuracy, precision = value.rel_accuracy_bits(), 2 * precision

    def at(self, bits: int) -> Expansion:
        """Return the expansion at the first precision of the ladder that is at least `bits` (or at its last)."""
        step = next((rung for rung in _LADDER if rung >= max(bits, self._base)), _LADDER[-1])
        if step not in self._expansions:
            whole = expand(*self.fraction, step)
            self._expansions[step] = whole.rescaled(self.time_exponent, self.value_exponent)
        return self._expansions[step]

    @cached_property
    def change(self) -> float:
        """The larger of offset and jump beside it, in units of 2^b; 1 where the response returns to where it was."""
        if self.offset == 0 and self.initial == 0:
            return 1.0
        return max(abs(float_of(self.offset)), abs(float_of(self.initial)))

    @cached_property
    def table(self) -> FloatModes:
        """The modes in floats, times counted from the step."""
        return FloatModes.of(self.at(LOWEST), fmpq(0))

    @cached_property
    def denominator(self) -> fmpq_poly:
        """The polynomial whose roots are the poles in normalised time."""
        return _stretched(self.fraction[1], self.time_exponent)

    @cached_property
    def start(self) -> Start | None:
        """The monotone start of g, None where the response never moves."""
        numerator, _, size = self.fraction
        top = _stretched(numerator * (size * dyadic(-self.value_exponent)), self.time_exponent)
        bottom = self.denominator
        start = first_stretch(top, bottom)
        return None if start is None else lengthened(start, top, bottom, self.at(LOWEST))


def _resolved(numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq) -> tuple[int, Expansion]:
    """Return the first expansion of the ladder that resolves the highest coefficient of every mode.

    None of them is zero, because the fraction is coprime; beside a zero that all but cancels its pole it is small.
    """
    for bits in _LADDER:
        expansion = expand(numerator, denominator, size, bits)
        if all(mode.coefficients[-1].rel_accuracy_bits() >= _RESOLVED for mode in expansion.modes):
            break
    return bits, expansion


def _exponent(value: arb) -> int:
    """Return the binary exponent of the middle of a ball, about that of every number in it."""
    mantissa, exponent = value.mid().man_exp()
    return int(mantissa).bit_length() + int(exponent)


def _amplitude(expansion: Expansion) -> arb:
    """Return the sum of the sizes of the modes, of t^j e^{pt} at its summit where it has one."""
    with working_precision(LOWEST):
        total = arb(0)
        for mode in expansion.modes:
            decay = -mode.pole.real
            for j, c in enumerate(mode.coefficients):
                summit = (j / (decay * arb(1).exp())) ** j if j and decay > 0 else arb(1)
                total += abs(c) * summit
        return total


def _stretched(polynomial: fmpq_poly, exponent: int) -> fmpq_poly:
    """Return the polynomial in s / 2^exponent."""
    return fmpq_poly([c * dyadic(exponent * power) for power, c in enumerate(polynomial.coeffs())])
