"""The modes that a set of transfer functions shows, with multiplicity."""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq_poly

from specgate.systems.polynomials import exact_quotient, least_common_multiple, monic, primitive, product
from specgate.systems.transfer import TransferFunction

_Row = list[fmpq_poly]


def shown_modes(matrix: Sequence[Sequence[TransferFunction]]) -> fmpq_poly:
    """Return the characteristic polynomial of the smallest system with these transfer functions, monic.

    matrix[target][source], reduced. With d the common denominator, the rows of d times the matrix and of d times the
    identity have a greatest common right divisor R; the polynomial is d^sources / det R (Kailath 1980, chapter 6).
    Two equal poles that reach two signals on ways of their own are two modes; the common denominator alone has one.
    """
    common = least_common_multiple(entry.denominator for row in matrix for entry in row)
    sources = len(matrix[0]) if matrix else 0
    rows = [[entry.numerator * exact_quotient(common, entry.denominator) for entry in row] for row in matrix]
    diagonal = []
    for column in range(sources):
        pivot, rows = _collected(rows, column, common)
        diagonal.append(pivot)
    return monic(exact_quotient(common**sources, product(diagonal)))


def _collected(rows: Sequence[_Row], column: int, common: fmpq_poly) -> tuple[fmpq_poly, list[_Row]]:
    """Return the greatest common divisor of a column with `common`, and rows for the columns after it.

    Euclid's steps turn `common` times the unit row and the rows given into one row that has the divisor and others
    that have zero. Entries are taken modulo `common`, whose multiples of the later unit rows are still to come.
    """
    head, pivot = common, [fmpq_poly()] * len(rows[0]) if rows else []
    rest: list[_Row] = []
    for row in rows:
        if not row[column]:
            rest.append(row)
            continue
        divisor, of_head, of_row = head.xgcd(row[column])
        drop, keep = row[column] // divisor, head // divisor
        rest.append(_scaled([(drop * p - keep * r) % common for p, r in zip(pivot, row, strict=True)]))
        pivot = [(of_head * p + of_row * r) % common for p, r in zip(pivot, row, strict=True)]
        head = divisor
    return head, [row for row in rest if any(row[column + 1 :])]


def _scaled(row: _Row) -> _Row:
    """Divide a row by the content of its first entry that is not zero: coefficients stay short."""
    lead = next((entry for entry in row if entry), None)
    if lead is None:
        return row
    factor = fmpq_poly(primitive(lead)).leading_coefficient() / lead.leading_coefficient()
    return [entry * factor for entry in row]
