"""The steady value is read off the transform of the response: lim s*Y(s) at s = 0.

For a step this is the size of the step times the channel's value at s = 0. The limit of the transform is that of the
response only if all poles of s*Y(s) lie strictly left of the imaginary axis. Where one does not, the limit theorem
still gives a finite number for a response that runs away or rings for ever, and the number means nothing. For a
response with an integrator the limit itself is infinite. What is left of the error of a ramp or a parabola is read the
same way, from the error in place of the response.

Inside its condition it is exact.
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import words
from specgate.approximations.features import Features
from specgate.measures.measure import Arguments
from specgate.response.answers import Absent, Answer
from specgate.response.step import StepResponse


def _asked(features: Features, arguments: Arguments) -> StepResponse | Absent:
    """Return the response whose steady value is asked for: the signal, or the error."""
    asked = features.subject.error if arguments.measure == "steady_state_error" else features.subject.response
    if isinstance(asked, StepResponse | Absent):
        return asked
    return Absent("it is no step response of a rational transfer function", proved=False)


def _limit(features: Features, arguments: Arguments) -> Answer:
    asked = _asked(features, arguments)
    if isinstance(asked, Absent):
        return Answer.nothing(asked.reason)
    if asked.denominator[0] == 0:
        return Answer.nothing("the limit of s*Y(s) at s = 0 is infinite: the response has an integrator")
    value = asked.size * asked.numerator[0] / asked.denominator[0]
    return Answer.of_exact(abs(value) if arguments.measure == "steady_state_error" else value)


def _poles_left(features: Features, arguments: Arguments, _: fmpq | None) -> Found:
    asked = _asked(features, arguments)
    if features.hidden_instability is not None:
        return words(features.hidden_instability.reason, False)
    if isinstance(asked, Absent):
        return words(asked.reason, False)
    return words("all are" if asked.settles else "at least one is not", asked.settles)


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
)
