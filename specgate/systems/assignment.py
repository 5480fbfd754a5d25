"""The degree that a determinant of polynomials has unless its leading coefficients cancel."""

from __future__ import annotations

from collections.abc import Mapping, Sequence


def heaviest_assignment(weights: Sequence[Mapping[int, int]]) -> int | None:
    """Return the largest sum of weights over all ways to give each row a column of its own, None if there is none.

    weights[row] maps a column to its weight. Rows are placed one after the other along the heaviest alternating path.
    """
    row_of: dict[int, int] = {}
    column_of: dict[int, int] = {}
    for row in range(len(weights)):
        best, mover = _heaviest_paths(weights, row, row_of)
        free = [column for column in best if column not in row_of]
        if not free:
            return None
        column = max(free, key=lambda candidate: (best[candidate], -candidate))
        while mover[column] != row:
            moved = mover[column]
            left = column_of[moved]
            row_of[column], column_of[moved] = moved, column
            column = left
        row_of[column], column_of[row] = row, column
    return sum(weights[row][column] for row, column in column_of.items())


def _heaviest_paths(
    weights: Sequence[Mapping[int, int]], start: int, row_of: Mapping[int, int]
) -> tuple[dict[int, int], dict[int, int]]:
    """Return, by column, the gain of the heaviest alternating path from `start` and the row that takes the column.

    Bellman and Ford's rounds end, for the assignment so far is a heaviest one: no alternating cycle gains anything.
    """
    best = dict(weights[start])
    mover = dict.fromkeys(best, start)
    changed = True
    while changed:
        changed = False
        for column in [column for column in best if column in row_of]:
            row = row_of[column]
            for other, weight in weights[row].items():
                gain = best[column] - weights[row][column] + weight
                if other != column and gain > best.get(other, gain - 1):
                    best[other], mover[other], changed = gain, row, True
    return best, mover
