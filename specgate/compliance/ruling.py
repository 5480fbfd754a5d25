"""From what is found about a requirement to its verdict: criteria, records and methods put together."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from specgate.compliance.assessment import CriterionAssessment, MethodAssessment, RecordAssessment
from specgate.compliance.compare import worst
from specgate.compliance.records import record_words
from specgate.compliance.wording import criterion_words
from specgate.terms.records import record
from specgate.terms.verdicts import Verdict


@record
class Ruling:
    """A verdict, why it is not compliant, whether it counts at this stage, and whether waivers below excuse it."""

    verdict: Verdict
    reason: str | None = None
    due: bool = True
    waived: bool = False


def worse(one: Ruling, other: Ruling) -> Ruling:
    """Return the worse of two rulings, the reasons of both where they are alike."""
    if one.verdict is not other.verdict:
        return one if worst([one.verdict, other.verdict]) is one.verdict else other
    reasons = [each.reason for each in (one, other) if each.reason]
    return Ruling(one.verdict, "; ".join(reasons) or None, one.due or other.due, one.waived and other.waived)


def of_criteria(criteria: tuple[CriterionAssessment, ...]) -> Ruling:
    """Return what limits give: the worst of them."""
    verdict = worst(one.verdict for one in criteria)
    if verdict is Verdict.COMPLIANT:
        return Ruling(verdict)
    return Ruling(verdict, "; ".join(criterion_words(one) for one in criteria if one.verdict is verdict))


def of_records(records: Sequence[RecordAssessment]) -> Ruling:
    """Return what records alone give: the worst of those on this revision of the design."""
    current = [one for one in records if not one.stale]
    if not current:
        stale = "; ".join(record_words(one) for one in records)
        return Ruling(Verdict.OPEN, stale or "it is decided by evidence, and there is no record that names it")
    verdict = worst(one.verdict for one in current)
    if verdict is Verdict.COMPLIANT:
        return Ruling(verdict)
    return Ruling(verdict, "; ".join(record_words(one) for one in current if one.verdict is verdict))


def with_methods(
    analysed: Ruling, methods: tuple[MethodAssessment, ...], records: Sequence[RecordAssessment]
) -> Ruling:
    """Put together what is due: every method that is due must conclude, and no record may show the contrary."""
    refuted = [one for one in records if one.verdict is Verdict.NON_COMPLIANT and not one.stale]
    if refuted:
        own = [analysed.reason] if analysed.verdict is Verdict.NON_COMPLIANT and analysed.reason else []
        reasons = dict.fromkeys([*own, *(record_words(one) for one in refuted)])
        return Ruling(Verdict.NON_COMPLIANT, "; ".join(reasons))
    due = [one for one in methods if one.outcome != "due_later"]
    if not methods:
        return analysed
    if not due:
        return _later(analysed, methods)
    if _violated_unasked(analysed, methods):
        return analysed
    verdict = worst(_verdict(one) for one in due)
    if verdict is Verdict.COMPLIANT:
        return Ruling(verdict)
    return _lacking(analysed, due, verdict, records)


def _lacking(
    analysed: Ruling, due: list[MethodAssessment], verdict: Verdict, records: Sequence[RecordAssessment]
) -> Ruling:
    """Say which of the methods that are due do not show compliance."""
    by_analysis = any(one.method.method == "analysis" and one.outcome != "no_record" for one in due)
    reasons = [analysed.reason] if by_analysis and analysed.verdict is verdict and analysed.reason else []
    others = [one for one in due if one.method.method != "analysis" or one.outcome == "no_record"]
    lacking = [one for one in others if _verdict(one) is verdict] if verdict is Verdict.OPEN else []
    reasons += [words for one in lacking for words in _unshown(one, records)]
    return Ruling(verdict, "; ".join(dict.fromkeys(reasons)), True if lacking else analysed.due, analysed.waived)


def _verdict(one: MethodAssessment) -> Verdict:
    return one.outcome if isinstance(one.outcome, Verdict) else Verdict.OPEN


def _violated_unasked(analysed: Ruling, methods: tuple[MethodAssessment, ...]) -> bool:
    """Whether a limit is violated that no analysis is to show: what the loop does not do, no test will find."""
    return analysed.verdict is Verdict.NON_COMPLIANT and all(one.method.method != "analysis" for one in methods)


def _unshown(one: MethodAssessment, records: Sequence[RecordAssessment]) -> list[str]:
    name = one.method.method.replace("_", " ")
    if one.outcome == "no_record":
        return [f"{name} is due and has no record"]
    of_kind = [
        each for each in records if each.evidence.id in one.records and (each.stale or each.verdict is Verdict.OPEN)
    ]
    current = [each for each in of_kind if not each.stale] or of_kind
    return [f"{name} is due, and {record_words(each)}" for each in current]


def _later(analysed: Ruling, methods: tuple[MethodAssessment, ...]) -> Ruling:
    """Return what stands while no method is due: it does not hold this review, unless a limit is violated already."""
    if _violated_unasked(analysed, methods):
        return analysed
    when = listed(dict.fromkeys(f"{one.method.method} at {one.method.stage}" for one in methods))
    later = f"nothing is due yet ({when})"
    if analysed.verdict is Verdict.COMPLIANT:
        return Ruling(Verdict.COMPLIANT, None, due=False)
    waiting = analysed.verdict is Verdict.OPEN
    reason = later if waiting else f"{analysed.reason}; {later}"
    return Ruling(analysed.verdict, reason, due=False, waived=analysed.waived)


def listed(names: Iterable[str]) -> str:
    """Join names as a sentence does."""
    every = list(names)
    return every[0] if len(every) == 1 else f"{', '.join(every[:-1])} and {every[-1]}"
