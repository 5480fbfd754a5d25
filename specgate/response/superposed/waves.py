"""Waves: analytic responses that begin, and perhaps end, at stated times; every input is a sum of a few of them."""

from __future__ import annotations

from collections.abc import Iterable
from functools import cached_property
from typing import Protocol

from flint import arb, fmpq, fmpq_poly

from specgate.response.budget import OutOfWork
from specgate.response.deviation import LOWEST, Deviation
from specgate.response.modes import Expansion, Mode, at_origin, dyadic, expand_swinging
from specgate.response.segments import exact
from specgate.systems.polynomials import order_at_origin
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision


class Wave(Protocol):
    """f(t - begin) for begin <= t < end (None: for ever), zero else; f is a polynomial in t and a sum of modes.

    key: waves with one key have the same poles, in the same order and multiplicity. poles: a polynomial with all poles
    of f beside those of its input. bumpy: poles that no polynomial with rational coefficients has are among them.
    """

    begin: fmpq
    end: fmpq | None
    jump: fmpq
    key: tuple[object, ...]
    poles: fmpq_poly
    drift: fmpq_poly

    def at(self, bits: int) -> Expansion:
        """Return f without its polynomial, at a precision of at least `bits`."""

    def start(self) -> tuple[fmpq, int] | None:
        """Return a length over which f moves strictly one way from its begin on, and which way; None: not told."""

    def slope(self) -> Wave | None:
        """Return f'; None where f jumps."""


class StepWave(Wave):
    """The response of a coprime, proper fraction with monic denominator to a step of `size` at `begin`."""

    def __init__(self, numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq, begin: fmpq) -> None:
        self._fraction = (numerator, denominator, size)
        self.begin = begin
        self.end = None
        self.jump = numerator[denominator.degree()] * size
        self.key = _key("step", denominator)
        self.poles = denominator
        self.drift = _drift(numerator * size, denominator)

    @cached_property
    def _deviation(self) -> Deviation:
        return Deviation(*self._fraction)

    def at(self, bits: int) -> Expansion:
        """Return f without its polynomial, at a precision of at least `bits`."""
        scaled = self._deviation
        whole = scaled.at(bits).rescaled(-scaled.time_exponent, -scaled.value_exponent)
        return Expansion(fmpq(0), _without_origin(whole.modes), whole.bits)

    def start(self) -> tuple[fmpq, int] | None:
        """Return a length over which f moves strictly one way from its begin on, and which way; None: not told."""
        try:
            start = self._deviation.start
        except OutOfWork:
            return None
        if start is None:
            return None
        return exact(start.length) * dyadic(-self._deviation.time_exponent), start.direction

    def slope(self) -> StepWave | None:
        """Return f'; None where f jumps."""
        numerator, denominator, size = self._fraction
        steeper = _differentiated(numerator, denominator)
        return None if steeper is None else StepWave(steeper.numerator, steeper.denominator, size, self.begin)


class BumpWave(Wave):
    """The response of such a fraction to size * (1 - cos(2 pi t / period)) over one period from `begin` on.

    Raises OutOfWork for a fraction with more than one pole at the origin.
    """

    def __init__(self, numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq, period: fmpq, begin: fmpq) -> None:
        if order_at_origin(denominator) > 1:
            raise OutOfWork("the response of several integrators to one minus a cosine is not searched")
        self._fraction = (numerator, denominator, size)
        self.period = period
        self.begin = begin
        self.end: fmpq | None = begin + period
        self.jump = fmpq(0)
        self.key = _key(f"bump {period}", denominator)
        self.poles = denominator
        self.drift = _drift(numerator * size, denominator)

    def at(self, bits: int) -> Expansion:
        """Return f without its polynomial, at a precision of at least `bits`; its last mode is that of the input."""
        whole = expand_swinging(*self._fraction, lambda: 2 * arb.pi() / arb(self.period), bits)
        return Expansion(fmpq(0), _without_origin(whole.modes), whole.bits)

    def start(self) -> tuple[fmpq, int] | None:
        """Return a length over which f moves strictly one way from its begin on, and which way; None: not told.

        f' is the convolution of the slope of the input, which has one sign up to half the period, with the slope of
        the step response, and the jump of that times the former: one-signed as long as jump and slope agree.
        """
        numerator, denominator, size = self._fraction
        step = StepWave(numerator, denominator, fmpq(1), fmpq(0))
        sign, half = (1 if size > 0 else -1), self.period / 2
        jump = (step.jump > 0) - (step.jump < 0)
        if denominator.degree() == 0:
            return (half, sign * jump) if jump else None
        start = step.start()
        if start is None or start[1] * jump < 0:
            return None
        return min(half, start[0]), sign * start[1]

    def slope(self) -> BumpWave | None:
        """Return f'; None where the fraction passes its input on at once, which then is differentiated."""
        numerator, denominator, size = self._fraction
        steeper = _differentiated(numerator, denominator)
        if steeper is None:
            return None
        return BumpWave(steeper.numerator, steeper.denominator, size, self.period, self.begin)


