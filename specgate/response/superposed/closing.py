"""The integral of |y| over an ending in which one lightly damped oscillation outlasts all else, in closed form.

y = Re(c e^(pt)) + r with p = -a + jw. From T on the integral of |y| differs from that of |Re(c e^(pt))| by at most that
of |r|. With t1 the first zero of the oscillation after T, the integral of its magnitude is that of the part up to t1
and, from there on, half waves that fall by e^(-a pi/w) each: |c| e^(-a t1) w (1 + q) / ((a^2 + w^2) (1 - q)) with
q = e^(-a pi/w). T is where the oscillation is at a crest, about, so that the next zero is told for certain.
"""

from __future__ import annotations

from flint import acb, arb, fmpq

from specgate.response.asymptote import leading_mode
from specgate.response.deviation import LOWEST
from specgate.response.modes import GUARD, dyadic
from specgate.response.superposed.ending import Ending
from specgate.terms.precision import working_precision

_DAMPED = 0.3
"""Decay rate over frequency beyond which there are few half waves to search."""


def closing(ending: Ending, bits: int) -> tuple[fmpq, arb] | None:
    """Return a time (s) and a ball of the integral of |y| from there on; None where no single oscillation outlasts."""
    modes = ending.expand(LOWEST).modes
    with working_precision(LOWEST):
        if not modes:
            return None
        lead = modes.index(leading_mode(ending.expand(LOWEST)))
        mode = modes[lead]
        slower = all(other is mode or other.pole.real < mode.pole.real for other in modes)
        light = mode.oscillates and len(mode.coefficients) == 1 and -mode.pole.real < _DAMPED * mode.pole.imag
        if not (slower and light):
            return None
        least = (abs(mode.coefficients[0]) / abs(mode.pole)).lower().fmpq()
    others = [index for index in range(len(modes)) if index != lead]
    rest = Ending(ending.since, lambda precision: ending.expand(precision).only(others))
    since = _negligible(rest, least * dyadic(-bits)) if others else ending.since
    if since is None or least <= 0:
        return None
    expansion = ending.expand(bits + GUARD)
    pole, c = expansion.modes[lead].pole, expansion.modes[lead].coefficients[0]
    with working_precision(bits + GUARD):
        crest = _crest(pole, c, since - ending.since)
        beyond = rest.rest(ending.since + crest)[0] if others else fmpq(0)
        return ending.since + crest, _half_waves(pole, c, crest) + arb(0, arb(beyond).upper())


def _negligible(rest: Ending, level: fmpq) -> fmpq | None:
    """Return a time (s) from which on the integral of the other modes is at most a level."""
    height = level
    for _ in range(64):
        since = rest.below(height)
        if since is None:
            return None
        if rest.rest(since)[0] <= level:
            return since
        height = height / 16
    return None


def _crest(pole: acb, c: acb, since: fmpq) -> fmpq:
    """Return an instant close to a crest of the oscillation, not before `since`."""
    turn = (pole.imag * since + c.arg()) / (2 * arb.pi())
    count = turn.upper().ceil().unique_fmpz()
    assert count is not None
    crest: fmpq = ((2 * arb.pi() * count - c.arg()) / pole.imag).mid().fmpq()
    return max(crest, since)


def _half_waves(pole: acb, c: acb, since: fmpq) -> arb:
    """Return the integral of |Re(c e^(pt))| from an instant on that lies close to a crest."""
    a, w = -pole.real, pole.imag
    here = c * (pole * arb(since)).exp()
    wait = (arb.pi() / 2 - here.arg()) / w
    first = (here * ((pole * wait).exp() - 1) / pole).real
    q = (-a * arb.pi() / w).exp()
    later: arb = abs(here) * (-a * wait).exp() * w * (1 + q) / ((a * a + w * w) * (1 - q))
    return abs(first) + later
