"""Records and waivers as they stand in a Review."""

from __future__ import annotations

from collections.abc import Sequence

from specgate.compliance.assessment import Disagreement, RecordAssessment, WaiverAssessment
from specgate.compliance.records import record_words
from specgate.project.types import RecordFile, Value
from specgate.response.answers import Answer
from specgate.review.printing import as_plain, location, printed_form
from specgate.review.types import Amount, DisagreementReview, EvidenceReview, RecordFileReview, WaiverReview
from specgate.terms.unit import ONE, Unit
from specgate.terms.verdicts import Verdict


def evidence(judged: RecordAssessment) -> EvidenceReview:
    """Print a record."""
    record, unit, criterion = judged.evidence, judged.unit or ONE, judged.criterion
    spread = judged.spread
    silent = judged.verdict is Verdict.COMPLIANT and not judged.stale
    return EvidenceReview(
        id=record.id,
        kind=record.kind,
        title=record.title,
        date=record.date,
        design_revision=record.design_revision,
        stale=judged.stale,
        verdict=judged.verdict.value,
        outcome=record.outcome,
        results=_amounts(judged.results, record.results, unit),
        expanded_uncertainty=None if spread is None else _amount(spread, unit, record.expanded_uncertainty),
        worst=None if judged.worst is None else _amount(judged.worst, unit),
        reserve=None if judged.reserve is None else _amount(judged.reserve, unit),
        measure=None if criterion is None else criterion.measure.name,
        on=None if criterion is None else criterion.criterion.subject.on,
        reason=None if silent else record_words(judged),
        disagreement=None if judged.disagreement is None else _disagreement(judged.disagreement, unit),
        file=None if record.file is None else _file(record.file),
        source=record.source,
        location=location(record.place),
    )


def _amounts(answers: Sequence[Answer], written: Sequence[Value], unit: Unit) -> tuple[Amount, ...]:
    """Print results on the scale of their criterion; where there is none they are left as text in the files."""
    return tuple(_amount(answer, unit, value) for answer, value in zip(answers, written, strict=False))


def _amount(answer: Answer, unit: Unit, written: Value | None = None) -> Amount:
    form = printed_form(answer)
    return Amount(form.value, unit.symbol, form.exact, None if written is None else written.as_written)


def _disagreement(found: Disagreement, unit: Unit) -> DisagreementReview:
    return DisagreementReview(*(_amount(one, unit) for one in (found.result, found.model, found.allowed)))


def _file(file: RecordFile) -> RecordFileReview:
    known = file.digest is not None and file.found is not None
    return RecordFileReview(file.path, file.digest, file.digest == file.found if known else None)


def waiver(judged: WaiverAssessment) -> WaiverReview:
    """Print a waiver."""
    declared, expires = judged.waiver, judged.waiver.expires
    return WaiverReview(
        id=declared.id,
        kind=declared.kind,
        reason=declared.reason,
        scope=declared.scope,
        accepts=as_plain(declared.accepts),
        approved_by=declared.approved_by,
        approved_on=declared.approved_on,
        expires=None if expires is None else expires.date or f"revision {expires.revision}",
        lapsed=judged.lapsed,
        needed=judged.needed,
        excuses=judged.excuses,
        short=judged.reason,
        location=location(declared.place),
    )
