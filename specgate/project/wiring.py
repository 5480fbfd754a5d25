"""One loop with values: its blocks applied, its signals as exact sums, and what of it is not answered."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from flint import fmpq

from specgate.project import faults
from specgate.project.blocks import BuiltBlock, memoryless
from specgate.project.breaks import Applied
from specgate.project.faults import Fault
from specgate.project.instances import Form, NameRef, Use, UseRef, Uses
from specgate.project.parameters import Values
from specgate.project.signals import LoopSignals
from specgate.project.temperatures import absolute
from specgate.project.types import Break, Loop, Project, Response
from specgate.sampled.blocks import LONGEST_DELAY, SampledBlock, SampledInstance, SampledWiring, held
from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.graph import reached, reversed_arcs
from specgate.systems.opening import Cut
from specgate.terms.enclosed import printed_exact
from specgate.terms.findings import Related
from specgate.terms.records import record

Node = tuple[str, str]
"""("signal", name) or ("block", instance)."""


@record
class InstantiatedLoop:
    """A loop in coherent SI.

    wiring: a block that this version does not answer is left out of it, and its outputs are inputs named
    `block.output`; what no path through such a block reaches is answered as if it stood there.
    sampled: the same with the sampled blocks, which are left out of `wiring` too; None where there are none.
    signals: the unit and the span of each signal. rest: value of every input and signal before the step, temperatures
    from the zero of the signal's unit. unsupported: why nothing about the loop as a whole is answered. responses,
    breaks: the same for each of them that is concerned, by name. subsystems: the subsystem of each instance.
    cuts: what each break cuts.
    depends_on_pi: the wiring rests on a rounded decimal, so that a yes or no has to be decided again with a longer one.
    """

    wiring: Wiring
    signals: LoopSignals
    rest: Mapping[str, fmpq]
    unsupported: str | None
    responses: Mapping[str, str]
    breaks: Mapping[str, str]
    subsystems: Mapping[str, str]
    depends_on_pi: bool
    cuts: Mapping[str, Cut]
    sampled: SampledWiring | None = None


def wire(project: Project, loop: Loop, blocks: Mapping[str, BuiltBlock], values: Values) -> InstantiatedLoop:
    """Return one loop. Raises Fault, among others where a block with a memory is used with different arguments."""
    drawn = Drawn(project, loop, blocks, values)
    signals = LoopSignals(project, loop, values)
    rest = {name: fmpq(0) for name in (*loop.inputs, *loop.signals)}
    rest.update({name: absolute(value, signals.unit(name), values) for name, value in loop.rest.items()})
    wiring = drawn.wiring()
    return InstantiatedLoop(
        wiring,
        signals,
        rest,
        next(iter(drawn.missing.values()), None),
        {name: reason for name, response in loop.responses.items() if (reason := drawn.response(response))},
        {name: reason for name, opened in loop.breaks.items() if (reason := drawn.opened(opened))},
        {name: drawn.classes[number][0].call.subsystem for number, name in drawn.names.items()},
        drawn.uses.rounded or any(blocks[name].rounded for name in drawn.numbers),
        {name: drawn.cut(opened) for name, opened in loop.breaks.items()},
        drawn.sampled(wiring),
    )


class Drawn:
    """A loop as drawn: which instances there are, what feeds what, and which instances are missing."""

    def __init__(self, project: Project, loop: Loop, blocks: Mapping[str, BuiltBlock], values: Values) -> None:
        self.project, self.loop, self.blocks = project, loop, blocks
        self.uses = Uses(loop, values)
        self.classes = self.uses.classes()
        self.numbers = self._by_subsystem()
        self.names = dict(self._named())
        built = {name: blocks[self.classes[number][0].call.subsystem] for number, name in self.names.items()}
        self.periodic = {name: one.sampled for name, one in built.items() if one.sampled is not None}
        self.missing = {name: reason for name, one in built.items() if (reason := one.unsupported)}
        self.arcs = self._arcs()

    def _by_subsystem(self) -> dict[str, list[int]]:
        """Return the classes of each subsystem that is used, in the order of the project. Raises Fault."""
        found: dict[str, list[int]] = {name: [] for name in self.project.subsystems}
        for number, uses in self.classes.items():
            found[uses[0].call.subsystem].append(number)
        for name, numbers in found.items():
            subsystem = self.project.subsystems[name]
            if len(numbers) > 1 and not subsystem.separate_instances and not memoryless(self.blocks[name]):
                first, second = (self.classes[number][0].call.place for number in numbers[:2])
                raise Fault(
                    faults.VALUE,
                    f"`{name}` is applied to different arguments: one block has one input. Name the signal that it "
                    "acts on and use that, or write `instances: separate` if there are several of it",
                    second,
                    Related(first, "the other use"),
                )
        return {name: numbers for name, numbers in found.items() if numbers}

    def _named(self) -> Iterator[tuple[int, str]]:
        for name, numbers in self.numbers.items():
            yield numbers[0], name
            for count, number in enumerate(numbers[1:], 2):
                yield number, f"{name} ({count})"

    # --- wiring -------------------------------------------------------------------------------------------

    def wiring(self) -> Wiring:
        """Return the wiring, with the outputs of missing instances as inputs."""
        outside = [
            held(self.names[number], output)
            for number, uses in self.classes.items()
            if self._outside(self.names[number])
            for output in self.project.subsystems[uses[0].call.subsystem].outputs
        ]
        instances = [
            Instance(self.names[number], block, self._arguments(number, block))
            for numbers in self.numbers.values()
            for number in numbers
            if not self._outside(self.names[number]) and (block := self._block(number)) is not None
        ]
        signals = {name: self._linear(form) for name, form in self.uses.forms.items()}
        return Wiring((*self.loop.inputs, *outside), tuple(instances), signals)

    def sampled(self, wiring: Wiring) -> SampledWiring | None:
        """Return the wiring with the sampled blocks, None without any. Raises Fault for more than one period."""
        instances = []
        for number, name in self.names.items():
            if name in self.periodic:
                block = self.periodic[name].block
                instances.append(SampledInstance(name, block, self._arguments(number, block)))
        if not instances:
            return None
        self._refuse_two_periods()
        period = self.periodic[instances[0].name].period
        self._refuse_long_dead_times(period)
        return SampledWiring(period, wiring, tuple(instances))

    def _refuse_two_periods(self) -> None:
        first, *others = ((number, name) for number, name in self.names.items() if name in self.periodic)
        for number, name in others:
            if self.periodic[name].period != self.periodic[first[1]].period:
                one, other = (self.classes[n][0].call for n in (first[0], number))
                raise Fault(
                    faults.VALUE,
                    f"`{other.subsystem}` samples every {_seconds(self.periodic[name].period)}, `{one.subsystem}` in "
                    f"the same loop every {_seconds(self.periodic[first[1]].period)}: a loop has one period, and two "
                    "rates in one loop are not answered",
                    other.place,
                    Related(one.place, f"`{one.subsystem}` is used here"),
                )

    def _refuse_long_dead_times(self, period: fmpq) -> None:
        for uses in self.classes.values():
            subsystem = self.project.subsystems[uses[0].call.subsystem]
            block = self.blocks[subsystem.name].block
            if block is not None and subsystem.dead_time is not None and block.dead_time > LONGEST_DELAY * period:
                raise Fault(
                    faults.VALUE,
                    f"`{subsystem.dead_time.as_written}` is more than {LONGEST_DELAY} sampling periods of "
                    f"{_seconds(period)}, which is not worked with: is the period meant?",
                    subsystem.dead_time.place,
                    Related(uses[0].call.place, f"`{subsystem.name}` is used here in a sampled loop"),
                )

    def _outside(self, name: str) -> bool:
        """Whether an instance stands outside the wiring in s."""
        return name in self.missing or name in self.periodic

    def _block(self, number: int) -> Block | None:
        return self.blocks[self.classes[number][0].call.subsystem].block

    def _arguments(self, number: int, block: Block | SampledBlock) -> dict[str, LinearForm]:
        use = self._spelled(number)
        return {name: self._linear(use.arguments.get(name, {})) for name in block.inputs}

    def _spelled(self, number: int) -> Use:
        """Return the use of a class that names signals rather than spelling them out: a break cuts signals."""
        return min(self.classes[number], key=lambda use: sum(len(form) for form in use.arguments.values()))

    def _linear(self, form: Form) -> LinearForm:
        return LinearForm(tuple((factor, self._reference(atom)) for atom, factor in form.items()))

    def _reference(self, atom: NameRef | UseRef) -> SignalRef | OutputRef:
        if isinstance(atom, NameRef):
            return SignalRef(atom.name)
        name = self._instance(atom)
        return SignalRef(held(name, atom.output)) if self._outside(name) else OutputRef(name, atom.output)

    def _instance(self, atom: UseRef) -> str:
        return self.names[self.uses.representative[atom.use]]

    # --- what is not answered -----------------------------------------------------------------------------

    def _arcs(self) -> Mapping[Node, list[Node]]:
        arcs: dict[Node, list[Node]] = {("signal", name): [] for name in (*self.loop.inputs, *self.loop.signals)}
        arcs.update({("block", name): [] for name in self.names.values()})
        for name, form in self.uses.forms.items():
            for atom in form:
                arcs[self._node(atom)].append(("signal", name))
        for number, uses in self.classes.items():
            for use in uses:
                for form in use.arguments.values():
                    for atom in form:
                        arcs[self._node(atom)].append(("block", self.names[number]))
        return arcs

    def _node(self, atom: NameRef | UseRef) -> Node:
        return ("signal", atom.name) if isinstance(atom, NameRef) else ("block", self._instance(atom))

    def response(self, response: Response) -> str | None:
        """Say why a response is not answered, or return None."""
        seen = [response.to]
        if response.reference is not None and ("signal", response.reference) in self.arcs:
            seen.append(response.reference)
        sources = dict.fromkeys(one.source for one in response.excitations)
        reasons = (self._between(source, to) for source in sources for to in seen)
        return next((reason for reason in reasons if reason is not None), None)

    def cut(self, opened: Break) -> Cut:
        """Return which uses a break cuts. Raises Fault."""
        uses = {name: self._spelled(number) for number, name in self.names.items()}
        instance = {use: self._instance(UseRef(use, "")) for use in range(len(self.uses.uses))}
        return Applied(self.uses.forms, uses, instance).cut(opened)

    def opened(self, opened: Break) -> str | None:
        """Say why a break is not answered, or return None."""
        return self._between(opened.at, opened.at, opened.with_open)

    def _between(self, source: str, target: str, held: tuple[str, ...] = ()) -> str | None:
        """Return the reason of the first missing instance on a path from one signal to another, past no held one."""
        arcs = {node: [] if node in [("signal", name) for name in held] else fed for node, fed in self.arcs.items()}
        ahead = reached([("signal", source)], arcs)
        behind = reached([("signal", target)], reversed_arcs(arcs))
        on_path = ahead & behind
        return next((reason for name, reason in self.missing.items() if ("block", name) in on_path), None)


def _seconds(period: fmpq) -> str:
    return f"{printed_exact(period).value:g} s"
