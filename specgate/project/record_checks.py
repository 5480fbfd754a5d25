"""Checks of results and accepted limits against the criteria that they are about."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from specgate.project import faults
from specgate.project.criterion_checks import limit_check
from specgate.project.faults import Fault, Faults
from specgate.project.limit_checks import LimitCheck
from specgate.project.parameters import Values, evaluate
from specgate.project.percent import relative_to_change
from specgate.project.signals import LoopSignals
from specgate.project.types import Aim, Criterion, Evidence, ModelAgreement, Project, Value, Waiver
from specgate.terms.expressions import literal_unit


def check_records(project: Project, signals: Mapping[str, LoopSignals], values: Values, found: Faults) -> None:
    """Note everything wrong with results, uncertainties and accepted limits."""
    for evidence in project.evidence.values():
        for name in evidence.requirements:
            with found.noted(requirement=name):
                _check_evidence(evidence, _only(project, name, evidence, signals, values), signals, values)
    for waiver in project.waivers.values():
        for name in waiver.requirements:
            with found.noted(requirement=name):
                _check_waiver(waiver, _only(project, name, waiver, signals, values), signals, values)
    if project.model_agreement is not None:
        with found.noted():
            _check_agreement(project.model_agreement, values)


def with_chosen(project: Project, signals: Mapping[str, LoopSignals], values: Values) -> Project:
    """Return a project that passes the checks, with the criteria that records and waivers can only be about."""
    named = {name: one for name, one in project.requirements.items() if len(one.criteria) > 1}

    def chosen(one: Evidence | Waiver) -> dict[str, Criterion]:
        wanted = (name for name in one.requirements if name in named and _numbers(one))
        return {name: only for name in wanted if (only := _only(project, name, one, signals, values)) is not None}

    return replace(
        project,
        evidence={name: replace(one, chosen=chosen(one)) for name, one in project.evidence.items()},
        waivers={name: replace(one, chosen=chosen(one)) for name, one in project.waivers.items()},
    )


def _numbers(one: Evidence | Waiver) -> bool:
    return bool(one.results if isinstance(one, Evidence) else one.limits)


def _only(
    project: Project, name: str, one: Evidence | Waiver, signals: Mapping[str, LoopSignals], values: Values
) -> Criterion | None:
    """Return the criterion of a requirement that numbers are for. Raises Fault where it could be none, or several.

    Of several that are meant, those whose units fit; of those, for limits, the ones limited on the same side.
    """
    requirement = project.requirements.get(name)
    criteria = () if requirement is None else requirement.criteria
    hit = [criterion for criterion in criteria if one.aim.hits(criterion)]
    if requirement is None:
        return None
    if not hit and (criteria or one.aim != Aim()):
        there = ", ".join(f"{each.measure} on {each.subject.on}" for each in criteria) or "no criterion"
        message = f"{name} has no criterion that this could be about: there is {there}"
        raise Fault(faults.NAME, message, one.place, repeats=project.partial)
    if not _numbers(one) or len(hit) < 2:
        return hit[0] if hit and _numbers(one) else None
    fitting = [each for each in hit if _fits(one, each, signals, values)]
    if isinstance(one, Waiver) and len(fitting) > 1:
        fitting = [each for each in fitting if any(limit.kind == each.limit.kind for limit in one.limits)]
    if len(fitting) == 1:
        return fitting[0]
    measures = ", ".join(dict.fromkeys(each.measure for each in fitting or hit))
    message = f"{name} has several criteria: say by `measure` (and `on`) which of them is meant ({measures})"
    raise Fault(faults.VALUE, message, one.place, repeats=project.partial)


def _fits(one: Evidence | Waiver, criterion: Criterion, signals: Mapping[str, LoopSignals], values: Values) -> bool:
    try:
        if isinstance(one, Evidence):
            _check_evidence(one, criterion, signals, values)
        else:
            _check_waiver(one, criterion, signals, values)
    except Fault:
        return False
    return True


def _check_evidence(
    evidence: Evidence, criterion: Criterion | None, signals: Mapping[str, LoopSignals], values: Values
) -> None:
    if criterion is None:
        return
    check = limit_check(criterion, signals, values)
    limited = [relative_to_change(value) is not None for value in criterion.limit.values]
    for value in evidence.results:
        check.counted(value)
        if limited and (relative_to_change(value) is not None) is not limited[0]:
            limit = criterion.limit.values[0].as_written
            message = f"`{value.as_written}`: the limit is `{limit}`: give both in parts of the change, or neither"
            raise Fault(faults.DIMENSION, message, value.place)
    spread = evidence.expanded_uncertainty
    if spread is not None:
        _check_spread(spread, evidence.results, check, values)


def _check_spread(spread: Value, results: tuple[Value, ...], check: LimitCheck, values: Values) -> None:
    check.counted(spread)
    if _decibel(spread) is not _decibel(results[0]) or any(_decibel(one) is not _decibel(spread) for one in results):
        message = f"`{spread.as_written}`: results and their uncertainty are either all in dB or all plain ratios"
        raise Fault(faults.DIMENSION, message, spread.place)
    negative = spread.as_written.lstrip().startswith("-") if _decibel(spread) else evaluate(spread, values) < 0
    if negative:
        raise Fault(faults.VALUE, f"`{spread.as_written}`: an uncertainty is not negative", spread.place)


def _decibel(value: Value) -> bool:
    unit = literal_unit(value.expression)
    return unit is not None and unit.kind == "decibel"


def _check_waiver(
    waiver: Waiver, criterion: Criterion | None, signals: Mapping[str, LoopSignals], values: Values
) -> None:
    for limit in waiver.limits if criterion is not None else ():
        assert criterion is not None
        try:
            for check in limit_check(criterion, signals, values).checks(limit):
                check()
        except Fault as fault:
            # of two limits the other one stays, and keeps a value of the wrong sign out
            if fault.rule != faults.SIGN or criterion.limit.kind not in ("between", "within"):
                raise


def _check_agreement(agreement: ModelAgreement, values: Values) -> None:
    value = agreement.at_most
    number = relative_to_change(value)
    if not _decibel(value) and (evaluate(value, values) if number is None else number) < 0:
        raise Fault(faults.VALUE, f"`{value.as_written}`: a difference to be borne is not negative", value.place)
