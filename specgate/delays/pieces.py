"""A delayed response piece by piece: the method of steps first, then its rightmost poles.

Up to a time T the response is a sum of rational ones (`steps`), with a kink at each sum of delays at which one begins.
From T on it is the sum of its residues at the poles right of a line, within a proved bound that is far below anything
that is asked (`modal`); there the pieces are doublings of time, on each of which modes that have died join the bound.
More precision moves T on: the bound falls as e^(-g T).
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Sequence
from functools import cached_property

from flint import arb, fmpq

from specgate.delays.fading import Fading, fading_of
from specgate.delays.modal import Modal, modal
from specgate.delays.steps import Mode, Steps, Values, kinks_of, summed
from specgate.delays.transform import Transform
from specgate.response.answers import Absent
from specgate.response.pieces import Pieces
from specgate.systems.quasi import Quasi
from specgate.terms.precision import working_precision

_LEVELS = (112, 400)
"""Bits, relative to the size of the response, to which the remainder is pushed down; by the precision asked for."""

_MOST_KINKS = 600
_ALONE = 60
"""Longest delays over which a response is followed that has no modal sum."""

_LATEST = 40
"""Doublings of time after which modes are not sorted out any more."""


class DelayedPieces(Pieces):
    """y(t) of a transform whose undelayed denominator is of the highest degree; coherent SI, deviations from rest."""

    def __init__(self, transform: Transform) -> None:
        self.transform = transform
        self._levels: dict[int, _Level] = {}

    # --- the plan ---------------------------------------------------------------------------------------------

    @cached_property
    def _longest(self) -> fmpq:
        delays = [delay for part in (self.transform.numerator, self.transform.denominator) for delay, _ in part.terms]
        return max(delays)

    @cached_property
    def _looped(self) -> bool:
        """Whether a dead time stands in a loop on the way, so that kinks follow without end."""
        return not self.transform.denominator.is_rational

    @cached_property
    def _modal(self) -> Modal | None:
        if not self._looped or self.transform.stable is not True or not _retarded(self.transform.denominator):
            return None
        return modal(self.transform, 6 * self._longest)

    @cached_property
    def _scale(self) -> arb:
        """A number of the size of the response."""
        size = abs(arb(self.transform.at_origin[0])) if self.transform.at_origin else arb(0)
        with working_precision(64):
            for mode in self._modal.modes(64) if self._modal is not None else ():
                size = size.max(mode.envelope(0, arb(self._longest)))
            return size if size > 0 else arb(1)

    def _early_until(self, bits: int) -> fmpq:
        """Return T at which the remainder is 2^-bits of the size of the response."""
        if not self._looped:
            return self._longest
        if self._modal is None:
            return _ALONE * self._longest
        rest = self._modal.rest
        with working_precision(64):
            wanted = ((rest.sizes[0] / self._scale).log() + bits * arb(2).log()) / rest.rate
            count = (wanted * 4 / self._longest).upper().fmpq().ceil()
        return max(rest.since, self._longest * fmpq(int(count)) / 4)

    @cached_property
    def _kinks(self) -> tuple[fmpq, ...]:
        """Where terms begin, up to T."""
        numerator, denominator = self.transform.numerator, self.transform.denominator
        until = self._early_until(_LEVELS[0])
        while True:
            found = kinks_of(numerator, denominator, until, _MOST_KINKS)
            if found is not None:
                return found
            until = until / 2

    @cached_property
    def _followed(self) -> bool:
        """Whether what is known of the early response reaches up to where the modal sum is as good."""
        return self._modal is not None and self._ends == self._early_until(_LEVELS[0])

    @cached_property
    def _ends(self) -> fmpq:
        """Where the early pieces end."""
        until = self._early_until(_LEVELS[0])
        return (
            until
            if kinks_of(self.transform.numerator, self.transform.denominator, until, _MOST_KINKS)
            else (self._kinks[-1])
        )

    @cached_property
    def _begins(self) -> tuple[fmpq, ...]:
        """Where the pieces begin."""
        dead = () if self._kinks and self._kinks[0] == 0 else (fmpq(0),)
        early = (*dead, *self._kinks)
        if not self._looped:
            return early
        early = tuple(time for time in early if time < self._ends)
        return (*early, *(self._ends * 2**k for k in range(len(self._late))))

    @cached_property
    def _late(self) -> tuple[Fading, ...]:
        """The modes alive on each doubling of time after the early pieces; one without modes where none are known."""
        if not self._followed or self._modal is None:
            return (Fading((), None, fmpq(0)),)
        tiny = self._scale * arb(2) ** -_LEVELS[0]
        found: list[Fading] = []
        for doubling in range(_LATEST):
            found.append(fading_of(self._modal, self._ends * 2**doubling, tiny))
            if len(found[-1].modes) <= 1:
                break
        return tuple(found)

    @property
    def _first_late(self) -> int:
        return len(self._begins) - (len(self._late) if self._looped else 0)

    # --- what is asked ----------------------------------------------------------------------------------------

    @property
    def final(self) -> fmpq | Absent:
        """The limit of y, exact, or the reason why there is none."""
        if self.transform.stable is None:
            return Absent("whether every mode on the way decays was not decided", proved=False)
        if not self.transform.stable or len(self.transform.at_origin) > 1:
            return Absent("the response does not settle")
        return self._offset

    @property
    def _offset(self) -> fmpq:
        return self.transform.at_origin[0] if self.transform.at_origin else fmpq(0)

    def kink(self, index: int) -> fmpq | None:
        """Return where piece `index` begins; None: piece `index - 1` never ends."""
        return self._begins[index] if index < len(self._begins) else None

    def derivatives(self, index: int, time: arb, bits: int) -> Values:
        """Return balls of y, y', y'', y''' over a ball of times inside the closed piece."""
        late = index - self._first_late
        if late < 0 or not self._looped:
            return self._level(bits).early(index - self._dead, time)
        if bits > _LEVELS[0] and self._followed:
            return self._level(bits).late(time)
        return self._late[late].at(time, self.transform.at_origin)

    @property
    def _dead(self) -> int:
        """1 if nothing happens at first."""
        return 0 if self._kinks and self._kinks[0] == 0 else 1

    def _level(self, bits: int) -> _Level:
        wanted = _LEVELS[0] if bits <= _LEVELS[0] else _LEVELS[1]
        if wanted not in self._levels:
            until = self._early_until(wanted) if self._followed else self._ends
            self._levels[wanted] = _Level(self, until, wanted)
        return self._levels[wanted]

    def speed(self, index: int) -> float:
        """Return how fast the piece varies (rad/s)."""
        late = index - self._first_late
        if late >= 0 and self._looped:
            return self._late[late].speed
        number = index - self._dead
        if number < 0:
            return 0.0
        return max((float(abs(mode.pole).mid()) for mode in self._level(0).modes(number)), default=0.0)

    def jump(self, index: int) -> fmpq | None:
        """Return by how much y jumps at kink `index`, exactly."""
        number = index - self._dead
        if number < 0 or number >= len(self._kinks) or index >= self._first_late:
            return fmpq(0)
        return self._jumps[number]

    @cached_property
    def _jumps(self) -> tuple[fmpq, ...]:
        """The limit of s c_T(s) for large s, term by term (see `steps`)."""
        numerator, denominator = self.transform.numerator, self.transform.denominator
        degree, lead = denominator.undelayed.degree(), denominator.undelayed.leading_coefficient()
        driven = {delay: p[degree - 1] for delay, p in numerator.terms}
        found: dict[fmpq, fmpq] = {}
        for time in self._kinks:
            total = driven.get(time, fmpq(0))
            for delay, p in denominator.delayed:
                if p.degree() == degree and time - delay in found:
                    total -= p[degree] * found[time - delay]
            found[time] = total / lead
        return tuple(found.values())

    def continuous_from(self) -> fmpq | None:
        """Return a time from which on y does not jump; None: it may for ever."""
        if not _retarded(self.transform.denominator):
            return None
        jumping = [time for time, jump in zip(self._kinks, self._jumps, strict=True) if jump != 0]
        return jumping[-1] + self._longest / 2**20 if jumping else fmpq(0)

    def settled_by(self, distance: fmpq) -> fmpq | None:
        """Return a time from which on |y - final| <= distance is proved; None: none found."""
        return self._below(0, distance)

    def slow_by(self, rate: fmpq) -> fmpq | None:
        """Return a time from which on |y'| <= rate is proved; None: none found."""
        return self._below(1, rate)

    def _below(self, order: int, size: fmpq) -> fmpq | None:
        if isinstance(self.final, Absent):
            return None
        if not self._looped:
            return self._last.below(order, size, self._kinks[-1]) if self._kinks else fmpq(0)
        return self._whole.below(order, size, self._ends) if self._followed else None

    @cached_property
    def _last(self) -> Fading:
        """What is left after the last kink without a loop, without the part at s = 0."""
        modes = self._level(0).modes(len(self._kinks) - 1)
        return Fading(tuple(mode for mode in modes if not mode.pole.is_zero()), None, self._kinks[-1])

    @cached_property
    def _whole(self) -> Fading:
        assert self._modal is not None
        return Fading(self._modal.modes(_LEVELS[0]), self._modal.rest, fmpq(0))

    def lasting(self) -> tuple[int, fmpq] | None:
        """Return the sign that y - final has for good, and a time from which on it has; None: none, or not told."""
        if isinstance(self.final, Absent):
            return None
        if not self._looped:
            return self._last.lasting(self._kinks[-1]) if self._kinks else (0, fmpq(0))
        return self._whole.lasting(self._ends) if self._followed else None

    def rest(self, time: fmpq) -> tuple[fmpq, fmpq] | None:
        """Return bounds of the integrals of |y| and of y^2 from `time` on, for a final value of zero; None: none."""
        if not self._followed or time < self._ends or self._offset != 0:
            return None
        return self._whole.integrals(time)


