"""A delayed response piece by piece: one course, or the same one (or several) begun at stated times and added."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Sequence
from functools import cached_property

from flint import acb, arb, fmpq, fmpq_poly

from specgate.delays.course import Course
from specgate.delays.footing import footing_of
from specgate.delays.steps import Values
from specgate.delays.stretch import ROUGH, Stretch, polynomial_of
from specgate.response.accounts import Footing
from specgate.response.answers import Absent
from specgate.response.pieces import Pieces
from specgate.terms.precision import working_precision
from specgate.terms.records import record

_NOT_DECIDED = Absent("whether every mode on the way decays was not decided", proved=False)
_UNSETTLED = Absent("the response does not settle")


@record
class Part:
    """factor times a course, from `begin` on."""

    begin: fmpq
    factor: fmpq
    course: Course


class DelayedPieces(Pieces):
    """The sum of some parts; coherent SI, deviations from rest.

    Poles that do not decay are not cancelled by parts that begin at different times (see `Superposed`), but for s = 0.
    """

    def __init__(self, parts: Sequence[Part]) -> None:
        self.parts = tuple(parts)
        self._stretches: dict[int, Stretch] = {}
        self._squares: dict[tuple[int, fmpq, fmpq, bool], arb | None] = {}

    @property
    def origin(self) -> object:
        """What the response is computed from, to be compared."""
        return tuple((part.begin, part.factor, part.course.transform) for part in self.parts)

    @cached_property
    def _begins(self) -> tuple[fmpq, ...]:
        times = {part.begin + time for part in self.parts for time in part.course.begins}
        return tuple(sorted({fmpq(0), *times}))

    @cached_property
    def _drift(self) -> fmpq_poly:
        """The polynomial in t that is left in the end."""
        total = fmpq_poly([0])
        for part in self.parts:
            drift = polynomial_of(part.course.transform.at_origin)
            total += drift(fmpq_poly([-part.begin, 1])) * part.factor
        return total

    @cached_property
    def final(self) -> fmpq | Absent:
        """The limit of y, exact, or the reason why there is none."""
        stable = [part.course.transform.stable for part in self.parts]
        if False in stable:
            return _UNSETTLED
        if None in stable:
            return _NOT_DECIDED
        return self._drift[0] if self._drift.degree() <= 0 else _UNSETTLED

    def footing(self) -> Footing:
        """Return what a proof stands on."""
        courses = {id(part.course): part.course for part in self.parts}
        return footing_of(list(courses.values()))

    def kink(self, index: int) -> fmpq | None:
        """Return where piece `index` begins; None: piece `index - 1` never ends."""
        return self._begins[index] if index < len(self._begins) else None

    def _stretch(self, index: int) -> Stretch:
        if index not in self._stretches:
            begin = self._begins[index]
            active = [part for part in self.parts if part.begin <= begin]
            found = [(part, _at(part.course, begin - part.begin)) for part in active]
            self._stretches[index] = Stretch(
                tuple(group.moved(part.begin, part.factor) for part, stretch in found for group in stretch.groups),
                max((stretch.bits for _, stretch in found), default=64),
                all(stretch.known for _, stretch in found),
                (begin, self._begins[index + 1]) if index + 1 < len(self._begins) else None,
            )
        return self._stretches[index]

    def derivatives(self, index: int, time: arb, bits: int) -> Values:
        """Return balls of y, y', y'', y''' over a ball of times inside the closed piece."""
        return self._stretch(index).at(time)

    def speed(self, index: int) -> float:
        """Return how fast the piece varies (rad/s)."""
        return self._stretch(index).speed

    def area(self, index: int, left: fmpq, right: fmpq, bits: int) -> arb | None:
        """Return a ball of the integral of y over a part of a piece."""
        return self._stretch(index).area(left, right, bits)

    def square(self, index: int, left: fmpq, right: fmpq, bits: int) -> arb | None:
        """Return a ball of the integral of y^2 over a part of a piece."""
        asked = index, left, right, bits <= ROUGH
        if asked not in self._squares:
            self._squares[asked] = self._stretch(index).square(left, right, bits)
        return self._squares[asked]

    def jump(self, index: int) -> fmpq | None:
        """Return by how much y jumps at kink `index`, exactly; None where that is not told."""
        begin, total = self._begins[index], fmpq(0)
        for part in self.parts:
            jump = part.course.jump(begin - part.begin)
            if jump is None:
                return None
            total += jump * part.factor
        return total

    def polynomial(self, index: int) -> fmpq_poly | None:
        """Return a piece as a rational polynomial in the time from its kink on; None: it is none, or not told."""
        begin, total = self._begins[index], fmpq_poly([0])
        for part in self.parts:
            since = begin - part.begin
            if since >= 0:
                number = bisect_right(part.course.begins, since) - 1
                found = part.course.polynomial(number)
                if found is None:
                    return None
                total += found(fmpq_poly([since - part.course.begins[number], 1])) * part.factor
        return total

    def start(self, index: int) -> tuple[fmpq, int] | None:
        """Return a length over which the piece moves strictly one way from its kink on, and which way; None."""
        moving = [part for part in self.parts if part.begin <= self._begins[index]]
        if len(moving) != 1:
            return None
        (part,) = moving
        since = self._begins[index] - part.begin
        if since not in part.course.begins:
            return None
        found = part.course.start(part.course.begins.index(since))
        if found is None:
            return None
        end = self.kink(index + 1)
        length = found[0] if end is None else min(found[0], end - self._begins[index])
        return length, found[1] if part.factor > 0 else -found[1]

    def continuous_from(self) -> fmpq | None:
        """Return a time from which on y does not jump; None: it may for ever."""
        if not all(part.course.retarded or part.course.smooth for part in self.parts):
            return None
        jumps = [p.begin + time for p in self.parts for time, jump in p.course.jumps.items() if jump != 0]
        # The kinks are asked for that begin before this time.
        return max(jumps) + fmpq(1, 2**40) if jumps else fmpq(0)

    def settled_by(self, distance: fmpq) -> fmpq | None:
        """Return a time from which on |y - final| <= distance is proved; None: none found."""
        return self._below(0, distance)

    def slow_by(self, rate: fmpq) -> fmpq | None:
        """Return a time from which on |y'| <= rate is proved; None: none found."""
        return self._below(1, rate)

    def _below(self, order: int, size: fmpq) -> fmpq | None:
        return None if isinstance(self.final, Absent) else self._faded(order, size)

    def _faded(self, order: int, size: fmpq) -> fmpq | None:
        """Return when every part has no more than its share of a distance left beside its polynomial."""
        latest = fmpq(0)
        for part in self.parts:
            fading, weight = part.course.fading, abs(part.factor) * len(self.parts)
            time = None if fading is None else fading.below(order, size / weight) if weight != 0 else fmpq(0)
            if time is None:
                return None
            latest = max(latest, part.begin + time)
        return latest

    def lasting(self) -> tuple[int, fmpq] | None:
        """Return the sign that y - final has for good, and a time from which on it has; None: none, or not told."""
        if isinstance(self.final, Absent) or len(self.parts) > 1:
            return None
        (part,) = self.parts
        found = None if part.course.fading is None else part.course.fading.lasting()
        if found is None:
            return None
        return (found[0] if part.factor > 0 else -found[0]), part.begin + found[1]

    def runaway(self) -> int | None:
        """Return where y goes if it grows without bound: 1 up, -1 down, 0 both ways; None: it does not, or not told."""
        if all(part.course.transform.stable for part in self.parts):
            return None if self._drift.degree() < 1 else 1 if self._drift.leading_coefficient() > 0 else -1
        courses = {id(part.course) for part in self.parts}
        leading = self.parts[0].course.leading if len(courses) == 1 else None
        if leading is None or not leading.pole.real > 0:
            return None
        with working_precision(128):
            shares = (acb(arb(part.factor)) * (-leading.pole * part.begin).exp() for part in self.parts)
            factors = leading.polynomials[0].coeffs()
            lead = factors[-1] * sum(shares, acb(0)) if factors else acb(0)
            if lead.contains(0):
                return None
            return 0 if not leading.pole.imag.is_zero() else 1 if lead.real > 0 else -1

    def beyond(self, sign: int, level: fmpq) -> fmpq | None:
        """Return a time from which on sign * y <= level is proved, where y runs away along a line or a parabola."""
        if not all(part.course.transform.stable for part in self.parts) or not 1 <= self._drift.degree() <= 2:
            return None
        drift = self._drift * sign
        if drift.leading_coefficient() > 0:
            return None
        # From its vertex on it falls, and so does what fades.
        since = max(fmpq(0), -drift[1] / (2 * drift[2])) if drift.degree() == 2 else fmpq(0)
        step = fmpq(1)
        for _ in range(200):
            room = level - drift(since + step)
            fades = self._faded(0, room) if room > 0 else None
            if fades is not None and fades <= since + step:
                return since + step
            step = step * 2
        return None

    def rest(self, time: fmpq) -> tuple[fmpq, fmpq] | None:
        """Return bounds of the integrals of |y| and of y^2 from `time` on, for a final value of zero; None: none.

        (a + b)^2 is at most 2 (a^2 + b^2), and so on for more parts.
        """
        if self.final != 0:
            return None
        area, square = fmpq(0), fmpq(0)
        for part in self.parts:
            fading = part.course.fading
            if fading is None or time - part.begin < fading.since:
                return None
            found = fading.integrals(time - part.begin)
            if found is None:
                return None
            area += abs(part.factor) * found[0]
            square += part.factor * part.factor * found[1] * len(self.parts)
        return area, square


def _at(course: Course, time: fmpq) -> Stretch:
    """Return the piece of a course that holds a time, at a kink the one that begins there."""
    return course.stretch(bisect_right(course.begins, time) - 1)
