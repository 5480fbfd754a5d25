"""Parameters: which names can be read where, what they depend on, their dimensions and values."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import field
from types import MappingProxyType

from flint import fmpq

from specgate.project import faults
from specgate.project.faults import Fault, Faults
from specgate.project.types import Parameter, Project, Tolerance, Value
from specgate.systems.graph import strong_components
from specgate.terms import expressions
from specgate.terms.expressions import (
    PLAIN,
    Expression,
    ExpressionError,
    Inferred,
    Name,
    Number,
    PercentOf,
    as_dimension,
)
from specgate.terms.findings import Finding, Related
from specgate.terms.records import record
from specgate.terms.unit import PI

Scopes = Mapping[str | None, Mapping[str, str]]
"""Qualified names by the name that is written; None: outside of every subsystem."""

SIGNAL_WORDS = frozenset({"span", "change"})
"""What `% of …` may say of the signal instead of a parameter."""


@record
class Values:
    """All parameters evaluated: coherent SI, by qualified name.

    inferred: their dimensions. rounded: those that rest on pi or a ratio in dB, hence on a rounded decimal.
    pi: the decimal that was used. broken: those that have no value, because something is wrong with them.
    written: their expressions, with the subsystem in which each is read.
    """

    numbers: Mapping[str, fmpq]
    inferred: Mapping[str, Inferred]
    rounded: frozenset[str]
    scopes: Scopes
    written: Mapping[str, tuple[Expression, str | None]]
    pi: fmpq = PI
    broken: frozenset[str] = field(default_factory=frozenset)


def parameters(project: Project) -> dict[str, tuple[Parameter, str | None]]:
    """Return every parameter by qualified name, with the subsystem it belongs to."""
    every = {name: (parameter, None) for name, parameter in project.parameters.items()}
    owned: dict[str, tuple[Parameter, str | None]] = {
        f"{subsystem.name}.{name}": (parameter, subsystem.name)
        for subsystem in project.subsystems.values()
        for name, parameter in subsystem.parameters.items()
    }
    return {**every, **owned}


def scopes(project: Project) -> Scopes:
    """Return what each written name means: a subsystem's own parameters come before the shared ones."""
    shared = {name: name for name in parameters(project)}
    own: Scopes = {
        subsystem.name: {**shared, **{name: f"{subsystem.name}.{name}" for name in subsystem.parameters}}
        for subsystem in project.subsystems.values()
    }
    return {None: shared, **own}


def values(project: Project, pi: fmpq = PI, replaced: Mapping[str, fmpq] | None = None) -> Values:
    """Evaluate every parameter, formulas included; `replaced` gives other values (SI) by qualified name.

    Raises Fault for the first parameter that cannot be evaluated.
    """
    found, findings = settle(project, pi, replaced)
    if findings:
        first = findings[0]
        raise Fault(first.rule, first.message, first.place, *first.related)
    return found


def settle(
    project: Project, pi: fmpq = PI, replaced: Mapping[str, fmpq] | None = None
) -> tuple[Values, tuple[Finding, ...]]:
    """Evaluate every parameter that can be; also return what is wrong with the others."""
    work = _Settling(project, pi, replaced or {})
    work.run()
    return work.values(), tuple(work.faults.findings)


class _Settling:
    """Evaluation in the order in which formulas read one another."""

    def __init__(self, project: Project, pi: fmpq, replaced: Mapping[str, fmpq]) -> None:
        self.every, self.scopes, self.pi, self.replaced = parameters(project), scopes(project), pi, replaced
        self.written = {name: (parameter.value.expression, scope) for name, (parameter, scope) in self.every.items()}
        self.faults = Faults()
        self.numbers: dict[str, fmpq] = {}
        self.inferred: dict[str, Inferred] = {}
        self.rounded: set[str] = set()
        self.broken: set[str] = set()

    def values(self) -> Values:
        return Values(
            MappingProxyType(self.numbers),
            MappingProxyType(self.inferred),
            frozenset(self.rounded),
            self.scopes,
            self.written,
            self.pi,
            frozenset(self.broken),
        )

    def run(self) -> None:
        for component in strong_components(self._arcs()):
            if len(component) > 1 or component[0] in self._reads(component[0]):
                self._circle(component)
            else:
                self._evaluate(component[0], *self.every[component[0]])

    def _reads(self, name: str) -> list[str]:
        """Return the qualified names that a parameter reads; unknown ones are said when it is evaluated."""
        expression, scope = self.written[name]
        known = self.scopes[scope]
        return [known[read] for read in expressions.names(expression) if read in known]

    def _arcs(self) -> dict[str, list[str]]:
        arcs: dict[str, list[str]] = {name: [] for name in self.every}
        for name in self.every:
            for read in self._reads(name):
                arcs[read].append(name)
        return arcs

    def _circle(self, component: tuple[str, ...]) -> None:
        """Report formulas that read one another, along one way round."""
        self.broken.update(component)
        way = [component[0]]
        while way[-1] not in way[:-1]:
            way.append(next(read for read in self._reads(way[-1]) if read in component))
        way = way[way.index(way[-1]) :]
        first = self.every[way[0]][0]
        others = (Related(self.every[name][0].place, f"`{name}` is read on the way") for name in way[1:-1])
        message = f"the formulas go round in a circle: {' → '.join(way)}"
        self.faults.findings.append(Fault(faults.VALUE, message, first.value.place, *others).finding())

    def _evaluate(self, name: str, parameter: Parameter, scope: str | None) -> None:
        self.broken.add(name)
        with self.faults.noted(subsystem=scope):
            known = self.values()
            inferred = infer(parameter.value, known, scope)
            number = self.replaced.get(name)
            number = evaluate(parameter.value, known, scope) if number is None else number
            self._tolerance(parameter.value.tolerance, parameter.value, inferred, scope)
            if name not in self.replaced and depends_on_pi(parameter.value.expression, known, scope):
                self.rounded.add(name)
            self.broken.discard(name)
            self.inferred[name], self.numbers[name] = inferred, number

    def _tolerance(self, tolerance: Tolerance | None, value: Value, inferred: Inferred, scope: str | None) -> None:
        if tolerance is None or tolerance.relative:
            return
        for side in (tolerance.lower, tolerance.upper):
            found = infer(_beside(value, side, tolerance), self.values(), scope)
            if as_dimension(found) != as_dimension(inferred):
                raise Fault(
                    faults.DIMENSION,
                    f"the tolerance is {_in(found)}, the value {_in(inferred)}: give both in one dimension, or the "
                    "tolerance in per cent",
                    value.place,
                )


