"""The sign of a deviation that has become too small for floats: all its modes are divided by the slowest one."""

from __future__ import annotations

from functools import cached_property
from math import frexp

from flint import arb, fmpq

from specgate.response.asymptote import Lasting, leading_mode
from specgate.response.budget import Budget, OutOfWork
from specgate.response.deviation import LOWEST, Deviation, Modal
from specgate.response.grid import Grid
from specgate.response.modes import Expansion, Mode
from specgate.response.panels import PanelLayout
from specgate.response.segments import at_least, exact, float_of
from specgate.response.tables import FloatModes
from specgate.response.walk import Band, Walk
from specgate.terms.precision import working_precision


class Lifted(Modal):
    """g(t) e^(-rate t): a sum of the same modes with all poles moved by a rational rate, of the same sign as g."""

    initial = fmpq(0)

    def __init__(self, deviation: Deviation, rate: fmpq, change: float) -> None:
        self._deviation = deviation
        self._rate = rate
        self._change = change

    @property
    def change(self) -> float:
        """The size of the leading mode, which does not decay any more."""
        return self._change

    def at(self, bits: int) -> Expansion:
        """Return the expansion at a precision of the ladder that is at least `bits`."""
        expansion = self._deviation.at(bits)
        with working_precision(expansion.bits):
            moved = tuple(Mode(mode.pole - arb(self._rate), mode.coefficients) for mode in expansion.modes)
        return Expansion(expansion.offset, moved, expansion.bits)

    @cached_property
    def table(self) -> FloatModes:
        """The modes in floats, times counted from the step."""
        return FloatModes.of(self.at(LOWEST), fmpq(0))


def keeps_sign(deviation: Deviation, lasting: Lasting, since: fmpq, budget: Budget) -> bool:
    """Whether g is proved to have its lasting sign from `since` on, where it is known to have it."""
    lead = leading_mode(deviation.at(LOWEST))
    size = at_least(abs(lead.coefficients[-1]))
    lifted = Lifted(deviation, exact(float(lead.pole.real)), size)
    first = 2.0 ** (frexp(float_of(since))[1] - 1)
    band = Band(None, fmpq(0)) if lasting.sign < 0 else Band(fmpq(0), None)
    walk = Walk(lifted, band, budget, backward=False, end=exact(lasting.since), margin=0.0)
    grid = Grid(PanelLayout(lifted, first, 0.01 * size).block)
    try:
        return walk.through(grid.upward(budget)) is None and not walk.passage(None).touching
    except OutOfWork:
        return False
