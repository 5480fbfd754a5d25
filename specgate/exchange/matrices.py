"""The matrices of a review as comma-separated values, for spreadsheets and requirement tools.

Verification: one line a requirement and method, with what a verification control document lists (ECSS-E-ST-10-02C,
annex B): method, stage, evidence, status of compliance, close-out status. Allocation: one line a requirement, a
column for each loop and subsystem. Cells that a spreadsheet would take for a formula begin with an apostrophe.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Iterator

from specgate.review.types import MethodReview, RequirementReview, Review

_FORMULA = ("=", "+", "-", "@", "\t", "\r")
VERIFICATION = (
    *("requirement", "title", "text", "derived_from", "owner", "method", "stage", "outcome", "evidence"),
    *("compliance", "standing", "waivers", "close_out", "reason", "path", "line"),
)


def verification(review: Review) -> str:
    """Return the matrix of requirements and methods."""
    return _written(VERIFICATION, (row for name in review.requirements for row in _verified(name, review)))


def _verified(name: str, review: Review) -> Iterator[tuple[str, ...]]:
    one = review.requirements[name]
    methods: tuple[MethodReview | None, ...] = one.methods or (None,)
    for method in methods:
        yield (
            name,
            one.title or "",
            one.text,
            "; ".join(one.derived_from),
            one.owner or "",
            "" if method is None else method.method,
            "" if method is None else method.stage or "",
            "" if method is None else method.outcome,
            "" if method is None else "; ".join(method.evidence or ()),
            one.verdict,
            one.standing or "",
            "; ".join(waiver.id for waiver in one.waivers),
            close_out(one, method),
            one.reason or "",
            one.location.path,
            str(one.location.line),
        )


def close_out(one: RequirementReview, method: MethodReview | None) -> str:
    """Return `closed` where nothing is left to show: it complies, does not apply, or a waiver in force excuses it."""
    if one.verdict == "not_applicable":
        return "closed"
    if method is not None and method.outcome == "due_later":
        return "open"
    shown = one.verdict if method is None else method.outcome
    return "closed" if shown == "compliant" or (shown == "non_compliant" and one.waived) else "open"


def allocation(review: Review) -> str:
    """Return the matrix of requirements and what they are allocated to; `x` where they are."""
    columns = [*review.loops, *review.specification.subsystems]
    known = frozenset(columns)
    header = ("requirement", "title", "verdict", *columns, "unknown")
    rows = (
        (
            name,
            one.title or "",
            one.verdict,
            *("x" if column in one.allocated_to else "" for column in columns),
            "; ".join(item for item in one.allocated_to if item not in known),
        )
        for name, one in review.requirements.items()
    )
    return _written(header, rows)


def coverage(review: Review) -> str:
    """Return what is covered, in numbers: one line a figure."""
    every = [one for one in review.requirements.values() if one.verdict != "not_applicable"]
    leaves = [one for one in every if not one.derived and one.decided_by != "derived"]
    methods = [method for one in every for method in one.methods]
    figures = {
        "requirements": len(review.requirements),
        "not applicable": len(review.requirements) - len(every),
        "at the end of the trace": len(leaves),
        "of these allocated": sum(bool(one.allocated_to) for one in leaves),
        "of these with a method of verification": sum(bool(one.methods) for one in leaves),
        "derived from something, or external": sum(bool(one.derived_from or one.external) for one in every),
        "compliant": sum(one.verdict == "compliant" for one in every),
        "non-compliant": sum(one.verdict == "non_compliant" for one in every),
        "non-compliant and waived": sum(one.waived for one in every),
        "open": sum(one.verdict == "open" for one in every),
        "methods": len(methods),
        "methods closed out": sum(close_out(one, method) == "closed" for one in every for method in one.methods),
        "methods due later": sum(method.outcome == "due_later" for method in methods),
        "methods without a record": sum(method.outcome == "no_record" for method in methods),
    }
    return _written(("figure", "number"), ((name, str(number)) for name, number in figures.items()))


def _written(header: Iterable[str], rows: Iterable[Iterable[str]]) -> str:
    """Write lines as RFC 4180 has them."""
    file = io.StringIO()
    writer = csv.writer(file, lineterminator="\r\n")
    writer.writerow(header)
    for row in rows:
        writer.writerow(f"'{cell}" if cell.startswith(_FORMULA) else cell for cell in row)
    return file.getvalue()


MATRICES = {"verification-csv": verification, "allocation-csv": allocation, "coverage-csv": coverage}
"""By the name under which `check --format` writes them."""
