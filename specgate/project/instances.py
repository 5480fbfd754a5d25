"""Which uses of a subsystem in a loop are one and the same: those with the same arguments, however written."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from flint import fmpq

from specgate.project.parameters import Values, depends_on_pi, evaluate
from specgate.project.signals import constant, static_order
from specgate.project.types import Call, Loop, Scaled, SignalExpression, SignalName
from specgate.terms.records import record


@record
class UseRef:
    """One output of one use of a subsystem."""

    use: int
    output: str


@record
class NameRef:
    """A loop input or signal."""

    name: str


Atom = NameRef | UseRef
Form = Mapping[Atom, fmpq]
"""A sum of constant times atom, none of the constants zero."""


@record
class Use:
    """A subsystem applied somewhere in a loop; `arguments` by the name of the input."""

    call: Call
    arguments: Mapping[str, Form]


class Uses:
    """All uses of subsystems in a loop, with the classes of those that are one.

    forms: the signals as sums. representative: for each use the first one with the same subsystem and arguments,
    once signals that are plain sums are written out (`error` and `demand - position` are the same argument).
    rounded: a constant in the sums rests on the decimal for pi.
    """

    def __init__(self, loop: Loop, values: Values) -> None:
        self.loop, self.values = loop, values
        self.uses: list[Use] = []
        self.rounded = False
        self.forms = {name: self._form(signal.expression) for name, signal in loop.signals.items()}
        self.order = static_order(loop)
        self.representative = list(range(len(self.uses)))
        while self._merge():
            pass

    def _form(self, node: SignalExpression) -> Form:
        if isinstance(node, SignalName):
            return {NameRef(node.name): fmpq(1)}
        if isinstance(node, Scaled):
            self.rounded = self.rounded or depends_on_pi(node.factor, self.values)
            return scaled(self._form(node.operand), evaluate(constant(node), self.values))
        if isinstance(node, Call):
            arguments = {name: self._form(argument) for name, argument in node.arguments.items()}
            self.uses.append(Use(node, arguments))
            return {UseRef(len(self.uses) - 1, node.output): fmpq(1)}
        return added(self._form(term) for term in node.terms)

    def _merge(self) -> bool:
        """Put uses together that have the same arguments by what is known so far; return whether any were."""
        written_out = self._signals_written_out()
        first: dict[object, int] = {}
        merged = False
        for number, use in enumerate(self.uses):
            arguments = frozenset(
                (name, frozenset(self._written_out(form, written_out).items())) for name, form in use.arguments.items()
            )
            same = first.setdefault((use.call.subsystem, arguments), number)
            merged = merged or self.representative[number] != same
            self.representative[number] = same
        return merged

    def _signals_written_out(self) -> dict[str, Form]:
        """Return the signals as sums of inputs and blocks; one that is a sum of itself stays as it is."""
        known: dict[str, Form] = {}
        for circle in self.order:
            if len(circle) == 1 and NameRef(circle[0]) not in self.forms[circle[0]]:
                known[circle[0]] = self._written_out(self.forms[circle[0]], known)
        return known

    def _written_out(self, form: Form, known: Mapping[str, Form]) -> Form:
        return added(scaled(self._atom(atom, known), factor) for atom, factor in form.items())

    def _atom(self, atom: Atom, known: Mapping[str, Form]) -> Form:
        if isinstance(atom, UseRef):
            return {UseRef(self.representative[atom.use], atom.output): fmpq(1)}
        return known.get(atom.name, {atom: fmpq(1)})

    def classes(self) -> dict[int, list[Use]]:
        """Return the uses of each class by the number of its first, in the order of the file."""
        found: dict[int, list[Use]] = {}
        for number, same in enumerate(self.representative):
            found.setdefault(same, []).append(self.uses[number])
        return found


def added(forms: Iterator[Form]) -> Form:
    """Return the sum of some forms, without what cancels."""
    total: dict[Atom, fmpq] = {}
    for form in forms:
        for atom, factor in form.items():
            total[atom] = total.get(atom, fmpq(0)) + factor
    return {atom: factor for atom, factor in total.items() if factor != 0}


def scaled(form: Form, by: fmpq) -> Form:
    """Return a form times a constant."""
    return {atom: factor * by for atom, factor in form.items()} if by != 0 else {}
