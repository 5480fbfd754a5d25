"""Page one: may we sign?"""

from __future__ import annotations

import hashlib
import re
from collections import Counter
from collections.abc import Iterable

from specgate.report import anchors
from specgate.report.digits import percent
from specgate.report.parts import ranges, shown
from specgate.report.words import (
    LEVELS,
    OUTCOMES,
    SIDES,
    STANDINGS,
    VERDICTS,
    Status,
    amount,
    counted,
    demanded,
    listed,
    spaced,
    titled,
)
from specgate.review.types import CriterionReview, InputReview, RequirementReview, Review
from specgate.terms.records import record

HOLDS_AT_MOST = 10


@record
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


@record
class Count:
    """How many of a state."""

    status: Status
    number: int


@record
class Hold:
    """One thing that holds the gate: a requirement (or none) with its states, the number that decides it, else why."""

    requirement: str
    states: tuple[Status, ...]
    words: str
    anchor: str


@record
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
    loosened: tuple[str, ...]
    """Thresholds of the catalogue that the project has loosened: what follows from them has no stated accuracy."""
    roles: tuple[str, ...]
    digest: str
    inputs: tuple[InputReview, ...]


def front(review: Review) -> Front:
    """Return page one of a review."""
    verdicts = Counter(r.verdict for r in review.requirements.values())
    standings = Counter(r.standing for r in review.requirements.values() if r.standing)
    holds = _holds(review)
    return Front(
        title=_title(review),
        outcome=OUTCOMES[review.gate.outcome],
        sentence=sentence(review),
        verdicts=tuple(Count(status, verdicts[key]) for key, status in VERDICTS.items()),
        standings=tuple(Count(status, standings[key]) for key, status in STANDINGS.items()),
        waived=sum(r.waived or r.waiver is not None for r in review.requirements.values()),
        requirements=len(review.requirements),
        holds=holds[:HOLDS_AT_MOST],
        more_holds=max(0, len(holds) - HOLDS_AT_MOST),
        loosened=tuple(
            f"{titled(str(one['approximation']), review.definitions)}, {spaced(str(one['condition']))}: "
            f"{one['project']} in place of {one['catalogue']}"
            for one in review.policy.changed_thresholds
            if one["change"] == "looser"
        ),
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
    if review.gate.since is not None:
        number = counted(len(review.gate.reasons), "thing") if review.gate.reasons else "Nothing"
        return f"{number} got worse since the baseline of {review.gate.since}; what was so then does not hold the gate."
    if review.gate.outcome == "pass":
        exempt = sum(r.verdict == "not_applicable" for r in review.requirements.values())
        rest = f", {exempt} not applicable" if exempt else ""
        judged = counted(len(review.requirements) - exempt, "requirement")
        return f"Nothing that the project's policy names holds the gate: {judged} judged{rest}."
    holds = _holds(review)
    named = sum(bool(hold.requirement) for hold in holds)
    others = len(holds) - named
    parts = [counted(named, "requirement")] if named else []
    parts += [counted(others, "other error" if named else "error")] if others else []
    return f"It is held by {listed(parts)}." if parts else "It is held."


def _holds(review: Review) -> tuple[Hold, ...]:
    """Return what holds the gate, all that holds it for one requirement together, what only passes it on last."""
    reasons: dict[str, list[str]] = {}
    for reason in review.gate.reasons:
        first = reason.partition(" ")[0].rstrip(":")
        reasons.setdefault(first if first in review.requirements else reason, []).append(reason)
    passed_on = {name for name, r in review.requirements.items() if r.decided_by == "derived" and r.derived}
    ordered = sorted(reasons.items(), key=lambda item: item[0] in passed_on)
    return tuple(_hold(review, key, said) for key, said in ordered)


def _hold(review: Review, key: str, said: list[str]) -> Hold:
    if key not in review.requirements:
        loop = next((word for word in re.findall(r"[\w.-]+", key) if word in review.loops), None)
        return Hold("", (), key, anchors.sheet(loop) if loop else "findings")
    requirement = review.requirements[key]
    held = review.policy.hold_on
    states = [VERDICTS[requirement.verdict]] if requirement.verdict in held else []
    states += [STANDINGS[requirement.standing]] if requirement.standing in held else []
    reason = requirement.reason or ""
    words = reason if reason and any(reason in one for one in said) else said[0].removeprefix(key).lstrip(": ")
    numbers = deciding_numbers(review, requirement)
    return Hold(key, tuple(states) or (LEVELS["error"],), numbers or words, anchors.row(key))


def deciding_numbers(review: Review, requirement: RequirementReview) -> str:
    """Return the numbers that decide a requirement: result and limit, the error of a formula, signals out of range."""
    parts = []
    judged = min(requirement.criteria, key=lambda c: VERDICTS[c.verdict].weight, default=None)
    if judged is not None and judged.verdict != "compliant":
        found = shown.result(judged.result, judged.limit)
        if found.value != "none":
            name = titled(judged.measure, review.definitions)
            parts.append(f"{name} {found.whole}, {demanded(judged.limit)}")
    audited = min(requirement.criteria, key=lambda c: STANDINGS[c.basis.standing].weight, default=None)
    if audited is not None and audited.basis.standing != "sound":
        parts.append(_missed(audited))
        parts.append(ranges.beyond(requirement))
    return "; ".join(filter(None, parts))


def _missed(criterion: CriterionReview) -> str:
    """Return how far the formula of a claim, or the claim itself where it has none here, is from the true value."""
    basis = criterion.basis
    true = shown.result(criterion.result, criterion.limit).whole
    if true == "none":
        return ""
    if basis.error is None or basis.error.relative is None or basis.formula is None:
        return f"claimed {amount(basis.claimed)}, true {true}" if basis.claimed else ""
    side = SIDES.get(basis.error.side, "")
    return f"formula {amount(basis.formula)}, true {true}: {percent(basis.error.relative)} {side}".strip()


def digest(inputs: Iterable[InputReview]) -> str:
    """Return one digest over all inputs: SHA-256 of their lines `digest, two spaces, path`, sorted by path."""
    lines = (f"{item.sha256}  {item.path}\n" for item in sorted(inputs, key=lambda item: item.path))
    return hashlib.sha256("".join(lines).encode()).hexdigest()
