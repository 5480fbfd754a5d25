"""A sum of decaying modes with a bounded rest: its values, when it stays small, and which sign it keeps."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from flint import arb, fmpq

from specgate.delays.modal import Modal
from specgate.delays.remainder import ORDERS, Remainder
from specgate.delays.steps import Mode, Values
from specgate.terms.precision import working_precision

_BITS = 64
_DOUBLINGS = 200
_HALVINGS = 40


@dataclass(frozen=True)
class Fading:
    """modes: x counted from `origin`. rest: bound of what they leave. left_out: that of dead modes, by derivative."""

    modes: tuple[Mode, ...]
    rest: Remainder | None
    origin: fmpq
    bits: int = 2 * _BITS + 64
    left_out: tuple[arb, ...] = ()

    def at(self, time: arb, at_origin: Sequence[fmpq]) -> Values:
        """Return the sum with its derivatives, plus the residue at s = 0: sum of at_origin[l] t^l / l!."""
        with working_precision(self.bits):
            if not self.modes and self.rest is None:
                nothing = arb("nan")
                return nothing, nothing, nothing, nothing
            total = [arb(0)] * 4
            for mode in self.modes:
                mode.add(total, time - self.origin)
            for order in ORDERS:
                total[order] += _polynomial(at_origin, order, time) + arb(0, self._left(order, time))
        return total[0], total[1], total[2], total[3]

    def _left(self, order: int, time: arb) -> arb:
        size = arb(0) if self.rest is None else self.rest.at(order, arb(time.lower()))
        return (size + self.left_out[order]).abs_upper() if self.left_out else size

    @property
    def speed(self) -> float:
        """The speed of the fastest mode (rad/s)."""
        return max((float(abs(mode.pole).mid()) for mode in self.modes), default=0.0)

    def size(self, order: int, time: fmpq) -> arb:
        """Return what the sum, without the part at s = 0, does not exceed from a time on."""
        at = arb(time)
        total = sum((mode.envelope(order, at - self.origin) for mode in self.modes), arb(0))
        return total if self.rest is None else (total + self.rest.at(order, at)).abs_upper()

    def below(self, order: int, size: fmpq, since: fmpq) -> fmpq | None:
        """Return a time not before `since` from which on the sum is at most `size`; None: not found."""
        limit = arb(size)
        return _first(lambda time: bool(self.size(order, time) <= limit), since)

    def lasting(self, since: fmpq) -> tuple[int, fmpq] | None:
        """Return the sign that the sum keeps, and from when on; None where its slowest mode is no real pole.

        Beyond the time found the slowest mode exceeds the envelopes of the others, all of which decay faster.
        """
        if not self.modes:
            return None
        with working_precision(_BITS):
            slowest = max(self.modes, key=lambda mode: mode.pole.real.mid().fmpq())
            others = tuple(mode for mode in self.modes if mode is not slowest)
            ahead = all(mode.pole.real < slowest.pole.real for mode in others)
            lead = slowest.polynomials[0]
            if not slowest.pole.imag.is_zero() or not ahead or lead.degree() > 0 or lead[0].real.contains(0):
                return None
            rest = Fading(others, self.rest, self.origin)

            def decided(time: fmpq) -> bool:
                at = arb(time) - self.origin
                return bool(rest.size(0, time) < abs(lead[0].real) * (slowest.pole.real * at).exp())

            found = _first(decided, max(since, rest.falling_from(slowest.pole.real)))
        if found is None:
            return None
        return (1 if lead[0].real > 0 else -1), found

    def falling_from(self, rate: arb) -> fmpq:
        """Return a time from which on every envelope falls faster than e^(rate t)."""
        latest = fmpq(0)
        for mode in self.modes:
            power = mode.polynomials[0].degree()
            if power > 0:
                latest = max(latest, (arb(power) / (rate - mode.pole.real)).upper().fmpq() + self.origin)
        return latest

    def integrals(self, time: fmpq) -> tuple[fmpq, fmpq]:
        """Return bounds of the integrals of the magnitude and of the square from a time on."""
        with working_precision(_BITS):
            at, total = arb(time), arb(0)
            for mode in self.modes:
                rate = -mode.pole.real - arb(mode.polynomials[0].degree()) / (at - self.origin)
                total += mode.envelope(0, at - self.origin) / rate if rate > 0 else arb("inf")
            if self.rest is not None:
                total += self.rest.at(0, at) / self.rest.rate
            square = total * self.size(0, time)
            if not square.is_finite():
                raise ValueError("the modes still grow at this time")
            return total.upper().fmpq(), square.upper().fmpq()


def fading_of(modal: Modal, since: fmpq, tiny: arb) -> Fading:
    """Return the modes that are still alive at a time; each that is left out is below `tiny` from then on."""
    bits = 2 * _BITS + 64
    with working_precision(_BITS):
        alive: list[Mode] = []
        left = [arb(0)] * len(ORDERS)
        for mode in modal.modes(bits):
            sizes = [mode.envelope(order, arb(since)) for order in ORDERS]
            if sizes[0] < tiny:
                left = [(total + size).abs_upper() for total, size in zip(left, sizes, strict=True)]
            else:
                alive.append(mode)
    return Fading(tuple(alive), modal.rest, fmpq(0), bits, tuple(left))


def _first(holds: Callable[[fmpq], bool], since: fmpq) -> fmpq | None:
    """Return a time not before `since` from which on something holds that holds for good once it does."""
    with working_precision(_BITS):
        if holds(since):
            return since
        step = since if since > 0 else fmpq(1)
        for _ in range(_DOUBLINGS):
            if holds(since + step):
                break
            step = step * 2
        else:
            return None
        low, high = since, since + step
        for _ in range(_HALVINGS):
            middle = (low + high) / 2
            low, high = (low, middle) if holds(middle) else (middle, high)
            if (high - low) * 1000 < high:
                break
        return high


def _polynomial(coefficients: Sequence[fmpq], order: int, time: arb) -> arb:
    """Return a derivative of sum of c[l] t^l / l!."""
    total, factor = arb(0), arb(1)
    for power, coefficient in enumerate(coefficients[order:]):
        factor = factor * time / power if power else factor
        total += factor * coefficient
    return total
