"""What approximations look at in a response: its poles and zeros, the dominant pair, the slowest pole."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from functools import cached_property
from types import MappingProxyType
from typing import TypeVar, cast

from flint import fmpq, fmpq_poly

from specgate.approximations.figures import quotient, root
from specgate.approximations.opened import OpenedLoop
from specgate.approximations.spots import Spot, spots
from specgate.approximations.unity import unity_around
from specgate.frequency.rational_gain import RationalGain
from specgate.measures.subjects import ResponseSubject
from specgate.response.answers import Absent, Answer
from specgate.response.step import StepResponse
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction

Found = TypeVar("Found")

_PICKED_AT = 256
"""Bits at which the pair and the slowest pole are picked; figures that still overlap there count as equal."""


class Features:
    """Poles, zeros and what follows from them, of the reduced channel of a response; each is computed once.

    Only of a response with a rational channel; most rows are derived for a single step (`ResponseSubject.beyond` is
    None). Figures are answers: exact where they are rational, refinable balls else (coherent SI).
    breaks: the loop of the response opened at each break that it declares (see `beside`).
    """

    breaks: Mapping[str, OpenedLoop] = MappingProxyType({})

    def __init__(self, subject: ResponseSubject) -> None:
        self.subject = subject
        self._in_loop: Features | None = None
        self._kept: dict[Callable[[Features], object], object] = {}

    def once(self, find: Callable[[Features], Found]) -> Found:
        """Return what a function finds in this response; it is called once and its result kept."""
        if find not in self._kept:
            self._kept[find] = find(self)
        return cast("Found", self._kept[find])

    def beside(self, breaks: Callable[[], Mapping[str, OpenedLoop]]) -> Features:
        """Return the features with the opened loop around them: the same each time, since a response has one loop."""
        if self._in_loop is None:
            self._in_loop = Features(self.subject)
            self._in_loop.breaks = breaks()
        return self._in_loop

    @property
    def around(self) -> OpenedLoop | None:
        """The first declared break around which the response is that of unity negative feedback, exactly."""
        return self.once(_unity)

    def of(self, numerator: fmpq_poly, denominator: fmpq_poly) -> Features:
        """Return the features of another channel in place of this one: what is left when something is dropped."""
        subject, channel = self.subject, TransferFunction(numerator, denominator)
        response = StepResponse(numerator, denominator, subject.size)
        return Features(replace(subject, channel=channel, response=response, gain=RationalGain(channel)))

    @cached_property
    def channel(self) -> TransferFunction:
        """The channel from input to signal with common factors cancelled; denominator monic."""
        channel = self.subject.channel
        if not isinstance(channel, TransferFunction):
            raise ValueError("approximations look at responses that have a rational channel")
        return channel.reduced()

    @property
    def hidden_instability(self) -> Absent | None:
        """Why the reduced channel says nothing of the loop, where that is so."""
        return self.subject.void

    @cached_property
    def stable(self) -> bool:
        """Whether the response settles: all poles strictly left, and no growing mode hidden on the way; exact."""
        return self.hidden_instability is None and is_hurwitz(self.channel.denominator)

    @cached_property
    def poles(self) -> tuple[Spot, ...]:
        """Every pole, both of a conjugate pair, repeated ones as often as they occur."""
        return spots(self.channel.denominator)

    @cached_property
    def zeros(self) -> tuple[Spot, ...]:
        """Every zero, both of a conjugate pair, repeated ones as often as they occur; none for a channel of zero."""
        return spots(self.channel.numerator) if self.channel.numerator else ()

    @cached_property
    def pair(self) -> Spot | None:
        """The complex pole (upper half) of smallest decay rate, of those the one of smallest natural frequency."""
        complex_poles = [pole for pole in self.poles if pole.upper]
        slowest = _least(complex_poles, [pole.decay for pole in complex_poles])
        nearest = _least(slowest, [pole.distance_squared for pole in slowest])
        return nearest[0] if nearest else None

    @cached_property
    def slowest(self) -> Spot | None:
        """The pole of smallest decay rate; of a complex pair the upper one."""
        candidates = [pole for pole in self.poles if pole.upper or not pole.oscillates]
        slowest = _least(candidates, [pole.decay for pole in candidates])
        return slowest[0] if slowest else None

    @cached_property
    def others(self) -> tuple[Spot, ...]:
        """Every pole that is not of the pair; of a repeated pair one of each is left out."""
        pair = self.pair
        return self.poles if pair is None else _without(self.poles, pair.index, pair.conjugate_index)

    @property
    def alone(self) -> bool:
        """Whether the channel is a complex pair and nothing else."""
        return self.pair is not None and not self.others and not self.zeros

    @cached_property
    def sigma(self) -> Answer | None:
        """Decay rate of the pair, 1/s."""
        return None if self.pair is None else self.pair.decay

    @cached_property
    def natural_frequency(self) -> Answer | None:
        """Undamped natural frequency of the pair, rad/s."""
        return None if self.pair is None else self.pair.distance

    @cached_property
    def damping(self) -> Answer | None:
        """Damping ratio of the pair, exact where it is rational."""
        pair = self.pair
        if pair is None:
            return None
        if pair.real is not None and pair.square is not None and pair.real <= 0:
            return root(Answer.of_exact(pair.real * pair.real / pair.square))
        return quotient(pair.decay, pair.distance)

    @cached_property
    def steady_gain(self) -> fmpq | None:
        """Value of the channel at s = 0, None where a pole lies there."""
        channel = self.channel
        return None if channel.denominator[0] == 0 else channel.numerator[0] / channel.denominator[0]


def _unity(features: Features) -> OpenedLoop | None:
    return unity_around(features.subject, features.breaks)


def _least(items: Sequence[Spot], figures: Sequence[Answer]) -> list[Spot]:
    """Return the items of smallest figure: more than one where they cannot be told apart."""
    balls = [figure.enclose(_PICKED_AT) for figure in figures]
    return [item for item, ball in zip(items, balls, strict=True) if not any(other < ball for other in balls)]


def _without(items: Sequence[Spot], *indices: int) -> tuple[Spot, ...]:
    """Return the items without one of each index."""
    rest = list(items)
    for index in indices:
        rest.remove(next(item for item in rest if item.index == index))
    return tuple(rest)
