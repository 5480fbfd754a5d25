"""Inputs as sums of delayed steps through fractions of their own, and responses to them.

Every input of the format but white noise is, from its begin on, a sum of steps of stated sizes at stated times through
rational fractions: a ramp is a step through 1/s, an impulse one through s, a pulse two steps. So the response to it is
a sum of delayed step responses of the channel times these fractions. The one exception is one minus a cosine of one
period: its frequency, 2 pi over a rational time, is not rational (see `BumpWave`).
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import field
from typing import Literal

from flint import fmpq, fmpq_poly

from specgate.response.answers import Absent
from specgate.response.budget import OutOfWork
from specgate.response.counted import Counted
from specgate.response.piecewise import PiecewiseResponse
from specgate.response.questions import TimeResponse
from specgate.response.step import StepResponse
from specgate.response.superposed import Superposed
from specgate.response.superposed.waves import AfterBump, BumpWave, StepWave, Wave
from specgate.systems.transfer import TransferFunction
from specgate.terms.records import record

Kind = Literal[
    "step", "ramp", "parabola", "impulse", "ramp_and_hold", "pulse", "one_minus_cosine", "sine", "white_noise"
]

_ONE = fmpq_poly([1])
_S = fmpq_poly([0, 1])


@record
class Input:
    """What drives one input of a loop, coherent SI: its kind and what that is described by, and when it begins (s).

    quantities: size | slope | curvature (u = curvature t^2 / 2) | area | size and slope | size and duration |
    amplitude and frequency (rad/s) | density (one-sided, per Hz). from_end: times count from the end of the ramp.
    """

    kind: Kind
    quantities: Mapping[str, fmpq] = field(default_factory=dict)
    begin: fmpq = field(default_factory=lambda: fmpq(0))
    from_end: bool = False

    @property
    def since(self) -> fmpq:
        """When counting of times begins (s): at the start of the input, or at the end of a ramp that is held."""
        return self.begin + self.rise if self.from_end else fmpq(0)

    @property
    def rise(self) -> fmpq:
        """How long the ramp of a ramp and hold takes (s)."""
        return self.quantities["size"] / self.quantities["slope"]


@record
class Term:
    """A step of `size` at `begin` through numerator / denominator."""

    numerator: fmpq_poly
    denominator: fmpq_poly
    size: fmpq
    begin: fmpq


@record
class Bump:
    """size * (1 - cos(2 pi t / period)) over one period from `begin` on."""

    size: fmpq
    period: fmpq
    begin: fmpq


def terms(given: Input) -> tuple[Term | Bump, ...]:
    """Return an input as a sum. Raises ValueError for white noise, which is none."""
    of, begin = given.quantities, given.begin
    match given.kind:
        case "step":
            return (Term(_ONE, _ONE, of["size"], begin),)
        case "ramp":
            return (Term(_ONE, _S, of["slope"], begin),)
        case "parabola":
            return (Term(_ONE, _S**2, of["curvature"], begin),)
        case "impulse":
            return (Term(_S, _ONE, of["area"], begin),)
        case "pulse":
            end = begin + of["duration"]
            return Term(_ONE, _ONE, of["size"], begin), Term(_ONE, _ONE, -of["size"], end)
        case "ramp_and_hold":
            end = begin + given.rise
            return Term(_ONE, _S, of["slope"], begin), Term(_ONE, _S, -of["slope"], end)
        case "one_minus_cosine":
            return (Bump(of["size"] / 2, of["duration"], begin),)
        case "sine":
            rate = of["frequency"]
            return (Term(_S * rate, fmpq_poly([rate * rate, 0, 1]), of["amplitude"], begin),)
        case "white_noise":
            raise ValueError("white noise has no course in time")


Driven = tuple[TransferFunction, Input]
"""A channel to the signal that is looked at, and what drives it."""


def respond(driven: Sequence[Driven]) -> TimeResponse | Absent:
    """Return the response to inputs that act at once; the channels are parts of one loop that is at rest before.

    Absent where the signal would hold an impulse, or where the response is not searched.
    """
    by_time: dict[fmpq, TransferFunction] = {}
    waves: list[Wave] = []
    try:
        for channel, given in driven:
            for term in terms(given):
                if isinstance(term, Bump):
                    waves += _bump(channel.reduced(), term)
                else:
                    by_time[term.begin] = _plus(by_time.get(term.begin), channel, term)
    except OutOfWork as limit:
        return Absent(limit.reason, proved=False)
    fractions = {begin: fraction.reduced() for begin, fraction in sorted(by_time.items())}
    if not all(fraction.proper for fraction in fractions.values()):
        return Absent("an impulse passes straight through to the signal, or a step through a differentiator")
    response = _response(fractions, waves, driven)
    since = max((given.since for _, given in driven), default=fmpq(0))
    return response if since == 0 else Counted(response, since)


def _response(
    fractions: Mapping[fmpq, TransferFunction], waves: Sequence[Wave], driven: Sequence[Driven]
) -> TimeResponse:
    if not waves and list(fractions) == [fmpq(0)]:
        (only,) = fractions.values()
        plain = len(driven) == 1 and driven[0][1].kind == "step"
        size = driven[0][1].quantities["size"] if plain else fmpq(1)
        return StepResponse(only.numerator / size if plain else only.numerator, only.denominator, size)
    steps = (StepWave(one.numerator, one.denominator, fmpq(1), begin) for begin, one in fractions.items())
    return PiecewiseResponse(Superposed([*steps, *waves]))


def _bump(channel: TransferFunction, bump: Bump) -> Iterable[Wave]:
    if not channel.proper:
        raise OutOfWork("the response of a differentiator to one minus a cosine is not searched")
    wave = BumpWave(channel.numerator, channel.denominator, bump.size, bump.period, bump.begin)
    return wave, AfterBump(wave)


def _plus(known: TransferFunction | None, channel: TransferFunction, term: Term) -> TransferFunction:
    """Add the step response of a channel times a term to what begins at the same time."""
    numerator = channel.numerator * term.numerator * term.size
    denominator = channel.denominator * term.denominator
    if known is None:
        return TransferFunction(numerator, denominator)
    return TransferFunction(
        known.numerator * denominator + numerator * known.denominator, known.denominator * denominator
    )
