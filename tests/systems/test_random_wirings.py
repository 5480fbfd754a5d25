"""Random wirings against an independent way: one state space of everything, and plain linear solves at points s.

The state space has the modes of each block once, whatever its number of outputs; its characteristic polynomial,
its transfer functions and its minimal order (rank of observability times controllability matrix, Kalman 1963) are
computed here in rational matrices, without a polynomial matrix.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from random import Random

from flint import fmpq, fmpq_mat, fmpq_poly
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.polynomials import highest_first, monic
from specgate.systems.solution import solve

POINTS = (fmpq(7, 3), fmpq(-11, 5), fmpq(13))


@dataclass(frozen=True)
class StateSpace:
    a: fmpq_mat
    b: fmpq_mat
    c: fmpq_mat
    d: fmpq_mat

    def at(self, s: fmpq) -> fmpq_mat:
        return self.c * (s * identity(self.a.nrows()) - self.a).solve(self.b) + self.d if self.a.nrows() else self.d


def identity(n: int) -> fmpq_mat:
    return fmpq_mat(n, n, [int(i % (n + 1) == 0) for i in range(n * n)])


def joined(rows: list[list[fmpq_mat]]) -> fmpq_mat:
    """Put matrices side by side and below each other."""
    entries = []
    for blocks in rows:
        for i in range(blocks[0].nrows()):
            entries += [block[i, j] for block in blocks for j in range(block.ncols())]
    return fmpq_mat(sum(r[0].nrows() for r in rows), sum(m.ncols() for m in rows[0]), entries)


def diagonal(matrices: list[fmpq_mat]) -> fmpq_mat:
    return joined([[m if m is other else fmpq_mat(m.nrows(), other.ncols()) for other in matrices] for m in matrices])


# --- blocks with their state space -----------------------------------------------------------------------


def block_of(space: StateSpace, name: str) -> Block:
    """D = det(sI - A), N = C adj(sI - A) B + D direct, interpolated from values at whole numbers."""
    denominator = space.a.charpoly() if space.a.nrows() else fmpq_poly([1])
    inputs = tuple(f"u{j}" for j in range(space.b.ncols()))
    outputs = tuple(f"y{i}" for i in range(space.c.nrows()))
    n = denominator.degree()
    nodes = [fmpq(k) for k in range(20, 21 + n)]
    values = [space.at(s) * denominator(s) for s in nodes]
    powers = fmpq_mat([[s**k for k in range(n + 1)] for s in nodes])
    numerators = {}
    for i, output in enumerate(outputs):
        for j, source in enumerate(inputs):
            coefficients = powers.solve(fmpq_mat(n + 1, 1, [value[i, j] for value in values]))
            numerators[output, source] = fmpq_poly(coefficients.entries())
    return Block(name, inputs, outputs, numerators, denominator)


def random_space(random: Random) -> StateSpace:
    n, m, p = random.choice([0, 1, 1, 2, 2, 3]), random.choice([1, 1, 2, 3]), random.choice([1, 1, 2, 3])
    direct = random.choice([0, 0, 1])

    def matrix(rows: int, columns: int, factor: int = 1) -> fmpq_mat:
        return fmpq_mat(rows, columns, [random.randint(-3, 3) * factor for _ in range(rows * columns)])

    return StateSpace(matrix(n, n), matrix(n, m), matrix(p, n), matrix(p, m, direct))


# --- wirings ---------------------------------------------------------------------------------------------


def random_form(random: Random, known: list[SignalRef | OutputRef]) -> LinearForm:
    chosen = [random.choice(known) for _ in range(random.choice([1, 1, 2, 2, 3]))]
    return LinearForm(tuple((fmpq(random.choice([1, 1, -1, -1, 2, -3]), random.choice([1, 1, 2])), x) for x in chosen))


def random_wiring(seed: int, blocks: list[Block]) -> Wiring:
    """Wire the blocks at random; later ones and signals favour what was defined last, so that cycles close."""
    random = Random(seed)
    inputs = ("r", "d")[: random.choice([1, 1, 2])]
    names = [f"x{k}" for k in range(random.choice([1, 2, 3, 4]))]
    known: list[SignalRef | OutputRef] = [SignalRef(name) for name in (*inputs, *names)]
    instances = []
    for block in blocks:
        instances.append(Instance(block.name, block, {name: random_form(random, known) for name in block.inputs}))
        known += 2 * [OutputRef(block.name, output) for output in block.outputs]
    return Wiring(inputs, tuple(instances), {name: random_form(random, known[len(inputs) :]) for name in names})


seeds = st.integers(0, 2**40)


def proper_wiring(seed: int) -> tuple[Wiring, Mapping[str, StateSpace]]:
    random = Random(seed)
    realised = {f"b{k}": random_space(random) for k in range(random.choice([1, 2, 3, 4]))}
    return random_wiring(seed, [block_of(space, name) for name, space in realised.items()]), realised


@dataclass(frozen=True)
class Assembled:
    """All blocks as one: x' = A x + B v, o = C x + D v; signals y and arguments v solved from the sums."""

    wiring: Wiring
    spaces: Mapping[str, StateSpace]

    def closed(self, cut: str | None = None) -> StateSpace:
        """From the inputs to the signals. Uses of the signal `cut` read one more input, the last.

        Raises ZeroDivisionError if signals and arguments are not determined.
        """
        wiring, order = self.wiring, [self.spaces[instance.name] for instance in self.wiring.instances]
        a, b, c, d = (diagonal([getattr(space, part) for space in order]) for part in "abcd")
        signals = list(wiring.signals)
        outputs = [OutputRef(i.name, output) for i in wiring.instances for output in i.block.outputs]
        inputs = [*wiring.inputs, *([] if cut is None else ["cut"])]
        forms = [*wiring.signals.values()]
        forms += [i.arguments[name] for i in wiring.instances for name in i.block.inputs]
        signal_part = fmpq_mat(len(forms), len(signals))
        output_part = fmpq_mat(len(forms), len(outputs))
        input_part = fmpq_mat(len(forms), len(inputs))
        for row, form in enumerate(forms):
            for factor, reference in form.terms:
                if isinstance(reference, OutputRef):
                    output_part[row, outputs.index(reference)] += factor
                elif reference.name == cut:
                    input_part[row, len(inputs) - 1] += factor
                elif reference.name in signals:
                    signal_part[row, signals.index(reference.name)] += factor
                else:
                    input_part[row, inputs.index(reference.name)] += factor
        # z = (y, v) = signal_part y + output_part (C x + D v) + input_part u
        size = len(forms)
        through = joined([[signal_part, output_part * d]])
        solved = (identity(size) - through).solve(joined([[output_part * c, input_part]]))
        states = a.nrows()
        of_states = [[solved[i, j] for j in range(states)] for i in range(size)]
        of_inputs = [[solved[i, j] for j in range(states, solved.ncols())] for i in range(size)]
        split = len(signals)
        y_x, v_x = submatrix(of_states[:split], states), submatrix(of_states[split:], states)
        y_u, v_u = submatrix(of_inputs[:split], len(inputs)), submatrix(of_inputs[split:], len(inputs))
        return StateSpace(a + b * v_x, b * v_u, y_x, y_u)