class AfterBump(Wave):
    """What follows a bump: its wave less itself one period later, in which the oscillation of the input is gone."""

    def __init__(self, bump: BumpWave) -> None:
        assert bump.end is not None
        self._bump = bump
        self.begin = bump.end
        self.end = None
        self.jump = fmpq(0)
        self.key = _key("step", bump.poles)
        self.poles = bump.poles
        self.drift = bump.drift(fmpq_poly([bump.period, 1])) - bump.drift

    def at(self, bits: int) -> Expansion:
        """Return f without its polynomial, at a precision of at least `bits`."""
        whole = self._bump.at(bits)
        own = Expansion(fmpq(0), whole.modes[:-1], whole.bits)
        return combined([own.rebased(self._bump.period), negative(own)], ["", ""])

    def start(self) -> tuple[fmpq, int] | None:
        """Return None: it is not told."""
        return None

    def slope(self) -> AfterBump | None:
        """Return f'; None where that of the bump is not told."""
        steeper = self._bump.slope()
        return None if steeper is None else AfterBump(steeper)


def _differentiated(numerator: fmpq_poly, denominator: fmpq_poly) -> TransferFunction | None:
    """Return s times a fraction, reduced; None where that is improper."""
    if numerator.degree() >= denominator.degree():
        return None
    return TransferFunction(numerator.left_shift(1), denominator).reduced()


def _key(kind: str, denominator: fmpq_poly) -> tuple[object, ...]:
    return (kind, *map(str, denominator.coeffs()))


def _drift(numerator: fmpq_poly, denominator: fmpq_poly) -> fmpq_poly:
    """Return the polynomial in t that a step response has."""
    offset, drift = at_origin(numerator, denominator)
    return fmpq_poly([offset, *drift])


def _without_origin(modes: Iterable[Mode]) -> tuple[Mode, ...]:
    return tuple(mode for mode in modes if not mode.pole.is_zero())


def negative(expansion: Expansion) -> Expansion:
    """Return the expansion with the opposite sign."""
    with working_precision(expansion.bits):
        modes = tuple(Mode(mode.pole, tuple(-c for c in mode.coefficients)) for mode in expansion.modes)
    return Expansion(-expansion.offset, modes, expansion.bits)


def combined(expansions: Iterable[Expansion], keys: Iterable[object]) -> Expansion:
    """Return the sum of expansions in one time; those with one key share their modes, which are added."""
    groups: dict[object, list[Mode]] = {}
    bits, offset = LOWEST, fmpq(0)
    for expansion, key in zip(expansions, keys, strict=True):
        bits, offset = max(bits, expansion.bits), offset + expansion.offset
        with working_precision(expansion.bits):
            known = groups.get(key)
            modes = list(expansion.modes)
            groups[key] = modes if known is None else [_added(*pair) for pair in zip(known, modes, strict=True)]
    return Expansion(offset, tuple(mode for modes in groups.values() for mode in modes), bits)


def _added(one: Mode, other: Mode) -> Mode:
    return Mode(one.pole, tuple(a + b for a, b in zip(one.coefficients, other.coefficients, strict=True)))
