"""A sampled loop opened at a signal: L(z) from an injected sequence to the one that comes back.

Two kinds of signal can be cut so that a sequence goes in and a sequence comes out: one that only samplers read (its
samples are replaced), and one that holds what sampled blocks with one delay send (what they send is replaced). In a
loop with a single sampler any other signal that the whole loop passes through is cut at the sampler's input: L of a
single loop is the same wherever its samples are cut. Whatever is injected is modelled as a state p of its own, which
takes the injected number over with the next sample, so that L(z) = -z c (zI - M)^-1 e_p with exact rows c. With the
Markov parameters -c M^i e_p the numerator is the product of their series and det(zI - M); where they are exactly zero
(a delay, a lag) its degree is exact.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from types import MappingProxyType

from flint import arb, arb_mat, arb_poly, fmpq, fmpq_mat, fmpq_poly

from specgate.sampled.blocks import SampledBlock, SampledInstance, SampledWiring, held
from specgate.sampled.components import Component
from specgate.sampled.cycle import Controller, Cycle
from specgate.sampled.plant import Plant
from specgate.sampled.rungs import kept
from specgate.sampled.solution import SampledSolution, solve_sampled
from specgate.sampled.state_space import Row, of_rows, realised
from specgate.sampled.transfer import Parts, PulseTransfer, divided
from specgate.systems.blocks import Instance, LinearForm, SignalRef, Wiring
from specgate.systems.equations import Reference
from specgate.systems.error_constants import loop_type
from specgate.systems.feedthrough import AlgebraicLoop
from specgate.systems.graph import reached
from specgate.systems.polynomials import ONE, order_at_origin, product
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision
from specgate.terms.records import record

INJECTED, _OUTPUT = "(injected)", "y"
"""The name of the block that stands for what is injected."""
_Z = fmpq_poly([0, 1])


@record
class SampledOpening:
    """The loop opened at a signal.

    slow: L for slow signals, in s: the same order and leading coefficient at s = 0 as L(z) at z = 1. transfer: L(z);
    None where there is none, with the reason (`algebraic_loop`, or `reason` for what is not answered). stable: whether
    every mode of the closed component decays; None where that is not told. component: that one, where it has L.
    """

    signal: str
    period: fmpq
    slow: TransferFunction | None
    transfer: PulseTransfer | None
    stable: bool | None
    algebraic_loop: AlgebraicLoop | None = None
    reason: str | None = None
    component: Component | None = None


@record
class _Cut:
    """Where the sequence goes in: the references that are replaced, the delay with which it is held, what comes back.

    sent: the sampled outputs that come back as they are sent, with their factors; empty where it is the signal itself,
    as the samplers see it.
    """

    replaced: str
    delay: fmpq
    sent: Mapping[str, fmpq]


def opened(solution: SampledSolution, signal: str) -> SampledOpening:
    """Return the loop opened at a signal. Raises KeyError for an unknown name."""
    slow = solution.slow.open_at(signal)
    if slow.algebraic_loop is not None:
        return SampledOpening(signal, solution.period, None, None, None, slow.algebraic_loop)
    closed = _component(solution, signal)
    stable = True if closed is None else solution.components[closed].stable
    if not slow.numerator or closed is None:
        return SampledOpening(signal, solution.period, slow.transfer, PulseTransfer(fmpq_poly(), ONE), stable)
    if solution.components[closed].cycle is None:
        reason = f"no sampled block lies in the loop through {signal}: its margins are those of a continuous loop"
        return SampledOpening(signal, solution.period, slow.transfer, None, stable, reason=reason)
    members = solution.components[closed].instances
    cut = _cut_at(solution, signal, members)
    if isinstance(cut, str):
        return SampledOpening(signal, solution.period, slow.transfer, None, stable, reason=cut)
    transfer = _transfer(solution, cut, members, slow.transfer)
    return SampledOpening(
        signal, solution.period, slow.transfer, transfer, stable, component=solution.components[closed]
    )


def _component(solution: SampledSolution, signal: str) -> int | None:
    """Return which component goes through a signal, None if there is none."""
    equations = solution.slow.network.equations
    circle = next(one for one in equations.components if SignalRef(signal) in one)
    groups = solution.slow.network.groups
    return next((i for i, group in enumerate(groups) if any(output in circle for output in group.outputs)), None)


# --- where it is cut --------------------------------------------------------------------------------------


def _cut_at(solution: SampledSolution, signal: str, members: Sequence[str]) -> _Cut | str:
    wiring = solution.wiring
    sampled = {one.name: one for one in wiring.instances}
    if at_samplers_only(solution, signal, sampled):
        return _Cut(signal, fmpq(0), {})
    sent = _held_by(solution, signal)
    if sent is not None:
        delays = {_delay(wiring, name) for name in sent}
        if len(delays) == 1:
            return _Cut(signal, delays.pop(), sent)
        return f"{signal} holds what arrives with different delays: open the loop at one of the outputs"
    inside = [one for name, one in sampled.items() if name in members]
    if len(inside) == 1 and len(inside[0].block.inputs) == 1 and _single_loop(solution, signal, inside[0]):
        ((_, form),) = inside[0].arguments.items()
        only = [node.name for _, node in form.terms if isinstance(node, SignalRef)]
        carrying = [
            name
            for name in only
            if _component(solution, name) == _component(solution, signal)
            if name in wiring.continuous.signals
        ]
        for name in carrying:
            if len(carrying) == 1 and at_samplers_only(solution, name, sampled):
                return _Cut(name, fmpq(0), {})
    return (
        f"{signal} is read in continuous time, and more than one way leads from it to the samplers: open the loop at a "
        "signal that only sampled blocks read, or at one that a sampled block holds"
    )


def at_samplers_only(solution: SampledSolution, signal: str, sampled: Mapping[str, SampledInstance]) -> bool:
    """Whether what a signal acts on through sums alone are samplers and nothing else."""
    arcs = solution.slow.network.equations.arcs
    through: dict[Reference, list[Reference]] = {
        node: [fed for fed in arcs[node] if isinstance(fed, SignalRef)] for node in arcs if isinstance(node, SignalRef)
    }
    after = reached([SignalRef(signal)], through)
    read = [fed for node in after for fed in arcs[node] if not isinstance(fed, SignalRef)]
    return all(node.instance in sampled for node in read)


def _held_by(solution: SampledSolution, signal: str) -> Mapping[str, fmpq] | None:
    """Return the held outputs that a signal is a sum of; None where something else is in it."""
    known = solution.continuous.network.equations.static[SignalRef(signal)]
    names = {node.name: factor for node, factor in known.items() if isinstance(node, SignalRef)}
    if len(names) < len(known):
        return None
    outputs = {name: factor for name, factor in names.items() if name not in solution.wiring.inputs}
    return outputs or None


def _delay(wiring: SampledWiring, name: str) -> fmpq:
    return next(one.block.delay for one in wiring.instances for out in one.block.outputs if one.held(out) == name)


def _single_loop(solution: SampledSolution, signal: str, sampler: SampledInstance) -> bool:
    """Whether every circle through the signal passes the sampler and the other way round."""
    arcs = solution.slow.network.equations.arcs
    one = SignalRef(signal)
    others = [node for node in arcs if not isinstance(node, SignalRef) and node.instance == sampler.name]

    def circles(start: Reference, without: Sequence[Reference]) -> bool:
        left = {node: [fed for fed in fed_ if fed not in without] for node, fed_ in arcs.items() if node not in without}
        return start in reached(left[start], left)

    return not circles(one, others) and not any(circles(node, [one]) for node in others)


# --- L(z) -------------------------------------------------------------------------------------------------


def _transfer(solution: SampledSolution, cut: _Cut, members: Sequence[str], slow: TransferFunction) -> PulseTransfer:
    wiring = injected(solution.wiring, cut.replaced, cut.delay, cut.sent)
    inside = [one for one in wiring.instances if one.name in (*members, INJECTED)]
    sources = [one.held(output) for one in inside for output in one.block.outputs]
    later = wiring.later(sources)
    outputs, sources = sources, [*sources, *(name for name, _, _ in later)]
    plant = Plant(wiring.punctual.wiring, wiring.members(members), sources)
    samplers = [one.arguments[name] for one in inside for name in one.block.inputs]
    whole = plant.seen([*samplers, wiring.continuous.signals[cut.replaced]])
    least = whole.reduced()
    controllers = [Controller(realised(one.block), one.block.delay) for one in inside]
    motion = type(least)(
        least.a, least.b, of_rows(least.c.tolist()[:-1], least.order), of_rows(least.d.tolist()[:-1], len(sources))
    )
    cycle = Cycle(motion, controllers, wiring.period, [(number, more) for _, number, more in later])
    if cut.sent:
        back = [
            sum((cut.sent.get(name, fmpq(0)) * cycle.sent[i, j] for i, name in enumerate(outputs)), fmpq(0))
            for j in range(cycle.order)
        ]
    else:
        at_once = cycle.stretches[0].held
        direct = least.d.tolist()[-1]
        own = [*least.c.tolist()[-1], *([fmpq(0)] * (cycle.order - least.order))]
        back = [own[j] + sum((f * at_once[i, j] for i, f in enumerate(direct)), fmpq(0)) for j in range(cycle.order)]
    place = cycle.moving + cycle.law.order - 1
    if cycle.exact is not None:
        return exactly(cycle.exact, back, place)
    drawn = Plant(wiring.punctual.wiring, members, sources).dynamics[0].charpoly()
    lost = order_at_origin(drawn) - order_at_origin(least.a.charpoly())
    below = _known_below(wiring, members, lost)
    above = _known_above(inside, below, slow)
    return PulseTransfer(above, below, kept(lambda bits: enclosed(cycle, back, place, above, below, bits)))


def injected(
    wiring: SampledWiring, signal: str, delay: fmpq, sent: Mapping[str, fmpq] = MappingProxyType({})
) -> SampledWiring:
    """Return the wiring with a sampled block of its own in place of every use of a signal or an input.

    sent: what held outputs are in the signal, where it is what they send that is replaced.
    """
    old, new = SignalRef(signal), SignalRef(held(INJECTED, _OUTPUT))

    def replaced(form: LinearForm) -> LinearForm:
        return LinearForm(tuple((factor, new if node == old else node) for factor, node in form.terms))

    def within(arguments: Mapping[str, LinearForm]) -> dict[str, LinearForm]:
        return {name: replaced(form) for name, form in arguments.items()}

    # p takes over what is injected with the next sample: 1/z
    block = SampledBlock(INJECTED, ("u",), (_OUTPUT,), {(_OUTPUT, "u"): ONE}, _Z, delay)
    continuous = wiring.continuous
    return SampledWiring(
        wiring.period,
        Wiring(
            (*continuous.inputs, new.name),
            tuple(Instance(one.name, one.block, within(one.arguments)) for one in continuous.instances),
            {name: replaced(form) for name, form in continuous.signals.items()},
        ),
        (
            *(
                SampledInstance(one.name, _at_once(one, signal, sent, wiring), within(one.arguments))
                for one in wiring.instances
            ),
            SampledInstance(INJECTED, block, {"u": LinearForm(())}),
        ),
    )


def _at_once(one: SampledInstance, signal: str, sent: Mapping[str, fmpq], wiring: SampledWiring) -> SampledBlock:
    """Return the block without its delay where all that it holds is cut off: nobody sees what is on its way then."""
    block = one.block
    names = {one.held(output) for output in block.outputs}
    forms = [form for name, form in wiring.continuous.signals.items() if name != signal]
    forms += [form for other in wiring.continuous.instances for form in other.arguments.values()]
    forms += [form for other in wiring.instances for form in other.arguments.values()]
    read = {node.name for form in forms for _, node in form.terms if isinstance(node, SignalRef)}
    if not names <= set(sent) or names & read:
        return block
    return SampledBlock(block.name, block.inputs, block.outputs, block.numerators, block.denominator, fmpq(0))


def exactly(matrix: fmpq_mat, back: Row, place: int) -> PulseTransfer:
    """Return L with rational coefficients; p is a mode at z = 0 that nothing acts on."""
    characteristic = matrix.charpoly().right_shift(1)
    size = int(matrix.nrows())
    row, markov = fmpq_mat(1, size, back), []
    for _ in range(size):
        markov.append(-row[0, place])
        row = row * matrix
    degree = characteristic.degree()
    above = [
        sum((characteristic[degree - j] * markov[i - j] for j in range(i + 1)), fmpq(0)) for i in range(degree + 1)
    ]
    reduced = TransferFunction(fmpq_poly(list(reversed(above))), characteristic).reduced()
    return PulseTransfer(reduced.numerator, reduced.denominator)


def _known_below(wiring: SampledWiring, members: Sequence[str], lost: int) -> fmpq_poly:
    """Return the exact factor of the denominator: controllers that stand alone, and integrators that do.

    lost: integrators that the opened loop does not show.
    """
    parts = [one for one in solve_sampled(wiring).components if set(one.instances) & set(members)]
    alone = product(one.exact for one in parts if one.exact is not None and one.cycle is not None)
    integrators = sum(order_at_origin(one.free) for one in parts if one.cycle is None) - lost
    return alone * fmpq_poly([-1, 1]) ** max(integrators, 0)


def _known_above(inside: Sequence[SampledInstance], below: fmpq_poly, slow: TransferFunction) -> fmpq_poly:
    """Return the exact factor of the numerator: that of a single controller, and the zeros at z = 1.

    There are as many of these as there are poles at z = 1 beyond the type of the loop, which is that of slow signals.
    """
    blocks = [one.block for one in inside if one.name != INJECTED]
    single = len(blocks) == 1 and len(blocks[0].inputs) == len(blocks[0].outputs) == 1
    own = next(iter(blocks[0].numerators.values())) if single else ONE
    zeros = _at_one(below) - loop_type(slow) - _at_one(own)
    return own * fmpq_poly([-1, 1]) ** max(zeros, 0)


def _at_one(p: fmpq_poly) -> int:
    return order_at_origin(p(fmpq_poly([1, 1])))


def enclosed(cycle: Cycle, back: Row, place: int, above: fmpq_poly, below: fmpq_poly, bits: int) -> Parts:
    """Return what is left of numerator and denominator in balls once the exact factors are divided out."""
    precision = 2 * bits + 64
    matrix = cycle.enclosed(precision)
    with working_precision(precision):
        whole = matrix.charpoly().coeffs()[1:]
        size = int(matrix.nrows())
        row, markov = arb_mat(1, size, back), []
        for _ in range(size):
            markov.append(-row[0, place])
            row = row * matrix
        degree = len(whole) - 1
        top = [sum((whole[degree - j] * markov[i - j] for j in range(i + 1)), arb(0)) for i in range(degree + 1)]
        numerator = arb_poly(list(reversed(top)))
        return divided(numerator, above, precision), divided(arb_poly(whole), below, precision)
