"""What approximations look at in a whole loop: all its modes, and the loop opened at its breaks."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property

from specgate.approximations.opened import OpenedLoop
from specgate.measures.subjects import LoopSubject
from specgate.systems.solution import LoopSolution


class WholeLoop:
    """Every mode of a loop, cancelled or not, beside L at each break that it declares."""

    def __init__(self, subject: LoopSubject, breaks: Mapping[str, OpenedLoop]) -> None:
        self.subject, self.breaks = subject, breaks

    @cached_property
    def around(self) -> OpenedLoop | None:
        """The first declared break whose 1 + L has every mode of the loop: the loop is single, and cut there."""
        solution = self.subject.solution
        if not isinstance(solution, LoopSolution) or solution.algebraic_loop is not None:
            return None
        modes = solution.determinant / solution.determinant.leading_coefficient()
        for opened in self.breaks.values():
            found = opened.transfer
            closed = None if found is None else found.denominator + found.numerator
            if closed and closed / closed.leading_coefficient() == modes:
                return opened
        return None
