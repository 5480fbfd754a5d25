"""Modes of blocks with several outputs, and the modes that a matrix of transfer functions shows."""

from __future__ import annotations

from flint import fmpq, fmpq_mat, fmpq_poly
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.systems.blocks import Block
from specgate.systems.minimal import shown_modes
from specgate.systems.modes import block_modes
from specgate.systems.polynomials import highest_first, product
from specgate.systems.transfer import TransferFunction

S = highest_first([1, 0])
ONE = highest_first([1])


def block(denominator: fmpq_poly, rows: list[list[fmpq_poly]]) -> Block:
    inputs = tuple(f"u{j}" for j in range(len(rows[0])))
    outputs = tuple(f"y{i}" for i in range(len(rows)))
    numerators = {(y, u): n for y, row in zip(outputs, rows, strict=True) for u, n in zip(inputs, row, strict=True)}
    return Block("block", inputs, outputs, numerators, denominator)


def hankel_order(matrix: list[list[TransferFunction]], bound: int) -> int:
    """Order of the smallest realisation: rank of the block Hankel matrix of the Markov parameters (Ho, Kalman 1966)."""
    inverted = [[markov(entry, 2 * bound) for entry in row] for row in matrix]
    rows = [
        [inverted[i][j][k + h] for h in range(bound) for j in range(len(matrix[0]))]
        for k in range(bound)
        for i in range(len(matrix))
    ]
    return int(fmpq_mat(rows).rank())


def markov(entry: TransferFunction, count: int) -> list[fmpq]:
    """Coefficients of 1/s, 1/s^2, … of a strictly proper function, by long division."""
    remainder, result = entry.numerator % entry.denominator, []
    for _ in range(count):
        quotient, remainder = divmod(remainder * S, entry.denominator)
        result.append(quotient[0])
    return result


def test_one_set_of_modes_whatever_the_number_of_outputs_or_inputs() -> None:
    d = highest_first([1, 3, 2])
    assert block_modes(block(d * 7, [[ONE], [S], [ONE + S]])) == d
    assert block_modes(block(d, [[ONE, S, ONE]])) == d


def test_two_by_two_over_one_set_of_modes_where_that_is_possible() -> None:
    """Rank one residues: 1/((s+1)(s+2)) [[1, s], [s, s^2]] needs two modes, [[1, 0], [0, 1]] needs four."""
    d = highest_first([1, 3, 2])
    assert block_modes(block(d, [[ONE, S], [S, S * S]])) == d
    assert block_modes(block(d, [[ONE, fmpq_poly()], [fmpq_poly(), ONE]])) == d * d
    assert block_modes(block(S, [[ONE, ONE], [ONE, ONE]])) == S
    assert block_modes(block(S, [[ONE, ONE], [ONE, ONE * 2]])) == S * S


def test_factor_common_to_all_numerators_is_kept() -> None:
    common = highest_first([1, 5])
    assert block_modes(block(S * common, [[common, common], [common, common]])) == S * common


poles = st.lists(st.sampled_from([-3, -2, -1, 0, 1]), min_size=1, max_size=3)
entries = st.tuples(st.lists(st.integers(-2, 2), min_size=1, max_size=3), poles)


def transfer(entry: tuple[list[int], list[int]]) -> TransferFunction:
    denominator = product(highest_first([1, -pole]) for pole in entry[1])
    return TransferFunction(highest_first(entry[0]) % denominator, denominator).reduced()


@settings(max_examples=60, deadline=None)
@given(st.integers(1, 3).flatmap(lambda m: st.lists(st.lists(entries, min_size=m, max_size=m), min_size=1, max_size=3)))
def test_shown_modes_have_the_order_of_the_smallest_realisation(
    drawn: list[list[tuple[list[int], list[int]]]],
) -> None:
    matrix = [[transfer(entry) for entry in row] for row in drawn]
    bound = sum(entry.denominator.degree() for row in matrix for entry in row) + 1
    shown = shown_modes(matrix)
    assert shown.degree() == hankel_order(matrix, bound)
    for row in matrix:
        for entry in row:
            assert divmod(shown, entry.denominator)[1] == 0


def test_nothing_is_shown_without_inputs() -> None:
    assert shown_modes([[], []]) == 1
    assert shown_modes([]) == 1