def submatrix(rows: list[list[fmpq]], columns: int) -> fmpq_mat:
    return fmpq_mat(len(rows), columns, [entry for row in rows for entry in row])


def minimal_order(space: StateSpace) -> int:
    n = space.a.nrows()
    if n == 0:
        return 0
    controllable, observable = [space.b], [space.c]
    for _ in range(n - 1):
        controllable.append(space.a * controllable[-1])
        observable.append(observable[-1] * space.a)
    return int((joined([[block] for block in observable]) * joined([controllable])).rank())


# --- what must agree -------------------------------------------------------------------------------------


@settings(max_examples=80, deadline=None)
@given(seeds)
def test_agrees_with_one_state_space_of_everything(seed: int) -> None:
    wiring, realised = proper_wiring(seed)
    solution = solve(wiring)
    try:
        closed = Assembled(wiring, realised).closed()
    except ZeroDivisionError:
        assert solution.algebraic_loop is not None
        return
    assert solution.algebraic_loop is None
    assert solution.determinant == (closed.a.charpoly() if closed.a.nrows() else fmpq_poly([1]))
    assert sum(component.hidden.degree() for component in solution.components) == closed.a.nrows() - minimal_order(
        closed
    )
    for j, source in enumerate(wiring.inputs):
        for i, target in enumerate(wiring.signals):
            channel = solution.channel(source, target)
            assert channel.transfer.denominator == channel.modes
            assert channel.hidden * channel.transfer.reduced().denominator == channel.modes
            assert divmod(solution.determinant, channel.modes)[1] == 0
            for s in POINTS:
                if solution.determinant(s) != 0:
                    assert channel.transfer.numerator(s) / channel.modes(s) == closed.at(s)[i, j]


