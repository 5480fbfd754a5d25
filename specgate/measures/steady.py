"""What is left in the end of a response to a sine or to white noise: amplitude, phase, standard deviation."""

from __future__ import annotations

from collections.abc import Callable
from typing import Literal

from flint import acb, arb, fmpq, fmpq_poly

from specgate.measures.inputs import NOISE, SINE
from specgate.measures.measure import Arguments, Measure, UnitRule
from specgate.measures.reading import missing
from specgate.measures.subjects import ResponseSubject
from specgate.response.accounts import Account, Footing
from specgate.response.answers import Absent, Answer
from specgate.sampled.solution import SlowTransfer
from specgate.systems.energy import energy
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision

Sign = Literal[-1, 0, 1]

_UNSETTLED = "the channel does not settle"
_SAMPLED = (
    "what a sine or white noise leaves in a sampled loop between its samples is not answered by this version; gain_at "
    "and phase_at of a step response tell what a sine does to the samples"
)
_GUARD = 32

_REDUCED = "the reduced channel, exact, whose poles all decay (Hurwitz's criterion in rational arithmetic)"
_SQUARED_GAIN = "the square of the amplitude, exact: that of the input times |N|^2/|D|^2 at its frequency; its root"
_ARGUMENT = "the argument of N conj D at the frequency of the input, an exact complex number"
_PARSEVAL = "the variance, exact by Parseval's theorem (half the density times the integral of h^2), and its root"


def _channel(subject: ResponseSubject) -> TransferFunction | Answer:
    """Return the reduced channel if all its modes decay, or the answer why there is no steady state."""
    for absent in (subject.void, subject.channel):
        if isinstance(absent, Absent):
            return missing(absent)
    if isinstance(subject.channel, SlowTransfer):
        return Answer.undecided(_SAMPLED)
    if not isinstance(subject.channel, TransferFunction):
        return Answer.undecided("what is left in the end is only known of loops without dead time")
    channel = subject.channel.reduced()
    return channel if is_hurwitz(channel.denominator) else Answer.nothing(_UNSETTLED)


def _value(polynomial: fmpq_poly, frequency: fmpq) -> tuple[fmpq, fmpq]:
    """Return real and imaginary part of a polynomial at j * frequency, exactly."""
    real, imaginary, power = fmpq(0), fmpq(0), fmpq(1)
    for k, c in enumerate(polynomial.coeffs()):
        term = c * power * (1 if k % 4 < 2 else -1)
        real, imaginary = (real + term, imaginary) if k % 2 == 0 else (real, imaginary + term)
        power = power * frequency
    return real, imaginary


def _squared_amplitude(subject: ResponseSubject, _: Arguments) -> fmpq | Answer:
    channel = _channel(subject)
    if isinstance(channel, Answer):
        return channel
    given = subject.inputs[0].quantities
    above, below = (_value(p, given["frequency"]) for p in (channel.numerator, channel.denominator))
    amplitude = given["amplitude"]
    return amplitude * amplitude * _square(above) / _square(below)


def _square(value: tuple[fmpq, fmpq]) -> fmpq:
    return value[0] * value[0] + value[1] * value[1]


def _variance(subject: ResponseSubject, _: Arguments) -> fmpq | Answer:
    channel = _channel(subject)
    if isinstance(channel, Answer):
        return channel
    if channel.numerator.degree() >= channel.denominator.degree():
        return Answer.nothing(
            "the channel passes white noise on directly: its variance is without limit", infinite=True
        )
    density = subject.inputs[0].quantities["density"]
    return density / 2 * energy(channel.numerator, channel.denominator)


def _root(square: fmpq | Answer, how: Callable[[], Account]) -> Answer:
    """Return the square root of a rational: exact where it is rational."""
    if isinstance(square, Answer):
        return square
    tops = [int(part).bit_length() for part in (square.p, square.q)]
    with working_precision(max(tops) + _GUARD):
        parts = [arb(part).sqrt().unique_fmpz() for part in (square.p, square.q)]
    if None not in parts and fmpq(*parts) ** 2 == square:
        return Answer.of_exact(fmpq(*parts))

    def refine(bits: int) -> arb:
        with working_precision(bits + _GUARD):
            return arb(square).sqrt()

    return Answer.of_ball(refine).accounted(how)


