"""What a measure is read from: a response, a break of a loop, or the loop itself."""

from __future__ import annotations

from flint import fmpq

from specgate.frequency.questions import Gain, OpenLoop
from specgate.response.answers import Absent, Answer
from specgate.response.step import StepResponse
from specgate.systems.solution import LoopSolution
from specgate.systems.transfer import TransferFunction
from specgate.terms.records import record


@record
class ResponseSubject:
    """One input of a loop to one of its signals, driven by a step of `size` (SI).

    channel:  transfer function from input to signal as the wiring gives it (not reduced).
    response: the response in time of the reduced channel, deviations from rest, size included.
    error:    response of reference minus signal, or why there is none (no common dimension).
    gain:     the channel over frequency; None where this version does not answer that.
    void:     why no measure over time may be read although the reduced channel would give one (an unstable
              mode hidden on the path from input to signal); None where there is no such reason.
    """

    channel: TransferFunction
    size: fmpq
    response: StepResponse | Absent
    error: StepResponse | Absent
    void: Absent | None = None
    gain: Gain | None = None


@record
class BreakSubject:
    """The loop opened at a break: L is minus the transfer from the injected to the returned signal.

    loop: L over frequency; None where this version does not answer that.
    """

    open_loop: TransferFunction
    stable: Answer
    loop: OpenLoop | None = None


@record
class LoopSubject:
    """The whole loop with every mode, cancelled or not."""

    solution: LoopSolution


Subject = ResponseSubject | BreakSubject | LoopSubject
