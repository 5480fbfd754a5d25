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

    Entries are taken modulo `common`: `common` times each unit row is among the generators.
    """
    pivot = [fmpq_poly() for _ in rows[0]] if rows else []
    rest: list[_Row] = []
    head = common
    for row in rows:
        if not row[column]:
            rest.append(list(row))
            continue
        divisor, of_head, of_row = head.xgcd(row[column])
        drop, keep = row[column] // divisor, head // divisor
        combined = [(of_head * p + of_row * r) % common for p, r in zip(pivot, row, strict=True)]
        left = [(drop * p - keep * r) % common for p, r in zip(pivot, row, strict=True)]
        head, pivot = divisor, combined
        rest.append(_scaled(left))
    if not rows:
        return head, rest
    # head times its cofactor is common, and common times the unit row has nothing in the later columns.
    rest.append(_scaled([exact_quotient(common, head) * p % common for p in pivot]))
    return head, [row for row in rest if any(row[column + 1 :])]


def _scaled(row: _Row) -> _Row:
    """Divide a row by the content of its first entry that is not zero: coefficients stay short."""
    lead = next((entry for entry in row if entry), None)
    if lead is None:
        return row
    factor = fmpq_poly(primitive(lead)).leading_coefficient() / lead.leading_coefficient()
    return [entry * factor for entry in row]
