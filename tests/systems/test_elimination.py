"""Elimination, graphs and assignments, each against the plainest other way."""

from __future__ import annotations

from itertools import permutations
from random import Random

from flint import fmpq, fmpq_mat, fmpz_poly
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.systems.assignment import heaviest_assignment
from specgate.systems.elimination import Row, triangulate
from specgate.systems.graph import is_cycle, reached, reversed_arcs, strong_components

few = settings(max_examples=50, deadline=None)
seeds = st.integers(0, 2**40)


def random_rows(random: Random, n: int) -> list[Row]:
    rows: list[Row] = []
    for i in range(n):
        row = {j: fmpz_poly([random.randint(-3, 3) for _ in range(3)]) for j in range(n + 2) if random.random() < 0.5}
        if random.random() < 0.8:
            row[i] = fmpz_poly([random.randint(-3, 3), 1])
        rows.append({j: entry for j, entry in row.items() if entry})
    return rows


def at(rows: list[Row], s: int) -> tuple[fmpq_mat, fmpq_mat]:
    n = len(rows)
    zero = fmpz_poly()
    left = fmpq_mat([[fmpq(row.get(j, zero)(s)) for j in range(n)] for row in rows])
    return left, fmpq_mat([[fmpq(row.get(n + k, zero)(s)) for k in range(2)] for row in rows])


@few
@given(seeds, st.integers(1, 6))
def test_determinant_and_solution_at_points(seed: int, n: int) -> None:
    rows = random_rows(Random(seed), n)
    triangle = triangulate(rows, [range(n)])
    values = [at(rows, s)[0].det() for s in range(5, 40)]
    if not triangle.determinants:
        assert all(value == 0 for value in values)
        return
    assert triangle.determinants == (triangle.determinant,)
    signs = {fmpq(triangle.determinant(s)) / value for s, value in zip(range(5, 40), values, strict=True) if value != 0}
    assert signs in ({fmpq(1)}, {fmpq(-1)})
    assert triangle.determinant.degree() <= 2 * n
    s = next(s for s, value in zip(range(5, 40), values, strict=True) if value != 0)
    left, right = at(rows, s)
    solved = left.solve(-right)
    for source in range(2):
        numerators = triangle.numerators(n + source)
        for i in range(n):
            value = fmpq(numerators.get(i, fmpz_poly())(s)) / fmpq(triangle.determinant(s))
            assert value == solved[i, source]


def test_determinants_by_block() -> None:
    """A lower triangular wiring of two loops: each determinant is that of its own block, up to sign."""
    a, b, c = fmpz_poly([2, 1]), fmpz_poly([3, 1]), fmpz_poly([5, 0, 1])
    rows = [{0: a, 1: fmpz_poly([1])}, {0: fmpz_poly([-1]), 1: b}, {1: fmpz_poly([4]), 2: c}]
    triangle = triangulate(rows, [(0, 1), (2,)])
    assert triangle.determinants == (a * b + 1, c)
    assert triangle.determinant == (a * b + 1) * c


def test_singular_block_ends_the_list_of_determinants() -> None:
    one = fmpz_poly([1])
    triangle = triangulate([{0: one}, {1: one, 2: one}, {1: one, 2: one}, {3: one}], [(0,), (1, 2), (3,)])
    assert triangle.determinants == (one,)


@few
@given(seeds, st.integers(1, 9))
def test_strong_components_are_classes_of_mutual_reach_in_topological_order(seed: int, n: int) -> None:
    random = Random(seed)
    arcs = {node: [other for other in range(n) if random.random() < 0.2] for node in range(n)}
    components = strong_components(arcs)
    after = {node: reached([node], arcs) for node in arcs}
    assert sorted(node for component in components for node in component) == list(range(n))
    for index, component in enumerate(components):
        assert all(other in after[node] for node in component for other in component)
        assert list(component) == sorted(component)
        assert is_cycle(component, arcs) == any(component[0] in after[following] for following in arcs[component[0]])
        for later in components[index + 1 :]:
            assert not any(component[0] in after[node] for node in later)
    before = reversed_arcs(arcs)
    assert all((other in after[node]) == (node in reached([other], before)) for node in arcs for other in arcs)


def test_long_chain_meets_no_recursion_limit() -> None:
    n = 5000
    assert len(strong_components({node: [node + 1] if node < n else [] for node in range(n + 1)})) == n + 1


@few
@given(seeds, st.integers(1, 6))
def test_heaviest_assignment_by_trying_all(seed: int, n: int) -> None:
    random = Random(seed)
    weights = [{j: random.randint(-4, 4) for j in range(n) if random.random() < 0.6} for _ in range(n)]
    totals = [
        sum(weights[i][j] for i, j in enumerate(columns))
        for columns in permutations(range(n))
        if all(j in weights[i] for i, j in enumerate(columns))
    ]
    assert heaviest_assignment(weights) == (max(totals) if totals else None)
