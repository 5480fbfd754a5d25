"""What `diff` prints: what got worse first, then every requirement that stands otherwise, then what was changed."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from specgate.report.columns import GAP, wrapped
from specgate.report.revisions.changes import ChangeRow
from specgate.report.revisions.view import CriterionRow, FindingList, RequirementRow, Turn, View, view
from specgate.report.words import OUTCOMES
from specgate.revisions.types import Differences

_Paint = Callable[[str, str], str]
_COLOURS = {"worse": "31", "better": "32", "changed": "33", "quiet": "2", "bold": "1", "hold": "31", "pass": "32"}


def render(found: Differences, *, width: int, colour: bool) -> str:
    """Return differences as text of at most `width` columns where words allow it, ending in a line feed."""
    paint = _painted if colour else _plain
    return "\n".join(line.rstrip() for line in _lines(view(found), width, paint)) + "\n"


def _plain(text: str, key: str) -> str:
    return text


def _painted(text: str, key: str) -> str:
    return f"\x1b[{_COLOURS[key]}m{text}\x1b[0m" if key in _COLOURS else text


def _lines(seen: View, width: int, paint: _Paint) -> Iterator[str]:
    outcome = OUTCOMES["hold" if seen.worse else "pass"]
    sentence = paint(f"{outcome.shape} {seen.sentence.rstrip('.')}", outcome.key)
    yield f"{sentence}  {_documents(seen)}"
    yield from wrapped(seen.new.title, width)
    if seen.counts:
        yield GAP + GAP.join(paint(f"{s.shape} {number} {s.word}", s.key) for s, number in seen.counts)
    for remark in seen.remarks:
        yield from wrapped(f"note: {remark}", width, hang="    ")
    yield from _worse(seen, width, paint)
    yield from _requirements(seen, width, paint)
    yield from _changes(seen, width, paint)
    yield from _findings("New findings", seen.new_findings, width, paint)
    yield from _findings("Findings that are gone", seen.gone_findings, width, paint)


def _documents(seen: View) -> str:
    old, new = seen.old, seen.new
    if old.document == new.document:
        return f"{new.document} revision {old.revision} → {new.revision}"
    return f"{old.document} revision {old.revision} → {new.document} revision {new.revision}"


def _worse(seen: View, width: int, paint: _Paint) -> Iterator[str]:
    if not seen.worse:
        return
    yield ""
    yield paint("Worse", "bold")
    for row in seen.worse:
        name = "" if row.kind == "gate" else f" {row.name}"
        head = f"{row.kind}{name}: {row.words}"
        lines = list(wrapped(head, width, "  ", "      "))
        yield lines[0].replace(row.kind, paint(row.kind, "worse"), 1)
        yield from lines[1:]
        if row.because:
            yield from (
                paint(line, "quiet") for line in wrapped(f"because of {row.because}", width, "      ", "      ")
            )


def _requirements(seen: View, width: int, paint: _Paint) -> Iterator[str]:
    if not seen.requirements:
        return
    yield ""
    yield paint("Requirements that stand otherwise", "bold")
    for row in seen.requirements:
        yield from _requirement(row, width, paint)


def _requirement(row: RequirementRow, width: int, paint: _Paint) -> Iterator[str]:
    states = [_turn(row.verdict)]
    if row.standing is not None and row.standing.moved:
        states.append(_turn(row.standing))
    renamed = f" (was {row.renamed})" if row.renamed else ""
    mark = f"{row.judged.shape} {row.judged.word}"
    line = f"{mark}  {row.id}{renamed}  {', '.join(states)}" + (f"  {row.title}" if row.title else "")
    lines = list(wrapped(line, width, "  ", "      "))
    yield lines[0].replace(mark, paint(mark, row.judged.key), 1)
    yield from lines[1:]
    for each in row.criteria:
        yield from wrapped(_criterion(each), width, "      ", "          ")
    if row.unexplained:
        words = "nothing that it rests on was changed: the tool or its method was"
        yield from (paint(each, "worse") for each in wrapped(words, width, "      ", "      "))
    if row.because:
        yield from (paint(each, "quiet") for each in wrapped(f"because of {row.because}", width, "      ", "      "))
    if row.touched:
        yield from wrapped(f"rests on {row.touched}, whose issue or date is another", width, "      ", "      ")


def _turn(turn: Turn) -> str:
    return f"{turn.old.word} → {turn.new.word}" if turn.moved else turn.new.word


def _criterion(row: CriterionRow) -> str:
    parts = [f"{row.measure} of {row.on}: {_moved(row.value)}", f"limit {_moved(row.limit)}"]
    if row.reserve != ("", ""):
        parts.append(f"reserve {_moved(row.reserve)}")
    return ", ".join(parts)


def _moved(pair: tuple[str, str]) -> str:
    return f"{pair[0]} → {pair[1]}" if pair[0] else pair[1]


def _changes(seen: View, width: int, paint: _Paint) -> Iterator[str]:
    for group in seen.changes:
        yield ""
        yield paint(f"Changes: {group.title.lower()}", "bold")
        for row in group.rows:
            yield from wrapped(_change(row), width, "  ", "      ")


def _change(row: ChangeRow) -> str:
    head = " ".join(filter(None, (row.name, row.what, row.how)))
    at = f" ({row.place})" if row.place else ""
    if row.pieces:
        marks = {"same": "{}", "old": "[−{}]", "new": "[+{}]"}
        return f"{head}: {' '.join(marks[piece.kind].format(piece.text) for piece in row.pieces)}{at}"
    if row.old or row.new:
        return f"{head}: {row.old or 'none'} → {row.new or 'none'}{at}"
    return f"{head}{at}"


def _findings(title: str, found: FindingList, width: int, paint: _Paint) -> Iterator[str]:
    if not found.rows and not found.restating:
        return
    yield ""
    yield paint(title, "bold")
    for row in found.rows:
        yield from wrapped(f"{row.place}: {row.level.word}: {row.message} [{row.rule}]", width, "  ", "      ")
    if found.restating:
        words = "that say again how requirements stand"
        yield f"  {found.restating} {'more ' if found.rows else ''}{words}"
