"""Measures as tables: one response after the other, or all responses of a loop side by side."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping

from specgate.report import digits
from specgate.report.parts import shown
from specgate.report.words import UNITLESS, arguments, listed, titled
from specgate.review.types import DefinitionReview, MeasureResult, ResponseReview
from specgate.terms.records import record

COLUMNS_AT_MOST = 5


@record
class MeasureRow:
    """A measure as found."""

    name: str
    asked: str
    result: shown.Shown
    value: str


@record
class MeasureTable:
    """Measures with a value as rows; those without one together, by the reason."""

    rows: tuple[MeasureRow, ...]
    absent: tuple[tuple[str, str], ...]


@record
class Comparison:
    """Responses side by side: a column each, headed by name and unit; a row for each measure; reasons by letter."""

    columns: tuple[tuple[str, str], ...]
    rows: tuple[tuple[str, tuple[str, ...]], ...]
    reasons: tuple[tuple[str, str], ...]


def table(measures: Iterable[MeasureResult], definitions: Mapping[str, DefinitionReview]) -> MeasureTable:
    """Return measures one below the other, their numbers aligned on the decimal sign."""
    found = [(m, shown.result(m)) for m in measures]
    present = [(m, result) for m, result in found if result.value != "none"]
    values = digits.aligned([result.value for _, result in present])
    absent: dict[str, list[str]] = {}
    for m, result in found:
        if result.value == "none":
            absent.setdefault(result.note, []).append(titled(m.measure, definitions))
    return MeasureTable(
        rows=tuple(
            MeasureRow(titled(m.measure, definitions), arguments(m.arguments), result, value)
            for (m, result), value in zip(present, values, strict=True)
        ),
        absent=tuple((listed(names), reason) for reason, names in absent.items()),
    )


def comparisons(
    responses: Mapping[str, ResponseReview], definitions: Mapping[str, DefinitionReview]
) -> tuple[Comparison, ...]:
    """Return the measures of all responses of a loop, COLUMNS_AT_MOST responses to a table."""
    measured = [(name, response) for name, response in responses.items() if response.measures]
    starts = range(0, len(measured), COLUMNS_AT_MOST)
    return tuple(_comparison(measured[k : k + COLUMNS_AT_MOST], definitions) for k in starts)


def _comparison(responses: list[tuple[str, ResponseReview]], definitions: Mapping[str, DefinitionReview]) -> Comparison:
    units: dict[str, str] = {}
    columns: list[dict[str, shown.Shown]] = []
    for _, response in responses:
        cells = {_named(m, definitions): shown.result(m) for m in response.measures}
        for name, cell in cells.items():
            known = units.setdefault(name, "")
            units[name] = known or ("" if cell.unit == response.unit else cell.unit)
        columns.append(cells)
    letters: dict[str, str] = {}
    texts = [tuple(_column(cells, units, r.unit, letters)) for cells, (_, r) in zip(columns, responses, strict=True)]
    return Comparison(
        columns=tuple((name, "" if r.unit in UNITLESS else r.unit) for name, r in responses),
        rows=tuple(
            (f"{name}, {unit}" if unit else name, tuple(column[k] for column in texts))
            for k, (name, unit) in enumerate(units.items())
        ),
        reasons=tuple((letter, reason) for reason, letter in letters.items()),
    )


def _named(m: MeasureResult, definitions: Mapping[str, DefinitionReview]) -> str:
    return titled(m.measure, definitions) + (f" ({arguments(m.arguments)})" if m.arguments else "")


def _column(
    cells: Mapping[str, shown.Shown], units: Mapping[str, str], own: str, letters: dict[str, str]
) -> Iterator[str]:
    """Yield the cells of a column: exact values after an equals sign, a letter for the reason where there is none.

    A number is in the unit of its row, else in that of its response (`own`); where it is in neither, it says so.
    """
    values = digits.aligned([cells[name].value if name in cells else "" for name in units])
    for (name, unit), value in zip(units.items(), values, strict=True):
        if name not in cells:
            yield ""
        elif value == "none":
            yield f"none [{letters.setdefault(cells[name].note, letter(len(letters)))}]"
        else:
            proof = {"exact": "= ", "estimated": "~ "}.get(cells[name].bound, "")
            said = cells[name].unit in ("", unit or own)
            yield proof + (value if said else f"{value} {cells[name].unit}")


def letter(number: int) -> str:
    """Return a, b … z, aa, ab …"""
    high, low = divmod(number, 26)
    return (letter(high - 1) if high else "") + "abcdefghijklmnopqrstuvwxyz"[low]
