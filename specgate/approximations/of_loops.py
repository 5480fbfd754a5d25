"""Conditions on a loop opened at a break; of a response, at the break that it is unity feedback around."""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.approximation import Condition, Found
from specgate.approximations.conditions import words
from specgate.approximations.opened import OpenedLoop
from specgate.approximations.viewed import Viewed
from specgate.measures.measure import Arguments
from specgate.systems.delayed_network import DelayedTransfer
from specgate.terms.verdicts import Trilean

NO_BREAK = "no declared break shows the whole loop"
"""Said where there is nothing to look at."""


def _stable(viewed: Viewed, _: Arguments, __: fmpq | None) -> Found:
    opened = viewed.around
    if opened is None:
        return words(NO_BREAK, False)
    if opened.stable is None:
        return Found("not decided", Trilean.UNKNOWN)
    return words("it is" if opened.stable else "it is not", opened.stable)


CLOSED_LOOP_STABLE = Condition(
    key="stable",
    name="the closed loop is stable",
    source="derived",
    required="every mode decays",
    find=_stable,
)
"""That there is something a margin can be left to, decided exactly."""


def _continuous(viewed: Viewed, _: Arguments, __: fmpq | None) -> Found:
    opened = viewed.around
    if opened is None:
        return words(NO_BREAK, False)
    continuous = opened.transfer is not None or isinstance(opened.subject.open_loop, DelayedTransfer)
    return words("it is" if continuous else "a sampled block is in the loop", continuous)


CONTINUOUS = Condition(
    key="continuous",
    name="the loop is continuous in time",
    source="derived",
    required="no sampled block in it",
    find=_continuous,
)
"""That a dead time is a factor of L."""


def _falls_off(viewed: Viewed, _: Arguments, __: fmpq | None) -> Found:
    opened = viewed.around
    below = None if opened is None else below_one_at_last(opened)
    if below is None:
        return Found("not decided", Trilean.UNKNOWN)
    return words("it does" if below else "it does not", below)


FALLS_OFF = Condition(
    key="falls_off",
    name="the gain of the open loop falls below one at high frequency",
    source="derived",
    required="|L| < 1 at infinite frequency",
    find=_falls_off,
)
"""That no dead time, however small, destabilises the loop."""


def below_one_at_last(opened: OpenedLoop) -> bool | None:
    """Return whether |L| is below one at infinite frequency; None where that is not told."""
    transfer = opened.transfer
    if transfer is not None:
        above, below = transfer.numerator, transfer.denominator
        if above.degree() != below.degree():
            return bool(above.degree() < below.degree())
        return bool(abs(above.leading_coefficient()) < abs(below.leading_coefficient()))
    late = opened.subject.open_loop
    if isinstance(late, DelayedTransfer) and late.numerator.degree < late.denominator.undelayed.degree():
        return True
    return None
