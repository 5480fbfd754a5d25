"""From need to requirement to loop to evidence; what is open; what the rules found."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from specgate.report import anchors
from specgate.report.parts import models, ranges
from specgate.report.parts.matrix import Method, row
from specgate.report.words import LEVELS, VERDICTS, Status, counted, listed, spaced
from specgate.review.types import FindingReview, RequirementReview, Review, WaiverReview
from specgate.terms.records import record


@record
class TraceLine:
    """A requirement in the tree of derivations; one with several parents is shown under each, unfolded once."""

    level: int
    id: str
    anchor: str
    text: str
    allocated_to: tuple[tuple[str, str | None], ...]
    rests_on: str
    methods: tuple[Method, ...]
    verdict: Status
    repeated: bool


@record
class Finding:
    """What a rule has to say, with its place."""

    level: Status
    rule: str
    message: str
    place: str
    related: tuple[tuple[str, str], ...]
    anchor: str | None
    subject: str


@record
class OpenPoint:
    """Something that a signature leaves open, and where it is."""

    kind: str
    subject: str
    anchor: str | None
    words: str


def lines(review: Review) -> tuple[TraceLine, ...]:
    """Return the tree of derivations, needs first; what hangs in a cycle comes last."""
    children: dict[str, list[str]] = {}
    for name, parents in review.trace.items():
        for parent in parents:
            children.setdefault(parent, []).append(name)
    roots = [
        name for name in review.requirements if not any(p in review.requirements for p in review.trace.get(name, ()))
    ]
    seen: set[str] = set()
    found = [line for root in roots for line in _walk(review, root, 0, children, seen)]
    for name in review.requirements:
        if name not in seen:
            found += _walk(review, name, 0, children, seen)
    return tuple(found)


def _walk(review: Review, root: str, level: int, children: dict[str, list[str]], seen: set[str]) -> Iterator[TraceLine]:
    """Yield a requirement and what is below it, without recursion: a chain may be as long as the project."""
    waiting = [(root, level)]
    while waiting:
        name, depth = waiting.pop()
        repeated = name in seen
        seen.add(name)
        yield _line(review, name, depth, repeated)
        if not repeated:
            waiting += [
                (child, depth + 1) for child in reversed(children.get(name, [])) if child in review.requirements
            ]


def _line(review: Review, name: str, level: int, repeated: bool) -> TraceLine:
    requirement = review.requirements[name]
    return TraceLine(
        level=min(level, 6),
        id=name,
        anchor=anchors.row(name),
        text=requirement.title or requirement.text,
        allocated_to=tuple(
            (item, anchors.sheet(item) if item in review.loops else None) for item in requirement.allocated_to
        ),
        rests_on=", ".join(requirement.rests_on),
        methods=row(review, name).methods,
        verdict=VERDICTS[requirement.verdict],
        repeated=repeated,
    )


def findings(review: Review) -> tuple[Finding, ...]:
    """Return all findings, errors first, each level in the order of the files."""
    return tuple(sorted((_finding(review, f) for f in review.findings), key=lambda f: f.level.weight))


def _finding(review: Review, f: FindingReview) -> Finding:
    anchor = anchors.row(f.requirement) if f.requirement in review.requirements and f.requirement else None
    if anchor is None and f.loop in review.loops and f.loop:
        anchor = anchors.sheet(f.loop)
    loop = f"{f.loop}.{f.response}" if f.loop and f.response else f.loop
    return Finding(
        level=LEVELS[f.level],
        rule=f.rule,
        message=f.message,
        place=f"{f.location.path}:{f.location.line}:{f.location.column}",
        related=tuple((f"{r.path}:{r.line}:{r.column}", r.message or "") for r in f.related),
        anchor=anchor,
        subject=f.requirement or loop or f.subsystem or "",
    )


def open_points(review: Review) -> tuple[OpenPoint, ...]:
    """Return what a signature leaves open: waivers, open and inconclusive ones, methods due later, unused parts."""
    points: list[OpenPoint] = []
    for name, requirement in review.requirements.items():
        at = anchors.row(name)
        points += [OpenPoint(one.kind, name, at, _waived(one)) for one in requirement.waivers if one.needed]
        if requirement.verdict == "not_applicable":
            points.append(OpenPoint("not applicable", name, at, _approved(requirement.not_applicable or {})))
        if requirement.verdict == "open":
            points.append(OpenPoint("open", name, at, requirement.reason or "nothing decides it yet"))
        if requirement.standing == "inconclusive":
            points.append(OpenPoint("inconclusive", name, at, _inconclusive(requirement)))
    return (*points, *_due_later(review), *_unused(review))


def _inconclusive(requirement: RequirementReview) -> str:
    if any(criterion.basis.standing == "inconclusive" for criterion in requirement.criteria):
        return "the stated accuracy of its formula does not decide the limit"
    return ranges.undecided(requirement) or models.undecided(requirement)


def _waived(waiver: WaiverReview) -> str:
    """Return what a waiver accepts, why, who approved it and until when it holds."""
    accepted = ", ".join(f"{spaced(key)} {value}" for key, value in waiver.accepts.items())
    until = f" Until {waiver.expires}." if waiver.expires else ""
    lapsed = f" Not in force: {waiver.lapsed}." if waiver.lapsed else ""
    short = f" Not enough: {waiver.short}." if waiver.short else ""
    scope = f" For {waiver.scope}." if waiver.scope else ""
    approved = f"Approved by {waiver.approved_by}, {waiver.approved_on}."
    return f"{waiver.id} accepts {accepted}.{scope} {waiver.reason} {approved}{until}{lapsed}{short}"


def _approved(exemption: Mapping[str, Any]) -> str:
    """Return the reason of a waiver or an exemption and who approved it."""
    by, on = exemption.get("approved_by"), exemption.get("approved_on")
    approved = f"Approved by {by}{f', {on}' if on else ''}." if by else "Nobody is named who approved it."
    return f"{exemption.get('reason', '')} {approved}".strip()


def _due_later(review: Review) -> Iterator[OpenPoint]:
    stages: dict[tuple[str, str], list[str]] = {}
    for name, requirement in review.requirements.items():
        for method in requirement.methods:
            if method.outcome == "due_later":
                stages.setdefault((spaced(method.method), method.stage or "a later stage"), []).append(name)
    for (kind, stage), names in stages.items():
        yield OpenPoint("due later", f"{kind}, {stage}", None, f"{counted(len(names), 'requirement')}: {listed(names)}")


def _unused(review: Review) -> Iterator[OpenPoint]:
    unused = [name for name, part in review.specification.subsystems.items() if not part.used]
    if unused:
        yield OpenPoint(
            "unused",
            counted(len(unused), "subsystem"),
            None,
            f"{listed(unused)}: in no loop, so nothing was shown of it",
        )
