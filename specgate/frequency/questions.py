"""What may be asked over frequency: of a loop opened at a break, and of a channel of a closed loop.

Frequencies are angular (rad/s); `over` restricts a question to a closed range of them. Gains are plain ratios, phases
radians: units are put on at the edge.
"""

from __future__ import annotations

from typing import Literal, Protocol

from flint import fmpq

from specgate.response.answers import Answer
from specgate.response.questions import Mask
from specgate.terms.records import record

Range = tuple[fmpq, fmpq]
Direction = Literal["up", "down", "lag", "lead"]


@record
class Crossing:
    """Where the open loop passes the unit circle (`gain`) or the negative real axis (`phase`).

    frequency: rad/s, exactly 0 and absent with `infinite` included. margin: what is left there, a factor greater than
    one of the gain or radians of phase. direction: which way it is used up.
    """

    kind: Literal["gain", "phase"]
    frequency: Answer
    margin: Answer
    direction: Direction


class OpenLoop(Protocol):
    """L, minus the transfer from the injected to the returned signal, and whether the closed loop is stable.

    Margins are smallest changes that make the closed loop unstable, over all crossings, each with `at` (`frequency`,
    `direction`). One that nothing uses up is infinite. An unstable closed loop has none, only a reason; its crossings
    are listed all the same.
    """

    def crossings(self, over: Range | None = None) -> tuple[Crossing, ...]:
        """Return all crossings, by frequency."""

    def gain_margin_up(self, over: Range | None = None) -> Answer:
        """Return the least factor k > 1 such that k L is at the limit."""

    def gain_margin_down(self, over: Range | None = None) -> Answer:
        """Return the least factor k > 1 such that L / k is at the limit."""

    def gain_margin(self, over: Range | None = None) -> Answer:
        """Return the smaller of both."""

    def phase_margin_lag(self, over: Range | None = None) -> Answer:
        """Return the least phase lag (rad, in [0, 2 pi)) that brings L to -1."""

    def phase_margin_lead(self, over: Range | None = None) -> Answer:
        """Return the least phase lead (rad, in [0, 2 pi)) that brings L to -1."""

    def phase_margin(self, over: Range | None = None) -> Answer:
        """Return the smaller of both."""

    def delay_margin(self, over: Range | None = None) -> Answer:
        """Return the least dead time (s) that brings L to -1: least lag over frequency, 0 where |L(inf)| >= 1."""

    def sensitivity_peak(self, over: Range | None = None) -> Answer:
        """Return sup |1 / (1 + L)|; `at` has the frequency, absent with `infinite` where approached there."""

    def least_distance(self, over: Range | None = None) -> Answer:
        """Return inf |1 + L|."""

    def crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with |L| = 1 (rad/s); further ones are in `crossings`."""

    def phase_crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with L on the negative real axis (rad/s)."""

    def peak_gain(self, over: Range | None = None) -> Answer:
        """Return sup |L|."""

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return |L(j frequency)|."""

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return arg L(j frequency), followed from zero frequency (rad)."""

    def within(self, mask: Mask) -> Answer:
        """Return whether |L| stays inside a mask over frequency."""


class Gain(Protocol):
    """A channel of a closed loop over frequency."""

    def bandwidth(self) -> Answer:
        """Return the first frequency at which the gain falls 3 dB, 10^(-3/20), below that at zero frequency."""

    def resonance_peak(self, over: Range | None = None) -> Answer:
        """Return sup of the gain over that at zero frequency; `at` has the frequency."""

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return the gain."""

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return the phase, followed from zero frequency (rad)."""

    def within(self, mask: Mask) -> Answer:
        """Return whether the gain stays inside a mask over frequency; `at` names the first violation."""
