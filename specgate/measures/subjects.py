"""What a measure is read from: a response, a break of a loop, or the loop itself."""

from __future__ import annotations

from flint import fmpq

from specgate.frequency.questions import Gain, OpenLoop
from specgate.response.answers import Absent, Answer
from specgate.response.inputs import Input
from specgate.response.questions import TimeResponse
from specgate.sampled.solution import SampledSolution, SlowTransfer
from specgate.systems.delayed import DelayedSolution
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.solution import LoopSolution
from specgate.systems.transfer import TransferFunction
from specgate.terms.records import record


@record
class ResponseSubject:
    """The inputs of a loop that are driven, as one signal answers them.

    channel:  transfer function from input to signal as the wiring gives it (not reduced), or why there is no single
              one; of a sampled loop that which slow signals see (`SlowTransfer`).
    size:     of a step (SI); 1 where the input is not a single step.
    response: the response in time of the reduced channel, deviations from rest, size included.
    error:    response of reference minus signal, or why there is none (no common dimension).
    gain:     the channel over frequency; None where this version does not answer that.
    void:     why no measure over time may be read although the reduced channel would give one (an unstable
              mode hidden on the path from input to signal); None where there is no such reason.
    inputs:   what is driven, and how.
    beyond:   why formulas for step responses of rational transfer functions say nothing of this one; None: they may.
    lasting:  what the error tends to (SI), where that is told although its course is not searched.
    """

    channel: TransferFunction | DelayedTransfer | SlowTransfer | Absent
    size: fmpq
    response: TimeResponse | Absent
    error: TimeResponse | Absent
    void: Absent | None = None
    gain: Gain | None = None
    inputs: tuple[Input, ...] = ()
    beyond: str | None = None
    lasting: fmpq | None = None

    @property
    def kind(self) -> str:
        """The kind of the input, `several` for several at once."""
        return "step" if not self.inputs else self.inputs[0].kind if len(self.inputs) == 1 else "several"


@record
class BreakSubject:
    """The loop opened at a break: L is minus the transfer from the injected to the returned signal.

    open_loop: L; of a sampled loop that which slow signals see (`SlowTransfer`).
    loop: L over frequency; None where this version does not answer that.
    on_request: measures that are otherwise always reported and whose search takes too long to be made unasked.
    """

    open_loop: TransferFunction | DelayedTransfer | SlowTransfer
    stable: Answer
    loop: OpenLoop | None = None
    on_request: tuple[str, ...] = ()


@record
class LoopSubject:
    """The whole loop with every mode, cancelled or not."""

    solution: LoopSolution | DelayedSolution | SampledSolution


Subject = ResponseSubject | BreakSubject | LoopSubject