@settings(max_examples=60, deadline=None)
@given(seeds)
def test_open_loop_is_minus_injected_to_returned(seed: int) -> None:
    wiring, realised = proper_wiring(seed)
    solution = solve(wiring)
    assume(solution.algebraic_loop is None)
    signal = Random(seed).choice(list(wiring.signals))
    opened = solution.open_at(signal)
    try:
        injected = Assembled(wiring, realised).closed(cut=signal)
    except ZeroDivisionError:
        assert opened.algebraic_loop is not None
        return
    assert opened.algebraic_loop is None
    index = list(wiring.signals).index(signal)
    poles = injected.a.charpoly() if injected.a.nrows() else fmpq_poly([1])
    assert divmod(poles, opened.denominator)[1] == 0
    assert monic(opened.numerator + opened.denominator) * poles == solution.determinant * opened.denominator
    for s in POINTS:
        if poles(s) != 0:
            assert opened.transfer.numerator(s) / opened.denominator(s) == -injected.at(s)[index, len(wiring.inputs)]


@settings(max_examples=50, deadline=None)
@given(seeds)
def test_order_of_blocks_and_signals_does_not_matter(seed: int) -> None:
    (wiring, _), random = proper_wiring(seed), Random(seed)
    instances, signals = list(wiring.instances), list(wiring.signals)
    random.shuffle(instances)
    random.shuffle(signals)
    other = solve(Wiring(wiring.inputs, tuple(instances), {name: wiring.signals[name] for name in signals}))
    solution = solve(wiring)
    assert (solution.algebraic_loop is None) == (other.algebraic_loop is None)
    assume(solution.algebraic_loop is None)
    assert other.determinant == solution.determinant
    assert sorted(sorted(c.instances) for c in other.components) == sorted(
        sorted(c.instances) for c in solution.components
    )
    for source in wiring.inputs:
        for target in signals:
            assert other.channel(source, target).transfer == solution.channel(source, target).transfer


# --- improper blocks: plain solves at points -------------------------------------------------------------


def improper_wiring(seed: int) -> Wiring:
    random = Random(seed)

    def polynomial() -> fmpq_poly:
        return highest_first([1, *(random.randint(-3, 3) for _ in range(random.choice([0, 1, 2])))])

    names = [f"b{k}" for k in range(random.choice([1, 2, 3, 4]))]
    return random_wiring(
        seed, [Block(name, ("u",), ("y",), {("y", "u"): polynomial()}, polynomial()) for name in names]
    )


def matrix_at(wiring: Wiring, s: fmpq) -> tuple[fmpq_mat, fmpq_mat]:
    """All signals and outputs at one s: matrix, and one right-hand side per input; rows of blocks times denominator."""
    unknowns = [*map(SignalRef, wiring.signals), *(OutputRef(i.name, "y") for i in wiring.instances)]
    inputs = [SignalRef(name) for name in wiring.inputs]
    left, right = identity(len(unknowns)), fmpq_mat(len(unknowns), len(inputs))
    rows = [(fmpq(1), fmpq(1), form) for form in wiring.signals.values()]
    for i in wiring.instances:
        rows.append((i.block.denominator(s), i.block.numerators["y", "u"](s), i.arguments["u"]))
    for index, (denominator, numerator, form) in enumerate(rows):
        left[index, index] = denominator
        for factor, reference in form.terms:
            if reference in inputs:
                right[index, inputs.index(reference)] += numerator * factor
            else:
                left[index, unknowns.index(reference)] -= numerator * factor
    return left, right


@settings(max_examples=80, deadline=None)
@given(seeds)
def test_improper_blocks_agree_with_plain_solves(seed: int) -> None:
    wiring = improper_wiring(seed)
    solution = solve(wiring)
    # Farther out than any root of these small coefficients can be.
    points = [fmpq(10**9 + k) for k in range(3)]
    determinants = [matrix_at(wiring, s)[0].det() for s in points]
    if all(value == 0 for value in determinants):
        assert solution.algebraic_loop is not None
    if solution.algebraic_loop is not None:
        return
    ratios = {value / solution.determinant(s) for s, value in zip(points, determinants, strict=True)}
    assert len(ratios) == 1
    left, right = matrix_at(wiring, points[0])
    solved = left.solve(right)
    for row, target in enumerate(wiring.signals):
        for column, source in enumerate(wiring.inputs):
            channel = solution.channel(source, target)
            assert channel.transfer.numerator(points[0]) / channel.modes(points[0]) == solved[row, column]
