"""Fraction-free elimination of sparse polynomial equations, component by component."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from flint import fmpz_poly

from specgate.terms.records import record

Row = dict[int, fmpz_poly]
"""One equation, sum of entry times variable = 0: {variable: entry}; entries are not zero."""


@record
class Triangle:
    """Equations brought to triangular form.

    determinants: that of each block of equations, up to sign; none for a block that is singular and those after it.
    steps: (variable, row) in the order of elimination; a row has no variable that was eliminated before its own.
    """

    determinants: tuple[fmpz_poly, ...]
    steps: tuple[tuple[int, Row], ...]

    @property
    def determinant(self) -> fmpz_poly:
        """The determinant of all equations, up to sign."""
        return self.steps[-1][1][self.steps[-1][0]] if self.steps else fmpz_poly([1])

    def numerators(self, source: int) -> dict[int, fmpz_poly]:
        """Return the numerators over `determinant` of the variables per unit of one input; zeros are left out."""
        determinant = self.determinant
        result: dict[int, fmpz_poly] = {}
        for variable, row in reversed(self.steps):
            total = row[source] * determinant if source in row else fmpz_poly()
            for other, entry in row.items():
                if other in result:
                    total += entry * result[other]
            if total:
                result[variable] = -total // row[variable]
        return result


def triangulate(equations: Sequence[Row], blocks: Sequence[Sequence[int]]) -> Triangle:
    """Eliminate variable after variable, equation i having variable i; variables beyond them are inputs and stay.

    blocks: the strongly connected components of the variables, those upstream first. Every entry is a minor of the
    matrix (Bareiss 1968): nothing grows beyond the degree of the result. A row without an entry in the pivot's column
    is left as it is, with the pivot up to which it was carried as its scale; in a wiring most rows are.
    """
    rows = dict(enumerate(equations))
    scales = dict.fromkeys(rows, fmpz_poly([1]))
    steps: list[tuple[int, Row]] = []
    determinants: list[fmpz_poly] = []
    last = fmpz_poly([1])
    for block in blocks:
        before, solved = last, 0
        for index, variable in _pivots(rows, block):
            row, scale = rows.pop(index), scales.pop(index)
            if scale is not last:
                row = {key: entry * last // scale for key, entry in row.items()}
            last = row[variable]
            steps.append((variable, row))
            solved += 1
            for other in [other for other, entries in rows.items() if variable in entries]:
                rows[other] = _cleared(rows[other], scales[other], row, variable)
                scales[other] = last
        if solved < len(block):
            break
        determinants.append(last // before)
    return Triangle(tuple(determinants), tuple(steps))


def _pivots(rows: dict[int, Row], block: Sequence[int]) -> Iterator[tuple[int, int]]:
    """Yield a row and a variable of the block, each once, until none is left or what is left is zero.

    The diagonal holds the denominators, so that it is zero only by chance. Shortest row first keeps the fill low.
    """
    free_rows, free_variables = list(block), list(block)
    while free_rows:
        diagonal = [index for index in free_rows if index in free_variables and index in rows[index]]
        if diagonal:
            row = variable = min(diagonal, key=lambda index: (len(rows[index]), index))
        else:
            other = next(((i, j) for i in free_rows for j in free_variables if j in rows[i]), None)
            if other is None:
                return
            row, variable = other
        free_rows.remove(row)
        free_variables.remove(variable)
        yield row, variable


def _cleared(row: Row, scale: fmpz_poly, source: Row, variable: int) -> Row:
    """Return pivot times `row` minus a multiple of `source`, without `variable`, divided by what divides it."""
    pivot, factor = source[variable], row[variable]
    result: Row = {}
    for key, entry in row.items():
        if key not in source:
            result[key] = entry * pivot // scale
        elif key != variable:
            changed = entry * pivot - factor * source[key]
            if changed:
                result[key] = changed // scale
    for key, entry in source.items():
        if key not in row:
            result[key] = -factor * entry // scale
    return result
