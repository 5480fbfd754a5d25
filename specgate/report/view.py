"""The one view model: everything that the HTML, the PDF and the terminal show of a Review, in words and figures.

A view computes nothing that is not in the Review: it chooses, orders, rounds and draws.
"""

from __future__ import annotations

from collections.abc import Callable

from specgate.report.clean import cleaned
from specgate.report.parts.audit import Audit, audits
from specgate.report.parts.formulas import FormulaTable, tables
from specgate.report.parts.front import Front, front
from specgate.report.parts.loops import LoopSheet, sheets
from specgate.report.parts.matrix import Group, groups
from specgate.report.parts.models import ModelRow, rows
from specgate.report.parts.ranges import Range, ranges
from specgate.report.parts.trace import Finding, OpenPoint, TraceLine, findings, lines, open_points
from specgate.report.parts.trust import Trust, cautions, trust
from specgate.review.types import Review
from specgate.terms.records import record


@record
class View:
    """A report, section by section."""

    front: Front
    groups: tuple[Group, ...]
    audits: tuple[Audit, ...]
    ranges: tuple[Range, ...]
    models: tuple[ModelRow, ...]
    formulas: tuple[FormulaTable, ...]
    loops: tuple[LoopSheet, ...]
    trace: tuple[TraceLine, ...]
    open_points: tuple[OpenPoint, ...]
    findings: tuple[Finding, ...]
    trust: Trust
    cautions: tuple[str, ...]


def view(review: Review, shown: Callable[[str], bool] = lambda character: True) -> View:
    """Return the view of a review; characters that `shown` denies are named by their code point."""
    review = cleaned(review, shown)
    return View(
        front=front(review),
        groups=groups(review),
        audits=audits(review),
        ranges=ranges(review),
        models=rows(review),
        formulas=tables(review),
        loops=sheets(review),
        trace=lines(review),
        open_points=open_points(review),
        findings=findings(review),
        trust=trust(review),
        cautions=cautions(review),
    )
