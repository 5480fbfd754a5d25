"""What a sampled loop is without its sampling: a gain and a continuous plant between hold and sampler."""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.opened import HeldGain
from specgate.sampled.solution import SampledSolution
from specgate.systems.polynomials import order_at_origin


def held_gain(solution: object) -> HeldGain | None:
    """Return the gain, plant and delay of a loop with a single sampled block that is a gain; None of any other loop.

    The block may hold its samples for some periods (z^-n): they count as delay.
    """
    if not isinstance(solution, SampledSolution) or solution.wiring.late or len(solution.wiring.instances) != 1:
        return None
    (one,) = solution.wiring.instances
    block = one.block
    if len(block.inputs) != 1 or len(block.outputs) != 1 or not block.numerators:
        return None
    (above,), below = block.numerators.values(), block.denominator
    held = order_at_origin(below)
    if above.degree() != 0 or below.degree() != held:
        return None
    ((_, form),) = one.arguments.items()
    plant = solution.continuous.channel_to(one.held(block.outputs[0]), "what is sampled", form).transfer
    gain: fmpq = above[0] / below[held]
    return HeldGain(plant.scaled(-gain), solution.period, block.delay + held * solution.period)