class _Level:
    """The early response and the modes at one precision."""

    def __init__(self, pieces: DelayedPieces, until: fmpq, bits: int) -> None:
        transform = pieces.transform
        kinks = kinks_of(transform.numerator, transform.denominator, until, 4 * _MOST_KINKS)
        self._kinks = kinks if kinks is not None else pieces._kinks
        self._until = until
        self._pieces = pieces
        self.bits = bits
        self._steps = self._built(pieces._scale)

    def _built(self, scale: arb) -> Steps:
        """Return the terms at a precision at which what is left of it at the end is enough."""
        transform, bits = self._pieces.transform, 2 * self.bits
        while True:
            steps = Steps(transform.numerator, transform.denominator, self._kinks, bits)
            with working_precision(bits):
                end = summed(steps.modes(len(self._kinks) - 1), arb(0))[0] if self._kinks else arb(0)
                if end.rad() < scale * arb(2) ** -self.bits or bits > 4096:
                    return steps
            bits *= 2

    def modes(self, number: int) -> Sequence[Mode]:
        """Return the modes between kink `number` and the next, x from the kink."""
        return self._steps.modes(number)

    def early(self, number: int, time: arb) -> Values:
        """Return the response between kink `number` and the next, continued analytically; 0 before the first."""
        if number < 0:
            return arb(0), arb(0), arb(0), arb(0)
        with working_precision(self._steps.bits):
            return summed(self.modes(number), time - self._kinks[number])

    def late(self, time: arb) -> Values:
        """Return the response after the early pieces, whether its kinks are still told or not."""
        end = time.upper().fmpq()
        if end > self._until:
            modal = self._pieces._modal
            assert modal is not None
            transform = self._pieces.transform
            return Fading(modal.modes(2 * self.bits), modal.rest, fmpq(0), 2 * self.bits).at(time, transform.at_origin)
        first, last = (bisect_right(self._kinks, t) - 1 for t in (time.lower().fmpq(), end))
        values = self.early(first, time)
        for number in range(first + 1, last + 1):
            other = self.early(number, time)
            values = _union(values, other)
        return values


def _union(one: Values, other: Values) -> Values:
    a, b, c, d = (first.union(second) for first, second in zip(one, other, strict=True))
    return a, b, c, d


def _retarded(denominator: Quasi) -> bool:
    return all(p.degree() < denominator.undelayed.degree() for _, p in denominator.delayed)
