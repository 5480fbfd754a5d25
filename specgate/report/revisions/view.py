"""The one view model of differences: everything that the terminal, the HTML and the PDF show of them, in words.

It computes nothing that is not in the Differences: it chooses, rounds and words.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable

from specgate.report.clean import cleaned
from specgate.report.parts import shown
from specgate.report.revisions.changes import ChangeGroup, groups
from specgate.report.revisions.plots import Plot, plots
from specgate.report.words import LEVELS, OUTCOMES, STANDINGS, VERDICTS, Status, counted, limit, listed, spaced
from specgate.review.types import FindingReview
from specgate.revisions.findings import RESTATING
from specgate.revisions.types import (
    CriterionDifference,
    CriterionState,
    Differences,
    RequirementDifference,
    RequirementState,
    Side,
    Worsening,
)
from specgate.terms.cautions import CAUTIONS
from specgate.terms.records import record

JUDGED = {
    "worse": Status("worse", "worse", "↓", 0),
    "mixed": Status("worse", "worse and better", "↕", 1),
    "removed": Status("worse", "removed", "−", 2),
    "changed": Status("changed", "changed", "→", 3),
    "added": Status("changed", "added", "+", 4),
    "better": Status("better", "better", "↑", 5),
}
_NAMED = ("parameter", "subsystem", "loop", "response", "break", "requirement", "document")
ABSENT = Status("note", "not there", "–", 3)


@record
class Turn:
    """A state before and now."""

    old: Status
    new: Status

    @property
    def moved(self) -> bool:
        """Whether the two differ."""
        return self.old.key != self.new.key


@record
class CriterionRow:
    """A criterion of which something is otherwise; texts that are the same on both sides stand under `new` alone."""

    measure: str
    on: str
    limit: tuple[str, str]
    value: tuple[str, str]
    reserve: tuple[str, str]
    verdict: Turn


@record
class RequirementRow:
    """A requirement that stands otherwise than before."""

    id: str
    renamed: str
    title: str
    judged: Status
    verdict: Turn
    standing: Turn | None
    criteria: tuple[CriterionRow, ...]
    because: str
    unexplained: bool
    touched: str
    place: str


@record
class WorseRow:
    """One thing that got worse: what kind of thing, which one, and how."""

    kind: str
    name: str
    words: str
    because: str
    place: str


@record
class FindingRow:
    """A finding that is new or gone."""

    level: Status
    rule: str
    message: str
    place: str


@record
class FindingList:
    """Findings, and how many more only say again what stands with the requirements."""

    rows: tuple[FindingRow, ...]
    restating: int


@record
class SideRow:
    """The title block of one side."""

    document: str
    title: str
    revision: str
    date: str
    tool: str
    gate: Status


@record
class View:
    """Differences, section by section."""

    old: SideRow
    new: SideRow
    worse: tuple[WorseRow, ...]
    sentence: str
    counts: tuple[tuple[Status, int], ...]
    remarks: tuple[str, ...]
    unsigned: tuple[RequirementRow, ...]
    """Requirements whose verdict or standing is not the one that the old revision was signed with."""
    roles: str
    requirements: tuple[RequirementRow, ...]
    changes: tuple[ChangeGroup, ...]
    plots: tuple[Plot, ...]
    new_findings: FindingList
    gone_findings: FindingList
    tool: str
    cautions: tuple[str, ...]


def view(found: Differences, drawable: Callable[[str], bool] = lambda character: True) -> View:
    """Return the view of differences; characters that `drawable` denies are named by their code point."""
    found = cleaned(found, drawable)
    rows = tuple(_requirement(one) for one in found.requirements)
    number = len(found.worse)
    return View(
        old=_side(found.old),
        new=_side(found.new),
        worse=tuple(_worse(one, rows) for one in found.worse),
        sentence=f"{counted(number, 'thing')} got worse." if number else "Nothing got worse.",
        counts=_counts(rows),
        remarks=found.remarks,
        unsigned=tuple(row for row in rows if _unsigned(row)),
        roles=listed(found.old.project.sign_off),
        requirements=rows,
        changes=groups(found.changes),
        plots=plots(found.responses),
        new_findings=_findings(found.new_findings),
        gone_findings=_findings(found.gone_findings),
        tool=f"{found.tool.name} {found.tool.version}",
        cautions=CAUTIONS,
    )


def _side(side: Side) -> SideRow:
    about = side.project
    return SideRow(
        document=about.id,
        title=about.title,
        revision=about.revision,
        date=about.date or "undated",
        tool=f"{side.tool.name} {side.tool.version}",
        gate=OUTCOMES.get(side.gate.outcome, OUTCOMES["hold"]),
    )


def _counts(rows: tuple[RequirementRow, ...]) -> tuple[tuple[Status, int], ...]:
    found = Counter(row.judged.word for row in rows)
    return tuple((status, found[status.word]) for status in JUDGED.values() if found[status.word])


def _unsigned(row: RequirementRow) -> bool:
    return row.verdict.old is not ABSENT and (row.verdict.moved or (row.standing is not None and row.standing.moved))


# --- what got worse -------------------------------------------------------------------------------------------


def _worse(one: Worsening, rows: tuple[RequirementRow, ...]) -> WorseRow:
    row = next((row for row in rows if row.id == one.name), None)
    place = "" if one.location is None else f"{one.location.path}:{one.location.line}"
    because = row.because if row is not None and one.kind != "finding" else ""
    return WorseRow(spaced(one.kind), one.name, _how(one, row), because, place)


def _how(one: Worsening, row: RequirementRow | None) -> str:
    if one.kind == "finding":
        return one.message or ""
    if one.kind == "gate":
        return "it passed, and now it holds"
    if one.kind == "removed":
        return f"it was {_word(one.old)} and is no longer there"
    turned = f"{_word(one.old)} → {_word(one.new)}"
    if one.on is not None:
        return f"{one.on}: {turned}"
    numbers = [_numbers(each) for each in row.criteria if each.verdict.moved] if row and one.kind == "verdict" else []
    return f"{turned}: {'; '.join(numbers)}" if numbers else turned


def _word(key: str | None) -> str:
    known = VERDICTS | STANDINGS
    return known[key].word if key in known else spaced(key or "absent")


def _numbers(row: CriterionRow) -> str:
    value = f"{row.value[0]} → {row.value[1]}" if row.value[0] else row.value[1]
    bound = f"{row.limit[0]} → {row.limit[1]}" if row.limit[0] else row.limit[1]
    return f"{row.measure} of {row.on} {value}, limit {bound}"


# --- requirements ---------------------------------------------------------------------------------------------


def _requirement(one: RequirementDifference) -> RequirementRow:
    old, new = one.old, one.new
    there = new or old
    assert there is not None
    standing = Turn(_standing(old), _standing(new))
    known = any(state is not None and state.standing is not None for state in (old, new))
    return RequirementRow(
        id=one.id,
        renamed=old.id if old is not None and new is not None and old.id != new.id else "",
        title=there.title or "",
        judged=JUDGED["removed" if new is None else "added" if old is None else one.judged],
        verdict=Turn(_verdict(old), _verdict(new)),
        standing=standing if known else None,
        criteria=tuple(_criterion(each) for each in one.criteria),
        because=_because(one.because),
        unexplained=one.unexplained,
        touched=listed(one.touched),
        place=f"{there.location.path}:{there.location.line}",
    )


def _because(causes: tuple[str, ...]) -> str:
    """Return causes as a sentence part, those of one kind together: `parameters a and b; subsystem c`."""
    kinds: dict[str, list[str]] = {}
    for one in causes:
        kind, _, name = one.partition(" ")
        kinds.setdefault(kind if kind in _NAMED else "", []).append(name if kind in _NAMED else one)
    return "; ".join(
        f"{kind}{'s' if len(names) > 1 else ''} {listed(names)}" if kind else listed(names)
        for kind, names in kinds.items()
    )


def _verdict(state: RequirementState | None) -> Status:
    return ABSENT if state is None else VERDICTS.get(state.verdict, ABSENT)


def _standing(state: RequirementState | None) -> Status:
    return ABSENT if state is None or state.standing is None else STANDINGS.get(state.standing, ABSENT)


def _criterion(one: CriterionDifference) -> CriterionRow:
    there = one.new or one.old
    assert there is not None
    return CriterionRow(
        measure=spaced(one.measure),
        on=there.on,
        limit=_pair(*(limit(state.limit) if state else "" for state in (one.old, one.new))),
        value=_pair(_value(one.old), _value(one.new)),
        reserve=_pair(_reserve(one.old), _reserve(one.new)),
        verdict=Turn(*(VERDICTS.get(state.verdict, ABSENT) if state else ABSENT for state in (one.old, one.new))),
    )


def _pair(old: str, new: str) -> tuple[str, str]:
    return ("", new) if old == new else (old or "–", new or "–")


def _value(state: CriterionState | None) -> str:
    return "" if state is None else shown.result(state.result, state.limit).whole


def _reserve(state: CriterionState | None) -> str:
    if state is None:
        return ""
    text = shown.reserve(state.reserve, state.result, state.limit)
    unit = state.reserve.unit if state.reserve else "1"
    return text if unit == "1" or not text or text == "unlimited" else f"{text} {unit}"


def _findings(found: tuple[FindingReview, ...]) -> FindingList:
    own = [one for one in found if one.rule not in RESTATING]
    return FindingList(tuple(map(_finding, own)), len(found) - len(own))


def _finding(one: FindingReview) -> FindingRow:
    place = f"{one.location.path}:{one.location.line}:{one.location.column}"
    return FindingRow(LEVELS.get(one.level, LEVELS["note"]), one.rule, one.message, place)
