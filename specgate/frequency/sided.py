"""The margins of either side and the smaller of both, from one question that takes the directions."""

from __future__ import annotations

from abc import ABC, abstractmethod

from specgate.frequency.questions import Direction, Range
from specgate.response.answers import Answer


class SidedMargins(ABC):
    """Gain and phase margins of a loop that answers for any directions together."""

    @abstractmethod
    def _gain_margin(self, over: Range | None, *directions: Direction) -> Answer:
        """Return the least change of the gain, up or down, as a factor greater than one."""

    @abstractmethod
    def _phase_margin(self, over: Range | None, *directions: Direction) -> Answer:
        """Return the least change of the phase, lag or lead (rad)."""

    def gain_margin_up(self, over: Range | None = None) -> Answer:
        """Return the least factor k > 1 such that k L is at the limit."""
        return self._gain_margin(over, "up")

    def gain_margin_down(self, over: Range | None = None) -> Answer:
        """Return the least factor k > 1 such that L / k is at the limit."""
        return self._gain_margin(over, "down")

    def gain_margin(self, over: Range | None = None) -> Answer:
        """Return the smaller of both."""
        return self._gain_margin(over, "up", "down")

    def phase_margin_lag(self, over: Range | None = None) -> Answer:
        """Return the least phase lag (rad, in [0, 2 pi)) that brings L to -1."""
        return self._phase_margin(over, "lag")

    def phase_margin_lead(self, over: Range | None = None) -> Answer:
        """Return the least phase lead (rad, in [0, 2 pi)) that brings L to -1."""
        return self._phase_margin(over, "lead")

    def phase_margin(self, over: Range | None = None) -> Answer:
        """Return the smaller of both."""
        return self._phase_margin(over, "lag", "lead")
