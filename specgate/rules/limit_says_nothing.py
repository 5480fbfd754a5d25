"""A limit that everything meets, or that nothing can.

A margin is a size: it is never below 0 dB, and `at_least: -6 dB` is met by every loop that has one. So is a time, an
overshoot or a peak, which are never below zero. A mask whose lower limit lies above its upper one is kept by nothing,
and a range of frequencies whose ends are one frequency looks at that frequency alone. The verdict is what it is; the
warning asks whether a sign, an end or a corner has slipped.
"""

from __future__ import annotations

from collections.abc import Iterator

from flint import fmpq

from specgate.compliance.assessment import CriterionAssessment
from specgate.compliance.wording import number, subject
from specgate.measures.measure import UnitRule
from specgate.project.mask_room import crossed
from specgate.rules.rule import Facts, Rule
from specgate.terms.enclosed import printed_exact
from specgate.terms.findings import Finding
from specgate.terms.places import Place
from specgate.terms.verdicts import Level

NAME = "limit-says-nothing"


def check(facts: Facts) -> Iterator[Finding]:
    """Report limits below all that a measure can be, masks without room, and ranges of one frequency."""
    for name, assessment in facts.assessments.items():
        for criterion in assessment.criteria:
            for words, place in _found(facts, criterion):
                yield Finding(NAME, Level.WARNING, f"{name}: {words}", place, requirement=name)


def _found(facts: Facts, criterion: CriterionAssessment) -> Iterator[tuple[str, Place]]:
    below = _below_everything(facts, criterion)
    if below is not None:
        yield below, criterion.criterion.limit.place
    mask, given = criterion.criterion.mask, criterion.arguments
    at = None if given.mask is None else crossed(given.mask)
    if mask is not None and at is not None:
        unit = "rad/s" if given.laid_over == "frequency" else "s"
        where = f"at {number(printed_exact(at).value)} {unit}"
        words = f"{where} the lower limit of the mask {mask.name} lies above the upper one, and nothing keeps both"
        yield words, mask.place
    ends = criterion.criterion.over
    if ends is not None and given.over is not None and given.over[0] == given.over[1]:
        yield f"the range of {subject(criterion)} is the one frequency {ends[0].as_written}", ends[0].place


def _below_everything(facts: Facts, criterion: CriterionAssessment) -> str | None:
    """Say that a limit lies below all that a measure which has no sign can be."""
    limit, measure = criterion.criterion.limit, criterion.measure
    decibel = measure.unit is UnitRule.DECIBEL
    # times from the end of a ramp may be negative, and a resonance peak be looked for where the gain has fallen already
    ramped = criterion.criterion.subject.kind == "response" and (decibel or _counts_from_the_end(facts, criterion))
    if measure.signed or limit.kind not in ("at_most", "at_least") or ramped:
        return None
    given = criterion.limits.least if limit.kind == "at_least" else criterion.limits.most
    least, zero = (fmpq(1), "0 dB, a factor of 1") if decibel else (fmpq(0), "zero")
    if given is None or given >= least:
        return None
    how = "every value meets" if limit.kind == "at_least" else "no value meets"
    return f"{how} `{limit.kind}: {limit.values[0].as_written}`: {subject(criterion)} is not below {zero}"


def _counts_from_the_end(facts: Facts, criterion: CriterionAssessment) -> bool:
    about = criterion.criterion.subject
    response = facts.analyses.loops[about.loop].responses[str(about.name)].response
    ending = any("count_from" in excitation.options for excitation in response.excitations)
    return ending and criterion.measure.unit is UnitRule.SECOND


RULE = Rule(NAME, "Limit that says nothing", "warning", check, __doc__)
