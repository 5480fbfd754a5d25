"""The pulse transfer function of a channel: from an input to the samples of a signal.

The input is a sequence, held from each sample to the next: for an input that only samplers see that makes no
difference, for one that acts on blocks in s it says what is meant by a frequency response at the samples. As for a loop
opened at a signal (`opened`), it is a state of its own that takes each number over with the next sample.
"""

from __future__ import annotations

from flint import fmpq, fmpq_poly

from specgate.sampled.channel import SampledChannel
from specgate.sampled.cycle import Controller, Cycle
from specgate.sampled.opened import INJECTED, at_samplers_only, enclosed, exactly, injected
from specgate.sampled.plant import Plant
from specgate.sampled.rungs import kept
from specgate.sampled.state_space import StateSpace, of_rows, realised
from specgate.sampled.transfer import PulseTransfer
from specgate.systems.blocks import SignalRef
from specgate.systems.polynomials import ONE, order_at_origin


def pulse_transfer(found: SampledChannel) -> PulseTransfer:
    """Return G(z) of a channel from one source with a sampled block on the way."""
    (source,) = found.sources
    wiring = injected(found.solution.wiring, source, fmpq(0))
    inside = [one for one in wiring.instances if one.name in (*found.instances, INJECTED)]
    held = [one.held(output) for one in inside for output in one.block.outputs]
    later = wiring.later(held)
    plant = Plant(wiring.punctual.wiring, wiring.members(found.instances), [*held, *(name for name, _, _ in later)])
    samplers = [one.arguments[name] for one in inside for name in one.block.inputs]
    least = plant.seen([*samplers, found.target]).reduced()
    controllers = [Controller(realised(one.block), one.block.delay) for one in inside]
    columns = len(held) + len(later)
    motion = StateSpace(
        least.a, least.b, of_rows(least.c.tolist()[:-1], least.order), of_rows(least.d.tolist()[:-1], columns)
    )
    cycle = Cycle(motion, controllers, wiring.period, [(number, more) for _, number, more in later])
    at_once, direct = cycle.stretches[0].held, least.d.tolist()[-1]
    own = [*least.c.tolist()[-1], *([fmpq(0)] * (cycle.order - least.order))]
    # what comes back at an opening counts with a minus
    back = [-own[j] - sum((f * at_once[i, j] for i, f in enumerate(direct)), fmpq(0)) for j in range(cycle.order)]
    place = cycle.moving + cycle.law.order - 1
    if cycle.exact is not None:
        return exactly(cycle.exact, back, place)
    above = _known_above(found)
    return PulseTransfer(above, ONE, kept(lambda bits: enclosed(cycle, back, place, above, ONE, bits)))


def _known_above(found: SampledChannel) -> fmpq_poly:
    """Return the exact factor of the numerator: zeros at z = 1, as slow signals see them, and those of a law at -1.

    Where the input reaches the signal through one law alone, the zeros of the law are zeros of the channel.
    """
    (source,) = found.sources
    slow = found.slow(source)
    if not slow.numerator:
        return fmpq_poly()
    ones = max(order_at_origin(slow.numerator) - order_at_origin(slow.denominator), 0)
    result = fmpq_poly([-1, 1]) ** ones
    laws = [one for one in found.solution.wiring.instances if one.name in found.instances]
    if len(laws) == 1 and len(laws[0].block.numerators) == 1 and _through_samplers_alone(found, source):
        (numerator,) = laws[0].block.numerators.values()
        result *= fmpq_poly([1, 1]) ** order_at_origin(numerator(fmpq_poly([-1, 1])))
    return result


def _through_samplers_alone(found: SampledChannel, source: str) -> bool:
    static = found.solution.continuous.network.equations.static
    direct = any(SignalRef(source) in static[node] for _, node in found.target.terms)
    sampled = {one.name: one for one in found.solution.wiring.instances}
    return not direct and at_samplers_only(found.solution, source, sampled)
