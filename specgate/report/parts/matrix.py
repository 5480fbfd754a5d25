"""The compliance matrix: a row for each requirement, grouped by parent, a line for each of its limits."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from specgate.report import anchors, digits
from specgate.report.figures.reserve import ReserveBar
from specgate.report.parts import shown
from specgate.report.words import METHODS, STANDINGS, VERDICTS, Status, arguments, limit, listed, spaced, titled
from specgate.review.types import CriterionReview, RequirementReview, Review
from specgate.terms.records import record

ROWS_AT_MOST = 400
"""Requirements that a printed matrix holds; beyond, the compliant and sound ones are left to the attached result."""


@record
class Line:
    """One limit of a requirement."""

    measure: str
    on: str
    asked: str
    limit: str
    result: shown.Shown
    value: str
    reserve: str
    reserve_unit: str
    relative: str
    bar: ReserveBar | None
    verdict: Status
    standing: Status | None
    basis: str
    reason: str
    evidence: str | None
    """Anchor of the audit of its basis, else of its response or loop."""


@record
class Method:
    """A verification method, when it is due, how it stands."""

    method: str
    stage: str
    outcome: Status


@record
class Row:
    """A requirement."""

    id: str
    anchor: str
    title: str | None
    text: str
    owner: str
    verdict: Status
    standing: Status | None
    waived: bool
    methods: tuple[Method, ...]
    lines: tuple[Line, ...]
    reason: str
    decided_by: str
    aside: str
    """Who owns it, how it is verified, what decides it."""
    loops: tuple[str, ...]
    also_under: tuple[str, ...]
    place: str


@record
class Group:
    """The requirements derived from one parent (None: those without one)."""

    parent: Row | None
    rows: tuple[Row, ...]


def groups(review: Review) -> tuple[Group, ...]:
    """Return all requirements, each once, under the first of its parents that exists."""
    known = review.requirements
    rows = {name: row(review, name) for name in known}
    children: dict[str | None, list[Row]] = {}
    for name, requirement in known.items():
        parent = next((p for p in requirement.derived_from if p in known and p != name), None)
        children.setdefault(parent, []).append(rows[name])
    order: list[str | None] = [None, *known]
    return tuple(
        Group(None if parent is None else rows[parent], tuple(children[parent]))
        for parent in order
        if parent in children
    )


def row(review: Review, name: str) -> Row:
    """Return the row of a requirement."""
    requirement = review.requirements[name]
    lines = tuple(_line(review, name, number, c) for number, c in enumerate(requirement.criteria))
    values = digits.aligned([line.result.value for line in lines])
    lines = tuple(_with_value(line, value) for line, value in zip(lines, values, strict=True))
    return Row(
        id=name,
        anchor=anchors.row(name),
        title=requirement.title,
        text=requirement.text,
        owner=requirement.owner or "",
        verdict=VERDICTS[requirement.verdict],
        standing=STANDINGS.get(requirement.standing or ""),
        waived=requirement.waived or requirement.waiver is not None,
        methods=tuple(
            Method(spaced(m.method), m.stage or "", METHODS.get(m.outcome, METHODS["no_record"]))
            for m in requirement.methods
        ),
        lines=lines,
        reason=_reason(requirement),
        decided_by=requirement.decided_by,
        aside=_aside(requirement),
        loops=_loops(requirement, review.loops),
        also_under=requirement.derived_from[1:],
        place=f"{requirement.location.path}:{requirement.location.line}",
    )


def _with_value(line: Line, value: str) -> Line:
    return replace(line, value=value)


def _aside(requirement: RequirementReview) -> str:
    methods = " · ".join(
        f"{spaced(m.method)}{f' ({m.stage})' if m.stage else ''}: {METHODS.get(m.outcome, METHODS['no_record']).word}"
        for m in requirement.methods
    )
    return "; ".join(filter(None, (requirement.owner, methods, _decided(requirement))))


def _decided(requirement: RequirementReview) -> str:
    """Return what decides a requirement that has no limit of its own."""
    if requirement.criteria or requirement.verdict == "not_applicable":
        return ""
    if requirement.decided_by == "derived":
        return f"decided by {listed(requirement.derived)}" if requirement.derived else "nothing is derived from it"
    return "decided by evidence" if requirement.decided_by == "evidence" else "no limit"


def _reason(requirement: RequirementReview) -> str:
    """Return why it is as it is, unless a number in the columns already says so."""
    told = any(c.verdict == "non_compliant" and c.result.value is not None for c in requirement.criteria)
    return "" if told else requirement.reason or _exemption(requirement)


def _exemption(requirement: RequirementReview) -> str:
    words = requirement.not_applicable or {}
    by = f" ({words['approved_by']}, {words.get('approved_on', 'undated')})" if "approved_by" in words else ""
    return f"{words['reason']}{by}" if "reason" in words else ""


def _loops(requirement: RequirementReview, known: Mapping[str, object]) -> tuple[str, ...]:
    subjects = (c.on.partition(".")[0] for c in requirement.criteria)
    return tuple(dict.fromkeys(name for name in (*subjects, *requirement.allocated_to) if name in known))


def _line(review: Review, name: str, number: int, criterion: CriterionReview) -> Line:
    found = shown.result(criterion.result, criterion.limit)
    left = shown.reserve(criterion.reserve, criterion.result, criterion.limit)
    relative = criterion.reserve.relative if criterion.reserve else None
    share = "" if relative is None else digits.percent(relative)
    unit = criterion.reserve.unit if criterion.reserve else ""
    return Line(
        measure=titled(criterion.measure, review.definitions),
        on=criterion.on,
        asked=arguments(criterion.arguments),
        limit=limit(criterion.limit),
        result=found,
        value=found.value,
        reserve=left,
        reserve_unit="" if unit == "1" or not left or left == "unlimited" else unit,
        relative=share,
        bar=None if relative is None else ReserveBar(relative, f"reserve {share} of the limit"),
        verdict=VERDICTS[criterion.verdict],
        standing=STANDINGS.get(criterion.standing),
        basis=" and ".join(spaced(item) for item in criterion.basis.chain) or spaced(criterion.basis.kind),
        reason=criterion.reason or "",
        evidence=evidence(review, name, number, criterion),
    )


def evidence(review: Review, name: str, number: int, criterion: CriterionReview) -> str | None:
    """Return the place that shows why: the audit of the basis, else the response, else the loop's sheet."""
    if criterion.basis.kind == "approximation":
        return anchors.audit(name, number)
    loop, _, subject = criterion.on.partition(".")
    if loop not in review.loops:
        return None
    return anchors.plot(loop, subject) if subject in review.loops[loop].responses else anchors.sheet(loop)


def printed(all_groups: tuple[Group, ...], at_most: int = ROWS_AT_MOST) -> tuple[tuple[Group, ...], int]:
    """Return groups cut to `at_most` rows, the ones that need attention first, and how many rows were left out."""
    total = sum(len(group.rows) for group in all_groups)
    if total <= at_most:
        return all_groups, 0
    rows = [row for group in all_groups for row in group.rows]
    pressing = sorted(range(total), key=lambda k: (_calm(rows[k]), k))
    kept = {rows[k].id for k in pressing[:at_most]}
    cut = (Group(g.parent, tuple(r for r in g.rows if r.id in kept)) for g in all_groups)
    return tuple(group for group in cut if group.rows), total - at_most


def _calm(row: Row) -> bool:
    return row.verdict.weight >= 2 and (row.standing is None or row.standing.key == "sound")
