"""A record is on another revision of the design than the one that it is to prove.

`design_revision` names the revision of the design that was tested. A record on any other than the project's shows
nothing of this one: a method that has no other record is open. The finding restates that: an error where `gate:
hold_on` names open, else a warning. It is a note where another record on this revision takes its place, or the method
is due later. A record that does not say on which revision it is counts, and is a note. Put it right by repeating the
test, or by showing that the change does not touch what was tested and recording that (similarity).
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.assessment import Assessment, RecordAssessment
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level, Verdict

NAME = "evidence-stale"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every record on another revision, and every one that names none."""
    revision = facts.project.info.revision
    for name, assessment in facts.assessments.items():
        for one in assessment.records:
            evidence = one.evidence
            if one.stale:
                message = (
                    f"{name}: {evidence.id} is on revision {evidence.design_revision} of the design, and this is "
                    f"revision {revision}: repeat it, or show that the change does not touch it"
                )
                yield Finding(NAME, _level(facts, assessment, one), message, evidence.place, name, restates=True)
    for evidence in facts.project.evidence.values():
        if evidence.design_revision is None:
            message = f"{evidence.id} does not say on which revision of the design it is: add `design_revision`"
            yield Finding(NAME, Level.NOTE, message, evidence.place)


def _level(facts: Facts, assessment: Assessment, one: RecordAssessment) -> Level:
    """Return a note where something else decides, or where it is not yet the time."""
    kind = one.evidence.kind
    replaced = any(other.evidence.kind == kind and not other.stale for other in assessment.records)
    asked = [method for method in assessment.methods if method.method.method == kind]
    waits = bool(assessment.methods) and all(method.outcome == "due_later" for method in asked)
    return Level.NOTE if replaced or waits else facts.restating(Verdict.OPEN, assessment)


RULE = Rule(
    NAME, "Record on another revision of the design", "error, warning or note (restates the verdict)", check, __doc__
)
