"""Fraction-free elimination of sparse polynomial equations, component by component."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from flint import fmpz_poly

Row = dict[int, fmpz_poly]
"""One equation, sum of entry times variable = 0: {variable: entry}; entries are not zero."""


@dataclass(frozen=True)
class Eliminated:
    """The solved equations: variable = - sum of `rows[variable][input]` / `scales[variable]` * input.

    determinants: that of each block of equations, up to sign; after a block that is singular, none.
    """

    determinants: tuple[fmpz_poly, ...]
    rows: Mapping[int, Row]
    scales: Mapping[int, fmpz_poly]


def eliminate(equations: Sequence[Row], blocks: Sequence[Sequence[int]]) -> Eliminated:
    """Solve equation i for variable i, i = 0, 1, …; higher variables are inputs and stay.

    blocks: the strongly connected components of the variables, those upstream first. Every entry is a minor of the
    matrix (Bareiss 1968), so nothing grows beyond the degree of the result. A row that has no entry in the pivot's
    column is left as it is, with the pivot up to which it was carried as its scale: most rows of a wiring are.
    """
    rows = [dict(row) for row in equations]
    scales = [fmpz_poly([1])] * len(rows)
    solved: dict[int, int] = {}
    determinants: list[fmpz_poly] = []
    last = fmpz_poly([1])
    for block in blocks:
        before = last
        for row, column in _pivots(rows, block):
            if scales[row] is not last:
                rows[row] = {key: entry * last // scales[row] for key, entry in rows[row].items()}
            last = rows[row][column]
            scales[row] = last
            solved[column] = row
            _clear(rows, scales, row, column)
        if any(column not in solved for column in block):
            break
        determinants.append(last // before)
    return Eliminated(
        tuple(determinants),
        {column: rows[row] for column, row in solved.items()},
        {column: scales[row] for column, row in solved.items()},
    )


def _pivots(rows: Sequence[Row], block: Sequence[int]) -> Iterator[tuple[int, int]]:
    """Yield a row and a column of the block, each once, until none is left or what is left is zero."""
    free_rows, free_columns = list(block), list(block)
    while free_rows:
        diagonal = [row for row in free_rows if row in free_columns and row in rows[row]]
        if diagonal:
            row = column = min(diagonal, key=lambda i: (len(rows[i]), rows[i][i].degree(), i))
        else:
            other = next(((i, j) for i in free_rows for j in free_columns if j in rows[i]), None)
            if other is None:
                return
            row, column = other
        free_rows.remove(row)
        free_columns.remove(column)
        yield row, column


def _clear(rows: list[Row], scales: list[fmpz_poly], pivot_row: int, column: int) -> None:
    """Remove `column` from every row but the pivot's."""
    source = rows[pivot_row]
    pivot = source[column]
    for index, row in enumerate(rows):
        if index == pivot_row or column not in row:
            continue
        factor = row[column]
        result: Row = {}
        for key in dict.fromkeys((*row, *source)):
            if key == column:
                continue
            entry = (row[key] * pivot if key in row else fmpz_poly()) - (factor * source[key] if key in source else 0)
            if entry:
                result[key] = entry // scales[index]
        rows[index] = result
        scales[index] = pivot
