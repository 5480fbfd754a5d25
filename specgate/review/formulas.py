"""Formulas against what nobody has claimed anything of by them, as they stand in a Review."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from specgate.analysis.analyses import LoopAnalysis
from specgate.compliance.uninvited import Formula, Uninvited
from specgate.compliance.units import smallness
from specgate.project.types import Subject
from specgate.review.audited import condition, error_of
from specgate.review.printing import amount_of, result
from specgate.review.types import FormulaReview, FormulasReview, LoopReview
from specgate.terms.unit import ONE
from specgate.terms.verdicts import Trilean

_ORDER = (True, None, False)


def with_formulas(
    loops: Mapping[str, LoopReview], analyses: Mapping[str, LoopAnalysis], uninvited: Uninvited
) -> dict[str, LoopReview]:
    """Return loops with every formula of the catalogue put beside them, their responses and their breaks."""
    return {name: _loop(name, loop, analyses[name], uninvited) for name, loop in loops.items()}


def _loop(name: str, loop: LoopReview, analysis: LoopAnalysis, uninvited: Uninvited) -> LoopReview:
    place = analysis.loop.place
    return replace(
        loop,
        responses={
            key: replace(one, formulas=_formulas(Subject("response", name, key, place), uninvited))
            for key, one in loop.responses.items()
        },
        breaks={
            key: replace(one, formulas=_formulas(Subject("break", name, key, place), uninvited))
            for key, one in loop.breaks.items()
        },
        formulas=_formulas(Subject("loop", name, None, place), uninvited),
    )


def _formulas(about: Subject, uninvited: Uninvited) -> FormulasReview:
    found = uninvited.of(about)
    rows = sorted(map(_formula, found.rows), key=_rank)
    return FormulasReview(tuple(rows), dict(found.absent), found.reason)


def _formula(found: Formula) -> FormulaReview:
    asked, value, applies = found.question, found.value, found.applies
    unit = asked.unit or ONE
    scale = smallness(asked.measure, asked.arguments, found.viewed.subject, asked.unit)
    return FormulaReview(
        approximation=found.row.name,
        measure=asked.measure.name,
        arguments=asked.said,
        formula_text=found.row.formula,
        formula=amount_of(value, unit),
        proved=result(found.truth, asked.unit, scale),
        error=None if found.error is None else error_of(found.error, unit),
        applies=None if applies is Trilean.UNKNOWN else applies is Trilean.YES,
        failing=tuple(condition(one) for one in found.failing),
        accuracy=found.accuracy,
        variant=found.row.variant,
        reason=None if value.absent is None else value.absent.reason,
    )


def _rank(row: FormulaReview) -> tuple[int, bool, float]:
    """Sort what holds first, then by the size of the error as printed; rows without one stay in the catalogue's order.

    An error against a proved value of zero has no relative size: its absolute size stands in.
    """
    error = row.error
    if error is None:
        return _ORDER.index(row.applies), True, 0.0
    absolute = None if error.absolute is None else error.absolute.value
    size = error.relative if error.relative is not None else absolute
    return _ORDER.index(row.applies), size is None, abs(size or 0.0)
