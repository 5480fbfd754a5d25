"""The steady value is read off the transform of the response: lim s*Y(s) at s = 0.

For a step this is the size of the step times the channel's value at s = 0. The limit of the transform is that of the
response only if all poles of s*Y(s) lie strictly left of the imaginary axis. Where one does not, the limit theorem
still gives a finite number for a response that runs away or rings for ever, and the number means nothing. For a
response with an integrator the limit itself is infinite. What is left of the error of a ramp or a parabola is read the
same way, from the error in place of the response. A dead time is one at s = 0 and changes nothing of that.

Inside its condition it is exact.
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import words
from specgate.approximations.features import Features
from specgate.approximations.late import LateResponse
from specgate.measures.measure import Arguments
from specgate.response.answers import Absent, Answer
from specgate.response.step import StepResponse
from specgate.systems.delayed_network import DelayedTransfer
from specgate.terms.verdicts import Trilean

Seen = Features | LateResponse

_INTEGRATORS = {"step": 0, "ramp": 1, "parabola": 2}
_INFINITE = "the limit of s*Y(s) at s = 0 is infinite: the response has an integrator"


def _of_error(arguments: Arguments) -> bool:
    return arguments.measure == "steady_state_error"


def _asked(features: Features, arguments: Arguments) -> StepResponse | Absent:
    """Return the response whose steady value is asked for: the signal, or the error."""
    asked = features.subject.error if _of_error(arguments) else features.subject.response
    if isinstance(asked, StepResponse | Absent):
        return asked
    return Absent("it is no step response of a rational transfer function", proved=False)


def _limit(seen: Seen, arguments: Arguments) -> Answer:
    value = _late_limit(seen, arguments) if isinstance(seen, LateResponse) else _rational_limit(seen, arguments)
    if isinstance(value, Absent):
        return Answer.nothing(value.reason)
    return Answer.of_exact(abs(value) if _of_error(arguments) else value)


def _rational_limit(features: Features, arguments: Arguments) -> fmpq | Absent:
    asked = _asked(features, arguments)
    if isinstance(asked, Absent):
        return asked
    if asked.denominator[0] == 0:
        return Absent(_INFINITE)
    value: fmpq = asked.size * asked.numerator[0] / asked.denominator[0]
    return value


def _late_limit(seen: LateResponse, arguments: Arguments) -> fmpq | Absent:
    """Return the limit through a dead time: orders and leading coefficients at s = 0 are exact there too."""
    subject, channel = seen.subject, seen.subject.channel
    if not isinstance(channel, DelayedTransfer) or subject.kind not in _INTEGRATORS:
        return Absent("it is no response to a step, a ramp or a parabola")
    above = channel.numerator
    if _of_error(arguments):
        if seen.reference == "other":
            return Absent("its error is measured from another signal")
        above = above.scaled(fmpq(-1))
        above = channel.denominator + above if seen.reference == "input" else above
    if not above:
        return fmpq(0)
    (zeros, leading), (poles, below) = above.first_at_origin(), channel.denominator.first_at_origin()
    order = zeros - poles - _INTEGRATORS[subject.kind]
    if order != 0:
        return fmpq(0) if order > 0 else Absent(_INFINITE)
    quantities = subject.inputs[0].quantities if subject.kind != "step" else {}
    return next(iter(quantities.values()), subject.size) * leading / below


def _poles_left(seen: Seen, arguments: Arguments, _: fmpq | None) -> Found:
    if seen.subject.void is not None:
        return words(seen.subject.void.reason, False)
    if isinstance(seen, LateResponse):
        return _late_poles(seen, arguments)
    asked = _asked(seen, arguments)
    if isinstance(asked, Absent):
        return words(asked.reason, False)
    return words("all are" if asked.settles else "at least one is not", asked.settles)


def _late_poles(seen: LateResponse, arguments: Arguments) -> Found:
    """Find whether a response through a dead time comes to rest, as the count of its modes proves."""
    asked = seen.subject.error if _of_error(arguments) else seen.subject.response
    absent = asked if isinstance(asked, Absent) else asked.final_value().absent
    if absent is None:
        return words("all are", True)
    return Found(absent.reason, Trilean.NO if absent.proved else Trilean.UNKNOWN)


ROW = Approximation(
    name="final_value_theorem",
    title="Final value from the limit at s = 0",
    estimates=("final_value", "steady_state_error"),
    formula="lim s*Y(s) at s = 0",
    source="J. Chen, K. H. Lundberg, D. E. Davison, D. S. Bernstein, IEEE Control Systems Magazine 27(3), 2007, 97-99",
    conditions=(
        Condition(
            key="poles",
            name="poles of s*Y(s)",
            source="Chen, Lundberg, Davison, Bernstein 2007",
            required="all poles strictly left of the imaginary axis",
            find=_poles_left,
        ),
    ),
    evaluate=_limit,
    accuracy=lambda _, __: Accuracy(fmpq(0), fmpq(0), "exact"),
    text=__doc__,
    inputs=("ramp", "parabola"),
    late=True,
)
