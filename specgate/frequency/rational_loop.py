"""A rational open loop over frequency: margins, crossings, peaks, all from roots of exact polynomials in omega^2.

Notation of `axis`: A = |N|^2, B = |D|^2, N conj D = R + j omega I. Then
  |L| = 1            A - B = 0, and x = 0, infinity where it holds there;
  L real, negative   I = 0 and R < 0 (there N and D do not vanish), and x = 0, infinity;
  extremes of |L|    A' B - A B' = 0;  of |1/(1 + L)|: B' C - B C' = 0 with C = |D + N|^2.
Polynomials that vanish identically are cases of their own. |L| = 1 everywhere: the phase moves on an arc that leaves
out 0, its ends are at x = 0, infinity or where it stands still, R I + 2x (R I' - I R') = 0 (the derivative of
omega I/R). L real everywhere: its values fill intervals whose ends are at x = 0, infinity or where L stands still, and
the values nearest to -1 are ends, for -1 itself is none of a stable loop.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from functools import cached_property

from flint import fmpq

from specgate.frequency import margins
from specgate.frequency.axis import AxisFunction, along_the_axis
from specgate.frequency.choose import Candidate, least
from specgate.frequency.fragile import BY_GAIN, BY_PHASE, Watch, tangencies
from specgate.frequency.magnitude import Magnitude, origin, roots, wronskian
from specgate.frequency.margins import GainCrossing, PhaseCrossing
from specgate.frequency.masks import inside
from specgate.frequency.phase import phase_at
from specgate.frequency.questions import Crossing, Direction, Range
from specgate.frequency.recording import ANGLES, REAL, SIDES, UNIT, of_roots, of_values
from specgate.frequency.scale import Continuous, Scale, X, ends, within
from specgate.frequency.sided import SidedMargins
from specgate.frequency.spots import Infinity, Rational, Spot, positive_roots, sign_of
from specgate.frequency.values import reciprocal
from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.response.questions import Mask
from specgate.systems.transfer import TransferFunction

UNSTABLE = "the closed loop is not stable as it is: there is nothing that a margin could be left to"


_ORIGIN, _INFINITY = Rational(fmpq(0)), Infinity()


class RationalLoop(SidedMargins):
    """L = numerator/denominator, and whether the closed loop is stable with every mode, hidden ones included.

    unstable: why there is no margin where it is not.
    """

    def __init__(
        self, open_loop: TransferFunction, stable: bool, scale: Scale | None = None, unstable: str = UNSTABLE
    ) -> None:
        self.axis = AxisFunction(open_loop)
        self._unstable = Answer.nothing(unstable)
        self.scale: Scale = scale or Continuous()
        self.stable = stable and self._far_value != -1

    # --- crossings ----------------------------------------------------------------------------------------

    @property
    def _far_value(self) -> fmpq | None:
        """L at infinity, None where it is infinite."""
        n, d = self.axis.numerator, self.axis.denominator
        if n.degree() > d.degree():
            return None
        return n.leading_coefficient() / d.leading_coefficient() if n.degree() == d.degree() else fmpq(0)

    @cached_property
    def _gain_spots(self) -> tuple[Spot, ...]:
        """Where |L| = 1."""
        excess = self.axis.above - self.axis.below
        if not excess:
            return self._stand_still
        far = self._far_value
        return (*origin(excess), *positive_roots(excess), *((_INFINITY,) if far is not None and abs(far) == 1 else ()))

    @cached_property
    def _stand_still(self) -> tuple[Spot, ...]:
        """Where the phase may be extreme, of |L| = 1 everywhere."""
        real, imaginary = self.axis.real, self.axis.imaginary
        turning = real * imaginary + 2 * X * wronskian(imaginary, real)
        return (_ORIGIN, *roots(turning), _INFINITY)

    @cached_property
    def _phase_spots(self) -> tuple[Spot, ...]:
        """Where L is real and negative."""
        axis = self.axis
        inner = axis.imaginary or wronskian(axis.real, axis.below)
        spots: list[Spot] = [_ORIGIN] if axis.denominator[0] != 0 else []
        spots += roots(inner)
        spots += [_INFINITY] if axis.numerator.degree() == axis.denominator.degree() else []
        return tuple(spot for spot in spots if spot.sign(axis.real) < 0)

    @cached_property
    def _all_gain_crossings(self) -> tuple[GainCrossing, ...]:
        return tuple(self._gain_crossing(spot) for spot in self._gain_spots)

    @cached_property
    def _all_phase_crossings(self) -> tuple[PhaseCrossing, ...]:
        return tuple(self._phase_crossing(spot) for spot in self._phase_spots)

    def _gain_crossings(self, over: Range | None) -> tuple[GainCrossing, ...]:
        if over is None:
            return self._all_gain_crossings
        everywhere = self.axis.above == self.axis.below
        spots = (*within(self.scale, self._gain_spots, over), *(ends(self.scale, over) if everywhere else ()))
        return tuple(self._gain_crossing(spot) for spot in spots)

    def _gain_crossing(self, spot: Spot) -> GainCrossing:
        turn = self.axis.turn(spot)
        return GainCrossing(self.scale.frequency(spot), turn.size, turn.side)

    def _phase_crossings(self, over: Range | None) -> tuple[PhaseCrossing, ...]:
        if over is None:
            return self._all_phase_crossings
        axis = self.axis
        extra = () if axis.imaginary else ends(self.scale, over)
        spots = (
            *within(self.scale, self._phase_spots, over),
            *(spot for spot in extra if spot.sign(axis.real) < 0 and spot.sign(axis.below) != 0),
        )
        return tuple(self._phase_crossing(spot) for spot in spots)

    def _phase_crossing(self, spot: Spot) -> PhaseCrossing:
        axis = self.axis
        factor = spot.ratio(axis.below, -axis.real)
        rise = spot.sign(axis.below + axis.real) if factor.exact is None else sign_of(factor.exact - 1)
        return PhaseCrossing(self.scale.frequency(spot), factor, rise)

    def crossings(self, over: Range | None = None) -> tuple[Crossing, ...]:
        """Return all crossings, by frequency; none where there is too much to find, which the margins then say."""
        try:
            return margins.described(self._gain_crossings(over), self._phase_crossings(over))
        except OutOfWork:
            return ()

    @cached_property
    def _near_gain(self) -> Watch[GainCrossing]:
        """Where a change of the gain by 1 % would create or remove points with |L| = 1."""
        above, below = self.axis.above, self.axis.below
        excess = above - below

        def near(spot: Spot) -> bool:
            return spot.sign(50 * excess - below) <= 0 <= spot.sign(50 * excess + below)

        found = ((self._gain_crossing(one.spot), one.created) for one in tangencies(excess, near))
        return Watch(BY_GAIN, self._all_gain_crossings, found)

    @cached_property
    def _near_phase(self) -> Watch[PhaseCrossing]:
        """Where a change of the phase by 1/100 rad would create or remove points with L real and negative."""
        real, imaginary = self.axis.real, self.axis.imaginary

        def near(spot: Spot) -> bool:
            return spot.sign(real) < 0 and spot.sign(10**4 * X * imaginary**2 - real**2) <= 0

        found = ((self._phase_crossing(one.spot), one.created) for one in tangencies(imaginary, near))
        return Watch(BY_PHASE, self._all_phase_crossings, found)

    # --- margins ------------------------------------------------------------------------------------------

    def _gain_margin(self, over: Range | None, *directions: Direction) -> Answer:
        if not self.stable:
            return self._unstable
        found = self._by_phase(margins.gain_margin(self._phase_crossings(over), *directions))
        return found if over else self._near_phase.warned(found, lambda some: margins.gain_margin(some, *directions))

    def _phase_margin(self, over: Range | None, *directions: Direction) -> Answer:
        if not self.stable:
            return self._unstable
        found = self._by_gain(margins.phase_margin(self._gain_crossings(over), *directions))
        return found if over else self._near_gain.warned(found, lambda some: margins.phase_margin(some, *directions))

    def delay_margin(self, over: Range | None = None) -> Answer:
        """Return the least dead time (s) that brings L to -1: least lag over frequency, 0 where |L(inf)| >= 1."""
        if not self.stable:
            return self._unstable
        top = self.scale.frequency(_INFINITY)
        far = self._far_value
        if over is None and top.absent is not None and (far is None or abs(far) >= 1):
            return replace(Answer.of_exact(0), at={"frequency": top})
        found = self._by_gain(margins.delay_margin(self._gain_crossings(over)))
        return found if over else self._near_gain.warned(found, margins.delay_margin)

    def _by_gain(self, answer: Answer) -> Answer:
        """Say that an answer comes from where |L| = 1."""
        excess, counts = self.axis.above - self.axis.below, {"gain crossings": len(self._gain_spots)}
        return answer.accounted(lambda: of_roots(UNIT, self.scale, excess, **counts))

    def _by_phase(self, answer: Answer) -> Answer:
        """Say that an answer comes from where L is real and negative."""
        counts = {"phase crossings": len(self._phase_spots)}
        return answer.accounted(lambda: of_roots(REAL, self.scale, self.axis.imaginary, **counts))

    # --- peaks and frequencies ----------------------------------------------------------------------------

    @cached_property
    def _sensitivity(self) -> Magnitude:
        (a, b) = along_the_axis(self.axis.denominator + self.axis.numerator)
        return Magnitude(self.axis.below, a * a + X * b * b, self.scale)

    @cached_property
    def _magnitude(self) -> Magnitude:
        return Magnitude(self.axis.above, self.axis.below, self.scale)

    def sensitivity_peak(self, over: Range | None = None) -> Answer:
        """Return sup |1 / (1 + L)|; `at` has the frequency, absent with `infinite` where approached there."""
        return self._sensitivity.supremum(over) if self.stable else self._unstable

    def least_distance(self, over: Range | None = None) -> Answer:
        """Return inf |1 + L|."""
        peak = self.sensitivity_peak(over)
        if peak.absent is not None:
            return peak
        if peak.exact == 0:
            return Answer.nothing("L is infinite on the whole of this range", infinite=True)
        return replace(reciprocal(peak), at=peak.at, how=peak.how)

    def crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with |L| = 1 (rad/s); further ones are in `crossings`."""
        return self._by_gain(_first(self._gain_crossings(over), "the gain of the open loop is one at no frequency"))

    def phase_crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with L on the negative real axis (rad/s)."""
        found = _first(self._phase_crossings(over), "the open loop is real and negative at no frequency")
        return self._by_phase(found)

    def peak_gain(self, over: Range | None = None) -> Answer:
        """Return sup |L|."""
        return self._magnitude.supremum(over)

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return |L(j frequency)|."""
        return self._magnitude.at(frequency)

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return arg L(j frequency), followed from zero frequency (rad)."""
        return phase_at(self.axis, frequency).accounted(lambda: of_values(ANGLES, self.scale))

    def within(self, mask: Mask) -> Answer:
        """Return whether |L| stays inside a mask over frequency; `at` names the first violation."""
        return inside(self.axis.above, self.axis.below, mask).accounted(lambda: of_values(SIDES, self.scale))


def _first(crossings: Iterable[GainCrossing | PhaseCrossing], none: str) -> Answer:
    found = least(Candidate(one.frequency, {}) for one in crossings if one.frequency.absent is None)
    if found is not None:
        return replace(found.value, at=None)
    return Answer.nothing(none)
