"""Page one: may we sign?"""

from __future__ import annotations

import hashlib
import re
from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass

from specgate.report import anchors
from specgate.report.digits import percent
from specgate.report.parts import shown
from specgate.report.words import (
    OUTCOMES,
    SIDES,
    STANDINGS,
    VERDICTS,
    Status,
    amount,
    counted,
    limit_in_words,
    listed,
    titled,
)
from specgate.review.types import CriterionReview, InputReview, RequirementReview, Review

HOLDS_AT_MOST = 12


@dataclass(frozen=True)
class Title:
    """The title block."""

    document: str
    title: str
    revision: str
    date: str
    stage: str
    purpose: str
    units: str
    tool: str


@dataclass(frozen=True)
class Count:
    """How many of a state."""

    status: Status
    number: int


@dataclass(frozen=True)
class Hold:
    """One thing that holds the gate: the sentence, the number that matters, where to read on."""

    sentence: str
    number: str
    anchor: str | None


@dataclass(frozen=True)
class Front:
    """Page one."""

    title: Title
    outcome: Status
    sentence: str
    verdicts: tuple[Count, ...]
    standings: tuple[Count, ...]
    waived: int
    requirements: int
    holds: tuple[Hold, ...]
    more_holds: int
    roles: tuple[str, ...]
    digest: str
    inputs: tuple[InputReview, ...]


def front(review: Review) -> Front:
    """Return page one of a review."""
    verdicts = Counter(r.verdict for r in review.requirements.values())
    standings = Counter(r.standing for r in review.requirements.values() if r.standing)
    holds = [_hold(review, reason) for reason in review.gate.reasons]
    return Front(
        title=_title(review),
        outcome=OUTCOMES[review.gate.outcome],
        sentence=sentence(review),
        verdicts=tuple(Count(status, verdicts[key]) for key, status in VERDICTS.items()),
        standings=tuple(Count(status, standings[key]) for key, status in STANDINGS.items()),
        waived=sum(r.waiver is not None for r in review.requirements.values()),
        requirements=len(review.requirements),
        holds=tuple(holds[:HOLDS_AT_MOST]),
        more_holds=max(0, len(holds) - HOLDS_AT_MOST),
        roles=review.project.sign_off,
        digest=digest(review.inputs),
        inputs=review.inputs,
    )


def _title(review: Review) -> Title:
    project = review.project
    stage = f" at {project.stage}" if project.stage else ""
    return Title(
        document=project.id,
        title=project.title,
        revision=project.revision,
        date=project.date or "undated",
        stage=f"{project.stage}, one of {', '.join(project.stages)}"
        if project.stage and project.stages
        else project.stage or "",
        purpose=f"Compliance of the closed loops with their requirements{stage}, for signature",
        units="as written in the specification; results in the unit of their limit, else SI, rad/s, deg, dB",
        tool=f"{review.tool.name} {review.tool.version}",
    )


def sentence(review: Review) -> str:
    """Return the gate's outcome in a sentence."""
    requirements = review.requirements.values()
    if review.gate.outcome == "pass":
        exempt = sum(r.verdict == "not_applicable" for r in requirements)
        rest = f"; {exempt} not applicable" if exempt else ""
        count = len(review.requirements) - exempt
        return f"Nothing in the project's policy holds the gate: {counted(count, 'requirement')} judged{rest}."
    parts = []
    for key, word in (("non_compliant", "not met"), ("open", "open")):
        count = sum(r.verdict == key for r in requirements)
        if count:
            parts.append(f"{counted(count, 'requirement')} {word}")
    outside = sum(r.standing == "out_of_range" for r in requirements)
    if outside:
        parts.append(f"{counted(outside, 'claim')} outside the range of {'its' if outside == 1 else 'their'} formula")
    errors = sum(f.level == "error" for f in review.findings)
    if errors:
        parts.append(counted(errors, "finding of level error", "findings of level error"))
    return f"{listed(parts)[:1].upper()}{listed(parts)[1:]}." if parts else "See the reasons below."


def _hold(review: Review, reason: str) -> Hold:
    named = next((word for word in _names(reason) if word in review.requirements), None)
    if named is None:
        loop = next((word for word in _names(reason) if word in review.loops), None)
        return Hold(reason, "", anchors.sheet(loop) if loop else "findings")
    requirement = review.requirements[named]
    return Hold(reason, deciding_number(review, requirement, reason), anchors.row(named))


def _names(text: str) -> Iterable[str]:
    return (word.strip(".") for word in re.findall(r"[\w.\-]+", text))


def deciding(requirement: RequirementReview) -> CriterionReview | None:
    """Return the criterion that decides a requirement: the worst verdict, then the worst standing, first as written."""
    return min(
        requirement.criteria,
        key=lambda c: (VERDICTS[c.verdict].weight, STANDINGS[c.basis.standing].weight),
        default=None,
    )


def deciding_number(review: Review, requirement: RequirementReview, reason: str = "") -> str:
    """Return the one number that matters of a requirement, in a phrase; empty where there is none."""
    criterion = deciding(requirement)
    if criterion is None:
        return ""
    found = shown.result(criterion.result, criterion.limit)
    if found.value == "none":
        return ""
    basis = criterion.basis
    error = basis.error.relative if basis.error else None
    if error is not None and basis.formula and (criterion.verdict == "compliant" or "range" in reason):
        side = SIDES.get(basis.error.side, "") if basis.error else ""
        return f"formula {amount(basis.formula)}, proved {found.whole}: {percent(error)} {side}".strip()
    name = titled(criterion.measure, review.definitions).lower()
    return f"{name} {found.whole}, allowed {limit_in_words(criterion.limit)}"


def digest(inputs: Iterable[InputReview]) -> str:
    """Return one digest over all inputs: SHA-256 of their lines `digest, two spaces, path`, sorted by path."""
    lines = (f"{item.sha256}  {item.path}\n" for item in sorted(inputs, key=lambda item: item.path))
    return hashlib.sha256("".join(lines).encode()).hexdigest()
