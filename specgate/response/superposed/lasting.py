"""What a sum of waves does in the end where it does not settle: run away, or swing about a constant.

With P the polynomial of the last piece, y = P + swings + the rest. A mode that grows outweighs all that grows less: the
fastest ones decide, to both sides if they are oscillations, and else to the side of the one real mode. If none grows
and P is not constant, its leading coefficient decides. If P is constant and one oscillation c e^(jwt) lasts, y comes as
near as one likes to P + |c|, again and again.
"""

from __future__ import annotations

from collections.abc import Callable

from flint import arb, fmpq, fmpq_poly

from specgate.response.asymptote import leading_mode
from specgate.response.deviation import LOWEST
from specgate.response.modes import Expansion, Mode
from specgate.response.superposed.ending import Ending
from specgate.terms.precision import working_precision

_DOUBLINGS = 200


class Lasting:
    """The end of one sum of waves: its modes as an ending, and its polynomial in the time from there on."""

    def __init__(self, ending: Ending, drift: fmpq_poly) -> None:
        self._ending = ending
        self._drift = drift
        modes = ending.expand(LOWEST).modes
        self._swings = [k for k, mode in enumerate(modes) if mode.pole.real.is_zero()]
        self._falls = [k for k, mode in enumerate(modes) if mode.pole.real < 0]
        self._bounded = len(self._swings) + len(self._falls) == len(modes) and all(
            len(modes[k].coefficients) == 1 for k in self._swings
        )
        self._rest = Ending(ending.since, lambda bits: ending.expand(bits).only(self._falls))

    def runaway(self) -> int | None:
        """Return where y goes if it grows without bound: 1, -1, 0 to both sides; None: it does not, or not told."""
        if not self._bounded:
            return self._growth(self._ending.expand(LOWEST))
        if self._drift.degree() <= 0:
            return None
        return 1 if self._drift.leading_coefficient() > 0 else -1

    def _growth(self, expansion: Expansion) -> int | None:
        with working_precision(expansion.bits):
            lead = leading_mode(expansion)
            power = len(lead.coefficients)
            others = (mode for mode in expansion.modes if mode is not lead)
            alone = all(_slower(mode, lead, power) for mode in others)
            if not alone or not (lead.pole.real > 0 or (power > 1 and lead.pole.real.is_zero())):
                return None
            if lead.oscillates:
                swings_more = lead.pole.real > 0 or power > self._drift.degree() + 1
                return 0 if swings_more and not lead.coefficients[-1].contains(0) else None
            top = lead.coefficients[-1].real
            return 1 if top > 0 else -1 if top < 0 else None

    def reach(self, sign: int) -> Callable[[int], arb] | None:
        """Return the limit superior of sign * y; None where not one oscillation about a constant lasts."""
        if not self._bounded or self._drift.degree() > 0 or len(self._swings) != 1:
            return None
        (which,) = self._swings

        def value(bits: int) -> arb:
            expansion = self._ending.expand(bits)
            with working_precision(expansion.bits):
                return sign * arb(self._drift[0]) + abs(expansion.modes[which].coefficients[0])

        return value

    def beyond(self, sign: int, level: fmpq) -> fmpq | None:
        """Return a time from which on sign * y <= level is proved; None: none found."""
        if not self._bounded:
            return None
        expansion = self._ending.expand(LOWEST)
        with working_precision(LOWEST):
            swing = sum((abs(expansion.modes[k].coefficients[0]) for k in self._swings), arb(0)).upper().fmpq()
        drift = sign * self._drift
        if drift.degree() <= 0:
            room = level - swing - drift[0]
            return self._rest.below(room) if room > 0 else None
        return self._left_behind(drift, level - swing) if drift.leading_coefficient() < 0 else None

    def _left_behind(self, drift: fmpq_poly, room: fmpq) -> fmpq | None:
        """Return a time from which on a polynomial that falls for good, and all else, are below a level together."""
        after = fmpq(1)
        for _ in range(_DOUBLINGS):
            falls = all(c <= 0 for c in drift(fmpq_poly([after, 1])).coeffs()[1:])
            left = room - drift(after)
            if falls and left > 0:
                since = self._rest.below(left)
                if since is not None:
                    return max(since, self._ending.since + after)
            after = 2 * after
        return None


def _slower(mode: Mode, lead: Mode, power: int) -> bool:
    """Whether a mode is outweighed by the leading one in the end, for certain."""
    if mode.pole.real < lead.pole.real:
        return True
    both = bool(mode.pole.real.is_zero() and lead.pole.real.is_zero())
    return both and len(mode.coefficients) < power
