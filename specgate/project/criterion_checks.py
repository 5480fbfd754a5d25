"""Checks of the criteria of a requirement: what they measure, their limits, arguments, masks and claims."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from functools import partial

from specgate.measures.measure import Measure
from specgate.measures.table import MEASURES
from specgate.project import faults
from specgate.project.about import About
from specgate.project.argument_checks import ArgumentCheck
from specgate.project.faults import Fault, Faults
from specgate.project.limit_checks import LimitCheck
from specgate.project.mask_checks import mask_checks
from specgate.project.parameters import Values
from specgate.project.signals import LoopSignals
from specgate.project.types import Criterion, Requirement


def check_requirement(
    requirement: Requirement, signals: Mapping[str, LoopSignals], values: Values, found: Faults
) -> None:
    """Note everything wrong with the limits, arguments and claims of a requirement; `signals` by loop."""
    claims = [_check_criterion(criterion, signals, values, found, requirement.id) for criterion in requirement.criteria]
    claimed = requirement.basis.claimed if requirement.basis is not None else None
    if claimed is None or not claims:
        return
    misfits = []
    for claim in claims:
        try:
            claim.counted(claimed.value)
        except Fault as fault:
            misfits.append(fault)
    if len(misfits) == len(claims) and not any(misfit.repeats for misfit in misfits):
        found.findings.append(misfits[0].finding(requirement=requirement.id))


def limit_check(criterion: Criterion, signals: Mapping[str, LoopSignals], values: Values) -> LimitCheck:
    """Return what checks limits, results and claims for a criterion; `signals` by loop."""
    about = About(criterion.subject, signals.get(criterion.subject.loop))
    return LimitCheck(about, MEASURES[criterion.measure], values)


def _check_criterion(
    criterion: Criterion, signals: Mapping[str, LoopSignals], values: Values, found: Faults, requirement: str
) -> LimitCheck:
    """Note everything wrong with a criterion; return what a claim for it can be checked with."""
    limit = limit_check(criterion, signals, values)
    for check in (*_checks(criterion, limit.about, limit.measure, values), *limit.checks(criterion.limit)):
        with found.noted(requirement=requirement):
            check()
    if criterion.basis is not None and criterion.basis.claimed is not None:
        with found.noted(requirement=requirement):
            limit.counted(criterion.basis.claimed.value)
    return limit


def _checks(criterion: Criterion, about: About, measure: Measure, values: Values) -> Iterator[Callable[[], object]]:
    """Give the checks of all but the limit that do not depend on one another; each raises Fault."""
    yield partial(_check_existence, criterion, about, measure)
    arguments = ArgumentCheck(about, measure, values)
    for name, value in criterion.arguments.items():
        yield partial(arguments.argument, name, value)
    if criterion.over is not None:
        yield partial(arguments.over, criterion.over)
    if criterion.mask is not None:
        yield from mask_checks(criterion.mask, about, values)


def _check_existence(criterion: Criterion, about: About, measure: Measure) -> None:
    """See that the measure exists for the input, and that an error has something to be measured from. Raises Fault."""
    kind = about.kind
    if kind is not None and kind not in measure.inputs:
        given = "several inputs at once" if kind == "several" else f"the input {kind}"
        inputs = [kind for kind in measure.inputs if kind != "several"]
        message = f"`{measure.name}` does not exist for {given}; it does for {', '.join(inputs)}"
        raise Fault(faults.VALUE, message, criterion.subject.place)
    source = about.error_from if measure.of_error else None
    if source is not None and source[1].dimension != about.unit.dimension:
        raise Fault(
            faults.DIMENSION,
            f"{measure.name} is measured from the input `{source[0]}`, which is in {source[1].symbol}, the signal "
            f"in {about.unit.symbol}: name a `reference` in the response, a signal or 0",
            criterion.subject.place,
        )
