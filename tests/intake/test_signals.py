"""Signal expressions, read by the project's own parser."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import fmpq

from specgate.intake.collect import Collector
from specgate.intake.context import Context, LoopNames, Ports
from specgate.intake.nodes import Origin, Spot, Text
from specgate.intake.signals import signal_expression
from specgate.project.types import Call, Project, Scaled, SignalExpression, SignalName, Sum
from specgate.terms.expressions import evaluate
from specgate.terms.units import UnitTable

NAMES = LoopNames(inputs=("u", "w"), signals=("x", "y"), responses=(), breaks=())
PORTS = {
    "f": Ports(("input",), ("output",)),
    "g": Ports(("input",), ("output",)),
    "plant": Ports(("duty", "load"), ("voltage", "current")),
}


def read(text: str) -> tuple[SignalExpression | None, list[str]]:
    collector = Collector()
    context = Context(collector, UnitTable.standard(), shared=frozenset({"k", "two"}), own={"f": frozenset({"lag"})})
    context.ports = PORTS
    node = Text(Spot(Origin("file.yaml"), 7, 5), text)
    found = signal_expression(node, NAMES, context)
    return found, [f"{f.place.column - 5} {f.rule}: {f.message}" for f in collector.findings]


def said(node: SignalExpression) -> str:
    """Write an expression with every bracket, so that its structure can be compared."""
    match node:
        case SignalName(name=name):
            return name
        case Call():
            arguments = ", ".join(f"{name}={said(argument)}" for name, argument in node.arguments.items())
            return f"{node.subsystem}({arguments}).{node.output}"
        case Scaled():
            values = {"k": fmpq(7), "two": fmpq(2), "f.lag": fmpq(5)}
            return f"[{evaluate(node.factor, values)}]{said(node.operand)}"
        case Sum():
            return f"<{' + '.join(said(term) for term in node.terms)}>"


@pytest.mark.parametrize(
    ("text", "structure"),
    [
        ("u", "u"),
        ("u - x", "<u + [-1]x>"),
        ("-u + x - y", "<[-1]u + x + [-1]y>"),
        ("u - (x - y)", "<u + [-1]<x + [-1]y>>"),
        ("f(u)", "f(input=u).output"),
        ("f(g(u - x)) + w", "<f(input=g(input=<u + [-1]x>).output).output + w>"),
        ("2 * u", "[2]u"),
        ("u * 2", "[2]u"),
        ("u / 4", "[1/4]u"),
        ("2 * u * 3", "[3][2]u"),
        ("2 * 3 * u", "[6]u"),
        ("-2 * u", "[-2]u"),
        ("2 * -u", "[2][-1]u"),
        ("k * u", "[7]u"),
        ("k**2 * u", "[49]u"),
        ("(k + 1) * u", "[8]u"),
        ("u * (k - 1) / 2", "[1/2][6]u"),
        ("f.lag * u", "[5]u"),
        ("2 ms * u", "[1/500]u"),
        ("2 V/(m*s) * u", "[2]u"),
        ("50 % * u", "[1/2]u"),
        ("1.5e1*u", "[15]u"),
        ("+u", "u"),
        ("--u", "[-1][-1]u"),
        ("plant(duty=u, load=x).voltage", "plant(duty=u, load=x).voltage"),
        ("plant(load=x, duty=2*u).current", "plant(duty=[2]u, load=x).current"),
        ("f(u).output", "f(input=u).output"),
    ],
)
def test_structure(text: str, structure: str) -> None:
    found, messages = read(text)
    assert messages == []
    assert found is not None
    assert said(found) == structure


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "0 schema-violation: a signal, a block or a number is wanted here, found `the end`"),
        ("u +", "3 schema-violation: a signal, a block or a number is wanted here, found `the end`"),
        ("u x", "2 schema-violation: `x` is not expected here"),
        ("u * x", "2 schema-violation: a product of two signals is not linear"),
        ("1 / u", "2 schema-violation: a division by a signal is not linear"),
        ("u / x", "2 schema-violation: a division by a signal is not linear"),
        ("u ** 2", "2 schema-violation: a power of a signal is not linear"),
        ("3", "0 schema-violation: a constant is no signal"),
        ("u + 3", "0 schema-violation: a constant is no signal"),
        ("f(3)", "2 schema-violation: a constant is no signal"),
        ("f()", "2 schema-violation: `f` is applied to nothing"),
        ("f", "0 schema-violation: `f` is a block: apply it to a signal, `f(…)`"),
        ("f(u", "1 schema-violation: the bracket opened at character 2 is not closed"),
        ("(u", "0 schema-violation: the bracket opened at character 1 is not closed"),
        ("u)", "1 schema-violation: `)` is not expected here"),
        ("f(u).speed", "5 name-unknown: `f` has no output `speed`: there is output"),
        ("h(u)", "0 name-unknown: there is no block `h`: there is f, g, plant"),
        ("v", "0 name-unknown: there is no signal, input or shared parameter `v`: there is x, y, u, w"),
        ("f.lagg * u", "0 name-unknown: there is no parameter `f.lagg`: did you mean `f.lag`?"),
        ("plant(u)", "6 schema-violation: `plant` has several inputs: write `plant(duty=…, load=…)`"),
        ("plant(duty=u).voltage", "0 schema-violation: the input `load` of `plant` is given no signal"),
        ("plant(duty=u, duty=x).voltage", "14 id-duplicate: the input `duty` is given twice"),
        ("plant(duty=u, lod=x).voltage", "14 name-unknown: `plant` has no input `lod`: did you mean `load`?"),
        ("plant(duty=u, load=x)", "0 schema-violation: `plant` has several outputs: add `.voltage` or `.current`"),
        ("plant(duty=u, x).voltage", "14 schema-violation: an input and its signal are wanted here"),
        ("u; x", "1 schema-violation: `;` has no place in a signal expression"),
        ("2 V/m*u", "2 unit-unknown: `2 V/m*u`: "),
        ("2u", "1 schema-violation: `u` is not expected here"),
        ("u.x", "1 schema-violation: `.` is not expected here"),
        ("lambda: u", "6 schema-violation: `:` has no place in a signal expression"),
        ("(" * 41 + "u" + ")" * 41, "40 schema-violation: more than 40 brackets"),
        ("+".join(["u"] * 300), "0 schema-violation: a signal expression has at most 400"),
        ("u" * 5000, "0 schema-violation: a signal expression has at most 4000 characters"),
    ],
)
def test_what_is_no_signal(text: str, message: str) -> None:
    found, (line,) = read(text)
    # a name that is not known is kept, so that the rest of the expression is read
    assert found is None or message.split()[1] == "name-unknown:"
    assert line.startswith(message)


@pytest.mark.parametrize(
    ("text", "messages"),
    [
        ("v + h(q)", ["`v`", "`h`", "`q`"]),
        ("h(x=v, y=f(q)).out - 2 lightyears * u", ["`h`", "`v`", "`q`", "`lightyears`"]),
        ("plant(dity=v, lod=q).voltage", ["`dity`", "`v`", "`lod`", "`q`"]),
        ("gian * u + 2 * ghost", ["`gian`", "`ghost`"]),
        ("f(v).speed + f(u).sped", ["`v`", "`speed`", "`sped`"]),
    ],
)
def test_everything_unknown_in_an_expression_is_said(text: str, messages: list[str]) -> None:
    _, lines = read(text)
    assert len(lines) == len(messages)
    assert all(message in line for message, line in zip(messages, lines, strict=True)), lines


def test_places_inside_an_expression() -> None:
    found, _ = read("f(u - x) + w")
    assert isinstance(found, Sum)
    call = found.terms[0]
    assert isinstance(call, Call)
    assert (call.place.line, call.place.column) == (7, 5)
    argument = call.arguments["input"]
    assert isinstance(argument, Sum)
    assert [term.place.column for term in argument.terms] == [7, 9]


def test_the_order_of_lines_does_not_matter(project: Callable[..., Project], bench: str) -> None:
    lines = ["      command: governor(demand - position)\n", "      position: vent(command) + wind\n"]
    found = project(bench, ("".join(lines), "".join(reversed(lines)))).loops["opening"]
    assert set(found.signals) == {"command", "position"}


def test_what_uses_a_broken_block_is_not_reported_again(said: Callable[..., list[str]], bench: str) -> None:
    assert [line.split(" ")[1] for line in said(bench, ("lags: [lag]", "lags: [lagg]"))] == ["name-unknown:"]
