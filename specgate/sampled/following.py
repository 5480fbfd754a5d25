"""How far a sampled loop lags a ramp for good.

Let every held output on the way tend to a constant: with slope t on the input that is so if and only if the channel of
slow signals from it to that output is zero at s = 0. Then all signals tend to polynomials of first degree, on which
z - 1 is T d/dt exactly: they are those of the loop with z = 1 + sT, between the samples too. Where an output keeps
growing in steps, the error swings with them in general, and nothing is told. The leading coefficients of slow signals
leave dead times of blocks in s out, which may change them where paths cancel: with them nothing is told either.
"""

from __future__ import annotations

from flint import fmpq

from specgate.response.inputs import Input
from specgate.sampled.channel import SampledChannel
from specgate.systems.blocks import LinearForm, OutputRef, SignalRef
from specgate.systems.polynomials import order_at_origin
from specgate.systems.transfer import TransferFunction


def lasting_error(error: SampledChannel, given: Input) -> fmpq | None:
    """Return what an error tends to under a ramp from the one source of its channel; None: to nothing, or not told."""
    if given.kind != "ramp" or not error.stable or error.solution.wiring.late:
        return None
    if not all(_vanishes(one) for one in _held(error)):
        return None
    slow = error.slow(error.sources[0])
    return given.quantities["slope"] * slow.numerator[1] / slow.denominator[0] if _vanishes(slow) else None


def _held(error: SampledChannel) -> list[TransferFunction]:
    sampled = [one for one in error.solution.wiring.instances if one.name in error.instances]
    forms = [LinearForm(((fmpq(1), OutputRef(one.name, o)),)) for one in sampled for o in one.block.outputs]
    return [error.solution.slow.network.total(form, SignalRef(error.sources[0])).reduced() for form in forms]


def _vanishes(one: TransferFunction) -> bool:
    return one.denominator[0] != 0 and (not one.numerator or order_at_origin(one.numerator) > 0)