def _in(inferred: Inferred) -> str:
    return str(inferred) if inferred is PLAIN else f"in {inferred}"


def _beside(value: Value, expression: Expression, tolerance: Tolerance) -> Value:
    return Value(expression, tolerance.as_written, value.place)


# --- one value -------------------------------------------------------------------------------------------


def evaluate(value: Value, values: Values, scope: str | None = None, span: fmpq | None = None) -> fmpq:
    """Return a value in coherent SI (a value in dB as the ratio it means).

    scope: the subsystem whose parameters may be read by their own names. span: what `% of span` is counted on.
    Raises Fault for a name without a value, a division by zero, a number beyond reach.
    """
    read = _read(value, values, scope)
    numbers = {name: values.numbers[qualified] for name, qualified in read.items()}
    if span is not None:
        numbers["span"] = span
    try:
        return expressions.evaluate(value.expression, numbers, values.pi)
    except ExpressionError as problem:
        raise Fault(faults.VALUE, f"`{value.as_written}`: {problem.message}", value.place) from None


def infer(value: Value, values: Values, scope: str | None = None, signal: Inferred | None = None) -> Inferred:
    """Return the dimension of a value, PLAIN without any unit; `signal` is what `% of span` has. Raises Fault."""
    read = _read(value, values, scope)
    inferred = {name: values.inferred[qualified] for name, qualified in read.items()}
    if signal is not None:
        inferred.update(dict.fromkeys(SIGNAL_WORDS, signal))
    try:
        return expressions.dimension(value.expression, inferred)
    except ExpressionError as problem:
        raise Fault(faults.DIMENSION, f"`{value.as_written}`: {problem.message}", value.place) from None


def depends_on_pi(expression: Expression, values: Values, scope: str | None = None) -> bool:
    """Whether a value rests on the decimal that stands for pi (or on a rounded ratio of dB)."""
    read = (values.scopes[scope].get(name) for name in expressions.names(expression))
    return expression.depends_on_pi or any(name in values.rounded for name in read)


def written_numbers(expression: Expression, values: Values, scope: str | None = None) -> Iterator[Number]:
    """Give the numbers with units that an expression is made of, those of the parameters that it reads included."""
    for node in expression.walk():
        if isinstance(node, Number) and node.unit is not None:
            yield node
        elif isinstance(node, Name | PercentOf):
            qualified = values.scopes[scope].get(node.name)
            if qualified is not None and qualified in values.numbers:
                yield from written_numbers(values.written[qualified][0], values, values.written[qualified][1])


def _read(value: Value, values: Values, scope: str | None) -> dict[str, str]:
    """Return the qualified names that a value reads, by the names as written."""
    known, read = values.scopes[scope], {}
    if not expressions.is_read(value.expression):
        raise Fault(faults.VALUE, f"`{value.as_written}` could not be read", value.place, repeats=True)
    for node in expressions.references(value.expression):
        if isinstance(node, PercentOf) and node.name in SIGNAL_WORDS:
            if node.name in known:
                message = f"`{value.as_written}`: the signal's {node.name}, or the parameter of that name? Rename it"
                raise Fault(faults.NAME, message, value.place)
            continue
        qualified = known.get(node.name)
        if qualified is None:
            raise Fault(faults.NAME, f"`{value.as_written}`: {expressions.unknown(node.name, known)}", value.place)
        if qualified not in values.numbers:
            raise Fault(faults.VALUE, f"`{node.name}` has no value", value.place, repeats=True)
        read[node.name] = qualified
    return read
