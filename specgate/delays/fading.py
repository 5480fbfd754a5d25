"""What is left of a delayed response in the end: when it stays small, which sign it keeps, what its integral is."""

from __future__ import annotations

from collections.abc import Callable

from flint import arb, fmpq

from specgate.delays.remainder import Remainder
from specgate.delays.steps import Mode
from specgate.terms.precision import working_precision
from specgate.terms.records import record

_BITS = 64
_DOUBLINGS = 200
_HALVINGS = 40


@record
class Fading:
    """Decaying modes, x counted from `origin`, and a bound of what they leave, from a time `since` on."""

    modes: tuple[Mode, ...]
    rest: Remainder | None
    origin: fmpq
    since: fmpq

    def size(self, order: int, time: fmpq) -> arb:
        """Return what a derivative does not exceed from a time on."""
        at = arb(time)
        total = sum((mode.envelope(order, at - self.origin) for mode in self.modes), arb(0))
        return total if self.rest is None else (total + self.rest.at(order, at)).abs_upper()

    def below(self, order: int, size: fmpq) -> fmpq | None:
        """Return a time from which on a derivative is at most `size`; None: not found."""
        limit = arb(size)
        return _first(lambda time: bool(self.size(order, time) <= limit), self.since)

    def lasting(self) -> tuple[int, fmpq] | None:
        """Return the sign that the sum keeps, and from when on; None where its slowest mode is no real pole.

        Beyond the time found the slowest mode exceeds the envelopes of the others, all of which decay faster.
        """
        if not self.modes:
            return (0, self.since) if self.rest is None else None
        with working_precision(_BITS):
            slowest = max(self.modes, key=lambda mode: mode.pole.real.mid().fmpq())
            others = tuple(mode for mode in self.modes if mode is not slowest)
            ahead = all(mode.pole.real < slowest.pole.real for mode in others)
            lead = slowest.polynomials[0]
            if not slowest.pole.imag.is_zero() or not ahead or lead.degree() > 0 or lead[0].real.contains(0):
                return None
            rest = Fading(others, self.rest, self.origin, self.since)

            def decided(time: fmpq) -> bool:
                at = arb(time) - self.origin
                return bool(rest.size(0, time) < abs(lead[0].real) * (slowest.pole.real * at).exp())

            found = _first(decided, max(self.since, rest.falling_from(slowest.pole.real)))
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

    def integrals(self, time: fmpq) -> tuple[fmpq, fmpq] | None:
        """Return bounds of the integrals of the magnitude and of the square from a time on; None where it still grows.

        From x on t^j e^(-a t) is at most its value there times e^(-(a - j/x) (t - x)), for the logarithm of t^j is
        concave.
        """
        with working_precision(_BITS):
            at, total = arb(time), arb(0)
            for mode in self.modes:
                power = mode.polynomials[0].degree()
                rate = -mode.pole.real - (arb(power) / (at - self.origin) if power > 0 else 0)
                if not rate > 0:
                    return None
                total += mode.envelope(0, at - self.origin) / rate
            if self.rest is not None:
                total += self.rest.at(0, at) / self.rest.rate
            square = total * self.size(0, time)
            return total.upper().fmpq(), square.upper().fmpq()


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
