"""Which formulas hold: a table for each response, break and loop, those that hold first, by the size of their error."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from specgate.report import anchors, digits
from specgate.report.parts import shown
from specgate.report.parts.measures import letter
from specgate.report.words import Status, amount, counted, listed, spaced, titled, with_unit
from specgate.review.types import (
    ConditionReview,
    DefinitionReview,
    ErrorReview,
    FormulaReview,
    FormulasReview,
    Review,
)
from specgate.terms.records import record

ROWS_AT_MOST = 160
"""Rows of all printed tables together; the screen and the attached result have all."""

STATES = {
    True: Status("holds", "holds", "■", 2),
    None: Status("undecided", "undecided", "◧", 1),
    False: Status("out_of_range", "out of range", "▲", 0),
}
_FEW = 2
"""Rows that are worth no table on paper."""
_SMALL = 5e-5
"""Size of an error (relative) below which only its sign is printed."""
_NOTABLE = 0.1
"""Size of an error (relative) on the unsafe side from which it is set bold."""


@record
class Formula:
    """A formula on one response, break or loop.

    fails: letters of the conditions that do not hold, or are not decided. notable: its error is large and on the unsafe
    side.
    """

    name: str
    text: str
    measure: str
    gives: str
    proved: str
    error: str
    side: str
    state: Status
    fails: str
    accuracy: str
    notable: bool


@record
class FormulaTable:
    """All formulas on one response, break or loop.

    conditions: those that fail, each with its letter. silent: formulas without a value, by the reason; absent: measures
    without one.
    """

    anchor: str
    name: str
    sheet: str
    asked: bool
    sentence: str
    rows: tuple[Formula, ...]
    conditions: tuple[tuple[str, str], ...]
    silent: tuple[tuple[str, str], ...]
    absent: tuple[tuple[str, str], ...]


def tables(review: Review) -> tuple[FormulaTable, ...]:
    """Return the table of each response, break and loop that formulas were put to, in the order of the loops."""
    asked = {c.on for requirement in review.requirements.values() for c in requirement.criteria}
    return tuple(
        _table(name, sheet, formulas, name in asked, review.definitions)
        for name, sheet, formulas in _subjects(review)
        if formulas is not None and (formulas.rows or formulas.reason)
    )


def _subjects(review: Review) -> Iterator[tuple[str, str, FormulasReview | None]]:
    """Yield responses, breaks and loops by name, each with its place on a sheet and the formulas that were put to it.

    What does not exist says why on its sheet, and has no table.
    """
    for loop, found in review.loops.items():
        for name, response in found.responses.items():
            if response.reason is None:
                yield f"{loop}.{name}", anchors.plot(loop, name), response.formulas
        for name, opened in found.breaks.items():
            if opened.reason is None:
                yield f"{loop}.{name}", anchors.opened(loop, name), opened.formulas
        if found.reason is None:
            yield loop, anchors.sheet(loop), found.formulas


def printed(of: tuple[FormulaTable, ...]) -> tuple[FormulaTable, ...]:
    """Return the tables that fit on paper: of responses that a requirement is on, then others while there is room."""
    kept: set[str] = set()
    room = ROWS_AT_MOST
    for table in sorted(of, key=lambda one: not one.asked):
        if _FEW < len(table.rows) <= room:
            kept.add(table.anchor)
            room -= len(table.rows)
    return tuple(table for table in of if table.anchor in kept)


def _table(
    name: str, sheet: str, found: FormulasReview, asked: bool, definitions: Mapping[str, DefinitionReview]
) -> FormulaTable:
    letters: dict[str, str] = {}
    rows = [_formula(one, definitions, letters) for one in found.rows if one.formula is not None]
    silent: dict[str, list[str]] = {}
    for one in found.rows:
        if one.formula is None:
            silent.setdefault(one.reason or "it has no value", []).append(named(one))
    absent: dict[str, list[str]] = {}
    for measure, reason in found.absent.items():
        absent.setdefault(reason, []).append(titled(measure, definitions).lower())
    return FormulaTable(
        anchor=anchors.anchor("formulas", name),
        name=name,
        sheet=sheet,
        asked=asked,
        sentence=_sentence(found),
        rows=tuple(rows),
        conditions=tuple((letter, condition) for condition, letter in letters.items()),
        silent=tuple((listed(dict.fromkeys(names)), reason) for reason, names in silent.items()),
        absent=tuple((listed(names), reason) for reason, names in absent.items()),
    )


def _sentence(found: FormulasReview) -> str:
    """Say how many formulas hold, and which of the others is furthest off on the unsafe side."""
    if found.reason is not None:
        return f"No formula of the catalogue is for it: {found.reason}."
    valued = [one for one in found.rows if one.formula is not None]
    holding = [one for one in valued if one.applies]
    words = f"{len(holding)} of {counted(len(valued), 'formula')} hold{'s' if len(valued) == 1 else ''}."
    worst = max((one for one in valued if not one.applies and _unsafe(one)), key=_size, default=None)
    if worst is None:
        return words
    return (
        f"{words} Furthest off on the unsafe side: {named(worst)}, {_signed(worst.error)} in {spaced(worst.measure)}."
    )


def _unsafe(one: FormulaReview) -> bool:
    return one.error is not None and one.error.side == "unsafe" and one.error.relative is not None


def _size(one: FormulaReview) -> float:
    return 0.0 if one.error is None else abs(one.error.relative or 0.0)


def named(one: FormulaReview) -> str:
    """Name a formula, with its variant where it has several."""
    return spaced(one.approximation) + (f" ({spaced(one.variant)})" if one.variant else "")


def _formula(one: FormulaReview, definitions: Mapping[str, DefinitionReview], letters: dict[str, str]) -> Formula:
    measure = titled(one.measure, definitions).lower()
    failing = [_condition(condition) for condition in one.failing]
    return Formula(
        name=named(one),
        text=one.formula_text,
        measure=measure + (f" ({_asked(one.arguments)})" if one.arguments else ""),
        gives="none" if one.formula is None else amount(one.formula),
        proved=shown.result(one.proved).whole,
        error=_signed(one.error),
        side=_side(one.error),
        state=STATES[one.applies],
        fails=" ".join(letters.setdefault(condition, letter(len(letters))) for condition in dict.fromkeys(failing)),
        accuracy=one.accuracy or "",
        notable=_unsafe(one) and _size(one) >= _NOTABLE,
    )


def _asked(of: Mapping[str, str]) -> str:
    """Return the arguments of a measure in a cell: `2 %`, `10 % to 90 %` (of the change, as the text says)."""
    return " to ".join(value.removesuffix(" of the change") for value in of.values())


def _signed(error: ErrorReview | None) -> str:
    """Return an error with its sign: relative, else absolute (against a proved value of zero)."""
    if error is None:
        return "–"
    if error.side == "none":
        return "none"
    if error.relative is not None:
        return _relative(error.relative)
    absolute = error.absolute
    if absolute is None or absolute.value is None:
        return "–"
    return with_unit(digits.signed(digits.number(absolute.value)), absolute.unit)


def _relative(error: float) -> str:
    """Return a relative error with its sign, which alone is left of one that is too small to matter."""
    if abs(error) >= _SMALL:
        return digits.signed(digits.percent(error))
    return f"{digits.MINUS if error < 0 else '+'}0.00 %"


def _side(error: ErrorReview | None) -> str:
    return "" if error is None or error.side == "none" else error.side


def _condition(one: ConditionReview) -> str:
    if one.found is None:
        found = "nothing that decides it"
    else:
        found = one.found if isinstance(one.found, str) else digits.number(float(f"{one.found:.3g}"))
    required = one.required.replace(">=", "≥").replace("<=", "≤")
    return f"{one.name} (required {required}, found {found})"
