"""The course of one transform: the method of steps first, then its rightmost poles.

Up to a time T the response is a sum of rational ones (`steps`), with a kink at each sum of delays at which one begins.
From T on it is the sum of its residues at the poles right of a line, within a proved bound that is far below anything
that is asked (`modal`); there the pieces are doublings of time, on each of which modes that have died join the bound.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property

from flint import acb, arb, fmpq, fmpq_poly

from specgate.delays.exactly import monotone_start, polynomials
from specgate.delays.fading import Fading
from specgate.delays.modal import Modal, modal
from specgate.delays.remainder import ORDERS, Remainder
from specgate.delays.steps import Mode, Steps, kinks_of, summed
from specgate.delays.stretch import Group, Stretch
from specgate.delays.transform import Transform
from specgate.terms.precision import HIGHEST, working_precision

_BITS = 112
"""Bits, relative to the size of the response, to which the remainder and what is lost in sums are pushed down.

More bits than these make no ball narrower: what has to be told apart more closely than 33 digits stays open.
"""

POLES_AT = 2 * _BITS
"""Bits at which the poles of a modal sum are told."""

_ENOUGH = 64
_LONG = 60
"""Bits, instead, that suffice where the method of steps would go on for more than so many of the longest delay."""

_MOST_KINKS = 600
_CHUNK = 32
"""Early terms that are told first; more are told, twice as many each time, as they are asked for."""

_ALONE = 24
"""Longest delays over which a response is followed that has no modal sum."""

_LATEST = 40
"""Doublings of time after which modes are not sorted out any more."""

_ZERO, _ONE = fmpq(0), fmpq(1)


class Course:
    """y(t) of a transform whose undelayed denominator is of the highest degree; t from its own start on."""

    def __init__(self, transform: Transform) -> None:
        self.transform = transform
        self._stretches: dict[int, Stretch] = {}
        self._told: dict[int, Steps] = {}
        self._lost = 0

    @cached_property
    def longest(self) -> fmpq:
        """The longest delay."""
        delays = [delay for part in (self.transform.numerator, self.transform.denominator) for delay, _ in part.terms]
        return max(delays, default=_ZERO)

    @cached_property
    def looped(self) -> bool:
        """Whether a dead time stands in a loop on the way, so that kinks follow without end."""
        return not self.transform.denominator.is_rational

    @cached_property
    def retarded(self) -> bool:
        """Whether every delayed term of the denominator is of lower degree than the undelayed one."""
        denominator = self.transform.denominator
        return all(p.degree() < denominator.undelayed.degree() for _, p in denominator.delayed)

    @cached_property
    def modal(self) -> Modal | None:
        """The modal sum; None where there is none, or it was not found."""
        if not self.looped:
            return None
        inside = self.transform.denominator.delayed[-1][0]
        since = max(6 * inside, self.longest + 5 * inside)
        told = kinks_of(self.transform.numerator, self.transform.denominator, since, _MOST_KINKS)[1]
        return modal(self.transform, min(since, told))

    @cached_property
    def _scale(self) -> arb:
        """A number of the size of the response."""
        size = abs(arb(self.transform.at_origin[0])) if self.transform.at_origin else arb(0)
        with working_precision(64):
            for mode in self.modal.modes(64) if self.modal is not None else ():
                at = (mode.polynomials[0](acb(self.longest)) * (mode.pole * self.longest).exp()).abs_upper()
                size = size.max(at)
            return size.mid() if size > 0 else arb(1)

    @cached_property
    def _wanted(self) -> fmpq:
        """T at which the remainder is 2^-_BITS of the size of the response, or as far as the response is followed."""
        if self.modal is None:
            return _ALONE * self.longest if self.looped else self.longest
        full, enough = (self._fallen(self.modal.rest, bits) for bits in (_BITS, _ENOUGH))
        return max(self.modal.rest.since, min(full, max(enough, _LONG * self.longest)))

    def _fallen(self, rest: Remainder, bits: int) -> fmpq:
        """Return when a remainder has fallen to a part 2^-bits of the size of the response."""
        with working_precision(64):
            times = ((rest.sizes[0] / self._scale).log() + bits * arb(2).log()) / rest.rate * 4 / self.longest
        return self.longest * fmpq(int(times.upper().fmpq().ceil())) / 4

    @cached_property
    def _early(self) -> tuple[tuple[fmpq, ...], fmpq]:
        """The kinks that are told one by one, and where they end."""
        return kinks_of(self.transform.numerator, self.transform.denominator, self._wanted, _MOST_KINKS)

    @property
    def _kinks(self) -> tuple[fmpq, ...]:
        return self._early[0]

    @property
    def ends(self) -> fmpq:
        """Where the pieces of the method of steps end."""
        return self._early[1]

    @cached_property
    def followed(self) -> bool:
        """Whether the modal sum takes over where the method of steps ends: its bound holds there, be it wide or not."""
        return self.modal is not None and self.ends >= self.modal.rest.since

    @cached_property
    def begins(self) -> tuple[fmpq, ...]:
        """Where the pieces begin; the last one never ends."""
        dead = () if self._kinks and self._kinks[0] == 0 else (_ZERO,)
        early = (*dead, *self._kinks)
        if not self.looped:
            return early
        early = tuple(time for time in early if time < self.ends)
        return (*early, *(self.ends * 2**k for k in range(len(self._late))))

    @cached_property
    def _late(self) -> tuple[Stretch, ...]:
        """The modes alive on each doubling of time after the early pieces; nothing is known where there are none."""
        if not self.followed or self.modal is None:
            return (Stretch((), _BITS, known=False),)
        tiny = self._scale * arb(2) ** -_BITS
        found: list[Stretch] = []
        for doubling in range(_LATEST):
            group = self._alive(self.modal, self.ends * 2**doubling, tiny)
            found.append(Stretch((group,), 2 * _BITS))
            if len(group.modes) <= 1:
                break
        return tuple(found)

    def _alive(self, modal: Modal, since: fmpq, tiny: arb) -> Group:
        """Return the modes that are still alive at a time; each that is left out stays below `tiny`."""
        with working_precision(64):
            alive: list[Mode] = []
            left = [arb(0)] * len(ORDERS)
            for mode in modal.modes(2 * _BITS):
                dead = bool(mode.pole.real < 0 and mode.envelope(0, arb(since)) < tiny)
                if dead:
                    left = [(size + mode.envelope(k, arb(since))).abs_upper() for k, size in enumerate(left)]
                else:
                    alive.append(mode)
        return Group(_ZERO, _ONE, _ZERO, tuple(alive), self.transform.at_origin, modal.rest, tuple(left))

    def _steps(self, number: int) -> Steps:
        """Return early terms as far as one of them at least, precisely enough for little to be lost at their end."""
        count = _CHUNK
        while count <= number:
            count *= 2
        if count not in self._told:
            self._told[count] = self._precise(self._kinks[:count])
        return self._told[count]

    def _precise(self, kinks: Sequence[fmpq]) -> Steps:
        """Return the terms of kinks; about twice as many bits are lost in the sums of twice as many."""
        bits = 2 * (_BITS + self._lost)
        while True:
            steps = Steps(self.transform, kinks, bits)
            with working_precision(bits):
                end = summed(steps.modes(len(kinks) - 1), arb(0))[0] if kinks else arb(0)
            missing = self._missing(end)
            self._lost = max(0, missing + bits - _BITS)
            if missing <= 0 or bits > HIGHEST:
                return steps
            bits += max(missing, _BITS)

    def _missing(self, value: arb) -> int:
        """Return how many bits too few a value of the response is known to."""
        with working_precision(64):
            if not value.is_finite():
                return 2 * _BITS
            if value.rad() == 0:
                return -HIGHEST
            lost = (arb(value.rad()) / self._scale).log() / arb(2).log() + _BITS
            return int(lost.upper().fmpq().ceil())

    def _modes(self, number: int) -> tuple[Mode, ...]:
        """Return the modes from an early kink on, without the oscillation of the input where that is gone for good."""
        modes = self._steps(number).modes(number)
        if self.transform.period is None or self.looped or number < len(self._kinks) - 1:
            return modes
        return modes[:-1]

    def stretch(self, index: int) -> Stretch:
        """Return piece `index`."""
        if index not in self._stretches:
            self._stretches[index] = self._stretch(index)
        return self._stretches[index]

    def _stretch(self, index: int) -> Stretch:
        number = self._number(index)
        if number is None:
            return self._late[index - len(self.begins) + len(self._late)]
        if number < 0:
            return Stretch((), _BITS)
        group = Group(_ZERO, _ONE, self._kinks[number], self._modes(number))
        return Stretch((group,), self._steps(number).bits)

    @cached_property
    def smooth(self) -> bool:
        """Whether y is continuous: no term of the numerator comes within one degree of the denominator."""
        degree = self.transform.denominator.undelayed.degree()
        return self.transform.period is not None or self.transform.numerator.degree < degree - 1

    def jump(self, time: fmpq) -> fmpq | None:
        """Return by how much y jumps at a time; None where that is not told: of neutral type it may for ever."""
        if self.smooth or time in self.jumps:
            return self.jumps.get(time, _ZERO)
        return _ZERO if self.retarded or not self.looped or time < self.ends else None

    @cached_property
    def jumps(self) -> dict[fmpq, fmpq]:
        """The limit of s c_T(s) for large s at each early kink: by how much y jumps there (see `steps`)."""
        if self.transform.period is not None:
            return {}
        numerator, denominator = self.transform.numerator, self.transform.denominator
        degree, lead = denominator.undelayed.degree(), denominator.undelayed.leading_coefficient()
        driven = {delay: p[degree - 1] for delay, p in numerator.terms}
        found: dict[fmpq, fmpq] = {}
        for time in self._kinks:
            total = driven.get(time, _ZERO)
            for delay, p in denominator.delayed:
                if p.degree() == degree and time - delay in found:
                    total -= p[degree] * found[time - delay]
            found[time] = total / lead
        return found

    @cached_property
    def _polynomials(self) -> tuple[fmpq_poly, ...]:
        return polynomials(self.transform, self._kinks) if self.transform.period is None else ()

    def polynomial(self, index: int) -> fmpq_poly | None:
        """Return a piece as a rational polynomial in the time from its begin on; None: it is none, or not told."""
        number = self._number(index)
        if number is None:
            return None
        if number < 0:
            return fmpq_poly([0])
        return self._polynomials[number] if number < len(self._polynomials) else None

    def start(self, index: int) -> tuple[fmpq, int] | None:
        """Return a length over which the first piece that moves moves strictly one way, and which way; None: not told.

        It begins like x^(q - 1), q the degree of d0 above the numerator of the first term.
        """
        if self._number(index) != 0 or len(self._kinks) < 2:
            return None
        order = self.transform.denominator.undelayed.degree() - self.transform.numerator.terms[0][1].degree() - 1
        order += 0 if self.transform.period is None else 2
        if order < 1:
            return None
        first = self._steps(0)
        return monotone_start(first.modes(0), order, self._kinks[1] - self._kinks[0], first.bits)

    @property
    def terms(self) -> int:
        """How many early terms there are."""
        return len(self._kinks)

    @property
    def bits(self) -> int:
        """The precision of the first early terms."""
        return self._steps(0).bits

    @property
    def poles(self) -> list[tuple[acb, int]]:
        """The poles of the modal sum but s = 0, of conjugates the upper one, with their multiplicities."""
        if not self.followed or self.modal is None:
            return []
        return self.modal.poles.with_multiplicities(self.transform, POLES_AT)

    def _number(self, index: int) -> int | None:
        """Return the number of the kink at which a piece begins, -1 before the first; None after the early pieces."""
        if self.looped and index >= len(self.begins) - len(self._late):
            return None
        return index - (0 if self._kinks and self._kinks[0] == 0 else 1)

    @cached_property
    def leading(self) -> Mode | None:
        """The mode right of all others; None where that is not told."""
        if self.modal is None:
            return None
        modes = self.modal.modes(2 * _BITS)
        with working_precision(64):
            ahead = [one for one in modes if all(one is other or one.pole.real > other.pole.real for other in modes)]
        return ahead[0] if ahead else None

    @cached_property
    def fading(self) -> Fading | None:
        """What is left beside the polynomial in the end; None where that is not known, or does not fade."""
        if self.transform.stable is not True:
            return None
        if self.looped:
            if not self.followed or self.modal is None:
                return None
            return Fading(self.modal.modes(2 * _BITS), self.modal.rest, _ZERO, self.modal.rest.since)
        if not self._kinks:
            return Fading((), None, _ZERO, _ZERO)
        last = self._kinks[-1]
        modes = self._modes(len(self._kinks) - 1)
        return Fading(tuple(mode for mode in modes if not mode.pole.is_zero()), None, last, last)
