"""What approximations look at in a response with a dead time on the way: the opened loop around which it closes."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property
from typing import Literal

from flint import fmpq

from specgate.approximations.opened import OpenedLoop
from specgate.measures.subjects import ResponseSubject
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.transfer import TransferFunction

Reference = Literal["input", "zero", "other"]


class LateResponse:
    """The response to a single input through a channel with dead time, beside L at each break of its loop.

    reference: what its error is measured from: the input that drives it, nothing (`zero`), or something else.
    """

    def __init__(self, subject: ResponseSubject, breaks: Mapping[str, OpenedLoop], reference: Reference) -> None:
        self.subject, self.breaks, self.reference = subject, breaks, reference

    @cached_property
    def around(self) -> OpenedLoop | None:
        """The first declared break with channel = L/(1 + L), exactly: quasi-polynomials are equal term by term."""
        channel = self.subject.channel
        if not isinstance(channel, DelayedTransfer):
            return None
        return next((one for one in self.breaks.values() if _unity(channel, one.subject.open_loop)), None)


def _unity(channel: DelayedTransfer, opened: object) -> bool:
    if not isinstance(opened, DelayedTransfer):
        return False
    left = channel.numerator * (opened.denominator + opened.numerator)
    return not left + (channel.denominator * opened.numerator).scaled(fmpq(-1))


def derived_for(subject: ResponseSubject, inputs: tuple[str, ...], *, late: bool) -> bool:
    """Return whether a formula is derived for a response at all.

    inputs: the kinds of input besides a single step; late: whether it is for a channel with a dead time.
    """
    if subject.beyond is None:
        return True
    if isinstance(subject.channel, TransferFunction):
        return subject.kind in inputs
    plain = subject.kind == "step" and all(given.begin == 0 for given in subject.inputs)
    return late and (plain or subject.kind in inputs) and isinstance(subject.channel, DelayedTransfer)