def _by(method: str, subject: ResponseSubject) -> Callable[[], Account]:
    """Return how a number was read off a reduced channel."""

    def how() -> Account:
        channel = _channel(subject)
        assert isinstance(channel, TransferFunction)
        return Account(method, Footing(_REDUCED, poles=channel.denominator.degree()))

    return how


def _sign(square: fmpq | Answer, limit: fmpq) -> Sign | None:
    """Return the exact sign of the square root of a rational minus a limit."""
    if isinstance(square, Answer):
        return None
    if limit < 0:
        return 1
    away = square - limit * limit
    return 0 if away == 0 else 1 if away > 0 else -1


def _phase(subject: ResponseSubject, _: Arguments) -> Answer:
    channel = _channel(subject)
    if isinstance(channel, Answer):
        return channel
    frequency = subject.inputs[0].quantities["frequency"]
    (a, b), (c, d) = (_value(p, frequency) for p in (channel.numerator, channel.denominator))
    real, imaginary = a * c + b * d, b * c - a * d
    if real == 0 and imaginary == 0:
        return Answer.nothing("nothing of the sine is left in the steady state: it has no phase")
    if subject.inputs[0].quantities["amplitude"] == 0 or (imaginary == 0 and real > 0):
        return Answer.of_exact(0)

    def refine(bits: int) -> arb:
        with working_precision(bits + _GUARD):
            angle: arb = acb(arb(real), arb(imaginary)).arg()
            return angle

    return Answer.of_ball(refine).accounted(_by(_ARGUMENT, subject))


ROWS = (
    Measure(
        name="steady_state_amplitude",
        title="Amplitude in the steady state",
        subjects=("response",),
        unit=UnitRule.SIGNAL,
        definition="Amplitude of the oscillation that a sine at the input leaves once the transient has decayed.",
        absent_when="the channel does not settle",
        source="IEC 60050-351:2013, section 351-45 (frequency response)",
        method=(
            "enclosed root of an exact square: that of the input's amplitude times the channel's gain at its frequency"
        ),
        read=lambda subject, given: _root(_squared_amplitude(subject, given), _by(_SQUARED_GAIN, subject)),
        at_limit=lambda subject, arguments, limit: _sign(_squared_amplitude(subject, arguments), limit),
        inputs=SINE,
    ),
    Measure(
        name="steady_state_phase",
        title="Phase in the steady state",
        subjects=("response",),
        unit=UnitRule.DEGREE,
        definition=(
            "Phase of that oscillation against the sine at the input, above -180 deg up to 180 deg; negative where it "
            "lags."
        ),
        absent_when="the channel does not settle, or nothing of the sine is left",
        source="IEC 60050-351:2013, section 351-45 (frequency response)",
        method="enclosed: argument of an exact complex number",
        read=_phase,
        signed=True,
        inputs=SINE,
    ),
    Measure(
        name="standard_deviation",
        title="Standard deviation",
        subjects=("response",),
        unit=UnitRule.SIGNAL,
        definition=(
            "Standard deviation of the signal in the stationary state under white noise of the stated density. The "
            "density is one-sided, per hertz: the variance is its integral over the frequencies above zero, times the "
            "squared gain, which is half the density times the integral of the squared impulse response."
        ),
        absent_when="the channel does not settle, or passes white noise on directly",
        source="N. Wiener 1930 and A. Khinchin 1934: variance as the integral of the spectral density over frequency",
        method="enclosed root of an exact variance (Parseval's theorem)",
        read=lambda subject, given: _root(_variance(subject, given), _by(_PARSEVAL, subject)),
        at_limit=lambda subject, arguments, limit: _sign(_variance(subject, arguments), limit),
        inputs=NOISE,
    ),
)
