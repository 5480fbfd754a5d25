"""Whether a response is that of unity negative feedback around a break: error over reference is 1/(1 + L), exactly."""

from __future__ import annotations

from collections.abc import Mapping

from flint import fmpq_poly

from specgate.approximations.opened import OpenedLoop
from specgate.measures.subjects import ResponseSubject
from specgate.response.step import StepResponse
from specgate.systems.transfer import TransferFunction

_S = fmpq_poly([0, 1])


def unity_around(subject: ResponseSubject, breaks: Mapping[str, OpenedLoop]) -> OpenedLoop | None:
    """Return the first break around which a response is one of unity feedback, the error taken at the reference."""
    return next((one for one in breaks.values() if one.transfer and _unity(subject, one.transfer)), None)


def _unity(subject: ResponseSubject, opened: TransferFunction) -> bool:
    """Whether the error is the input through 1/(1 + L): compared as fractions, nothing is cancelled but exactly."""
    error, driven = subject.error, _driven(subject)
    if not isinstance(error, StepResponse) or driven is None:
        return False
    above = driven.numerator * opened.denominator * error.denominator
    below = driven.denominator * (opened.denominator + opened.numerator) * error.numerator
    return bool(above == below)


def _driven(subject: ResponseSubject) -> TransferFunction | None:
    """Return the input as a step through a fraction, of which `error` is a response; None of other inputs.

    The error of a step is that of a unit step, its size aside.
    """
    if subject.kind == "step":
        return TransferFunction(fmpq_poly([1]), fmpq_poly([1]))
    quantities = subject.inputs[0].quantities if len(subject.inputs) == 1 else {}
    if subject.kind == "ramp":
        return TransferFunction(fmpq_poly([quantities["slope"]]), _S)
    if subject.kind == "parabola":
        return TransferFunction(fmpq_poly([quantities["curvature"]]), _S * _S)
    return None
