"""One requirement with all above and below it, for the terminal: what it rests on and what shows it."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from specgate.report.clean import cleaned
from specgate.report.columns import wrapped
from specgate.report.parts import matrix
from specgate.report.words import LEVELS, METHODS, STANDINGS, VERDICTS, amount, spaced
from specgate.review.types import EvidenceReview, RequirementReview, Review, WaiverReview

_INDENT = "  "


def render(review: Review, name: str, *, width: int) -> str:
    """Return a requirement of a review in words, ending in a line feed; `name` must be one of it."""
    shown = cleaned(review)
    lines = [*_head(shown, name, width)]
    for title, part in _PARTS:
        body = list(part(shown, name, width))
        if body:
            lines += ["", title, *body]
    return "\n".join(line.rstrip() for line in lines) + "\n"


def _head(review: Review, name: str, width: int) -> Iterator[str]:
    one = review.requirements[name]
    yield _line(review, name)
    yield from wrapped(one.text, width, _INDENT, _INDENT)
    if one.reason:
        yield from wrapped(one.reason, width, _INDENT + "because ", _INDENT)
    for word, value in (("owner", one.owner), ("rationale", one.rationale)):
        if value:
            yield from wrapped(f"{word}: {value}", width, _INDENT, _INDENT * 2)
    yield f"{_INDENT}{one.location.path}:{one.location.line}:{one.location.column}"


def _line(review: Review, name: str) -> str:
    """Name a requirement with its verdict and standing; one that there is none of as such."""
    one = review.requirements.get(name)
    if one is None:
        return f"? {name} (there is none)"
    verdict, standing = VERDICTS[one.verdict], STANDINGS.get(one.standing or "")
    waived = ", waived" if one.waived else ""
    basis = f", {standing.word}" if standing is not None and standing.key != "sound" else ""
    return f"{verdict.shape} {name}: {verdict.word}{waived}{basis}{f'  {one.title}' if one.title else ''}"


def _above(review: Review, name: str, width: int) -> Iterator[str]:
    yield from _tree(review, name, lambda one: one.derived_from)
    external = review.requirements[name].external
    if external:
        place = f", {external['place']}" if external.get("place") is not None else ""
        yield f"{_INDENT}from {external.get('document')}{place}"


def _below(review: Review, name: str, width: int) -> Iterator[str]:
    yield from _tree(review, name, lambda one: one.derived)


def _tree(review: Review, name: str, step: Callable[[RequirementReview], tuple[str, ...]]) -> Iterator[str]:
    """Give what is reached from a requirement, each unfolded once; without recursion, chains may be long."""
    seen = {name}
    waiting = [(each, 1) for each in reversed(step(review.requirements[name]))]
    while waiting:
        here, depth = waiting.pop()
        again = " (above)" if here in seen else ""
        yield f"{_INDENT * min(depth, 20)}{_line(review, here)}{again}"
        if here not in seen and here in review.requirements:
            seen.add(here)
            waiting += [(each, depth + 1) for each in reversed(step(review.requirements[here]))]


def _allocated(review: Review, name: str, width: int) -> Iterator[str]:
    for item in review.requirements[name].allocated_to:
        kind = "loop" if item in review.loops else "subsystem" if item in review.specification.subsystems else "unknown"
        yield f"{_INDENT}{item} ({kind})"


def _limits(review: Review, name: str, width: int) -> Iterator[str]:
    for line in matrix.row(review, name).lines:
        verdict, standing = line.verdict, line.standing
        words = f"{verdict.shape} {line.measure} of {line.on}: {line.result.whole}, {line.limit}, {verdict.word}"
        stands = f", {standing.word}" if standing is not None else ""
        yield from wrapped(f"{words}; {line.basis}{stands}", width, _INDENT, _INDENT * 2)


def _methods(review: Review, name: str, width: int) -> Iterator[str]:
    for one in review.requirements[name].methods:
        outcome = METHODS.get(one.outcome, METHODS["no_record"])
        stage = f" at {one.stage}" if one.stage else ""
        by = f" ({', '.join(one.evidence)})" if one.evidence else ""
        yield f"{_INDENT}{outcome.shape} {spaced(one.method)}{stage}: {outcome.word}{by}"


def _evidence(review: Review, name: str, width: int) -> Iterator[str]:
    for one in review.requirements[name].evidence:
        yield from wrapped(_record(one), width, _INDENT, _INDENT * 2)


def _record(one: EvidenceReview) -> str:
    verdict = VERDICTS[one.verdict]
    date = f", {one.date}" if one.date else ""
    numbers = ", ".join(map(amount, one.results)) or spaced(one.outcome or "")
    spread = f" ± {amount(one.expanded_uncertainty)}" if one.expanded_uncertainty is not None else ""
    stale = f"; on revision {one.design_revision}, so that it shows nothing of this one" if one.stale else ""
    return f"{verdict.shape} {one.id}, {spaced(one.kind)}{date}: {numbers}{spread}: {verdict.word}{stale}"


def _waivers(review: Review, name: str, width: int) -> Iterator[str]:
    for one in review.requirements[name].waivers:
        yield from wrapped(_waiver(one), width, _INDENT, _INDENT * 2)


def _waiver(one: WaiverReview) -> str:
    state = f"not in force: {one.lapsed}" if one.lapsed else "in force" if one.needed else "not needed"
    until = f" until {one.expires}" if one.expires else ""
    short = f"; not enough: {one.short}" if one.short else ""
    return f"{one.id}, {one.kind} by {one.approved_by}, {one.approved_on}{until}: {one.reason} ({state}{short})"


def _budget(review: Review, name: str, width: int) -> Iterator[str]:
    budget = review.requirements[name].budget
    if budget is None:
        return
    yield f"{_INDENT}{spaced(budget.combine)} of {', '.join(one.id for one in budget.shares) or 'nothing'}"
    for word, left in (("limits", budget.left_over), ("results", budget.left)):
        if left is not None:
            yield f"{_INDENT}the {word} of its shares leave {amount(left)}"
    if budget.reason:
        yield from wrapped(budget.reason, width, _INDENT, _INDENT * 2)


def _rests_on(review: Review, name: str, width: int) -> Iterator[str]:
    rests = ", ".join(review.requirements[name].rests_on)
    if rests:
        yield from wrapped(rests, width, _INDENT, _INDENT)


def _findings(review: Review, name: str, width: int) -> Iterator[str]:
    for one in review.findings:
        if one.requirement == name:
            place = f"{one.location.path}:{one.location.line}:{one.location.column}"
            words = f"{place}: {LEVELS[one.level].word}: {one.message} [{one.rule}]"
            yield from wrapped(words, width, _INDENT, _INDENT * 2)


_PARTS: tuple[tuple[str, Callable[[Review, str, int], Iterator[str]]], ...] = (
    ("Above it", _above),
    ("Below it", _below),
    ("Allocated to", _allocated),
    ("Limits", _limits),
    ("Verification", _methods),
    ("Evidence", _evidence),
    ("Waivers and deviations", _waivers),
    ("Budget", _budget),
    ("Rests on", _rests_on),
    ("Findings", _findings),
)
