"""Algebraic loops and strong feed-through, named; well-posed feed-through passes."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from fractions import Fraction
from random import Random

import pytest
from flint import fmpq, fmpq_mat
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.equations import Equations, Reference
from specgate.systems.polynomials import highest_first
from specgate.systems.solution import LoopSolution, StrongFeedThrough, solve

Numbers = Sequence[int | fmpq]


def loop(numerator: Numbers, denominator: Numbers, feedback: int | fmpq = -1) -> LoopSolution:
    """Return y = block(r + feedback y)."""
    block = Block("block", ("u",), ("y",), {("y", "u"): highest_first(numerator)}, highest_first(denominator))
    argument = LinearForm(((fmpq(1), SignalRef("r")), (fmpq(feedback), SignalRef("y"))))
    output = LinearForm(((fmpq(1), OutputRef("block", "y")),))
    return solve(Wiring(("r",), (Instance("block", block, {"u": argument}),), {"y": output}))


def two_blocks(first: tuple[Numbers, Numbers], second: tuple[Numbers, Numbers], sign: int = -1) -> LoopSolution:
    """Return u = first(r + sign y), y = second(u)."""

    def block(name: str, model: tuple[Numbers, Numbers]) -> Block:
        return Block(name, ("u",), ("y",), {("y", "u"): highest_first(model[0])}, highest_first(model[1]))

    error = LinearForm(((fmpq(1), SignalRef("r")), (fmpq(sign), SignalRef("y"))))
    instances = (
        Instance("first", block("first", first), {"u": error}),
        Instance("second", block("second", second), {"u": LinearForm(((fmpq(1), SignalRef("u")),))}),
    )
    signals = {name: LinearForm(((fmpq(1), OutputRef(of, "y")),)) for name, of in (("u", "first"), ("y", "second"))}
    return solve(Wiring(("r",), instances, signals))


# --- singular --------------------------------------------------------------------------------------------


def test_feed_through_of_exactly_one_is_singular() -> None:
    """y = (s + 3)/(s + 1) (r + y): 1 - 1 at infinite frequency."""
    solution = loop([1, 3], [1, 1], feedback=1)
    assert solution.algebraic_loop is not None
    assert solution.algebraic_loop.signals == ("y",)
    assert "y" in solution.algebraic_loop.reason
    for question in (lambda: solution.determinant, lambda: solution.stable, lambda: solution.channel("r", "y")):
        with pytest.raises(ValueError, match="algebraic loop"):
            question()


def test_feed_through_a_hair_from_one_is_well_posed() -> None:
    solution = loop([1, 3], [1, 1], feedback=fmpq(1) - fmpq(1, 10**30))
    assert solution.algebraic_loop is None
    # The closed pole runs to plus infinity: 1e-30 s - 2 + 3e-30.
    assert not solution.stable


def test_signals_of_the_vanishing_cycle_are_named_and_no_others() -> None:
    """a = r - b and b = -a + z act on each other with gain 1; z hangs on b through a lag and closes a slow loop."""
    lag = Block("lag", ("u",), ("y",), {("y", "u"): highest_first([1])}, highest_first([1, 1]))
    instance = Instance("lag", lag, {"u": LinearForm(((fmpq(1), SignalRef("b")),))})
    one = fmpq(1)
    signals = {
        "a": LinearForm(((one, SignalRef("r")), (-one, SignalRef("b")))),
        "b": LinearForm(((-one, SignalRef("a")), (one, SignalRef("z")))),
        "z": LinearForm(((one, OutputRef("lag", "y")),)),
    }
    found = solve(Wiring(("r",), (instance,), signals)).algebraic_loop
    assert found is not None
    assert found.signals == ("a", "b")


def test_signal_equal_to_itself() -> None:
    signals = {"x": LinearForm(((fmpq(1), SignalRef("x")),))}
    found = solve(Wiring(("r",), (), signals)).algebraic_loop
    assert found is not None
    assert found.signals == ("x",)


def test_sum_that_a_block_determines_after_all() -> None:
    """x = x + r - y and y = 2 x: the sum says y = r, so x = r/2."""
    gain = Block("gain", ("u",), ("y",), {("y", "u"): highest_first([2])}, highest_first([1]))
    instance = Instance("gain", gain, {"u": LinearForm(((fmpq(1), SignalRef("x")),))})
    one = fmpq(1)
    total = LinearForm(((one, SignalRef("x")), (one, SignalRef("r")), (-one, OutputRef("gain", "y"))))
    solution = solve(Wiring(("r",), (instance,), {"x": total}))
    assert solution.algebraic_loop is None
    assert solution.channel("r", "x").transfer.reduced().numerator == fmpq(1, 2)


# --- improper blocks -------------------------------------------------------------------------------------


def test_ideal_derivative_on_an_integrating_plant_is_well_posed() -> None:
    """(3 + 2 s) with 1/s^2: s^2 + 2 s + 3. The channel to the command differentiates, as its block does."""
    solution = two_blocks(([2, 3], [1]), ([1], [1, 0, 0]))
    assert solution.algebraic_loop is None
    assert solution.determinant == highest_first([1, 2, 3])
    assert not solution.channel("r", "u").transfer.proper
    assert solution.channel("r", "y").transfer.proper


def test_derivative_on_a_lag_closes_an_algebraic_loop_that_is_well_posed_unless_it_cancels() -> None:
    assert two_blocks(([1, 0], [1]), ([2], [1, 1])).algebraic_loop is None
    # 1 + s (-1)/(s + 1) = 1/(s + 1): closed, r to y is -s and r to u is s (s + 1), twice as often as any block.
    found = two_blocks(([1, 0], [1]), ([-1], [1, 1])).algebraic_loop
    assert found is not None
    assert found.signals == ("u", "y")
    assert "ill-posed" in found.reason


def test_differentiator_against_integrator_is_singular_where_they_cancel() -> None:
    """s * 1/s = 1 with positive feedback: det P = s - s."""
    found = two_blocks(([1, 0], [1]), ([1], [1, 0]), sign=1).algebraic_loop
    assert found is not None
    assert found.signals == ("u", "y")
    negative = two_blocks(([1, 0], [1]), ([1], [1, 0]))
    assert negative.algebraic_loop is None
    assert negative.determinant == highest_first([1, 0])


def test_improper_block_outside_every_loop_is_no_algebraic_loop() -> None:
    rate = Block("rate", ("u",), ("y",), {("y", "u"): highest_first([1, 0])}, highest_first([1]))
    instance = Instance("rate", rate, {"u": LinearForm(((fmpq(1), SignalRef("r")),))})
    solution = solve(Wiring(("r",), (instance,), {"y": LinearForm(((fmpq(1), OutputRef("rate", "y")),))}))
    assert solution.algebraic_loop is None
    assert not solution.channel("r", "y").transfer.proper


# --- any delay destabilises ------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("gain", "strong"),
    [(fmpq(1, 2), False), (fmpq(99, 100), False), (fmpq(1), True), (fmpq(3), True), (fmpq(-3), True)],
)
def test_feed_through_of_one_or_more_is_warned_of(gain: fmpq, strong: bool) -> None:
    """L = gain (s + 2)/(s + 1): well posed, but with |gain| >= 1 at infinite frequency no delay is tolerated."""
    solution = loop([gain, 2 * gain], [1, 1])
    assert solution.algebraic_loop is None
    assert solution.strong_feed_through == ((StrongFeedThrough(("y",), gain),) if strong else ())


def test_infinite_feed_through_is_warned_of() -> None:
    solution = two_blocks(([2, 3], [1]), ([1], [1, 1]))
    assert solution.strong_feed_through == (StrongFeedThrough(("u", "y"), fmpq(2)),)
    static = two_blocks(([2, 3], [1]), ([5], [1]))
    assert static.strong_feed_through == (StrongFeedThrough(("u", "y"), None),)
    assert two_blocks(([2, 3], [1]), ([1], [1, 0, 0])).strong_feed_through == ()


def test_sums_alone_can_feed_through() -> None:
    one = fmpq(1)
    x = LinearForm(((one, SignalRef("r")), (-2 * one, SignalRef("x"))))
    assert solve(Wiring(("r",), (), {"x": x})).strong_feed_through == (StrongFeedThrough(("x",), fmpq(2)),)


# --- the definition of ill-posed, checked channel by channel ---------------------------------------------


def improper_wiring(seed: int) -> Wiring:
    random = Random(seed)
    names = [f"x{k}" for k in range(random.choice([1, 2, 3]))]
    known: list[Reference] = [SignalRef(name) for name in names]

    def form() -> LinearForm:
        chosen = [random.choice(known) for _ in range(random.choice([1, 1, 2, 2]))]
        return LinearForm(tuple((fmpq(random.choice([1, -1, 2])), reference) for reference in chosen))

    instances = []
    for k in range(random.choice([1, 2, 3])):
        numerator, denominator = (
            highest_first([1, *(random.randint(-2, 2) for _ in range(random.choice([0, 1, 2])))]) for _ in range(2)
        )
        block = Block(f"b{k}", ("u",), ("y",), {("y", "u"): numerator}, denominator)
        instances.append(Instance(block.name, block, {"u": form()}))
        known += 2 * [OutputRef(block.name, "y")]
    return Wiring((), tuple(instances), {name: form() for name in names})


def closed_at(equations: Equations, s: fmpq) -> fmpq_mat | None:
    """Return (I - G(s))^-1 over all signals and outputs: from an injection at each node to each node."""
    nodes = list(equations.arcs)
    matrix = fmpq_mat(len(nodes), len(nodes))
    for row, node in enumerate(nodes):
        terms = list(equations.terms(node))
        for polynomial, combination in terms:
            for reference, factor in combination.items():
                matrix[row, nodes.index(reference)] += polynomial(s) * factor / terms[0][0](s)
    return matrix.inv() if matrix.det() != 0 else None


def degree(near: fmpq, far: fmpq) -> int:
    """Return the power of s with which a value grows from s = 10^60 to 10^61."""
    ratio = abs(Fraction(int(far.p), int(far.q)) / Fraction(int(near.p), int(near.q)))
    return next(k for k in range(-20, 21) if Fraction(10) ** k / 2 < ratio < Fraction(10) ** k * 2)


def steps(equations: Equations) -> Mapping[Reference, Mapping[Reference, int]]:
    """How often each node differentiates what it reads."""
    result: dict[Reference, dict[Reference, int]] = {node: {} for node in equations.arcs}
    for node in equations.arcs:
        (own, _), *others = equations.terms(node)
        for polynomial, combination in others:
            for reference in combination:
                result[reference][node] = polynomial.degree() - own.degree()
    return result


def ways(
    arcs: Mapping[Reference, Mapping[Reference, int]], node: Reference, met: tuple[Reference, ...], sum_: int
) -> Iterator[tuple[Reference, int]]:
    """Yield the ends of all ways from a node that meet no node twice, with the sum of their steps."""
    yield node, sum_
    for following, step in arcs[node].items():
        if following not in (*met, node):
            yield from ways(arcs, following, (*met, node), sum_ + step)


@settings(max_examples=80, deadline=None)
@given(st.integers(0, 2**40))
def test_ill_posed_if_and_only_if_a_closed_channel_differentiates_more_than_its_blocks(seed: int) -> None:
    wiring = improper_wiring(seed)
    equations = Equations(wiring)
    near, far = closed_at(equations, fmpq(10**60)), closed_at(equations, fmpq(10**61))
    found = solve(wiring).algebraic_loop
    if near is None or far is None:
        assert found is not None
        return
    nodes, arcs = list(equations.arcs), steps(equations)
    beyond = False
    for column, node in enumerate(nodes):
        allowed: dict[Reference, int] = {}
        for end, total in ways(arcs, node, (), 0):
            allowed[end] = max(total, allowed.get(end, total))
        for row, end in enumerate(nodes):
            if near[row, column] != 0 and degree(near[row, column], far[row, column]) > allowed[end]:
                beyond = True
    assert beyond == (found is not None)
